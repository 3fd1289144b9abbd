"""Cells that the reader of workbooks cannot tell apart: percent formats, errors, formulas without a stored result."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any
from xml.parsers import expat

from yieldosc.sheets.child_limits import CELLS, COLUMNS, ROWS, Refusal, too_large
from yieldosc.sheets.child_package import Package

Marks = dict[tuple[int, int], str]


def marks_of(package: Package | None) -> dict[str, Marks]:
    """Sheet name → place → "percent", "formula" or "error …". What cannot be read is left out, limits excepted."""
    if package is None:
        return {}
    try:
        if "xl/workbook.xml" in package.parts:
            percents = percent_styles(package.parts.get("xl/styles.xml"))
            parts = _sheet_parts(package).items()
            return {name: _quiet(_xlsx_marks, package.parts.get(part, b""), percents) for name, part in parts}
        return _ods_marks(package.parts.get("content.xml", b""))
    except (expat.ExpatError, ValueError, KeyError):
        return {}


def _quiet(read: Callable[[bytes, set[int]], Marks], content: bytes, percents: set[int]) -> Marks:
    try:
        return read(content, percents)
    except (expat.ExpatError, ValueError, KeyError):
        return {}


def parse_xml(
    content: bytes,
    start: Callable[[str, dict[str, str]], None],
    end: Callable[[str], None] | None = None,
    text: Callable[[str], None] | None = None,
) -> None:
    """Streams through XML, names without their namespace prefix; a document type ends it."""

    def refuse(*_: object) -> None:
        raise Refusal("file-entities", "the file declares a document type or entities")

    parser = expat.ParserCreate()
    parser.StartDoctypeDeclHandler = refuse
    parser.EntityDeclHandler = refuse
    parser.StartElementHandler = lambda name, attributes: start(
        name.rpartition(":")[2], {_local(key): value for key, value in attributes.items()}
    )
    if end is not None:
        parser.EndElementHandler = lambda name: end(name.rpartition(":")[2])
    if text is not None:
        parser.CharacterDataHandler = text
    parser.Parse(content, True)


def _local(key: str) -> str:
    """An attribute's name without prefix; "calcext:" is kept, since it repeats a name with another meaning."""
    return key if key.startswith("calcext:") else key.rpartition(":")[2]


def percent_styles(styles: bytes | None) -> set[int]:
    """Numbers of the cell formats of an xlsx style sheet that show percent; empty when it cannot be read."""
    codes: dict[int, bool] = {9: True, 10: True}  # built-in formats "0%" and "0.00%" (ECMA-376 part 1, 18.8.30)
    formats: list[int] = []
    inside = [False]

    def start(name: str, attributes: dict[str, str]) -> None:
        if name == "numFmt":
            bare = re.sub(r'"[^"]*"|\\.', "", attributes.get("formatCode", ""))
            codes[int(attributes.get("numFmtId", "-1"))] = "%" in bare
        elif name == "cellXfs":
            inside[0] = True
        elif name == "xf" and inside[0]:
            formats.append(int(attributes.get("numFmtId", "0")))

    def end(name: str) -> None:
        if name == "cellXfs":
            inside[0] = False

    try:
        parse_xml(styles or b"", start, end)
    except (expat.ExpatError, ValueError):
        return set()
    return {index for index, code in enumerate(formats) if codes.get(code, False)}


def _sheet_parts(package: Package) -> dict[str, str]:
    """Sheet name → part name, from the workbook and its relations."""
    targets: dict[str, str] = {}
    names: list[tuple[str, str]] = []

    def relation(name: str, attributes: dict[str, str]) -> None:
        if name == "Relationship":
            targets[attributes.get("Id", "")] = attributes.get("Target", "")

    def sheet(name: str, attributes: dict[str, str]) -> None:
        if name == "sheet":
            names.append((attributes.get("name", ""), attributes.get("id", "")))

    parse_xml(package.parts.get("xl/_rels/workbook.xml.rels", b""), relation)
    parse_xml(package.parts.get("xl/workbook.xml", b""), sheet)
    found = {}
    for title, identity in names:
        target = targets.get(identity, "")
        found[title] = target.lstrip("/") if target.startswith("/") else f"xl/{target}"
    return found


