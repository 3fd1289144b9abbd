"""What is kept of evaluated units: counts and histograms add up, moments merge in order, nothing else remains."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.solution import Settling, Solution, Status
from yieldosc.studies.judge import GOOD, Codes
from yieldosc.studies.run import Setup, audit_mask, inner_pieces, not_starting
from yieldosc.studies.tally import Histogram, Moments

Array = NDArray[np.float64]
Counts = NDArray[np.int64]
ATTRIBUTES = (
    "frequency_hz", "settled_hz", "startup_margin", "distortion",
    "distortion_in", "amplitude_v", "amplitude_in_v", "drive_w", "resistance_ratio",
)  # fmt: skip
PILOT = 4096  # units that fix the histograms' bins
BINS = 2048
MOST_NUMBERS = 20_000  # failing units whose numbers are kept
MOST_WRONG_MODES = 64
CODES = int(GOOD) + 1


@dataclass(frozen=True, slots=True)
class Layout:
    """Bins of one attribute at one corner: BINS of equal width from `low`, and one beyond each end."""

    low: float
    width: float


Layouts = tuple[dict[str, Layout], ...]  # per corner: attribute → layout, for the attributes that exist there


@dataclass
class Gathered:
    """Tallies of consecutive units. `moments` holds one entry per solver block, in order of the unit numbers."""

    units: int
    joint: Counts  # (codes,)
    shown: Counts  # (corners, codes): units that show the outcome at the corner
    first: Counts  # (corners,): units that no earlier corner failed
    dead: Counts  # (corners,): units that do not start on the intended mode
    moments: list[dict[str, list[Moments]]]  # per corner
    histograms: list[dict[str, Histogram]]  # per corner
    failing: Counts
    failing_codes: Codes
    wrong_modes_hz: list[float] = field(default_factory=list)
    audited: int = 0
    disagreeing: int = 0
    exact: int = 0
    settling: Settling | None = None
    flips: int = 0  # units that are good at every corner and fail between their temperatures
    near: Counts = field(default_factory=lambda: np.zeros(0, dtype=np.int64))  # good units that were looked at there


def observed(solution: Solution) -> dict[str, Array]:
    """Attributes with a distribution, of the units that have them (units without bias have none)."""
    with_gain = (solution.status != Status.NO_BIAS) & (solution.status != Status.UNDEFINED)
    found: dict[str, Array] = {}
    for name in ATTRIBUTES:
        values: Array | None = getattr(solution, name)
        if values is None:
            continue
        kept = with_gain & np.isfinite(values)
        if kept.all():
            found[name] = values
        elif kept.any():
            found[name] = values[kept]
    return found


def layouts(setup: Setup, units: int) -> Layouts:
    """Bins from the first 4,096 units: twice their range, so that the quantiles asked for lie well inside."""
    block = setup.block(0, min(units, PILOT))
    return tuple(
        {name: _layout(values) for name, values in observed(setup.bench.solve(block, corner)).items()}
        for corner in setup.corners
    )


def _layout(values: Array) -> Layout:
    low, high = float(values.min()), float(values.max())
    span = max(high - low, abs(high) * 1e-9, 1e-300)
    return Layout(low - span / 2, 2 * span / BINS)


def gather(setup: Setup, bins: Layouts, start: int, count: int) -> Gathered:
    """Evaluate and judge units start … start + count − 1 at every corner. Memory: one solver block."""
    corners = len(setup.corners)
    found = Gathered(
        units=count,
        joint=np.zeros(CODES, dtype=np.int64),
        shown=np.zeros((corners, CODES), dtype=np.int64),
        first=np.zeros(corners, dtype=np.int64),
        dead=np.zeros(corners, dtype=np.int64),
        moments=[{name: [] for name in at} for at in bins],
        histograms=[{name: _histogram(layout) for name, layout in at.items()} for at in bins],
        failing=np.zeros(0, dtype=np.int64),
        failing_codes=np.zeros(0, dtype=np.int8),
    )
    for first, size in inner_pieces(start, count):
        _gather_block(setup, found, first, size)
    return found


def _gather_block(setup: Setup, found: Gathered, start: int, size: int) -> None:
    block = setup.block(start, size)
    joint = np.full(size, GOOD, dtype=np.int8)
    alive = np.ones(size, dtype=bool)
    nearest = setup.far(size)
    for c, corner in enumerate(setup.corners):
        audit = audit_mask(setup.streams, start, size, c, len(setup.corners))
        solution = setup.bench.solve(block, corner, audit=audit)
        codes = setup.judge.codes(solution)
        found.shown[c] += np.bincount(codes, minlength=CODES)
        failed = codes < GOOD
        found.first[c] += np.count_nonzero(failed & alive)
        alive &= ~failed
        found.dead[c] += np.count_nonzero(not_starting(solution))
        np.minimum(joint, codes, out=joint)
        setup.approach(nearest, solution)
        _distributions(found, c, solution)
        _notes(found, solution)
    looked = setup.lower_between(block, joint, nearest)
    found.flips += int(np.count_nonzero(joint[looked] < GOOD))
    found.near = np.concatenate([found.near, looked[joint[looked] == GOOD] + start])[:MOST_NUMBERS]
    found.joint += np.bincount(joint, minlength=CODES)
    failing = np.flatnonzero(joint < GOOD)[: MOST_NUMBERS - len(found.failing)]
    found.failing = np.concatenate([found.failing, failing + start])
    found.failing_codes = np.concatenate([found.failing_codes, joint[failing]])


def _distributions(found: Gathered, c: int, solution: Solution) -> None:
    for name, values in observed(solution).items():
        if name in found.histograms[c]:
            found.moments[c][name].append(Moments.of(values))
            found.histograms[c][name].add(values)


def _notes(found: Gathered, solution: Solution) -> None:
    found.audited += solution.audited
    found.disagreeing += solution.disagreeing
    found.exact += solution.exact
    found.settling = _account(found.settling, solution.settling)
    if solution.other_mode_hz is not None and len(found.wrong_modes_hz) < MOST_WRONG_MODES:
        wrong = solution.other_mode_hz[solution.status == Status.WRONG_MODE]
        kept = wrong[np.isfinite(wrong)][: MOST_WRONG_MODES - len(found.wrong_modes_hz)]
        found.wrong_modes_hz += [float(f) for f in kept]


def _account(one: Settling | None, other: Settling | None) -> Settling | None:
    return other if one is None else one if other is None else one.merged(other)


def _histogram(layout: Layout) -> Histogram:
    return Histogram.empty(low=layout.low, width=layout.width, bins=BINS)


def append(whole: Gathered, part: Gathered) -> None:
    """Put the tallies of the units that follow behind those of `whole`."""
    whole.units += part.units
    whole.joint += part.joint
    whole.shown += part.shown
    whole.first += part.first
    whole.dead += part.dead
    for mine, theirs in zip(whole.moments, part.moments, strict=True):
        for name in mine:
            mine[name] += theirs[name]
    for histograms, added in zip(whole.histograms, part.histograms, strict=True):
        for name in histograms:
            histograms[name] = histograms[name].merged(added[name])
    room = MOST_NUMBERS - len(whole.failing)
    whole.failing = np.concatenate([whole.failing, part.failing[:room]])
    whole.failing_codes = np.concatenate([whole.failing_codes, part.failing_codes[:room]])
    whole.wrong_modes_hz = (whole.wrong_modes_hz + part.wrong_modes_hz)[:MOST_WRONG_MODES]
    whole.audited += part.audited
    whole.disagreeing += part.disagreeing
    whole.exact += part.exact
    whole.settling = _account(whole.settling, part.settling)
    whole.flips += part.flips
    whole.near = np.concatenate([whole.near, part.near])[:MOST_NUMBERS]
