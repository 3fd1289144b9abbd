"""How fast a growing mode grows at the actual gain."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.follow import follow
from yieldosc.solver.polynomials import Poly, roots

Array = NDArray[np.float64]


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
