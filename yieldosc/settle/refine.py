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
LEAST_COUNT = 7  # below this two answers may agree by accident
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
    out = Refined(
        np.zeros(n),
        np.zeros((n, cap + 1), dtype=np.complex128),
        np.ones(n, dtype=np.int64),
        np.zeros(n, dtype=bool),
        np.zeros(n, dtype=bool),
    )
    out.x[:, 1] = level
    rows = np.arange(n)
    for count in _counts(cap):
        orders = orders_up_to(count, odd=odd, mean=not limiter.mean_fixed)
        before = out.shift[rows].copy()
        _balanced(limiter, network, skew, rows, orders, samples_for(count, limiter, level[rows]), out)
        moved = np.abs(out.shift[rows] - before)
        still = out.converged[rows] & (moved <= tolerance) & (count > LEAST_COUNT)
        out.capped[rows] = ~still & (count >= cap)
        rows = rows[~still]
        if not rows.size:
            break
    return out


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
    for count in np.unique(points):
        alike = rows[points == count]
        for begin in range(0, len(alike), size):
            part = alike[begin : begin + size]
            start = Wave(out.shift[part], out.x[part][:, orders], orders, out.converged[part])
            found = balance(limiter, network.take(part), start, skew[part], int(count))
            good = part[found.converged]
            out.shift[good] = found.shift[found.converged]
            out.x[good[:, None], orders[None, :]] = found.x[found.converged]
            out.highest[good] = orders[-1]
            out.converged[part] = found.converged
