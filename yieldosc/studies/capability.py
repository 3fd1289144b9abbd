"""Predicted capability from percentiles, what a pilot run could show of it, and what a demonstration would need.

Pp = (U − L)/(x99.865 − x0.135), Ppk = min((U − x50)/(x99.865 − x50), (x50 − L)/(x50 − x0.135)): the quantile method for
any distribution; six standard deviations where it is normal (common practice, from memory). Never the source of a rate.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import Literal

from scipy import stats

from yieldosc.studies.gather import Gathered
from yieldosc.studies.results import Estimate
from yieldosc.studies.run import Setup
from yieldosc.studies.sample_size import clean_boards
from yieldosc.studies.scrutiny import Capability, Demonstration, PilotCapability
from yieldosc.studies.tally import Histogram, Moments

SHARES = (0.00135, 0.5, 0.99865)
LEAST_UNITS = 2731  # the largest of so many lies beyond the 99.865 % point with 97.5 % confidence: 0.99865ⁿ ≤ 0.025
PILOTS = (10, 30, 100)  # boards
RATES = (1e-3, 1e-4, 1e-5)
Output = Literal["frequency", "margin"]
ATTRIBUTES: dict[Output, str] = {"frequency": "frequency_hz", "margin": "startup_margin"}
FREQUENCIES = ("settled_hz", "frequency_hz")  # limits apply to the first that exists


def capability(gathered: Gathered, setup: Setup, confidence: float = 0.95) -> tuple[Capability, ...]:
    """Of frequency and margin at the corner of the least Ppk; none below 2,731 units, without limits or spread."""
    made = []
    for output, requirement in ATTRIBUTES.items():
        limits = next(((r.low, r.high) for r in setup.judge.requirements if r.attribute == requirement), (None, None))
        found = list(_at_corners(gathered, setup, output, limits, confidence))
        if found:
            made.append(min(found, key=lambda c: c.ppk.estimate))
    return tuple(made)


def _at_corners(
    gathered: Gathered, setup: Setup, output: Output, limits: tuple[float | None, float | None], confidence: float
) -> Iterator[Capability]:
    for c, corner in enumerate(setup.corners):
        names = FREQUENCIES if output == "frequency" else ("startup_margin",)
        name = next((n for n in names if gathered.moments[c].get(n)), None)
        if name is None or limits == (None, None):
            continue
        whole = _merged(gathered.moments[c][name])
        if whole.count < LEAST_UNITS or whole.low == whole.high:
            continue
        yield _capability(output, corner.text, gathered.histograms[c][name], whole, limits, confidence)


def _merged(parts: Sequence[Moments]) -> Moments:
    whole = parts[0]
    for part in parts[1:]:
        whole = whole.merged(part)
    return whole


def _capability(
    output: Output, corner: str, histogram: Histogram, whole: Moments,
    limits: tuple[float | None, float | None], confidence: float,
) -> Capability:  # fmt: skip
    first, middle, last = (quantile(histogram, whole, share, confidence) for share in SHARES)
    low, high = limits
    pp = None if low is None or high is None else (high - low) / (last.estimate - first.estimate)
    ppk = Estimate(
        estimate=ppk_of(first.estimate, middle.estimate, last.estimate, limits),
        low=ppk_of(first.low, middle.estimate, last.high, limits),
        high=ppk_of(first.high, middle.estimate, last.low, limits),
        confidence=confidence,
        units=whole.count,
    )
    normal = ppk_of(whole.mean - 3 * whole.sd, whole.mean, whole.mean + 3 * whole.sd, limits)
    return Capability(output=output, corner=corner, units=whole.count, quantiles=(first, middle, last), pp=pp, ppk=ppk,
                      normal_ppk=normal)  # fmt: skip


def quantile(histogram: Histogram, whole: Moments, share: float, confidence: float) -> Estimate:
    """A quantile with its order-statistic interval: ranks r ≤ s with P(X(r) ≤ x_p ≤ X(s)) ≥ confidence, binomial
    (distribution-free; David & Nagaraja, Order Statistics, sec. 7.1, from memory), outward to the bins' edges."""
    n, half = whole.count, (1 - confidence) / 2
    low_rank = int(stats.binom.ppf(half, n, share))
    high_rank = int(stats.binom.ppf(1 - half, n, share)) + 1
    low = whole.low if low_rank < 1 else histogram.rank_bounds(low_rank)[0]
    high = whole.high if high_rank > n else histogram.rank_bounds(high_rank)[1]
    middle = min(max(histogram.quantile(share), whole.low), whole.high)
    low, high = max(low, whole.low), min(high, whole.high)
    return Estimate(estimate=middle, low=low, high=high, confidence=confidence, units=n)


def ppk_of(first: float, middle: float, last: float, limits: tuple[float | None, float | None]) -> float:
    """The smaller of the one-sided indices; infinite where a side has no spread."""
    low, high = limits
    sides = []
    if low is not None:
        sides.append((middle - low) / (middle - first) if middle > first else math.inf)
    if high is not None:
        sides.append((high - middle) / (last - middle) if last > middle else math.inf)
    return min(sides)


def pilots(found: Sequence[Capability], confidence: float = 0.95) -> tuple[PilotCapability, ...]:
    """What pilots of 10, 30 and 100 boards would show where the frequency's predicted Ppk is true."""
    frequency = next((c for c in found if c.output == "frequency"), None)
    if frequency is None or not math.isfinite(frequency.ppk.estimate):
        return ()
    return tuple(pilot(frequency.ppk.estimate, boards, confidence) for boards in PILOTS)


def pilot(ppk: float, boards: int, probability: float = 0.95) -> PilotCapability:
    """Range of the Ppk that a run of n boards computes from its mean and standard deviation, if the true one is `ppk`.

    3·√n·Ppk is non-central t with n − 1 degrees of freedom and non-centrality 3·√n·ppk for normal boards and the nearer
    limit (Kotz & Johnson, Process Capability Indices, 1993, ch. 2, from memory).
    """
    scale = 3 * math.sqrt(boards)
    low, high = (
        float(stats.nct.ppf(q, boards - 1, scale * ppk)) / scale for q in (0.5 - probability / 2, 0.5 + probability / 2)
    )
    return PilotCapability(boards=boards, low=low, high=high, probability=probability)


def demonstrations(target: float | None, confidence: float = 0.95) -> tuple[Demonstration, ...]:
    """Boards without a failure for the share that the target allows, and for 1000, 100 and 10 ppm."""
    allowed = () if target is None or not 0 < target < 1 else (round(1 - target, 12),)
    rates = sorted({*allowed, *RATES}, reverse=True)
    return tuple(Demonstration(rate=r, confidence=confidence, boards=clean_boards(r, confidence)) for r in rates)
