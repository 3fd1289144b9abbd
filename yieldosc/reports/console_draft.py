"""What a draft proposed, and what is left to fill in."""

from __future__ import annotations

from rich.console import Console

from yieldosc.reports.terminal import hanging, heading, line, plain_table
from yieldosc.sheets.draft import Draft


def print_draft(drafted: Draft, path: str, console: Console) -> None:
    """Proposals by role with their reason, then the open cells, then the next command."""
    heading(console, "Proposed parts", "proposals, not decisions: check each against the schematic")
    table = plain_table(("role", "left"), ("part", "left"), ("why", "left"))
    for proposal in drafted.proposals:
        doubt = f" — check: {proposal.doubt}" if proposal.doubt else ""
        table.add_row(line(proposal.role), line(proposal.part or "–"), line(proposal.reason + doubt))
    console.print(table)
    heading(console, "Cells to fill in", f"{len(drafted.open_cells)} cells, marked in the workbook")
    for cell in drafted.open_cells:
        hanging(console, "·", cell)
    console.print()
    console.print(line(f"Written: {path}"), soft_wrap=True)
    console.print(line(f"Next: fill in the marked cells, then yieldosc check {path}"), soft_wrap=True)
