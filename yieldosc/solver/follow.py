"""One root of D(s) = A(s) + g B(s), followed continuously while the gain changes (predictor–corrector).

ds/dln g = −g B/(A' + g B')  (Allgower & Georg 1990, ch. 2: Euler predictor, Newton corrector, step by the correction)
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.polynomials import ComplexArray, Poly, value_and_slope

Array = NDArray[np.float64]
MOST_STEPS = 400
LEAST_STEP = 1e-10  # in ln g; the pair is about to meet on the real axis, or to pass another root


def _terms(a: Poly, b: Poly, s: ComplexArray, g: Array) -> tuple[ComplexArray, ComplexArray, ComplexArray]:
    va, da = value_and_slope(a, s)
    vb, db = value_and_slope(b, s)
    return va + g * vb, da + g * db, vb


def follow(
    a: Poly, b: Poly, start: ComplexArray, g_from: Array, g_to: Array
) -> tuple[ComplexArray, NDArray[np.bool_]]:
    """Roots (n,) at g_to of the branches that pass `start` at g_from, and which of them arrived.

    A branch that meets its conjugate on the real axis does not arrive.
    """
    s = np.array(start, dtype=np.complex128)
    sign = np.sign(g_from)
    at, goal = np.log(np.abs(g_from)), np.log(np.abs(g_to))
    step = np.clip(goal - at, -0.1, 0.1)
    moving = np.abs(goal - at) > 0
    lost = ~np.isfinite(s)
    for _ in range(MOST_STEPS):
        rows = np.flatnonzero(moving & ~lost)
        if rows.size == 0:
            break
        pa, pb = [c[rows] for c in a], [c[rows] for c in b]
        h = np.where(np.abs(goal[rows] - at[rows]) <= np.abs(step[rows]), goal[rows] - at[rows], step[rows])
        new, accepted = _advance(pa, pb, s[rows], sign[rows] * np.exp(at[rows]), sign[rows] * np.exp(at[rows] + h), h)
        s[rows] = np.where(accepted, new, s[rows])
        arrived = accepted & (h == goal[rows] - at[rows])
        at[rows] = np.where(arrived, goal[rows], at[rows] + np.where(accepted, h, 0.0))
        step[rows] = np.where(accepted, np.clip(1.6 * h, -0.7, 0.7), 0.4 * h)
        step[rows] = np.where(arrived, 0.0, step[rows])
        moving[rows] = ~arrived
        lost[rows] = ~arrived & (np.abs(step[rows]) < LEAST_STEP)
    return s, ~lost & ~moving


def _advance(
    a: Poly, b: Poly, s: ComplexArray, g: Array, g_next: Array, h: Array
) -> tuple[ComplexArray, NDArray[np.bool_]]:
    """One predicted and corrected step; refused where the correction is not small beside the move."""
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        _, slope, vb = _terms(a, b, s, g)
        predicted = s - h * g * vb / slope
        new = predicted
        for _ in range(5):
            d, slope, _ = _terms(a, b, new, g_next)
            change = d / slope
            new = new - change
        moved = np.abs(new - s) + 1e-9 * np.abs(s)
        close = np.abs(new - predicted) <= 0.15 * moved
        converged = np.abs(change) <= 1e-10 * np.abs(new)
        # the branch stays in its own half of the plane: crossing the real axis would be another branch
        return new, close & converged & np.isfinite(new) & (new.imag > 0)
