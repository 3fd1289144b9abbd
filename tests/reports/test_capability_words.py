"""Sentences on capability, whole, and the sheet that holds their numbers."""

from __future__ import annotations

from dataclasses import replace

from openpyxl import Workbook

from tests.reports.fixture import tone_assessment
from yieldosc.reports.capability_words import capability_sentences
from yieldosc.reports.workbook_capability import capability_sheet
from yieldosc.studies.capability import demonstrations
from yieldosc.studies.results import Estimate
from yieldosc.studies.scrutiny import Capability, PilotCapability, Scrutiny


def index(estimate, low, high):
    return Estimate(estimate=estimate, low=low, high=high, units=50_000)


FREQUENCY = Capability(
    output="frequency", corner="60 °C", units=50_000, pp=0.7,
    quantiles=(index(970.0, 969.8, 970.2), index(1001.0, 1000.9, 1001.1), index(1033.0, 1032.7, 1033.3)),
    ppk=index(0.62, 0.61, 0.63), normal_ppk=0.55,
)  # fmt: skip
MARGIN = replace(FREQUENCY, output="margin", pp=None, normal_ppk=0.62, ppk=index(-0.04, -0.05, -0.03),
                 quantiles=(index(1.01, 1.0, 1.02), index(1.06, 1.05, 1.07), index(1.1, 1.09, 1.11)))  # fmt: skip
PILOTS = (PilotCapability(boards=10, low=0.39, high=1.17, probability=0.95),
          PilotCapability(boards=30, low=0.47, high=0.86, probability=0.95))  # fmt: skip
A = tone_assessment(
    scrutiny=Scrutiny(capability=(FREQUENCY, MARGIN), pilots=PILOTS, demonstrations=demonstrations(0.99))
)


def test_every_sentence():
    assert capability_sentences(A) == (
        "Predicted Ppk of the frequency at 60 °C, where it is least: 0.62 (0.61 to 0.63), Pp 0.70; from the 0.135, 50 and "
        "99.865 % points of 50,000 units, normal theory would say 0.55, so the distribution is not normal in its tails.",
        "Predicted Ppk of the start-up margin at 60 °C, where it is least: −0.04 (−0.05 to −0.03); from the 0.135, 50 and "
        "99.865 % points of 50,000 units, normal theory would say 0.62, so the distribution is not normal in its tails.",
        "A capability index is no failing share: every rate here is counted, none comes from an index.",
        "If that is true of the frequency, 95 % of pilot runs show a Ppk within: 10 boards 0.39 to 1.17 and 30 boards 0.47 "
        "to 0.86 (normal boards).",
        "To demonstrate a failing share on real boards at 95 % confidence, so many must be tested without one failure: "
        "299 for 1 %, 2,995 for 1000 ppm, 29,956 for 100 ppm and 299,572 for 10 ppm.",
    )
    assert capability_sentences(tone_assessment()) == ()


def test_normal_theory_that_agrees():
    agreeing = replace(FREQUENCY, normal_ppk=0.625)
    assert capability_sentences(tone_assessment(scrutiny=Scrutiny(capability=(agreeing,))))[0].endswith(
        "units, normal theory says the same."
    )


def test_the_sheet_holds_the_numbers():
    book = Workbook()
    capability_sheet(book, A)
    cells = [[c.value for c in row] for row in book["Capability"].iter_rows()]
    assert any(row[0] == "Ppk" and row[1:4] == ["0.62", "0.61", "0.63"] for row in cells)
    assert any(row[0] == "100 ppm" and row[2] == 29_956 for row in cells)
    assert any(row[0] == 10 and row[1:3] == ["0.39", "1.17"] for row in cells)
    empty = Workbook()
    capability_sheet(empty, tone_assessment())
    assert "No index: it needs 2,731 units that vary, and a limit." in {c.value for r in empty["Capability"] for c in r}
