"""Sheets beside BOM, Design and Roles: temperature tables and measured values."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from yieldosc.quantities import QuantityError, parse_quantity
from yieldosc.sheets.entries import Entry, Problems, entry_of, faulty
from yieldosc.sheets.grid import Book, Grid
from yieldosc.sheets.roles import RoleRow

KEPT = ("Measured", "Grades", "Alternates", "Circuit", "Pilot")  # a result workbook carries them along


def named_tables(book: Book, rows: Sequence[RoleRow]) -> list[str]:
    """Names of the sheets that temperature laws name ("table coil"), in Roles, Grades and Alternates."""
    texts = [row.cells["Temperature law"].text for row in rows if "Temperature law" in row.cells]
    for grid in (book.sheet("Grades"), book.sheet("Alternates")):
        texts += [] if grid is None else [cell.text for row in grid.rows for cell in row if cell.kind == "text"]
    found = (re.match(r"\s*table\s+(\S.*)", text, re.IGNORECASE) for text in texts)
    return [match[1].strip() for match in found if match is not None]


def law_tables(book: Book, wanted: Sequence[str], problems: Problems) -> dict[str, list[tuple[float, float]]]:
    """The sheets that laws name ("table coil"): temperature [°C] and change (fraction) in the first two columns."""
    tables = {}
    for name in wanted:
        grid = book.sheet(name)
        if grid is not None:
            tables[name] = _points(grid, problems)
    return tables


def _points(grid: Grid, problems: Problems) -> list[tuple[float, float]]:
    points = []
    for r in range(1, len(grid.rows)):
        temperature, change = (entry_of(grid.cell(r, c), grid.place(r, c)) for c in (0, 1))
        if temperature.blank and change.blank:
            continue
        at = _read(temperature, "°C", f"{grid.name} temperature", problems, bare=True)
        by = _read(change, "1", f"{grid.name} change", problems, bare=False)
        if at is not None and by is not None:
            points.append((at, by))
    return points


def _read(entry: Entry, si_unit: str, name: str, problems: Problems, *, bare: bool) -> float | None:
    if faulty(entry, name, problems):
        return None
    if entry.number is not None and (bare or entry.percent or entry.number == 0):
        return entry.number
    if entry.number is not None:
        problems.error(
            "bare-number",
            f'{name} is the bare number {entry.number:g}; write "{entry.number:g} ppm" or "{entry.number:g} %"',
            entry.place,
        )  # fmt: skip
        return None
    try:
        return parse_quantity(entry.text, si_unit).value
    except QuantityError as error:
        problems.error("unreadable", f"{name}: {error}", entry.place)
        return None


def measured_values(book: Book, units: Mapping[str, str], problems: Problems) -> dict[str, tuple[float, ...]]:
    """Measured sheet: one column of values per designator. units: designator → SI unit of its main value."""
    grid = book.sheet("Measured")
    if grid is None or not grid.rows:
        return {}
    found = {}
    for c, heading in enumerate(grid.rows[0]):
        name = heading.text.strip()
        if not name:
            continue
        if name not in units:
            problems.error(
                "unknown-part", f"Measured has a column {name!r}, which no role names as its part", grid.place(0, c)
            )
            continue
        found[name] = _column(grid, c, name, units[name], problems)
    return found


def _column(grid: Grid, column: int, name: str, si_unit: str, problems: Problems) -> tuple[float, ...]:
    values = []
    for r in range(1, len(grid.rows)):
        entry = entry_of(grid.cell(r, column), grid.place(r, column))
        if entry.blank:
            continue
        value = _read(entry, si_unit, f"measured {name}", problems, bare=True)
        if value is not None and value <= 0:
            problems.error("not-positive", f"measured {name} must be above zero; found {entry.written}", entry.place)
        elif value is not None:
            values.append(value)
    if len(values) < 2:
        problems.error("no-measurements", f"Measured column {name} has fewer than two values", grid.place(0, column))
    elif len(values) < 50:
        problems.add(
            "warning", "few-measurements", f"{name}: {len(values)} measured values; below 50 the tails are guesswork",
            grid.place(0, column),
        )  # fmt: skip
    return tuple(values)


def branch_rows(book: Book, problems: Problems) -> list[dict[str, str]] | None:
    """The sheet Circuit as rows of heading → text, empty rows left out; None where there is no such sheet."""
    grid = book.sheet("Circuit")
    if grid is None:
        return None
    headings = [cell.text.strip() for cell in grid.rows[0]] if grid.rows else []
    made = []
    for r in range(1, len(grid.rows)):
        row = {}
        for c, heading in enumerate(headings):
            entry = entry_of(grid.cell(r, c), grid.place(r, c))
            if heading and not faulty(entry, f"Circuit {heading}", problems) and entry.written:
                row[heading] = entry.written
        if row:
            made.append(row)
    return made
