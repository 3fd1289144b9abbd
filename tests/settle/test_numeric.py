"""The pieces of arithmetic under the balance: Fourier sums of clipped waves, block solutions, least squares."""

import numpy as np
import pytest

from yieldosc.settle.balance import orders_up_to, samples_for, spectrum
from yieldosc.settle.limiter import CLIP, TANH
from yieldosc.settle.linear import LARGEST_DIRECT, newton_step
from yieldosc.settle.regression import fit


def clipped_cosine(amplitude, orders):
    """Peak Fourier coefficients of a cosine clipped at ±1, integrated piece by piece.

    With cos a = 1/X: U_n = (4/π) [∫ over 0…a of cos nt + X ∫ over a…π/2 of cos t cos nt], n odd.
    """
    a = np.arccos(1 / amplitude)

    def both(n):  # ∫ cos t cos nt
        def primitive(t):
            low = t if n == 1 else np.sin((n - 1) * t) / (n - 1)
            return (low + np.sin((n + 1) * t) / (n + 1)) / 2

        return primitive(np.pi / 2) - primitive(a)

    return np.array([4 / np.pi * (np.sin(n * a) / n + amplitude * both(n)) for n in orders])


@pytest.mark.parametrize("amplitude", [1.02, 1.5, 4.0, 30.0])
def test_fourier_coefficients_of_a_clipped_cosine(amplitude):
    orders = np.array([1, 3, 5, 7, 9])
    points = samples_for(9, CLIP, np.array([amplitude]))
    u = spectrum(CLIP, np.array([[amplitude + 0j]]), np.array([1]), np.zeros(1), points, orders)[0]
    expected = clipped_cosine(amplitude, orders)
    np.testing.assert_allclose(u, expected, atol=1e-5)
    plain, _ = CLIP.respond(amplitude * np.cos(2 * np.pi * np.arange(points[0]) / points[0])[None, :], np.zeros((1, 1)))
    off = 2 * np.fft.rfft(plain[0], norm="forward")[orders] - expected
    assert np.max(np.abs(off)) > 2 * np.max(np.abs(u - expected))  # without the corners' share the sums are worse


def test_harder_driven_limiters_get_more_samples():
    points = samples_for(15, CLIP, np.array([1.1, 10.0, 100.0, 1e9]))
    assert list(points) == [256, 256, 2048, 65536]
    assert list(samples_for(15, TANH, np.array([1.0, 100.0]))) == [64, 1024]


@pytest.mark.parametrize(("most", "odd", "mean"), [(127, True, False), (63, False, True), (63, False, False), (15, True, False)])
def test_block_solution_solves_the_whole_system(most, odd, mean):
    orders = orders_up_to(most, odd=odd, mean=mean)
    size = 2 * len(orders) - (1 if mean else 0)
    rng = np.random.default_rng(1)
    jacobian = rng.normal(size=(3, size, size)) + 12 * np.eye(size)
    residual = rng.normal(size=(3, size))
    step = newton_step(jacobian, residual, orders)
    np.testing.assert_allclose(np.einsum("nij,nj->ni", jacobian, step), residual, atol=1e-9)
    assert (size > LARGEST_DIRECT) == (most > 15)


def test_a_singular_unit_spoils_no_other():
    orders = orders_up_to(3, odd=True, mean=False)
    jacobian = np.stack([np.eye(4), np.zeros((4, 4)), 2 * np.eye(4)])
    step = newton_step(jacobian, np.ones((3, 4)), orders)
    np.testing.assert_array_equal(step[0], 1.0)
    assert np.isnan(step[1]).all()
    np.testing.assert_array_equal(step[2], 0.5)


def test_least_squares_finds_a_polynomial_again_and_leaves_dependent_columns_out():
    rng = np.random.default_rng(2)
    level = rng.uniform(-1, 1, 300)
    first, second = rng.uniform(3, 5, 300), rng.uniform(-2, -1, 300)
    features = np.stack([first, second, first - 2 * second, np.full(300, 7.0)], axis=1)

    def truth(t, a, b):
        return np.stack([t**3 - 2 * a * t + 0.3 * a * b, np.exp(0.1 * t) + b * b], axis=1)

    made = fit(level, features, truth(level, first, second))
    new = rng.uniform(-1, 1, 50)
    a, b = rng.uniform(3.2, 4.8, 50), rng.uniform(-1.9, -1.1, 50)
    at = np.stack([a, b, a - 2 * b, np.full(50, 7.0)], axis=1)
    np.testing.assert_allclose(made.value(new, at), truth(new, a, b), atol=1e-9)
    assert made.holds(at).all()
    assert not made.holds(at + np.array([3.0, 0, 0, 0])).any()
    assert not made.holds(np.full((1, 4), np.nan)).any()
