"""Where each circuit's model stops being true: units outside are not assessable, and the circuit says why."""

from __future__ import annotations

import numpy as np
import pytest

from tests.circuits.families.common import built, solve, solve_circuit
from tests.samples import COIL, SAMPLES
from yieldosc.circuits import registry
from yieldosc.solver.solution import Status


@pytest.mark.parametrize("name", ["phase_shift", "twin_t", "quadrature", "wien_bridge"])
def test_above_a_twentieth_of_gbw(name):
    sample = SAMPLES[name]
    f = float(solve(name, sample.options, sample.values).frequency_hz[0])
    outside = solve(name, sample.options, {**sample.values, "GBW": 10 * f})
    inside = solve(name, sample.options, {**sample.values, "GBW": 40 * f})
    assert Status(outside.status[0]) is Status.NOT_ASSESSABLE
    assert Status(inside.status[0]) is not Status.NOT_ASSESSABLE
    assert "GBW/20" in built(name, sample.options, sample.values)[0].range_text


@pytest.mark.parametrize("name", ["colpitts", "crystal_colpitts", "crystal_common_base"])
def test_above_a_tenth_of_ft(name):
    sample = SAMPLES[name]
    circuit, arrays = built(name, sample.options, sample.values)
    f = float(solve_circuit(circuit, arrays).frequency_hz[0])
    inside = solve_circuit(circuit, arrays | {"fT": np.array([10.5 * f])})
    outside = solve_circuit(circuit, arrays | {"fT": np.array([9.5 * f])})
    assert Status(inside.status[0]) is not Status.NOT_ASSESSABLE
    assert Status(outside.status[0]) is Status.NOT_ASSESSABLE
    assert "fT/10" in circuit.range_text


def test_coupling_of_one_is_no_coil_pair():
    sample = SAMPLES["hartley"]
    circuit, arrays = built("hartley", sample.options, sample.values)
    assert Status(solve_circuit(circuit, arrays).status[0]) is Status.STARTS
    closed = solve_circuit(circuit, arrays | {"k": np.array([1.0])})
    assert Status(closed.status[0]) is Status.NOT_ASSESSABLE
    assert COIL["k"] < 1
    assert "k below 1" in circuit.range_text


@pytest.mark.parametrize("name", registry.names())
def test_every_circuit_states_a_range(name):
    sample = SAMPLES[name]
    circuit, _ = built(name, sample.options, sample.values)
    assert circuit.range_text
    assert circuit.closed_form
