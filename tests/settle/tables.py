"""Circuits written down for these tests alone: a branch table, its symbols as roles, no stage and no registry."""

from __future__ import annotations

import numpy as np

from yieldosc.circuits.circuit import Branch, Circuit, Derived, Role
from yieldosc.solver import make_evaluator

KINDS = {"R": "resistor", "C": "capacitor", "L": "inductor"}


def circuit_of(rows, gain_symbol, near_hz, *, limiter="clip", extra=(), **fields):
    """A circuit whose roles are the symbols of its rows."""
    symbols = dict.fromkeys(name for row in rows for name in row.symbols)
    roles = tuple(Role(name, name, "", KINDS.get(name[0], "ic"), name) for name in (*symbols, *extra))
    return Circuit(
        name="table",
        title="table",
        options={"limiter": limiter},
        roles=roles,
        branches=tuple(rows),
        gain_symbol=gain_symbol,
        derive=lambda values, temperature_c, own_law: Derived({name: values[name] for name in symbols}),
        design_frequency=lambda values: np.full(np.shape(values[next(iter(symbols))]), near_hz),
        closed_form="",
        **fields,
    )


def solved(circuit, values):
    """(values as arrays (1,), solution) of one unit."""
    nominal = {name: float(value) for name, value in values.items()}
    arrays = {name: np.array([value]) for name, value in nominal.items()}
    return arrays, make_evaluator(circuit, nominal).solve(arrays, 25.0)


def tau(gbw_hz):
    return 1 / (2 * np.pi * gbw_hz)


LEAD = (
    Branch("C1", "C", ("o", "a"), ("C1",)),
    Branch("R1", "R", ("a", "gnd"), ("R1",)),
    Branch("C2", "C", ("a", "b"), ("C2",)),
    Branch("R2", "R", ("b", "gnd"), ("R2",)),
    Branch("C3", "C", ("b", "g"), ("C3",)),
    Branch("RIN", "R", ("g", "m"), ("RIN",)),
    Branch("RF", "R", ("o", "m"), ("RF",), True),
    Branch("op-amp", "opamp", ("o", "gnd", "m"), ("tau",)),
)
LEAD_VALUES = {"C1": 1e-8, "C2": 1e-8, "C3": 1e-8, "R1": 1e4, "R2": 1e4, "RIN": 1e4, "tau": tau(10e6)}
LAG = (
    Branch("R1", "R", ("o", "a"), ("R1",)),
    Branch("C1", "C", ("a", "gnd"), ("C1",)),
    Branch("R2", "R", ("a", "b"), ("R2",)),
    Branch("C2", "C", ("b", "gnd"), ("C2",)),
    Branch("R3", "R", ("b", "g"), ("R3",)),
    Branch("C3", "C", ("g", "gnd"), ("C3",)),
    Branch("RIN", "R", ("g", "m"), ("RIN",)),
    Branch("RF", "R", ("o", "m"), ("RF",), True),
    Branch("op-amp", "opamp", ("o", "gnd", "m"), ("tau",)),
)
LAG_VALUES = {"R1": 1e4, "R2": 1e4, "R3": 1e4, "C1": 1e-8, "C2": 1e-8, "C3": 1e-8, "RIN": 1e5, "tau": tau(10e6)}
COLPITTS = (
    Branch("RO", "R", ("q", "o"), ("RO",)),
    Branch("C1", "C", ("o", "gnd"), ("C1",)),
    Branch("L", "L", ("o", "g"), ("L",)),
    Branch("C2", "C", ("g", "gnd"), ("C2",)),
    Branch("RIN", "R", ("g", "m"), ("RIN",)),
    Branch("RF", "R", ("q", "m"), ("RF",), True),
    Branch("op-amp", "opamp", ("q", "gnd", "m"), ("tau",)),
)
COLPITTS_VALUES = {"RO": 1e3, "C1": 1e-8, "C2": 1e-8, "L": 1e-2, "RIN": 1e4, "RF": 15e3, "tau": tau(10e6)}


def tank(q, margin):
    """A parallel tank at 1 rad/s and 1 Ω with a current limiter of this loop gain: (rows, values)."""
    rows = (
        Branch("L", "L", ("c", "gnd"), ("L",)),
        Branch("C", "C", ("c", "gnd"), ("C",)),
        Branch("R", "R", ("c", "gnd"), ("R",)),
        Branch("gm", "transconductance", ("gnd", "c", "c", "gnd"), ("gm",), True),
    )
    return rows, {"L": 1.0, "C": 1.0, "R": q, "gm": margin / q}
