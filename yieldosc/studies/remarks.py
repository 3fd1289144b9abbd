"""What a reader must know beside the figures: verdict, its conditions and findings, as plain data."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from yieldosc.errors import Finding
from yieldosc.parts.shapes import Measured
from yieldosc.population import Block
from yieldosc.population.block import middle_draws
from yieldosc.solver.solution import Solution
from yieldosc.studies.estimates import LookPlan
from yieldosc.studies.results import CornerResult, Ranking, Verdict
from yieldosc.studies.run import AUDIT_SHARE, Setup
from yieldosc.studies.yields import YieldRun
from yieldosc.study import Study

DOUBTFUL = ("assumed", "typical")
ONE_BOUND = "one-bound-only"  # code of the reader's finding for a value with a single bound


def verdict(
    run: YieldRun, plan: LookPlan, target: float | None, outcomes: Mapping[str, int], unjudged: Sequence[str]
) -> Verdict:
    """The plan's verdict, unless units outside the circuit's range, or limits that nothing judges, decide it."""
    if unjudged:
        return "not assessable"
    outside = outcomes["not_assessable"]
    if outside:
        look = run.looks[-1]
        without = plan.interval(look.failures - outside, look.units)
        if plan.verdict(without, target) != run.verdict:
            return "not assessable"
    return run.verdict


def unjudged(setup: Setup) -> tuple[str, ...]:
    """Attributes that a requirement limits and the solver does not give for this circuit."""
    block = Block(setup.population, middle_draws(setup.population.variables, 1), 1, typical=True)
    return setup.judge.unjudged(setup.bench.solve(block, setup.corners[0]))


def conditions(study: Study, ratio: float | None) -> tuple[str, ...]:
    """What the verdict hangs on."""
    made = []
    for pedigree in DOUBTFUL:
        roles = [p.role for p in study.parameters if p.pedigree == pedigree]
        if roles:
            made.append(f"if the {pedigree} values hold: {', '.join(roles)}")
    measured = [p.role for p in study.parameters if isinstance(p.shape, Measured)]
    if measured:
        made.append(f"if further lots are like the one measured: {', '.join(measured)}")
    one_sided = [f for f in study.findings if f.code == ONE_BOUND]
    made += [f"if the missing bound is no worse than the one given: {str(f.place) or f.text}" for f in one_sided]
    if ratio is not None:
        made.append(f"if every unit runs at {ratio:.6g} times its prediction, as the reference board did")
    return tuple(made)


def ranking_findings(rankings: Mapping[str, Ranking], unranked: str) -> list[Finding]:
    """Why parts are not ranked, where they are not."""
    made = []
    if unranked:
        made.append(Finding("warning", "rank-withheld", f"No parts are ranked: {unranked}."))
    for output, ranking in rankings.items():
        if ranking.withheld:
            made.append(Finding("warning", "rank-withheld", f"Parts are not ranked for {output}: {ranking.withheld}."))
    return made


def unjudged_findings(missing: Sequence[str]) -> list[Finding]:
    """Limits that no unit was judged by."""
    return [
        Finding(
            "warning",
            "limit-not-judged",
            f"A limit on {name} is given, but this circuit's analysis does not give {name}: no unit was judged by it, "
            "so there is no verdict. Remove the limit, or declare the limiter that makes it computable.",
        )
        for name in missing
    ]


def run_findings(study: Study, run: YieldRun, outcomes: Mapping[str, int]) -> list[Finding]:
    """What the solved units themselves call for."""
    gathered, made = run.gathered, []
    if study.design.yield_target is None:
        made.append(
            Finding(
                "warning", "no-target", "No yield target is given, so nothing is met or missed: add 'yield target'."
            )
        )
    if gathered.disagreeing:
        made.append(
            Finding(
                "warning",
                "audit-disagreement",
                f"{gathered.disagreeing} of {gathered.audited} audited unit-corners differ by more than 1e-6 in margin "
                f"between the fast and the exact path (one unit in {AUDIT_SHARE} is audited).",
            )
        )
    if outcomes["undefined"]:
        made.append(
            Finding(
                "warning",
                "undefined-units",
                f"{outcomes['undefined']} of {gathered.units} units could not be solved at some corner; "
                "they are counted as failures.",
            )
        )
    if outcomes["not_assessable"]:
        made.append(
            Finding(
                "warning",
                "outside-model-range",
                f"{outcomes['not_assessable']} of {gathered.units} units lie outside the circuit's stated range "
                f"({study.circuit.range_text}) at some corner; they are counted as failures, "
                "and no verdict may depend on them.",
            )
        )
    return made


def settling_findings(setup: Setup, corners: Sequence[CornerResult]) -> list[Finding]:
    """What the frequencies leave out where no limiter is declared; what it does to them where one is."""
    block = Block(setup.population, middle_draws(setup.population.variables, 1), 1, typical=True)
    solution = setup.bench.solve(block, setup.corners[0])
    if solution.settled_hz is not None:
        return [_settled(solution, corners)]
    if np.isnan(solution.startup_margin).all():
        return []
    text = (
        "No limiter is declared, so every frequency is a crossing: where the circuit runs when its level is held "
        "without distortion. A stage that clips settles elsewhere, a low-Q RC circuit the more the larger its excess "
        "gain; that shift is left out."
    )
    return [Finding("note", "settling-left-out", text)]


def _settled(solution: Solution, corners: Sequence[CornerResult]) -> Finding:
    """Limits apply to the settled frequency; how far its median lies from the crossing's."""
    shifts = [c.settled_hz.q50 / c.frequency_hz.q50 - 1 for c in corners if c.settled_hz is not None]
    limiter = "declared" if solution.settling is None else solution.settling.limiter
    low, high = (f"{shift * 100:+.3g} %".replace("-", "−") for shift in (min(shifts), max(shifts)))
    where = f"{low} from the crossing's at every corner" if low == high else f"{low} to {high} from the crossing's"
    text = (
        f"The limiter is {limiter}: limits apply to the frequency where the circuit settles. Its median lies {where}; "
        "the spread of that shift is in every rate."
    )
    return Finding("note", "settling-included", text)


def bench_findings(study: Study, ratio: float | None) -> list[Finding]:
    """That every frequency is scaled, where it is."""
    if ratio is None:
        return []
    text = (
        f"The reference board ran at {study.design.bench_frequency_hz:.9g} Hz, {ratio:.9g} times its prediction: "
        "every unit's frequency is scaled by that ratio."
    )
    return [Finding("note", "bench-scaled", text)]
