"""How many digits a rate deserves: two significant digits of its half-width, bounds rounded outward.

More digits where rounding would tie a bound with the target; counts never read "0 %" or "100 %".
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from yieldosc.studies.results import Estimate

MOST_DECIMALS = 7


@dataclass(frozen=True, slots=True)
class Shown:
    """Texts without a unit, all with the same decimals: estimate, low, high."""

    estimate: str
    low: str
    high: str


def decimals_for(half_width: float) -> int:
    """Decimals that leave two significant digits of a half-width (> 0)."""
    if half_width <= 0 or not math.isfinite(half_width):
        return 0
    return min(max(0, 1 - math.floor(math.log10(half_width))), MOST_DECIMALS)


def rounded(estimate: float, low: float, high: float, *, target: float | None = None) -> Shown:
    """Three numbers in the same scale as `target`; bounds outward, one more digit while a bound would tie."""
    decimals = decimals_for((high - low) / 2)
    while decimals < MOST_DECIMALS and target is not None and _ties(low, high, target, decimals):
        decimals += 1
    texts = (f"{value:.{decimals}f}" for value in (estimate, _down(low, decimals), _up(high, decimals)))
    return Shown(*texts)


def _ties(low: float, high: float, target: float, decimals: int) -> bool:
    """A rounded bound that equals the target, or lies on the other side of it than the bound itself."""
    down, up = _down(low, decimals), _up(high, decimals)
    return (low > target and down <= target) or (high < target and up >= target)


def _down(value: float, decimals: int) -> float:
    scale = 10.0**decimals
    return math.floor(value * scale + 1e-9) / scale


def _up(value: float, decimals: int) -> float:
    scale = 10.0**decimals
    return math.ceil(value * scale - 1e-9) / scale


def percent_text(estimate: Estimate, *, target: float | None = None) -> str:
    """A yield: "97.98 % (97.85 % to 98.11 %)"; "above 99.9926 %" where no unit failed, "below …" where all did."""
    low, high = estimate.low * 100, estimate.high * 100
    if estimate.failures == 0:
        return f"above {_down(low, _enough(100 - low)):.{_enough(100 - low)}f} %"
    if estimate.failures is not None and estimate.failures == estimate.units:
        return f"below {_up(high, _enough(high)):.{_enough(high)}f} %"
    shown = rounded(estimate.estimate * 100, low, high, target=None if target is None else target * 100)
    return f"{shown.estimate} % ({shown.low} % to {shown.high} %)"


def rate_text(estimate: Estimate) -> str:
    """A failure rate: "below 74 ppm" where nothing failed, else in ppm or per cent with its interval."""
    if estimate.failures == 0:
        ppm = estimate.high * 1e6
        return f"below {_two_up(ppm)} ppm" if ppm < 1e4 else f"below {_two_up(ppm / 1e4)} %"
    if estimate.failures is not None and estimate.failures == estimate.units:
        low = estimate.low * 100
        return f"above {_down(low, _enough(100 - low)):.{_enough(100 - low)}f} %"
    scale, unit = (1e6, "ppm") if estimate.high < 0.01 else (100.0, "%")
    shown = rounded(estimate.estimate * scale, estimate.low * scale, estimate.high * scale)
    return f"{shown.estimate} {unit} ({shown.low} to {shown.high} {unit})"


def _enough(distance: float) -> int:
    """Decimals that show two significant digits of the distance to 0 or 100."""
    return decimals_for(distance)


def _two_up(value: float) -> str:
    """Two significant digits, upward."""
    decimals = decimals_for(value)
    if decimals:
        return f"{_up(value, decimals):.{decimals}f}"
    step = 10.0 ** max(0, math.floor(math.log10(value)) - 1)
    return f"{math.ceil(value / step - 1e-9) * step:.0f}"
