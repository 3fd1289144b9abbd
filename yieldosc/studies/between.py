"""Units between the temperatures of the grid: those near a limit are also judged halfway and at their turning points.

An AT-cut's curve turns between two temperatures of a coarse grid, and a unit that is good at both may fail there.
Units that lie farther from every limit than the limit's own distance can fall between two temperatures cannot.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.table_law import TableLaw
from yieldosc.population import Bench, Block, Population
from yieldosc.studies.distance import gaps
from yieldosc.studies.judge import GOOD, Codes, Judge
from yieldosc.study import Corner

Array = NDArray[np.float64]
DENSE = 8  # parts into which an interval is cut where it is searched densely
ROUND = 16  # turning points are rounded to this part of an interval, so that units can be solved together


@dataclass(frozen=True)
class Between:
    """What is looked at beside the grid: temperatures halfway (and the points of tables), and for which units.

    reach (s,): distance to each limit [fractions of its window] below which a unit is looked at again.
    """

    grid_c: tuple[float, ...]
    halves_c: tuple[float, ...]
    reach: tuple[float, ...]

    def near(self, nearest: Array) -> NDArray[np.bool_]:
        """Units (n,) near some limit. nearest (s, n): smallest distance over the grid's corners; nan counts as far."""
        with np.errstate(invalid="ignore"):
            return np.asarray((nearest < np.array(self.reach)[:, None]).any(axis=0))

    def codes(self, judge: Judge, bench: Bench, block: Block, corners: Sequence[Corner]) -> Codes:
        """Outcome codes (n,) of a block at the temperatures halfway and at its units' own turning points."""
        joint = np.full(block.count, GOOD, dtype=np.int8)
        inside_c = tuple(sorted({*self.grid_c, *self.halves_c}))
        for supply_v, age_years in conditions_of(corners):
            curves = np.empty((len(inside_c), len(self.reach), block.count))
            for i, temperature_c in enumerate(inside_c):
                solution = bench.solve(block, Corner(temperature_c, supply_v, age_years))
                curves[i] = gaps(judge, solution)
                np.minimum(joint, judge.codes(solution), out=joint)
            self._at_turns(judge, bench, block, joint, turning_points(np.array(inside_c), curves), supply_v, age_years)
        return joint

    def _at_turns(
        self, judge: Judge, bench: Bench, block: Block, joint: Codes, turns_c: Array, supply_v: float | None,
        age_years: float,
    ) -> None:  # fmt: skip
        """Judge good units at their own turning points (s, n), nan where there is none; `joint` is lowered in place."""
        turns_c = np.where(joint == GOOD, turns_c, np.nan)
        for temperature_c in np.unique(turns_c[np.isfinite(turns_c)]):
            rows = np.flatnonzero((turns_c == temperature_c).any(axis=0))
            solution = bench.solve(block.rows(rows), Corner(float(temperature_c), supply_v, age_years))
            joint[rows] = np.minimum(joint[rows], judge.codes(solution))


def conditions_of(corners: Sequence[Corner]) -> tuple[tuple[float | None, float], ...]:
    """Every supply and age of the corners, each pair once."""
    return tuple(dict.fromkeys((c.supply_v, c.age_years) for c in corners))


def halves(population: Population, grid_c: Sequence[float]) -> tuple[float, ...]:
    """The middle of every interval, and the points of temperature tables, between which a law is straight."""
    middles = [(low + high) / 2 for low, high in pairwise(grid_c)]
    tables = [p.law for p in population.parameters if isinstance(p.law, TableLaw)]
    points = [t for law in tables for t in law.temperatures_c if grid_c[0] < t < grid_c[-1]]
    return tuple(sorted({*middles, *points} - set(grid_c)))


def dense(grid_c: Sequence[float]) -> tuple[float, ...]:
    """The grid with every interval cut into eight."""
    made = [
        low + (high - low) * k / DENSE
        for low, high in pairwise(grid_c)
        for k in range(DENSE)
    ]
    return (*made, grid_c[-1])


def turning_points(temperatures_c: Array, curves: Array) -> Array:
    """Temperature (s, n) of the least distance between the temperatures (t,) of curves (t, s, n), rounded; nan where
    the least is at an end, or where twice the parabola's correction does not reach the limit."""
    t = len(temperatures_c)
    found = np.full(curves.shape[1:], np.nan)
    if t < 3:
        return found
    filled = np.where(np.isnan(curves), np.inf, curves)
    least = np.clip(np.argmin(filled, axis=0), 1, t - 2)
    y0, y1, y2 = (np.take_along_axis(curves, (least + k)[None], axis=0)[0] for k in (-1, 0, 1))
    x0, x1, x2 = (temperatures_c[least + k] for k in (-1, 0, 1))
    with np.errstate(invalid="ignore", divide="ignore"):
        first, second = (y1 - y0) / (x1 - x0), (y2 - y1) / (x2 - x1)
        bend = (second - first) / (x2 - x0)
        slope = first + bend * (x1 - x0)  # at x1
        turn = x1 - slope / (2 * bend)
        fall = slope**2 / (4 * bend)
        wanted = (bend > 0) & (turn > x0) & (turn < x2) & (y1 - 2 * fall < 0)
    step = float(np.min(np.diff(temperatures_c))) / ROUND
    found[wanted] = np.round(turn[wanted] / step) * step
    return found
