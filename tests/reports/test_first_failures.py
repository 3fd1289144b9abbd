"""How units start at the ends of the range, and where failing ones fail first: whole sentences."""

from __future__ import annotations

from dataclasses import replace

from tests.reports.fixture import bare_assessment, tone_assessment
from yieldosc.reports.first_failures import start_at_the_ends, where_units_fail_first
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.scrutiny import Scrutiny, TemperatureCheck


def test_coldest_and_hottest():
    # the fixture: 12 of 50,000 at −20 °C, 9 at 60 °C; margins centred on 1.062 less four standard deviations
    assert start_at_the_ends(tone_assessment()) == (
        "Start-up at the coldest, -20 °C: 240 ppm (120 to 420 ppm) do not start, smallest margin 1.002; at the hottest, "
        "60 °C: 180 ppm (80 to 350 ppm) do not start, smallest margin 1.005."
    )
    assert start_at_the_ends(bare_assessment()) == ""


def test_where_units_fail_first():
    a = tone_assessment()
    corners = tuple(replace(c, first_failures=n) for c, n in zip(a.corners, (632, 0, 3, 40, 0, 0, 7, 0, 5, 1), strict=True))
    check = TemperatureCheck(
        temperatures=10, reach=0.1, excursion=0.05, pilot=1024, units=50_000, flips=12,
        flip_rate=clopper_pearson(12, 50_000), checked=50_000, missed=0, missed_rate=clopper_pearson(0, 50_000),
        allowed=1e-4,
    )  # fmt: skip
    judged = replace(a, corners=corners, scrutiny=Scrutiny(temperatures=check))
    names = [c.corner.text for c in a.corners]
    assert where_units_fail_first(judged) == (
        f"Going through the corners from cold to hot, failing units fail first: 632 at {names[0]}, 40 at {names[3]}, "
        f"7 at {names[6]}, 5 at {names[8]}, 4 elsewhere and 12 only between two temperatures."
    )
    assert where_units_fail_first(replace(a, corners=tuple(replace(c, first_failures=0) for c in a.corners))) == ""
