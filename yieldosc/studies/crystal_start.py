"""Both start-up figures of a crystal circuit over the population: gain over critical gain, and −R over ESR."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from yieldosc.studies.extra_results import CrystalStart
from yieldosc.studies.run import QUANTUM, Setup, inner_pieces

Array = NDArray[np.float64]
UNITS = QUANTUM


def crystal_start(setup: Setup, units: int = UNITS) -> tuple[CrystalStart, ...]:
    """One line per temperature, least over supplies and ages; empty for a circuit without a crystal's motional arm.

    −R is the negative resistance that the circuit shows the motional arm at the crossing, at the unit's own gain; ESR
    the arm's series resistance, not the data sheet's resistance at load.
    """
    seen: dict[float, tuple[list[Array], list[Array]]] = {}
    for first, size in inner_pieces(0, units):
        block = setup.block(first, size)
        for corner in setup.corners:
            solution = setup.bench.solve(block, corner, growth=True)
            if solution.resistance_ratio is None:
                return ()
            margins, ratios = seen.setdefault(corner.temperature_c, ([], []))
            margins.append(solution.startup_margin)
            ratios.append(solution.resistance_ratio)
    return tuple(_line(t, *map(np.concatenate, both)) for t, both in seen.items())


def _line(temperature_c: float, margins: Array, ratios: Array) -> CrystalStart:
    known = ratios[np.isfinite(ratios)]
    gains = margins[np.isfinite(margins)]
    return CrystalStart(
        temperature_c=temperature_c,
        margin_min=float(np.min(gains, initial=np.inf)),
        margin_q50=float(np.median(gains)) if len(gains) else float("nan"),
        ratio_min=float(np.min(known, initial=np.inf)),
        ratio_q001=float(np.quantile(known, 0.001)) if len(known) else float("nan"),
        ratio_q50=float(np.median(known)) if len(known) else float("nan"),
    )
