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

    Cost: 2^d evaluations while d ≤ 12, then coordinate search from the best points: 5·d per step.
    """
    d = len(box.free)
    if 2**d <= MOST_CORNERS:
        starts = np.array(list(product((0.0, 1.0), repeat=d)), dtype=float).T
        method = f"all {starts.shape[1]} corners of the box of {d} roles, refined by coordinate search"
    else:
        generator = np.random.Generator(np.random.Philox(key=d))
        starts = generator.integers(0, 2, size=(d, STARTS)).astype(float)
        method = f"coordinate search over the box of {d} roles from {STARTS} starting points"
    if seed_positions is not None:
        starts = np.concatenate([starts, seed_positions], axis=1)
    found = outputs(box.at(starts))
    lows, highs = [], []
    for k in range(len(found)):
        lows.append(-_climb(box, outputs, starts, -found[k], k, -1.0))
        highs.append(_climb(box, outputs, starts, found[k], k, 1.0))
    return np.array(lows), np.array(highs), method


def _climb(box: Box, outputs: Outputs, starts: Array, values: Array, k: int, sign: float) -> float:
    """The largest sign · output that coordinate search reaches from the best few starting points."""
    finite = np.where(np.isnan(values), -np.inf, values)
    best = -np.inf
    few = 1 if 2 ** len(starts) <= MOST_CORNERS else 8
    for start in np.argsort(-finite, kind="stable")[:few]:
        point, value = starts[:, start].copy(), float(finite[start])
        while len(point):
            trial = np.repeat(point[:, None], len(point) * len(STEPS), axis=1)
            for dimension in range(len(point)):
                columns = slice(dimension * len(STEPS), (dimension + 1) * len(STEPS))
                trial[dimension, columns] = STEPS
            reached = sign * outputs(box.at(trial))[k]
            top = int(np.nanargmax(reached)) if not np.isnan(reached).all() else 0
            if not reached[top] > value:
                break
            point, value = trial[:, top].copy(), float(reached[top])
        best = max(best, value)
    return best
