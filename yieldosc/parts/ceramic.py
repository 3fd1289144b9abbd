"""Class-2 ceramics: a box between two temperatures, crossed by a parabola on each side of 25 °C.

The code bounds the change at the ends of the range; both ends are drawn independently inside the box.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.codes import Class2, class1_code, class2_code
from yieldosc.parts.parameter import Ageing

Array = NDArray[np.float64]
ROOM_C = 25.0


@dataclass(frozen=True, slots=True)
class Class2Law:
    """δ = d_hot ((T−25)/(T_high−25))² above 25 °C, d_cold ((25−T)/(25−T_low))² below; both ends in their own band."""

    code: Class2
    negative_half: bool = False
    absolute: bool = False

    @property
    def text(self) -> str:
        return self.code.code

    @property
    def coefficients(self) -> tuple[str, ...]:
        return ("hot end", "cold end")

    @property
    def range_c(self) -> tuple[float, float]:
        return self.code.low_c, self.code.high_c

    def change(self, temperature_c: float, u: Mapping[str, Array]) -> Array | float:
        low = self.code.change_low
        high = 0.0 if self.negative_half else self.code.change_high
        rise = temperature_c - ROOM_C
        if rise >= 0:
            share = (rise / (self.code.high_c - ROOM_C)) ** 2
            return share * (low + (high - low) * u["hot end"])
        share = (rise / (ROOM_C - self.code.low_c)) ** 2
        return share * (low + (high - low) * u["cold end"])


# −2.5 % and −7 % per decade of time (a maker's technical note, seen); other makers print 1 to 5 % for X7R.
_PER_DECADE = {"P": 0.025, "R": 0.025, "S": 0.025, "T": 0.07, "U": 0.07, "V": 0.07}
_OTHER_CLASS2 = 0.025


def default_ageing(code: str) -> Ageing | None:
    """Ageing to assume for a ceramic code: 2.5 % per decade for X7R-like, 7 % for Y5V-like, None for class 1."""
    if class1_code(code) is not None or class2_code(code) is None:
        return None
    return Ageing(per_decade=_PER_DECADE.get(code.strip().upper()[2], _OTHER_CLASS2))
