"""Harmonic balance against what is known in closed form, or published."""

import numpy as np
import pytest
from scipy.optimize import brentq
from scipy.special import i0, i1

from tests.settle.tables import circuit_of, solved, tank
from yieldosc.settle.balance import Wave, balance, orders_up_to
from yieldosc.settle.limiter import CLIP, EXP, TANH, Limiter
from yieldosc.settle.settled import solve
from yieldosc.settle.transfer import Response


def settled_tank(q, margin, limiter, **settings):
    rows, values = tank(q, margin)
    circuit = circuit_of(rows, "gm", 1 / (2 * np.pi), limiter=limiter)
    arrays, solution = solved(circuit, values)
    assert solution.frequency_hz[0] == pytest.approx(1 / (2 * np.pi), rel=1e-12)
    found = solve(circuit, arrays, 25.0, solution, limiter=limiter, **settings)
    assert not found.not_converged[0]
    return found, float(found.settled_hz[0] / solution.frequency_hz[0] - 1)


@pytest.mark.parametrize("q", [10.0, 36.0, 100.0])
@pytest.mark.parametrize("limiter", ["clip", "tanh"])
def test_hard_odd_limiter_lowers_a_tank_by_an_eighth_of_q_squared(q, limiter):
    """Reactive power of a memoryless limiter is zero: Σ n |V_n|² Im Y(nω) = 0 (Groszkowski 1933, from memory). A square
    wave's harmonics, filtered by the tank, give Σ 1/(n² − 1) = 1/4 over odd n, hence −1/(8 Q²) for high Q."""
    _, shift = settled_tank(q, 400.0, limiter, tolerance=1e-9)
    assert shift == pytest.approx(-1 / (8 * q * q), rel=0.02)


def test_shift_of_a_tank_at_the_q_where_it_stops_to_matter():
    _, shift = settled_tank(36.0, 400.0, "clip", tolerance=1e-9)
    assert -1e-4 < shift < -0.9e-4


def test_a_bipolar_stage_shifts_with_its_margin():
    """Harmonic balance done elsewhere, Q 10: −6.5e-4 at a margin of 1.2, −1.15e-2 at 8."""
    assert settled_tank(10.0, 1.2, "exp")[1] == pytest.approx(-6.5e-4, abs=0.05e-4)
    assert settled_tank(10.0, 8.0, "exp")[1] == pytest.approx(-1.15e-2, abs=0.005e-2)


def test_amplitude_of_a_bipolar_stage_is_a_ratio_of_bessel_functions():
    """Fundamental of e^(x cos t) over its mean: 2 I1(x)/I0(x), x the amplitude in kT/q (Clarke & Hess 1971, from memory).
    Only at high Q is the input a sinusoid. The tank is input and output at once."""
    margin, boltzmann_over_charge = 3.0, 8.617333262e-5  # V/K, CODATA 2018 from memory
    rows, values = tank(3000.0, margin)
    circuit = circuit_of(rows, "gm", 1 / (2 * np.pi), limiter="exp", extra=("hFE",))
    arrays, solution = solved(circuit, {**values, "hFE": 100.0})
    found = solve(circuit, arrays, 25.0, solution, limiter="exp")
    x = brentq(lambda level: 2 * i1(level) / (level * i0(level)) - 1 / margin, 0.1, 20.0)
    assert found.amplitude_in_v[0] == pytest.approx(x * boltzmann_over_charge * 298.15, rel=1e-4)
    assert found.amplitude_out_v[0] == pytest.approx(found.amplitude_in_v[0], rel=1e-9)
    assert found.distortion_in[0] < 1e-3
    unscaled, _ = settled_tank(3000.0, margin, "exp")
    assert np.isnan(unscaled.amplitude_in_v[0])  # no bipolar stage, so no scale


@pytest.mark.parametrize("excess", [1.01, 1.2, 2.0, 20.0])
def test_describing_function_of_clipping_in_closed_form(excess):
    """N(X) = (2/π)(asin(1/X) + √(1 − 1/X²)/X) for a saturation of slope and level 1 (Gelb & Vander Velde 1968, from
    memory); with one harmonic the loop settles where N(X) is the reciprocal of its excess gain, unshifted."""
    rows, values = tank(10.0, excess)
    circuit = circuit_of(rows, "gm", 1 / (2 * np.pi))
    arrays, solution = solved(circuit, values)
    found = solve(circuit, arrays, 25.0, solution, limiter="clip", most=1)
    assert found.settled_hz[0] == pytest.approx(solution.frequency_hz[0], rel=1e-9)
    wave = balance(CLIP, unit_tank(10.0, excess), first(CLIP, excess), np.zeros(1), 4096)
    x = wave.x[0, 0].real
    assert 2 / np.pi * (np.arcsin(1 / x) + np.sqrt(1 - 1 / x**2) / x) == pytest.approx(1 / excess, rel=1e-5)


