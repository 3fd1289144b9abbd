"""The change note's sentences, and its workbook."""

from __future__ import annotations

from dataclasses import replace

import pytest

from yieldosc.reports.compare_words import compare_page
from yieldosc.reports.workbook_compare import compare_workbook
from yieldosc.studies.compare.results import CompareResult, Difference, RateChange, Step
from yieldosc.studies.estimates import tango, yield_estimate
from yieldosc.studies.results import Provenance

UNITS = 10_000


@pytest.fixture
def result(make_study):
    def made(*, first=900, second=50, target=0.99, **changes):
        before = make_study()
        after = make_study(yield_target=target)
        gained = tango(max(first - second, 0), max(second - first, 0), UNITS)
        plain = CompareResult(
            before=before, after=after,
            differences=(
                Difference(group="part", name="C1 tolerance", before="±5 %", after="±2 %", role="C1"),
                Difference(group="part", name="R1 value", before="10 kΩ", after="11 kΩ", role="R1"),
                Difference(group="condition", name="temperature high", before="60 °C", after="70 °C"),
            ),
            rates=(
                RateChange(
                    name="yield", before=yield_estimate(first, UNITS), after=yield_estimate(second, UNITS), difference=gained
                ),
            ),
            steps=(), together=gained, units=UNITS, step_units=UNITS, findings=(),
            provenance=Provenance(
                seed=1, input_sha256="0" * 64, versions={"yieldosc": "0"}, started="", seconds=0.0, workers=1, audited=0,
                disagreeing=0, exact=0,
            ),
        )  # fmt: skip
        return replace(plain, **changes)

    return made


def meaning(r):
    return next(s.sentences for s in compare_page(r).sections if s.key == "meaning")


@pytest.mark.parametrize(
    ("first", "second", "words", "tone"),
    [
        (900, 50, "THE SECOND STUDY YIELDS MORE", "good"),
        (50, 900, "THE SECOND STUDY YIELDS LESS", "bad"),
        (50, 50, "NO DIFFERENCE SHOWN", "open"),
    ],
)
def test_which_yields_more(result, first, second, words, tone):
    page = compare_page(result(first=first, second=second))
    assert (page.words, page.tone) == (words, tone)
    assert page.headline == "2 parts and 1 condition said differently."


@pytest.mark.parametrize(
    ("second", "word"), [(50, "reaches"), (900, "misses"), (100, "cannot be told from")]
)
def test_the_second_study_and_its_target(result, second, word):
    assert meaning(result(second=second)) == (
        f"The second study {word} its target of 99 % on these units; assess gives the verdict.",
    )


def test_without_a_target_nothing_is_said_of_one(result):
    assert meaning(result(target=None)) == ()


def test_no_step_is_credited_that_could_be_chance(result):
    faint = Step(name="C1", yield_=yield_estimate(899, UNITS), difference=tango(3, 2, UNITS))
    told = meaning(result(steps=(faint,), together=tango(3, 2, UNITS)))
    assert len(told) == 1  # the target alone


def test_the_workbook_is_one_page_and_the_second_study(result):
    book = compare_workbook(result())
    assert book.sheetnames == ["Change note", "Provenance", "BOM", "Design", "Roles"]
    texts = {str(c.value) for row in book["Change note"].iter_rows() for c in row if c.value is not None}
    assert {"THE SECOND STUDY YIELDS MORE", "C1 tolerance", "±5 %", "±2 %"} <= texts
    pages = {(c.value, book["Provenance"].cell(c.row, 2).value) for c in book["Provenance"]["A"]}
    assert ("Digest of the first study", "0" * 64) in pages
