"""Yields of lots: every unit of a lot draws its parts from the same reels."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.population import Streams
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.judge import GOOD
from yieldosc.studies.parallel import in_order
from yieldosc.studies.results import Lots
from yieldosc.studies.run import Setup

LOTS = 1024
UNITS_PER_LOT = 256
LOTS_PER_PIECE = 32  # 8,192 units


@dataclass(frozen=True)
class _Job:
    setup: Setup

    def __call__(self, piece: int) -> NDArray[np.int64]:
        """Good units of each lot of the piece (LOTS_PER_PIECE,)."""
        count = LOTS_PER_PIECE * UNITS_PER_LOT
        codes = self.setup.codes(piece * count, count)
        return np.asarray(np.count_nonzero((codes == GOOD).reshape(LOTS_PER_PIECE, UNITS_PER_LOT), axis=1))


def shares_reels(setup: Setup) -> bool:
    """True when two or more variables share a reel's draws, so that lots differ from one another."""
    return any(v.reel_counts for v in setup.population.variables)


def lot_yields(
    setup: Setup, *, workers: int = 1, piece_done: Callable[[int], None] | None = None
) -> NDArray[np.float64]:
    """Yield of each of 1,024 lots of 256 units. piece_done is told the units finished since the last call."""
    streams = Streams(setup.streams.seed, "lots", UNITS_PER_LOT)
    job = _Job(replace(setup, streams=streams))
    good: list[NDArray[np.int64]] = []
    for counts in in_order(job, LOTS // LOTS_PER_PIECE, workers):
        good.append(counts)
        if piece_done is not None:
            piece_done(LOTS_PER_PIECE * UNITS_PER_LOT)
    return np.concatenate(good) / UNITS_PER_LOT


def lots(yields: NDArray[np.float64], target: float | None, confidence: float = 0.95) -> Lots:
    """5, 50 and 95 % points over lots (l,), and the share of lots below the target."""
    low, middle, high = (float(q) for q in np.quantile(yields, (0.05, 0.5, 0.95)))
    below = None if target is None else clopper_pearson(int(np.count_nonzero(yields < target)), len(yields), confidence)
    return Lots(
        lots=len(yields), units_per_lot=UNITS_PER_LOT, q05=low, q50=middle, q95=high, share_below_target=below
    )
