"""Single simulated boards worth looking at: the failing ones of each kind, and those nearest to a limit."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.solution import Solution
from yieldosc.studies.distance import window
from yieldosc.studies.judge import GOOD, Codes, outcome_name
from yieldosc.studies.results import OUTCOMES, WorstUnit
from yieldosc.studies.run import Setup
from yieldosc.study import Corner

Array = NDArray[np.float64]
PER_KIND = 3
NEAREST = 5
SAMPLE = 4096  # units searched for those nearest to a limit
NEW_AT_25 = Corner(25.0, None, 0.0)


def worst_units(setup: Setup, failing: NDArray[np.int64], codes: Codes, units: int) -> tuple[WorstUnit, ...]:
    """failing (m,), codes (m,): numbers and outcomes of failing units in order. Values at 25 °C, new.

    Of each kind of failure those with the largest miss among the first 256 found; of the good units among the first
    4,096 those nearest to a limit. Cost: about 4,096 + 256 per kind units at every corner.
    """
    chosen: list[WorstUnit] = []
    for code in range(1, len(OUTCOMES)):
        numbers = failing[codes == code][:256]
        if len(numbers):
            chosen += _ranked(setup, numbers, code)[:PER_KIND]
    sample = np.arange(min(units, SAMPLE), dtype=np.int64)
    good = sample[~np.isin(sample, failing)]
    if len(good):
        chosen += _ranked(setup, good, int(GOOD))[:NEAREST]
    return tuple(chosen)


def _ranked(setup: Setup, numbers: NDArray[np.int64], code: int) -> list[WorstUnit]:
    """Units of one outcome, the smallest distance to a limit (negative: missed) first."""
    block = setup.block_at(numbers)
    solutions: list[Solution] = []
    distance = np.full((len(setup.corners), len(numbers)), np.inf)
    anywhere = distance.copy()
    for c, corner in enumerate(setup.corners):
        solution = setup.bench.solve(block, corner)
        shows = setup.judge.codes(solution) == code
        # A failing unit is shown at a corner where it fails in its own way; one that fails between two temperatures
        # only, at the corner that brings it nearest to a limit.
        found = _distance(setup, solution)
        distance[c], anywhere[c] = np.where(shows, found, np.inf), found
        solutions.append(solution)
    distance = np.where(np.isfinite(distance).any(axis=0), distance, anywhere)
    worst = np.argmin(distance, axis=0)
    order = np.argsort(distance[worst, np.arange(len(numbers))], kind="stable")[: max(PER_KIND, NEAREST)]
    values = block.values(NEW_AT_25)
    roles = [p.role for p in setup.population.parameters]
    made = []
    for i in order:
        solution = solutions[worst[i]]
        margin = float(solution.startup_margin[i])
        made.append(
            WorstUnit(
                number=int(numbers[i]),
                outcome=outcome_name(code),
                corner=setup.corners[worst[i]],
                frequency_hz=float(solution.limit_frequency_hz[i]),
                startup_margin=None if np.isnan(margin) else margin,
                values={role: float(np.broadcast_to(values[role], len(numbers))[i]) for role in roles},
            )
        )
    return made


def _distance(setup: Setup, solution: Solution) -> Array:
    """Smallest distance to a limit (n,), each as a fraction of its limit or of its window; below 0 it is missed."""
    nearest = np.full(len(solution.status), np.finfo(float).max)
    for requirement in setup.judge.requirements:
        values = setup.judge.attribute(solution, requirement.attribute)
        if values is None:
            continue
        scale = window(requirement.low, requirement.high)
        for gap in _gaps(values, requirement.low, requirement.high):
            nearest = np.fmin(nearest, gap / scale)
    return nearest


def _gaps(values: Array, low: float | None, high: float | None) -> Sequence[Array]:
    gaps = [] if low is None else [values - low]
    return gaps if high is None else [*gaps, high - values]
