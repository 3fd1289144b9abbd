"""The search against every pair of a fine grid, and what it must do with skew, bias and hopeless cases."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import chi2, norm

from yieldosc.studies.limits.acceptance import Instrument, limit_rates
from yieldosc.studies.limits.acceptance import Tested as Units
from yieldosc.studies.limits.search import Search, closing_floor

TARGET = 1000.0
SPEC = (950.0, 1050.0)
SD = 2.5
CONFIDENCE = 0.95


def drawn(units, seed, correlation=0.8):
    """Room and cold N(0, 20); bad where |cold| > 50."""
    random = np.random.default_rng(seed)
    room, rest = random.standard_normal((2, units)) * 20
    cold = correlation * room + np.sqrt(1 - correlation**2) * rest
    return Units(TARGET + room, (np.abs(cold) > 50).astype(float))


def gamma_limit(y, v, probability):
    """Fay & Feuer, Statist. Med. 16 (1997) 791: the gamma quantile as one of χ², v/(2y) · χ²(2y²/v)."""
    return v / (2 * y) * chi2.ppf(probability, 2 * y * y / v)


def bound_of(escaping, chance, share):
    """Upper limit of Σescaping over lower limit of Σchance, from a share of the units."""
    y, v = share * escaping.sum(axis=-1), share * (escaping**2).sum(axis=-1)
    whole = share * chance.sum(axis=-1)
    return gamma_limit(y + 1, v + 1, 0.975) / gamma_limit(whole, whole, 0.025)


def brute_force(tested, level, step, share):
    """Most good units accepted over all pairs of limits on a grid, unit by unit."""
    grid = np.arange(SPEC[0], SPEC[1] + step / 2, step)
    table = norm.cdf((grid[:, None] - tested.frequency_hz) / SD)
    best = (-1.0, None)
    for i in range(len(grid)):
        chance = table[i + 1 :] - table[i]
        if not len(chance):
            continue
        good = chance @ (1 - tested.bad)
        good[bound_of(chance * tested.bad, chance, share) > level] = -1
        j = int(good.argmax())
        if good[j] > best[0]:
            best = (float(good[j]), (float(grid[i]), float(grid[i + 1 + j])))
    return best


@pytest.mark.parametrize(("level", "correlation"), [(0.02, 0.8), (0.008, 0.9), (0.03, 0.3)])
def test_no_pair_of_a_fine_grid_does_better(level, correlation):
    tested = drawn(4000, 3, correlation)
    search = Search(tested, Instrument(SD), SPEC, CONFIDENCE)
    (pair,), _ = search.chosen([level])
    best, limits = brute_force(tested, level, 1.0, search.information)
    if pair is None:
        assert limits is None
        return
    chance = norm.cdf((pair.high_hz - tested.frequency_hz) / SD) - norm.cdf((pair.low_hz - tested.frequency_hz) / SD)
    # bins of 1/32 of the noise and limits rounded to 0.1: at most 0.1 % from its own bound
    assert bound_of(chance * tested.bad, chance, search.information) <= level * 1.002
    assert float(chance @ (1 - tested.bad)) >= best - 0.0005 * tested.units


def test_the_hopeless_pair_of_brute_force_is_none_here_too():
    tested = drawn(2000, 4, 0.0)
    search = Search(tested, Instrument(SD), SPEC, CONFIDENCE)
    assert brute_force(tested, 0.003, 2.0, search.information)[1] is None
    assert search.chosen([0.003])[0] == [None]


def test_low_and_high_limits_are_chosen_apart():
    """Only high units are bad: the low limit stays at the specification, the high one alone moves in."""
    random = np.random.default_rng(8)
    room = TARGET - 30 + random.gamma(2.0, 12.0, 60_000)
    tested = Units(room, (room + random.normal(0, 3, len(room)) > 1050).astype(float))
    (pair,), _ = Search(tested, Instrument(0.5), SPEC, CONFIDENCE).chosen([1e-3])
    assert pair.low_hz == SPEC[0]
    assert 1030 < pair.high_hz < 1049


def test_a_level_that_holds_anyway_leaves_the_specification_alone():
    tested = drawn(20_000, 5)
    (pair,), _ = Search(tested, Instrument(SD), SPEC, CONFIDENCE).chosen([0.5])
    assert (pair.low_hz, pair.high_hz) == SPEC


def test_no_limit_lies_outside_the_specification():
    """All units good: wider limits would reject fewer, but a reading outside the specification is never accepted."""
    tested = Units(np.random.default_rng(1).normal(TARGET, 40, 20_000), np.zeros(20_000))
    (pair,), lowest = Search(tested, Instrument(SD), SPEC, CONFIDENCE).chosen([0.01])
    assert (pair.low_hz, pair.high_hz) == SPEC
    assert SPEC[0] <= lowest.low_hz < lowest.high_hz <= SPEC[1]


def test_bias_costs_its_whole_size_where_noise_costs_less():
    """Units spread evenly, bad outside ±50, no noise: readings up to 8 off need limits at ±42."""
    f = np.linspace(920, 1080, 16_001)
    tested = Units(f, (np.abs(f - TARGET) > 50).astype(float))
    (pair,), _ = Search(tested, Instrument(0.0, 8.0), SPEC, CONFIDENCE).chosen([2e-3])
    assert (pair.low_hz, pair.high_hz) == (pytest.approx(958, abs=0.25), pytest.approx(1042, abs=0.25))
    (noisy,), _ = Search(tested, Instrument(8.0), SPEC, CONFIDENCE).chosen([0.02])
    (calm,), _ = Search(tested, Instrument(1.0), SPEC, CONFIDENCE).chosen([0.02])
    assert calm.high_hz > noisy.high_hz
    assert (calm.low_hz, calm.high_hz) == SPEC


def test_the_floor_as_the_limits_close(cold):
    """39.42 ppm for correlation 0.8 (seen, by quadrature): P(|cold| > 50 | reading 0) in closed form as well."""
    variance = 20**2
    pull = 0.8 * variance / (variance + SD**2)
    rest = np.sqrt(variance - pull * 0.8 * variance)
    closed = 2 * norm.sf(50 / rest)
    assert 1e6 * closed == pytest.approx(39.42, abs=0.005)
    room = cold(20_000)
    floor, reading = closing_floor(Units(TARGET + room.frequency_hz, room.bad), Instrument(SD), CONFIDENCE)
    assert 1e6 * floor == pytest.approx(39.42, abs=0.02)
    assert reading == pytest.approx(TARGET, abs=0.3)


def test_fresh_units_confirm_the_choice_in_nine_of_ten_cases():
    """12 seeds; fewer than 9 of 12 has a probability of 3 % where nine of ten hold."""
    level, held = 4e-3, 0
    for seed in range(12):
        (pair,), _ = Search(drawn(30_000, 100 + seed), Instrument(SD), SPEC, CONFIDENCE).chosen([level])
        fresh = limit_rates(drawn(30_000, 900 + seed), Instrument(SD), pair.low_hz, pair.high_hz, CONFIDENCE)
        held += fresh.escapes_shipped.high <= level
    assert held >= 9


def test_units_of_one_frequency_and_units_that_never_start():
    same = Units(np.full(100, 1003.0), np.zeros(100))
    (pair,), _ = Search(same, Instrument(0.0), SPEC, CONFIDENCE).chosen([0.5])
    assert (pair.low_hz, pair.high_hz) == SPEC
    silent = Units(np.full(100, np.nan), np.ones(100))
    found, lowest = Search(silent, Instrument(SD), SPEC, CONFIDENCE).chosen([0.5, 0.1])
    assert found == [None, None]
    assert (lowest.low_hz, lowest.high_hz, lowest.bound) == (*SPEC, 1.0)


def test_limits_are_numbers_that_an_instrument_takes():
    (pair,), lowest = Search(drawn(30_000, 7), Instrument(SD), SPEC, CONFIDENCE).chosen([4e-3])
    for value in (pair.low_hz, pair.high_hz, lowest.low_hz, lowest.high_hz):
        assert repr(value) == repr(round(value, 1))
