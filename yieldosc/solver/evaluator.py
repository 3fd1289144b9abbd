"""The seam between a population and a circuit: values of a block of units at one corner in, a Solution out."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.solution import Solution

Array = NDArray[np.float64]


class Evaluator(Protocol):
    """Solves units of one circuit. Made once per study (picklable), called per block and corner."""

    def solve(
        self,
        values: Mapping[str, Array],
        temperature_c: float,
        *,
        own_law: frozenset[str] = frozenset(),
        growth: bool = False,
        audit: NDArray[np.bool_] | None = None,
    ) -> Solution:
        """values: role → (n,), laws of the user already applied for roles in own_law; audit: units to check exactly."""
        ...

    def other_modes(
        self, values: Mapping[str, Array], temperature_c: float, *, own_law: frozenset[str] = frozenset()
    ) -> list[tuple[float, ...]]:
        """Frequencies [Hz] of every other growing mode of each unit, 0 for a latching real pole."""
        ...
