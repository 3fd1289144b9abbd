"""Which test limits reject the fewest good units while the upper bound of shipped escapes keeps to a level.

Low and high limit are chosen separately: all pairs of a grid over the readings, then a finer grid around the best pair.
Accepted good and bad units of a pair are differences of two cumulative sums, so all pairs cost one pass over the units.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.studies.limits.acceptance import Instrument, Tested, below
from yieldosc.studies.limits.weighted import lower_sum, upper_sum

Array = NDArray[np.float64]
POINTS = 240  # of the first grid, each side
FINE_POINTS = 41  # of the second, over one step of the first to either side
MOST_BINS = 4000
BINS_PER_SD = 32  # a bin this narrow widens the noise by 4e-5 of itself: enough to choose by, the report is exact
TAIL_SDS = 6.0
# The bound that chooses is taken as from a quarter of the units: twice as wide, so that the bound on fresh units keeps
# to the level too in about nine of ten cases (1.96 + 1.28·√2 = 3.8 ≈ 2 · 1.96 standard deviations).
SHARE_OF_INFORMATION = 0.25
LESS_CAUTIOUS = (0.5, 1.0)  # where the units are too few for that: the report says whether fresh units confirm it
EVEN = 1e-9  # shares of accepted good units that differ by less are called equal


@dataclass(frozen=True, slots=True)
class Pair:
    """Test limits [Hz] and the bound of shipped escapes that chose them."""

    low_hz: float
    high_hz: float
    bound: float


    def rounded(self, limits_hz: tuple[float, float]) -> Pair:
        """Both limits inward to a step that an instrument can be set to; the specification's own stay as they are."""
        places = 3 - math.floor(math.log10(limits_hz[1] - limits_hz[0]))
        steps = 10.0**places  # per Hz; `round` gives the double that the written number stands for
        low = self.low_hz if self.low_hz in limits_hz else round(math.ceil(self.low_hz * steps - 1e-9) / steps, places)
        high = (
            self.high_hz
            if self.high_hz in limits_hz
            else round(math.floor(self.high_hz * steps + 1e-9) / steps, places)
        )
        return Pair(low, high, self.bound) if low < high else self


@dataclass(frozen=True)
class Pairs:
    """Every pair of two grids: bound of shipped escapes, and accepted good units as a share of all (both (p, q))."""

    low_hz: Array
    high_hz: Array
    bound: Array
    good: Array

    def best(self, level: float, wished: tuple[float, float]) -> Pair | None:
        """The pair that keeps to the level and passes most good units; of equals the one nearest to `wished`."""
        fit = self.bound <= level
        if not fit.any():
            return None
        good = np.where(fit, self.good, -1.0)
        equal = good >= good.max() - EVEN
        away = np.abs(self.low_hz[:, None] - wished[0]) + np.abs(self.high_hz[None, :] - wished[1])
        return self._pair(int(np.argmin(np.where(equal, away, np.inf))))

    def lowest(self, wished: tuple[float, float]) -> Pair:
        """The pair of the lowest bound; of equals the one that passes most good units, then the nearest to `wished`."""
        found = self.best(float(self.bound.min()) * (1 + EVEN), wished)
        assert found is not None
        return found

    def _pair(self, flat: int) -> Pair:
        i, j = np.unravel_index(flat, self.bound.shape)
        return Pair(float(self.low_hz[i]), float(self.high_hz[j]), float(self.bound[i, j]))


