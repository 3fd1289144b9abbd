"""What each command shows on the console. Longer pages have files of their own."""

from __future__ import annotations

from pathlib import Path

from rich.console import Console
from rich.text import Text

from yieldosc.reports.console_assessment import print_assessment
from yieldosc.reports.console_check import print_check, print_study
from yieldosc.reports.console_circuits import circuit_dict, print_circuit, print_circuits
from yieldosc.reports.console_draft import print_draft
from yieldosc.reports.console_findings import print_findings
from yieldosc.reports.console_unit import print_unit
from yieldosc.reports.terminal import line, make_console

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


def print_written(path: Path, console: Console) -> None:
    """Where the workbook lies; never wrapped, so that the path can be copied."""
    console.print()
    console.print(Text("Workbook: ", "bold").append_text(line(str(path), "not bold")), soft_wrap=True)
