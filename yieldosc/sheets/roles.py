"""The Roles sheet: one row per role, columns by name; rows are told apart here and understood in `parameters`."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from yieldosc.errors import Place
from yieldosc.sheets.columns import Layout
from yieldosc.sheets.entries import Entry, Problems

COLUMNS = (
    "Role", "Part", "Min", "Typ", "Max", "Tolerance", "Shape", "Temperature law", "Solder", "Drift", "Reel share",
    "Source", "Note",
)  # fmt: skip
LAYOUT = Layout("Roles", COLUMNS, "Role")


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