def unit_tank(q, excess):
    """H = excess · (s/Q)/(s² + s/Q + 1)."""
    one, zero = np.ones(1), np.zeros(1)
    return Response([one, one / q, one], [zero, one * excess / q], [one], [one])


def first(limiter, excess):
    amplitude = limiter.first_amplitude(np.array([excess])).astype(complex)
    return Wave(np.zeros(1), amplitude[:, None], np.array([1]), np.ones(1, dtype=bool))


def test_output_of_a_hard_driven_stage_becomes_a_square_wave():
    """Distortion of a square wave is √(π²/8 − 1) = 0.48343 (Blagouchine & Moreau 2011); harmonics above the 51st, which
    are not counted, hold Σ 1/n² over odd n from 53 on."""
    odd = np.arange(3, 52, 2)
    u = limited_wave(50.0, 1000.0)
    assert np.sqrt(np.sum(np.abs(u[1:]) ** 2)) / abs(u[0]) == pytest.approx(np.sqrt(np.sum(1.0 / odd**2)), rel=2e-3)
    tail = np.pi**2 / 8 - 1 - np.sum(1.0 / odd**2)
    assert np.sqrt(np.sum(np.abs(u[1:]) ** 2) / abs(u[0]) ** 2 + tail) == pytest.approx(0.483425847608679, rel=2e-3)
    assert abs(u[0]) == pytest.approx(4 / np.pi, rel=1e-3)


def limited_wave(q, excess):
    """U_n of the balanced wave, odd n up to 51, by division through H."""
    response = unit_tank(q, excess)
    wave = first(CLIP, excess)
    for most in (3, 7, 15, 31, 51):
        wave = balance(CLIP, response, wave.widened(orders_up_to(most, odd=True, mean=False)), np.zeros(1), 65536)
    assert wave.converged[0]
    return wave.x[0] / response.at(1j * np.exp(wave.shift)[:, None] * wave.orders)[0]


@pytest.mark.parametrize("epsilon", [0.1, 0.2, 0.4])
def test_van_der_pol(epsilon):
    """v'' − ε(1 − v²)v' + v = 0 runs at ω = 1 − ε²/16 + 17 ε⁴/3072 + O(ε⁶) with an amplitude of 2 + O(ε²)
    (Andersen & Geer, SIAM J. Appl. Math. 42 (1982) 678, from memory).

    Written as v'' + ε v' + v = 2ε (v − v³/6)': a tank of Q = 1/ε with an excess gain of 2.
    """
    cubic = Limiter("cubic", lambda x, skew: (x - x**3 / 6, 1 - x**2 / 2), odd=True)
    start = Wave(np.zeros(1), np.array([[1.8 + 0j]]), np.array([1]), np.ones(1, dtype=bool))
    for most in (1, 3, 7, 15, 31):
        orders = orders_up_to(most, odd=True, mean=False)
        start = balance(cubic, unit_tank(1 / epsilon, 2.0), start.widened(orders), np.zeros(1), 256)
    assert start.converged[0]
    series = 1 - epsilon**2 / 16 + 17 * epsilon**4 / 3072
    assert np.exp(start.shift[0]) == pytest.approx(series, abs=0.01 * epsilon**6 + 1e-9)
    assert abs(start.x[0, 0]) == pytest.approx(2.0, abs=epsilon**2 / 20)


def test_limiters_have_the_slopes_they_state():
    """Derivatives by central differences; a clipped sample has none."""
    x = np.array([[-3.0, -0.9, -0.2, 0.0, 0.4, 0.95, 2.5]])
    step = 1e-6
    for limiter in (CLIP, TANH):
        _, slope = limiter.respond(x, np.zeros((1, 1)))
        up, _ = limiter.respond(x + step, np.zeros((1, 1)))
        down, _ = limiter.respond(x - step, np.zeros((1, 1)))
        np.testing.assert_allclose(slope, (up - down) / (2 * step), atol=1e-9)
    y, _ = EXP.respond(x, np.zeros((1, 1)))
    np.testing.assert_allclose(y, np.exp(x) / np.mean(np.exp(x)), rtol=1e-14)
