"""The sheet Pilot: boards that were built and measured, one per row."""

from __future__ import annotations

from yieldosc.errors import Place
from yieldosc.quantities import QuantityError, parse_quantity, shown
from yieldosc.sheets.design import DesignSheet
from yieldosc.sheets.entries import Entry, Problems, entry_of, faulty, folded
from yieldosc.sheets.grid import Book, Grid
from yieldosc.study import Pilot

ITEM = "pilot column"
NO_START = ("nostart", "dead", "none")
COUNTING = ("board", "unit", "no", "nr", "number", "serial", "serialnumber", "sn", "id", "#", "place", "date")
LEAST_BOARDS = 2
FAR = 10.0  # a bare number so far from the target was meant in kHz or MHz


def read_pilot(book: Book, sheet: DesignSheet, problems: Problems) -> Pilot | None:
    """The column that Design names, or the only one with frequencies; None without a sheet Pilot."""
    grid = book.sheet("Pilot")
    if grid is None:
        if ITEM in sheet.items:
            problems.error(
                "missing-sheet",
                "pilot column is given, but there is no sheet Pilot; add it, or remove the item",
                sheet.place_of(ITEM),
            )
        return None
    column = _column(grid, sheet, problems)
    if column is None:
        return None
    heading = grid.rows[0][column].text.strip()
    target = sheet.values.get("target_frequency_hz")
    frequencies: list[float] = []
    dead = 0
    for r in range(1, len(grid.rows)):
        entry = entry_of(grid.cell(r, column), grid.place(r, column))
        if entry.blank:
            continue
        value = _frequency(entry, target, problems)
        if value == 0:
            dead += 1
        elif value is not None:
            frequencies.append(value)
    place = grid.place(0, column)
    if len(frequencies) + dead < LEAST_BOARDS and not problems.fatal:
        problems.error("too-few-boards", f"Pilot {heading} has fewer than two boards; measure more", place)
    return Pilot(column=heading, frequency_hz=tuple(frequencies), no_starts=dead, place=str(place))


def _column(grid: Grid, sheet: DesignSheet, problems: Problems) -> int | None:
    headings = [cell.text.strip() for cell in grid.rows[0]] if grid.rows else []
    listed = ", ".join(heading for heading in headings if heading) or "none"
    item = sheet.items.get(ITEM)
    if item is not None and item.value.fault:
        return None
    if item is not None:
        same = [c for c, heading in enumerate(headings) if heading and folded(heading) == folded(item.value.written)]
        if len(same) == 1:
            return same[0]
        problem = "no column" if not same else "several columns"
        problems.error(
            "pilot-column",
            f"Pilot has {problem} {shown(item.value.written)}; its columns are: {listed}",
            sheet.place_of(ITEM),
        )
        return None
    numeric = [c for c, heading in enumerate(headings) if heading and _numeric(grid, c)]
    if len(numeric) == 1:
        problems.add(
            "note",
            "pilot-column-assumed",
            f"Design names no pilot column: {headings[numeric[0]]} was taken, the only one with frequencies",
            grid.place(0, numeric[0]),
        )
        return numeric[0]
    problems.error(
        "pilot-column",
        f"Pilot has {'several columns' if numeric else 'no column'} with frequencies; name one in Design as pilot "
        f"column: {listed}",
        Place("Pilot"),
    )
    return None


def _numeric(grid: Grid, column: int) -> bool:
    """True for a column whose cells are frequencies or boards without one; counting columns are none."""
    if folded(grid.rows[0][column].text) in COUNTING:
        return False
    entries = [entry_of(grid.cell(r, column), grid.place(r, column)) for r in range(1, len(grid.rows))]
    return any(not entry.blank and not entry.fault and _value(entry) is not None for entry in entries)


def _value(entry: Entry) -> float | None:
    if entry.number is not None:
        return None if entry.percent else entry.number
    if folded(entry.text) in NO_START:
        return 0.0
    try:
        return parse_quantity(entry.text, "Hz").value
    except QuantityError:
        return None


def _frequency(entry: Entry, target_hz: float | None, problems: Problems) -> float | None:
    """Frequency [Hz] of one board, 0 for a board that does not start; None with a finding."""
    if faulty(entry, "Pilot", problems):
        return None
    value = _value(entry)
    if value is None or value < 0:
        problems.error(
            "unreadable",
            f'Pilot: {shown(entry.written)} is no frequency; write Hz, for example "8000120", or "no start"',
            entry.place,
        )
        return None
    bare = entry.number is not None or parse_bare(entry.text)
    if bare and value and target_hz is not None and not target_hz / FAR < value < target_hz * FAR:
        problems.error(
            "pilot-far-off",
            f"Pilot: {entry.written} is read as {value:g} Hz, more than ten times off the target; write its unit",
            entry.place,
        )
        return None
    return value


def parse_bare(text: str) -> bool:
    """True for a number without a unit."""
    try:
        return parse_quantity(text).si_unit is None
    except QuantityError:
        return False
