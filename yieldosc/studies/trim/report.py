"""What a declared trim does: who reaches the target, what is left at every corner, what start-up margin it costs."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.population import Block
from yieldosc.quantities import format_quantity
from yieldosc.solver.solution import Solution, Status
from yieldosc.studies.estimates import clopper_pearson, yield_estimate
from yieldosc.studies.judge import GOOD
from yieldosc.studies.limits.results import TrimmedCorner, TrimResult
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Distribution, Estimate
from yieldosc.studies.rivals import paired_difference
from yieldosc.studies.run import INNER, Setup
from yieldosc.studies.trim.trim import Trim

Array = NDArray[np.float64]
BEYOND = 3.0  # settings are tried down to a third of the range's low end and up to three times its high end
COVERED = 0.999  # of the units: what a suggested range is made for


@dataclass(frozen=True)
class _Piece:
    """Units before and after the trim. Frequencies and margins (corners, n), nan where there is none."""

    needed: Array  # nan where no setting in reach brings the reading to the target
    low: NDArray[np.bool_]
    high: NDArray[np.bool_]
    ceased: NDArray[np.bool_]
    unreadable: NDArray[np.bool_]
    good_before: NDArray[np.bool_]
    good_after: NDArray[np.bool_]
    seen: tuple[Array, Array, Array, Array]  # frequency before, after, margin before, after


@dataclass(frozen=True)
class _Job:
    setup: Setup
    trim: Trim
    start: int
    end: int

    @property
    def pieces(self) -> int:
        return -(-(self.end - self.start) // INNER)

    def __call__(self, piece: int) -> _Piece:
        first = self.start + piece * INNER
        count = min(INNER, self.end - first)
        draw = self.setup.draw(first, count)
        plain = self.setup.with_adjustment(None).block(first, count)
        bench, trim = self.setup.bench, self.trim
        wide = trim.wanted(plain, bench, draw, beyond=BEYOND)
        inside = trim.wanted(plain, bench, draw)
        before = self._judged(plain)
        role, factors = trim.factors(plain, bench, draw)
        plain.adjust(role, factors)
        after = self._judged(plain)
        needed = np.where(wide.reached, wide.setting, np.nan)
        return _Piece(
            needed, inside.below, inside.above, inside.ceased, inside.unsolved, before[0], after[0],
            (before[1], after[1], before[2], after[2]),
        )  # fmt: skip

    def _judged(self, block: Block) -> tuple[NDArray[np.bool_], Array, Array]:
        good = np.ones(block.count, dtype=bool)
        frequency, margin = [], []
        for corner in self.setup.corners:
            solution = self.setup.bench.solve(block, corner)
            good &= self.setup.judge.codes(solution) == GOOD
            frequency.append(_defined(solution, solution.limit_frequency_hz))
            margin.append(_defined(solution, solution.startup_margin))
        return good, np.stack(frequency), np.stack(margin)


def _defined(solution: Solution, values: Array) -> Array:
    with_gain = (solution.status != Status.NO_BIAS) & (solution.status != Status.UNDEFINED)
    return np.where(with_gain, np.broadcast_to(values, with_gain.shape), np.nan)


def trim_result(
    setup: Setup,
    trims: tuple[Trim, ...],
    units: int,
    *,
    confidence: float = 0.95,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> TrimResult:
    """setup: without adjustment. trims: one for each instrument bias; the one of the lowest yield is reported."""
    crew = workers or Workers()
    found = [_run(setup, trim, 0, units, crew, meter) for trim in trims]
    worst = min(range(len(trims)), key=lambda i: int(found[i].good_after.sum()))
    fresh = _run(setup, trims[worst], units, 2 * units, crew, meter)
    return _result(setup, trims[worst], found[worst], fresh, confidence)


def _run(setup: Setup, trim: Trim, start: int, end: int, crew: Workers, meter: Meter | None) -> _Piece:
    job = _Job(setup, trim, start, end)
    pieces = []
    with crew.in_order(job, job.pieces) as answers:
        for piece in answers:
            pieces.append(piece)
            if meter is not None:
                meter.done(len(piece.needed))
    before, after, margin_before, margin_after = (
        np.concatenate([p.seen[k] for p in pieces], axis=1) for k in range(4)
    )
    return _Piece(
        needed=np.concatenate([p.needed for p in pieces]),
        low=np.concatenate([p.low for p in pieces]),
        high=np.concatenate([p.high for p in pieces]),
        ceased=np.concatenate([p.ceased for p in pieces]),
        unreadable=np.concatenate([p.unreadable for p in pieces]),
        good_before=np.concatenate([p.good_before for p in pieces]),
        good_after=np.concatenate([p.good_after for p in pieces]),
        seen=(before, after, margin_before, margin_after),
    )


def _result(setup: Setup, trim: Trim, found: _Piece, fresh: _Piece, confidence: float) -> TrimResult:
    n = len(found.needed)

    def share(flags: NDArray[np.bool_]) -> Estimate:
        return clopper_pearson(int(np.count_nonzero(flags)), len(flags), confidence)

    def yield_of(good: NDArray[np.bool_]) -> Estimate:
        return yield_estimate(n - int(np.count_nonzero(good)), n, confidence)

    known = found.needed[np.isfinite(found.needed)]
    edge = (1 - COVERED) / 2
    low, middle, high = np.quantile(known, [edge, 0.5, 1 - edge]) if len(known) else (trim.low, np.nan, trim.high)
    return TrimResult(
        role=trim.parameter.role, part=trim.parameter.part, kind=kind_text(trim), low=trim.low, high=trim.high,
        unit=trim.parameter.unit,
        reached=share(~(found.low | found.high | found.ceased | found.unreadable)),
        at_low=share(found.low), at_high=share(found.high), ceased=share(found.ceased),
        unreadable=share(found.unreadable),
        corners=_corners(setup, found),
        yield_before=yield_of(found.good_before), yield_after=yield_of(found.good_after),
        difference=paired_difference(found.good_after, found.good_before, confidence),
        needed={"q0005": float(low), "q50": float(middle), "q9995": float(high)},
        suggested_low=float(low), suggested_high=float(high),
        suggested_reached=share((fresh.needed >= low) & (fresh.needed <= high)),
        searched=(trim.low / BEYOND, trim.high * BEYOND), unmet=share(~np.isfinite(found.needed)), units=n,
    )  # fmt: skip


def kind_text(trim: Trim) -> str:
    """How the role is set."""
    if trim.series:
        return f"select on test from {len(trim.series)} values"
    if trim.step is None:
        return "continuous"
    own = f", each ±{trim.step_tolerance * 100:g} %" if trim.step_tolerance else ""
    return f"steps of {format_quantity(trim.step, trim.parameter.unit)}{own}"


def _corners(setup: Setup, found: _Piece) -> tuple[TrimmedCorner, ...]:
    return tuple(
        TrimmedCorner(
            corner=corner,
            before=_distribution(found.seen[0][c]), after=_distribution(found.seen[1][c]),
            margin_before=_distribution(found.seen[2][c]), margin_after=_distribution(found.seen[3][c]),
        )
        for c, corner in enumerate(setup.corners)
    )  # fmt: skip


def _distribution(values: Array) -> Distribution | None:
    known = values[np.isfinite(values)]
    if not len(known):
        return None
    q001, q50, q999 = (float(q) for q in np.quantile(known, [0.001, 0.5, 0.999]))
    return Distribution(
        mean=float(known.mean()), sd=float(known.std()), min=float(known.min()), max=float(known.max()),
        q001=q001, q50=q50, q999=q999,
    )  # fmt: skip
