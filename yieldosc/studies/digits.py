"""How many digits a rate deserves: two significant digits of its half-width, bounds rounded outward.

More digits where rounding would tie a bound with the target; counts never read "0 %" or "100 %".
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from yieldosc.studies.results import Estimate

MOST_DECIMALS = 8
NEVER_PERCENT = (0.0, 100.0)  # what a count cannot show


@dataclass(frozen=True, slots=True)
class Shown:
    """Texts without a unit, all with the same decimals: estimate, low, high."""

    estimate: str
    low: str
    high: str


def decimals_for(half_width: float) -> int:
    """Decimals that leave two significant digits of a half-width (> 0), or more where the half-width is 100 or more."""
    return max(0, _last_place(half_width))


def _last_place(half_width: float) -> int:
    """The same, negative where whole tens or hundreds are enough."""
    if half_width <= 0 or not math.isfinite(half_width):
        return 0
    return min(1 - math.floor(math.log10(half_width)), MOST_DECIMALS)


def rounded(
    estimate: float, low: float, high: float, *, target: float | None = None, never: tuple[float, ...] = ()
) -> Shown:
    """Three numbers in the same scale as `target`; bounds outward, one more digit while a bound would tie with it.

    never: numbers that none of the three may show unless it is exactly that number.
    """
    place = _last_place((high - low) / 2)
    while place < MOST_DECIMALS and (
        (target is not None and _ties(low, high, target, place))
        or any(_ties(low, high, n, place) or (estimate != n and round(estimate, place) == n) for n in never)
    ):
        place += 1
    return Shown(_text(round(estimate, place), place), _text(_down(low, place), place), _text(_up(high, place), place))


def _text(number: float, place: int) -> str:
    return f"{number:.{max(0, place)}f}"


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
    goal = None if target is None else target * 100
    if estimate.failures == 0:
        return _above(low, goal)
    if _all_failed(estimate):
        return f"below {_two_up(high)} %"
    shown = rounded(estimate.estimate * 100, low, high, target=goal, never=NEVER_PERCENT)
    return f"{shown.estimate} % ({shown.low} % to {shown.high} %)"


def rate_text(estimate: Estimate) -> str:
    """A failure rate: "below 74 ppm" where nothing failed, "above 92 %" where everything did, else in ppm or per cent
    with its interval."""
    if estimate.failures == 0:
        ppm = estimate.high * 1e6
        return f"below {_two_up(ppm)} ppm" if ppm < 1e4 else f"below {_two_up(ppm / 1e4)} %"
    if _all_failed(estimate):
        return _above(estimate.low * 100, None)
    scale, unit = (1e6, "ppm") if estimate.high < 0.01 else (100.0, "%")
    never = (0.0,) if unit == "ppm" else NEVER_PERCENT
    shown = rounded(estimate.estimate * scale, estimate.low * scale, estimate.high * scale, never=never)
    return f"{shown.estimate} {unit} ({shown.low} to {shown.high} {unit})"


def _all_failed(estimate: Estimate) -> bool:
    return estimate.failures is not None and estimate.failures == estimate.units


def _above(percent: float, target: float | None) -> str:
    """A lower bound with two significant digits of its distance to 100 %, more where it would tie with a target."""
    place = decimals_for(100 - percent)
    while place < MOST_DECIMALS and target is not None and percent > target >= _down(percent, place):
        place += 1
    return f"above {_text(_down(percent, place), place)} %"


def _two_up(value: float) -> str:
    """Two significant digits, upward."""
    decimals = decimals_for(value)
    if decimals:
        return f"{_up(value, decimals):.{decimals}f}"
    step = 10.0 ** max(0, math.floor(math.log10(value)) - 1)
    return f"{math.ceil(value / step - 1e-9) * step:.0f}"
