"""How far units can fall between two temperatures (before the run), and whether any was missed (after it)."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.laws import whole_interval
from yieldosc.studies.between import Between, conditions_of, dense, halves
from yieldosc.studies.distance import gaps, sides
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.judge import GOOD
from yieldosc.studies.run import Setup, inner_pieces
from yieldosc.studies.scrutiny import TemperatureCheck
from yieldosc.study import Corner

Array = NDArray[np.float64]
PILOT = 512
SAFETY = 2.0  # a unit is looked at again within this many times the largest fall of the pilot's units
MOST_CHECKED = 1500  # units near a limit that are searched densely after the run


def with_between(setup: Setup) -> Setup:
    """The same setup, whose units near a limit are also judged between the temperatures; as it is at one temperature.

    How near is found for the declared parts and for crystals over their whole angle, which other sets try. Cost: 512
    units of each at eight times as many temperatures.
    """
    grid_c = tuple(sorted({c.temperature_c for c in setup.corners}))
    if len(grid_c) < 2 or not sides(setup.judge):
        return setup
    declared = setup.population.parameters
    wide = tuple(p if p.law is None else replace(p, law=whole_interval(p.law)) for p in declared)
    falls = excursions(setup, grid_c)
    if wide != declared:
        other = replace(setup, population=setup.population.with_parameters(wide))
        falls = np.maximum(falls, excursions(other, grid_c))
    reach = tuple(float(f) for f in SAFETY * falls)
    return setup.with_between(Between(grid_c, halves(setup.population, grid_c), reach))


def excursions(setup: Setup, grid_c: tuple[float, ...]) -> Array:
    """Largest fall (s,) of a pilot unit's distance to each limit below its least on the grid, at any supply and age.

    Infinite where a pilot unit fails between the temperatures without coming near a limit (another mode takes over):
    then every unit must be looked at.
    """
    block = setup.block(0, PILOT)
    largest = np.zeros(sides(setup.judge))
    for supply_v, age_years in conditions_of(setup.corners):
        distance, good = {}, {}
        for t in dense(grid_c):
            solution = setup.bench.solve(block, Corner(t, supply_v, age_years))
            distance[t], good[t] = gaps(setup.judge, solution), setup.judge.codes(solution) == GOOD
        on_grid = np.fmin.reduce([distance[t] for t in grid_c])
        anywhere = np.fmin.reduce(list(distance.values()))
        jumps = np.all([good[t] for t in grid_c], axis=0) & ~np.all(list(good.values()), axis=0)
        if (jumps & ~(anywhere < 0).any(axis=0)).any():
            return np.full(len(largest), np.inf)
        falls = np.nan_to_num(on_grid - anywhere, nan=0.0)
        largest = np.maximum(largest, falls.max(axis=1, initial=0.0))
    return largest


def temperature_check(
    setup: Setup, near: NDArray[np.int64], units: int, flips: int, half_width: float, confidence: float
) -> TemperatureCheck | None:
    """near (m,): numbers of good units that were looked at again, in order. None at one temperature.

    Cost: at most 1,500 units at eight times as many temperatures.
    """
    between = setup.between
    if between is None:
        return None
    searched = near[:MOST_CHECKED]
    checked = units if len(near) <= MOST_CHECKED else int(near[MOST_CHECKED])
    missed = int(np.count_nonzero(_dense_failures(setup, between, searched)))
    return TemperatureCheck(
        temperatures=len(between.grid_c),
        reach=max(between.reach),
        excursion=max(between.reach) / SAFETY,
        pilot=PILOT,
        units=units,
        flips=flips,
        flip_rate=clopper_pearson(flips, units, confidence),
        checked=checked,
        missed=missed,
        missed_rate=clopper_pearson(missed, checked, confidence),
        allowed=half_width / 10,
    )


def _dense_failures(setup: Setup, between: Between, numbers: NDArray[np.int64]) -> NDArray[np.bool_]:
    failed = np.zeros(len(numbers), dtype=bool)
    for first, size in inner_pieces(0, len(numbers)):
        block = setup.block_at(numbers[first : first + size])
        for supply_v, age_years in conditions_of(setup.corners):
            for temperature_c in dense(between.grid_c):
                codes = setup.judge.codes(setup.bench.solve(block, Corner(temperature_c, supply_v, age_years)))
                failed[first : first + size] |= codes < GOOD
    return failed
