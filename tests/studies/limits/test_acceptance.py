"""Escapes and false rejects against published values, quadrature and the tables of conformity assessment."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import dblquad
from scipy.stats import norm

from yieldosc.studies.limits.acceptance import Instrument, accepted, below, limit_rates
from yieldosc.studies.limits.acceptance import Tested as Units

SD = 2.5


def ppm_of(tested, limit, instrument=None):
    rates = limit_rates(tested, instrument or Instrument(SD), -limit, limit, 0.95)
    return [1e6 * e.estimate for e in (rates.escapes_built, rates.escapes_shipped, rates.false_rejects)]


# By quadrature, given with the task's description (seen): built, shipped, false rejects in ppm.
@pytest.mark.parametrize(
    ("limit", "expected"),
    [(50.0, (1449.5, 1468.7, 2142.8)), (47.5, (318.6, 324.6, 6339.4)), (45.0, (33.57, 34.45, 13187.9))],
)
def test_the_quantity_that_is_specified_is_the_one_that_is_read(room, limit, expected):
    # half a unit of the last digit given, and 3e-5 for the grid
    assert ppm_of(room(), limit) == [pytest.approx(e, rel=3e-5, abs=0.05 if e > 100 else 0.006) for e in expected]


@pytest.mark.parametrize(
    ("limit", "expected"), [(50.0, (8048.85, 8155.79, 8742.18)), (40.0, (4350.24, 4565.71, 39124.8))]
)
def test_a_room_reading_against_a_cold_specification(cold, limit, expected):
    assert ppm_of(cold(), limit) == [pytest.approx(e, rel=2e-5) for e in expected]


def test_one_of_them_again_by_a_double_integral():
    """P(accepted, bad) of the first population at ±47.5 by adaptive quadrature over unit and reading."""

    def density(reading, unit):
        return norm.pdf(unit, scale=20) * norm.pdf(reading - unit, scale=SD)

    escapes = 2 * dblquad(density, 50.0, 75.0, -47.5, 47.5, epsabs=1e-9)[0]
    assert 1e6 * escapes == pytest.approx(318.6, abs=0.05)


# JCGM 106:2012, 7.3, table 1 (from memory; the values are those of the normal distribution)
@pytest.mark.parametrize(
    ("conformance", "z"), [(0.80, 0.84), (0.90, 1.28), (0.95, 1.64), (0.99, 2.33), (0.999, 3.09)]
)
def test_conformance_at_a_guard_band_of_z(conformance, z):
    """Of units spread evenly far beyond a limit at 0, those read in a narrow window z·u below it."""
    unit = np.linspace(-60.0, 60.0, 240_000)
    tested = Units(unit, (unit > 0).astype(float))
    reading = -z * SD
    rates = limit_rates(tested, Instrument(SD), reading - 1e-3, reading + 1e-3, 0.95)
    assert 1 - rates.escapes_shipped.estimate == pytest.approx(norm.cdf(z), abs=1e-5)
    assert norm.ppf(1 - rates.escapes_shipped.estimate) == pytest.approx(norm.ppf(conformance), abs=0.005)


def test_a_zener_at_its_limit():
    """JCGM 106:2012, clause 7 (from memory): read −5.47 V, u 0.05 V, limit −5.40 V: Φ(1.4) = 0.919243."""
    assert below(-5.40, np.array([-5.47]), 0.05)[0] == pytest.approx(0.919243, abs=1e-6)


def test_rates_are_shares_of_the_same_units(cold):
    tested = cold(4001)
    rates = limit_rates(tested, Instrument(SD), -42.0, 37.0, 0.95)
    bad = tested.bad.mean()
    built, missed = rates.escapes_built.estimate, rates.missed.estimate
    assert missed * bad == pytest.approx(built, rel=1e-12)
    # accepted = accepted good + accepted bad; rejected good + accepted good = good
    passed = 1 - rates.rejected.estimate
    assert rates.escapes_shipped.estimate * passed == pytest.approx(built, rel=1e-12)
    assert 1 - bad - rates.false_rejects.estimate == pytest.approx(passed - built, rel=1e-12)


def test_without_noise_a_reading_is_the_frequency():
    tested = Units(np.array([9.0, 10.0, 11.0, np.nan]), np.array([0.0, 0.0, 1.0, 1.0]))
    assert accepted(tested, Instrument(0.0), 9.5, 11.5, 0.0).tolist() == [0.0, 1.0, 1.0, 0.0]


def test_a_unit_that_does_not_start_is_rejected_and_counts_as_built():
    tested = Units(np.array([10.0, np.nan, np.nan, 10.0]), np.array([0.0, 1.0, 0.0, 1.0]))
    rates = limit_rates(tested, Instrument(0.1), 5.0, 15.0, 0.95)
    found = [rates.escapes_built, rates.escapes_shipped, rates.missed, rates.false_rejects, rates.rejected]
    assert [e.estimate for e in found] == [pytest.approx(v) for v in (0.25, 0.5, 0.5, 0.25, 0.5)]


def test_no_bad_unit_leaves_no_missed_share():
    tested = Units(np.zeros(10), np.zeros(10))
    assert limit_rates(tested, Instrument(1.0), -5.0, 5.0, 0.95).missed is None


def test_bias_is_taken_at_the_sign_that_makes_each_rate_worst():
    """A unit just above the upper limit escapes when the instrument reads low; a good one is lost when it reads high."""
    tested = Units(np.array([9.9, 10.2]), np.array([0.0, 1.0]))
    calm = limit_rates(tested, Instrument(0.0), 0.0, 10.0, 0.95)
    assert (calm.escapes_built.estimate, calm.false_rejects.estimate) == (0.0, 0.0)
    biased = limit_rates(tested, Instrument(0.0, 0.3), 0.0, 10.0, 0.95)
    assert (biased.escapes_built.estimate, biased.false_rejects.estimate) == (0.5, 0.5)


def test_bias_moves_the_window_and_noise_widens_it():
    """P(accept) with bias b is that without, limits moved by b; no noise makes up for it."""
    f = np.linspace(-60, 60, 1001)
    tested = Units(f, np.zeros_like(f))
    moved = accepted(tested, Instrument(SD), -50.0, 50.0, 3.0)
    assert moved == pytest.approx(norm.cdf((50 - 3 - f) / SD) - norm.cdf((-50 - 3 - f) / SD), abs=1e-15)
