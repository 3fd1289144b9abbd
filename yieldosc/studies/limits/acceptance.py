"""What a frequency test passes: the chance of acceptance of each unit, and the five rates that follow.

A unit that starts at the test is accepted when its reading lies within the test limits. The reading is the unit's
frequency + the instrument's bias + noise ~ N(0, sd): P(accept) = Φ((U − f − b)/sd) − Φ((L − f − b)/sd), integrated
analytically, so no reading is drawn. Terms: built, shipped (accepted), escape (accepted and bad), false reject
(rejected and good): consumer's and producer's risk, global, of JCGM 106:2012 (terms from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

from yieldosc.studies.limits.weighted import lower_sum, upper_sum, weighted_rate
from yieldosc.studies.results import Estimate

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Tested:
    """n units as the test sees them. bad: 1 where the unit fails at any corner, or a probability; frequency_hz: at the
    test, nan where the unit does not start there (such a unit is always rejected)."""

    frequency_hz: Array
    bad: Array

    @property
    def units(self) -> int:
        return len(self.bad)

    @property
    def starting(self) -> NDArray[np.bool_]:
        return np.isfinite(self.frequency_hz)


@dataclass(frozen=True, slots=True)
class Instrument:
    """Noise of one reading, and how far the instrument itself may read high or low."""

    sd_hz: float
    bias_hz: float = 0.0

    @property
    def biases_hz(self) -> tuple[float, ...]:
        return (0.0,) if not self.bias_hz else (-abs(self.bias_hz), 0.0, abs(self.bias_hz))


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitRates:
    """What one pair of test limits does, each at the bias that makes it worst."""

    low_hz: float
    high_hz: float
    escapes_built: Estimate  # P(accept, bad)
    escapes_shipped: Estimate  # P(bad | accept)
    missed: Estimate | None  # P(accept | bad); None where no unit of the sample is bad
    false_rejects: Estimate  # P(reject, good)
    rejected: Estimate  # P(reject)




def below(limit_hz: float, frequency_hz: Array, sd_hz: float) -> Array:
    """P(reading < limit) (n,) without bias; nan stays nan."""
    if sd_hz == 0:
        return np.where(np.isnan(frequency_hz), np.nan, (frequency_hz < limit_hz).astype(float))
    return np.asarray(ndtr((limit_hz - frequency_hz) / sd_hz))


def accepted(tested: Tested, instrument: Instrument, low_hz: float, high_hz: float, bias_hz: float) -> Array:
    """P(accept) of each unit (n,)."""
    sd = instrument.sd_hz
    chance = below(high_hz - bias_hz, tested.frequency_hz, sd) - below(low_hz - bias_hz, tested.frequency_hz, sd)
    return np.where(tested.starting, np.maximum(chance, 0.0), 0.0)


def limit_rates(
    tested: Tested, instrument: Instrument, low_hz: float, high_hz: float, confidence: float
) -> LimitRates:
    """The five rates of one pair of limits."""
    at = [_rates(tested, accepted(tested, instrument, low_hz, high_hz, b), confidence) for b in instrument.biases_hz]
    missed = [rates[2] for rates in at if rates[2] is not None]
    return LimitRates(
        low_hz=low_hz,
        high_hz=high_hz,
        escapes_built=_worst([rates[0] for rates in at]),
        escapes_shipped=_worst([rates[1] for rates in at]),
        missed=_worst(missed) if missed else None,
        false_rejects=_worst([rates[3] for rates in at]),
        rejected=_worst([rates[4] for rates in at]),
    )


def _worst(estimates: list[Estimate]) -> Estimate:
    return max(estimates, key=lambda e: (e.estimate, e.high))


def _rates(
    tested: Tested, chance: Array, confidence: float
) -> tuple[Estimate, Estimate, Estimate | None, Estimate, Estimate]:
    n, bad = tested.units, tested.bad
    escaping, refused = chance * bad, (1 - chance) * (1 - bad)
    share_bad = float(bad.sum())
    missed = None
    if share_bad > 0:
        missed = weighted_rate(escaping, n, confidence)
        missed = Estimate(
            estimate=min(missed.estimate * n / share_bad, 1.0),
            low=missed.low * n / share_bad,
            high=min(missed.high * n / share_bad, 1.0),
            confidence=confidence,
        )
    return (
        weighted_rate(escaping, n, confidence),
        shipped_rate(escaping, chance, confidence),
        missed,
        weighted_rate(refused, n, confidence),
        weighted_rate(1 - chance, n, confidence),
    )


def shipped_rate(escaping: Array, chance: Array, confidence: float) -> Estimate:
    """Σ escaping/Σ accepted; each limit takes the sum below the line at its own opposite limit, which is cautious."""
    total, squares = float(escaping.sum()), float(np.dot(escaping, escaping))
    passed, passed_squares = float(chance.sum()), float(np.dot(chance, chance))
    if passed == 0:
        return Estimate(estimate=1.0, low=0.0, high=1.0, confidence=confidence, units=0)
    least, most = (float(f(passed, passed_squares, confidence)) for f in (lower_sum, upper_sum))
    estimate = total / passed
    return Estimate(
        estimate=estimate,
        low=min(float(lower_sum(total, squares, confidence)) / most, estimate),
        high=max(min(float(upper_sum(total, squares, confidence)) / max(least, 1e-300), 1.0), estimate),
        confidence=confidence,
        units=round(passed),
    )
