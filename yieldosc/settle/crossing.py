"""Where the loop with its limiter's own load has no phase, and how much gain it has to spare there.

The describing function scales the gain and nothing else, so it moves along g where the circuit's other symbols stay;
`frequency_hz` of an op-amp stage moves RF instead, and with it load and bandwidth. The two differ.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.settle.transfer import Response
from yieldosc.solver.crossings import Split, newton, real_roots

Array = NDArray[np.float64]
NEAR = np.log(1.25)  # a Newton run that went further in ln ω is compared with all roots


@dataclass(frozen=True, slots=True)
class FirstHarmonic:
    """ω (n,) in scaled variables and the excess gain H(jω) there, real; nan where the loop has none above 1."""

    omega: Array
    excess: Array


def first_harmonic(network: Response, omega: Array) -> FirstHarmonic:
    """The zero-phase frequency nearest to omega (n,) at which the loop gain exceeds 1, by Newton, else by all roots."""
    split = Split.of(network.a, [-c for c in network.b])
    with np.errstate(divide="ignore", invalid="ignore"):
        x, good, _ = newton(split, omega * omega)
        excess = 1 / split.gain(x)
        found = good & (excess > 0) & (np.abs(np.log(x / (omega * omega))) <= 2 * NEAR)
    rows = np.flatnonzero(~found & np.isfinite(omega))
    x = np.where(found, x, np.nan)
    if rows.size:
        x[rows] = _nearest(split.take(rows), omega[rows])
    with np.errstate(divide="ignore", invalid="ignore"):
        excess = 1 / split.gain(x)
    return FirstHarmonic(np.sqrt(x), excess)


def _nearest(split: Split, omega: Array) -> Array:
    """Root x of zero phase nearest in |ln ω|, those with a loop gain above 1 first; nan where there is none."""
    x, _ = real_roots(split, split.all_roots())
    with np.errstate(divide="ignore", invalid="ignore"):
        excess = np.stack([1 / split.gain(column) for column in x.T], axis=1)
        distance = np.abs(np.log(np.sqrt(x) / omega[:, None])) + np.where(excess > 1, 0.0, 100.0)
    distance = np.where(np.isfinite(distance) & (excess > 0), distance, np.inf)
    column = np.argmin(distance, axis=1)
    rows = np.arange(len(omega))
    return np.where(np.isfinite(distance[rows, column]), x[rows, column], np.nan)
