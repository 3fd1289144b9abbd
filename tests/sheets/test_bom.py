"""BOM tables in every kind of mess that was counted in real ones; every table here is invented."""

import re
import time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.sheets.made_books import book, grid, only, read, texts
from yieldosc.errors import InputError
from yieldosc.sheets.bom import read_bom, reel_key
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.grid import EMPTY, Cell, Grid
from yieldosc.sheets.opening import open_book


def one(value: str, description: str = "", designator: str = "R1") -> BomLine:
    return only(read("Reference|Value|Description", f"{designator}|{value}|{description}"))


@pytest.mark.parametrize(
    ("designator", "value", "description", "kind", "expected"),
    [
        ("R1", "4k7", "", "resistor", 4700.0),
        ("R1", "56", "", "resistor", 56.0),
        ("R1", "2R2", "", "resistor", 2.2),
        ("R1", "R47", "", "resistor", 0.47),
        ("R1", "0/WAKE", "", "resistor", 0.0),
        ("R1", "100 0.1%", "", "resistor", 100.0),
        ("R1", "2,2k", "", "resistor", 2200.0),
        ("R1", "10кОм", "", "resistor", 10e3),
        ("R1", "", "RES, 10K OHM, 1%, 1/20W, 200PPM/C, 0201", "resistor", 10e3),
        ("R1", "", "Resistor 0603 100k Ohm", "resistor", 1e5),
        ("C1", "0u1", "", "capacitor", 1e-7),
        ("C1", "0.1uF/50V/X7R", "", "capacitor", 1e-7),
        ("C1", "4.7uf6.3V", "", "capacitor", 4.7e-6),
        ("C1", "1000p/2KV", "", "capacitor", 1e-9),
        ("C1", "", "0402, 100nF, 10%, X7R, 15%, 25V", "capacitor", 1e-7),
        ("C1", "100nF(104)", "", "capacitor", 1e-7),
        ("C1", "", "CAP, CER, 10.UF, 25V, 10%, X5R", "capacitor", 1e-5),
        ("C1", "4,7мкФ", "", "capacitor", 4.7e-6),
        ("L1", "22uH/2.2A/100mO", "", "inductor", 22e-6),
        ("L1", "(47u)", "", "inductor", 47e-6),
        ("Y1", "8M", "", "crystal", 8e6),
        ("Y1", "32,768 KHZ", "", "crystal", 32768.0),
        ("Y1", "12MHz xtal", "", "crystal", 12e6),
        ("Q1", "8MHz", "crystal", "crystal", 8e6),
        ("X1", "24M", "crystal HC49", "crystal", 24e6),
        ("XTAL1", "16MHz", "", "crystal", 16e6),
        ("JP1", "0 ohm, 0603", "", "resistor", 0.0),
        ("U1", "8 MHz MCU", "microcontroller", "ic", None),
        ("Q1", "NPN", "", "transistor", None),
        ("FB1", "221R", "ferrite bead", "other", None),
        ("T1", "", "Transformer 600 ohm", "other", None),
        ("X1", "", "USB connector", "other", None),
        ("Y1", "10MHz", "OCXO 3.3V", "ic", None),
        ("M0:C1", "100n", "", "capacitor", 1e-7),
        ("kR1", "10k", "", "resistor", 10e3),
    ],
)
def test_kind_and_value(designator: str, value: str, description: str, kind: str, expected: float | None) -> None:
    line = one(value, description, designator)
    assert (line.kind, line.value) == (kind, expected)


