"""A sheet as it stands in the file: cells with their text, their number and their place. No meaning yet."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from yieldosc.errors import Finding, Place

CellKind = Literal["empty", "text", "number", "percent", "boolean", "date", "error", "formula_without_result"]


def column_letters(index: int) -> str:
    """0 → "A", 25 → "Z", 26 → "AA"."""
    letters = ""
    index += 1
    while index:
        index, rest = divmod(index - 1, 26)
        letters = chr(ord("A") + rest) + letters
    return letters


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell. `text` is what a reader of the sheet would see (never a formula); `number` where it is numeric.

    kind "percent": a number whose cell format is percent (number is the stored fraction, 0.05 for 5 %).
    """

    kind: CellKind
    text: str = ""
    number: float | None = None

    @property
    def blank(self) -> bool:
        return self.kind == "empty" or (self.kind == "text" and not self.text.strip())


EMPTY = Cell("empty")


@dataclass(frozen=True, slots=True)
class Grid:
    """A sheet: rows of cells from A1 on (ragged rows allowed)."""

    name: str
    rows: tuple[tuple[Cell, ...], ...]
    hidden: bool = False

    def cell(self, row: int, column: int) -> Cell:
        """Cell at 0-based row and column; an empty one outside."""
        if 0 <= row < len(self.rows) and 0 <= column < len(self.rows[row]):
            return self.rows[row][column]
        return EMPTY

    def place(self, row: int, column: int | None = None) -> Place:
        """The place of a 0-based row and column as the spreadsheet shows it."""
        return Place(self.name, row + 1, None if column is None else column_letters(column))


@dataclass(frozen=True, slots=True)
class Book:
    """All sheets of a file, its type by content, and the digest of its bytes."""

    path: str
    file_type: str  # "xlsx", "xls", "xlsb", "ods", "csv", "tsv", "toml"
    sheets: tuple[Grid, ...]
    findings: tuple[Finding, ...] = ()  # what was assumed in opening the file, such as its encoding

    def sheet(self, name: str) -> Grid | None:
        """The sheet of that name, case and blanks ignored; None when there is none."""
        wanted = "".join(name.split()).casefold()
        for grid in self.sheets:
            if "".join(grid.name.split()).casefold() == wanted:
                return grid
        return None
