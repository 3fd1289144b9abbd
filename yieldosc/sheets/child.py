"""The reader of spreadsheet files that strangers made; its `main` runs in a child process of its own.

Imports the standard library, python_calamine and its three neighbours `child_*` only, so that it starts fast.
Bytes of one file come in on stdin; JSON lines go out on stdout: the type, one line per sheet, one per row that holds
anything, a last line {"end": true}; or a line {"refused": code, "text": sentence}. Whatever happens here, even an
abort, the parent turns it into a finding. No formula, link, macro or entity is ever followed.
"""

from __future__ import annotations

import io
import json
import sys
from collections.abc import Iterator, Mapping
from datetime import date, datetime, time, timedelta
from typing import Any

from yieldosc.sheets.child_limits import (
    CELL_LENGTH,
    CELLS,
    COLUMNS,
    ROWS,
    SHEETS,
    Refusal,
    limit_resources,
    too_large,
)
from yieldosc.sheets.child_marks import Marks, marks_of
from yieldosc.sheets.child_package import Package, kind_of

CellLine = tuple[str, str, float | None]
_ERRORS = ("#DIV/0!", "#N/A", "#NAME?", "#NULL!", "#NUM!", "#REF!", "#VALUE!")


def cell_of(value: object, mark: str) -> CellLine | None:
    """Kind, text and number of one value; None for an empty cell."""
    if mark.startswith("error"):
        return "error", mark[6:] or "#VALUE!", None
    if mark == "formula":
        return "formula_without_result", "", None
    if isinstance(value, bool):
        return "boolean", "TRUE" if value else "FALSE", None
    if isinstance(value, (int, float)):
        percent = mark == "percent"
        return "percent" if percent else "number", f"{value * 100:.12g} %" if percent else f"{value:.15g}", float(value)
    if isinstance(value, (datetime, date, time, timedelta)):
        return "date", str(value), None
    return _text_cell(str(value))


def _text_cell(text: str) -> CellLine | None:
    if not text:
        return None
    if len(text) > CELL_LENGTH:
        raise Refusal("file-limit", f"a cell holds {len(text)} characters, more than {CELL_LENGTH}")
    if text.strip() in _ERRORS or text.startswith("Err:5"):
        return "error", text.strip(), None
    return "text", text, None


def sheet_lines(workbook: Any, marks: Mapping[str, Marks]) -> Iterator[dict[str, object]]:
    """The JSON lines of a workbook."""
    sheets = [s for s in workbook.sheets_metadata if "WorkSheet" in str(s.typ)]
    if len(sheets) > SHEETS:
        raise Refusal("file-limit", f"the file holds {len(sheets)} sheets, more than {SHEETS}")
    cells = 0
    for sheet in sheets:
        yield {"sheet": sheet.name, "hidden": "Visible" not in str(sheet.visible)}
        own = marks.get(sheet.name, {})
        table = workbook.get_sheet_by_name(sheet.name)
        top, left = table.start or (0, 0)
        rows: dict[int, list[object]] = {}
        if table.height and table.width:
            bottom, right = table.end or (0, 0)
            if bottom >= ROWS or right >= COLUMNS:
                raise too_large(bottom, right)
            rows = {top + i: list(values) for i, values in enumerate(table.to_python(skip_empty_area=True))}
        for row in sorted(rows.keys() | {r for r, _ in own}):
            values = {left + i: value for i, value in enumerate(rows.get(row, []))}
            line = []
            for column in sorted(values.keys() | {c for r, c in own if r == row} if own else values.keys()):
                found = cell_of(values.get(column, ""), own.get((row, column), ""))
                if found is not None:
                    line.append([column, *found])
            cells += len(line)
            if cells > CELLS:
                raise Refusal("file-limit", f"the file holds more than {CELLS} filled cells")
            if line:
                yield {"row": row, "cells": line}


def open_workbook(data: bytes, package: Package | None) -> Any:
    """The workbook by python_calamine; once more without its style sheet when it fails with it."""
    import python_calamine  # noqa: PLC0415 - after the limits are set

    try:
        return python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(data))
    except python_calamine.PasswordError as error:
        raise Refusal("file-encrypted", "the file is encrypted") from error
    except Exception as error:
        if package is None or "xl/styles.xml" not in package.parts:
            raise Refusal("file-broken", "the file is damaged or holds no spreadsheet") from error
    try:
        return python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(package.without("xl/styles.xml")))
    except Exception as error:
        raise Refusal("file-broken", "the file is damaged or holds no spreadsheet") from error


def main() -> None:
    """Reads stdin, writes JSON lines."""
    limit_resources()
    out = sys.stdout
    try:
        data = sys.stdin.buffer.read()
        package = Package(data) if data[:2] == b"PK" else None
        out.write(json.dumps({"type": "xls" if package is None else kind_of(package)}) + "\n")
        marks = marks_of(package)  # before the reader: it reserves the whole rectangle that a sheet claims to fill
        for line in sheet_lines(open_workbook(data, package), marks):
            out.write(json.dumps(line) + "\n")
        out.write(json.dumps({"end": True}) + "\n")
    except Refusal as refusal:
        out.write(json.dumps({"refused": refusal.code, "text": refusal.text}) + "\n")
    except MemoryError:
        out.write(json.dumps({"refused": "file-limit", "text": "reading the file needs too much memory"}) + "\n")
