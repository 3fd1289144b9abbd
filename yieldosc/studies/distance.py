"""How far units are from each limit, as a fraction of the limit or of its window; below 0 it is missed."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.solution import Solution, Status
from yieldosc.studies.judge import Judge

Array = NDArray[np.float64]
UNSOLVED = (Status.NO_BIAS, Status.UNDEFINED, Status.NOT_ASSESSABLE)


def sides(judge: Judge) -> int:
    """Number s of limits, each bound counted by itself."""
    return sum((r.low is not None) + (r.high is not None) for r in judge.requirements)


def gaps(judge: Judge, solution: Solution) -> Array:
    """Distance (s, n) to every limit, in the order of the requirements, lower bound first; nan where a unit has none
    of the attribute, or no bias. A unit that does not start has its margin."""
    rows: list[Array] = []
    for requirement in judge.requirements:
        values = judge.attribute(solution, requirement.attribute)
        scale = window(requirement.low, requirement.high)
        for bound, sign in ((requirement.low, 1.0), (requirement.high, -1.0)):
            if bound is not None:
                row = np.full(len(solution.status), np.nan) if values is None else sign * (values - bound) / scale
                rows.append(row)
    found = np.array(rows).reshape(len(rows), len(solution.status))
    found[:, np.isin(solution.status, UNSOLVED)] = np.nan
    return np.where(np.isfinite(found), found, np.nan)


def window(low: float | None, high: float | None) -> float:
    """Half the width between two bounds; the size of a single one."""
    if low is not None and high is not None:
        return (high - low) / 2 or 1.0
    return abs(low if low is not None else high or 1.0) or 1.0