@dataclass(frozen=True)
class Search:
    """Chooses on one sample."""

    tested: Tested
    instrument: Instrument
    limits_hz: tuple[float, float]  # the specification's own, where a tie is settled
    confidence: float
    information: float = SHARE_OF_INFORMATION

    def chosen(self, levels: Sequence[float]) -> tuple[list[Pair | None], Pair]:
        """The best pair for each level, None where no pair keeps to it; and the pair of the lowest bound."""
        coarse = self._grid()
        if not len(coarse):
            return [None] * len(levels), Pair(*self.limits_hz, 1.0)
        pairs = self._pairs(coarse, coarse)
        step = float(coarse[1] - coarse[0])
        found = []
        for level in levels:
            best = pairs.best(level, self.limits_hz)
            finer = None if best is None else self._finer(best, step).best(level, self.limits_hz) or best
            found.append(None if finer is None else finer.rounded(self.limits_hz))
        lowest = self._finer(pairs.lowest(self.limits_hz), step).lowest(self.limits_hz)
        return found, lowest.rounded(self.limits_hz)

    def _grid(self) -> Array:
        f = self.tested.frequency_hz[self.tested.starting]
        if not len(f):
            return np.empty(0)
        reach = TAIL_SDS * self.instrument.sd_hz + abs(self.instrument.bias_hz)
        low, high = float(f.min()) - reach, float(f.max()) + reach
        low, high = max(low, self.limits_hz[0]), min(high, self.limits_hz[1])
        if high <= low:
            low, high = self.limits_hz
        return np.unique([*np.linspace(low, high, POINTS), *self.limits_hz])

    def _finer(self, pair: Pair, step: float) -> Pairs:
        around = np.linspace(-step, step, FINE_POINTS)
        ends = (np.unique([*(end + around), end]) for end in (pair.low_hz, pair.high_hz))
        return self._pairs(*ends)

    def _pairs(self, low_hz: Array, high_hz: Array) -> Pairs:
        # a reading outside the specification is never accepted, however the trade would come out
        inside_low = low_hz >= self.limits_hz[0] * (1 - EVEN)
        inside_high = high_hz <= self.limits_hz[1] * (1 + EVEN)
        valid = (low_hz[:, None] < high_hz[None, :]) & inside_low[:, None] & inside_high[None, :]
        bounds, goods = [], []
        for bias in self.instrument.biases_hz:
            bound, good = self._at_bias(low_hz - bias, high_hz - bias, valid)
            bounds.append(bound)
            goods.append(good)
        return Pairs(low_hz, high_hz, np.maximum.reduce(bounds), np.minimum.reduce(goods))

    def _at_bias(self, low_hz: Array, high_hz: Array, valid: NDArray[np.bool_]) -> tuple[Array, Array]:
        """Bound, infinite for pairs that are not valid, and accepted good units as a share (both (p, q))."""
        centres, good, bad = _bins(self.tested, self.instrument.sd_hz)
        under_low, under_high = (_table(limits, centres, self.instrument.sd_hz) for limits in (low_hz, high_hz))
        y = under_high @ bad - (under_low @ bad)[:, None]
        passed = under_high @ good - (under_low @ good)[:, None]
        squares = under_high**2 @ bad + (under_low**2 @ bad)[:, None] - 2 * (under_low * bad) @ under_high.T
        escaping, spread, whole = (np.maximum(a[valid], 0.0) * self.information for a in (y, squares, y + passed))
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            below_line = lower_sum(whole, whole, self.confidence)
            found = upper_sum(escaping, np.minimum(spread, escaping), self.confidence) / below_line
        bound = np.full(valid.shape, np.inf)
        bound[valid] = np.minimum(np.where(np.isfinite(found), found, 1.0), 1.0)
        return bound, passed / self.tested.units


def _bins(tested: Tested, sd_hz: float) -> tuple[Array, Array, Array]:
    """Centres of bins of frequency, and the good and bad units in each."""
    kept = tested.starting
    f, bad = tested.frequency_hz[kept], tested.bad[kept]
    span = float(f.max() - f.min())
    if span == 0:
        return f[:1], np.array([float((1 - bad).sum())]), np.array([float(bad.sum())])
    wanted = span / sd_hz * BINS_PER_SD if sd_hz else MOST_BINS
    edges = np.linspace(f.min(), f.max(), int(min(max(wanted, 200), MOST_BINS)) + 1)
    good_counts, bad_counts = (np.histogram(f, edges, weights=w)[0] for w in (1 - bad, bad))
    return (edges[1:] + edges[:-1]) / 2, good_counts, bad_counts


def _table(limits_hz: Array, frequency_hz: Array, sd_hz: float) -> Array:
    """P(reading < limit) for every limit and frequency."""
    return below(limits_hz[:, None], frequency_hz[None, :], sd_hz)  # type: ignore[arg-type]


def closing_floor(tested: Tested, instrument: Instrument, confidence: float) -> tuple[float, float]:
    """Where shipped escapes go as the limits close around one reading: the least P(bad | reading), and that reading.

    Of the readings between the 5 % and 95 % points: outside, too few units stand behind a figure.
    """
    f = tested.frequency_hz[tested.starting]
    if not len(f) or instrument.sd_hz == 0:
        return 0.0, float("nan")
    first, last = (float(q) for q in np.quantile(f, [0.05, 0.95]))
    readings = np.linspace(first, last, POINTS + 1)
    centres, good, bad = _bins(tested, instrument.sd_hz)
    weight = np.exp(-0.5 * ((readings[:, None] - centres) / instrument.sd_hz) ** 2)
    with np.errstate(invalid="ignore"):
        shares = (weight @ bad) / (weight @ (good + bad))  # nan where no unit can read so
    if np.isnan(shares).all():
        return 0.0, float("nan")
    best = int(np.nanargmin(shares))
    return float(shares[best]), float(readings[best])
