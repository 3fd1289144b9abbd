"""Which evaluator solves a circuit: its crossings, and where it settles if a limiter is declared."""

from __future__ import annotations

from collections.abc import Mapping

from yieldosc.circuits.circuit import Circuit
from yieldosc.settle.evaluator import SettlingEvaluator
from yieldosc.solver import make_evaluator as make_crossing_evaluator
from yieldosc.solver.evaluator import Evaluator

UNDECLARED = "none"


def make_evaluator(
    circuit: Circuit, nominal: Mapping[str, float], *, limits_width_hz: float | None = None
) -> Evaluator:
    """The evaluator of a circuit around its nominal values (role → SI value, every present role).

    limits_width_hz: distance between the frequency limits, where a study has any; clipping shifts that are small
    against it are computed for a sample only.
    """
    crossing = make_crossing_evaluator(circuit, nominal)
    if circuit.options.get("limiter", UNDECLARED) == UNDECLARED:
        return crossing
    return SettlingEvaluator(circuit, nominal, crossing, limits_width_hz=limits_width_hz)
