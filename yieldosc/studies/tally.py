"""Moments and quantiles of millions of values in little memory, merged in order.

Sums are made per quantum of units and joined by Chan's update (Chan, Golub & LeVeque, Amer. Statist. 37 (1983) 242), so
that neither block size nor process count changes a digit.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Moments:
    """Count, mean, sum of squared deviations, least and largest value."""

    count: int
    mean: float
    m2: float
    low: float
    high: float

    @classmethod
    def of(cls, values: Array) -> Moments:
        """Of one quantum (n,), n ≥ 1. Deviations from the first value keep ppm of megahertz exact."""
        origin = float(values[0])
        shifted = values - origin
        mean = float(shifted.mean())
        rest = shifted - mean
        return cls(len(values), origin + mean, float(rest @ rest), float(values.min()), float(values.max()))

    def merged(self, other: Moments) -> Moments:
        """Both together."""
        count = self.count + other.count
        step = other.mean - self.mean
        return Moments(
            count,
            self.mean + step * other.count / count,
            self.m2 + other.m2 + step * step * self.count * other.count / count,
            min(self.low, other.low),
            max(self.high, other.high),
        )

    @property
    def sd(self) -> float:
        return float(np.sqrt(self.m2 / (self.count - 1))) if self.count > 1 else 0.0


@dataclass(slots=True)
class Histogram:
    """Counts in bins of a stated width; the first and last bin hold what lies outside."""

    low: float
    width: float
    counts: NDArray[np.int64]

    @classmethod
    def empty(cls, *, low: float, width: float, bins: int) -> Histogram:
        return cls(low, width, np.zeros(bins + 2, dtype=np.int64))

    def add(self, values: Array) -> None:
        """Count values (n,) in place."""
        position = (values - self.low) * (1 / self.width)
        last = len(self.counts) - 2
        index = np.clip(np.floor(position), -1, last).astype(np.int64) + 1
        self.counts += np.bincount(index, minlength=len(self.counts))

    def merged(self, other: Histogram) -> Histogram:
        """Both together."""
        return Histogram(self.low, self.width, self.counts + other.counts)

    @property
    def inside(self) -> NDArray[np.int64]:
        """Counts of the inner bins."""
        return self.counts[1:-1]

    def rank_bounds(self, rank: int) -> tuple[float, float]:
        """Edges of the bin that holds the value of this rank (1 …); infinite beyond the inner bins."""
        index = int(np.searchsorted(np.cumsum(self.counts), rank, side="left"))
        low = -np.inf if index == 0 else self.low + self.width * (index - 1)
        high = np.inf if index == len(self.counts) - 1 else self.low + self.width * index
        return float(low), float(high)

    def quantile(self, share: float) -> float:
        """The value below which `share` of the counts lie, linear inside its bin: right to one bin width."""
        total = int(self.counts.sum())
        if total == 0:
            return float("nan")
        below = np.cumsum(self.counts)
        wanted = share * total
        index = min(int(np.searchsorted(below, wanted, side="left")), len(self.counts) - 1)
        before = int(below[index] - self.counts[index])
        inner = 0.0 if self.counts[index] == 0 else (wanted - before) / int(self.counts[index])
        return float(self.low + self.width * (index - 1 + inner))
