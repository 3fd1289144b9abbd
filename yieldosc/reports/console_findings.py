"""Findings on the console: errors first, each with its place and its way out."""

from __future__ import annotations

from collections.abc import Sequence

from rich.console import Console

from yieldosc.errors import Finding
from yieldosc.reports.terminal import hanging

LEVEL_STYLES = {"error": "bold red", "warning": "yellow", "note": "dim"}


def print_findings(findings: Sequence[Finding], console: Console) -> None:
    """Wrapped behind the level."""
    for level, style in LEVEL_STYLES.items():
        for finding in (f for f in findings if f.level == level):
            hanging(console, f"{level}:".ljust(8), str(finding), style=style, indent=0)
