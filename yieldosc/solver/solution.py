"""What the solver says of n units at one corner."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


class Status(IntEnum):
    """Outcome of one unit at one corner, in the order in which a unit is counted."""

    STARTS = 0
    NO_BIAS = 1
    UNDEFINED = 2
    NOT_ASSESSABLE = 3
    NO_START = 4
    WRONG_MODE = 5


@dataclass(frozen=True, slots=True, kw_only=True)
class Settling:
    """How the settled frequencies of n units were found, and how far the quick way was off where it was checked.

    limiter: clip, tanh, exp or agc; method: "fitted shift", "full" (harmonic balance of every unit), "no shift" (below
    1 ppm of the limits' width on a sample) or "held" (by a level control in every unit); tolerance: relative, of the
    frequency, by the method used.
    checked: units solved in full beside the quick way; residual: largest relative difference in frequency among them;
    largest_shift: largest |settled/first − 1| of these; full: units solved in full because no fit held them; capped:
    the frequency still moved at the most harmonics allowed; fell_back: the residual missed the tolerance, so that all
    units were solved in full.
    """

    limiter: str
    method: str
    tolerance: float
    checked: int = 0
    residual: float = 0.0
    largest_shift: float = 0.0
    full: int = 0
    capped: int = 0
    not_converged: int = 0
    fell_back: bool = False


    def merged(self, other: Settling) -> Settling:
        """The account of both calls together."""
        return Settling(
            limiter=self.limiter,
            method=self.method if self.method == other.method else _joined(self.method, other.method),
            tolerance=max(self.tolerance, other.tolerance),
            checked=self.checked + other.checked,
            residual=max(self.residual, other.residual),
            largest_shift=max(self.largest_shift, other.largest_shift),
            full=self.full + other.full,
            capped=self.capped + other.capped,
            not_converged=self.not_converged + other.not_converged,
            fell_back=self.fell_back or other.fell_back,
        )


def _joined(first: str, second: str) -> str:
    return ", ".join(dict.fromkeys((*first.split(", "), *second.split(", "))))


@dataclass(frozen=True, slots=True, kw_only=True)
class Solution:
    """Arrays of length n. Frequencies are finite wherever a gain exists, margins too; see circuits and population.

    upper_ratio is g_h/g (inf without an upper gain limit); other_mode_hz the fastest other growing mode
    (nan without one, 0 for a latching real pole); growth_per_s is nan unless asked for.
    """

    frequency_hz: Array
    startup_margin: Array  # nan for circuits without a start-up question
    status: NDArray[np.int8]
    settled_hz: Array | None = None
    growth_per_s: Array | None = None
    critical_gain: Array | None = None
    upper_ratio: Array | None = None
    other_mode_hz: Array | None = None
    distortion: Array | None = None
    duty: Array | None = None  # share of a period at the high level
    distortion_in: Array | None = None  # at the limiter's input
    amplitude_v: Array | None = None  # peak of the fundamental at the output
    amplitude_in_v: Array | None = None  # at the limiter's input
    phase_deg: Array | None = None  # of the fundamental, against its source's
    drive_w: Array | None = None
    resistance_ratio: Array | None = None  # −R/ESR at a crystal's terminals
    control_reach: Array | None = None  # critical gain over gain at full control; below 1 the control is at its stop
    overdriven: NDArray[np.bool_] | None = None
    settling: Settling | None = None
    audited: int = 0
    disagreeing: int = 0
    exact: int = 0  # units solved by the exact path because the count of growing poles differed

    @property
    def limit_frequency_hz(self) -> Array:
        """The frequency that limits apply to: settled where a limiter is declared, else the crossing."""
        return self.frequency_hz if self.settled_hz is None else self.settled_hz
