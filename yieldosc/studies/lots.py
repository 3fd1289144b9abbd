"""Yields of lots: every unit of a lot draws its parts from the same reels."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy import stats

from yieldosc.population import Streams
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.judge import GOOD
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Lots
from yieldosc.studies.run import INNER, Setup

LOTS = 1024
UNITS_PER_LOT = 256


@dataclass(frozen=True)
class _Job:
    setup: Setup
    units_per_lot: int

    def __call__(self, piece: int) -> NDArray[np.int64]:
        """Good units of each lot of the piece: as many lots as one solver block holds."""
        codes = self.setup.codes(piece * INNER, INNER)
        return np.asarray(np.count_nonzero((codes == GOOD).reshape(-1, self.units_per_lot), axis=1))


def shares_reels(setup: Setup) -> bool:
    """True when two or more variables share a reel's draws, so that lots differ from one another."""
    return any(v.reel_counts for v in setup.population.variables)


def lot_yields(
    setup: Setup,
    *,
    units_per_lot: int = UNITS_PER_LOT,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> NDArray[np.float64]:
    """Yield of each of 1,024 lots (l,). units_per_lot divides 8,192; few units widen the spread by their own chance."""
    job = _Job(replace(setup, streams=Streams(setup.streams.seed, "lots", units_per_lot)), units_per_lot)
    good: list[NDArray[np.int64]] = []
    with (workers or Workers()).in_order(job, LOTS * units_per_lot // INNER) as pieces:
        for counts in pieces:
            good.append(counts)
            if meter is not None:
                meter.done(INNER)
    return np.concatenate(good) / units_per_lot


def lots(yields: NDArray[np.float64], units_per_lot: int, target: float | None, confidence: float = 0.95) -> Lots:
    """5, 50 and 95 % points over lots (l,), and the share of lots below the target."""
    low, middle, high = (float(q) for q in np.quantile(yields, (0.05, 0.5, 0.95)))
    below = None if target is None else clopper_pearson(int(np.count_nonzero(yields < target)), len(yields), confidence)
    chance = stats.binom.ppf((0.05, 0.95), units_per_lot, float(yields.mean())) / units_per_lot
    return Lots(
        lots=len(yields), units_per_lot=units_per_lot, q05=low, q50=middle, q95=high, share_below_target=below,
        by_chance=(float(chance[0]), float(chance[1])),
    )  # fmt: skip