@pytest.mark.parametrize(
    ("designator", "value", "tolerance", "law"),
    [
        ("R1", "680R 5% 0603 1/10W 100ppm", (-0.05, 0.05), "±100 ppm/K"),
        ("R1", "10k +/-1% 200PPM/C", (-0.01, 0.01), "±200 ppm/K"),
        ("R1", "4k7 F", (-0.01, 0.01), None),
        ("R1", "10k <= 5%", (-0.05, 0.05), None),
        ("R1", "10k %5", (-0.05, 0.05), None),
        ("C1", "100nF 10% X7R 15%", (-0.1, 0.1), "X7R"),
        ("C1", "10uF +80/-20% Y5V", (-0.2, 0.8), "Y5V"),
        ("C1", "22pF COG J", (-0.05, 0.05), "C0G"),
        ("C1", "22p NPO", None, "NP0"),
        ("C1", "10uF МП0", None, "NP0"),
        ("C1", "0.33 F", None, None),
        ("R1", "10 K", None, None),
        ("C1", "100n F", None, None),
        ("C1", "100n F J", (-0.05, 0.05), None),
        ("C1", "5pF ±0.25pF NP0", (-0.05, 0.05), "NP0"),
        ("L1", "10uH ±20%", (-0.2, 0.2), None),
        ("R1", "4k7", None, None),
    ],
)
def test_tolerance_and_law(designator: str, value: str, tolerance: tuple[float, float] | None, law: str | None) -> None:
    line = one(value, "", designator)
    assert line.temperature_law == law
    assert line.tolerance == (None if tolerance is None else pytest.approx(tolerance, rel=1e-12))


def test_crystal_facts_are_kept_apart() -> None:
    line = one("10MHz", "±10ppm @25°C, ±30ppm -40~85°C, CL=12pF, ESR 60Ω", "Y1")
    assert (line.tolerance, line.load_f, line.esr_ohm) == ((-1e-5, 1e-5), 12e-12, 60.0)
    assert line.temperature_law == "AT ±30 ppm -40..85 °C"
    glued = one("32.768kHz 20PPM7pF", "watch crystal", "X1")
    assert (glued.value, glued.tolerance, glued.load_f) == (32768.0, (-2e-5, 2e-5), 7e-12)


def test_columns_in_other_languages() -> None:
    for heading in (
        "Bauteil|Wert|Toleranz|Anz.",
        "Referencia|Valor|Tolerancia|Cantidad",
        "Обозначение|Номинал|Допуск|Кол-во",
        "位号|值|精度|数量",
        "リファレンス|値|許容差|個数",
    ):
        line = only(read(heading, "C3|10n|±5 %|1"))
        assert (line.designator, line.value, line.tolerance) == ("C3", 1e-8, (-0.05, 0.05))


def test_table_without_headings() -> None:
    reading = read("R1, R2|4k7 1%|0603|2", "C1|100n|0402|1", "Y1|8 MHz|3225|1")
    assert [(x.designator, x.value) for x in reading.lines] == [("R1", 4700), ("R2", 4700), ("C1", 1e-7), ("Y1", 8e6)]
    assert texts(reading) == [
        "note bom-headings-guessed BOM!1: the table has no headings; its columns were told by their content: "
        "A designator, B description, C description, D quantity"
    ]


def test_heading_row_far_down_in_two_rows_and_repeated() -> None:
    reading = read(
        "Tide logger|revision B",
        "",
        "Ref|Qty|",
        "Designator|per board|Value",
        "R1|1|1k",
        "Designator|per board|Value",
        "R2|1|2k",
    )
    assert [(x.designator, x.value, x.place.row) for x in reading.lines] == [("R1", 1e3, 5), ("R2", 2e3, 7)]


def test_sections_totals_and_notes_are_no_parts() -> None:
    reading = read(
        "Ref|Value|Price",
        "Resistors||",
        "R1|1k|0.1",
        "Ref|Value|Price",
        "Radio board||",
        "R1|2k|0.1",
        "Total:||0.2",
        "* all parts by reel||",
    )
    assert [(x.designator, x.value, x.scope) for x in reading.lines] == [
        ("R1", 1e3, "Resistors"),
        ("R1", 2e3, "Radio board"),
    ]
    assert texts(reading) == [
        'note bom-section BOM!2: "Resistors" was read as the title of the rows below',
        "note bom-heading-repeated BOM!4: the heading is repeated here; the row was skipped",
        'note bom-section BOM!5: "Radio board" was read as the title of the rows below',
        "warning bom-duplicate-designator BOM!A6: R1 stands above too, first in row 3, with another "
        "value; all lines are "
        "kept: delete or rename one",
        'note bom-row-skipped BOM!7: "Total:": a total or a number without a part; the row was skipped',
        'note bom-row-skipped BOM!8: "* all parts by reel": a note; the row was skipped',
    ]


