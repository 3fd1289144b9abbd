"""The box of all part limits at a corner, and the search of an output's extremes over it.

A role's value is extreme where each of its own causes is, so the box has one dimension per role that differs
between units, whatever the number of causes behind it.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import product

import numpy as np
from numpy.typing import NDArray

from yieldosc.population import Block, Draws, Population
from yieldosc.studies.climb import Climber, climb
from yieldosc.study import Corner

Array = NDArray[np.float64]
Outputs = Callable[[dict[str, Array]], Array]  # role → (n,) to outputs (k, n)
MOST_CORNERS = 2**12
STARTS = 64  # points inside; and corners tried in boxes with more of them
SLOPE_STEP = 0.1
INSIDE = 2  # of the points inside, so many climb for each end of each output


@dataclass(frozen=True)
class Box:
    """Bounds of every role's value at one corner; roles that do not differ have equal bounds."""

    low: dict[str, float]
    high: dict[str, float]

    @property
    def free(self) -> tuple[str, ...]:
        return tuple(role for role in self.low if self.high[role] > self.low[role])

    def positions(self, values: Array) -> Array:
        """Positions (d, n) in [0, 1] of values (d, n) along `free`."""
        low = np.array([self.low[role] for role in self.free])[:, None]
        high = np.array([self.high[role] for role in self.free])[:, None]
        return np.asarray(np.clip((values - low) / (high - low), 0.0, 1.0))

    def at(self, positions: Array) -> dict[str, Array]:
        """Values of n points; positions (d, n) in [0, 1] along `free`."""
        values = {role: np.asarray(low) for role, low in self.low.items()}
        if not self.free:
            first = next(iter(values))
            values[first] = np.full(positions.shape[1], values[first])  # the solver reads n from the arrays
        for role, where in zip(self.free, positions, strict=True):
            # Written so that 0 and 1 give the bounds exactly.
            values[role] = self.low[role] * (1 - where) + self.high[role] * where
        return values


def box_at(population: Population, corner: Corner) -> Box:
    """The bounds of each role: all combinations of its own causes at their limits and in the middle."""
    low: dict[str, float] = {}
    high: dict[str, float] = {}
    causes: dict[str, list[str]] = {}
    for variable in population.variables:
        causes.setdefault(variable.role, []).append(variable.cause)
    longest = max((len(c) for c in causes.values()), default=0)
    count = 3**longest
    draws: Draws = {}
    for role, names in causes.items():
        grid = np.array(list(product((0.0, 0.5, 1.0), repeat=len(names)))).T
        draws[role] = {name: np.resize(u, count) for name, u in zip(names, grid, strict=True)}
    for role, values in Block(population, draws, count).values(corner).items():
        low[role], high[role] = float(np.min(values)), float(np.max(values))
    return Box(low, high)


@dataclass(frozen=True, slots=True)
class Extremes:
    """Lowest and highest (k,) of each output; gap (k,): what the finest step of the search still added to either end.

    A gap of zero does not certify an extreme: it says that this search has nothing more to gain nearby.
    """

    low: Array
    high: Array
    gap: Array
    method: str


def search(box: Box, outputs: Outputs) -> Extremes:
    """Extremes of each output over the box, and how they were found.

    Starts from all 2^d corners while d ≤ 12, else from those that the slopes at the middle point to and from 64 others;
    and from 64 points inside. The best of each climb by coordinates, at last in steps of 1/256 of the box.
    """

    def function(positions: Array) -> Array:
        return outputs(box.at(positions))

    d = len(box.free)
    every = 2**d <= MOST_CORNERS
    generator = np.random.Generator(np.random.Philox(key=d))
    if every:
        corners = np.array(list(product((0.0, 1.0), repeat=d)), dtype=float).T
    else:
        corners = np.concatenate([_pointed_to(function, d), generator.integers(0, 2, size=(d, STARTS))], axis=1)
    inside = generator.random((d, STARTS if d else 0))
    starts = np.concatenate([corners, inside], axis=1)
    where = f"all {corners.shape[1]} corners" if every else f"{STARTS} corners and those that slopes point to"
    method = (
        f"{where} of the box of {d} roles and {STARTS} points inside, the best refined by coordinate search to 1/256 "
        "of the box"
    )
    found = function(starts)
    goals = [(k, sign) for k in range(len(found)) for sign in (-1.0, 1.0)]
    climbers = [
        Climber(k, sign, starts[:, i])
        for k, sign in goals
        for i in _chosen(sign * found[k], corners.shape[1], 1 if every else 2)
    ]
    return _reached(function, climbers, len(found), method)


def search_from(box: Box, outputs: Outputs, starts: Array) -> Extremes:
    """The same from given points (d, n) alone: one climber for each end of each output."""

    def function(positions: Array) -> Array:
        return outputs(box.at(positions))

    found = function(starts)
    climbers = [
        Climber(k, sign, starts[:, _chosen(sign * found[k], starts.shape[1], 1)[0]])
        for k in range(len(found))
        for sign in (-1.0, 1.0)
    ]
    return _reached(function, climbers, len(found), "from the outermost simulated units")


def _reached(function: Callable[[Array], Array], climbers: list[Climber], count: int, method: str) -> Extremes:
    """The ends that the climbers of `count` outputs reach."""
    reached = climb(function, climbers)
    ends: dict[tuple[int, float], tuple[float, float]] = {}
    for value, last, c in zip(reached.values, reached.last, climbers, strict=True):
        ends[c.output, c.sign] = max(ends.get((c.output, c.sign), (-np.inf, 0.0)), (float(value), float(last)))
    rows = range(count)
    return Extremes(
        low=np.array([-ends[k, -1.0][0] for k in rows]),
        high=np.array([ends[k, 1.0][0] for k in rows]),
        gap=np.array([max(ends[k, -1.0][1], ends[k, 1.0][1]) for k in rows]),
        method=method,
    )


def _pointed_to(function: Callable[[Array], Array], d: int) -> Array:
    """Corners (d, 2k) to which the slopes of each output at the middle of the box point, down and up."""
    middle = np.full((d, 2 * d), 0.5)
    middle[np.arange(d), np.arange(d)] += SLOPE_STEP
    middle[np.arange(d), d + np.arange(d)] -= SLOPE_STEP
    found = function(middle)
    rising = np.nan_to_num(found[:, :d] - found[:, d:]) > 0  # (k, d)
    return np.concatenate([~rising, rising]).T.astype(float)


def _chosen(values: Array, corners: int, count: int) -> list[int]:
    """Columns to climb from: the best corners, and the best few of the points inside."""
    ranked = np.where(np.isnan(values), -np.inf, values)
    best = np.argsort(-ranked[:corners], kind="stable")[:count]
    inside = corners + np.argsort(-ranked[corners:], kind="stable")[:INSIDE]
    return [*best.tolist(), *inside.tolist()]
