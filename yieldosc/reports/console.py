"""What each command shows on the console. Longer pages have files of their own."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from rich.console import Console
from rich.text import Text

from yieldosc.errors import Finding
from yieldosc.reports.console_assessment import print_assessment
from yieldosc.reports.console_check import print_check, print_study
from yieldosc.reports.console_circuits import circuit_dict, print_circuit, print_circuits
from yieldosc.reports.console_draft import print_draft
from yieldosc.reports.console_unit import print_unit
from yieldosc.reports.terminal import hanging, line, make_console

__all__ = [
    "circuit_dict",
    "make_console",
    "print_assessment",
    "print_check",
    "print_circuit",
    "print_circuits",
    "print_draft",
    "print_findings",
    "print_study",
    "print_unit",
    "print_written",
]

LEVEL_STYLES = {"error": "bold red", "warning": "yellow", "note": "dim"}
ORDER = ("error", "warning", "note")


def print_findings(findings: Sequence[Finding], console: Console) -> None:
    """Errors first; each with its place and its way out, wrapped behind its level."""
    for level in ORDER:
        for finding in (f for f in findings if f.level == level):
            hanging(console, f"{level}:".ljust(8), str(finding), style=LEVEL_STYLES[level], indent=0)


def print_written(path: Path, console: Console) -> None:
    """Where the workbook lies; never wrapped, so that the path can be copied."""
    console.print()
    console.print(Text("Workbook: ", "bold").append_text(line(str(path), "not bold")), soft_wrap=True)
