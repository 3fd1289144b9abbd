"""The Routh count against all roots, the range statements, and what a population's outcomes add up to."""

from __future__ import annotations

import numpy as np
import pytest

from tests.samples import SAMPLES
from tests.solver.test_agreement import draw, solve
from yieldosc.solver.polynomials import roots
from yieldosc.solver.routh import growing_poles
from yieldosc.solver.solution import Status


@pytest.mark.parametrize("degree", [1, 2, 3, 4, 5, 6, 7, 8, 9])
def test_count_equals_all_roots(degree):
    """Random real roots and pairs in both half planes; how many are on the right is known beforehand."""
    rng = np.random.default_rng(degree)
    polys, wanted = [], []
    for _ in range(200):
        pairs = rng.integers(0, degree // 2 + 1)
        reals = rng.choice([-1, 1], degree - 2 * pairs) * rng.uniform(0.2, 3, degree - 2 * pairs)
        halves = rng.choice([-1, 1], pairs) * rng.uniform(0.05, 2, pairs) + 1j * rng.uniform(0.2, 3, pairs)
        every = np.concatenate([reals, halves, halves.conj()])
        polys.append(np.real(np.poly(every))[::-1] * rng.choice([-1, 1]))
        wanted.append(np.count_nonzero(every.real > 0))
    columns = list(np.array(polys).T)
    assert growing_poles(columns).tolist() == wanted


def test_a_breakdown_is_said():
    """s² + 1 has its poles on the axis: the array's first column holds a zero (Routh 1877)."""
    assert growing_poles([np.array([1.0]), np.array([0.0]), np.array([1.0])]).tolist() == [-1]


def test_roots_of_units_with_different_degrees():
    """(x − 2)(x + 3), 5x − 10 and a constant in one block; nan where a unit has no more roots."""
    poly = [np.array([-6.0, -10.0, 4.0]), np.array([1.0, 5.0, 0.0]), np.array([1.0, 0.0, 0.0])]
    found = roots(poly)
    assert sorted(found[0].real) == pytest.approx([-3, 2])
    assert found[1][0] == pytest.approx(2)
    assert np.isnan(found[1][1])
    assert np.isnan(found[2]).all()


def test_range_of_the_op_amp_model():
    """Above GBW/20 the one-pole model is not assessed, whatever the unit does; just below it is."""
    values = {"R1": 10e3, "C1": 10e-9, "R2": 10e3, "C2": 10e-9, "RF": 22e3, "RG": 10e3, "GBW": 30e3}
    drawn = {k: np.full(2, v) for k, v in values.items()} | {"GBW": np.array([25e3, 40e3])}
    s = solve("wien_bridge", {}, drawn, values, 25.0)
    assert s.frequency_hz[0] > 25e3 / 20
    assert s.frequency_hz[1] < 40e3 / 20
    assert [Status(x) for x in s.status] == [Status.NOT_ASSESSABLE, Status.STARTS]


def test_range_of_the_bipolar_stage():
    """f above fT/10 is not assessed; no_bias is said first, since a stage without current has no range."""
    sample = SAMPLES["colpitts"]
    values = {**sample.values, "fT": 300e6}
    drawn = {k: np.full(3, v) for k, v in values.items()} | {"fT": np.array([300e6, 20e6, 20e6])}
    drawn["RB2"] = np.array([10e3, 10e3, 10.0])
    s = solve("colpitts", sample.options, drawn, values, 25.0)
    assert [Status(x) for x in s.status] == [Status.STARTS, Status.NOT_ASSESSABLE, Status.NO_BIAS]


SWITCHING = ("timer_astable", "schmitt_rc", "square_to_sine")  # no growing oscillation, so no margin


@pytest.mark.parametrize("name", [name for name in SAMPLES if name not in SWITCHING])
def test_margin_and_outcome_say_the_same(name):
    sample = SAMPLES[name]
    s = solve(name, sample.options, draw(sample.values, 300, 0.6, seed=9), sample.values, 25.0)
    starts = s.status == Status.STARTS
    assert np.all(s.startup_margin[starts] > 1)
    assert np.all(s.startup_margin[s.status == Status.NO_START] < 1)
    assert np.all((s.growth_per_s[starts] > 0) & np.isfinite(s.growth_per_s[starts]))
    assert np.count_nonzero(s.status == Status.UNDEFINED) == 0
