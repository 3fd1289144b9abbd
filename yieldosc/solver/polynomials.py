"""Polynomials of n units at once: a list of coefficients, lowest power first, each an array (n,)."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Number = TypeVar("Number", Array, ComplexArray)
Poly = Sequence[Array]


def value(poly: Poly, x: Number) -> Number:
    """Horner value at x (n,)."""
    total = poly[-1] + 0 * x
    for coefficient in reversed(poly[:-1]):
        total = total * x + coefficient
    return total


def value_and_slope(poly: Poly, x: Number) -> tuple[Number, Number]:
    """Value and derivative at x (n,)."""
    total, slope = poly[-1] + 0 * x, 0 * x
    for coefficient in reversed(poly[:-1]):
        slope = slope * x + total
        total = total * x + coefficient
    return total, slope


def even_odd(poly: Poly) -> tuple[list[Array], list[Array]]:
    """P(jω) = E(x) + jω O(x) with x = ω²: coefficients of E and O, lowest power first."""
    even = [c if k % 4 == 0 else -c for k, c in enumerate(poly) if k % 2 == 0]
    odd = [c if k % 4 == 1 else -c for k, c in enumerate(poly) if k % 2 == 1]
    return even, odd or [np.zeros_like(poly[0])]


def product(left: Poly, right: Poly) -> list[Array]:
    """Coefficients of the product."""
    out = [np.zeros_like(left[0]) for _ in range(len(left) + len(right) - 1)]
    for i, a in enumerate(left):
        for j, b in enumerate(right):
            out[i + j] = out[i + j] + a * b
    return out


def difference(left: Poly, right: Poly) -> list[Array]:
    """Coefficients of left − right."""
    size = max(len(left), len(right))
    zero = np.zeros_like(left[0])
    return [
        (left[k] if k < len(left) else zero) - (right[k] if k < len(right) else zero) for k in range(size)
    ]


def roots(poly: Poly) -> ComplexArray:
    """All roots (n, degree) by companion eigenvalues, nan where a unit's degree is lower.

    The variable is scaled per unit so that the end coefficients have equal size (Higham 2002, ch. 26 on scaling).
    Units are grouped by their true degree: a leading coefficient of exactly zero is a root at infinity.
    """
    table = np.stack(np.broadcast_arrays(*poly), axis=1)  # (n, degree + 1)
    n, size = table.shape
    out = np.full((n, size - 1), np.nan + 0j)
    degree = (size - 1) - np.argmax(table[:, ::-1] != 0, axis=1)
    for d in np.unique(degree):
        rows = np.flatnonzero(degree == d)
        if d > 0:
            out[rows, :d] = _roots_of_degree(table[rows, : d + 1])
    return out


def _roots_of_degree(table: Array) -> ComplexArray:
    d = table.shape[1] - 1
    tail = np.where(table[:, 0] != 0, np.abs(table[:, 0] / table[:, -1]), 1.0)
    scale = tail ** (1.0 / d)
    powers = scale[:, None] ** np.arange(d - 1, -1, -1)
    lower = table[:, :-1] / table[:, -1:] / (powers * scale[:, None])
    companion = np.zeros((len(table), d, d))
    companion[:, 1:, :-1] = np.eye(d - 1)
    companion[:, :, -1] = -lower
    found = np.linalg.eigvals(companion) * scale[:, None]
    return _polished(table, np.asarray(found, dtype=np.complex128))


def _polished(table: Array, found: ComplexArray) -> ComplexArray:
    """Two Newton steps on the original coefficients, kept where they lower the residual."""
    coefficients = [table[:, k, None] for k in range(table.shape[1])]
    for _ in range(2):
        here, slope = value_and_slope(coefficients, found)
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            better = found - here / slope
            moved = np.isfinite(better) & (np.abs(value(coefficients, better)) < np.abs(here))
        found = np.where(moved, better, found)
    return found
