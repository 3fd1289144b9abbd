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
from yieldosc.study import Corner

Array = NDArray[np.float64]
Outputs = Callable[[dict[str, Array]], Array]  # role → (n,) to outputs (k, n)
MOST_CORNERS = 2**12
STARTS = 64  # random starting points of the search in boxes with more corners
STEPS = (0.0, 0.25, 0.5, 0.75, 1.0)  # positions tried along each dimension while the search refines


@dataclass(frozen=True)
class Box:
    """Bounds of every role's value at one corner; roles that do not differ have equal bounds."""

    low: dict[str, float]
    high: dict[str, float]

    @property
    def free(self) -> tuple[str, ...]:
        return tuple(role for role in self.low if self.high[role] > self.low[role])

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


def search(box: Box, outputs: Outputs, *, seed_positions: Array | None = None) -> tuple[Array, Array, str]:
    """Lowest and highest (k,) of each output over the box, and how they were found.

    Cost: 2^d evaluations while d ≤ 12, then coordinate search from the best points: 5·d per climber and step, all
    climbers of all outputs in one call.
    """
    d = len(box.free)
    every = 2**d <= MOST_CORNERS
    if every:
        starts = np.array(list(product((0.0, 1.0), repeat=d)), dtype=float).T
        method = f"all {starts.shape[1]} corners of the box of {d} roles, refined by coordinate search"
    else:
        generator = np.random.Generator(np.random.Philox(key=d))
        starts = generator.integers(0, 2, size=(d, STARTS)).astype(float)
        method = f"coordinate search over the box of {d} roles from {STARTS} starting points"
    if seed_positions is not None:
        starts = np.concatenate([starts, seed_positions], axis=1)
    found = outputs(box.at(starts))
    goals = [(k, sign) for k in range(len(found)) for sign in (-1.0, 1.0)]
    climbers = [Climber(k, sign, starts[:, i]) for k, sign in goals for i in _best(sign * found[k], 1 if every else 8)]
    reached = _climb(box, outputs, climbers)
    pairs = list(zip(reached, climbers, strict=True))
    best = {goal: max(value for value, c in pairs if (c.output, c.sign) == goal) for goal in goals}
    lows = [-best[k, -1.0] for k in range(len(found))]
    highs = [best[k, 1.0] for k in range(len(found))]
    return np.array(lows), np.array(highs), method


@dataclass(frozen=True, slots=True)
class Climber:
    """Raises sign · output k from a starting point (d,)."""

    output: int
    sign: float
    start: Array


def _best(values: Array, count: int) -> NDArray[np.intp]:
    """Columns of the largest values."""
    return np.argsort(-np.where(np.isnan(values), -np.inf, values), kind="stable")[:count]


def _climb(box: Box, outputs: Outputs, climbers: list[Climber]) -> Array:
    """What each climber reaches (m,). A step moves every coordinate to its own best position; where that is no gain,
    only the coordinate that gains most."""
    points = np.stack([c.start for c in climbers], axis=1)
    rows = np.array([c.output for c in climbers])
    signs = np.array([c.sign for c in climbers])

    def score(positions: Array, per: int) -> Array:
        """(per, m) of positions (d, per · m), the climber running fastest."""
        found = outputs(box.at(positions)).reshape(-1, per, len(climbers))
        values = signs * found[rows, :, np.arange(len(climbers))].T
        return np.where(np.isnan(values), -np.inf, values)

    d, m = points.shape
    values: Array = score(points, 1)[0]
    if not d:
        return values
    moving = np.ones(m, dtype=bool)
    while moving.any():
        trial = np.tile(points, (1, d * len(STEPS))).reshape(d, d, len(STEPS), m)
        trial[np.arange(d), np.arange(d)] = np.array(STEPS)[:, None]
        tried = score(trial.reshape(d, -1), d * len(STEPS)).reshape(d, len(STEPS), m)
        place = np.argmax(tried, axis=1)  # (d, m): the best position of each coordinate alone
        alone = np.take_along_axis(tried, place[:, None, :], axis=1)[:, 0, :]
        single = points.copy()
        lead = np.argmax(alone, axis=0)
        single[lead, np.arange(m)] = np.array(STEPS)[place[lead, np.arange(m)]]
        joint = np.where(alone > values, np.array(STEPS)[place], points)
        together = score(joint, 1)[0]
        better_joint = together >= alone.max(axis=0)
        reached = np.where(better_joint, together, alone.max(axis=0))
        moving = reached > values
        points = np.where(moving, np.where(better_joint, joint, single), points)
        values = np.where(moving, reached, values)
    return values
