"""A draft on the console: which part was proposed for each role and why, and what a person still has to fill in."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import zip_longest

from rich.console import Console
from rich.text import Text

from yieldosc.reports.terminal import hanging, heading, line, one_line, plain_table
from yieldosc.sheets.draft import Draft

NONE = "—"


def print_draft(draft: Draft, path: str, console: Console) -> None:
    """Proposals with reason and doubt, then every open cell, then what to type next."""
    heading(console, "Proposed parts", "check each against the schematic")
    table = plain_table(("roles", ""), ("part", ""), ("reason", ""), ("doubt", ""))
    alike: dict[tuple[str, str, str], list[str]] = {}
    for p in draft.proposals:
        alike.setdefault((p.part or NONE, p.reason, p.doubt), []).append(p.role)
    for (part, reason, doubt), roles in alike.items():
        table.add_row(line(", ".join(roles)), one_line(part), line(reason), line(doubt))
    console.print(table)
    if draft.open_cells:
        heading(console, "To fill in", f"{len(draft.open_cells)} marked cells")
        _two_columns(draft.open_cells, console)
    console.print()
    console.print(Text("Draft: ", "bold").append_text(line(path, "not bold")), soft_wrap=True)
    console.print(line(f"Fill in the marked cells, then: yieldosc check {path}", "dim"), soft_wrap=True)


def _two_columns(cells: Sequence[str], console: Console) -> None:
    """Read down the first column, then the second; one column where a text is too long for half the width."""
    texts = [one_line(cell) for cell in cells]
    half = console.width // 2 - 2
    if max(map(len, texts)) > half:
        for text in texts:
            hanging(console, "•", text)
        return
    rows = (len(texts) + 1) // 2
    for first, second in zip_longest(texts[:rows], texts[rows:], fillvalue=""):
        console.print(Text(f"  {first.ljust(half)}{second}".rstrip()), soft_wrap=True)
