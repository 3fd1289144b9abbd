"""Cells of the evidence sheets hold figures rounded to their intervals, bounds outward, never 0 % or 100 %."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from openpyxl import Workbook

from tests.reports.fixture import flawless_assessment, tone_assessment
from yieldosc.reports.amounts import outward
from yieldosc.reports.findings import summarise
from yieldosc.reports.workbook_evidence import assumptions, better_grades
from yieldosc.studies.estimates import clopper_pearson, yield_estimate
from yieldosc.studies.results import Lots


def test_the_digits_of_a_known_interval():
    # 1,010 of 50,000 fail: 97.98 %, exact interval 97.853 to 98.101 %: half-width 0.124, two digits: 0.01
    assert outward(yield_estimate(1010, 50_000)) == (97.98, 97.85, 98.11)
    assert outward(clopper_pearson(25, 100)) == (25.0, 16.8, 34.7)  # exact 16.878 to 34.655 % (SciPy's binomtest)


@given(st.integers(1, 999_999))
def test_bounds_go_outward(failures):
    e = yield_estimate(failures, 1_000_000)
    _, low, high = outward(e)
    assert low <= 100 * e.low + 1e-9 and high >= 100 * e.high - 1e-9


@pytest.mark.parametrize("made", [tone_assessment, flawless_assessment])
def test_cells_hold_no_digit_more(made):
    a = made()
    book = Workbook()
    assumptions(book, a, summarise(a))
    better_grades(book, a)
    for sheet in book.worksheets[1:]:
        for row in sheet.iter_rows():
            for cell in row:
                if isinstance(cell.value, float) and '" %"' in cell.number_format:
                    assert cell.value == round(cell.value, 6)
                    assert 0 < cell.value < 100
                    assert len(f"{cell.value:.10g}".partition(".")[2]) <= 5


def test_lots_never_read_all_or_nothing():
    lots = Lots(lots=1024, units_per_lot=256, q05=0.0, q50=0.9, q95=1.0, share_below_target=None, by_chance=(0.85, 1.0))
    book = Workbook()
    better_grades(book, tone_assessment(lots=lots))
    rows = [[c.value for c in row] for row in book["Better grades"].iter_rows()]
    (row,) = [r for r in rows if r[0] == 1024]
    assert row[:8] == [1024, 256, "none good", 0.9, "none failed", 0.85, "none failed", "no target"]
