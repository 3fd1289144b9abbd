"""The finding on temperatures between the grid's, whole."""

from __future__ import annotations

import math

import pytest

from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.scrutiny import TemperatureCheck
from yieldosc.studies.temperature_remarks import temperature_findings


def check(*, flips=0, missed=0, allowed=1.6e-4, reach=0.0078, checked=50_000):
    return TemperatureCheck(
        temperatures=10, reach=reach, excursion=reach / 2, pilot=1024, units=50_000, flips=flips,
        flip_rate=clopper_pearson(flips, 50_000), checked=checked, missed=missed,
        missed_rate=clopper_pearson(missed, checked), allowed=allowed,
    )  # fmt: skip


LOOKED = (
    "Between the 10 temperatures good units within 0.78 % of a limit's window were judged too, halfway and at their own "
    "turning points"
)


@pytest.mark.parametrize(
    ("made", "level", "text"),
    [
        (
            check(), "note",
            f"{LOOKED}: none of 50,000 fails only there, below 74 ppm. The temperatures alone are dense enough: a tenth "
            "of the half-width of the yield's interval is 0.016 %.",
        ),
        (
            check(reach=0.0), "note",
            "Between the 10 temperatures no unit of 1,024 comes nearer to a limit than at them, so none of 50,000 was "
            "judged there: below 74 ppm fail only there. The temperatures alone are dense enough: a tenth of the "
            "half-width of the yield's interval is 0.016 %.",
        ),
        (
            check(flips=850, allowed=4e-4), "note",
            f"{LOOKED}: of 50,000 850 fail only there, 1.70 % (1.58 to 1.82 %), counted as failing. Eight times as "
            "dense, none more fails of 50,000, below 74 ppm: dense enough, for a tenth of the half-width of the "
            "yield's interval is 0.04 %.",
        ),
        (
            check(flips=1, allowed=5.1e-6, reach=math.inf), "note",
            "Between the 10 temperatures all good units were judged too, halfway and at their own turning points: of "
            "50,000 1 fails only there, 20.0 ppm (0.5 to 111.5 ppm), counted as failing. Eight times as dense, none "
            "more fails of 50,000, below 74 ppm; a tenth of the half-width of the yield's interval is 5.1 ppm, less "
            "than so many units can show.",
        ),
        (
            check(flips=850, missed=60, allowed=4e-4), "warning",
            f"{LOOKED}: of 50,000 850 fail only there, 1.70 % (1.58 to 1.82 %), counted as failing. Eight times as "
            "dense, 60 of 50,000 more fail, 1200 ppm (910 to 1550 ppm), and are not counted; allowed is 0.04 %, a "
            "tenth of the half-width of the yield's interval: state more 'temperature points'.",
        ),
    ],
)  # fmt: skip
def test_every_case(made, level, text):
    (finding,) = temperature_findings(made)
    assert (finding.level, finding.text) == (level, text)


def test_one_temperature_needs_no_sentence():
    assert temperature_findings(None) == []
