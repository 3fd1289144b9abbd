"""The main job: declared yield with its verdict, then everything that says how far to believe it."""

from __future__ import annotations

import time
from collections.abc import Mapping
from dataclasses import dataclass, replace
from datetime import UTC, datetime

import numpy as np

from yieldosc.errors import Finding
from yieldosc.population import Adjustment
from yieldosc.solver.evaluator import Evaluator
from yieldosc.studies import remarks
from yieldosc.studies.cautions import cautions
from yieldosc.studies.crystal_start import UNITS as CRYSTAL_UNITS
from yieldosc.studies.crystal_start import crystal_start
from yieldosc.studies.declared import declared, factory_corner
from yieldosc.studies.estimates import LookPlan
from yieldosc.studies.extra_remarks import extra_findings
from yieldosc.studies.extremes import bands
from yieldosc.studies.failure_share import failure_share
from yieldosc.studies.limiter_effect import UNITS as LIMITER_UNITS
from yieldosc.studies.limiter_effect import limiter_effect
from yieldosc.studies.lots import LOTS, UNITS_PER_LOT, lot_yields, lots, shares_reels
from yieldosc.studies.measured_remarks import measured_findings
from yieldosc.studies.nominal import nominal_points, per_percent, reference_corner, slopes
from yieldosc.studies.parallel import Workers, default_workers
from yieldosc.studies.pilot import pilot_result
from yieldosc.studies.progress import Callback, Meter
from yieldosc.studies.provenance import provenance
from yieldosc.studies.ranking import BASE, rankings
from yieldosc.studies.reach import reach_findings
from yieldosc.studies.results import (
    OUTCOMES,
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
from yieldosc.studies.run import QUANTUM, Setup
from yieldosc.studies.scrutinise import scrutinise
from yieldosc.studies.scrutiny import Scrutiny
from yieldosc.studies.second_sources import worst_fitting
from yieldosc.studies.sensitivity import REPLICATES, NotANumberError
from yieldosc.studies.temperature_check import with_between
from yieldosc.studies.temperature_remarks import temperature_findings
from yieldosc.studies.tighter import leading_parts, tighter
from yieldosc.studies.worst_units import worst_units
from yieldosc.studies.yields import YieldRun, corner_results, joint_yield, outcome_counts
from yieldosc.study import Study

FIRST_LOOK = 50_000
LOOKS = 4
USUAL_CORNERS = 9  # studies with more corners spend fewer units on what stands beside the declared yield
LEAST_BASE = 128
LEAST_PER_LOT = 64
EXACT_COST = 40  # times the fast path's, about
WRONG_MODE = OUTCOMES.index("wrong_mode")
WORTH_SLOWING = 0.5  # of the usual effort; more is left as it is


def assess(
    study: Study,
    *,
    units: int | None = None,
    seed: int = 1,
    workers: int | None = None,
    progress: Callback | None = None,
    rival_units: int | None = None,
    block: int | None = None,
    evaluator: Evaluator | None = None,
    adjustment: Adjustment | None = None,
) -> Assessment:
    """Everything that `Assessment` holds. No digit depends on `workers` or `block`.

    units: exactly so many, one look; None: looks at 50,000 · 4^k until a verdict stands. progress: told (done, total)
    in unit evaluations. rival_units: units of each rival set (default 12,288, never more than the declared run).
    block: units per piece of work. evaluator: in place of the circuit's own solver. adjustment: what is done to each
    board before it is judged.
    """
    started, clock = datetime.now(UTC), time.perf_counter()
    setup, ratio = declared(study, seed=seed, evaluator=evaluator, adjustment=adjustment)
    plan, meter = _plan(study, units), Meter(progress)
    effort = _Effort.of(setup, plan.counts[0], rival_units)
    meter.expect(plan.counts[0] + effort.expected(setup))
    with Workers(workers or default_workers()) as crew:
        study, sources = worst_fitting(study, setup, workers=crew, meter=meter)
        if sources:
            setup = with_between(setup.with_parameters(study.parameters))
        target = study.design.yield_target
        run = joint_yield(setup, plan, target, workers=crew, block=block, meter=meter)
        effort = effort.slowed(run.gathered.exact / (run.gathered.units * len(setup.corners)))
        evidence = _evidence(study, setup, run, effort, crew, meter)
        effect = limiter_effect(
            setup, run.gathered.settling, confidence=study.design.confidence,
            units=min(LIMITER_UNITS, run.gathered.units), workers=crew, meter=meter,
        )  # fmt: skip
    tallies = run.gathered
    made = provenance(
        study, seed, started, clock, crew.count,
        audited=tallies.audited, disagreeing=tallies.disagreeing, exact=tallies.exact,
    )  # fmt: skip
    measured = pilot_result(study, setup, factory_corner(study), study.pilot) if study.pilot is not None else None
    found = _assembled(study, setup, run, plan, evidence, ratio, made)
    findings = (*found.findings, *extra_findings(study, sources))
    return replace(
        found, findings=findings, second_sources=sources, pilot=measured, limiter=effect,
        crystal_start=crystal_start(setup, min(CRYSTAL_UNITS, tallies.units)),
    )  # fmt: skip


def _plan(study: Study, units: int | None) -> LookPlan:
    design = study.design
    first, most = (FIRST_LOOK, LOOKS) if units is None else (units, 1)
    if design.yield_target is None:
        most = 1  # nothing to decide, nothing to look again for
    return LookPlan(first=first, looks=most, confidence=design.confidence)


@dataclass(frozen=True)
class _Effort:
    """Units spent on each piece of evidence beside the declared yield."""

    rival_units: int
    base: int  # Sobol' points per scrambling
    units_per_lot: int

    @classmethod
    def of(cls, setup: Setup, units: int, rival_units: int | None) -> _Effort:
        """As much as nine corners would take, where there are more of them."""
        share = min(1.0, USUAL_CORNERS / len(setup.corners))
        quanta = max(1, round(RIVAL_UNITS * share / QUANTUM))
        base = max(LEAST_BASE, 2 ** int(np.log2(BASE * share)))
        return cls(
            rival_units=min(rival_units or quanta * QUANTUM, units),
            base=base,
            units_per_lot=UNITS_PER_LOT if share == 1 else UNITS_PER_LOT // 2,
        )

    def slowed(self, exact_share: float) -> _Effort:
        """Less where so large a share of the solutions takes the exact path; a count, so that it is the same again."""
        share = 1 / (1 + EXACT_COST * exact_share)
        if share > WORTH_SLOWING:
            return self
        quanta = max(1, int(self.rival_units * share / QUANTUM))
        return replace(
            self,
            rival_units=min(quanta * QUANTUM, self.rival_units),
            base=max(LEAST_BASE, 2 ** int(np.log2(self.base * share))),
            units_per_lot=max(LEAST_PER_LOT, self.units_per_lot // 2),
        )

    def expected(self, setup: Setup) -> int:
        """Roughly, in units: rankings, a dozen rival sets, four tighter parts, lots."""
        groups = len(setup.population.variables)
        lots_units = LOTS * self.units_per_lot if shares_reels(setup) else 0
        return REPLICATES * self.base * (groups + 2) * 3 // 2 + 16 * self.rival_units + lots_units


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
    scrutiny: Scrutiny


def _evidence(
    study: Study, setup: Setup, run: YieldRun, effort: _Effort, crew: Workers, meter: Meter
) -> _Evidence:
    confidence = study.design.confidence
    corners = corner_results(run.gathered, setup.corners, confidence)
    ranked, unranked = _rankings(study, setup, effort, crew, meter)
    leaning = slopes(setup.population, setup.bench, reference_corner(study))
    tried, declared_good = rivals(
        setup, leaning, units=effort.rival_units, confidence=confidence, workers=crew, meter=meter
    )
    better = tighter(
        setup, leading_parts(ranked), declared_good, confidence=confidence, workers=crew, meter=meter
    )
    found, outside = bands(
        setup.population, setup.bench, corners, streams=setup.streams, units=run.gathered.units, workers=crew
    )
    shared = None
    if shares_reels(setup):
        yields = lot_yields(setup, units_per_lot=effort.units_per_lot, workers=crew, meter=meter)
        shared = lots(yields, effort.units_per_lot, study.design.yield_target, confidence)
    sceptical = scrutinise(
        study, setup, run, tried, declared_good, ranked, confidence=confidence, workers=crew, meter=meter
    )
    return _Evidence(ranked, unranked, tried, effort.rival_units, better, corners, found, shared, outside, sceptical)


def _rankings(
    study: Study, setup: Setup, effort: _Effort, crew: Workers, meter: Meter
) -> tuple[Mapping[str, Ranking], str]:
    """Rankings, or why there are none."""
    nominal = nominal_points(setup.population, setup.bench, setup.corners)
    lean = per_percent(study, setup.population, setup.bench)
    hz = [p.settled_hz or p.frequency_hz for p in nominal]
    confidence = study.design.confidence
    try:
        found = rankings(setup, hz, lean, workers=crew, base=effort.base, confidence=confidence, meter=meter)
    except NotANumberError as error:
        return {}, str(error)
    return found, ""


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
        wrong_mode_share=failure_share(setup, gathered.failing[gathered.failing_codes == WRONG_MODE]),
        worst_units=worst_units(setup, gathered.failing, gathered.failing_codes, gathered.units),
        wrong_modes_hz=tuple(gathered.wrong_modes_hz),
        bench_ratio=ratio,
        findings=(
            *study.findings,
            *remarks.unjudged_findings(unjudged),
            *remarks.run_findings(study, run, outcomes),
            *reach_findings(setup, gathered.units, study.design.confidence),
            *remarks.settling_findings(setup, evidence.corners),
            *evidence.outside,
            *temperature_findings(evidence.scrutiny.temperatures),
            *measured_findings(evidence.scrutiny.measured, evidence.scrutiny.measured_uncertainty),
            *remarks.ranking_findings(evidence.rankings, evidence.unranked),
            *remarks.bench_findings(study, ratio),
        ),
        cautions=cautions(study, ratio, evidence.lots),
        provenance=provenance,
        scrutiny=evidence.scrutiny,
    )
