"""Rates that are sums of probabilities: each unit weighs what it contributes to an event, between 0 and 1.

Integrating a reading's noise per unit leaves weights instead of counts. Interval: Fay & Feuer, Statist. Med. 16 (1997)
791, gamma limits for weighted sums of Poisson counts, with 1 as the largest weight that another unit could have: with
equal weights of 1 they are the exact Poisson limits, and no weight at all still leaves 3.7 of n units above (95 %).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import gammaincinv

from yieldosc.studies.results import Estimate

Array = NDArray[np.float64]
LARGEST = 1.0


def upper_sum(total: ArrayLike, squares: ArrayLike, confidence: float) -> Array:
    """Upper limit of the expected sum, from Σw and Σw² (any shape)."""
    y, v = np.asarray(total, dtype=float), np.asarray(squares, dtype=float)
    spread = (v + LARGEST**2) / (y + LARGEST)
    return np.asarray(spread * gammaincinv((y + LARGEST) / spread, 0.5 + confidence / 2))


def lower_sum(total: ArrayLike, squares: ArrayLike, confidence: float) -> Array:
    """Lower limit of the expected sum; 0 where there is no weight."""
    y, v = np.asarray(total, dtype=float), np.asarray(squares, dtype=float)
    some = (y > 0) & (v > 0)
    spread = np.where(some, v, 1.0) / np.where(some, y, 1.0)
    return np.where(some, spread * gammaincinv(np.where(some, y, 1.0) / spread, 0.5 - confidence / 2), 0.0)


def weighted_rate(weights: Array, units: int, confidence: float) -> Estimate:
    """Σw/units with its interval, which stays within 0 and 1."""
    total, squares = float(weights.sum()), float(np.dot(weights, weights))
    return Estimate(
        estimate=total / units,
        low=min(float(lower_sum(total, squares, confidence)) / units, total / units),
        high=min(float(upper_sum(total, squares, confidence)) / units, 1.0),
        confidence=confidence,
        units=units,
    )
