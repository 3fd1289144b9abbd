"""Two studies on the same draws: what changed, what it did to each rate, and which change did it."""

from __future__ import annotations

import time
from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import UTC, datetime

import numpy as np
from numpy.typing import NDArray

from yieldosc.errors import Finding
from yieldosc.parts.parameter import Parameter
from yieldosc.solver.evaluator import Evaluator
from yieldosc.studies.compare.differences import differences
from yieldosc.studies.compare.results import CompareResult, Difference, RateChange, Step
from yieldosc.studies.declared import declared_setup
from yieldosc.studies.estimates import clopper_pearson, tango, yield_estimate
from yieldosc.studies.judge import GOOD, Codes
from yieldosc.studies.parallel import Workers, default_workers
from yieldosc.studies.progress import Callback, Meter
from yieldosc.studies.provenance import provenance
from yieldosc.studies.results import OUTCOMES, Estimate
from yieldosc.studies.rivals import paired_difference
from yieldosc.studies.run import INNER, QUANTUM, Setup
from yieldosc.study import Study

UNITS = 16 * QUANTUM
STEP_UNITS = 4 * QUANTUM
MOST_STEPS = 24


def compare(
    before: Study,
    after: Study,
    *,
    units: int | None = None,
    seed: int = 1,
    workers: int | None = None,
    progress: Callback | None = None,
    evaluators: tuple[Evaluator | None, Evaluator | None] = (None, None),
) -> CompareResult:
    """Every difference of two studies and the change of every rate, with the interval of the difference.

    units: of each study, the same numbers (default 65,536). Same seed, same answer, whatever the number of workers.
    """
    started, clock = datetime.now(UTC), time.perf_counter()
    n = units or UNITS
    setups = [
        declared_setup(study, seed=seed, evaluator=evaluator)
        for study, evaluator in zip((before, after), evaluators, strict=True)
    ]
    found = differences(before, after)
    steps = _steps(before, after, setups[0], found)
    step_units = min(n, STEP_UNITS)
    meter = Meter(progress)
    meter.expect(2 * n + len(steps) * step_units)
    confidence = before.design.confidence
    with Workers(workers or default_workers()) as crew:
        first, second = (_codes(setup, n, crew, meter) for setup in setups)
        alone = [_codes(setup, step_units, crew, meter) for _, setup in steps]
    base = first[:step_units] == GOOD
    effects = [
        Step(name=name, yield_=_yield(codes, confidence), difference=paired_difference(codes == GOOD, base, confidence))
        for (name, _), codes in zip(steps, alone, strict=True)
    ]
    return CompareResult(
        before=before,
        after=after,
        differences=found,
        rates=_rates(first, second, confidence),
        steps=tuple(sorted(effects, key=lambda s: -abs(s.difference.estimate))),
        together=paired_difference(second[:step_units] == GOOD, base, confidence),
        units=n,
        step_units=step_units,
        findings=tuple(_findings(before, after, found)),
        provenance=provenance(before, seed, started, clock, crew.count),
    )


@dataclass(frozen=True)
class _Job:
    setup: Setup
    units: int

    def __call__(self, piece: int) -> Codes:
        first = piece * INNER
        return self.setup.codes(first, min(INNER, self.units - first))


def _codes(setup: Setup, units: int, crew: Workers, meter: Meter) -> Codes:
    found = []
    with crew.in_order(_Job(setup, units), -(-units // INNER)) as answers:
        for codes in answers:
            found.append(codes)
            meter.done(len(codes))
    return np.concatenate(found)


def _yield(codes: Codes, confidence: float) -> Estimate:
    return yield_estimate(int(np.count_nonzero(codes != GOOD)), len(codes), confidence)


def _rates(first: Codes, second: Codes, confidence: float) -> tuple[RateChange, ...]:
    """The yield, then every outcome that either study shows."""
    made = [
        RateChange(
            name="yield", before=_yield(first, confidence), after=_yield(second, confidence),
            difference=paired_difference(second == GOOD, first == GOOD, confidence),
        )
    ]  # fmt: skip
    for code, name in enumerate(OUTCOMES):
        a, b = first == code, second == code
        if code and (a.any() or b.any()):
            made.append(_rate(name, a, b, confidence))
    return tuple(made)


def _rate(name: str, a: NDArray[np.bool_], b: NDArray[np.bool_], confidence: float) -> RateChange:
    n = len(a)
    return RateChange(
        name=name,
        before=clopper_pearson(int(np.count_nonzero(a)), n, confidence),
        after=clopper_pearson(int(np.count_nonzero(b)), n, confidence),
        difference=tango(int(np.count_nonzero(b & ~a)), int(np.count_nonzero(a & ~b)), n, confidence),
    )


def _steps(
    before: Study, after: Study, setup: Setup, found: Sequence[Difference]
) -> list[tuple[str, Setup]]:
    """The first study with each change alone, where both have the same circuit and roles."""
    same = {p.role for p in before.parameters} == {p.role for p in after.parameters}
    if any(d.group == "circuit" for d in found) or not same:
        return []
    changed = {d.role for d in found if d.role is not None}
    bought: dict[str, list[Parameter]] = {}
    for p in before.parameters:
        if p.role in changed:
            bought.setdefault(p.reel or p.part, []).append(p)
    made = [
        (", ".join(dict.fromkeys(p.part for p in those)), _with(setup, after, [p.role for p in those]))
        for those in bought.values()
    ][:MOST_STEPS]
    if any(d.group in ("limit", "condition") for d in found):
        other = replace(
            before, design=after.design, requirements=after.requirements, conditions=after.conditions
        )
        there = declared_setup(other, seed=setup.streams.seed, evaluator=setup.bench.evaluator)
        made.append(("limits and conditions", there))
    return made if len(made) > 1 else []


def _with(setup: Setup, after: Study, roles: Sequence[str]) -> Setup:
    parameters = tuple(after.parameter(p.role) if p.role in roles else p for p in setup.population.parameters)
    return setup.with_parameters(parameters)


def _findings(before: Study, after: Study, found: Sequence[Difference]) -> list[Finding]:
    if not found and before.digest != after.digest:
        return [
            Finding(
                "note", "no-listed-difference",
                "the digests differ, but in nothing that moves a yield: prices, grades, alternates, pilot boards or "
                "which parts share a reel",
            )
        ]  # fmt: skip
    if not found:
        return [Finding("note", "no-difference", "the two studies say the same in everything that a yield depends on")]
    if before.design.confidence != after.design.confidence:
        return [
            Finding("note", "first-confidence", f"all intervals at the first study's {before.design.confidence:.6g}")
        ]
    return []
