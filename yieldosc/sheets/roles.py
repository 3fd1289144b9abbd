"""The Roles sheet: one row per role, columns by name; rows are told apart here and understood in `parameters`."""

from __future__ import annotations

import difflib
from collections.abc import Mapping
from dataclasses import dataclass

from yieldosc.errors import Place
from yieldosc.quantities import shown
from yieldosc.sheets.entries import Entry, Problems, folded

COLUMNS = (
    "Role", "Part", "Min", "Typ", "Max", "Tolerance", "Shape", "Temperature law", "Solder", "Drift", "Reel share",
    "Source", "Note",
)  # fmt: skip
_BY_KEY = {folded(name): name for name in COLUMNS}


@dataclass(frozen=True, slots=True)
class RoleRow:
    """One row: role name and its cells by column name (blank ones left out)."""

    role: str
    cells: Mapping[str, Entry]
    place: Place

    def cell(self, column: str) -> Entry | None:
        return self.cells.get(column)

    def place_of(self, column: str) -> Place:
        found = self.cells.get(column)
        return self.place if found is None else found.place


def column_names(headings: list[tuple[str, Place]], problems: Problems) -> list[str | None]:
    """Heading texts → column names; unknown or doubled headings are errors, blank ones are passed over."""
    names: list[str | None] = []
    for text, place in headings:
        key = folded(text)
        name = _BY_KEY.get(key)
        if not key:
            names.append(None)
            continue
        if name is None:
            close = difflib.get_close_matches(key, _BY_KEY, n=1)
            hint = f'; did you mean "{_BY_KEY[close[0]]}"?' if close else f"; the columns are: {', '.join(COLUMNS)}"
            problems.error("unknown-column", f"{shown(text)} is no column of Roles{hint}", place)
        elif name in names:
            problems.error("doubled-column", f'the column "{name}" stands twice; keep one', place)
            name = None
        names.append(name)
    if "Role" not in names:
        place = headings[0][1] if headings else Place("Roles", 1, None)
        problems.error("missing-column", 'Roles has no column "Role"; its first row must hold the headings', place)
    return names


def sort_rows(rows: list[RoleRow], problems: Problems) -> dict[str, RoleRow]:
    """Role → row; a role that stands twice is an error."""
    found: dict[str, RoleRow] = {}
    for row in rows:
        if not row.role:
            problems.error("row-without-role", "this row has values but no role; name the role or clear it", row.place)
        elif row.role in found:
            problems.error("doubled-role", f"role {row.role} stands twice; keep one row", row.place)
        else:
            found[row.role] = row
    return found
