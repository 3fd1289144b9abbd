"""How fast a growing mode grows at the actual gain."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.follow import follow
from yieldosc.solver.polynomials import ComplexArray, Poly, roots, value_and_slope

Array = NDArray[np.float64]
COARSE_STEPS = 4


def growth_rate(a: Poly, b: Poly, omega: Array, lower: Array, g: Array) -> tuple[Array, NDArray[np.bool_]]:
    """Re s (n,) of the mode that entered at (omega, lower), at gain g; and whether it has become two real roots.

    Continuation from the crossing; a pair that met on the real axis counts with its smaller real root, since the
    slower of the two exponentials is what a small disturbance is left with in the worst case.
    """
    pair = (omega > 0) & np.isfinite(omega)
    safe = np.where(pair, omega, 1.0)
    with np.errstate(invalid="ignore"):
        s, arrived = follow(a, b, 1j * safe, np.where(pair, lower, g), g)
    rate = np.where(pair & arrived, s.real, np.nan)
    merged = pair & ~arrived
    rows = np.flatnonzero(~arrived | ~pair)
    if rows.size:
        rate[rows] = _smallest_real([p[rows] for p in a], [p[rows] for p in b], g[rows])
    return rate, merged


def only_pair_growth(a: Poly, b: Poly, omega: Array, lower: Array, g: Array) -> tuple[Array, NDArray[np.bool_]]:
    """The same for units of which exactly one pair of poles grows: whatever growing complex root Newton ends on is
    that pair, so a few coarse steps in ln g suffice; a unit in which they do not is followed with care."""
    s = np.asarray(1j * omega, dtype=np.complex128)
    ratio = (g / lower) ** (1 / COARSE_STEPS)
    at = lower.copy()
    with np.errstate(all="ignore"):
        for step in range(COARSE_STEPS):
            s, _ = _newton(a, b, s - np.log(ratio) * at * _slope_by_gain(a, b, s, at), at * ratio, 2)
            at = at * ratio if step < COARSE_STEPS - 1 else g
        s, change = _newton(a, b, s, g, 4)
        good = (change <= 1e-10 * np.abs(s)) & (s.real > 0) & (s.imag > 1e-6 * np.abs(s))
    rate, merged = np.where(good, s.real, np.nan), np.zeros(len(g), dtype=bool)
    rows = np.flatnonzero(~good)
    if rows.size:
        rate[rows], merged[rows] = growth_rate(
            [p[rows] for p in a], [p[rows] for p in b], omega[rows], lower[rows], g[rows]
        )
    return rate, merged


def _slope_by_gain(a: Poly, b: Poly, s: ComplexArray, g: Array) -> ComplexArray:
    """−ds/dg = B/(A' + g B')."""
    _, da = value_and_slope(a, s)
    vb, db = value_and_slope(b, s)
    slope: ComplexArray = vb / (da + g * db)
    return slope


def _newton(a: Poly, b: Poly, s: ComplexArray, g: Array, steps: int) -> tuple[ComplexArray, Array]:
    """Newton on D(s) at gain g: the root and the size of the last change."""
    change = np.zeros_like(s)
    for _ in range(steps):
        va, da = value_and_slope(a, s)
        vb, db = value_and_slope(b, s)
        change = (va + g * vb) / (da + g * db)
        s = s - change
    return s, np.abs(change)


def _smallest_real(a: Poly, b: Poly, g: Array) -> Array:
    size = max(len(a), len(b))
    zero = np.zeros_like(g)
    d = [(a[k] if k < len(a) else zero) + g * (b[k] if k < len(b) else zero) for k in range(size)]
    found = roots(d)
    with np.errstate(invalid="ignore"):
        real = (np.abs(found.imag) <= 1e-6 * np.abs(found)) & (found.real > 0)
        any_growing = np.where(found.real > 0, found.real, np.inf).min(axis=1)
    smallest = np.where(real, found.real, np.inf).min(axis=1)
    chosen = np.where(np.isfinite(smallest), smallest, any_growing)
    return np.where(np.isfinite(chosen), chosen, np.nan)
