"""Finds the BOM tables of a book by their content: heading rows anywhere, none, two, or repeated."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from yieldosc.sheets.designators import looks_like_designators, parse_designators
from yieldosc.sheets.grid import Book, Cell, Grid
from yieldosc.sheets.headings import Meaning, column_meaning

STUDY_SHEETS = frozenset(("design", "roles", "measured", "grades", "alternates", "circuit", "pilot"))
_CARRIERS = frozenset(("designator", "value", "description", "name", "part_number"))
_SAMPLE_ROWS = 400


@dataclass(frozen=True, slots=True)
class Table:
    """Rows `first` to `last` (0-based, last excluded) of a sheet, and what its columns mean."""

    grid: Grid
    heading_row: int | None
    first: int
    last: int
    headings: tuple[str, ...]
    columns: dict[int, Meaning]
    designator: int | None  # the column that holds designators
    guessed: bool  # the designator column was found by content

    def of(self, *meanings: Meaning) -> list[int]:
        """Columns of these meanings, in the order of the meanings and then of the sheet."""
        return [c for meaning in meanings for c, known in sorted(self.columns.items()) if known == meaning]


def find_tables(book: Book, sheet: str | None = None) -> tuple[Table, ...]:
    """Every BOM table. Tables without designators only where no table has any."""
    named = None if sheet is None else book.sheet(sheet)
    grids: Iterable[Grid] = book.sheets if named is None else (named,)
    if named is None and any(grid.name.strip().casefold() in ("design", "roles") for grid in book.sheets):
        grids = [grid for grid in book.sheets if grid.name.strip().casefold() == "bom"]
    found = [
        table for grid in grids if grid.name.strip().casefold() not in STUDY_SHEETS for table in sheet_tables(grid)
    ]
    with_designators = [table for table in found if table.designator is not None]
    return tuple(with_designators or [table for table in found if _speaks_of_parts(table)])


def sheet_tables(grid: Grid) -> list[Table]:
    """Tables of one sheet, from heading row to heading row; one without headings where content allows it."""
    starts: list[tuple[int, int]] = []  # heading row, rows that the heading takes
    row = 0
    while row < len(grid.rows):
        if is_heading(grid.rows[row]):
            height = 2 if row + 1 < len(grid.rows) and _continues(grid.rows[row], grid.rows[row + 1]) else 1
            starts.append((row, height))
            row += height
        else:
            row += 1
    tables: list[Table] = []
    for number, (start, height) in enumerate(starts):
        end = starts[number + 1][0] if number + 1 < len(starts) else len(grid.rows)
        headings = _joined(grid.rows[start : start + height])
        if tables and tables[-1].headings == headings:
            continue  # a repeated heading: the rows belong to the table above
        tables.append(_table(grid, start, start + height, end, headings))
    return _reaching(tables, grid) if tables else _without_headings(grid)


def is_heading(row: tuple[Cell, ...]) -> bool:
    """At least two columns with a meaning, one of which can carry a part, and hardly anything else."""
    texts = [cell.text for cell in row if cell.kind == "text" and not cell.blank]
    meanings = [meaning for text in texts if (meaning := column_meaning(text)) is not None]
    useful = {meaning for meaning in meanings if meaning != "ignored"}
    return len(useful) >= 2 and bool(useful & _CARRIERS) and len(meanings) >= 0.4 * sum(not c.blank for c in row)


def _continues(row: tuple[Cell, ...], below: tuple[Cell, ...]) -> bool:
    """True when the row below is the second line of a heading."""
    filled = [cell for cell in below if not cell.blank]
    if not filled or any(cell.kind != "text" or any(c.isdigit() for c in cell.text) for cell in filled):
        return False
    same = [cell.text for cell in row] == [cell.text for cell in below]
    return not same and all(column_meaning(cell.text) is not None for cell in filled)


def _joined(rows: tuple[tuple[Cell, ...], ...]) -> tuple[str, ...]:
    width = max(map(len, rows))
    cell = [[row[c].text.strip() if c < len(row) else "" for row in rows] for c in range(width)]
    return tuple(" ".join(part for part in parts if part) for parts in cell)


def _meaning(heading: str) -> Meaning | None:
    """Of a joined heading, or of its last or first words alone."""
    return (
        column_meaning(heading)
        or column_meaning(heading.rsplit(" ", maxsplit=1)[-1])
        or column_meaning(heading.split(" ", maxsplit=1)[0])
    )


def _table(grid: Grid, start: int | None, first: int, last: int, headings: tuple[str, ...]) -> Table:
    columns = {c: meaning for c, text in enumerate(headings) if text and (meaning := _meaning(text)) is not None}
    shares = _designator_shares(grid, first, last)
    told = [c for c, meaning in columns.items() if meaning == "designator"]
    best = max(told, key=lambda c: (shares.get(c, 0.0), -c), default=None)
    guessed = False
    if best is None or shares.get(best, 0.0) < 0.2:
        open_columns = [c for c in shares if columns.get(c) in (None, "name", "note", "ignored")]
        content = max(open_columns, key=lambda c: (shares[c], -c), default=None)
        guessed = content is not None and shares[content] >= 0.4
        best = content if guessed else (best if best is not None and _names(grid, best, first, last) else None)
    for column in told:
        if column != best:
            columns[column] = "ignored" if _numbers_only(grid, column, first, last) else "name"
    if best is not None:
        columns[best] = "designator"
    return Table(grid, start, first, last, headings, columns, best, guessed)


def _reaching(tables: list[Table], grid: Grid) -> list[Table]:
    """Repeated headings were left out of the list: each table reaches to the next one that remains."""
    starts = [table.heading_row or 0 for table in tables[1:]] + [len(grid.rows)]
    return [
        Table(t.grid, t.heading_row, t.first, end, t.headings, t.columns, t.designator, t.guessed)
        for t, end in zip(tables, starts, strict=True)
    ]


def _designator_shares(grid: Grid, first: int, last: int) -> dict[int, float]:
    """Column → share of its filled cells that hold designators not yet seen in it (sizes such as C0603 repeat).

    Columns with fewer than two such cells are left out.
    """
    filled: dict[int, int] = {}
    hits: dict[int, int] = {}
    seen: set[tuple[int, str]] = set()
    for row in grid.rows[first : min(last, first + _SAMPLE_ROWS)]:
        for column, cell in enumerate(row):
            if cell.blank:
                continue
            filled[column] = filled.get(column, 0) + 1
            new = (column, cell.text) not in seen
            seen.add((column, cell.text))
            hits[column] = hits.get(column, 0) + (new and cell.kind == "text" and looks_like_designators(cell.text))
    single = last - first <= 2
    return {column: hits[column] / filled[column] for column in filled if hits[column] >= (1 if single else 2)}


def _names(grid: Grid, column: int, first: int, last: int) -> bool:
    """True when a column headed as designators holds at least one."""
    return any(looks_like_designators(grid.cell(row, column).text) for row in range(first, last))


def _numbers_only(grid: Grid, column: int, first: int, last: int) -> bool:
    texts = [grid.cell(row, column).text for row in range(first, last) if not grid.cell(row, column).blank]
    return bool(texts) and sum(text.isdigit() for text in texts) > 0.8 * len(texts)


def _without_headings(grid: Grid) -> list[Table]:
    """A table by content alone: a column of designators, one of counts that agree with them, the rest is text."""
    shares = _designator_shares(grid, 0, len(grid.rows))
    best = max(shares, key=lambda c: (shares[c], -c), default=None)
    if best is None or shares[best] < 0.5:
        return []
    columns: dict[int, Meaning] = {best: "designator"}
    for column in range(max(map(len, grid.rows))):
        if column != best and _counts(grid, column, best):
            columns[column] = "quantity"
        elif column != best:
            columns[column] = "description"
    return [Table(grid, None, 0, len(grid.rows), (), columns, best, True)]


def _counts(grid: Grid, column: int, designators: int) -> bool:
    agree = total = 0
    for row in range(len(grid.rows)):
        text = grid.cell(row, column).text.strip()
        if text and grid.cell(row, designators).text:
            total += 1
            agree += text == str(len(parse_designators(grid.cell(row, designators).text).names))
    return total >= 2 and agree > 0.7 * total


def _speaks_of_parts(table: Table) -> bool:
    return bool(table.of("value", "description", "name", "part_number")) and bool(table.of("quantity", "part_number"))
