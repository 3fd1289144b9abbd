"""Parts of which one lot was measured: what so few values leave open, and how the lot lies in its declared tolerance.

The measured values are drawn from as they are; their small number is an uncertainty of its own, found by drawing whole
lots from them with replacement (bootstrap: Efron, Ann. Statist. 7 (1979) 1) as an outer loop.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray
from scipy import stats

from yieldosc.parts.parameter import Parameter
from yieldosc.parts.shapes import Measured
from yieldosc.population import uniforms
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.rivals import good_units
from yieldosc.studies.run import Setup
from yieldosc.studies.scrutiny import MeasuredLot, MeasuredUncertainty

Array = NDArray[np.float64]
BOOTSTRAP_LOTS = 128
UNITS_PER_LOT = 1024
POINTS = (0.05, 0.5, 0.95)


def measured_lots(declared: Sequence[Parameter], confidence: float = 0.95) -> tuple[MeasuredLot, ...]:
    """One per role with measured values; fractions of its nominal value."""
    return tuple(_lot(p, p.shape.values, confidence) for p in declared if isinstance(p.shape, Measured))


def _lot(p: Parameter, measured: Sequence[float], confidence: float) -> MeasuredLot:
    values = np.asarray(measured) / p.nominal - 1
    bounds = None if p.declared is None else (p.declared[0] / p.nominal - 1, p.declared[1] / p.nominal - 1)
    outside = 0 if bounds is None else int(np.count_nonzero((values < bounds[0]) | (values > bounds[1])))
    mean, half, sd = float(values.mean()), float("inf"), 0.0
    if len(values) > 1:
        sd = float(values.std(ddof=1))
        half = float(stats.t.ppf(0.5 + confidence / 2, len(values) - 1)) * sd / len(values) ** 0.5
    return MeasuredLot(
        role=p.role, part=p.part, values=len(values), declared=bounds, mean=mean, low=float(values.min()),
        high=float(values.max()), sd=sd, mean_interval=(mean - half, mean + half), outside=outside,
    )  # fmt: skip


def measured_uncertainty(
    setup: Setup, estimate: float, *, workers: Workers | None = None, meter: Meter | None = None
) -> MeasuredUncertainty | None:
    """5, 50 and 95 % points of the yield over 128 lots drawn from the measured values; None without such values.

    Every lot is built into the same 1,024 units, so that lots differ by their values alone; what they differ by is
    added to `estimate`, the yield of the run. Cost: 129 · 1,024 units.
    """
    declared = setup.population.parameters
    if not any(isinstance(p.shape, Measured) for p in declared):
        return None
    sets = [declared, *(_drawn(declared, setup.streams.seed, lot) for lot in range(BOOTSTRAP_LOTS))]
    good = good_units(setup, sets, UNITS_PER_LOT, workers=workers, meter=meter)
    yields = np.array([np.count_nonzero(flags) for flags in good]) / UNITS_PER_LOT
    moved = np.clip(estimate + yields[1:] - yields[0], 0.0, 1.0)
    low, middle, high = (float(q) for q in np.quantile(moved, POINTS))
    return MeasuredUncertainty(
        lots=BOOTSTRAP_LOTS, units_per_lot=UNITS_PER_LOT, low=low, middle=middle, high=high,
        confidence=POINTS[2] - POINTS[0],
    )  # fmt: skip


def _drawn(declared: Sequence[Parameter], seed: int, lot: int) -> tuple[Parameter, ...]:
    """The parameters with every measured column drawn anew, as many values as it has; parts of one column alike."""

    def drawn(p: Parameter) -> Parameter:
        if not isinstance(p.shape, Measured):
            return p
        values = np.asarray(p.shape.values)
        # one stream per column: two roles that share a part's column are one lot
        u = uniforms(seed, "measured lots", p.part, lot * len(values), len(values))
        chosen = values[np.minimum((u * len(values)).astype(np.int64), len(values) - 1)]
        return replace(p, low=float(chosen.min()), high=float(chosen.max()), shape=Measured(tuple(chosen.tolist())))

    return tuple(drawn(p) for p in declared)
