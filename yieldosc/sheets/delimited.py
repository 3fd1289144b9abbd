"""Text files with separators → a sheet of text cells."""

from __future__ import annotations

import csv
import io
from collections import Counter
from collections.abc import Iterable

from yieldosc.errors import Finding, Place, refusal
from yieldosc.sheets.child_limits import CELL_LENGTH, CELLS, COLUMNS, ROWS, too_large
from yieldosc.sheets.encodings import decode
from yieldosc.sheets.grid import EMPTY, Book, Cell, Grid

_SEPARATORS = "\t;,|"
_MARKUP = ("<!doctype", "<html", "<table", "<?xml")
_GLUED_LINES = 4  # a quoted field with more lines than this swallowed records after a stray quotation mark


def read_delimited(path: str, place: Place, data: bytes) -> Book:
    """A book of one sheet from comma, semicolon, tab or bar separated text. Raises InputError."""
    decoded = decode(data)
    if decoded is None or "\0" in decoded[0]:
        raise refusal(
            "file-type",
            "the file holds NUL bytes or is not text; give a spreadsheet (xlsx, xls, xlsb, ods) or csv",
            place,
        )
    text, encoding, guessed = decoded
    if text.lstrip("\ufeff \t\r\n")[:9].lower().startswith(_MARKUP):
        raise refusal(
            "file-type",
            "the file is HTML or XML whatever its name says; open it in a spreadsheet program "
            "and save it as xlsx or csv",
            place,
        )
    lines = text.lstrip("\ufeff").replace("\r\n", "\n").replace("\r", "\n").split("\n")
    if len(lines) > ROWS + 1:
        raise _refused(len(lines) - 1, 0, place)
    separator, records = _records(lines)
    note = f"the file does not say its encoding; it was read as {encoding}; save it as UTF-8 where letters look wrong"
    findings = (Finding("note", "file-encoding", note, place),) if guessed else ()
    grid = Grid(place.sheet or "csv", tuple(_cells(record, row, place) for row, record in enumerate(records)))
    if sum(map(len, grid.rows)) > CELLS:
        raise refusal(
            "file-limit", f"the file holds more than {CELLS} cells; delete what is not the BOM and save it again", place
        )
    return Book(path, "tsv" if separator == "\t" else "csv", (grid,), findings)


def _refused(row: int, column: int, place: Place) -> Exception:
    limit = too_large(row, column)
    return refusal(limit.code, f"{limit.text}; delete what is not the BOM and save it again", place)


def _cells(record: list[str], row: int, place: Place) -> tuple[Cell, ...]:
    if len(record) > COLUMNS:
        raise _refused(row, len(record) - 1, place)
    for cell in record:
        if len(cell) > CELL_LENGTH:
            raise refusal(
                "file-limit",
                f"a cell holds {len(cell)} characters, more than {CELL_LENGTH}; delete what "
                "is not the BOM and save it again",
                Place(place.sheet, row + 1),
            )
    return tuple(Cell("text", cell.strip()) if cell.strip() else EMPTY for cell in record)


def _records(lines: list[str]) -> tuple[str, list[list[str]]]:
    """The separator that cuts most lines alike, and the records; a whole record in quotes is cut once more."""
    told = lines[0].strip().strip('"').lower() if lines else ""
    if told.startswith("sep=") and len(told) == 5:
        return told[4], [[], *_parse(lines[1:], told[4])]
    separator, score = _best(lines)
    if score[0] == 0:
        inner = [cell for record in _parse(lines, "\x1f") for cell in (record or [""])]
        second, score = _best(inner)
        if score[0]:
            return second, _parse(inner, second)
    return separator, _parse(lines, separator)


def _best(lines: list[str]) -> tuple[str, tuple[float, int]]:
    scores = {}
    for separator in _SEPARATORS:
        records = [record for record in _parse(lines[:2000], separator) if any(cell.strip() for cell in record)]
        widths = Counter(len(record) for record in records if len(record) > 1)
        width, count = max(widths.items(), key=lambda item: (item[1], item[0]), default=(1, 0))
        scores[separator] = (round(count / max(len(records), 1), 1), width)
    best = max(_SEPARATORS, key=lambda separator: scores[separator])
    return best, scores[best]


def _parse(lines: Iterable[str], separator: str) -> list[list[str]]:
    """Records; where a stray quotation mark would swallow records, each line is one record."""
    lines = list(lines)
    csv.field_size_limit(max(csv.field_size_limit(), 2**26))
    try:
        records = list(csv.reader((line + "\n" for line in lines), delimiter=separator, skipinitialspace=True))
    except csv.Error:
        records = [["\n" * _GLUED_LINES]]
    if any(cell.rstrip("\n").count("\n") >= _GLUED_LINES or cell.count(f"\n{cell[:1]}") for r in records for cell in r
           if "\n" in cell.strip() and separator in cell):  # fmt: skip
        records = [next(csv.reader(io.StringIO(line), delimiter=separator), []) for line in lines]
    while records and not any(cell.strip() for cell in records[-1]):
        records.pop()
    return records
