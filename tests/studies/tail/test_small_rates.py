"""Small rates against closed forms; 20 % is the acceptance width of the method, seven times its own sd."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import ndtr

from yieldosc.studies.tail import small_rate

SEEDS = (1,)


def gain_stage(K: float):
    """1 + RF/RG − 3, RF = (K − 1) RG nominal, both ±1 % as three standard deviations, not cut."""
    return lambda z: (K - 1) * (1 + 0.01 / 3 * z[:, 0]) - 2 * (1 + 0.01 / 3 * z[:, 1])


def wien(limit: float, high: bool):
    """1/√(R1 R2 C1 C2) of R ±1 %, C ±2 %, uniform, against 1 + limit."""

    def g(z):
        r, c = 1 + 0.01 * (2 * ndtr(z[:, :2]) - 1), 1 + 0.02 * (2 * ndtr(z[:, 2:]) - 1)
        f = 1 / np.sqrt(r.prod(axis=1) * c.prod(axis=1))
        return (1 + limit) - f if high else f - (1 + limit)

    return g


def box_corner(sides: int):
    """Σ of the distances from the corner below the edge s: P = s^d/d!, here 1e-9 (Dirichlet simplex)."""
    edge = (1e-9 * float(np.prod(np.arange(1, sides + 1)))) ** (1 / sides)
    return lambda z: np.log(ndtr(-z[:, :sides]).sum(axis=1) / edge)


def four_branch(z):
    """Schöbi, Sudret & Marelli 2017, k = 6."""
    a, b = z[:, 0], z[:, 1]
    bow, side = 3 + 0.1 * (a - b) ** 2, (a + b) / np.sqrt(2)
    return np.min([bow - side, bow + side, a - b + 6 / np.sqrt(2), b - a + 6 / np.sqrt(2)], axis=0)


CASES = {
    "gain stage 3.02": (gain_stage(3.02), 2, 1.740e-2),  # closed form: Φ(−(K−3)/√(((K−1)·0.01/3)² + (2·0.01/3)²))
    "gain stage 3.05": (gain_stage(3.05), 2, 8.141e-8),
    "Wien high": (wien(0.03, True), 4, 2.28021e-7),  # volume of a piece of the box by quadrature
    "Wien low": (wien(-0.0292, False), 4, 2.15412e-10),
    "corner of 2": (box_corner(2), 2, 1e-9),
    "corner of 5, 36 idle": (box_corner(5), 41, 1e-9),
    "four branches": (four_branch, 2, 4.457331491e-3),  # Echard, Gayton & Lemaire 2011, exact by quadrature
    "ten normals": (lambda z: 5 * np.sqrt(10) - z.sum(axis=1), 10, 2.866516e-7),  # Φ(−5)
}


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("case", CASES)
def test_within_a_fifth_of_the_exact_rate(case, seed):
    g, dimension, exact = CASES[case]
    found = small_rate(g, dimension, seed=seed, name=case)
    assert not found.bounded
    assert abs(found.probability / exact - 1) < 0.2
    assert found.low < found.probability < found.high


def test_a_seed_fixes_every_digit():
    assert small_rate(gain_stage(3.05), 2, seed=4, name="a") == small_rate(gain_stage(3.05), 2, seed=4, name="a")
    assert small_rate(gain_stage(3.05), 2, seed=4, name="a") != small_rate(gain_stage(3.05), 2, seed=5, name="a")


def test_a_mode_that_cannot_fail_is_bounded_not_estimated():
    found = small_rate(wien(-0.03, False), 4, seed=1, name="low", floor=1e-12)
    assert found.bounded
    assert found.low == 0
    assert found.high < 1e-11


def test_active_inputs_are_found_and_most_idle_ones_left_standard_normal():
    found = small_rate(box_corner(5), 41, seed=1, name="idle")
    assert {0, 1, 2, 3, 4} <= set(found.active)
    assert len(found.active) <= 5 + 36 // 4


def test_a_nan_of_the_limit_state_is_refused():
    with pytest.raises(ValueError) as caught:
        small_rate(lambda z: z[:, 0] * np.nan, 2, seed=1, name="nan")
    assert str(caught.value) == (
        "The limit state gave a value that is not a number; it must be finite wherever a unit exists."
    )
