"""The nominal unit: every value at its typical, laws at their middle. Where it runs, and how it leans on each part."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from yieldosc.population import Bench, Block, Population
from yieldosc.population.block import middle_draws
from yieldosc.solver.evaluator import Evaluator
from yieldosc.solver.solution import Solution, Status
from yieldosc.studies.results import NominalPoint
from yieldosc.study import Corner, Study

Array = NDArray[np.float64]
STEP = 1e-5  # relative change of a value for a slope


def nominal_values(population: Population, corner: Corner) -> dict[str, float]:
    """Role → SI value of the nominal unit at a corner."""
    block = Block(population, middle_draws(population.variables, 1), 1, typical=True)
    return {role: float(np.ravel(value)[0]) for role, value in block.values(corner).items()}


def reference_corner(study: Study) -> Corner:
    """25 °C where the study's range holds it, else its temperature nearest to that; nominal supply, new."""
    nearest = min(study.design.temperatures_c, key=lambda t: abs(t - 25.0))
    return Corner(nearest, study.design.supply_v, 0.0)


def bench_ratio(study: Study, population: Population, evaluator: Evaluator) -> float | None:
    """Measured over predicted frequency of the reference board; None where none was measured or none is predicted."""
    if study.design.bench_frequency_hz is None:
        return None
    corner = reference_corner(study)
    predicted = float(_solve(population, Bench(evaluator), corner).limit_frequency_hz[0])
    return study.design.bench_frequency_hz / predicted if np.isfinite(predicted) and predicted > 0 else None


def nominal_points(population: Population, bench: Bench, corners: Sequence[Corner]) -> tuple[NominalPoint, ...]:
    """The nominal unit at each corner, growth rate included."""
    return tuple(_point(corner, _solve(population, bench, corner, growth=True)) for corner in corners)


def _point(corner: Corner, solution: Solution) -> NominalPoint:
    def first(values: Array | None) -> float | None:
        return None if values is None or not np.isfinite(values[0]) else float(values[0])

    other = first(solution.other_mode_hz)
    return NominalPoint(
        corner=corner,
        frequency_hz=float(solution.frequency_hz[0]),
        settled_hz=first(solution.settled_hz),
        startup_margin=first(solution.startup_margin),
        growth_per_s=first(solution.growth_per_s),
        outcome=Status(int(solution.status[0])).name.lower(),
        other_modes_hz=() if other is None else (other,),
    )


def _solve(population: Population, bench: Bench, corner: Corner, *, growth: bool = False) -> Solution:
    block = Block(population, middle_draws(population.variables, 1), 1, typical=True)
    return bench.solve(block, corner, growth=growth)


def slopes(
    population: Population, bench: Bench, corner: Corner
) -> dict[str, tuple[float, float]]:
    """Role → d ln(frequency)/d ln(value), d ln(margin)/d ln(value) of the nominal unit; nan where undefined."""
    values = nominal_values(population, corner)
    roles = [p.role for p in population.parameters if values[p.role] != 0]
    columns = {role: np.full(2 * len(roles), value) for role, value in values.items()}
    for i, role in enumerate(roles):
        columns[role][2 * i] *= 1 + STEP
        columns[role][2 * i + 1] *= 1 - STEP
    if not roles:
        return {}
    solution = bench.solve_values(columns, corner, population.own_law)
    with np.errstate(invalid="ignore", divide="ignore"):
        logs = np.log(np.stack([solution.limit_frequency_hz, solution.startup_margin]))
        change = (logs[:, 0::2] - logs[:, 1::2]) / (2 * STEP)
    return {role: (float(change[0, i]), float(change[1, i])) for i, role in enumerate(roles)}


def per_percent(
    study: Study, population: Population, bench: Bench
) -> Mapping[Literal["frequency", "margin"], Mapping[str, float]]:
    """Output → part → change of the output [%] per +1 % of the part's main value, where that is defined."""
    found = slopes(population, bench, reference_corner(study))
    main = {role.name for role in study.circuit.roles if role.main}
    frequency: dict[str, float] = {}
    margin: dict[str, float] = {}
    for parameter in sorted(population.parameters, key=lambda p: p.role not in main):
        if parameter.role not in found or parameter.part in frequency:
            continue
        frequency[parameter.part], margin[parameter.part] = found[parameter.role]
    return {"frequency": _defined(frequency), "margin": _defined(margin)}


def _defined(values: Mapping[str, float]) -> dict[str, float]:
    return {part: value for part, value in values.items() if np.isfinite(value)}
