"""Limits of weighted sums: exact where the exact ones are known, and their cover where they are not."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import chi2

from yieldosc.studies.limits.acceptance import shipped_rate
from yieldosc.studies.limits.weighted import lower_sum, upper_sum, weighted_rate


@pytest.mark.parametrize("count", [0, 1, 2, 7, 40, 1000])
@pytest.mark.parametrize("confidence", [0.9, 0.95, 0.99])
def test_equal_weights_give_the_exact_poisson_limits(count, confidence):
    """F. Garwood, Biometrika 28 (1936) 437, as quantiles of χ²."""
    half = (1 - confidence) / 2
    assert upper_sum(count, count, confidence) == pytest.approx(chi2.ppf(1 - half, 2 * count + 2) / 2, rel=1e-10)
    low = 0.0 if count == 0 else chi2.ppf(half, 2 * count) / 2
    assert lower_sum(count, count, confidence) == pytest.approx(low, rel=1e-10)


def test_no_weight_at_all_leaves_3_689_units():
    """−ln 0.025: the exact upper limit of a count of zero at 95 %, two-sided."""
    assert weighted_rate(np.zeros(1000), 1000, 0.95).high == pytest.approx(3.688879e-3, rel=1e-6)


@pytest.mark.parametrize("mean", [0.5, 3.0, 30.0])
@pytest.mark.parametrize("shape", [0.05, 1.0])
def test_limits_of_random_weights_cover(mean, shape):
    """Poisson numbers of weights from a Beta distribution: the expected sum is known. 95 % at least, 3 sd of 4,000."""
    random = np.random.default_rng(int(mean * 10 + shape * 100))
    truth = mean * shape / (shape + 1)
    counts = random.poisson(mean, 4000)
    weights = [random.beta(shape, 1.0, n) for n in counts]
    total, squares = (np.array([float((w**k).sum()) for w in weights]) for k in (1, 2))
    covered = (upper_sum(total, squares, 0.95) >= truth).mean(), (lower_sum(total, squares, 0.95) <= truth).mean()
    assert min(covered) >= 0.975 - 3 * np.sqrt(0.025 * 0.975 / 4000)


def test_the_ratio_of_shipped_escapes_is_covered():
    """1 unit in 500 bad, accepted with 0.3; good ones with 0.9: shipped = 0.3/(0.3 + 0.9·499)."""
    random = np.random.default_rng(5)
    truth = 0.3 / (0.3 + 0.9 * 499)
    inside = 0
    for _ in range(600):
        bad = random.random(3000) < 1 / 500
        chance = np.where(bad, 0.3, 0.9)
        found = shipped_rate(chance * bad, chance, 0.95)
        inside += found.low <= truth <= found.high
    assert inside / 600 >= 0.95


def test_nothing_accepted_says_nothing():
    found = shipped_rate(np.zeros(5), np.zeros(5), 0.95)
    assert (found.low, found.high) == (0.0, 1.0)


def test_the_upper_limit_of_a_share_is_no_more_than_one():
    assert weighted_rate(np.ones(3), 3, 0.95).high == 1.0
