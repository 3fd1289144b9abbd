"""How many positive roots a unit's polynomial has: sign changes of a Sturm chain, 0 less infinity (Sturm 1829)."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.routh import sign_changes

Array = NDArray[np.float64]


def positive_roots(poly: Sequence[Array]) -> NDArray[np.int64]:
    """Distinct positive roots (n,) of polynomials, lowest power first; −1 where the chain breaks down.

    Units are grouped by their first and last non-zero coefficient: a coefficient that is exactly zero there is a root
    at 0 or at infinity, not a breakdown.
    """
    poly = list(poly)
    while len(poly) > 1 and not poly[-1].any():
        poly.pop()
    if poly[0].all() and poly[-1].all():
        return _count(poly)  # the usual case: no unit has a root at 0 or at infinity
    table = np.stack(np.broadcast_arrays(*poly), axis=1)
    count = np.zeros(len(table), dtype=np.int64)
    known = table != 0
    low = np.argmax(known, axis=1)
    high = table.shape[1] - 1 - np.argmax(known[:, ::-1], axis=1)
    size = table.shape[1]
    group = low * size + high
    for key in np.flatnonzero(np.bincount(group)):
        first, last = divmod(int(key), size)
        rows = np.flatnonzero(group == key)
        if last > first:
            count[rows] = _count([table[rows, k] for k in range(first, last + 1)])
    return count


def _count(poly: list[Array]) -> NDArray[np.int64]:
    chain = [poly, [k * c for k, c in enumerate(poly)][1:]]
    with np.errstate(divide="ignore", invalid="ignore", over="ignore", under="ignore"):
        while len(chain[-1]) > 1:
            rest = _negative_remainder(chain[-2], chain[-1])
            size = np.max(np.abs(rest), axis=0)
            chain.append([c / size for c in rest])
    zero_changes, zero_known = sign_changes([p[0] for p in chain])
    far_changes, far_known = sign_changes([p[-1] for p in chain])
    return np.where(zero_known & far_known, zero_changes - far_changes, -1)


def _negative_remainder(dividend: list[Array], divisor: list[Array]) -> list[Array]:
    """−(dividend mod divisor) for degrees that differ by one."""
    top = dividend[-1] / divisor[-1]
    second = (dividend[-2] - top * divisor[-2]) / divisor[-1] if len(divisor) > 1 else dividend[-2] / divisor[-1]
    return [
        second * c + (top * divisor[k - 1] if k else 0.0) - dividend[k] for k, c in enumerate(divisor[:-1])
    ]

