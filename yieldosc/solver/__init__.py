"""Polynomials of n units → crossings → frequency, margin, growth, outcome. No unit can raise."""

from __future__ import annotations

from collections.abc import Mapping

from yieldosc.circuits.circuit import Circuit
from yieldosc.solver.direct_evaluator import DirectEvaluator
from yieldosc.solver.evaluator import Evaluator
from yieldosc.solver.network_evaluator import NetworkEvaluator


def make_evaluator(circuit: Circuit, nominal: Mapping[str, float]) -> Evaluator:
    """The evaluator of a circuit around its nominal values (role → SI value, every present role)."""
    if circuit.direct is not None:
        return DirectEvaluator(circuit, nominal)
    return NetworkEvaluator(circuit, nominal)
