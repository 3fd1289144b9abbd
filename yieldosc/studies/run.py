"""The inner loop: draw a block, carry it through every corner, judge it, keep only what merges.

Work is cut at multiples of INNER units (two quanta of 4,096, which stay in the processor's cache), so every solver
call sees the same units whatever the number of workers; results are merged in order of the unit numbers.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.parameter import Parameter
from yieldosc.population import Adjustment, Bench, Block, Population, Streams, uniforms, uniforms_at
from yieldosc.solver.evaluator import Evaluator
from yieldosc.solver.solution import Solution, Status
from yieldosc.studies.between import Between
from yieldosc.studies.distance import gaps, sides
from yieldosc.studies.judge import GOOD, Codes, Judge
from yieldosc.study import Corner, Study

Array = NDArray[np.float64]
QUANTUM = 4096
INNER = 2 * QUANTUM
AUDIT_SHARE = 512  # one unit in so many is solved by both paths, at one corner of each solver block in turn
_NOT_STARTING = np.array([s in (Status.NO_BIAS, Status.UNDEFINED, Status.NO_START, Status.WRONG_MODE) for s in Status])


@dataclass(frozen=True)
class Setup:
    """Everything that decides a unit's outcome; the same unit numbers give the same units in every study."""

    population: Population
    streams: Streams
    bench: Bench
    judge: Judge
    corners: tuple[Corner, ...]
    adjustment: Adjustment | None = None
    between: Between | None = None  # None: units are judged at the corners only

    @classmethod
    def of(
        cls,
        study: Study,
        evaluator: Evaluator,
        *,
        seed: int,
        bench_ratio: float = 1.0,
        adjustment: Adjustment | None = None,
    ) -> Setup:
        """The declared population of a study at its corners."""
        judge = Judge.of(study)
        return cls(
            population=Population.of(study),
            streams=Streams(seed),
            bench=Bench(evaluator, bench_ratio, judge.needs_growth),
            judge=judge,
            corners=study.design.corners(),
            adjustment=adjustment,
        )

    def with_parameters(self, parameters: tuple[Parameter, ...]) -> Setup:
        """The same draws with other parts."""
        return replace(self, population=self.population.with_parameters(parameters))

    def with_adjustment(self, adjustment: Adjustment | None) -> Setup:
        """The same units with something else done to each board."""
        return replace(self, adjustment=adjustment)

    def with_between(self, between: Between | None) -> Setup:
        """The same units, judged between the corners' temperatures too."""
        return replace(self, between=between)

    def block(self, start: int, count: int) -> Block:
        """Units start … start + count − 1, adjusted where the study adjusts its boards."""
        return self._adjusted(self.population.block(self.streams, start, count), self.draw(start, count))

    def draw(self, start: int, count: int) -> Callable[[str], Array]:
        """Streams of these units for what is done to boards: name → u (count,)."""
        return lambda name: uniforms(self.streams.seed, "adjustment", name, start, count)

    def block_at(self, numbers: NDArray[np.int64]) -> Block:
        """The units of these numbers (m,)."""
        block = self.population.block_at(self.streams, numbers)
        return self._adjusted(block, lambda name: uniforms_at(self.streams.seed, "adjustment", name, numbers))

    def _adjusted(self, block: Block, draw: Callable[[str], Array]) -> Block:
        if self.adjustment is not None:
            role, factors = self.adjustment.factors(block, self.bench, draw)
            block.adjust(role, factors)
        return block

    def codes(self, start: int, count: int) -> Codes:
        """Joint outcome codes (count,) over all corners."""
        joint = np.empty(count, dtype=np.int8)
        for first, size in inner_pieces(start, count):
            block = self.block(first, size)
            joint[first - start : first - start + size] = self.block_codes(block)
        return joint

    def block_codes(self, block: Block) -> Codes:
        """Joint outcome codes of a block."""
        joint = np.full(block.count, GOOD, dtype=np.int8)
        nearest = self.far(block.count)
        for corner in self.corners:
            solution = self.bench.solve(block, corner)
            np.minimum(joint, self.judge.codes(solution), out=joint)
            self.approach(nearest, solution)
        self.lower_between(block, joint, nearest)
        return joint

    def far(self, count: int) -> Array:
        """Distances (s, n) of units that have not been seen at any corner."""
        return np.full((sides(self.judge), count), np.inf)

    def approach(self, nearest: Array, solution: Solution) -> None:
        """Lower the distances (s, n) in place to those of another corner."""
        if self.between is not None:
            np.fmin(nearest, gaps(self.judge, solution), out=nearest)

    def lower_between(self, block: Block, joint: Codes, nearest: Array) -> NDArray[np.int64]:
        """Lower the codes (n,) of good units near a limit in place to what they show between the temperatures.

        Returns the positions of the units looked at.
        """
        if self.between is None:
            return np.zeros(0, dtype=np.int64)
        rows = np.flatnonzero((joint == GOOD) & self.between.near(nearest))
        if len(rows):
            joint[rows] = self.between.codes(self.judge, self.bench, block.rows(rows), self.corners)
        return rows


def inner_pieces(start: int, count: int) -> list[tuple[int, int]]:
    """(first, size) of the solver's blocks: cut at absolute multiples of INNER."""
    pieces = []
    position, end = start, start + count
    while position < end:
        size = min(INNER - position % INNER, end - position)
        pieces.append((position, size))
        position += size
    return pieces


def audit_mask(streams: Streams, start: int, count: int, corner: int, corners: int) -> NDArray[np.bool_] | None:
    """Units of a solver block that both paths solve at this corner (count,); None where it is another corner's turn.

    One corner per block: the exact path costs as much for one unit as for sixteen.
    """
    if start // INNER % corners != corner:
        return None
    return uniforms(streams.seed, "audit", "unit", start, count) < 1 / AUDIT_SHARE


def not_starting(solution: Solution) -> NDArray[np.bool_]:
    """Units that do not start on the intended mode (n,)."""
    return np.asarray(_NOT_STARTING[solution.status])
