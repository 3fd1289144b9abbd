"""What the relaxation oscillators share: a capacitor that runs between two thresholds, with a delay at every edge.

During the delay td the capacitor overshoots, so each phase starts from the level reached after td. All levels are
shares of the supply.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from yieldosc.circuits.circuit import Array, Direct

NO_START_QUESTION = "no start-up question: the circuit has no resting point, so startup_margin is not defined"


@dataclass(frozen=True, slots=True)
class Swing:
    """One phase: the capacitor runs towards `target` with time constant `tau_s`."""

    target: Array | float
    tau_s: Array


def astable(up: Swing, down: Swing, high: Array, low: Array, delay_s: Array) -> Direct:
    """Frequency and duty of n units; where a threshold is never reached the unit latches, and its frequency is 0.

    t_up = td + τ ln((target − low')/(target − high)), low' the level td after crossing low; likewise downwards.
    """
    latches = ~((up.target > high) & (high > low) & (low > down.target))
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        below = down.target + (low - down.target) * np.exp(-delay_s / down.tau_s)
        above = up.target + (high - up.target) * np.exp(-delay_s / up.tau_s)
        rising_s = delay_s + up.tau_s * np.log((up.target - below) / (up.target - high))
        falling_s = delay_s + down.tau_s * np.log((above - down.target) / (low - down.target))
        period_s = rising_s + falling_s
        frequency = np.where(latches, 0.0, 1 / period_s)
        duty = np.where(latches, np.nan, rising_s / period_s)
    return Direct(frequency_hz=frequency, latches=latches, duty=duty)
