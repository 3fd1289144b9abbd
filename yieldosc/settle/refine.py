"""Harmonics are doubled until the frequency of a unit stands still, or a cap is reached."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.settle.balance import Wave, balance, orders_up_to, samples_for
from yieldosc.settle.limiter import Limiter
from yieldosc.settle.transfer import Response

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]
TOLERANCE = 20e-6
FIRST_COUNT = 3
CLIMB_STEPS = 12
LEAST_COUNT = 7
ACCIDENT = 20.0  # moves fall four- to tenfold with each doubling
MOST_ODD, MOST_ALL = 127, 63
CHUNK_NUMBERS = 250_000  # of the Jacobians of one chunk of units: they stay in the cache


@dataclass(frozen=True, slots=True)
class Refined:
    """Per unit: ln(ω/ω_1), the harmonics X_n at the limiter's input, the highest harmonic balanced, and two flags.

    A unit that does not converge keeps its last converged wave, and tries again with more harmonics from there.
    """

    shift: Array
    x: NDArray[np.complex128]  # (n, most + 1) by order, zero above `highest`
    highest: NDArray[np.int64]
    converged: Mask
    capped: Mask


def refine(
    limiter: Limiter,
    network: Response,
    excess: Array,
    skew: Array,
    *,
    even: bool,
    tolerance: float = TOLERANCE,
    most: int | None = None,
) -> Refined:
    """Balance n units whose excess gain is above 1; `network` is normalised to their zero-phase frequency.

    even: even harmonics arise; tolerance: relative move of the frequency on doubling; most: cap on the harmonics.
    """
    odd = not even
    cap = most or (MOST_ODD if odd else MOST_ALL)
    n = len(excess)
    level = limiter.first_amplitude(excess)
    out = _sinusoids(level, cap)
    rows = np.arange(n)
    moved_before = np.full(n, np.inf)
    for count in _counts(cap):
        orders = orders_up_to(count, odd=odd, mean=not limiter.mean_fixed)
        points = samples_for(count, limiter, level)
        before = out.shift.copy()
        _balanced(limiter, network, skew, rows, orders, points, out)
        if count == FIRST_COUNT:
            _climb(limiter, network, excess, skew, np.flatnonzero(~out.converged), orders, points, out)
            rows = np.flatnonzero(out.converged)  # a unit that even this does not find is given up
        moved = np.abs(out.shift - before)
        # two unlike waves may agree by accident: a small move counts after one that was not large
        calm = out.converged & (moved <= tolerance) & (moved_before <= ACCIDENT * tolerance)
        still = calm[rows] & (count > LEAST_COUNT)
        moved_before = moved
        out.capped[rows] = ~still & (count >= cap)
        rows = rows[~still]
        if not rows.size:
            break
    return out


def _sinusoids(level: Array, cap: int) -> Refined:
    n = len(level)
    x = np.zeros((n, cap + 1), dtype=np.complex128)
    x[:, 1] = level
    return Refined(np.zeros(n), x, np.ones(n, dtype=np.int64), np.zeros(n, dtype=bool), np.zeros(n, dtype=bool))


def _climb(
    limiter: Limiter,
    network: Response,
    excess: Array,
    skew: Array,
    rows: NDArray[np.intp],
    orders: NDArray[np.int64],
    points: NDArray[np.int64],
    out: Refined,
) -> None:
    """Units that the describing function leads nowhere: follow the wave up from a gain where it is a sinusoid."""
    if not rows.size:
        return
    last: Array = np.ones(len(rows))
    out.x[rows] = 0.0
    for step in range(1, CLIMB_STEPS + 1):
        now = excess[rows] ** (step / CLIMB_STEPS)
        amplitude = limiter.first_amplitude(now)
        if step == 1:
            out.x[rows, 1] = amplitude
        else:
            out.x[rows] *= (amplitude / limiter.first_amplitude(last))[:, None]
        weaker = network.take(rows).with_gain(now / excess[rows])
        part = Refined(*(getattr(out, name)[rows] for name in Refined.__slots__))
        _balanced(limiter, weaker, skew[rows], np.arange(len(rows)), orders, points[rows], part)
        for name in Refined.__slots__:
            getattr(out, name)[rows] = getattr(part, name)
        last = now


def _counts(cap: int) -> Iterator[int]:
    count = FIRST_COUNT
    while count < cap:
        yield count
        count = 2 * count + 1
    yield cap


def _balanced(
    limiter: Limiter,
    network: Response,
    skew: Array,
    rows: NDArray[np.intp],
    orders: NDArray[np.int64],
    points: NDArray[np.int64],
    out: Refined,
) -> None:
    """One refinement of some units, written into `out`; in chunks that keep the Jacobians small."""
    size = max(1, CHUNK_NUMBERS // (2 * len(orders)) ** 2)
    for count in np.unique(points[rows]):
        alike = rows[points[rows] == count]
        for begin in range(0, len(alike), size):
            part = alike[begin : begin + size]
            start = Wave(out.shift[part], out.x[part][:, orders], orders, out.converged[part])
            found = balance(limiter, network.take(part), start, skew[part], int(count))
            good = part[found.converged]
            out.shift[good] = found.shift[found.converged]
            out.x[good[:, None], orders[None, :]] = found.x[found.converged]
            out.highest[good] = orders[-1]
            out.converged[part] = found.converged
