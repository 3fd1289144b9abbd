"""The whole list of cautions, word for word, in the result itself: what JSON, console and sign-off page all show."""

from __future__ import annotations

from dataclasses import replace

import pytest

from yieldosc.reports.findings import summarise
from yieldosc.studies.assess import assess
from yieldosc.studies.cautions import cautions, model_error
from yieldosc.studies.results import Lots
from yieldosc.studies.serialise import assessment_dict

FIRST = [
    "A prediction from stated tolerances, not a measurement of boards.",
    "Every rate supposes that no wrong or defective part is on the board.",
    "The interval covers sampling only; the range over the sets tried shows what assumptions do, and is no bound.",
]
REST = [
    "Model error unknown: no bench frequency of a reference board is given to compare the prediction with.",
    "Not assessed: crystals that sleep or wake at low drive, activity dips, moisture and contamination, handling and "
    "assembly damage, layout coupling, and a clock that runs but is not recognised by what it drives.",
    "Valid only for the parts, values and revisions named here, identified by the input digest.",
    "Approval is a human decision; this page supports it and does not make it.",
    "Where a wrong or missing clock can hurt people, this is one input to the safety analysis that the governing "
    "standard requires; local codes and licensed practice decide.",
]


def lots_of(low, high):
    return Lots(lots=1024, units_per_lot=256, q05=low, q50=0.8, q95=high, share_below_target=None)


def test_without_shared_reels(make_study):
    assert cautions(make_study(), None, None) == (*FIRST, *REST)


@pytest.mark.parametrize(
    ("low", "high", "text"),
    [
        (0.24, 0.93, "nine lots in ten yield from 24 % to 93 %, the others lie outside"),
        (1.0, 1.0, "in more than nine of ten simulated lots of 256 units none failed"),
        (0.0, 0.0, "in more than nine of ten simulated lots of 256 units none was good"),
        (0.5, 1.0, "nine lots in ten yield from 50 % to all of 256 units, the others lie outside"),
        (0.0, 0.5, "nine lots in ten yield from none of 256 units to 50 %, the others lie outside"),
    ],
)
def test_lots_never_read_all_or_nothing(make_study, low, high, text):
    made = cautions(make_study(), None, lots_of(low, high))
    assert made == (
        *FIRST, f"Parts of a reel are alike: the interval describes the pooled rate; {text}.", *REST,
    )  # fmt: skip


def test_model_error_in_one_line(make_study):
    # the prediction is 1/0.99 of the measured frequency, 1.01 % above it
    study = make_study()
    benched = replace(study, design=replace(study.design, bench_frequency_hz=1000.0))
    assert model_error(benched, 0.99) == (
        "Model error on the reference board: prediction +1.01 % from the measured 1 kHz; every unit is scaled by 0.99."
    )
    assert model_error(benched, 1.0002) == (
        "Model error on the reference board: prediction −200 ppm from the measured 1 kHz; every unit is scaled by 1.0002."
    )


def test_json_console_and_page_say_the_same_list(make_study, ideal_wien):
    a = assess(make_study(gain=4.0, share=0.5), units=4096, rival_units=1024, workers=1, evaluator=ideal_wien())
    listed = assessment_dict(a)["cautions"]
    assert listed == list(summarise(a).cautions)
    assert len(listed) == 9 and listed[:3] == FIRST and listed[4:] == REST


def test_no_word_that_promises(make_study):
    for text in cautions(make_study(), None, lots_of(0.5, 0.9)):
        assert not {"safe", "guaranteed", "✓", "certified"} & set(text.lower().replace(",", " ").split())
