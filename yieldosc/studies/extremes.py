"""Three bands per output and temperature: searched extremes, root-sum-square, Monte Carlo."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.errors import Finding
from yieldosc.population import Bench, Population, Streams
from yieldosc.studies.box import Outputs, box_at, search, search_from
from yieldosc.studies.parallel import Workers
from yieldosc.studies.results import Band, CornerResult, Distribution
from yieldosc.studies.root_sum_square import RSS, Output, root_sum_square, root_sum_square_ends
from yieldosc.study import Corner

Array = NDArray[np.float64]
OUTPUTS: tuple[Output, ...] = ("frequency_hz", "startup_margin")
PIECE = 8192  # units among which the search looks for its new starts
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


@dataclass(frozen=True)
class _Again:
    """The search at corners where simulated units passed it, from the outermost of the first units."""

    population: Population
    bench: Bench
    before: tuple[tuple[Corner, _AtCorner], ...]
    streams: Streams
    units: int

    def __call__(self, number: int) -> _AtCorner:
        corner, before = self.before[number]
        starts = _outermost(self.population, self.bench, corner, self.streams, self.units)
        return _continued(self.population, self.bench, before, corner, starts)


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
    from the outermost of its first units. What still lies outside then is a finding, and widens the extremes: a
    simulated unit is a point of the box.
    """
    made: list[Band] = []
    outside: list[Finding] = []
    job = _Job(population, bench, tuple(result.corner for result in corners))
    with (workers or Workers()).in_order(job, len(corners)) as answers:
        solved = {result.corner: found for result, found in zip(corners, answers, strict=True)}
    passed = [r.corner for r in corners if streams is not None and _passed(solved[r.corner], r)]
    if passed and streams is not None:
        again = _Again(population, bench, tuple((c, solved[c]) for c in passed), streams, min(units, PIECE))
        with (workers or Workers()).in_order(again, len(passed)) as answers:
            solved |= dict(zip(passed, answers, strict=True))
    for temperature_c in dict.fromkeys(result.corner.temperature_c for result in corners):
        here = [result for result in corners if result.corner.temperature_c == temperature_c]
        for k, output in enumerate(OUTPUTS):
            sampled = [d for d in (_sampled(result, output) for result in here) if d is not None]
            if not sampled:
                continue
            band = _band(k, output, temperature_c, [solved[r.corner] for r in here], sampled)
            if band.extreme is not None and _outside(band.extreme, band.monte_carlo):
                outside.append(outside_finding(band, band.extreme))
                band = _widened(band, band.extreme)
            made.append(band)
    return tuple(made), tuple(outside)


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
    methods = "; ".join(dict.fromkeys(f.method for f in found))
    gaps = [float(f.gap[k]) for f in found if f.gap is not None]
    return Band(output=output, temperature_c=temperature_c, extreme=extreme, rss=rss, monte_carlo=monte_carlo,
                method=f"{methods}; root-sum-square: {RSS[output]}",
                gap=max(gaps) if gaps else None)  # fmt: skip


def _widened(band: Band, searched: tuple[float, float]) -> Band:
    """With the simulated units inside."""
    return replace(
        band,
        extreme=(min(searched[0], band.monte_carlo[0]), max(searched[1], band.monte_carlo[1])),
        note="simulated units lie beyond the searched extremes and widen them: the search missed an extreme",
    )


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
    """Positions in the box (d, m) of the units with the lowest and the highest outputs among the first."""
    box = box_at(population, corner)
    block = population.block(streams, 0, units)
    values, solution = block.values(corner), bench.solve(block, corner)
    kept: list[Array] = []
    for output in (solution.frequency_hz, solution.startup_margin):
        if not np.isnan(output).all():
            rows = np.array([np.nanargmin(output), np.nanargmax(output)])
            wanted = [np.broadcast_to(values[role], block.count)[rows] for role in box.free]
            kept.append(box.positions(np.array(wanted).reshape(len(box.free), 2)))
    return np.concatenate(kept, axis=1) if kept else np.full((len(box.free), 1), 0.5)


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


def _outputs_at(population: Population, bench: Bench, corner: Corner) -> Outputs:
    def outputs(values: dict[str, Array]) -> Array:
        solution = bench.solve_values(values, corner, population.own_law)
        return np.stack([solution.frequency_hz, solution.startup_margin])

    return outputs


def _at_corner(population: Population, bench: Bench, corner: Corner) -> _AtCorner:
    outputs = _outputs_at(population, bench, corner)
    centre, sd = root_sum_square(population, corner, outputs)
    if not population.bounded:
        return _AtCorner(centre, sd, None, None, None, "no extreme value: a shape is open")
    found = search(box_at(population, corner), outputs)
    return _AtCorner(centre, sd, found.low, found.high, found.gap, found.method)


def _continued(
    population: Population, bench: Bench, before: _AtCorner, corner: Corner, starts: Array
) -> _AtCorner:
    """The wider of what was found before and what is found from these points (d, m)."""
    found = search_from(box_at(population, corner), _outputs_at(population, bench, corner), starts)
    assert before.low is not None and before.high is not None and before.gap is not None
    return replace(
        before,
        low=np.fmin(before.low, found.low),
        high=np.fmax(before.high, found.high),
        gap=np.fmax(before.gap, found.gap),
        method=f"{before.method}, again {found.method}",
    )
