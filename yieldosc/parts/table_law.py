"""The user's own temperature table: relative change at points, linear between them, refused outside them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
ROOM_C = 25.0


@dataclass(frozen=True, slots=True)
class TableLaw:
    """Temperatures [°C] rising, changes as fractions, shifted so that the law is zero at 25 °C."""

    temperatures_c: tuple[float, ...]
    changes: tuple[float, ...]
    text: str
    absolute: bool = False
    coefficients: tuple[str, ...] = ()

    @property
    def range_c(self) -> tuple[float, float]:
        return self.temperatures_c[0], self.temperatures_c[-1]

    def change(self, temperature_c: float, u: Mapping[str, Array]) -> Array | float:
        return float(np.interp(temperature_c, self.temperatures_c, self.changes))


def table_law(points: Sequence[tuple[float, float]], text: str) -> TableLaw:
    """ValueError where the points do not rise, are fewer than two, do not enclose 25 °C, or are not 0 there."""
    ordered = sorted(points)
    temperatures = tuple(t for t, _ in ordered)
    if len(set(temperatures)) < len(temperatures) or len(temperatures) < 2:
        raise ValueError(f"{text}: two or more different temperatures are needed")
    if not temperatures[0] <= ROOM_C <= temperatures[-1]:
        raise ValueError(f"{text}: the points must enclose 25 °C, where the value of the BOM holds")
    changes = tuple(c for _, c in ordered)
    at_room = float(np.interp(ROOM_C, temperatures, changes))
    if abs(at_room) > 1e-9:
        raise ValueError(
            f"{text}: the change at 25 °C is {at_room * 1e6:g} ppm, but changes count from 25 °C; "
            "subtract it from every point"
        )
    return TableLaw(temperatures, changes, text)
