"""The rules of the intended mode, written out again for one unit of `tests.independent`: plain loops, no shortcuts."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import mpmath

from tests.independent import DIGITS, Crossing, Unit


@dataclass(frozen=True)
class Verdict:
    """What one unit does. growth_per_s is None where the intended mode does not grow."""

    frequency_hz: float
    margin: float
    outcome: str
    growth_per_s: float | None
    growing: int
    overdriven: bool


def _same(value: object) -> object:
    return value


def judge(
    unit: Unit,
    design_hz: float,
    *,
    centre_hz: float | None = None,
    half: float = float(mpmath.log(2)),
    ratio: Callable[[object], object] = _same,
) -> Verdict:
    """ratio: what the margin is a ratio of, from the gain element's value (an op-amp stage: K = 1 + RF/RG)."""
    with mpmath.workdps(DIGITS):
        g = unit.g / unit.gain_unit
        growing = unit.growing()
        pair = _intended(unit, design_hz, centre_hz or design_hz, half)
        if pair is None:
            return _without_crossing(unit, design_hz, ratio, len(growing))
        below = [c for c in pair if c.enters and abs(c.gain) < abs(g)]
        lower = below[-1] if below else next(c for c in pair if c.enters)
        above = [c for c in pair if not c.enters and abs(c.gain) > abs(lower.gain)]
        margin = ratio(g) / ratio(lower.gain)
        if above:
            margin = min(margin, ratio(above[0].gain) / ratio(g))
        own, overdriven = None, False
        if margin > 1:
            own, overdriven = _growth(unit, lower, growing)
        if own is None:
            outcome = "wrong_mode" if growing else "no_start"
        else:
            outcome = "wrong_mode" if len(growing) > 2 and _loses(unit, pair, lower, own, growing) else "starts"
        return Verdict(float(lower.omega / (2 * mpmath.pi)), float(margin), outcome, own, len(growing), overdriven)


def _intended(unit: Unit, design_hz: float, centre_hz: float, half: float) -> list[Crossing] | None:
    """Crossings of the pair that enters nearest to the design frequency inside the band."""
    tau = 2 * mpmath.pi
    inside = [c for c in unit.crossings if c.enters and abs(mpmath.log(c.omega / (tau * centre_hz))) <= half]
    if not inside:
        return None
    first = min(inside, key=lambda c: abs(mpmath.log(c.omega / (tau * design_hz))))
    rest = [c for c in unit.crossings if c is not first]
    return sorted([first, *(c for c in rest if _belongs(unit, first, c))], key=lambda c: abs(c.gain))


def _belongs(unit: Unit, first: Crossing, other: Crossing) -> bool:
    """Whether the pair of `first` stands at `other` when the gain is other's."""
    lone = [c for c in unit.crossings if abs(c.gain) <= abs(other.gain)] == [first, other]
    if lone and not other.enters:
        return True  # one pair was in the right half plane, and one leaves
    here = unit.follow(first, float(other.gain))
    return abs(here - 1j * complex(other.omega)) < 1e-6 * abs(here)


def _loses(unit: Unit, pair: list[Crossing], lower: Crossing, own: float, growing: list) -> bool:
    """Another mode grows faster, and the intended one needs more than half of the gain at which that one enters."""
    g = float(unit.g / unit.gain_unit)
    for other in unit.crossings:
        if other in pair or not other.enters or abs(other.gain) > abs(g):
            continue
        rate = unit.follow(other, g).real
        alive = any(abs(float(p.real) - rate) < 1e-6 * abs(rate) for p in growing)
        if alive and rate > own and abs(lower.gain) > abs(other.gain) / 2:
            return True
    return False


def _growth(unit: Unit, lower: Crossing, growing: list) -> tuple[float, bool]:
    """Real part of the pair's root at the actual gain; the smaller of two real ones."""
    if len(growing) <= 2:
        real = [float(p.real) for p in growing if abs(p.imag) < 1e-20 * abs(p)]
        return min(real, default=float(growing[0].real)), bool(real)
    return unit.follow(lower, float(unit.g / unit.gain_unit)).real, False


def _without_crossing(unit: Unit, design_hz: float, ratio: Callable[[object], object], growing: int) -> Verdict:
    x_design = (2 * mpmath.pi * design_hz / unit.w0) ** 2
    x = min((r for r in unit.x_roots if r != 0), key=lambda r: abs(mpmath.log(r / x_design)))
    h = ratio(unit.g / unit.gain_unit) / ratio(_gain_of_x(unit, x) / unit.gain_unit)
    size = abs(h)
    margin = min(size, 1 / size) * mpmath.exp(-abs(mpmath.arg(h)))
    frequency = mpmath.sqrt(x.real if x.real > 0 else abs(x)) * unit.w0 / (2 * mpmath.pi)
    return Verdict(float(frequency), float(margin), "wrong_mode" if growing else "no_start", None, growing, False)


def _gain_of_x(unit: Unit, x: object) -> object:
    """g_c = −(Ae Be + x Ao Bo)/(Be² + x Bo²) continued to complex x."""

    def parts(poly: list) -> tuple[object, object]:
        even = sum(c * (-x) ** (k // 2) for k, c in enumerate(poly) if k % 2 == 0)
        odd = sum(c * (-x) ** (k // 2) for k, c in enumerate(poly) if k % 2 == 1)
        return even, odd

    (ae, ao), (be, bo) = parts(unit.a), parts(unit.b)
    return -(ae * be + x * ao * bo) / (be * be + x * bo * bo)
