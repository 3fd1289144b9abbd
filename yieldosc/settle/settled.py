"""Where n units of a circuit with a limiter settle: frequency, amplitudes, distortion.

Harmonic balance in full for every unit; `fast` gives the same from a fitted shift.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Circuit
from yieldosc.settle.balance import samples_for, spectrum
from yieldosc.settle.prepared import Prepared, Values, level_is_held, prepare
from yieldosc.settle.refine import TOLERANCE, Refined, refine
from yieldosc.solver.solution import Solution

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Mask = NDArray[np.bool_]
HIGHEST = 51  # distortion counts harmonics 2 … 51, as that of a filtered square wave does
CHUNK_UNITS = 2048


@dataclass(frozen=True, slots=True, kw_only=True)
class Settled:
    """Arrays of length n. Units that do not grow, or that a level control holds, settle at their crossing undistorted.

    settled_hz: nan only where frequency_hz is; first_hz: zero-phase frequency of the loop with the limiter's own load,
    where it would settle without harmonics; excess: loop gain there (nan: not asked); amplitude_in_v, amplitude_out_v:
    peak fundamental at the limiter's input and at the output, nan where the limiter's scale is not known; distortion:
    harmonics 2 … 51 over the fundamental; highest: harmonics balanced; capped: the frequency still moved more than the
    tolerance at the most harmonics allowed; harmonics_in, harmonics_out (n, 52): complex peak values over their
    own fundamental, the mean first (None unless asked for).
    """

    settled_hz: Array
    first_hz: Array
    excess: Array
    amplitude_in_v: Array
    amplitude_out_v: Array
    distortion_in: Array
    distortion_out: Array
    highest: NDArray[np.int64]
    not_converged: Mask
    capped: Mask
    harmonics_in: ComplexArray | None = None
    harmonics_out: ComplexArray | None = None


@dataclass(frozen=True, slots=True)
class Figures:
    """What a balance says of m live units, as pure numbers: ln(settled/first), fundamentals of x and of the output
    transfer, distortions. The fitted shift predicts the same five."""

    shift: Array
    x_in: Array
    x_out: Array
    distortion_in: Array
    distortion_out: Array


def solve(
    circuit: Circuit,
    values: Values,
    temperature_c: float,
    solution: Solution,
    *,
    limiter: str,
    own_law: frozenset[str] = frozenset(),
    tolerance: float = TOLERANCE,
    most: int | None = None,
    harmonics: bool = False,
) -> Settled:
    """Harmonic balance of every growing unit. values: role → (n,) or 0-d; solution: of the same units, from the
    circuit's evaluator; limiter: clip, tanh, exp or agc. tolerance: relative move of the frequency when harmonics are
    doubled; most: cap on their number (default 127 where only odd ones arise, else 63)."""
    out = undisturbed(solution, harmonics=harmonics)
    if level_is_held(limiter, solution):
        return out
    live = prepare(circuit, values, temperature_c, solution, limiter=limiter, own_law=own_law)
    out.not_converged[live.lost] = True
    write_in_full(out, live, tolerance=tolerance, most=most)
    return out


def write_in_full(out: Settled, live: Prepared, *, tolerance: float = TOLERANCE, most: int | None = None) -> None:
    """Balance the live units and write them into the result, harmonics too where it has room for them."""
    for begin in range(0, len(live.rows), CHUNK_UNITS):
        part = live.take(np.arange(begin, min(begin + CHUNK_UNITS, len(live.rows))))
        found = refine(
            part.limiter, part.network, part.excess, part.skew, even=part.even, tolerance=tolerance, most=most
        )
        x, y = waves(part, found)
        write(out, part, figures(found.shift, x, y), found)
        if out.harmonics_in is not None and out.harmonics_out is not None:
            out.harmonics_in[part.rows] = x / np.abs(x[:, 1:2])
            out.harmonics_out[part.rows] = y / np.abs(y[:, 1:2])


def undisturbed(solution: Solution, *, harmonics: bool = False) -> Settled:
    """Every unit at its crossing, without distortion: what the live units are written over."""
    n = len(solution.frequency_hz)
    shape = (n, HIGHEST + 1)
    return Settled(
        settled_hz=solution.frequency_hz.copy(),
        first_hz=solution.frequency_hz.copy(),
        excess=np.full(n, np.nan),
        amplitude_in_v=np.full(n, np.nan),
        amplitude_out_v=np.full(n, np.nan),
        distortion_in=np.zeros(n),
        distortion_out=np.zeros(n),
        highest=np.zeros(n, dtype=np.int64),
        not_converged=np.zeros(n, dtype=bool),
        capped=np.zeros(n, dtype=bool),
        harmonics_in=np.zeros(shape, dtype=np.complex128) if harmonics else None,
        harmonics_out=np.zeros(shape, dtype=np.complex128) if harmonics else None,
    )


def waves(part: Prepared, found: Refined) -> tuple[ComplexArray, ComplexArray]:
    """X_n at the limiter's input and the output's harmonics (m, 52), n = 0 … 51, by way of the limited wave itself:
    those above the balanced ones are what the wave sends through the network."""
    orders = np.arange(HIGHEST + 1)
    top = found.x.shape[1] - 1
    points = samples_for(max(top, HIGHEST), part.limiter, part.limiter.first_amplitude(part.excess))
    u = spectrum(part.limiter, found.x, np.arange(top + 1), part.skew, points, orders)
    s = 1j * np.exp(found.shift)[:, None] * orders
    with np.errstate(divide="ignore", invalid="ignore"):
        x = part.network.at(s) * u
        y = part.network.output_at(s) * u
    if not part.even or part.limiter.mean_fixed:
        x[:, 0] = y[:, 0] = 0.0  # the bias holds the mean, or there is none
    return x, y


def figures(shift: Array, x: ComplexArray, y: ComplexArray) -> Figures:
    """Fundamentals and distortions of the waves."""
    distortion = []
    for wave in (x, y):
        rest = np.sqrt(np.sum(np.abs(wave[:, 2:]) ** 2, axis=1))
        distortion.append(rest / np.abs(wave[:, 1]))
    return Figures(shift, np.abs(x[:, 1]), np.abs(y[:, 1]), distortion[0], distortion[1])


def write(out: Settled, part: Prepared, found: Figures, refined: Refined | None = None) -> None:
    """The figures of some live units into the result; units without convergence keep their zero-phase frequency."""
    rows = part.rows
    good = np.ones(len(rows), dtype=bool) if refined is None else refined.converged
    out.first_hz[rows], out.excess[rows] = part.first_hz, part.excess
    out.settled_hz[rows] = part.first_hz * np.where(good, np.exp(found.shift), 1.0)
    out.amplitude_in_v[rows] = np.where(good, found.x_in * part.in_v, np.nan)
    out.amplitude_out_v[rows] = np.where(good, found.x_out * part.out_v, np.nan)
    out.distortion_in[rows] = np.where(good, found.distortion_in, np.nan)
    out.distortion_out[rows] = np.where(good, found.distortion_out, np.nan)
    if refined is not None:
        out.highest[rows], out.not_converged[rows] = refined.highest, ~good
        out.capped[rows] = refined.capped & good
