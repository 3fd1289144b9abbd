"""Intervals, looks, tallies: against published values, closed forms and simulation over many seeds."""

import math

import numpy as np
import pytest
from scipy import optimize, stats

from yieldosc.studies.estimates import LookPlan, WeightedRate, clopper_pearson, t_interval, tango, yield_estimate
from yieldosc.studies.tally import Histogram, Moments


@pytest.mark.parametrize(
    ("failures", "units", "low", "high", "tolerance"),
    [
        (81, 263, 0.2527, 0.3676, 5e-5),  # Newcombe, Stat. Med. 17 (1998) 857, table I (numbers from memory)
        (5, 25, 0.068, 0.407, 5e-4),  # Conover 1999 table, as quoted on influentialpoints.com (seen)
        (7, 50, 0.0581917, 0.2673960, 1e-7),  # R 3.6.2 binom.test as kept in SciPy's tests (seen)
        (20, 100, 0.1266556, 0.2918427, 1e-7),  # the same
        (0, 10, 0.0, 0.3084971, 1e-7),  # the same
        (10, 10, 0.6915029, 1.0, 1e-7),  # the same
        (0, 1000, 0.0, 0.003682, 1e-6),  # 1 − 0.025^(1/1000), closed form
    ],
)
def test_exact_binomial_interval(failures, units, low, high, tolerance):
    found = clopper_pearson(failures, units)
    assert found.low == pytest.approx(low, abs=tolerance)
    assert found.high == pytest.approx(high, abs=tolerance)


def test_rule_of_three():
    # one-sided 95 % is the upper end of two-sided 90 %: 1 − 0.05^(1/1000), near 3/n
    assert clopper_pearson(0, 1000, 0.90).high == pytest.approx(1 - 0.05 ** (1 / 1000), rel=1e-12)
    assert clopper_pearson(0, 1000, 0.90).high == pytest.approx(0.0029912, abs=1e-7)


def test_yield_interval_mirrors_the_rate():
    rate, good = clopper_pearson(3, 40), yield_estimate(3, 40)
    assert (good.low, good.high) == (1 - rate.high, 1 - rate.low)
    assert good.estimate == 37 / 40


def test_interval_covers_at_least_as_often_as_it_says():
    rng = np.random.default_rng(5)
    for p in (0.002, 0.05, 0.4):
        counts = rng.binomial(400, p, size=3000)
        inside = [clopper_pearson(int(k), 400) for k in counts]
        share = np.mean([e.low <= p <= e.high for e in inside])
        assert share >= 0.95 - 3 * math.sqrt(0.05 * 0.95 / 3000)


def false_verdicts(plan: LookPlan, confidence_at_each: float, true_yield: float, runs: int, seed: int) -> float:
    """Share of runs in which any look says the yield is above or below its true value."""
    rng = np.random.default_rng(seed)
    wrong = np.zeros(runs, dtype=bool)
    failures, before = np.zeros(runs, dtype=np.int64), 0
    for units in plan.counts:
        failures += rng.binomial(units - before, 1 - true_yield, size=runs)
        before = units
        half = (1 - confidence_at_each) / 2
        low = stats.beta.ppf(half, failures, units - failures + 1)
        high = stats.beta.ppf(1 - half, failures + 1, units - failures)
        wrong |= (low > 1 - true_yield) | (high < 1 - true_yield)
    return float(wrong.mean())


def test_all_looks_together_keep_the_error_rate():
    plan = LookPlan(first=500, looks=4)
    share = false_verdicts(plan, plan.confidence_at_each, 0.9, 4000, 7)
    assert share <= 0.05 + 3 * math.sqrt(0.05 * 0.95 / 4000)


def test_plain_repeated_looks_do_not_keep_it():
    # negative control: a first look and eleven doublings, each at 95 %; 31 % false verdicts are known for it
    plan = LookPlan(first=200, factor=2, looks=12)
    share = false_verdicts(plan, 0.95, 0.9, 4000, 8)
    assert share == pytest.approx(0.31, abs=3 * math.sqrt(0.31 * 0.69 / 4000))


def test_verdict_uses_the_bounds():
    plan = LookPlan(first=1000, looks=1)
    interval = plan.interval(10, 1000)
    assert plan.verdict(interval, interval.low) == "meets"
    assert plan.verdict(interval, 0.99) == "not proven"
    assert plan.verdict(interval, interval.high + 1e-9) == "does not meet"
    assert plan.verdict(interval, None) == "not proven"


