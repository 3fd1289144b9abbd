"""What the reader of BOMs asks: contradictions, slips, what is missing. Whole texts of findings; invented tables."""

import pytest

from tests.sheets.made_books import book, only, read, texts
from yieldosc.sheets.bom import read_bom
from yieldosc.sheets.grid import EMPTY, Cell, Grid

LAST = "state no tolerance; none is assumed: write it in a column Tolerance or in Roles for the parts of the circuit"


def test_contradictions_are_findings_and_no_choice_in_silence() -> None:
    reading = read(
        "Ref|Value|Description|Part number",
        "C8|0 ohm resistor||",
        "C1|20nF||AB0402-22N-J",
        "R2|1k|resistor 2.2 kΩ|",
        "R3|10k 5%||AB0402-10K-F",
    )
    assert [(x.kind, x.value) for x in reading.lines] == [
        ("resistor", 0.0), ("capacitor", 20e-9), ("resistor", 1e3), ("resistor", 1e4),
    ]  # fmt: skip
    assert reading.lines[3].tolerance == (-0.05, 0.05)
    assert texts(reading) == [
        "warning bom-kind-contradiction BOM!2: C8 has the letter of a capacitor, but its line says "
        "resistor; it was read as "
        "resistor: correct the designator or the line",
        'warning bom-number-contradiction BOM!D3: the part number "AB0402-22N-J" reads as 22 nF, the '
        "line says 20 nF; the line "
        "was taken: correct the wrong one",
        'warning bom-value-contradiction BOM!C4: "1k" stands beside "2.2 kΩ"; 1 kΩ was read: correct the wrong one',
        'warning bom-number-contradiction BOM!D5: the part number "AB0402-10K-F" reads as another '
        'tolerance than "5%"; the '
        "latter was taken: correct the wrong one",
    ]


def test_part_numbers_fill_only_what_is_open_and_are_marked() -> None:
    reading = read("Ref|Value|MPN", "R1||AB0603FR-0710KL", "C1|100nF|C0603C104K5RABCD", "L1||AB3015-3R3M")
    assert [(x.value, x.tolerance, x.temperature_law, x.decoded) for x in reading.lines] == [
        (1e4, (-0.01, 0.01), None, ("value", "tolerance")),
        (1e-7, (-0.1, 0.1), "X7R", ("tolerance", "temperature_law")),
        (pytest.approx(3.3e-6), (-0.2, 0.2), None, ("value", "tolerance")),
    ]
    assert texts(reading)[0] == (
        'note bom-decoded BOM!2: value, tolerance read from "AB0603FR-0710KL" only; write it in words where it is wrong'
    )


def test_questions_a_colleague_would_ask() -> None:
    reading = read(
        "Ref|Value|Description",
        "Y1|8 MHz|crystal",
        "C1, C2|22n|load capacitor",
        "C3|10uF C0G|",
        "R1|4.7m|",
        "C4|100MF|",
        "C5|100n X7R 15%|",
        "C6|1u 5% 10%|",
        "R2|12,500k|",
    )
    assert [x.tolerance for x in reading.lines if x.designator in ("C5", "C6")] == [None, None]
    assert sorted(texts(reading)) == [
        'warning bom-comma BOM!B9: "12,500k" was read with a decimal comma as 12.5 kΩ; write a point '
        "where that is wrong",
        'warning bom-dielectric-percent BOM!B7: "15%" is what X7R itself changes over temperature; '
        "it was not read as the "
        "tolerance: write the tolerance in a column Tolerance",
        "warning bom-implausible-value BOM!A4: 10 µF with C0G: so large a class 1 capacitor is rare; "
        "check value and dielectric",
        'warning bom-implausible-value BOM!A5: "4.7m" reads as 4.7 mΩ: m is milli; write M for megaohms',
        'warning bom-implausible-value BOM!A6: "100MF" reads as 100 MF, which no capacitor has; was '
        "another prefix meant?",
        "warning bom-load-capacitor BOM!A3: 22 nF would be a thousand times a usual load capacitor "
        "of a crystal, and there is "
        "no other; was 22 pF meant?",
        'warning bom-tolerance-ambiguous BOM!B8: "5%" and "10%" stand in one cell; which is the '
        "tolerance? none was read: "
        "write it in a column Tolerance",
    ]


def test_crystal_questions() -> None:
    two = read("Ref|Value", "Y1|8MHz 20ppm/30ppm")
    assert only(two).tolerance == (-2e-5, 2e-5)
    assert texts(two) == [
        'warning bom-crystal-ppm BOM!B2: "20ppm" was read as the tolerance at 25 °C and "30ppm" as the limit over '
        "temperature; say which is which",
        'warning bom-crystal-range BOM!B2: "30ppm" holds over a temperature range that is not '
        "stated; write the law in Roles, "
        "for example AT ±30 ppm -40..85 °C",
    ]
    assert texts(read("Ref|Value|Description", "Y1|8MHz|ceramic resonator")) == [
        "warning bom-resonator BOM!2: Y1 is called a resonator; it was read as a crystal: a ceramic "
        "resonator needs its own "
        "tolerance and temperature law"
    ]


def test_nothing_is_invented_and_nothing_dropped() -> None:
    reading = read("Ref|Value", "R1|custom", "C1|104", "Y1|")
    assert [(x.value, x.tolerance) for x in reading.lines] == [(None, None)] * 3
    assert reading.lines[1].source_text == "C1 | 104"
    assert texts(reading) == [
        "warning bom-value-unread BOM!2: no value could be read for R1 (resistor); write it in a "
        'column Value, for example "4.7 kΩ"',
        "warning bom-value-unread BOM!3: no value could be read for C1 (capacitor); write it in a "
        'column Value, for example "10 nF"',
        "warning bom-value-unread BOM!4: no value could be read for Y1 (crystal); write it in a "
        'column Value, for example "8 MHz"',
    ]
    assert (
        read("Ref|Value", "R1|1k").findings[-1].text == f"1 of 1 resistors, capacitors, inductors and crystals {LAST}"
    )


def test_tolerance_column_with_bare_number_percent_cell_and_error() -> None:
    head = tuple(Cell("text", text) for text in ("Ref", "Value", "Tolerance"))
    rows = [
        (Cell("text", "R1"), Cell("number", "4700", 4700.0), Cell("number", "5", 5.0)),
        (Cell("text", "R2"), Cell("number", "4700", 4700.0), Cell("percent", "5 %", 0.05)),
        (Cell("text", "R3"), Cell("error", "#REF!"), Cell("text", "J")),
        (Cell("text", "R4"), Cell("formula_without_result"), EMPTY),
    ]
    reading = read_bom(book(Grid("BOM", (head, *rows))))
    assert [(x.value, x.tolerance) for x in reading.lines] == [
        (4700.0, None), (4700.0, (-0.05, 0.05)), (None, (-0.05, 0.05)), (None, None),
    ]  # fmt: skip
    assert texts(reading, "bom-value-unread") == [
        'warning bom-tolerance-unread BOM!C2: "5" has no unit; write "5 %" or "5 ppm"',
        "warning bom-cell-error BOM!B4: the cell holds the error #REF!; it was not read: correct it",
        "warning bom-formula-empty BOM!B5: the cell holds a formula without a stored result; open "
        "the file in a spreadsheet "
        "program and save it",
    ]
