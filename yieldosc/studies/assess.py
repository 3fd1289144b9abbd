"""The main job: declared yield with its verdict, then everything that says how far to believe it."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from importlib import metadata

from yieldosc.errors import Finding
from yieldosc.population import Adjustment, Population
from yieldosc.solver import make_evaluator
from yieldosc.solver.evaluator import Evaluator
from yieldosc.studies import remarks
from yieldosc.studies.estimates import LookPlan
from yieldosc.studies.extremes import bands
from yieldosc.studies.failure_share import failure_share
from yieldosc.studies.gather import layouts
from yieldosc.studies.lots import LOTS, UNITS_PER_LOT, lot_yields, lots, shares_reels
from yieldosc.studies.nominal import bench_ratio, nominal_points, nominal_values, per_percent, reference_corner, slopes
from yieldosc.studies.parallel import default_workers
from yieldosc.studies.ranking import rankings
from yieldosc.studies.results import (
    Assessment,
    Band,
    CornerResult,
    Lots,
    Provenance,
    Ranking,
    RivalResult,
    Tighter,
)
from yieldosc.studies.rivals import RIVAL_UNITS, rivals
from yieldosc.studies.run import Setup
from yieldosc.studies.sensitivity import NotANumberError
from yieldosc.studies.tighter import leading_parts, tighter
from yieldosc.studies.worst_units import worst_units
from yieldosc.studies.yields import YieldRun, corner_results, joint_yield, outcome_counts
from yieldosc.study import Study

FIRST_LOOK = 50_000
LOOKS = 4
Progress = Callable[[int, int], None]  # (done, total) units; the total grows where another look is needed


def assess(
    study: Study,
    *,
    units: int | None = None,
    seed: int = 1,
    workers: int | None = None,
    progress: Progress | None = None,
    rival_units: int | None = None,
    block: int | None = None,
    evaluator: Evaluator | None = None,
    adjustment: Adjustment | None = None,
) -> Assessment:
    """Everything that `Assessment` holds. No digit depends on `workers` or `block`.

    units: exactly so many, one look; None: looks at 50,000 · 4^k until a verdict stands. rival_units: units of each
    rival set (default 20,480, never more than the declared run). block: units per piece of work. evaluator: in place
    of the circuit's own solver. adjustment: what is done to each board before it is judged.
    """
    started, clock = datetime.now(UTC), time.perf_counter()
    population = Population.of(study)
    solver = evaluator or make_evaluator(study.circuit, nominal_values(population, reference_corner(study)))
    ratio = bench_ratio(study, population, solver)
    setup = Setup.of(study, solver, seed=seed, bench_ratio=ratio or 1.0, adjustment=adjustment)
    plan = _plan(study, units)
    crew = _Crew(workers or default_workers(), _Meter(progress, plan.counts), block)
    target = study.design.yield_target
    run = joint_yield(setup, plan, target, workers=crew.workers, block=block, progress=crew.meter.units)
    evidence = _evidence(study, setup, run, crew, rival_units or RIVAL_UNITS)
    provenance = Provenance(
        seed=seed,
        input_sha256=study.digest,
        versions=versions(),
        started=started.isoformat(timespec="seconds"),
        seconds=round(time.perf_counter() - clock, 3),
        workers=crew.workers,
        audited=run.gathered.audited,
        disagreeing=run.gathered.disagreeing,
        exact=run.gathered.exact,
    )
    return _assembled(study, setup, run, plan, evidence, ratio, provenance)


class _Meter:
    """Progress in units; another look adds to the total."""

    def __init__(self, progress: Progress | None, counts: tuple[int, ...]) -> None:
        self._progress = progress
        self._done = 0
        self._counts = counts
        self._extra = 0

    def expect(self, units: int) -> None:
        self._extra += units

    def units(self, count: int) -> None:
        self._done += count
        if self._progress is not None:
            main = next((n for n in self._counts if n + self._extra >= self._done), self._counts[-1])
            self._progress(self._done, max(main + self._extra, self._done))


@dataclass(frozen=True)
class _Crew:
    workers: int
    meter: _Meter
    block: int | None


def _plan(study: Study, units: int | None) -> LookPlan:
    design = study.design
    first, most = (FIRST_LOOK, LOOKS) if units is None else (units, 1)
    if design.yield_target is None:
        most = 1  # nothing to decide, nothing to look again for
    return LookPlan(first=first, looks=most, confidence=design.confidence)


@dataclass(frozen=True)
class _Evidence:
    rankings: Mapping[str, Ranking]
    unranked: str
    rivals: tuple[RivalResult, ...]
    rival_units: int
    tighter: tuple[Tighter, ...]
    corners: tuple[CornerResult, ...]
    bands: tuple[Band, ...]
    lots: Lots | None
    outside: tuple[Finding, ...]


def _evidence(study: Study, setup: Setup, run: YieldRun, crew: _Crew, rival_units: int) -> _Evidence:
    confidence = study.design.confidence
    bins = layouts(setup, run.looks[0].units)
    corners = corner_results(run.gathered, bins, setup.corners, confidence)
    ranked, unranked = _rankings(study, setup, crew)
    leaning = slopes(setup.population, setup.bench, reference_corner(study))
    count = min(rival_units, run.gathered.units)
    tried, declared_good = rivals(setup, leaning, units=count, workers=crew.workers, confidence=confidence)
    better = tighter(setup, leading_parts(ranked), declared_good, workers=crew.workers, confidence=confidence)
    found, outside = bands(setup.population, setup.bench, corners)
    shared = None
    if shares_reels(setup):
        crew.meter.expect(LOTS * UNITS_PER_LOT)
        shared = lots(
            lot_yields(setup, workers=crew.workers, piece_done=crew.meter.units), study.design.yield_target, confidence
        )
    return _Evidence(ranked, unranked, tried, count, better, corners, found, shared, outside)


def _rankings(study: Study, setup: Setup, crew: _Crew) -> tuple[Mapping[str, Ranking], str]:
    """Rankings, or why there are none."""
    nominal = nominal_points(setup.population, setup.bench, setup.corners)
    lean = per_percent(study, setup.population, setup.bench)
    hz = [p.settled_hz or p.frequency_hz for p in nominal]
    try:
        return rankings(setup, hz, lean, workers=crew.workers, confidence=study.design.confidence), ""
    except NotANumberError as error:
        return {}, str(error)


def _assembled(
    study: Study,
    setup: Setup,
    run: YieldRun,
    plan: LookPlan,
    evidence: _Evidence,
    ratio: float | None,
    provenance: Provenance,
) -> Assessment:
    gathered = run.gathered
    outcomes = outcome_counts(gathered)
    nominal = nominal_points(setup.population, setup.bench, setup.corners)
    unjudged = remarks.unjudged(setup)
    verdict = remarks.verdict(run, plan, study.design.yield_target, outcomes, unjudged)
    return Assessment(
        study=study,
        verdict=verdict,
        conditions=remarks.conditions(study, ratio),
        yield_=run.estimate,
        looks=run.looks,
        looks_planned=run.looks_planned,
        outcomes=outcomes,
        corners=evidence.corners,
        nominal=nominal,
        rankings=evidence.rankings,
        rivals=evidence.rivals,
        rival_units=evidence.rival_units,
        bands=evidence.bands,
        lots=evidence.lots,
        tighter=evidence.tighter,
        failure_share=failure_share(setup, gathered.failing),
        worst_units=worst_units(setup, gathered.failing, gathered.failing_codes, gathered.units),
        wrong_modes_hz=tuple(gathered.wrong_modes_hz),
        bench_ratio=ratio,
        findings=(
            *study.findings,
            *remarks.unjudged_findings(unjudged),
            *remarks.run_findings(study, run, outcomes),
            *evidence.outside,
            *remarks.ranking_findings(evidence.rankings, evidence.unranked),
            *remarks.bench_findings(study, ratio),
        ),
        cautions=remarks.cautions(study, evidence.lots),
        provenance=provenance,
    )


def versions() -> dict[str, str]:
    """Versions of everything that can change a digit."""
    found = {"python": sys.version.split()[0]}
    for package in ("yieldosc", "numpy", "scipy", "SALib"):
        try:
            found[package] = metadata.version(package)
        except metadata.PackageNotFoundError:
            found[package] = "not installed"
    return found
