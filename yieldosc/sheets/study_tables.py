"""The Design and Roles sheets of a workbook as items and rows."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from yieldosc.errors import Place
from yieldosc.sheets.columns import named_rows
from yieldosc.sheets.design import Item
from yieldosc.sheets.entries import Entry, Problems, entry_of, faulty, folded
from yieldosc.sheets.extras import KEPT, named_tables
from yieldosc.sheets.grid import Book, Grid
from yieldosc.sheets.roles import LAYOUT, RoleRow

DESIGN_COLUMNS = ("Item", "Value", "Unit", "Note")


@dataclass(slots=True)
class StudyTables:
    """Items of Design, rows of Roles, and the other sheets as text."""

    items: list[Item]
    rows: list[RoleRow]
    design_place: Place
    extra_rows: Mapping[str, tuple[tuple[str, ...], ...]] = field(default_factory=dict)


def workbook_tables(book: Book, problems: Problems) -> StudyTables:
    """From the sheets Design and Roles; a missing Roles sheet is an error."""
    design = book.sheet("Design")
    assert design is not None
    roles = book.sheet("Roles")
    if roles is None:
        problems.error(
            "missing-sheet", "the study has no sheet Roles; add it, or draft a study from the BOM", Place("Roles")
        )
    rows = [] if roles is None else _role_rows(roles, problems)
    kept = {folded(n) for n in (*KEPT, *named_tables(book, rows))}
    extra = {g.name: sheet_texts(g) for g in book.sheets if folded(g.name) in kept}
    return StudyTables(_items(design, problems), rows, Place("Design"), extra_rows=extra)


def _items(grid: Grid, problems: Problems) -> list[Item]:
    columns = dict.fromkeys(DESIGN_COLUMNS)
    heading = next((r for r in range(min(len(grid.rows), 20)) if _is_heading(grid, r)), None)
    if heading is None:
        problems.error(
            "missing-column", "Design has no heading row with Item and Value; its columns are Item, Value, Unit, Note",
            grid.place(0),
        )  # fmt: skip
        return []
    for c, cell in enumerate(grid.rows[heading]):
        for name in DESIGN_COLUMNS:
            if folded(cell.text) == folded(name):
                columns[name] = c
    items = []
    for r in range(heading + 1, len(grid.rows)):
        entries = {
            name: Entry("", grid.place(r, 0)) if c is None else entry_of(grid.cell(r, c), grid.place(r, c))
            for name, c in columns.items()
        }
        said = [faulty(entries[name], f"Design {name}", problems) for name in ("Item", "Unit")]
        if any(said):
            continue
        if not entries["Item"].blank:
            items.append(
                Item(entries["Item"].written, entries["Value"], entries["Unit"].written, entries["Note"].written)
            )
        elif not entries["Value"].blank:
            problems.error(
                "value-without-item",
                f"the value {entries['Value'].written} stands beside no item",
                entries["Value"].place,
            )
    return items


def _is_heading(grid: Grid, row: int) -> bool:
    texts = {folded(cell.text) for cell in grid.rows[row]}
    return {"item", "value"} <= texts


def _role_rows(grid: Grid, problems: Problems) -> list[RoleRow]:
    rows = []
    for row in named_rows(grid, LAYOUT, problems):
        cells = dict(row.cells)
        role = cells.pop("Role", None)
        if role is None or not faulty(role, "Role", problems):
            rows.append(RoleRow("" if role is None else role.written, cells, row.place))
    return rows


def sheet_texts(grid: Grid) -> tuple[tuple[str, ...], ...]:
    """Every cell as text that reads the same again."""
    return tuple(
        tuple(entry_of(cell, grid.place(r, c)).written for c, cell in enumerate(row)) for r, row in enumerate(grid.rows)
    )
