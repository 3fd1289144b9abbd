"""Poles that grow at gain zero: a circuit with fixed gain rows may oscillate before its gain element does anything.

Each of them is entered as a crossing at a gain far below every other, so that counting goes on from there.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.crossings import Crossings, ordered
from yieldosc.solver.polynomials import Poly, roots

Array = NDArray[np.float64]
NEGLIGIBLE = 1e-6  # of the least gain that matters
ON_AXIS = 1e-9  # |Re s|/|s| below which a pole of the network without its gain element counts as on the axis


def with_start(a: Poly, crossings: Crossings, g: Array) -> tuple[Crossings, Array]:
    """Crossings with the growing poles of A put in front, and the gain (m,) that marks them, nan without any."""
    lowest = next((k for k, c in enumerate(a) if np.any(c)), 0)  # poles at s = 0 grow nowhere
    poles = roots(a[lowest:]) if len(a) - lowest > 1 else np.zeros((len(g), 0), dtype=np.complex128)
    with np.errstate(invalid="ignore"):
        grows = poles.real > ON_AXIS * np.abs(poles)
        pair = grows & (poles.imag > ON_AXIS * np.abs(poles))
        alone = grows & (np.abs(poles.imag) <= ON_AXIS * np.abs(poles))
    entered = pair | alone
    if not entered.any():
        return crossings, np.full(len(g), np.nan)
    least = np.nanmin(np.concatenate([np.abs(crossings.gain), np.abs(g)[:, None]], axis=1), axis=1)
    mark = np.where(entered.any(axis=1), np.sign(g) * NEGLIGIBLE * least, np.nan)
    omega = np.where(pair, poles.imag, np.where(alone, 0.0, np.nan))
    joined = ordered(
        np.concatenate([omega, crossings.omega], axis=1),
        np.concatenate([np.where(entered, mark[:, None], np.nan), crossings.gain], axis=1),
        np.concatenate([entered.astype(np.int64), crossings.direction], axis=1),
        np.concatenate([np.where(pair, 2, np.where(alone, 1, 0)), crossings.poles], axis=1),
    )
    return joined, mark
