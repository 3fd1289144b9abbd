"""Linear temperature laws: α (T − 25), α = typical ± limit, uniform. A coefficient's limit is a box over the range,
so a single slope is an approximation of it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
ROOM_C = 25.0


@dataclass(frozen=True, slots=True)
class Linear:
    """typical and limit in 1/K (fractions), or in the value's own SI unit per kelvin where `absolute`."""

    typical: float
    limit: float
    text: str
    absolute: bool = False
    range_c: tuple[float, float] | None = None

    @property
    def coefficients(self) -> tuple[str, ...]:
        return ("slope",) if self.limit else ()

    def change(self, temperature_c: float, u: Mapping[str, Array]) -> Array | float:
        rise = temperature_c - ROOM_C
        if not self.limit:
            return self.typical * rise
        return (self.typical - self.limit) * rise + (2 * self.limit * rise) * u["slope"]
