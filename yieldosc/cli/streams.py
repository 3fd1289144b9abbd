"""Where output goes: results to stdout, progress and findings to stderr, JSON where it was asked for."""

from __future__ import annotations

import json
import sys
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from rich.console import Console

from yieldosc.cli.files import write_whole
from yieldosc.errors import Finding
from yieldosc.reports.console import make_console, print_findings


@dataclass(frozen=True)
class Streams:
    """Consoles for results and for messages; `json_target` is "-", a path, or None."""

    results: Console
    messages: Console
    json_target: str | None
    quiet: bool

    @classmethod
    def standard(cls, *, json_target: str | None, quiet: bool) -> Streams:
        return cls(make_console(sys.stdout), make_console(sys.stderr), json_target, quiet)

    @property
    def silent(self) -> bool:
        """True when stdout must carry JSON only."""
        return self.json_target == "-"

    def show_findings(self, findings: Iterable[Finding], *, always: bool = False) -> None:
        """Findings to stderr, unless --quiet asked for none of them; errors are always shown."""
        shown = [f for f in findings if always or not self.quiet or f.level == "error"]
        if shown:
            print_findings(shown, self.messages)

    def write_json(self, content: dict[str, object], *, force: bool = False) -> None:
        """The JSON of a command, where it was asked for."""
        if self.json_target is None:
            return
        text = json.dumps(content, ensure_ascii=False, indent=2, allow_nan=False) + "\n"
        if self.json_target == "-":
            sys.stdout.write(text)
        else:
            write_whole(Path(self.json_target), text.encode(), force=force)
