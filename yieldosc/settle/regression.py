"""Least squares for a shift as a function of excess gain and features: Chebyshev polynomials of the one, low powers of
the others. Columns are made orthogonal one by one (modified Gram–Schmidt, Björck 1967) with elementwise sums only, so
that no digit depends on how many threads a linear-algebra library uses.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
DEGREE, DEGREE_LINEAR, DEGREE_SQUARE = 6, 4, 1
DEPENDENT = 1e-9  # a column with less than this share left after the others is left out


@dataclass(frozen=True, slots=True)
class Polynomial:
    """Coefficients (columns, outputs) over the box that the features were scaled by."""

    middle: Array
    half: Array
    coefficients: Array

    def holds(self, features: Array) -> NDArray[np.bool_]:
        """Units (m,) inside the box."""
        with np.errstate(invalid="ignore"):
            return np.asarray(np.all(np.abs(features - self.middle) <= self.half, axis=1))

    def value(self, level: Array, features: Array) -> Array:
        """(m, outputs); level in −1 … 1. Sums run column by column: a unit's digits do not depend on its neighbours."""
        total = np.zeros((self.coefficients.shape[1], len(level)))
        for column, weights in zip(_columns(level, self._scaled(features)), self.coefficients, strict=True):
            for k, weight in enumerate(weights):
                total[k] += weight * column
        return total.T

    def _scaled(self, features: Array) -> Array:
        return (features - self.middle) / self.half


def fit(level: Array, features: Array, targets: Array) -> Polynomial:
    """Polynomial through targets (m, outputs) at level (m,) and features (m, f)."""
    low, high = features.min(axis=0), features.max(axis=0)
    middle = (low + high) / 2
    half = np.maximum((high - low) / 2, 1e-9 * np.maximum(np.abs(middle), 1e-9))
    table = list(_columns(level, (features - middle) / half))
    return Polynomial(middle, half, _least_squares(table, targets))


def column_count(features: int) -> int:
    """Columns of a fit with so many features."""
    squares = features * (features + 1) // 2
    return DEGREE + 1 + features * (DEGREE_LINEAR + 1) + squares * (DEGREE_SQUARE + 1)


def _columns(level: Array, features: Array) -> Iterator[Array]:
    powers = [np.ones_like(level), level]
    while len(powers) <= DEGREE:
        powers.append(2 * level * powers[-1] - powers[-2])
    yield from powers
    each = [np.ascontiguousarray(column) for column in features.T]
    for i, one in enumerate(each):
        for power in powers[: DEGREE_LINEAR + 1]:
            yield one * power
        for other in each[i:]:
            product = one * other
            for power in powers[: DEGREE_SQUARE + 1]:
                yield product * power


def _least_squares(columns: list[Array], targets: Array) -> Array:
    count, outputs = len(columns), targets.shape[1]
    basis: list[Array] = []
    kept: list[int] = []
    upper = np.zeros((count, count))
    for k, column in enumerate(columns):
        rest, size = column.copy(), np.sqrt(np.sum(column * column))
        for j, vector in zip(kept, basis, strict=True):
            upper[j, k] = np.sum(vector * rest)
            rest -= upper[j, k] * vector
        left = np.sqrt(np.sum(rest * rest))
        if left > DEPENDENT * size:
            upper[k, k] = left
            basis.append(rest / left)
            kept.append(k)
    solution = np.zeros((count, outputs))
    for output in range(outputs):
        rest = targets[:, output].copy()
        projection = np.zeros(count)
        for j, vector in zip(kept, basis, strict=True):
            projection[j] = np.sum(vector * rest)
            rest -= projection[j] * vector
        for j in reversed(kept):
            solved = projection[j] - np.sum(upper[j, j + 1 :] * solution[j + 1 :, output])
            solution[j, output] = solved / upper[j, j]
    return solution
