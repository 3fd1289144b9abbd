"""A sheet with named columns → rows of cells by column name: Roles, Grades, Alternates."""

from __future__ import annotations

import difflib
from collections.abc import Mapping
from dataclasses import dataclass

from yieldosc.errors import Place
from yieldosc.quantities import shown
from yieldosc.sheets.entries import Entry, Problems, entry_of, folded
from yieldosc.sheets.grid import Grid

HEADING_WITHIN = 20  # rows in which the headings are looked for


@dataclass(frozen=True, slots=True)
class Layout:
    """The columns of a sheet; `key` is the one that the sheet cannot do without, under any of its `aliases`."""

    sheet: str
    columns: tuple[str, ...]
    key: str
    aliases: tuple[str, ...] = ()

    def column(self, heading: str) -> str | None:
        """The column that a heading names, case and separators ignored."""
        names = {folded(name): name for name in self.columns} | {folded(name): self.key for name in self.aliases}
        return names.get(folded(heading))


@dataclass(frozen=True, slots=True)
class Row:
    """Cells by column name, blank ones left out."""

    cells: Mapping[str, Entry]
    place: Place

    def cell(self, column: str) -> Entry | None:
        return self.cells.get(column)

    def place_of(self, column: str) -> Place:
        found = self.cells.get(column)
        return self.place if found is None else found.place


def named_rows(grid: Grid, layout: Layout, problems: Problems) -> list[Row]:
    """Every row below the headings that holds anything."""
    heading = next(
        (
            r
            for r in range(min(len(grid.rows), HEADING_WITHIN))
            if any(layout.column(cell.text) == layout.key for cell in grid.rows[r])
        ),
        0,
    )
    cells = grid.rows[heading] if grid.rows else ()
    names = column_names([(cell.text, grid.place(heading, c)) for c, cell in enumerate(cells)], layout, problems)
    rows: list[Row] = []
    if layout.key not in names:
        return rows  # said already
    for r in range(heading + 1, len(grid.rows)):
        found = {}
        for c, name in enumerate(names):
            entry = entry_of(grid.cell(r, c), grid.place(r, c))
            if name is not None and not entry.blank:
                found[name] = entry
        if found:
            rows.append(Row(found, grid.place(r)))
    return rows


def column_names(headings: list[tuple[str, Place]], layout: Layout, problems: Problems) -> list[str | None]:
    """Heading texts → column names; unknown or doubled headings are errors, blank ones are passed over."""
    names: list[str | None] = []
    keys = {folded(name): name for name in layout.columns}
    for text, place in headings:
        key = folded(text)
        name = layout.column(text)
        if not key:
            names.append(None)
            continue
        if name is None:
            close = difflib.get_close_matches(key, keys, n=1)
            listed = ", ".join(layout.columns)
            hint = f'; did you mean "{keys[close[0]]}"?' if close else f"; the columns are: {listed}"
            problems.error("unknown-column", f"{shown(text)} is no column of {layout.sheet}{hint}", place)
        elif name in names:
            problems.error("doubled-column", f'the column "{name}" stands twice; keep one', place)
            name = None
        names.append(name)
    if layout.key not in names:
        place = headings[0][1] if headings else Place(layout.sheet, 1, None)
        text = f'{layout.sheet} has no column "{layout.key}"; its first row must hold the headings'
        problems.error("missing-column", text, place)
    return names
