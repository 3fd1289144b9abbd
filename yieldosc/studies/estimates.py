"""Counts and replicates → estimates with intervals, and the looks at which a verdict may be given."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy import stats

from yieldosc.studies.results import Estimate, Verdict


def clopper_pearson(failures: int, units: int, confidence: float = 0.95) -> Estimate:
    """Exact two-sided interval of a counted rate (Clopper & Pearson, Biometrika 26 (1934) 404)."""
    half = (1 - confidence) / 2
    low = 0.0 if failures == 0 else float(stats.beta.ppf(half, failures, units - failures + 1))
    high = 1.0 if failures == units else float(stats.beta.ppf(1 - half, failures + 1, units - failures))
    return Estimate(
        estimate=failures / units, low=low, high=high, confidence=confidence, units=units, failures=failures
    )


def yield_estimate(failures: int, units: int, confidence: float = 0.95) -> Estimate:
    """The yield 1 − failures/units with its exact interval."""
    rate = clopper_pearson(failures, units, confidence)
    return Estimate(
        estimate=(units - failures) / units,
        low=1 - rate.high,
        high=1 - rate.low,
        confidence=confidence,
        units=units,
        failures=failures,
    )


@dataclass(frozen=True, slots=True)
class LookPlan:
    """Looks at counts fixed beforehand, first · factor^k; each at confidence 1 − α/looks, so that all intervals hold
    together (repeated confidence intervals: Jennison & Turnbull, J. R. Statist. Soc. B 51 (1989) 305; Bonferroni)."""

    first: int = 50_000
    factor: int = 4
    looks: int = 4
    confidence: float = 0.95

    @property
    def counts(self) -> tuple[int, ...]:
        return tuple(self.first * self.factor**k for k in range(self.looks))

    @property
    def confidence_at_each(self) -> float:
        return 1 - (1 - self.confidence) / self.looks

    def interval(self, failures: int, units: int) -> Estimate:
        """The yield at one look."""
        return yield_estimate(failures, units, self.confidence_at_each)

    @staticmethod
    def verdict(interval: Estimate, target: float | None) -> Verdict:
        """meets when the lower bound reaches the target, does not meet when the upper bound misses it."""
        if target is None:
            return "not proven"
        if interval.low >= target:
            return "meets"
        return "does not meet" if interval.high < target else "not proven"


def tango(gained: int, lost: int, units: int, confidence: float = 0.95) -> Estimate:
    """Difference of two yields on the same units, (gained − lost)/units, with Tango's score interval
    (Tango, Statist. Med. 17 (1998) 891): the differences δ that the score test does not reject."""
    z = float(stats.norm.ppf(0.5 + confidence / 2))
    point = (gained - lost) / units

    def score(delta: float) -> float:
        """(b − c − nδ)/√(n (2 q + δ (1 − δ))), q the restricted estimate of the second discordant probability."""
        b = -gained - lost + (2 * units - gained + lost) * delta
        c = -lost * delta * (1 - delta)
        q = (math.sqrt(max(b * b - 8 * units * c, 0.0)) - b) / (4 * units)
        variance = units * (2 * q + delta * (1 - delta))
        difference = gained - lost - units * delta
        return difference / math.sqrt(variance) if variance > 0 else math.copysign(math.inf, difference or 1.0)

    edge = 1 - 1e-12
    low = -1.0 if score(-edge) <= z else _root(lambda d: score(d) - z, -edge, point)
    high = 1.0 if score(edge) >= -z else _root(lambda d: score(d) + z, point, edge)
    return Estimate(estimate=point, low=low, high=high, confidence=confidence, units=units)


def _root(function: Callable[[float], float], low: float, high: float) -> float:
    """Where a falling function passes zero, by bisection: at the point estimate it may jump, which a faster method
    would not survive."""
    for _ in range(200):
        middle = (low + high) / 2
        if not low < middle < high:
            break
        low, high = (middle, high) if function(middle) > 0 else (low, middle)
    return (low + high) / 2


def t_interval(replicates: ArrayLike | Sequence[float], confidence: float = 0.95) -> Estimate:
    """Mean of independent replicates (scramblings) with Student's interval."""
    values = np.asarray(replicates, dtype=np.float64)
    mean = float(values.mean())
    half = float(stats.t.ppf(0.5 + confidence / 2, len(values) - 1) * values.std(ddof=1) / math.sqrt(len(values)))
    return Estimate(estimate=mean, low=mean - half, high=mean + half, confidence=confidence)


@dataclass(frozen=True, slots=True)
class WeightedRate:
    """Sums from which a weighted rate is made; merging is associative, so processes and looks may join in any split."""

    units: int = 0
    weight: float = 0.0
    weight_squared: float = 0.0
    largest: float = 0.0

    def merged(self, other: WeightedRate) -> WeightedRate:
        """Both samples together."""
        return WeightedRate(
            self.units + other.units,
            self.weight + other.weight,
            self.weight_squared + other.weight_squared,
            max(self.largest, other.largest),
        )

    def estimate(self, confidence: float = 0.95) -> Estimate:
        """p = Σw/n with the normal-theory interval p · exp(± t · cv); weights are zero where a unit does not fail."""
        p = self.weight / self.units
        if p == 0:
            return Estimate(estimate=0.0, low=0.0, high=1.0, confidence=confidence, units=self.units)
        variance = max(self.weight_squared / self.units - p * p, 0.0) / max(self.units - 1, 1)
        cv = math.sqrt(variance) / p
        reach = float(stats.t.ppf(0.5 + confidence / 2, max(self.units - 1, 1))) * cv
        return Estimate(
            estimate=p, low=p * math.exp(-reach), high=p * math.exp(reach), confidence=confidence, units=self.units
        )
