"""What a trim reports: shares, stops, margins, the range it suggests."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from yieldosc.reports.limits_words import limits_page
from yieldosc.studies.limits.limits import limits
from yieldosc.studies.trim.report import kind_text, trim_result
from yieldosc.studies.trim.trim import Trim

UNITS = 16_384


def closed(b, units=UNITS):
    """Margin after the trim and needed setting of each board, by formula: gain/(1 + R1/R2 + C2/C1)."""
    v = b.values(units)
    gain = 1 + v["RF"] / v["RG"]
    needed = b.needed_ohm(units)
    own = v["R1"] / b.study.parameter("R1").typical

    def margin(setting):
        return gain / (1 + own * setting / v["R2"] + v["C2"] / v["C1"])

    return needed, margin


def result(b, units=UNITS):
    return trim_result(b.setup, (b.trim,), units)


def test_shares_are_those_of_the_formula_on_the_same_boards(bench):
    b = bench(low=9.4e3, high=11e3)
    needed, _ = closed(b)
    t = result(b)
    assert t.at_low.failures == np.count_nonzero(needed < 9.4e3)
    assert t.at_high.failures == np.count_nonzero(needed > 11e3)
    assert t.reached.failures == np.count_nonzero((needed >= 9.4e3) & (needed <= 11e3))
    assert (t.ceased.failures, t.unreadable.failures) == (0, 0)
    assert t.reached.units == t.units == UNITS


def test_frequency_and_margin_before_and_after(bench):
    """Pulling costs margin: the boards that need a large R1 start with less gain to spare."""
    b = bench(c=0.1)
    needed, margin = closed(b)
    t = result(b)
    (c,) = t.corners
    assert c.after.min == pytest.approx(b.trim.target_hz, rel=1e-9)
    assert c.after.max == pytest.approx(b.trim.target_hz, rel=1e-9)
    assert c.margin_before.q001 == pytest.approx(np.quantile(margin(1e4), 0.001), rel=1e-9)
    assert c.margin_after.q001 == pytest.approx(np.quantile(margin(needed), 0.001), rel=1e-6)
    assert c.margin_after.q001 < c.margin_before.q001


def test_yield_before_and_after_and_their_difference(bench):
    """±3 % limits: before, the share of boards inside; after, every board that reaches or stops inside them."""
    b = bench(low=9.4e3, high=11e3)
    needed, _ = closed(b)
    v = b.values(UNITS)
    before = 1 / (2 * np.pi * np.sqrt(v["R1"] * v["C1"] * v["R2"] * v["C2"]))
    left = np.clip(needed, 9.4e3, 11e3)
    after = b.trim.target_hz * np.sqrt(needed / left)
    good = [np.abs(f / b.trim.target_hz - 1) <= 0.03 for f in (before, after)]
    t = result(b)
    assert t.yield_before.failures == np.count_nonzero(~good[0])
    assert t.yield_after.failures == np.count_nonzero(~good[1])
    assert t.difference.estimate == pytest.approx((good[1].mean() - good[0].mean()), abs=1e-12)
    assert t.difference.low > 0


def test_units_that_stop_oscillating_on_the_way_are_counted_as_such(bench):
    """Gain 3.05 leaves R1/R2 + C2/C1 ≤ 2.05: a board that needs a larger R1 stops first."""
    b = bench(gain=3.05, c=0.02, low=8e3, high=13e3)
    needed, margin = closed(b)
    t = result(b)
    # all boards start at the lowest setting; the trim goes up from there
    assert (margin(8e3) >= 1).all()
    stopping = (margin(needed) < 1) & (needed < 13e3)
    assert t.unreadable.failures == 0
    assert stopping.any()
    # the edge is closed in on by eight halvings of a grid step of 13 %: 0.05 %
    almost = (margin(needed * 1.0006) < 1) & (needed < 13e3)
    assert np.count_nonzero(stopping) <= t.ceased.failures <= np.count_nonzero(almost)
    assert t.reached.failures == UNITS - t.ceased.failures


def test_the_suggested_range_is_what_999_of_1000_boards_need(bench):
    b = bench(low=9.4e3, high=11e3)
    needed, _ = closed(b)
    t = result(b)
    low, high = np.quantile(needed, [0.0005, 0.9995])
    assert (t.suggested_low, t.suggested_high) == (pytest.approx(low, rel=1e-8), pytest.approx(high, rel=1e-8))
    assert t.suggested_reached.low < 0.999 < t.suggested_reached.high  # of boards that did not choose it
    assert t.needed["q50"] == pytest.approx(np.median(needed), rel=1e-8)
    assert t.searched == (pytest.approx(9.4e3 / 3), pytest.approx(33e3))
    assert t.unmet.failures == 0


def test_the_bias_of_the_lowest_yield_is_reported(bench):
    """An instrument that may read 2.9 % off either way: boards are set 2.9 % off, and some leave the ±3 %."""
    b = bench(sd=1e-3)
    off = 2.9e-2 * b.trim.target_hz
    trims = tuple(Trim.of(b.study, bias_hz=x) for x in (0.0, -off, off))
    calm, worst = trim_result(b.setup, trims[:1], 4096), trim_result(b.setup, trims, 4096)
    # noise 0.1 %: P(|2.9 + 0.1 z| > 3) = P(z > 1) = 15.9 %
    assert calm.yield_after.estimate == 1.0
    assert worst.yield_after.low < 1 - 0.15866 < worst.yield_after.high


@pytest.mark.parametrize(
    ("how", "text"),
    [
        ({}, "continuous"),
        ({"trim_step": 250.0}, "steps of 250 Ω"),
        ({"trim_step": 250.0, "trim_step_tolerance": 0.05}, "steps of 250 Ω, each ±5 %"),
        ({"trim_series": "E24"}, "select on test from 6 values"),
    ],
)
def test_the_kind_of_trim_in_words(bench, how, text):
    """E24 from 8 kΩ to 13 kΩ: 8.2, 9.1, 10, 11, 12, 13."""
    assert kind_text(bench(low=8e3, high=13e3, **how).trim) == text


def test_limits_are_chosen_for_trimmed_boards_and_the_page_says_what_to_fit(bench):
    b = bench(sd=1e-4, escape_limit=1e-3)
    r = limits(b.study, units=8192, workers=1, evaluator=b.evaluator)
    assert r.trim.yield_before.estimate < 0.9
    assert r.bad.failures == 0  # every trimmed board is good
    steps = next(s.sentences for s in limits_page(r).sections if s.key == "steps")
    assert steps[-1].startswith("Trim R1 from ")
    two = limits(b.study, units=8192, workers=2, evaluator=b.evaluator)
    assert replace(two, provenance=r.provenance) == r


def test_no_trim_without_a_role(make_study):
    assert Trim.of(make_study()) is None
    with pytest.raises(KeyError):
        Trim.of(make_study(trim_role="R99", trim_low=1.0, trim_high=2.0))
