"""Sentences on the spread by assumption and on the bench list, matched whole."""

from __future__ import annotations

import io
from dataclasses import replace

from openpyxl import Workbook
from rich.console import Console

from tests.reports.fixture import tone_assessment
from yieldosc.reports.console_knowledge import print_knowledge
from yieldosc.reports.knowledge_words import bench_sentences, rule_text, spread_sentence
from yieldosc.reports.workbook_knowledge import what_to_measure
from yieldosc.studies.estimates import tango, yield_estimate
from yieldosc.studies.results import RivalResult
from yieldosc.studies.scrutiny import BenchItem, Knowledge, Scrutiny


def rival(name, gained, lost):
    return RivalResult(name=name, meaning=name, yield_=yield_estimate(414 + lost - gained, 20_480),
                       difference=tango(gained, lost, 20_480))  # fmt: skip


LOT = Knowledge(name="lot side", roles=("R1", "C1"), sets=4, lowest=rival("lots low", 0, 2048), highest=None)
SHAPE = Knowledge(name="shape", roles=("R1", "C1"), sets=2, lowest=None, highest=rival("all normal", 400, 0))
GBW = Knowledge(name="U1 GBW", roles=("GBW",), sets=2, lowest=None, highest=None)
ITEMS = (
    BenchItem(knowledge="lot side", quantity="reel mean", parts=("C1", "C2"), samples=23, rule="t interval",
              confidence=0.95, reach=0.25, span=0.1),
    BenchItem(knowledge="shape", quantity="distribution", parts=("C1", "C2"), samples=93, rule="Wilks, two-sided",
              confidence=0.95, coverage=0.95, span=0.0195),
    BenchItem(knowledge="U1 GBW", quantity="weak side", parts=("U1",), samples=59, rule="Wilks, one-sided",
              confidence=0.95, coverage=0.95, span=0.01),
    BenchItem(knowledge="temperature laws", quantity="temperature coefficient", parts=("C1",), samples=23,
              rule="t interval", confidence=0.95, reach=0.25, span=0.01),
    BenchItem(knowledge="reel share", quantity="within a reel", parts=("R1", "R2"), samples=23, rule="t interval",
              confidence=0.95, reach=0.25, span=0.01),
)  # fmt: skip


def judged(*found, items=()):
    return tone_assessment(scrutiny=Scrutiny(knowledge=found, bench_list=items))


def test_what_the_yield_hangs_on():
    assert spread_sentence(judged(LOT, SHAPE, GBW)) == (
        "The yield hangs most on lot side (in which half of its tolerance a whole lot lies): −10.00 to 0 points against "
        "the declared set; then on shape: 0 to +1.95 points."
    )
    assert spread_sentence(judged(GBW)) == (
        "None of the 1 pieces of knowledge tried one at a time moves the yield measurably: nothing needs to be measured "
        "for it."
    )
    assert spread_sentence(tone_assessment()) == ""


def test_bench_list():
    assert bench_sentences(judged(LOT, items=ITEMS)) == (
        "Measure 23 pieces from each reel of C1 and C2: their mean is known to 25 % of the half-width of its spread "
        "with 95 % confidence; 10.0 points of yield hang on it.",
        "Measure the values of 93 pieces of each of C1 and C2: their least and greatest value enclose 95 % of the lot "
        "with 95 % confidence; 1.95 points of yield hang on it.",
        "Measure U1 GBW on 59 pieces: the weakest bounds 95 % of all pieces with 95 % confidence; 1.00 points of yield "
        "hang on it.",
        "Measure C1 at the coldest and hottest temperature, 23 pieces of each: their mean is known to 25 % of the "
        "half-width of its spread with 95 % confidence; 1.00 points of yield hang on it.",
        "Measure 23 pieces of each of R1 and R2 from each of two or more reels: their mean is known to 25 % of the "
        "half-width of its spread with 95 % confidence; 1.00 points of yield hang on it.",
    )
    assert [rule_text(item) for item in ITEMS[:3]] == [
        "t(n − 1)·s/√n ≤ 0.25 half-widths, s = 1/√3 half-width (flat), C = 0.95: Student's interval of a mean",
        "1 − n·pⁿ⁻¹ + (n − 1)·pⁿ ≥ C, p = 0.95, C = 0.95: Wilks, Ann. Math. Statist. 12 (1941) 91; no distribution supposed",
        "1 − pⁿ ≥ C, p = 0.95, C = 0.95: Wilks, Ann. Math. Statist. 12 (1941) 91; no distribution supposed",
    ]


def test_bars_stand_around_the_declared_set():
    console = Console(file=io.StringIO(), width=100, color_system=None)
    print_knowledge(judged(LOT, SHAPE, GBW, items=ITEMS[:1]), console)
    lines = console.file.getvalue().splitlines()
    bars = {line.split("  ")[1]: line for line in lines if "│" in line}
    assert len({line.index("│") for line in bars.values()}) == 1  # one mark under the other
    assert bars["lot side"].endswith("−10.00 to 0")
    assert bars["lot side"].index("█") < bars["lot side"].index("│")
    assert bars["shape"].index("█") > bars["shape"].index("│")
    assert "█" not in bars["U1 GBW"]
    assert "What to measure" in console.file.getvalue()
    plain = Console(file=io.StringIO(), width=100, color_system=None)
    print_knowledge(judged(GBW), plain)
    assert "│" not in plain.file.getvalue()
    assert "nothing needs to be measured" in " ".join(plain.file.getvalue().split())


def test_the_sheet_has_a_chart_over_its_own_cells():
    book = Workbook()
    what_to_measure(book, judged(LOT, SHAPE, items=ITEMS))
    sheet = book["What to measure"]
    (chart,) = sheet._charts
    assert [s.val.numRef.f for s in chart.series] == ["'What to measure'!$B$6:$B$7", "'What to measure'!$C$6:$C$7"]
    assert sheet["B6"].value == -10.0 and sheet["C7"].value == 1.95  # 400 of 20,480 units, to the digits of its interval
    text = [str(c.value) for row in sheet.iter_rows() for c in row if c.value is not None]
    assert any("Wilks" in t for t in text)


def test_no_sheet_without_a_question():
    book = Workbook()
    what_to_measure(book, replace(tone_assessment(), scrutiny=None))
    assert book["What to measure"]["A4"].value == "No piece of knowledge differs from the declared set."
