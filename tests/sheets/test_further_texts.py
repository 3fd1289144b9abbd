"""Findings that need a file or a study of their own, each text whole; invented tables."""

import json
from pathlib import Path

import pytest
from openpyxl import load_workbook

from tests.sheets.clocks import write_clock
from tests.sheets.made_books import book, grid, read, texts
from tests.sheets.studies import BOM, write
from yieldosc.errors import InputError, Place
from yieldosc.sheets.bom import read_bom
from yieldosc.sheets.draft import write_draft
from yieldosc.sheets.grid import Grid
from yieldosc.sheets.opening import _book
from yieldosc.sheets.study_file import load_study


@pytest.mark.parametrize("kind", ["xls", "xlsb"])
def test_a_binary_workbook_says_what_it_hides(kind: str) -> None:
    """What its reader answers for a file with one cell, as the parent process receives it."""
    lines = [{"type": kind}, {"sheet": "BOM", "hidden": False}, {"row": 0, "cells": [[0, "text", "R1", None]]}, {"end": True}]
    opened = _book(Path("bom"), "\n".join(map(json.dumps, lines)), 0, Place("bom"))
    assert [str(f) for f in opened.findings] == [
        f"bom: error cells and percent formats of a .{kind} file cannot be told from blanks and plain numbers; save it as "
        ".xlsx where that matters"
    ]
    assert opened.sheets[0].cell(0, 0).text == "R1"


def test_a_hidden_sheet_and_a_sheet_that_is_not_there() -> None:
    shown = grid("Ref|Value", "R1|1k 1%")
    hidden = Grid("BOM", shown.rows, hidden=True)
    assert texts(read_bom(book(hidden))) == ["note bom-hidden-sheet BOM!1: the sheet is hidden; its parts were read too"]
    with pytest.raises(InputError) as caught:
        read_bom(book(shown), "Parts")
    assert str(caught.value) == 'made.xlsx: there is no sheet "Parts"; the file has: BOM'


def test_an_at_cut_from_words_is_said() -> None:
    reading = read("Ref|Value|Description", "Y1|8MHz|±10ppm @25°C, ±30ppm over -40~85°C")
    assert texts(reading) == [
        "note bom-crystal-cut BOM!C2: 'AT ±30 ppm -40..85 °C': an AT cut is assumed; write another law in Roles where it "
        "is not"
    ]


def test_a_part_in_another_unit(tmp_path: Path) -> None:
    roles = {
        "F": {"Part": "R3", "Source": "measured"}, "V": {"Typ": "5 V", "Tolerance": "±5 %", "Source": "measured"},
        "R1": {"Part": "R1", "Source": "guaranteed"}, "C1": {"Part": "C1", "Source": "guaranteed"},
    }  # fmt: skip
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "study.xlsx", base=roles, design={"circuit": "square_to_sine"}))
    assert str(caught.value) == "Roles!B2: F is in Hz, but the BOM gives R3 as 22 kΩ"


def test_doubts_of_a_draft_are_warnings(tmp_path: Path) -> None:
    path = write(tmp_path / "bom.xlsx", leave_out=["Design", "Roles"])
    grids = tuple(
        Grid(sheet.title, grid("Ref|Value", "Y1|8MHz", "R1|1M", "C1,C2|15p", "U1|controller", "Y2|32.768kHz").rows)
        for sheet in load_workbook(path).worksheets
    )
    draft = write_draft(book(*grids), circuit="pierce", options={}, path=tmp_path / "draft.xlsx")
    assert [str(f) for f in draft.findings if f.code == "draft-doubt"] == [
        f"Roles: {role}: Y1 proposed, the first of 2 crystals (8 MHz); the BOM also has Y2"
        for role in ("FL", "Cm", "C0", "ESR")
    ]


def test_a_series_frequency_needs_no_load(tmp_path: Path) -> None:
    """FS in place of FL and CL: the other way to give a crystal's frequency."""
    roles = {"FL": None, "CL": None, "FS": {"Part": "Y1", "Temperature law": "AT ±30 ppm -40..85 °C", "Source": "guaranteed"}}
    study = load_study(write_clock(tmp_path / "clock.xlsx", roles=roles))
    assert study.parameter("FS").nominal == 8e6
    assert dict(study.conditions) == {}


def test_lines_of_the_bom_are_not_altered_by_a_study(tmp_path: Path) -> None:
    study = load_study(write(tmp_path / "study.xlsx"))
    assert [list(row) for row in study.bom_rows[1:]] == [[str(cell or "") for cell in row] for row in BOM[1:]]
