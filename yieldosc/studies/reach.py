"""Level control at its stops: units whose stabiliser cannot hold the level, and units that it cannot let start."""

from __future__ import annotations

import numpy as np

from yieldosc.errors import Finding
from yieldosc.studies.digits import rate_text
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.run import Setup, inner_pieces, not_starting

UNITS = 16_384


def reach_findings(setup: Setup, units: int, confidence: float) -> list[Finding]:
    """One note on a circuit with a stabiliser, none on others. The first `units` (at most 16,384) at every corner.

    Control reach is critical gain over gain at full control: below 1 the stabiliser is at its stop and the stage clips.
    """
    count = min(units, UNITS)
    clipping, dead = np.zeros(count, dtype=bool), np.zeros(count, dtype=bool)
    least = np.inf
    for first, size in inner_pieces(0, count):
        block = setup.block(first, size)
        for corner in setup.corners:
            solution = setup.bench.solve(block, corner, growth=False)
            if solution.control_reach is None:
                return []
            starts = ~not_starting(solution)
            with np.errstate(invalid="ignore"):
                clipping[first : first + size] |= starts & (solution.control_reach < 1)
                least = min(least, float(np.min(solution.control_reach, initial=np.inf, where=starts)))
            dead[first : first + size] |= ~starts
    full, start = (clopper_pearson(int(np.count_nonzero(at)), count, confidence) for at in (clipping, dead))
    text = (
        f"Level control, over {count:,} units and every corner: {rate_text(full)} reach the stop of full control and "
        f"clip (least control reach {least:.4g}, where 1 is the stop); {rate_text(start)} are at the stop of full gain "
        "and do not start."
    )
    return [Finding("warning" if clipping.any() else "note", "control-reach", text)]
