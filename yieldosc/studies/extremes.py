"""Three bands per output and temperature: searched extremes, root-sum-square, Monte Carlo."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from yieldosc.errors import Finding
from yieldosc.population import Bench, Block, Population, Streams, Variable
from yieldosc.population.block import middle_draws
from yieldosc.studies.box import Outputs, box_at, search
from yieldosc.studies.parallel import Workers
from yieldosc.studies.results import Band, CornerResult, Distribution
from yieldosc.study import Corner

Array = NDArray[np.float64]
Output = Literal["frequency_hz", "startup_margin"]
OUTPUTS: tuple[Output, ...] = ("frequency_hz", "startup_margin")
GRID = 1000  # midpoints of u over which a cause's standard deviation is taken
SDS = 3.0  # half-width of the root-sum-square band in standard deviations
RSS: dict[Output, str] = {
    "frequency_hz": f"±{SDS:g} standard deviations",
    "startup_margin": f"±{SDS:g} standard deviations of the logarithm",
}
PIECE = 8192  # units solved at a time when the search starts again from them
ROUNDING = 1e-9  # relative; Monte Carlo further outside than this is reported


@dataclass(frozen=True, slots=True)
class _AtCorner:
    centre: Array  # (2,) frequency, margin of the unit with every variable at its median
    sd: Array  # (2,)
    low: Array | None
    high: Array | None
    gap: Array | None
    method: str


@dataclass(frozen=True)
class _Job:
    """The search at one corner, as a piece of work."""

    population: Population
    bench: Bench
    corners: tuple[Corner, ...]

    def __call__(self, number: int) -> _AtCorner:
        return _at_corner(self.population, self.bench, self.corners[number])


def bands(
    population: Population,
    bench: Bench,
    corners: Sequence[CornerResult],
    *,
    streams: Streams | None = None,
    units: int = 0,
    workers: Workers | None = None,
) -> tuple[tuple[Band, ...], tuple[Finding, ...]]:
    """One band per output and temperature, over supplies and ages; findings where Monte Carlo lies outside.

    streams, units: of the run behind `corners`; where its range passes the searched extremes, the search starts again
    from those units.
    """
    made: list[Band] = []
    job = _Job(population, bench, tuple(result.corner for result in corners))
    with (workers or Workers()).in_order(job, len(corners)) as answers:
        solved = {result.corner: found for result, found in zip(corners, answers, strict=True)}
    if streams is not None:
        for result in corners:
            if _passed(solved[result.corner], result):
                seeds = _outermost(population, bench, result.corner, streams, units)
                solved[result.corner] = _at_corner(population, bench, result.corner, seeds)
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
    ends = [root_sum_square_ends(float(f.centre[k]), float(f.sd[k]), output) for f in found]
    rss = (min(low for low, _ in ends), max(high for _, high in ends))
    extreme = None
    if all(f.low is not None and f.high is not None for f in found):
        extreme = (min(float(f.low[k]) for f in found if f.low is not None),
                   max(float(f.high[k]) for f in found if f.high is not None))  # fmt: skip
    note = ""
    if extreme is not None and _outside(extreme, monte_carlo):
        note = "Monte Carlo lies outside the searched extremes: the output has an extreme that the search missed"
    methods = "; ".join(dict.fromkeys(f.method for f in found))
    gaps = [float(f.gap[k]) for f in found if f.gap is not None]
    return Band(output=output, temperature_c=temperature_c, extreme=extreme, rss=rss, monte_carlo=monte_carlo,
                method=f"{methods}; root-sum-square: {RSS[output]}", note=note,
                gap=max(gaps) if gaps else None)  # fmt: skip


def _outside(extreme: tuple[float, float], sampled: tuple[float, float]) -> bool:
    slack = ROUNDING * max(abs(extreme[0]), abs(extreme[1]))
    return sampled[0] < extreme[0] - slack or sampled[1] > extreme[1] + slack


def _passed(found: _AtCorner, result: CornerResult) -> bool:
    """True when a simulated unit lies beyond what the search found at its corner."""
    if found.low is None or found.high is None:
        return False
    sampled = [_sampled(result, output) for output in OUTPUTS]
    return any(
        d is not None and _outside((float(found.low[k]), float(found.high[k])), (d.min, d.max))
        for k, d in enumerate(sampled)
    )


def _outermost(population: Population, bench: Bench, corner: Corner, streams: Streams, units: int) -> Array:
    """Positions in the box (d, m) of the simulated units with the lowest and the highest outputs."""
    box = box_at(population, corner)
    kept: list[Array] = []
    for first in range(0, units, PIECE):
        block = population.block(streams, first, min(PIECE, units - first))
        values = block.values(corner)
        solution = bench.solve(block, corner)
        for output in (solution.frequency_hz, solution.startup_margin):
            if np.isnan(output).all():
                continue
            rows = np.array([np.nanargmin(output), np.nanargmax(output)])
            wanted = [np.broadcast_to(values[role], block.count)[rows] for role in box.free]
            kept.append(box.positions(np.array(wanted).reshape(len(box.free), 2)))
    return np.concatenate(kept, axis=1) if kept else np.zeros((len(box.free), 0))


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


def root_sum_square_ends(centre: float, sd: float, output: Output) -> tuple[float, float]:
    """Ends of the band. A margin is a ratio of two gains: three standard deviations of its logarithm, so that a skewed
    one never passes zero; a frequency spreads little, three of its own."""
    if output == "startup_margin" and centre > 0:
        factor = math.exp(SDS * sd / centre)
        return centre / factor, centre * factor
    return centre - SDS * sd, centre + SDS * sd


def _at_corner(population: Population, bench: Bench, corner: Corner, seeds: Array | None = None) -> _AtCorner:
    def outputs(values: dict[str, Array]) -> Array:
        solution = bench.solve_values(values, corner, population.own_law)
        return np.stack([solution.frequency_hz, solution.startup_margin])

    centre, sd = _root_sum_square(population, corner, outputs)
    if not population.bounded:
        return _AtCorner(centre, sd, None, None, None, "no extreme value: a shape is open")
    found = search(box_at(population, corner), outputs, seeds=seeds)
    again = "" if seeds is None else ", again from the outermost simulated units"
    return _AtCorner(centre, sd, found.low, found.high, found.gap, f"{found.method}{again}")


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
