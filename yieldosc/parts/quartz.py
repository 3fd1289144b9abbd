"""Quartz over temperature: the AT cut's cubic and the tuning fork's parabola, both zero at 25 °C."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
ROOM_C = 25.0
# Gerber & Ballato, Precision Frequency Control vol. 2 (1985) p. 101, as quoted on a mailing list (seen there)
A1_PER_DEGREE = -5.08e-6  # 1/K per degree of cut angle from the reference
A2 = -0.45e-9  # 1/K²
A3 = 108.6e-12  # 1/K³
ARCMINUTE = 1 / 60
DEFAULT_HALF_WIDTH = 2 * ARCMINUTE  # assumed sorting of a blank lot around the middle of the possible angles


def at_curve(temperature_c: float | Array, angle_deg: float | Array) -> Array:
    """Δf/f of an AT cut `angle_deg` from the reference angle."""
    rise = np.asarray(temperature_c) - ROOM_C
    return np.asarray(A1_PER_DEGREE * np.asarray(angle_deg) * rise + A2 * rise**2 + A3 * rise**3)


def possible_angles(limit: float, low_c: float, high_c: float) -> tuple[float, float]:
    """Angles [degrees] for which the curve stays within ± limit from low_c to high_c; low > high when there are none.

    |a1 d + a2 d² + a3 d³| ≤ p is linear in a1 at every d = T − 25: the interval is an intersection, whose ends lie at
    the range's ends or where (±p/d − a2 d − a3 d²) is stationary: 2 a3 d³ + a2 d² ± p = 0.
    """
    ends = [low_c - ROOM_C, high_c - ROOM_C]
    candidates = set(ends)
    for side in (limit, -limit):
        for root in np.roots([2 * A3, A2, 0.0, side]):
            if abs(root.imag) < 1e-9 and ends[0] < root.real < ends[1]:
                candidates.add(float(root.real))
    lowest, highest = -np.inf, np.inf
    for d in candidates:
        if abs(d) < 1e-9:
            continue
        bounds = sorted((side * limit / d - A2 * d - A3 * d * d) for side in (1, -1))
        lowest, highest = max(lowest, bounds[0]), min(highest, bounds[1])
    return highest / A1_PER_DEGREE, lowest / A1_PER_DEGREE


def least_limit(low_c: float, high_c: float) -> float:
    """Smallest ± p for which some angle exists (bisection)."""
    low, high = 0.0, 1e-3
    for _ in range(60):
        middle = (low + high) / 2
        first, last = possible_angles(middle, low_c, high_c)
        low, high = (low, middle) if first <= last else (middle, high)
    return high


@dataclass(frozen=True, slots=True)
class AtLaw:
    """AT cut, angle uniform between two bounds [degrees]; `widest` are the bounds that the data sheet allows."""

    angles: tuple[float, float]
    widest: tuple[float, float]
    text: str
    range_c: tuple[float, float] | None
    absolute: bool = False

    @property
    def coefficients(self) -> tuple[str, ...]:
        return ("angle",)

    def change(self, temperature_c: float, u: Mapping[str, Array]) -> Array | float:
        low, high = self.angles
        rise = temperature_c - ROOM_C
        fixed = A1_PER_DEGREE * low * rise + A2 * rise**2 + A3 * rise**3
        return fixed + (A1_PER_DEGREE * (high - low) * rise) * u["angle"]


def at_law(limit: float, low_c: float, high_c: float, text: str) -> AtLaw:
    """The population of "AT ±p ppm T1..T2": the middle ± 2′ of the possible angles, clipped (assumed)."""
    first, last = possible_angles(limit, low_c, high_c)
    middle = (first + last) / 2
    inner = (max(first, middle - DEFAULT_HALF_WIDTH), min(last, middle + DEFAULT_HALF_WIDTH))
    return AtLaw(inner, (first, last), text, (low_c, high_c))


@dataclass(frozen=True, slots=True)
class ForkLaw:
    """−β ((T − T0)² − (25 − T0)²); β [1/K²] and T0 [°C] uniform between their bounds."""

    beta: tuple[float, float]
    turnover_c: tuple[float, float]
    text: str
    absolute: bool = False
    range_c: tuple[float, float] | None = None

    @property
    def coefficients(self) -> tuple[str, ...]:
        return tuple(
            name for name, (low, high) in (("curvature", self.beta), ("turnover", self.turnover_c)) if high > low
        )

    def change(self, temperature_c: float, u: Mapping[str, Array]) -> Array | float:
        beta = self._drawn(self.beta, u.get("curvature"))
        turnover = self._drawn(self.turnover_c, u.get("turnover"))
        rise = temperature_c - ROOM_C
        # (T − T0)² − (25 − T0)² = (T − 25)(T + 25 − 2 T0)
        return -beta * (rise * (temperature_c + ROOM_C - 2 * turnover))

    @staticmethod
    def _drawn(bounds: tuple[float, float], u: Array | None) -> Array | float:
        low, high = bounds
        return low if u is None else low + (high - low) * u
