"""Drafts: proposals with reasons, open cells that are really open, and a completed draft that loads."""

import csv

import pytest
from openpyxl import load_workbook

from yieldosc.errors import InputError
from yieldosc.sheets.draft import write_draft
from yieldosc.sheets.opening import open_book
from yieldosc.sheets.study_file import load_study

CLOCK = [
    ["Reference", "Value", "Description"],
    ["Y1", "8MHz", "crystal 8.000 MHz 12pF 20ppm ESR 80R"],
    ["C1,C2", "15p", "ceramic C0G 5%"],
    ["C3", "100n", "ceramic X7R 10%"],
    ["R1", "1M", "thick film 5% 200ppm"],
    ["R2", "4k7", "thick film 1%"],
    ["U1", "logger controller", ""],
]
FILLED = {
    "frequency limit low": "-100 ppm", "frequency limit high": "100 ppm", "temperature low": "-20 °C",
    "temperature high": "60 °C", "yield target": "99.9 %", "temperature law of FL": "AT ±30 ppm -40..85 °C",
    "temperature law of RF": "±200 ppm/K",
}  # fmt: skip
BOUNDS = {
    "Cm": ("4 fF", "5.5 fF", "7 fF"), "C0": ("1.2 pF", "1.8 pF", "2.5 pF"), "ESR": ("20", "40", "80"),
    "gm": ("4 mS", "6 mS", "10 mS"),
}  # fmt: skip


@pytest.fixture
def drafted(tmp_path):
    source = tmp_path / "clock.csv"
    with source.open("w", newline="", encoding="utf-8") as file:
        csv.writer(file).writerows(CLOCK)
    before = source.read_bytes()
    path = tmp_path / "clock.xlsx"
    draft = write_draft(open_book(source), circuit="pierce", options={"stage": "inverter"}, path=path)
    assert source.read_bytes() == before  # the source is only read
    return draft, path


def where(cell):
    """ "Roles!F3: tolerance of R1" → sheet, cell, what."""
    place, what = cell.split(": ", 1)
    sheet, coordinate = place.split("!")
    return sheet, coordinate, what


def test_proposals_and_their_reasons(drafted):
    draft, _ = drafted
    found = {p.role: (p.part, p.reason) for p in draft.proposals}
    assert found["FL"] == ("Y1", "the crystal of the BOM (8 MHz)")
    assert found["C1"] == ("C1", "15 pF, small enough for a load capacitor")
    assert found["C2"] == ("C2", "15 pF, small enough for a load capacitor")
    assert found["RF"] == ("R1", "1 MΩ, large enough to lie across an inverter")
    assert found["gm"] == ("U1", "the only ic of the BOM; figures from its data sheet")


def test_every_open_cell_is_empty_and_marked(drafted):
    draft, path = drafted
    book = load_workbook(path)
    assert len(draft.open_cells) > 10
    for cell in draft.open_cells:
        sheet, coordinate, _ = where(cell)
        assert book[sheet][coordinate].value in (None, "")
        assert book[sheet][coordinate].fill.fill_type == "solid"


def test_an_unfinished_draft_is_refused_with_what_is_missing(drafted):
    _, path = drafted
    with pytest.raises(InputError) as caught:
        load_study(path)
    codes = {f.code for f in caught.value.findings if f.level == "error"}
    assert {"empty-item", "value-missing"} <= codes


def test_a_completed_draft_loads(drafted):
    draft, path = drafted
    book = load_workbook(path)
    for cell in draft.open_cells:
        sheet, coordinate, what = where(cell)
        field, _, role = what.partition(" of ")
        value = FILLED.get(what)
        if field == "source":
            value = "characterised"
        elif role in BOUNDS and field in ("min", "typ", "max"):
            value = BOUNDS[role][("min", "typ", "max").index(field)]
        assert value is not None, cell
        book[sheet][coordinate].value = value
    book.save(path)
    study = load_study(path)
    assert (study.circuit.name, study.design.target_frequency_hz) == ("pierce", 8e6)
    assert study.parameter("C1").part == "C1"
    assert study.parameter("gm").high == 10e-3
    assert study.conditions["CL"] == 12e-12


def test_text_of_the_bom_never_becomes_a_formula(tmp_path):
    source = tmp_path / "evil.csv"
    source.write_text('Reference,Value,Description\nR1,1k,"=HYPERLINK(""http://x"")"\nR2,2k,@SUM(A1)\nY1,8MHz,+1\n')
    path = tmp_path / "evil.xlsx"
    write_draft(open_book(source), circuit="pierce", options={}, path=path)
    cells = [cell for row in load_workbook(path)["BOM"].iter_rows() for cell in row if cell.value is not None]
    assert any(str(cell.value).startswith("=") for cell in cells)
    assert {cell.data_type for cell in cells} == {"s"}
