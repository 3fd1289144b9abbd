"""Command line: options, exit codes, streams. No arithmetic, and the only code that prints or exits.

Exit status: 0 meets, also under conditions (or: read, answered); 1 does not meet, not proven, not assessable;
2 the input or the command cannot be used; 130 stopped by the user.
"""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Sequence
from itertools import pairwise

from yieldosc.cli.arguments import parse
from yieldosc.cli.streams import Streams
from yieldosc.errors import InputError

STOPPED = 130


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command and return its exit status."""
    words = list(sys.argv[1:] if argv is None else argv)
    streams = Streams.standard(json_target=_json_target(words), quiet="--quiet" in words)
    try:
        arguments = parse(words)
        status: int = arguments.run(arguments, streams)
        sys.stdout.flush()
        return status
    except InputError as error:
        if streams.json_target == "-":
            print(json.dumps({"findings": [f.to_dict() for f in error.findings]}, ensure_ascii=False, indent=2))
        streams.show_findings(error.findings, always=True)
        return 2
    except KeyboardInterrupt:
        print("stopped; nothing was written", file=sys.stderr)
        return STOPPED
    except BrokenPipeError:
        # the reader of our output has gone; keep the interpreter from complaining when it flushes at exit
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except SystemExit as leaving:  # --help and --version
        return int(leaving.code or 0)


def _json_target(words: Sequence[str]) -> str | None:
    """Where JSON goes, known before the command line is understood, so that its errors can be JSON too."""
    for word, following in pairwise([*words, ""]):
        if word == "--json":
            return following
        if word.startswith("--json="):
            return word.removeprefix("--json=")
    return None
