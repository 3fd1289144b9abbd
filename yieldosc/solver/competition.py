"""The intended mode against others that grow too: which of them takes the circuit."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.exact import Modes
from yieldosc.solver.growth import growth_rate
from yieldosc.solver.polynomials import roots

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]


def loses(a: list[Array], b: list[Array], g: Array, found: Modes, rows: NDArray[np.intp]) -> Mask:
    """The intended mode grows, but another grows faster and needs less than twice its critical gain's reach."""
    pa, pb = [c[rows] for c in a], [c[rows] for c in b]
    own, _ = growth_rate(pa, pb, found.omega[rows], found.lower[rows], g[rows])
    lost = np.zeros(rows.size, dtype=bool)
    for k in range(found.other_omega.shape[1]):
        omega, gain = found.other_omega[rows, k], found.other_gain[rows, k]
        live = np.flatnonzero(~np.isnan(omega))
        if live.size:
            rate, _ = growth_rate([c[live] for c in pa], [c[live] for c in pb], omega[live], gain[live], g[rows][live])
            begun = gain[live] == found.start[rows][live]  # grows without the gain element: no crossing to follow from
            # a hair less: where the intended mode is the fastest itself, rounding must not decide
            rate = np.where(begun, _fastest(pa, pb, g[rows], live) * (1 - 1e-9), rate)
            close = np.abs(found.lower[rows][live]) > 0.5 * np.abs(gain[live])
            lost[live] |= (rate > own[live]) & close
    return lost


def _fastest(a: list[Array], b: list[Array], g: Array, rows: NDArray[np.intp]) -> Array:
    """Largest real part of any pole."""
    poles = roots(sum_at_gain([c[rows] for c in a], [c[rows] for c in b], g[rows]))
    return np.asarray(np.max(np.where(np.isnan(poles), -np.inf, poles.real), axis=1))


def first_known(omega: Array, gain: Array) -> Array:
    """ω of the other growing mode with the lowest critical gain; nan where there is none."""
    size = np.where(np.isnan(gain), np.inf, np.abs(gain))
    column = np.argmin(size, axis=1)
    return np.where(np.isfinite(size.min(axis=1)), omega[np.arange(len(column)), column], np.nan)


def sum_at_gain(a: list[Array], b: list[Array], g: Array) -> list[Array]:
    """Coefficients of D = A + g B."""
    size = max(len(a), len(b))
    out = []
    for k in range(size):
        if k >= len(b):
            out.append(a[k])
        elif k >= len(a):
            out.append(g * b[k])
        else:
            out.append(a[k] + g * b[k])
    return out
