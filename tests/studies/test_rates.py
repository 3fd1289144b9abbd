"""Rates of the ideal equal-arm Wien bridge that are known exactly or from two independent computations.

R ±1 %, C ±5 %, 25 °C, share outside ±3 % of nominal, and share that cannot start. Every simulated rate must lie within
its own 99.99 % interval over several seeds; wrong laws and swapped roles must not.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from yieldosc.parts.linear import Linear
from yieldosc.parts.shapes import Hollow, Normal
from yieldosc.studies.judge import GOOD
from yieldosc.studies.results import OUTCOMES
from yieldosc.studies.run import Setup

UNITS = 200_000
SEEDS = (0, 1, 2)


def shaped(shape, **changes):
    return lambda p: replace(p, shape=shape, **changes) if p.high > p.low else p


def hollow_capacitors(p):
    return replace(p, shape=Hollow(0.4)) if p.kind == "capacitor" else p


def share(study, evaluator, seed, outcome, units=UNITS):
    codes = Setup.of(study, evaluator, seed=seed).codes(0, units)
    return np.count_nonzero(codes == OUTCOMES.index(outcome)) / units


def within(rate, expected, units=UNITS, *, confidence=0.9999, printed=0.0):
    """True when the exact binomial interval around the rate holds the expected value, printed to ± `printed`."""
    failures = round(rate * units)
    interval = stats.binomtest(failures, units).proportion_ci(confidence, method="exact")
    return interval.low - printed <= expected <= interval.high + printed


OUTSIDE = [  # shape, reel share, share outside ±3 %, half a unit of the last printed digit
    ("uniform", None, 0.0, 0.16678, 5e-6),
    ("uniform, same reel", None, 1.0, 0.399, 5e-4),
    ("normal, cut at 3 sd", shaped(Normal(3)), 0.0, 0.0107, 5e-5),
    ("normal, open", shaped(Normal(3, cut=False)), 0.0, 0.0128, 5e-5),
    ("normal, cut at 2 sd", shaped(Normal(2)), 0.0, 0.0567, 5e-5),
    ("normal, open, same reel", shaped(Normal(3, cut=False)), 1.0, 0.07771, 5e-6),
    ("hollow capacitors", hollow_capacitors, 0.0, 0.370, 5e-4),
]


@pytest.mark.parametrize(("name", "change", "reel", "expected", "printed"), OUTSIDE, ids=[row[0] for row in OUTSIDE])
@pytest.mark.parametrize("seed", SEEDS)
def test_share_outside_the_frequency_limits(make_study, ideal_wien, name, change, reel, expected, printed, seed):
    study = make_study(gain=4.0, share=reel, change=change)
    assert within(share(study, ideal_wien(), seed, "out_of_limits"), expected, printed=printed)


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize(("gain", "expected"), [(3.05, 0.14760), (3.10, 0.01156)])
def test_share_that_cannot_start(make_study, ideal_wien, gain, expected, seed):
    study = make_study(gain=gain, rf=0.01, window=0.5)
    assert within(share(study, ideal_wien(), seed, "no_start"), expected, printed=5e-6)


def test_gain_3_2_always_starts(make_study, ideal_wien):
    assert share(make_study(gain=3.2, rf=0.01, window=0.5), ideal_wien(), 1, "no_start") == 0


@pytest.mark.parametrize("seed", SEEDS)
def test_gain_stage_closed_form(make_study, ideal_wien, seed):
    # P(1 + RF/RG < 3) = Φ(−(K−3)/√(((K−1)·0.01/3)² + (2·0.01/3)²)) at K = 3.02: 1.740e-2
    k = 3.02
    expected = stats.norm.cdf(-(k - 3) / np.hypot((k - 1) * 0.01 / 3, 2 * 0.01 / 3))
    assert expected == pytest.approx(1.740e-2, abs=5e-6)
    study = make_study(gain=k, rf=0.01, r=0.0, c=0.0, window=0.5, change=shaped(Normal(3, cut=False)))
    assert within(share(study, ideal_wien(), seed, "no_start"), expected)


@pytest.mark.parametrize(("window", "inside"), [(0.03, 0.600561), (0.04, 0.800181), (0.05, 0.948004)])
@pytest.mark.parametrize("seed", SEEDS)
def test_yield_of_one_over_rc(make_study, ideal_wien, window, inside, seed):
    # Exact integration for f = 1/(RC), R ±1 %, C ±5 %: a Wien bridge whose equal parts are identical.
    study = make_study(gain=4.0, share=1.0, window=window)
    assert within(1 - share(study, ideal_wien(), seed, "out_of_limits"), inside, printed=5e-7)


def test_a_wrong_shape_is_found_out(make_study, ideal_wien):
    study = make_study(gain=4.0, change=shaped(Normal(2)))
    assert not within(share(study, ideal_wien(), 1, "out_of_limits"), 0.16678)


def test_a_wrong_temperature_law_is_found_out(make_study, ideal_wien):
    def drifting(p):
        return replace(p, law=Linear(100e-6, 0.0, "+100 ppm/K")) if p.kind == "capacitor" else p

    cold = {"temperature_low_c": -40.0, "temperature_high_c": -40.0}
    assert within(share(make_study(gain=4.0, **cold), ideal_wien(), 1, "out_of_limits"), 0.16678)
    assert not within(share(make_study(gain=4.0, change=drifting, **cold), ideal_wien(), 1, "out_of_limits"), 0.16678)


def test_swapped_roles_are_found_out(make_study, ideal_wien):
    class Swapped(ideal_wien):
        def solve(self, values, temperature_c, **settings):
            swapped = dict(values) | {"R1": values["C1"] * 1e12, "C1": values["R1"] / 1e12}
            return super().solve(swapped, temperature_c, **settings)

    study = make_study(gain=3.05, rf=0.01, window=0.5)
    assert not within(share(study, Swapped(), 1, "no_start"), 0.14760)


def test_every_unit_has_one_outcome(make_study, ideal_wien):
    codes = Setup.of(make_study(gain=3.05, rf=0.01), ideal_wien(), seed=1).codes(0, 20_000)
    found = {OUTCOMES[c] if c < GOOD else "good" for c in np.unique(codes)}
    assert found == {"good", "no_start", "out_of_limits"}
