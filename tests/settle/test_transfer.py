"""The limiter's loop against nodal equations solved with numbers, and its refusals."""

import numpy as np
import pytest

from tests.settle.tables import COLPITTS, COLPITTS_VALUES, LAG, LAG_VALUES, LEAD, LEAD_VALUES, circuit_of, tank, tau
from yieldosc.circuits import registry
from yieldosc.circuits.circuit import Branch, CircuitError
from yieldosc.settle.transfer import NoLimiterError, limited_loop, response
from yieldosc.solver.scaled import Scale

HZ = np.array([300.0, 1e3, 3e3, 40e3])


def loop_at(circuit, values, hz):
    """(H, output transfer) at frequencies."""
    loop = limited_loop(circuit)
    symbols = {name: np.array([float(v)]) for name, v in values.items()}
    symbols = circuit.derive(symbols, 25.0, frozenset()).symbols
    scale = Scale.of(1e3, symbols, loop.loop.dimensions)
    found = response(loop, symbols, scale, 1)
    s = 2j * np.pi * hz[None, :] / scale.omega
    return found.at(s)[0], found.output_at(s)[0], scale


def nodal(conductances, drive, hz):
    """Node voltages per volt of a source q: conductances (i, j, y(s)) between free nodes, drive (i, y(s)) towards q."""
    out = []
    for s in 2j * np.pi * hz:
        size = 1 + max(node for i, j, _ in conductances for node in (i, j) if node is not None)
        y = np.zeros((size, size), dtype=complex)
        right = np.zeros(size, dtype=complex)
        for i, j, value in conductances:
            y[i, i] += value(s)
            if j is not None:
                y[j, j] += value(s)
                y[i, j] -= value(s)
                y[j, i] -= value(s)
        for i, value in drive:
            y[i, i] += value(s)
            right[i] += value(s)
        out.append(np.linalg.solve(y, right))
    return np.array(out)


def resistor(r):
    return lambda s: 1 / r


def capacitor(c):
    return lambda s: s * c


def test_wien_bridge_loop():
    values = {"R1": 9e3, "C1": 11e-9, "R2": 12e3, "C2": 8e-9, "CIN": 2e-12, "RF": 22e3, "RG": 10e3, "GBW": 1e6}
    h, out, _ = loop_at(registry.build("wien_bridge", {"limiter": "clip"}, values), values, HZ)
    s = 2j * np.pi * HZ
    series = 9e3 + 1 / (s * 11e-9)
    shunt = 1 / (1 / 12e3 + s * (8e-9 + 2e-12))
    lag = 1 / (1 + s * 3.2 * tau(1e6))
    np.testing.assert_allclose(h, 3.2 * shunt / (series + shunt) * lag, rtol=1e-12)
    np.testing.assert_allclose(out, lag, rtol=1e-12)


def test_ladders_see_rin_plus_rf_to_the_output():
    rf = 400e3
    v = {**LAG_VALUES, "RF": rf}
    h, out, _ = loop_at(circuit_of(LAG, "RF", 4e3), v, HZ)
    r, c, load = resistor(1e4), capacitor(1e-8), resistor(1e5 + rf)
    rows = [(0, 1, r), (1, 2, r), (0, None, c), (1, None, c), (2, None, c)]
    v_in = nodal(rows, [(0, r), (2, load)], HZ)[:, 2]
    lag = 1 / (1 + 2j * np.pi * HZ * (1 + rf / 1e5) * tau(10e6))
    np.testing.assert_allclose(h, -rf / 1e5 * v_in * lag, rtol=1e-11)
    np.testing.assert_allclose(out, lag, rtol=1e-12)
    v = {**LEAD_VALUES, "RF": rf}
    h, _, _ = loop_at(circuit_of(LEAD, "RF", 650), v, HZ)
    load = resistor(1e4 + rf)
    rows = [(0, 1, c), (1, 2, c), (0, None, r), (1, None, r)]
    v_in = nodal(rows, [(0, c), (2, load)], HZ)[:, 2]
    lag = 1 / (1 + 2j * np.pi * HZ * (1 + rf / 1e4) * tau(10e6))
    np.testing.assert_allclose(h, -rf / 1e4 * v_in * lag, rtol=1e-11)


def test_output_resistance_stands_between_the_limiter_and_the_tank():
    h, out, _ = loop_at(circuit_of(COLPITTS, "RF", 23e3), COLPITTS_VALUES, HZ)
    c, coil = capacitor(1e-8), lambda s: 1 / (s * 1e-2)
    v_in = nodal([(0, 1, coil), (0, None, c), (1, None, c)], [(0, resistor(1e3)), (1, resistor(25e3))], HZ)[:, 1]
    lag = 1 / (1 + 2j * np.pi * HZ * 2.5 * tau(10e6))
    np.testing.assert_allclose(h, -1.5 * v_in * lag, rtol=1e-11)
    np.testing.assert_allclose(out, lag, rtol=1e-12)


def test_current_limiter_of_a_tank():
    rows, values = tank(10.0, 3.0)
    hz = np.array([0.05, 1 / (2 * np.pi), 0.4])
    h, out, scale = loop_at(circuit_of(rows, "gm", 0.16, limiter="tanh"), values, hz)
    s = 2j * np.pi * hz
    impedance = 1 / (1 / 10.0 + s + 1 / s)
    np.testing.assert_allclose(h, 0.3 * impedance, rtol=1e-11)
    np.testing.assert_allclose(np.abs(out) * scale.ohm, np.abs(impedance), rtol=1e-11)


def test_an_opamp_with_more_at_its_inverting_input_is_refused():
    extra = Branch("CM", "C", ("m", "gnd"), ("CM",))
    circuit = circuit_of((*LEAD, extra), "RF", 650)
    with pytest.raises(NoLimiterError) as caught:
        limited_loop(circuit)
    assert str(caught.value) == (
        "clipping is modelled for an op-amp whose inverting input carries the feedback resistor and one other resistor"
    )


WIEN = {"R1", "C1", "R2", "C2", "RF", "RG"}


@pytest.mark.parametrize(
    ("limiter", "extra", "texts"),
    [
        ("clip", {"RF_full"}, ["a stabiliser holds the level here, so the output does not clip: choose limiter = agc"]),
        ("clip", {"VSAT_high"}, ["unequal rails need both VSAT_high and VSAT_low; give the missing one"]),
        (
            "agc",
            {"VSAT", "VSAT_high", "VSAT_low"},
            ["VSAT stands for equal rails, VSAT_high and VSAT_low for unequal ones: keep one or the other"],
        ),
        ("none", {"VSAT"}, ["wien_bridge has no role 'VSAT' with these options"]),
    ],
)
def test_limiters_that_contradict_the_roles_are_refused(limiter, extra, texts):
    with pytest.raises(CircuitError) as caught:
        registry.build("wien_bridge", {"limiter": limiter}, WIEN | extra)
    assert list(caught.value.problems) == texts


def test_the_assumption_names_the_limiter():
    made = {name: registry.build("wien_bridge", {"limiter": name}, WIEN).assumptions[-1] for name in ("none", "agc", "clip")}
    assert made == {
        "none": "no stabiliser: the level is limited by clipping",
        "agc": "a level control holds the level without distortion as long as it is not at its stop",
        "clip": "the level is limited by the output clipping at its rails (no slewing, no recovery time)",
    }
