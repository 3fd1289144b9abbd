"""The README's console blocks: run the commands they show, and compare or rewrite their output.

A block is fenced as ```console and begins with "$ yieldosc …"; "…" on a line of its own stands for lines left out.
`python -m tests.readme` (from the repository's root) rewrites the blocks in place.
"""

from __future__ import annotations

import os
import re
import shlex
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).parents[1]
README = ROOT / "README.md"
BLOCK = re.compile(r"```console\n\$ (?P<command>yieldosc[^\n]*)\n(?P<body>.*?)```", re.S)
LEFT_OUT = "…"


@dataclass(frozen=True)
class Shown:
    """A command and what the README shows of its output."""

    command: str
    body: str


def shown() -> list[Shown]:
    return [Shown(m["command"], m["body"]) for m in BLOCK.finditer(README.read_text(encoding="utf-8"))]


def run(command: str, folder: Path) -> str:
    """stdout and stderr of a command, run where bom_examples stands, without colour, 100 columns wide."""
    words = shlex.split(command)
    environment = {**os.environ, "COLUMNS": "100", "NO_COLOR": "1", "PYTHONIOENCODING": "utf-8"}
    done = subprocess.run(
        [sys.executable, "-m", "yieldosc", *words[1:]],
        cwd=folder, env=environment, capture_output=True, text=True, encoding="utf-8", check=False, timeout=300,
    )  # fmt: skip
    return "".join(f"{line.rstrip()}\n" for line in (done.stderr + done.stdout).splitlines())


def matches(body: str, output: str) -> bool:
    """True when the lines shown stand in the output in this order, without gaps except at "…"."""
    pieces = [piece.strip("\n") for piece in re.split(rf"^{LEFT_OUT}$", body, flags=re.M)]
    pattern = r"\A" + r"(?:.*\n)*?".join(re.escape(piece + "\n" if piece else "") for piece in pieces)
    return any(re.match(pattern + r"\Z", text) for text in (output, output.strip("\n") + "\n"))


def folder_with_examples(folder: Path) -> Path:
    """A folder in which the README's paths hold, apart from the repository."""
    (folder / "bom_examples").symlink_to(ROOT / "bom_examples")
    return folder


def rewrite(folder: Path) -> None:
    """Fill every block with today's whole output; lines to leave out are cut by hand afterwards."""
    text = README.read_text(encoding="utf-8")

    def fresh(match: re.Match[str]) -> str:
        output = run(match["command"], folder)
        body = match["body"] if matches(match["body"], output) else output.strip("\n") + "\n"
        return f"```console\n$ {match['command']}\n{body}```"

    README.write_text(BLOCK.sub(fresh, text), encoding="utf-8")


if __name__ == "__main__":
    import tempfile

    with tempfile.TemporaryDirectory() as name:
        rewrite(folder_with_examples(Path(name)))
