"""Populations of the normal distribution as fine grids of quantiles: sums over them are quadrature, not simulation."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import norm

from yieldosc.studies.limits.acceptance import Tested

SD, LIMIT = 20.0, 50.0


def quantile_grid(units):
    """n units at the middles of n equally likely cells of N(0, 20), and the ends of the cells as probabilities."""
    ends = np.arange(units + 1) / units
    return SD * norm.ppf((ends[1:] + ends[:-1]) / 2), ends


def room_population(units=100_000):
    """Bad where |room| > 50; the cell that straddles a limit is bad in part."""
    frequency, ends = quantile_grid(units)
    tail = norm.cdf(-LIMIT / SD)
    low, high = np.clip((tail - ends[:-1]) * units, 0, 1), np.clip((ends[1:] - 1 + tail) * units, 0, 1)
    return Tested(frequency, low + high)


def cold_population(units=100_000, correlation=0.8):
    """Bad where |cold| > 50; cold given room is N(0.8 room, 20·0.6)."""
    frequency, _ = quantile_grid(units)
    rest = SD * np.sqrt(1 - correlation**2)
    middle = correlation * frequency
    return Tested(frequency, norm.sf((LIMIT - middle) / rest) + norm.cdf((-LIMIT - middle) / rest))


@pytest.fixture
def room():
    return room_population


@pytest.fixture
def cold():
    return cold_population
