"""How many poles of each unit grow: sign changes in the first column of the Routh array (Routh 1877)."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def growing_poles(poly: Sequence[Array]) -> NDArray[np.int64]:
    """Roots in the right half plane (n,) of polynomials, lowest power first; −1 where the array breaks down.

    A breakdown (a zero in the first column) means a pole on the axis or a symmetric pair: the caller finds all roots.
    """
    descending = list(reversed(poly))
    upper, lower = descending[0::2], descending[1::2]
    first = [upper[0]]
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        while lower:
            first.append(lower[0])
            ratio = upper[0] / lower[0]
            following = [
                up - ratio * (lower[k + 1] if k + 1 < len(lower) else 0.0) for k, up in enumerate(upper[1:])
            ]
            upper, lower = lower, following
    changes, known = sign_changes(first)
    return np.where(known, changes, -1)


def sign_changes(column: Sequence[Array]) -> tuple[NDArray[np.int64], NDArray[np.bool_]]:
    """Sign changes (n,) along a column of numbers per unit, and where every one of them is finite and not zero."""
    size = np.abs(column[0])
    changes = np.zeros(np.shape(size), dtype=np.int64)
    smallest, total = size, size
    before = np.signbit(column[0])
    for entry in column[1:]:
        now = np.signbit(entry)
        changes += now != before
        before = now
        size = np.abs(entry)
        smallest = np.minimum(smallest, size)
        total = total + size
    return changes, (smallest > 0) & np.isfinite(total)