class _XlsxCells:
    """Follows the cells of one xlsx sheet as its XML streams by."""

    def __init__(self, percents: set[int]) -> None:
        self.percents = percents
        self.marks: Marks = {}
        self.cells = 0
        self.row = self.column = -1
        self.kind = ""
        self.style = 0
        self.formula = self.inside = False
        self.value = ""

    def start(self, name: str, attributes: dict[str, str]) -> None:
        if name == "row":
            self.row = int(attributes["r"]) - 1 if "r" in attributes else self.row + 1
            self.column = -1
        elif name == "c":
            self.cells += 1
            if self.cells > 2 * CELLS:
                raise Refusal("file-limit", f"a sheet lists more than {2 * CELLS} cells")
            self._place(attributes.get("r", ""))
            self.kind, self.style = attributes.get("t", ""), int(attributes.get("s", "0"))
            self.formula, self.value = False, ""
        elif name == "f":
            self.formula = True
        elif name in ("v", "is"):
            self.inside = True

    def text(self, data: str) -> None:
        if self.inside and not self.value:
            self.value = data.strip()

    def end(self, name: str) -> None:
        if name in ("v", "is"):
            self.inside = False
        elif name == "c":
            if (self.value or self.formula) and (self.row >= ROWS or self.column >= COLUMNS):
                raise too_large(self.row, self.column)
            if self.kind == "e":
                self.marks[self.row, self.column] = f"error {self.value}"
            elif self.formula and not self.value:
                self.marks[self.row, self.column] = "formula"
            elif self.value and self.style in self.percents:
                self.marks[self.row, self.column] = "percent"

    def _place(self, address: str) -> None:
        match = re.fullmatch(r"([A-Z]{1,4})(\d{1,9})", address)
        if match is None:
            self.column += 1
            return
        self.row, column = int(match[2]) - 1, 0
        for letter in match[1]:
            column = column * 26 + ord(letter) - 64
        self.column = column - 1


def _xlsx_marks(content: bytes, percents: set[int]) -> Marks:
    cells = _XlsxCells(percents)
    parse_xml(content, cells.start, cells.end, cells.text)
    return cells.marks


def _ods_marks(content: bytes) -> dict[str, Marks]:
    """Per sheet, cells of an OpenDocument sheet that are percent, errors, or formulas without a result."""
    sheets: dict[str, Marks] = {}
    state: dict[str, Any] = {"name": "", "row": 0, "column": 0, "rows": 1}

    def start(name: str, attributes: dict[str, str]) -> None:
        if name == "table":
            state.update(name=attributes.get("name", ""), row=0)
            sheets[state["name"]] = {}
        elif name == "table-row":
            state.update(column=0, rows=int(attributes.get("number-rows-repeated", "1")))
        elif name in ("table-cell", "covered-table-cell"):
            times = int(attributes.get("number-columns-repeated", "1"))
            kind = attributes.get("value-type", "")
            mark = "percent" if kind == "percentage" else ""
            if "formula" in attributes and not kind:
                mark = "formula"
            elif attributes.get("calcext:value-type") == "error":
                mark = "error"
            if mark and state["row"] < ROWS:
                for column in range(state["column"], min(state["column"] + times, COLUMNS)):
                    sheets[state["name"]][(state["row"], column)] = mark
            state["column"] += times
            filled = bool(kind)
            if filled and (state["row"] + state["rows"] > ROWS or state["column"] > COLUMNS):
                raise too_large(state["row"] + state["rows"] - 1, state["column"] - 1)

    def end(name: str) -> None:
        if name == "table-row":
            state["row"] += state["rows"]

    parse_xml(content, start, end)
    return sheets
