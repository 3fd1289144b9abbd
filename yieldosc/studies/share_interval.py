"""Interval of a Sobol' index: Student's over the scramblings, cut to 0 … 1.

An index is a share of a variance and lies between 0 and 1; its estimators need not, so a symmetric interval can reach
beyond. Cutting an interval to the range that the true value cannot leave takes no coverage away.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.studies.estimates import t_interval
from yieldosc.studies.results import Estimate


def share_interval(replicates: NDArray[np.float64], confidence: float = 0.95) -> Estimate:
    """Mean of independent scramblings (r,) with its interval, all three within 0 … 1."""
    whole = t_interval(replicates, confidence)
    return replace(
        whole, estimate=_cut(whole.estimate), low=_cut(whole.low), high=_cut(whole.high)
    )


def _cut(value: float) -> float:
    return min(max(value, 0.0), 1.0)
