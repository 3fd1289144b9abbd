"""Three bands per output and temperature: searched extremes, root-sum-square, Monte Carlo."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from yieldosc.errors import Finding
from yieldosc.population import Bench, Block, Population, Variable
from yieldosc.population.block import middle_draws
from yieldosc.studies.box import Outputs, box_at, search
from yieldosc.studies.results import Band, CornerResult, Distribution
from yieldosc.study import Corner

Array = NDArray[np.float64]
Output = Literal["frequency_hz", "startup_margin"]
OUTPUTS: tuple[Output, ...] = ("frequency_hz", "startup_margin")
GRID = 1000  # midpoints of u over which a cause's standard deviation is taken
SDS = 3.0  # half-width of the root-sum-square band in standard deviations
ROUNDING = 1e-9  # relative; Monte Carlo further outside than this is reported


@dataclass(frozen=True, slots=True)
class _AtCorner:
    centre: Array  # (2,) frequency, margin of the unit with every variable at its median
    sd: Array  # (2,)
    low: Array | None
    high: Array | None
    method: str


def bands(
    population: Population, bench: Bench, corners: Sequence[CornerResult]
) -> tuple[tuple[Band, ...], tuple[Finding, ...]]:
    """One band per output and temperature, over supplies and ages; findings where Monte Carlo lies outside."""
    made: list[Band] = []
    solved = {result.corner: _at_corner(population, bench, result.corner) for result in corners}
    for temperature_c in dict.fromkeys(result.corner.temperature_c for result in corners):
        here = [result for result in corners if result.corner.temperature_c == temperature_c]
        for k, output in enumerate(OUTPUTS):
            sampled = [d for d in (_sampled(result, output) for result in here) if d is not None]
            if sampled:
                made.append(_band(k, output, temperature_c, [solved[r.corner] for r in here], sampled))
    outside = tuple(outside_finding(band, band.extreme) for band in made if band.note and band.extreme is not None)
    return tuple(made), outside


def _sampled(result: CornerResult, output: Output) -> Distribution | None:
    return result.frequency_hz if output == "frequency_hz" else result.margin


def _band(
    k: int, output: Output, temperature_c: float, found: Sequence[_AtCorner], sampled: Sequence[Distribution]
) -> Band:
    monte_carlo = (min(d.min for d in sampled), max(d.max for d in sampled))
    rss = (
        min(float(f.centre[k] - SDS * f.sd[k]) for f in found),
        max(float(f.centre[k] + SDS * f.sd[k]) for f in found),
    )
    extreme = None
    if all(f.low is not None and f.high is not None for f in found):
        extreme = (min(float(f.low[k]) for f in found if f.low is not None),
                   max(float(f.high[k]) for f in found if f.high is not None))  # fmt: skip
    note = ""
    if extreme is not None:
        slack = ROUNDING * max(abs(extreme[0]), abs(extreme[1]))
        if monte_carlo[0] < extreme[0] - slack or monte_carlo[1] > extreme[1] + slack:
            note = "Monte Carlo lies outside the searched extremes: the output has an extreme that the search missed"
    method = f"{found[0].method}; root-sum-square: ±{SDS:g} standard deviations"
    return Band(output=output, temperature_c=temperature_c, extreme=extreme, rss=rss,
                monte_carlo=monte_carlo, method=method, note=note)  # fmt: skip


def outside_finding(band: Band, extreme: tuple[float, float]) -> Finding:
    """Why Monte Carlo lies outside the extremes of bounded inputs."""
    what = "frequency" if band.output == "frequency_hz" else "start-up margin"
    return Finding(
        "warning",
        "monte-carlo-outside-extremes",
        f"At {band.temperature_c:g} °C the simulated {what} runs from {band.monte_carlo[0]:.6g} to "
        f"{band.monte_carlo[1]:.6g}, outside the searched extremes {extreme[0]:.6g} to {extreme[1]:.6g}: "
        "the search missed an extreme inside the box; trust the simulated range.",
    )


def _at_corner(population: Population, bench: Bench, corner: Corner) -> _AtCorner:
    def outputs(values: dict[str, Array]) -> Array:
        solution = bench.solve_values(values, corner, population.own_law)
        return np.stack([solution.frequency_hz, solution.startup_margin])

    centre, sd = _root_sum_square(population, corner, outputs)
    if not population.bounded:
        return _AtCorner(centre, sd, None, None, "no extreme value: a shape is open")
    low, high, method = search(box_at(population, corner), outputs)
    return _AtCorner(centre, sd, low, high, method)


def _root_sum_square(population: Population, corner: Corner, outputs: Outputs) -> tuple[Array, Array]:
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