def test_several_sheets_are_read_and_a_study_workbook_only_by_its_bom() -> None:
    one_board, other = grid("Ref|Value", "R1|1k", name="Main"), grid("Ref|Value", "R1|2k", name="Radio")
    assert [x.place.sheet for x in read_bom(book(one_board, other)).lines] == ["Main", "Radio"]
    assert [x.place.sheet for x in read_bom(book(one_board, other), sheet="radio").lines] == ["Radio"]
    study = book(grid("Item|Value", "circuit|wien_bridge", name="Design"), other, grid("Ref|Value", "R9|1k"))
    assert [x.designator for x in read_bom(study).lines] == ["R9"]


def test_missing_sheet_and_missing_table() -> None:
    with pytest.raises(InputError) as caught:
        read_bom(book(grid("Ref|Value", "R1|1k")), sheet="Parts")
    assert caught.value.findings[0].text == 'there is no sheet "Parts"; the file has: BOM'
    with pytest.raises(InputError) as caught:
        read_bom(book(grid("hello|world")))
    assert caught.value.findings[0].text == (
        "no table of parts was found; give a sheet with a heading row such as Designator, Value, Tolerance, Description"
    )


def test_designators_beat_the_quantity() -> None:
    reading = read("Ref|Qty|Value", "R1-R4|5|1k", "R7,x3|3|1k")
    assert len(reading.lines) == 5
    assert texts(reading) == [
        "warning bom-quantity-mismatch BOM!B2: the quantity is 5, but 4 designators stand in the "
        "row; the designators were "
        "taken: correct the wrong one",
        "warning bom-designator-count BOM!A3: 3 parts are announced, but only 1 designators named; name them all",
    ]


def test_junk_duplicates_and_parts_without_designator() -> None:
    reading = read("Ref|Qty|Value", "R1, R5-R2|1|1k", "R1|1|1k", "-|2|pin header")
    assert [x.designator for x in reading.lines] == ["R1", "R1", ""]
    assert reading.lines[2].source_text == "- | 2 | pin header"
    assert texts(reading) == [
        'warning bom-designator-junk BOM!A2: "R5-R2" cannot be read as a designator; write a list '
        "such as R1, R2, R5-R8",
        "warning bom-duplicate-designator BOM!A3: R1 stands above too, first in row 2, with the same "
        "value; all lines are "
        "kept: delete or rename one",
        'note bom-no-designator BOM!4: "pin header" has no designator; the row is shown and used nowhere',
    ]


@pytest.mark.parametrize(
    "row",
    ["R1|DNP|", "R1|10k DNP|", "R1|10k|not populated", "R1|10k|Do not fit", "R1|NC|", "R1|10k NC|", "R1|NO STUFF|"],
)
def test_not_fitted_in_value_or_description(row: str) -> None:
    reading = read("Ref|Value|Description", row)
    assert not only(reading).fitted
    assert texts(reading) == []


def test_not_fitted_in_a_column_of_its_own() -> None:
    fitted = {
        x.designator: x.fitted for x in read("Ref|Value|Fitted", "R1|1k|Fitted", "R2|1k|No", "R3|1k|Not Fitted").lines
    }
    assert fitted == {"R1": True, "R2": False, "R3": False}
    marked = {
        x.designator: x.fitted
        for x in read("Ref|Value|DNP|Qty", "R1|1k||1", "R2|1k|x|1", "R3|1k|0|1", "R4|1k||0").lines
    }
    assert marked == {"R1": True, "R2": False, "R3": True, "R4": False}


