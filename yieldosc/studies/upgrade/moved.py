"""The yield of a changed set from a difference on shared draws."""

from __future__ import annotations

import math

from yieldosc.studies.results import Estimate


def best_known(current: Estimate, difference: Estimate, counted: Estimate) -> Estimate:
    """Of a count on the shared draws and the declared yield moved by the difference, the one known better."""
    moved = moved_yield(current, difference)
    return moved if moved.high - moved.low < counted.high - counted.low else counted


def moved_yield(current: Estimate, difference: Estimate) -> Estimate:
    """The declared yield, counted on more units, moved by a difference on the same draws; both uncertainties joined."""
    estimate = min(max(current.estimate + difference.estimate, 0.0), 1.0)
    down = math.hypot(current.estimate - current.low, difference.estimate - difference.low)
    up = math.hypot(current.high - current.estimate, difference.high - difference.estimate)
    return Estimate(
        estimate=estimate, low=max(estimate - down, 0.0), high=min(estimate + up, 1.0),
        confidence=current.confidence, units=difference.units,
    )  # fmt: skip
