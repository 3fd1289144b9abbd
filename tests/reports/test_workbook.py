"""The workbook: values only, text that stays text, pages that print, the console's sentences, and itself a study."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from openpyxl import Workbook, load_workbook

from tests.reports.fixture import bare_assessment, flawless_assessment, tone_assessment, tone_study
from yieldosc.errors import Finding, Place
from yieldosc.reports.findings import summarise
from yieldosc.reports.scales import decimals_of, scaled_unit, with_unit
from yieldosc.reports.workbook import make_workbook, write_workbook
from yieldosc.reports.workbook_charts import rounded_axis
from yieldosc.reports.workbook_page import lines_needed
from yieldosc.sheets.study_file import load_study
from yieldosc.studies.assess import assess
from yieldosc.studies.serialise import assessment_dict

EXAMPLES = Path(__file__).parents[2] / "bom_examples"
OWN = [
    "Sign-off", "Leading parts", "Temperatures", "Frequency spread", "Extremes", "Assumptions", "What to measure",
    "Better grades", "Capability", "Inputs used", "Import findings", "Worst units", "Method", "Provenance",
]  # fmt: skip


@pytest.fixture(scope="module")
def written(tmp_path_factory):
    path = tmp_path_factory.mktemp("result") / "tone.xlsx"
    write_workbook(tone_assessment(), path)
    return load_workbook(path)


def cells(book):
    for sheet in book.worksheets:
        for row in sheet.iter_rows():
            yield from (cell for cell in row if cell.value is not None)


def texts(sheet):
    return [cell.value for row in sheet.iter_rows() for cell in row if isinstance(cell.value, str)]


def test_sheets_in_reading_order_with_the_study_behind(written):
    assert written.sheetnames == [*OWN, "BOM", "Design", "Roles"]


def test_no_cell_is_a_formula(written):
    assert [cell.coordinate for cell in cells(written) if cell.data_type == "f"] == []


def test_text_from_outside_never_becomes_a_formula(tmp_path):
    evil = '=HYPERLINK("http://x","y")'
    a, study = tone_assessment(), tone_study()
    parameters = tuple(replace(p, part=evil, note="@SUM(A1)") for p in study.parameters)
    hostile = replace(
        a,
        study=replace(
            study, name=evil, parameters=parameters, bom_rows=(("Part", "Value"), (evil, "-50 ppm"), ("+1", "\t=1"))
        ),
        findings=(Finding("warning", "x", evil, Place(evil, 1, "A")),),
        rivals=tuple(replace(r, name=evil, meaning="+" + evil) for r in a.rivals),
        conditions=(evil,),
        tighter=(replace(a.tighter[0], part=evil, from_tolerance="-5 %"),),
    )
    path = tmp_path / "hostile.xlsx"
    write_workbook(hostile, path)
    book = load_workbook(path)
    assert [cell.coordinate for cell in cells(book) if cell.data_type == "f"] == []
    bom = book["BOM"]
    assert (bom["A2"].value, bom["B2"].value) == (evil, "-50 ppm")  # kept to the letter, so that it reads back
    assert bom["A2"].quotePrefix and bom["B2"].quotePrefix and not bom["A1"].quotePrefix
    for cell in cells(book):
        if isinstance(cell.value, str) and cell.value[:1] in tuple("=+-@"):
            assert cell.quotePrefix, cell.coordinate


def test_control_characters_are_left_out(tmp_path):
    path = tmp_path / "control.xlsx"
    write_workbook(replace(tone_assessment(), study=replace(tone_study(), name="a\x1b[2Jb\x00c")), path)
    assert "a[2Jbc" in texts(load_workbook(path)["Sign-off"])


def test_the_sign_off_page_prints_on_one_page(written):
    sheet = written.worksheets[0]
    assert sheet.page_setup.orientation == "portrait"
    assert (sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight) == (1, 1)
    assert sheet.sheet_properties.pageSetUpPr.fitToPage
    width = sum(sheet.column_dimensions[c].width for c in "ABCDE")
    height = sum(sheet.row_dimensions[r].height or 15.0 for r in range(1, sheet.max_row + 1))
    # A4 less margins is 7.3 × 10.4 inches; a character is about 1/13.7 inch wide: not below two thirds of full size
    assert max(width / 13.7 / 7.3, height / 72 / 10.4) < 1.5
    for who in ("Prepared", "Checked", "Approved", "Name", "Date", "Signature"):
        assert who in texts(sheet)


def test_many_open_points_still_leave_a_readable_page(tmp_path):
    findings = tuple(Finding("warning", "w", f"{n} " + "something is doubtful " * 9) for n in range(40))
    sheet = make_workbook(replace(tone_assessment(), findings=findings)).worksheets[0]
    assert sum(sheet.row_dimensions[r].height or 15.0 for r in range(1, sheet.max_row + 1)) / 72 / 10.4 < 1.5
    assert "•  and 34 more, on the sheet 'Import findings'" in texts(sheet)  # 2 conditions and 40 warnings, 8 shown


def test_every_page_is_one_page_wide_and_numbered(written):
    for sheet in written.worksheets:
        assert sheet.page_setup.fitToWidth == 1, sheet.title
        assert sheet.sheet_properties.pageSetUpPr.fitToPage, sheet.title
        assert sheet.oddFooter.right.text == "Page &P of &N", sheet.title
        if sheet.title != "Sign-off":
            assert sheet.freeze_panes is not None, sheet.title


@pytest.mark.parametrize("make", [tone_assessment, flawless_assessment])
def test_the_sign_off_page_says_what_the_console_says(make, tmp_path):
    a = make()
    write_workbook(a, tmp_path / "x.xlsx")
    said, s = texts(load_workbook(tmp_path / "x.xlsx").worksheets[0]), summarise(a)
    for sentence in (s.verdict, s.headline, *s.conditions, s.yield_label, s.yield_value, s.yield_note, s.range_label,
                     s.range_value, s.range_note, *s.leading, s.pedigrees):  # fmt: skip
        assert sentence in said
    for sentence in (*s.next_steps, *s.open_points, *s.cautions):
        assert f"•  {sentence}" in said
    for r in s.requirements:
        assert {r.name, r.limit, r.failing, r.verdict} <= set(said)
    assert f"SHA-256 {a.provenance.input_sha256}" in said


def test_yield_and_range_stand_in_the_same_size(written):
    sizes = {
        cell.value: cell.font.size
        for row in written.worksheets[0].iter_rows()
        for cell in row
        if cell.value is not None
    }
    s = summarise(tone_assessment())
    assert sizes[s.yield_value] == sizes[s.range_value] > 12


def test_nothing_claims_all_or_none_where_nothing_failed(tmp_path):
    write_workbook(flawless_assessment(), tmp_path / "x.xlsx")
    for cell in cells(load_workbook(tmp_path / "x.xlsx")):
        if isinstance(cell.value, str):
            assert "100 %" not in cell.value and "100.0" not in cell.value
        elif "%" in cell.number_format:
            assert cell.value != 1, f"{cell.parent.title}!{cell.coordinate}"


def test_charts_are_native_with_axes_and_titles():
    book = make_workbook(tone_assessment())
    counts = {sheet.title: len(sheet._charts) for sheet in book.worksheets if sheet._charts}
    assert counts == {"Leading parts": 2, "Temperatures": 2, "Frequency spread": 1, "Assumptions": 1}
    for sheet in book.worksheets:
        for chart in sheet._charts:
            assert chart.tagname in ("barChart", "scatterChart")
            assert chart.title is not None and chart.y_axis.title is not None
            assert not chart.x_axis.delete and not chart.y_axis.delete


def test_the_histogram_draws_both_limits(written):
    sheet = written["Frequency spread"]
    values = [cell.value for row in sheet.iter_rows(min_col=24) for cell in row if isinstance(cell.value, float)]
    assert values.count(pytest.approx(-3.0)) >= 2 and values.count(pytest.approx(3.0)) >= 2  # 970 and 1030 of 1000 Hz
    bars = [row[2].value for row in sheet.iter_rows(min_row=1, max_col=3) if isinstance(row[2].value, int)]
    assert sum(bars) == pytest.approx(50_000, abs=20)  # the fixture's rounding, four standard deviations


def test_inputs_carry_their_text_and_cell(written):
    rows = [[cell.value for cell in row[:4]] for row in written["Inputs used"].iter_rows()]
    assert ["R1", "tolerance", "±1%", "Roles!F2"] in rows
    assert ["design: target frequency hz", None, "1 kHz", "Design!B3"] in rows
    assert ["R1", None, "15.642 kΩ", "15.8 kΩ"] in rows  # 15.8 kΩ − 1 %


def test_worst_units_show_every_part_value(written):
    sheet = written["Worst units"]
    rows = {row[0].value: row for row in sheet.iter_rows(min_row=4) if row[0].value}
    heading = [cell.value for cell in sheet[4]]
    assert heading[1:] == ["Typical", "Unit 17", "Unit 402", "Unit 9"]
    assert rows["Outcome"][2].value == "no start" and rows["Corner"][2].value == "-20 °C"
    assert rows["R1"][2].value == pytest.approx(15.879)  # +0.5 % of 15.8 kΩ
    assert rows["C1"][2].value == pytest.approx(10.1)  # +1 % of 10 nF
    assert rows["C1"][2].number_format == '#,##0.000" nF"'
    assert {p.role for p in tone_study().parameters} <= set(rows)


def test_a_failed_write_leaves_nothing(tmp_path, monkeypatch):
    target = tmp_path / "x.xlsx"
    target.write_bytes(b"old")

    def broken(self, path):
        Path(path).write_bytes(b"half")
        raise OSError("disk full")

    monkeypatch.setattr(Workbook, "save", broken)
    with pytest.raises(OSError, match="disk full"):
        write_workbook(tone_assessment(), target)
    assert [p.name for p in tmp_path.iterdir()] == ["x.xlsx"]
    assert target.read_bytes() == b"old"


def test_the_result_is_itself_the_study(tmp_path):
    study = load_study(EXAMPLES / "tide_tone_1khz.xlsx")
    settings = {"units": 2048, "rival_units": 1024, "workers": 1}
    found = assess(study, **settings)
    write_workbook(found, tmp_path / "result.xlsx")
    again = load_study(tmp_path / "result.xlsx")
    assert again.digest == study.digest
    first, second = assessment_dict(found), assessment_dict(assess(again, **settings))
    for key in ("verdict", "yield", "outcomes", "corners", "ranking", "rivals", "bands", "worst_units"):
        assert first[key] == second[key], key


def test_an_assessment_with_little_in_it_is_written_too(tmp_path):
    write_workbook(bare_assessment(), tmp_path / "x.xlsx")
    book = load_workbook(tmp_path / "x.xlsx")
    assert book.sheetnames[: len(OWN)] == OWN
    assert "—" in texts(book["Temperatures"])
    assert not [cell for cell in cells(book) if isinstance(cell.value, str) and "nan" in cell.value.lower().split()]


def test_scales_of_columns():
    assert scaled_unit(10e-9, "F") == (pytest.approx(1e9), "nF")
    assert scaled_unit(15.8e3, "Ω") == (pytest.approx(1e-3), "kΩ")
    assert scaled_unit(0.65, "1") == (1.0, "")
    assert (decimals_of(15.8), decimals_of(1234.5), decimals_of(0.0)) == (3, 1, 2)
    assert with_unit(2, "ppm", signed=True) == '+#,##0.00" ppm";−#,##0.00" ppm";#,##0.00" ppm"'


def test_axes_end_at_round_numbers():
    assert rounded_axis(-4.78, 5.61) == (-6, 6, 2)
    assert rounded_axis(0, 313) == (0, 350, 50)
    assert rounded_axis(25, 25) == (20, 30, 5)


def test_lines_of_wrapped_text():
    assert lines_needed("short", 20) == 1
    assert lines_needed("eleven char words wrap", 13.5) == 2  # "eleven char", "words wrap"
    assert lines_needed("x" * 30, 11.5) == 3
