"""Units of a circuit without a network (timers): its formulas, in the form that every other circuit answers in."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Circuit, Direct
from yieldosc.solver.solution import Solution, Status

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]


class DirectEvaluator:
    """Evaluator of a circuit with `direct` formulas: no start-up question, so the margin is nan and nothing grows."""

    def __init__(self, circuit: Circuit, nominal: Mapping[str, float]) -> None:
        self.circuit = circuit
        self.nominal = {name: float(value) for name, value in nominal.items()}

    def solve(
        self,
        values: Mapping[str, Array],
        temperature_c: float,
        *,
        own_law: frozenset[str] = frozenset(),
        growth: bool = False,
        audit: Mask | None = None,
    ) -> Solution:
        """See `Evaluator.solve`. There is one path only, so that nothing is audited."""
        n = max((np.size(v) for v in values.values()), default=1)
        answer = self._answer(values, temperature_c)
        frequency = _full(answer.frequency_hz, n)
        status = np.where(np.broadcast_to(answer.latches, (n,)), Status.NO_START, Status.STARTS)
        status = np.where(np.isfinite(frequency), status, Status.UNDEFINED)
        if self.circuit.not_assessable is not None:
            outside = np.broadcast_to(self.circuit.not_assessable(values, frequency), (n,))
            status = np.where(outside & (status != Status.UNDEFINED), Status.NOT_ASSESSABLE, status)
        return Solution(
            frequency_hz=frequency,
            startup_margin=np.full(n, np.nan),
            status=status.astype(np.int8),
            distortion=_optional(answer.distortion, n),
            duty=_optional(answer.duty, n),
            amplitude_v=_optional(answer.amplitude_v, n),
            phase_deg=_optional(answer.phase_deg, n),
        )

    def other_modes(
        self, values: Mapping[str, Array], temperature_c: float, *, own_law: frozenset[str] = frozenset()
    ) -> list[tuple[float, ...]]:
        """A latched unit rests at one level, 0 Hz; no unit has another mode."""
        n = max((np.size(v) for v in values.values()), default=1)
        latches = np.broadcast_to(self._answer(values, temperature_c).latches, (n,))
        return [(0.0,) if latched else () for latched in latches]

    def _answer(self, values: Mapping[str, Array], temperature_c: float) -> Direct:
        if self.circuit.direct is None:
            raise TypeError(f"{self.circuit.name} has a network; use NetworkEvaluator")
        return self.circuit.direct(values, temperature_c)


def _full(value: Array, n: int) -> Array:
    return np.broadcast_to(np.asarray(value, dtype=np.float64), (n,)).copy()


def _optional(value: Array | None, n: int) -> Array | None:
    return None if value is None else _full(value, n)
