"""Coordinate search for extremes inside a box, many climbers in one call: fixed positions first, then halved steps."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import partial

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Function = Callable[[Array], Array]  # positions (d, n) in [0, 1] → outputs (k, n)
COARSE = (0.0, 0.25, 0.5, 0.75, 1.0)  # positions tried along each dimension first
FINE = (1 / 8, 1 / 16, 1 / 64, 1 / 256)  # steps to both sides after that
MOST_ROUNDS = 16  # of each step
LEAST_GAIN = 1e-6  # of an output's range over the climbers' starts; less is not worth another round


@dataclass(frozen=True, slots=True)
class Climber:
    """Raises sign · output k from a starting point (d,)."""

    output: int
    sign: float
    start: Array


@dataclass(frozen=True, slots=True)
class Reached:
    """What m climbers reach: values (m,) of sign · output; `last` (m,): what the finest step alone added."""

    values: Array
    last: Array


def climb(function: Function, climbers: Sequence[Climber]) -> Reached:
    """Cost per round: 5·d evaluations per climber at first, then 2·d."""
    team = _Team(function, climbers)
    if not len(team.points):
        return Reached(team.values, np.zeros(len(climbers)))
    grid = np.array(COARSE)[None, :, None] * np.ones((len(team.points), 1, len(climbers)))
    team.rounds(lambda points: grid)
    before = team.values
    for step in FINE:
        before = team.values
        team.rounds(partial(_both_sides, step))
    last = np.zeros(len(climbers))
    np.subtract(team.values, before, out=last, where=np.isfinite(before))
    return Reached(team.values, last)


def _both_sides(step: float, points: Array) -> Array:
    """Positions (d, 2, m) a step below and above each coordinate, inside the box."""
    return np.asarray(np.clip(points[:, None, :] + np.array([-step, step])[None, :, None], 0.0, 1.0))


class _Team:
    """Points (d, m) and values (m,) of climbers that take every round together."""

    def __init__(self, function: Function, climbers: Sequence[Climber]) -> None:
        self._function = function
        self._rows = np.array([c.output for c in climbers])
        self._signs = np.array([c.sign for c in climbers])
        self.points = np.stack([c.start for c in climbers], axis=1)
        self.values: Array = self._score(self.points)[0]
        self._least = LEAST_GAIN * self._ranges()

    def rounds(self, candidates: Callable[[Array], Array]) -> None:
        """Move until nobody gains. candidates(points): positions (d, s, m) to try for each coordinate.

        A round moves every coordinate to its own best position; where that is no gain, only the coordinate that gains
        most.
        """
        d, m = self.points.shape
        for _ in range(MOST_ROUNDS):
            tries = candidates(self.points)
            count = tries.shape[1]
            trial = np.broadcast_to(self.points[:, None, None, :], (d, d, count, m)).copy()
            trial[np.arange(d), np.arange(d)] = tries
            tried = self._score(trial.reshape(d, -1)).reshape(d, count, m)
            place = np.argmax(tried, axis=1)[:, None, :]
            alone = np.take_along_axis(tried, place, axis=1)[:, 0, :]
            best = np.take_along_axis(tries, place, axis=1)[:, 0, :]
            joint = np.where(alone > self.values, best, self.points)
            lead = np.argmax(alone, axis=0)
            single = self.points.copy()
            single[lead, np.arange(m)] = best[lead, np.arange(m)]
            together = self._score(joint)[0]
            better_joint = together >= alone.max(axis=0)
            reached = np.where(better_joint, together, alone.max(axis=0))
            moving = reached > self.values + self._least
            if not moving.any():
                return
            self.points = np.where(moving, np.where(better_joint, joint, single), self.points)
            self.values = np.where(moving, reached, self.values)

    def _ranges(self) -> Array:
        """Range (m,) of each climber's output over the starts of all that climb it, up and down."""
        raw = np.where(np.isfinite(self.values), self._signs * self.values, np.nan)
        found = np.zeros(len(raw))
        for row in np.unique(self._rows):
            own = raw[self._rows == row]
            own = own[~np.isnan(own)]
            found[self._rows == row] = np.ptp(own) if len(own) else 0.0
        return found

    def _score(self, positions: Array) -> Array:
        """(p, m) of positions (d, p · m), the climber running fastest; −inf where there is no number."""
        m = len(self._rows)
        found = self._function(positions).reshape(-1, max(1, positions.shape[1] // m), m)
        values = self._signs * found[self._rows, :, np.arange(m)].T
        return np.where(np.isnan(values), -np.inf, values)
