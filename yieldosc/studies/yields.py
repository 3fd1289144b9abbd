"""Joint yield under a plan of looks, and what each corner shows."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from yieldosc.studies.estimates import LookPlan, clopper_pearson, yield_estimate
from yieldosc.studies.gather import BINS, Gathered, Layouts, append, gather, layouts
from yieldosc.studies.judge import GOOD
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import OUTCOMES, CornerResult, Distribution, Estimate, Look, Verdict
from yieldosc.studies.run import INNER, Setup
from yieldosc.studies.tally import Histogram, Moments
from yieldosc.study import Corner

PIECES_PER_WORKER = 8
MOST_PIECE = 8 * INNER  # units; bounds what one message between processes carries
CHART_BARS = 64
MAIN = ("frequency_hz", "settled_hz", "startup_margin", "distortion")  # fields of their own in a corner's result


@dataclass(frozen=True)
class YieldRun:
    """The declared set, evaluated: tallies, looks and verdict."""

    gathered: Gathered
    bins: Layouts
    estimate: Estimate
    looks: tuple[Look, ...]
    looks_planned: int
    verdict: Verdict


@dataclass(frozen=True)
class _Job:
    """Pieces of `size` units from `boundary` on; the first piece begins at `start`, inside its first solver block."""

    setup: Setup
    bins: Layouts
    start: int
    end: int
    size: int

    @property
    def boundary(self) -> int:
        return self.start - self.start % INNER

    @property
    def pieces(self) -> int:
        return -(-(self.end - self.boundary) // self.size)

    def __call__(self, piece: int) -> Gathered:
        first = max(self.start, self.boundary + piece * self.size)
        return gather(self.setup, self.bins, first, min(self.boundary + (piece + 1) * self.size, self.end) - first)


def run_units(
    setup: Setup,
    bins: Layouts,
    start: int,
    end: int,
    *,
    workers: Workers | None = None,
    block: int | None = None,
    meter: Meter | None = None,
) -> Gathered:
    """Tallies of units start … end − 1. block: units per piece of work, rounded up to the solver's blocks."""
    crew, told = workers or Workers(), meter or Meter()
    wanted = block or min(-(-(end - start) // (crew.count * PIECES_PER_WORKER)), MOST_PIECE)
    job = _Job(setup, bins, start, end, -(-wanted // INNER) * INNER)
    whole: Gathered | None = None
    with crew.in_order(job, job.pieces) as parts:
        for part in parts:
            told.done(part.units)
            if whole is None:
                whole = part
            else:
                append(whole, part)
    if whole is None:
        raise ValueError("no units to run")
    return whole


def joint_yield(
    setup: Setup,
    plan: LookPlan,
    target: float | None,
    *,
    workers: Workers | None = None,
    block: int | None = None,
    meter: Meter | None = None,
) -> YieldRun:
    """Look at the counts of the plan until a verdict on the target stands; only this yield carries one."""
    bins = layouts(setup, plan.counts[0])
    gathered: Gathered | None = None
    looks: list[Look] = []
    verdict: Verdict = "not proven"
    for number, units in enumerate(plan.counts, start=1):
        done = 0 if gathered is None else gathered.units
        if meter is not None and number > 1:
            meter.expect(units - done)
        more = run_units(setup, bins, done, units, workers=workers, block=block, meter=meter)
        if gathered is None:
            gathered = more
        else:
            append(gathered, more)
        failures = units - int(gathered.joint[GOOD])
        interval = plan.interval(failures, units)
        looks.append(Look(number=number, units=units, failures=failures, low=interval.low, high=interval.high))
        verdict = plan.verdict(interval, target)
        if verdict != "not proven":
            break
    if gathered is None:
        raise ValueError("the plan has no look")
    return YieldRun(gathered, bins, interval, tuple(looks), len(plan.counts), verdict)


def outcome_counts(gathered: Gathered) -> dict[str, int]:
    """Outcome → units, by the first that any corner shows; they add up to the units."""
    return {name: int(gathered.joint[GOOD if name == "good" else OUTCOMES.index(name)]) for name in OUTCOMES}


def corner_results(
    gathered: Gathered, corners: tuple[Corner, ...], confidence: float
) -> tuple[CornerResult, ...]:
    """Per corner; intervals are pointwise."""
    made = []
    for c, corner in enumerate(corners):
        shown = gathered.shown[c]
        distributions = {
            name: _distribution(gathered.moments[c][name], gathered.histograms[c][name])
            for name in gathered.moments[c]
            if gathered.moments[c][name]
        }
        margin = distributions.get("startup_margin")
        dead = int(gathered.dead[c])
        # A circuit without a start-up question has no margin, and nothing that could fail to start.
        asked = margin is not None or dead > 0
        made.append(
            CornerResult(
                corner=corner,
                frequency_hz=distributions.get("frequency_hz", _nothing()),
                settled_hz=distributions.get("settled_hz"),
                distortion=distributions.get("distortion"),
                others={name: d for name, d in distributions.items() if name not in MAIN},
                startup_failures=dead if asked else None,
                startup_rate=clopper_pearson(dead, gathered.units, confidence) if asked else None,
                margin=margin,
                yield_=yield_estimate(gathered.units - int(shown[GOOD]), gathered.units, confidence),
                failing={OUTCOMES[code]: int(n) for code, n in enumerate(shown[:GOOD]) if n and code},
                first_failures=int(gathered.first[c]),
            )
        )
    return tuple(made)


def _distribution(moments: list[Moments], histogram: Histogram) -> Distribution:
    whole = moments[0]
    for part in moments[1:]:
        whole = whole.merged(part)
    low, middle, high = (
        float(np.clip(histogram.quantile(q), whole.low, whole.high)) for q in (0.001, 0.5, 0.999)
    )
    edges, counts = _chart(histogram, whole.low, whole.high)
    return Distribution(
        mean=whole.mean, sd=whole.sd, min=whole.low, max=whole.high,
        q001=low, q50=middle, q999=high, edges=edges, counts=counts,
    )  # fmt: skip


def _chart(histogram: Histogram, low: float, high: float) -> tuple[tuple[float, ...], tuple[int, ...]]:
    """Bars over the populated range: whole bins put together, about CHART_BARS of them."""
    counts = histogram.inside
    first = int(np.clip((low - histogram.low) // histogram.width, 0, BINS - 1))
    last = int(np.clip((high - histogram.low) // histogram.width, first, BINS - 1))
    step = max(1, -(-(last - first + 1) // CHART_BARS))
    starts = np.arange(first, last + 1, step)
    bars = np.add.reduceat(counts[: last + 1], starts)
    edges = histogram.low + histogram.width * np.append(starts, starts[-1] + step)
    return tuple(float(e) for e in edges), tuple(int(n) for n in bars)


def _nothing() -> Distribution:
    """Of a corner at which no unit has a gain."""
    nan = float("nan")
    return Distribution(mean=nan, sd=nan, min=nan, max=nan, q001=nan, q50=nan, q999=nan)
