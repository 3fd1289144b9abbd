"""Numbers as the reports write them: yields, indices, deviations from the target. Rounding is by `studies.digits`."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from yieldosc.studies.digits import decimals_for, percent_text, rate_text, rounded
from yieldosc.studies.results import Estimate
from yieldosc.study import Design

PPM_BELOW = 2e-3  # windows narrower than ± this fraction are shown in ppm, wider ones in per cent
MINUS = "−"


def bare_percent(estimate: Estimate) -> str:
    """A yield without its interval: "97.98 %", "above 99.985 %" where no unit failed, "below …" where every one did."""
    return percent_text(estimate).partition(" (")[0]


def range_text(estimates: Sequence[Estimate]) -> str:
    """Lowest to highest of several yields: "92.1 % to above 99.985 %"; one figure where they are the same text."""
    low = min(estimates, key=lambda e: e.estimate)
    high = max(estimates, key=lambda e: e.estimate)
    if bare_percent(low) == bare_percent(high):
        return bare_percent(low)
    return f"{bare_percent(low)} to {bare_percent(high)}"


def upper_text(rate: Estimate) -> str:
    """The upper bound of a failure rate, rounded up to two digits: "420 ppm", "1.4 %"."""
    none = Estimate(estimate=0.0, low=0.0, high=rate.high, confidence=rate.confidence, units=rate.units, failures=0)
    return rate_text(none).removeprefix("below ")


def outward(estimate: Estimate, *, target: float | None = None) -> tuple[float, float, float]:
    """Estimate, low and high in per cent with the digits that the interval deserves, bounds outward: for cells."""
    goal = None if target is None else 100 * target
    shown = rounded(100 * estimate.estimate, 100 * estimate.low, 100 * estimate.high, target=goal)
    return float(shown.estimate), float(shown.low), float(shown.high)


def points_text(difference: Estimate) -> str:
    """A difference of yields in percentage points: "+0.92 points (+0.81 to +1.03)"."""
    estimate, interval = bare_points(difference).split(" ", 1)
    return f"{estimate} points {interval}"


def bare_points(difference: Estimate) -> str:
    """The same for a column that names the SI unit: "+0.92 (+0.81 to +1.03)"."""
    shown = rounded(difference.estimate * 100, difference.low * 100, difference.high * 100)
    return f"{signed(shown.estimate)} ({signed(shown.low)} to {signed(shown.high)})"


def share_text(index: Estimate) -> str:
    """A Sobol index as a share of variance: "38 % (36 % to 40 %)"; never more digits than whole per cent allow."""
    if index.high < 0.0005:
        return "below 0.1 %"
    decimals = min(decimals_for((index.high - index.low) * 50), 1)
    estimate, low, high = (f"{100 * v:.{decimals}f}" for v in (index.estimate, index.low, index.high))
    return f"{_plain(estimate)} % ({_plain(low)} % to {_plain(high)} %)"


def per_percent_text(change: float) -> str:
    """Change of an output in per cent, in ppm where it is small: "−0.50 %", "−0.11 ppm"."""
    if abs(change) < 0.01:
        return f"{signed(f'{change * 1e4:.2g}')} ppm"
    return f"{signed(f'{change:.2f}')} %"


def signed(number: str) -> str:
    """The number with its sign, a true minus, and no sign for zero."""
    if not float(number):
        return number.lstrip("-")
    return MINUS + number[1:] if number.startswith("-") else f"+{number}"


def _plain(number: str) -> str:
    if not float(number):
        return number.lstrip("-")
    return number.replace("-", MINUS)


@dataclass(frozen=True, slots=True)
class Deviation:
    """How frequencies are shown: as deviations from the target, in the SI-like unit that suits the limits."""

    target_hz: float
    unit: str  # "ppm" or "%"
    scale: float
    decimals: int

    @classmethod
    def of(cls, design: Design) -> Deviation:
        """In ppm for narrow limits, else in per cent; two decimals less than the wider limit's leading digit."""
        target = design.target_frequency_hz
        wide = max(abs(design.frequency_low_hz / target - 1), abs(design.frequency_high_hz / target - 1))
        unit, scale = ("ppm", 1e6) if wide < PPM_BELOW else ("%", 100.0)
        leading = math.floor(math.log10(wide * scale)) if wide > 0 else 0
        return cls(target, unit, scale, max(0, 2 - leading))

    def value(self, frequency_hz: float) -> float:
        """(f/f_target − 1) in the unit."""
        return (frequency_hz / self.target_hz - 1) * self.scale

    def text(self, frequency_hz: float, *, unit: bool = True) -> str:
        """ "+1.23 %"; a dash where there is no frequency."""
        if not math.isfinite(frequency_hz):
            return "—"
        number = signed(f"{self.value(frequency_hz):.{self.decimals}f}")
        return f"{number} {self.unit}" if unit else number

    def limit_text(self, frequency_hz: float) -> str:
        """A limit as its author wrote it, as far as doubles tell: "−100 ppm"."""
        return f"{signed(f'{self.value(frequency_hz):.6g}')} {self.unit}"


def margin_text(margin: float | None) -> str:
    """A start-up margin with three decimals, rounded down so that 0.9999 never reads 1.000; a dash without one."""
    if margin is None or not math.isfinite(margin):
        return "—"
    return f"{math.floor(margin * 1000 + 1e-9) / 1000:.3f}"


def listed(words: Sequence[str]) -> str:
    """ "a", "a and b", "a, b and c"."""
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} and {words[-1]}"
