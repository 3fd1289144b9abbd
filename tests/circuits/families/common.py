"""One unit of a named circuit, solved, and its independent solution from the circuit's own branch table."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from tests.independent import Unit, from_branches
from yieldosc.circuits import registry
from yieldosc.circuits.circuit import Circuit
from yieldosc.solver import make_evaluator
from yieldosc.solver.solution import Solution


def full_values(circuit: Circuit, values: Mapping[str, float]) -> dict[str, np.ndarray]:
    return {r.name: np.array([float(values.get(r.name, r.default))]) for r in circuit.roles}


def built(name: str, options: Mapping[str, str], values: Mapping[str, float]) -> tuple[Circuit, dict[str, np.ndarray]]:
    circuit = registry.build(name, options, values)
    return circuit, full_values(circuit, values)


def solve(
    name: str, options: Mapping[str, str], values: Mapping[str, float], temperature_c: float = 25.0
) -> Solution:
    circuit, arrays = built(name, options, values)
    return solve_circuit(circuit, arrays, temperature_c)


def solve_circuit(circuit: Circuit, arrays: Mapping[str, np.ndarray], temperature_c: float = 25.0) -> Solution:
    nominal = {k: float(v[0]) for k, v in arrays.items()}
    return make_evaluator(circuit, nominal).solve(arrays, temperature_c, growth=True)


def symbols_of(circuit: Circuit, arrays: Mapping[str, np.ndarray], temperature_c: float = 25.0) -> dict[str, float]:
    derived = circuit.derive(arrays, temperature_c, frozenset()).symbols
    return {k: float(np.ravel(v)[0]) for k, v in derived.items()}


def independent(circuit: Circuit, arrays: Mapping[str, np.ndarray], temperature_c: float, level_ohm: float) -> Unit:
    design = float(np.ravel(circuit.design_frequency(arrays))[0])
    table = from_branches(circuit.branches, symbols_of(circuit, arrays, temperature_c), circuit.gain_symbol)
    return Unit(table, w0=2 * np.pi * design, r0=level_ohm)
