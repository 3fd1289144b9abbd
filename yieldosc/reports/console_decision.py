"""A decision on the console."""

from __future__ import annotations

from rich.console import Console
from rich.text import Text

from yieldosc.reports.decision import Decision, Section
from yieldosc.reports.terminal import hanging, heading, line, plain_table

STYLES = {"good": "bold green", "bad": "bold red", "open": "bold yellow"}


def print_decision(decision: Decision, console: Console) -> None:
    """The whole page."""
    title(decision.title, decision.stamp, console)
    console.print(Text(decision.words, STYLES[decision.tone]))
    console.print(line(decision.headline))
    if decision.facts:
        console.print()
    wide = max((len(label) for label, _, _ in decision.facts), default=0) + 3
    for label, value, note in decision.facts:
        console.print(Text("  " + label.ljust(wide)).append(value, style="bold"), soft_wrap=True)
        if note:
            hanging(console, "", note, indent=wide + 1, style="dim")
    for section in decision.sections:
        print_section(section, console)


def title(left: str, right: str, console: Console) -> None:
    """Study and circuit on the left, digest and seed on the right, a rule below."""
    shown = line(left, "bold")
    gap = console.width - len(shown.plain) - len(right)
    console.print()
    if gap >= 2:
        console.print(shown.append(" " * gap).append(right, style="not bold dim"), soft_wrap=True)
    else:
        console.print(shown)
        console.print(Text(right, "dim"))
    console.print("─" * console.width, soft_wrap=True)


def print_section(section: Section, console: Console) -> None:
    """A table, then its sentences."""
    if not section.rows and not section.sentences:
        return
    heading(console, section.title, section.note)
    if section.rows:
        table = plain_table(*section.columns)
        for row in section.rows[: section.most]:
            table.add_row(*(line(cell.text) for cell in row))
        console.print(table)
        rest = len(section.rows) - section.most
        if rest > 0:
            console.print(line(f"{rest} more in the workbook", "dim"))
    for sentence in section.sentences:
        hanging(console, section.mark, sentence)