def test_places_given_texts_and_table_for_writing_back() -> None:
    reading = read("", "Ref|Value|Tol", "R1|4k7|1 %", name="Parts")
    line = only(reading)
    assert (str(line.place), line.given["value"].text, line.given["value"].place) == ("Parts!A3", "4k7", "Parts!B3")
    assert line.row_cells == {"Ref": "R1", "Value": "4k7", "Tol": "1 %"}
    assert reading.table_rows == (("Ref", "Value", "Tol"), ("R1", "4k7", "1 %"))


def test_control_characters_stay_out_of_lines_and_findings() -> None:
    reading = read("Ref|Value|Note\x1b[2J", "R1|4k\x07x\u202e|\x1b[31mred")
    everything = (
        repr([x.to_dict() for x in reading.lines]) + repr([f.text for f in reading.findings]) + repr(reading.table_rows)
    )
    assert not re.search(r"\\x1b|\\x07|\\u202e", everything)


def test_reels_join_equal_parts() -> None:
    lines = read(
        "Ref|Value|Tol|MPN", "R1|1k|1 %|", "R2|1,0k|1 %|", "R3|1k|5 %|", "R4|1k|1 %|AB-1", "R5|9k|5 %|ab-1"
    ).lines
    keys = [reel_key(line) for line in lines]
    assert keys[0] == keys[1] != keys[2]
    assert keys[3] == keys[4] != keys[0]


WORDS = st.sampled_from(
    [
        "R1",
        "C1, C2",
        "4k7",
        "100nF 10% X7R",
        "",
        "=1+1",
        "Ref",
        "Value",
        "Qty",
        "±5 %",
        "8MHz",
        "1e999",
        "C[1-",
        "…",
        "-",
        "%",
        "ppm",
        "±",
        "R1-R99999",
        "\x1b[0m",
        "Total",
        "DNP",
        "#REF!",
        "0402",
        "1/",
        "@",
        "12,500",
        "µ",
        "٣k",
        "²",
        "1" * 400,
    ]
)


@settings(max_examples=150, deadline=None)
@given(st.lists(st.lists(WORDS | st.text(max_size=12), min_size=1, max_size=5), min_size=1, max_size=8))
def test_random_cells_never_give_a_traceback(rows: list[list[str]]) -> None:
    cells = tuple(tuple(Cell("text", text) if text.strip() else EMPTY for text in row) for row in rows)
    try:
        reading = read_bom(book(Grid("BOM", cells)))
    except InputError as refusal:
        assert refusal.findings[0].code == "bom-no-table"
        return
    assert all(line.value is None or line.value >= 0 or line.value < 0 for line in reading.lines)
    assert all("\x1b" not in finding.text for finding in reading.findings)


@pytest.mark.parametrize(
    "text", ["9" * 9000, "a" * 9000, "0402" * 2000, "R1-" * 3000, "± 5" * 3000, "-5%/+" * 1800, "C[1," * 2000]
)
def test_long_cells_take_no_long_time(text: str) -> None:
    start = time.monotonic()
    read("Ref|Value|Description|MPN|Qty|Tolerance", "|".join([text] * 6), "R1|1k||||")
    assert time.monotonic() - start < 3.0


@pytest.mark.parametrize("text", ["ESR 80R", "ESR 80 Ω max", "80 ohm"])
def test_a_crystals_resistance_in_any_notation(tmp_path, text):
    path = tmp_path / "bom.csv"
    path.write_text(f"Reference,Value,Description\nY1,8MHz,Crystal 8.000 MHz 12pF 20ppm {text}\n", encoding="utf-8")
    (line,) = read_bom(open_book(path)).lines
    assert (line.value, line.load_f, line.esr_ohm) == (8e6, 12e-12, 80.0)
