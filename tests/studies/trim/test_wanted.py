"""The setting that each unit needs, against Brent's method unit by unit."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import brentq

from yieldosc.studies.trim.wanted import wanted_settings

GRID = np.geomspace(1.0, 100.0, 5)


def curve(kind, a, b):
    return {
        "falling": lambda s: a / s**b,
        "rising": lambda s: a * s**b + np.log(s),
        "bent": lambda s: a * (1 + np.tanh(b * (np.log(s) - 2))) + 0.01 * s,
        "steep": lambda s: a * np.exp(-((s / 60) ** (1 + b))),
    }[kind]


@pytest.mark.parametrize("kind", ["falling", "rising", "bent", "steep"])
def test_every_unit_is_where_brent_finds_it(kind):
    random = np.random.default_rng(2)
    a, b = random.uniform(1, 3, 300), random.uniform(0.3, 1.5, 300)
    inside = random.uniform(1.5, 60, 300)
    goal = curve(kind, a, b)(inside)
    found = wanted_settings(curve(kind, a, b), goal, GRID)
    assert found.reached.all()
    for i in range(0, 300, 7):
        one = curve(kind, a[i], b[i])
        exact = brentq(lambda s, one=one, i=i: one(s) - goal[i], 1.0, 100.0, xtol=1e-13, rtol=1e-14)
        # met in frequency to 1e-10 of the goal: all that an instrument can see
        assert one(found.setting[i]) == pytest.approx(goal[i], rel=1e-9)
        if kind != "steep":
            assert found.setting[i] == pytest.approx(exact, rel=1e-6)


def test_a_goal_beyond_a_stop_leaves_the_unit_at_the_stop():
    a = np.array([1.0, 2.0, 3.0, 1.0])
    goal = np.array([2.0, 2.0 / 150, 3.0 / 50, 1.0])  # f = a/s: needs s = 0.5, 150, 50, 1
    found = wanted_settings(lambda s: a / s, goal, GRID)
    assert found.setting == pytest.approx([1.0, 100.0, 50.0, 1.0], rel=1e-9)
    assert found.below.tolist() == [True, False, False, False]
    assert found.above.tolist() == [False, True, False, False]
    assert found.reached.tolist() == [False, False, True, True]


def test_a_unit_that_stops_oscillating_first_is_told_apart():
    """f = a/s, silent above s = 20 (unit 0), above 60 (unit 1), below 5 (unit 2), everywhere (unit 3)."""
    upper, lower = np.array([20.0, 60.0, np.inf, 0.0]), np.array([0.0, 0.0, 5.0, 0.0])

    def frequency(s):
        return np.where((s > upper) | (s < lower), np.nan, 1 / s)

    goal = np.array([1 / 40, 1 / 40, 1 / 2, 1 / 40])
    found = wanted_settings(frequency, goal, GRID)
    assert found.ceased.tolist() == [True, False, True, False]
    assert found.unsolved.tolist() == [False, False, False, True]
    assert found.reached.tolist() == [False, True, False, False]
    assert found.setting[1] == pytest.approx(40, rel=1e-9)
    # halved eight times towards the silent end, from a grid of factor 3.16: within 0.5 % of the edge, never beyond
    assert 0.99 * 20 <= found.setting[0] <= 20
    assert 5 <= found.setting[2] <= 1.01 * 5
    assert np.isnan(found.setting[3])


def test_a_goal_between_a_silent_end_and_the_grid_is_still_found():
    """Silent above s = 20; the goal at 15 lies between the grid's 10 and 31.6."""

    def frequency(s):
        return np.where(s > 20, np.nan, 1 / s)

    found = wanted_settings(frequency, np.array([1 / 15]), GRID)
    assert found.reached.all()
    assert found.setting[0] == pytest.approx(15, rel=1e-9)


def test_a_role_without_effect_leaves_every_unit_at_a_setting():
    found = wanted_settings(lambda s: np.full(3, 7.0), np.array([7.0, 8.0, 6.0]), GRID)
    assert found.reached.tolist() == [True, False, False]
    assert np.isfinite(found.setting).all()