def brute_tango(gained: int, lost: int, units: int) -> tuple[float, float]:
    """Tango's interval by maximising the restricted likelihood numerically at every δ, sharing no formula."""

    def score(delta: float) -> float:
        # multinomial with p12 = q + δ, p21 = q; q maximises gained ln(q+δ) + lost ln q + rest ln(1−2q−δ)
        rest = units - gained - lost
        low, high = max(0.0, -delta) + 1e-13, (1 - delta) / 2 - 1e-13

        def loss(q: float) -> float:
            return -sum(k * math.log(v) for k, v in ((gained, q + delta), (lost, q), (rest, 1 - 2 * q - delta)) if k)

        q = optimize.minimize_scalar(loss, bounds=(low, high), method="bounded", options={"xatol": 1e-13}).x
        return (gained - lost - units * delta) / math.sqrt(units * (2 * q + delta * (1 - delta)))

    point, z = (gained - lost) / units, stats.norm.ppf(0.975)
    return (
        optimize.brentq(lambda d: score(d) - z, -0.99, point - 1e-6),
        optimize.brentq(lambda d: score(d) + z, point + 1e-6, 0.99),
    )


@pytest.mark.parametrize(("gained", "lost", "units"), [(9, 1, 44), (20, 12, 50), (5, 3, 400)])
def test_tango_interval_against_numerical_likelihood(gained, lost, units):
    found = tango(gained, lost, units)
    low, high = brute_tango(gained, lost, units)
    assert found.low == pytest.approx(low, abs=2e-5)  # the bounded minimiser's own precision
    assert found.high == pytest.approx(high, abs=2e-5)


def test_tango_without_discordant_units():
    # Tango, Statist. Med. 17 (1998) 891: z²/(n + z²) on both sides (closed form of the score at b = c = 0)
    z2 = stats.norm.ppf(0.975) ** 2
    found = tango(0, 0, 100)
    assert (found.low, found.high) == pytest.approx((-z2 / (100 + z2), z2 / (100 + z2)), abs=1e-9)


def test_tango_where_every_unit_is_gained():
    # b = n, c = 0: the restricted estimate is q = (1 − δ)/2, the score √(n (1 − δ)/(1 + δ)) (closed form)
    z2 = stats.norm.ppf(0.975) ** 2
    found = tango(10, 0, 10)
    assert found.low == pytest.approx((10 - z2) / (10 + z2), abs=1e-9)
    assert found.high == 1.0
    mirrored = tango(0, 10, 10)
    assert (mirrored.low, mirrored.high) == pytest.approx((-1.0, -found.low), abs=1e-9)


def test_t_interval_matches_scipy():
    values = np.random.default_rng(3).normal(size=16)
    expected = stats.t.interval(0.95, 15, loc=values.mean(), scale=stats.sem(values))
    found = t_interval(values)
    assert (found.low, found.high) == pytest.approx(expected, rel=1e-12)


def test_weighted_rate_merges_to_the_same_estimate():
    weights = np.random.default_rng(4).exponential(size=900)
    whole = WeightedRate(900, float(weights.sum()), float((weights**2).sum()), float(weights.max()))
    parts = [WeightedRate(300, float(w.sum()), float((w**2).sum()), float(w.max())) for w in np.split(weights, 3)]
    left = parts[0].merged(parts[1]).merged(parts[2]).estimate()
    right = parts[0].merged(parts[1].merged(parts[2])).estimate()
    for estimate in (left, right):
        assert estimate.low == pytest.approx(whole.estimate().low, rel=1e-12)
    assert whole.estimate().low < 1.0 < whole.estimate().high  # the mean of an exponential is 1


@pytest.mark.parametrize(
    ("values", "mean", "sd"),
    [
        # NIST StRD univariate: NumAcc1, NumAcc3, NumAcc4 (means of 1 and 3 seen, standard deviations from memory)
        (np.array([10000001.0, 10000003.0, 10000002.0]), 10000002.0, 1.0),
        (1000000.2 + 0.1 * np.array([0.0] + [(-1.0) ** k for k in range(1, 1001)]), 1000000.2, 0.1),
        (10000000.2 + 0.1 * np.array([0.0] + [(-1.0) ** k for k in range(1, 1001)]), 10000000.2, 0.1),
    ],
)
def test_moments_keep_nine_digits(values, mean, sd):
    parts = [Moments.of(part) for part in np.array_split(values, 3)]
    whole = parts[0].merged(parts[1]).merged(parts[2])
    assert whole.mean == pytest.approx(mean, rel=1e-14)
    assert whole.sd == pytest.approx(sd, rel=1e-8)
    assert (whole.low, whole.high) == (values.min(), values.max())


def test_quantiles_are_right_to_one_bin():
    values = np.random.default_rng(6).normal(size=40_000)
    histogram = Histogram.empty(low=-6.0, width=0.01, bins=1200)
    for part in np.split(values, 10):
        histogram.add(part)
    for share in (0.001, 0.5, 0.999):
        assert histogram.quantile(share) == pytest.approx(np.quantile(values, share), abs=0.01)


def test_histogram_counts_what_lies_outside():
    histogram = Histogram.empty(low=0.0, width=1.0, bins=2)
    histogram.add(np.array([-5.0, 0.5, 1.5, 1.7, 99.0]))
    assert histogram.counts.tolist() == [1, 1, 2, 1]
    assert histogram.merged(histogram).inside.tolist() == [2, 4]
