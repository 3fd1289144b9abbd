"""Newton's linear systems, many of one size at once.

Linear-algebra libraries start threads for larger matrices, which on a busy machine costs a hundred times the solution
itself; two blocks of half the size stay below that.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
LARGEST_DIRECT = 64


def newton_step(jacobian: Array, residual: Array, orders: NDArray[np.int64]) -> Array:
    """Solution (n, k) of J step = residual; nan for singular units. Rows are real parts of every order, then imaginary
    parts of those above 0; columns ln ω, real parts, imaginary parts of the orders above 1."""
    if jacobian.shape[1] <= LARGEST_DIRECT:
        return _solved(jacobian, residual[:, :, None])[:, :, 0]
    of_row = np.concatenate([orders, orders[orders > 0]])
    of_column = np.concatenate([[1], orders, orders[orders > 1]])
    rows, columns = (np.argsort(of, kind="stable") for of in (of_row, of_column))
    # the low harmonics by themselves have as many rows as columns: they are the balance of fewer harmonics
    low = int(np.count_nonzero(of_row <= orders[len(orders) // 2]))
    ordered = jacobian[:, rows[:, None], columns[None, :]]
    step = np.empty_like(residual)
    step[:, columns] = _by_blocks(ordered, residual[:, rows, None], low)
    return step


def _by_blocks(matrix: Array, right: Array, low: int) -> Array:
    """Block elimination of the first `low` unknowns."""
    first = _solved(matrix[:, :low, :low], np.concatenate([matrix[:, :low, low:], right[:, :low]], axis=2))
    through = np.einsum("nij,njk->nik", matrix[:, low:, :low], first)
    second = _solved(matrix[:, low:, low:] - through[:, :, :-1], right[:, low:] - through[:, :, -1:])
    head = first[:, :, -1:] - np.einsum("nij,njk->nik", first[:, :, :-1], second)
    return np.concatenate([head, second], axis=1)[:, :, 0]


def _solved(matrix: Array, right: Array) -> Array:
    try:
        return np.asarray(np.linalg.solve(matrix, right))
    except np.linalg.LinAlgError:  # one singular unit must not take the others with it
        out = np.full(right.shape, np.nan)
        for unit in range(len(right)):
            try:
                out[unit] = np.linalg.solve(matrix[unit], right[unit])
            except np.linalg.LinAlgError:
                continue
        return out
