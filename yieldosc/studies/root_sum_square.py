"""Root-sum-square: an output's spread to first order, from its slopes and the spread of every cause."""

from __future__ import annotations

import math
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from yieldosc.population import Block, Population, Variable
from yieldosc.population.block import middle_draws
from yieldosc.studies.box import Outputs
from yieldosc.study import Corner

Array = NDArray[np.float64]
Output = Literal["frequency_hz", "startup_margin"]
GRID = 1000  # midpoints of u over which a cause's standard deviation is taken
SDS = 3.0  # half-width of the band in standard deviations
RSS: dict[Output, str] = {
    "frequency_hz": f"±{SDS:g} standard deviations",
    "startup_margin": f"±{SDS:g} standard deviations of the logarithm",
}


def root_sum_square_ends(centre: float, sd: float, output: Output) -> tuple[float, float]:
    """Ends of the band. A margin is a ratio of two gains: three standard deviations of its logarithm, so that a skewed
    one never passes zero; a frequency spreads little, three of its own."""
    if output == "startup_margin" and centre > 0:
        factor = math.exp(SDS * sd / centre)
        return centre / factor, centre * factor
    return centre - SDS * sd, centre + SDS * sd


def root_sum_square(population: Population, corner: Corner, outputs: Outputs) -> tuple[Array, Array]:
    """Median unit's outputs (2,) and their standard deviations (2,) to first order, reels' correlation included."""
    middle = {k: np.asarray(v) for k, v in median_values(population, corner).items()}
    every = population.variables
    sds = [cause_sd(population, v, corner) for v in every]
    roles = list(dict.fromkeys(v.role for v in every))
    spans = {role: max(sd for sd, v in zip(sds, every, strict=True) if v.role == role) for role in roles}
    roles = [role for role in roles if spans[role] > 0]
    columns = 1 + 2 * len(roles)
    values = {k: np.full(columns, v) for k, v in middle.items()}
    for i, role in enumerate(roles):
        values[role][1 + 2 * i] += spans[role] / 10
        values[role][2 + 2 * i] -= spans[role] / 10
    found = outputs(values)
    slopes = {role: (found[:, 1 + 2 * i] - found[:, 2 + 2 * i]) / (spans[role] / 5) for i, role in enumerate(roles)}
    effects = [slopes.get(v.role, np.zeros(2)) * sd for v, sd in zip(every, sds, strict=True)]
    variance = sum((e**2 for e in effects), np.zeros(2))
    for i, first in enumerate(every):
        for j in range(i):
            variance = variance + 2 * _correlation(first, every[j]) * effects[i] * effects[j]
    return found[:, 0], np.sqrt(np.maximum(variance, 0))


def _correlation(first: Variable, second: Variable) -> float:
    """Of two variables of one reel: (6/π)·asin(ρ/2), exact for uniform parts."""
    if not (first.reel_counts and second.reel_counts) or first.reel_stream != second.reel_stream:
        return 0.0
    return float(6 / np.pi * np.arcsin(np.sqrt(first.share * second.share) / 2))


def median_values(population: Population, corner: Corner) -> dict[str, float]:
    """Role → value of the unit whose every variable is at its median."""
    values = Block(population, middle_draws(population.variables, 1), 1).values(corner)
    return {role: float(np.ravel(v)[0]) for role, v in values.items()}


def cause_sd(population: Population, variable: Variable, corner: Corner) -> float:
    """Standard deviation of a role's value from one of its causes alone, at a corner [SI unit of the role]."""
    draws = middle_draws(population.variables, GRID)
    draws[variable.role][variable.cause] = (np.arange(GRID) + 0.5) / GRID
    alone = population.only(variable.role)
    return float(np.std(Block(alone, draws, GRID).values(corner)[variable.role]))
