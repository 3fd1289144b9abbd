"""Harmonic balance against direct integration of equations written by hand, within 0.05 % in frequency."""

import numpy as np
import pytest

from tests.settle import integration
from tests.settle.tables import COLPITTS, COLPITTS_VALUES, LAG, LAG_VALUES, LEAD, LEAD_VALUES, circuit_of, solved
from yieldosc.circuits import registry
from yieldosc.settle.settled import solve

WITHIN = 5e-4
WIEN = {"R1": 1e4, "C1": 1e-8, "R2": 1e4, "C2": 1e-8, "RG": 1e4, "GBW": 3e6}


def balanced(circuit, values):
    arrays, solution = solved(circuit, values)
    found = solve(circuit, arrays, 25.0, solution, limiter="clip")
    assert not found.not_converged[0]
    return found, solution


@pytest.mark.parametrize("rf", [20.6e3, 21.5e3, 23e3])  # 1 + RF/RG is 2, 5 and 10 % above the ideal bridge's 3
def test_wien_bridge(rf):
    values = {**WIEN, "RF": rf}
    found, solution = balanced(registry.build("wien_bridge", {"limiter": "clip"}, values), values)
    hz = integration.settled(integration.wien(1e4, 1e-8, 1e4, 1e-8, rf, 1e4, 3e6), 1590)
    assert found.settled_hz[0] == pytest.approx(hz, rel=WITHIN)
    assert abs(solution.frequency_hz[0] / hz - 1) > 5 * WITHIN  # the crossing itself is far off


@pytest.mark.parametrize("high", [10.0, 7.5])  # the upper rail is not reached, or less than the lower
def test_wien_bridge_with_unequal_rails(high):
    """The lower rail clips harder, and the even harmonics come back through the network as well."""
    values = {**WIEN, "RF": 21.5e3, "VSAT_high": high, "VSAT_low": 7.0}
    found, _ = balanced(registry.build("wien_bridge", {"limiter": "clip"}, values), values)
    matrix = integration.wien(1e4, 1e-8, 1e4, 1e-8, 21.5e3, 1e4, 3e6)
    hz = integration.settled(matrix, 1590, high=high, low=7.0)
    assert found.settled_hz[0] == pytest.approx(hz, rel=WITHIN)
    equal = integration.settled(matrix, 1590, high=7.0, low=7.0)
    assert abs(equal / hz - 1) > 1e-5


@pytest.mark.parametrize(("rf", "margin"), [(320e3, 1.10), (435e3, 1.50)])
def test_lead_ladder(rf, margin):
    values = {**LEAD_VALUES, "RF": rf}
    found, solution = balanced(circuit_of(LEAD, "RF", 649.5), values)
    assert solution.startup_margin[0] == pytest.approx(margin, abs=0.01)
    hz = integration.settled(integration.lead(1e4, 1e-8, 1e4, rf, 10e6), 600)
    assert found.settled_hz[0] == pytest.approx(hz, rel=WITHIN)


@pytest.mark.parametrize(("rf", "margin"), [(3.36e6, 1.10), (4.6e6, 1.50)])
def test_lag_ladder(rf, margin):
    values = {**LAG_VALUES, "RF": rf}
    found, solution = balanced(circuit_of(LAG, "RF", 3978), values)
    assert solution.startup_margin[0] == pytest.approx(margin, abs=0.01)
    hz = integration.settled(integration.lag(1e4, 1e-8, 1e5, rf, 10e6), 3950)
    assert found.settled_hz[0] == pytest.approx(hz, rel=WITHIN)


def test_opamp_colpitts():
    found, solution = balanced(circuit_of(COLPITTS, "RF", 23000), COLPITTS_VALUES)
    hz = integration.settled(integration.colpitts(1e3, 1e-8, 1e-2, 1e-8, 1e4, 15e3, 10e6), 23000)
    assert found.settled_hz[0] == pytest.approx(hz, rel=WITHIN)
    assert abs(solution.frequency_hz[0] / hz - 1) > 5 * WITHIN  # clipped, RIN + RF loads the tank: m is no ground then


def test_figures_of_an_independent_integration():
    """Integrated elsewhere (Wien 1583.86 Hz and 1.9 % distortion at the amplifier's input, lead ladder 556.6 Hz)."""
    values = {**WIEN, "RF": 20.5e3}
    circuit = registry.build("wien_bridge", {"limiter": "clip"}, values)
    arrays, solution = solved(circuit, values)
    assert solution.frequency_hz[0] == pytest.approx(1587.76, abs=0.01)
    few = solve(circuit, arrays, 25.0, solution, limiter="clip", most=15)
    assert few.settled_hz[0] == pytest.approx(1583.90, abs=0.005)
    found = solve(circuit, arrays, 25.0, solution, limiter="clip", tolerance=1e-6)
    assert found.settled_hz[0] == pytest.approx(1583.86, abs=0.006)
    assert found.distortion_in[0] == pytest.approx(0.019, abs=0.0005)
    values = {**LEAD_VALUES, "RF": 435e3}
    circuit = circuit_of(LEAD, "RF", 649.5)
    arrays, solution = solved(circuit, values)
    assert solution.frequency_hz[0] == pytest.approx(649.5, abs=0.05)
    for most, hz in ((41, 556.61), (5, 561.84)):
        part = solve(circuit, arrays, 25.0, solution, limiter="clip", most=most)
        assert part.settled_hz[0] == pytest.approx(hz, abs=0.012)
    assert part.capped[0]
    whole = solve(circuit, arrays, 25.0, solution, limiter="clip")
    assert whole.settled_hz[0] == pytest.approx(556.6, abs=0.05)


def test_amplitude_is_that_of_the_integrated_wave():
    """Fundamental of the output over the last period of an integration, by a Fourier sum."""
    values = {**WIEN, "RF": 22e3, "VSAT": 11.0}
    found, _ = balanced(registry.build("wien_bridge", {"limiter": "clip"}, values), values)
    matrix = integration.wien(1e4, 1e-8, 1e4, 1e-8, 22e3, 1e4, 3e6)
    output, control = integration.fundamentals(matrix, 1590, high=11.0, low=11.0, watch=(2, 1))
    assert found.amplitude_out_v[0] == pytest.approx(output, rel=1e-3)
    assert found.amplitude_in_v[0] == pytest.approx(control, rel=1e-3)
    assert np.isfinite(output)
