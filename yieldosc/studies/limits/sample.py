"""Units as the factory sees them: what they read at the test, and whether they are good at every corner over life."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.solution import Status
from yieldosc.studies.judge import GOOD, Codes
from yieldosc.studies.limits.acceptance import Tested
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import OUTCOMES
from yieldosc.studies.run import INNER, Setup
from yieldosc.study import Corner

Array = NDArray[np.float64]
START_OUTCOMES = ("no_bias", "undefined", "no_start", "wrong_mode", "low_margin", "slow_start")
NO_START_CODES = np.array([OUTCOMES.index(name) for name in START_OUTCOMES], dtype=np.int8)


@dataclass(frozen=True)
class FactorySample:
    """n units: frequency at the test (nan: does not start there) and joint outcome code over all corners."""

    frequency_hz: Array
    codes: Codes

    @property
    def good(self) -> NDArray[np.bool_]:
        return np.asarray(self.codes == GOOD)

    @property
    def tested(self) -> Tested:
        return Tested(self.frequency_hz, np.where(self.good, 0.0, 1.0))

    @property
    def start_failures(self) -> NDArray[np.bool_]:
        """Units that fail by their start at some corner."""
        return np.isin(self.codes, NO_START_CODES)


@dataclass(frozen=True)
class _Job:
    setup: Setup
    corner: Corner
    start: int
    end: int

    @property
    def pieces(self) -> int:
        return -(-(self.end - self.start) // INNER)

    def __call__(self, piece: int) -> tuple[Array, Codes]:
        first = self.start + piece * INNER
        block = self.setup.block(first, min(INNER, self.end - first))
        solution = self.setup.bench.solve(block, self.corner)
        read = np.where(solution.status == Status.STARTS, solution.limit_frequency_hz, np.nan)
        return read, self.setup.block_codes(block)


def factory_sample(
    setup: Setup,
    corner: Corner,
    start: int,
    end: int,
    *,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> FactorySample:
    """Units start … end − 1, trimmed where the setup trims them. corner: of the test."""
    job = _Job(setup, corner, start, end)
    read, codes = [], []
    with (workers or Workers()).in_order(job, job.pieces) as answers:
        for f, c in answers:
            read.append(f)
            codes.append(c)
            if meter is not None:
                meter.done(len(c))
    return FactorySample(np.concatenate(read), np.concatenate(codes))
