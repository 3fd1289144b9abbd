"""Drive level of a crystal against nodal equations solved as numbers, which share no code with the branch tables."""

from dataclasses import replace

import numpy as np
import pytest

from tests.independent import from_branches
from yieldosc.circuits import registry
from yieldosc.evaluators import make_evaluator
from yieldosc.settle.drive import drive_w
from yieldosc.solver.solution import Status

PIERCE = {
    "FL": 8e6, "CL": 18e-12, "Cm": 15e-15, "C0": 4e-12, "ESR": 40.0, "C1": 33e-12, "C2": 33e-12,
    "VCC": 5.0, "RB1": 47e3, "RB2": 10e3, "RE": 680.0, "RC": 1e3, "CE": 100e-9, "hFE": 150.0,
}  # fmt: skip


def admittance(element, s):
    """Of a two-terminal element at s [S]."""
    v = element.values
    return {
        "R": lambda: 1 / v[0], "G": lambda: v[0], "C": lambda: s * v[0], "L": lambda: 1 / (s * v[0] + v[1]),
        "arm": lambda: 1 / (s * v[0] + 1 / (s * v[1]) + v[2]),
    }[element.kind]()  # fmt: skip


def across(elements, s):
    """Voltages at the source's control nodes and at the crystal's, and the arm's current, for 1 A from the source."""
    names = sorted({n for e in elements for n in e.nodes if n != "gnd"})
    at = {name: k for k, name in enumerate(names)}
    y, source = np.zeros((len(names), len(names)), complex), np.zeros(len(names), complex)

    def add(row, column, value):
        if row != "gnd" and column != "gnd":
            y[at[row], at[column]] += value

    gain = next(e for e in elements if e.gain)
    for e in elements:
        if e.kind == "gm":
            if e is gain:
                for node, sign in zip(e.nodes[:2], (-1, 1), strict=True):
                    if node != "gnd":
                        source[at[node]] += sign
                continue
            for node, sign in zip(e.nodes[:2], (1, -1), strict=True):
                add(node, e.nodes[2], sign * e.values[0])
                add(node, e.nodes[3], -sign * e.values[0])
            continue
        value = admittance(e, s)
        for a, b in (e.nodes, e.nodes[::-1]):
            add(a, a, value)
            add(a, b, -value)
    v = np.linalg.solve(y, source)

    def volts(plus, minus):
        return sum(sign * v[at[n]] for n, sign in ((plus, 1), (minus, -1)) if n != "gnd")

    arm = next(e for e in elements if e.kind == "arm")
    return volts(*gain.nodes[2:4]), volts(*arm.nodes[:2]) * admittance(arm, s)


@pytest.fixture(scope="module")
def settled():
    options = registry.complete_options("pierce", {"stage": "bjt", "limiter": "exp"})
    family = registry.family("pierce")
    values = {role.name: PIERCE[role.name] for role in family.roles(options) if role.name in PIERCE}
    circuit = registry.build("pierce", options, set(values))
    for role in circuit.roles:
        values.setdefault(role.name, role.default)
    arrays = {name: np.array([value]) for name, value in values.items()}
    return circuit, arrays, make_evaluator(circuit, values).solve(arrays, 25.0)


def test_power_is_half_the_squared_motional_current_times_the_series_resistance(settled):
    circuit, values, solution = settled
    assert solution.status[0] == Status.STARTS
    symbols = {k: np.ravel(v)[0] for k, v in circuit.derive(values, 25.0, frozenset()).symbols.items()}
    elements = from_branches(circuit.branches, symbols, circuit.gain_symbol)
    control, current = across(elements, 2j * np.pi * solution.settled_hz[0])
    motional = abs(current / control) * solution.amplitude_in_v[0]
    assert solution.drive_w[0] == pytest.approx(0.5 * motional**2 * values["ESR"][0], rel=1e-6)
    assert 1e-6 < solution.drive_w[0] < 5e-3  # microwatts to milliwatts: the order that a discrete stage drives with


def test_power_grows_with_the_square_of_the_amplitude(settled):
    circuit, values, solution = settled
    twice = drive_w(circuit, values, 25.0, solution.settled_hz, 2 * solution.amplitude_in_v)
    assert twice[0] == pytest.approx(4 * solution.drive_w[0], rel=1e-12)


def test_no_crystal_or_no_amplitude_gives_no_power(settled):
    circuit, values, solution = settled
    assert drive_w(circuit, values, 25.0, solution.settled_hz, np.array([np.nan])) is None
    wien = registry.build("wien_bridge", registry.complete_options("wien_bridge", {"limiter": "clip"}),
                          {"R1", "C1", "R2", "C2", "RF", "RG", "VSAT"})  # fmt: skip
    assert drive_w(wien, {}, 25.0, np.array([1e3]), np.array([1.0])) is None


def inverter(**changes):
    options = registry.complete_options("pierce", {"limiter": "tanh"})
    values = {"FL": 8e6, "CL": 12e-12, "Cm": 5.5e-15, "C0": 1.8e-12, "ESR": 40.0, "C1": 15e-12, "C2": 15e-12,
              "RF": 1e6, "gm": 6e-3, **changes}  # fmt: skip
    circuit = registry.build("pierce", options, set(values))
    for role in circuit.roles:
        if role.default is not None:
            values.setdefault(role.name, role.default)
    arrays = {name: np.array([value]) for name, value in values.items()}
    return circuit, arrays, make_evaluator(circuit, values).solve(arrays, 25.0)


def test_an_inverter_that_swings_rail_to_rail_bounds_the_drive():
    """Fundamental of a square wave between ± VSAT: 4 VSAT/π (Fourier); the rest by nodal equations as numbers."""
    circuit, values, solution = inverter(VSAT=1.65)
    symbols = {k: np.ravel(v)[0] for k, v in circuit.derive(values, 25.0, frozenset()).symbols.items()}
    elements = from_branches(circuit.branches, symbols, circuit.gain_symbol)
    s = 2j * np.pi * solution.settled_hz[0]
    control, current = across(elements, s)
    gain = next(e for e in elements if e.gain)
    arm = next(e for e in elements if e.kind == "arm")
    # the same voltages once more with the output node watched in place of the control nodes
    watched = [replace(e, nodes=(*e.nodes[:2], e.nodes[0], "gnd")) if e is gain else e for e in elements]
    out, _ = across(watched, s)
    assert solution.amplitude_v[0] == pytest.approx(4 * 1.65 / np.pi, rel=1e-12)
    assert solution.amplitude_in_v[0] == pytest.approx(abs(control / out) * 4 * 1.65 / np.pi, rel=1e-6)
    motional = abs(current / out) * 4 * 1.65 / np.pi
    assert solution.drive_w[0] == pytest.approx(0.5 * motional**2 * arm.values[2], rel=1e-6)
    assert "amplitude and drive level are bounds" in " ".join(circuit.assumptions)


def test_an_inverter_without_a_swing_has_no_drive_level():
    circuit, _, solution = inverter()
    assert solution.drive_w is None
    assert "bounds" not in " ".join(circuit.assumptions)
