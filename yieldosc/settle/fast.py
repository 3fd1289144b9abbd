"""The quick way: a fitted shift for most units, the full balance for those that no fit holds, a sample by both.

The residual of the sample is measured in every large call and in some of the others; above the tolerance the whole
call is solved in full.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.settle.prepared import Prepared
from yieldosc.settle.refine import TOLERANCE, Refined
from yieldosc.settle.settled import Figures, Settled, figures, undisturbed, waves, write, write_in_full
from yieldosc.settle.shift import FAST_TOLERANCE, FittedShift, Prediction
from yieldosc.solver.solution import Settling, Solution

Array = NDArray[np.float64]
CHECKED = 24
ALWAYS_CHECKED = 6000  # live units of a call
CHECKED_OF = 8
FEWEST = 256  # live units below which training would cost more than solving them
SEED = 77


@dataclass(frozen=True, slots=True)
class Checked:
    """Settled units and the account of how they were found."""

    settled: Settled
    account: Settling


def in_full(live: Prepared, solution: Solution, *, limiter: str, tolerance: float = TOLERANCE) -> Checked:
    """Every live unit by harmonic balance."""
    out = _blank(live, solution)
    write_in_full(out, live, tolerance=tolerance)
    return Checked(out, _account(out, limiter, "full", tolerance, full=len(live.rows)))


def fast(
    live: Prepared,
    solution: Solution,
    fitted: FittedShift,
    *,
    limiter: str,
    tolerance: float = TOLERANCE,
    fast_tolerance: float = FAST_TOLERANCE,
) -> Checked:
    """Live units by the fitted shift, in full where it holds none. tolerance: of the full balance on doubling its
    harmonics; fast_tolerance: largest relative difference in frequency that the checked units may show."""
    if len(live.rows) < FEWEST:
        return in_full(live, solution, limiter=limiter, tolerance=tolerance)
    return _checked(live, solution, fitted.predict, limiter, "fitted shift", tolerance, fast_tolerance)


def unshifted(
    live: Prepared, solution: Solution, *, limiter: str, negligible: float, tolerance: float = TOLERANCE
) -> Checked:
    """Live units at their zero-phase frequency, where a sample has shown shifts below `negligible` (relative); the
    distortion is what a sinusoid of the first-harmonic amplitude makes, filtered by the network."""
    return _checked(live, solution, _sinusoids, limiter, "no shift", tolerance, negligible)


def _sinusoids(live: Prepared) -> Prediction:
    m = len(live.rows)
    x = np.zeros((m, 32), dtype=np.complex128)
    x[:, 1] = live.limiter.first_amplitude(live.excess)
    none = np.zeros(m, dtype=bool)
    wave = Refined(np.zeros(m), x, np.ones(m, dtype=np.int64), ~none, none)
    return Prediction(figures(wave.shift, *waves(live, wave)), ~none)


def _checked(
    live: Prepared,
    solution: Solution,
    predict: Callable[[Prepared], Prediction],
    limiter: str,
    method: str,
    tolerance: float,
    allowed: float,
) -> Checked:
    out = _blank(live, solution)
    guess = predict(live)
    known, unknown = np.flatnonzero(guess.known), np.flatnonzero(~guess.known)
    write(out, live.take(known), _some(guess.figures, known))
    write_in_full(out, live.take(unknown), tolerance=tolerance)
    sampled = known[_sample(len(known))] if _checks(live) else known[:0]
    rows, residual, shift = _measured(out, live.take(sampled), solution, tolerance)
    missed = not residual <= allowed
    if missed:
        write_in_full(out, live.take(known), tolerance=tolerance)
    account = _account(out, limiter, method, allowed, full=len(live.rows) if missed else len(unknown))
    return Checked(out, replace(account, checked=rows, residual=residual, largest_shift=shift, fell_back=missed))


def _checks(live: Prepared) -> bool:
    """Every large call is checked, of the smaller ones one in eight: all share the fits, which depend on the circuit
    and its nominal values only. Which ones hangs on their first unit, so that no order of calls changes a digit."""
    if len(live.rows) >= ALWAYS_CHECKED or not len(live.rows):
        return True
    bits = int(np.frexp(live.excess[0])[0] * 2**53)
    return bits % CHECKED_OF == 0


def _measured(out: Settled, sample: Prepared, solution: Solution, tolerance: float) -> tuple[int, float, float]:
    """Units checked, largest relative difference from their full balance, largest shift. The difference is infinite
    where the balance does not converge: a fit has nothing to stand on there."""
    full = undisturbed(solution)
    write_in_full(full, sample, tolerance=tolerance)
    rows = sample.rows
    if full.not_converged[rows].any():
        return len(rows), float("inf"), 0.0
    residual = np.abs(out.settled_hz[rows] / full.settled_hz[rows] - 1)
    shift = np.abs(full.settled_hz[rows] / full.first_hz[rows] - 1)
    return len(rows), float(np.max(residual, initial=0.0)), float(np.max(shift, initial=0.0))


def _blank(live: Prepared, solution: Solution) -> Settled:
    out = undisturbed(solution)
    out.not_converged[live.lost] = True
    return out


def _sample(count: int) -> NDArray[np.intp]:
    rng = np.random.default_rng([SEED, count])
    return np.sort(rng.choice(count, size=min(CHECKED, count), replace=False))


def _some(found: Figures, rows: NDArray[np.intp]) -> Figures:
    return Figures(*(getattr(found, name)[rows] for name in Figures.__slots__))


def _account(out: Settled, limiter: str, method: str, tolerance: float, *, full: int) -> Settling:
    return Settling(
        limiter=limiter,
        method=method,
        tolerance=tolerance,
        full=full,
        capped=int(np.count_nonzero(out.capped)),
        not_converged=int(np.count_nonzero(out.not_converged)),
    )
