"""A law squeezed into one half: its range over all draws is that half, by the laws' own definitions."""

from __future__ import annotations

import numpy as np
import pytest

from yieldosc.parts.law_sides import one_sided
from yieldosc.parts.laws import parse_law

HOT_C = 85.0


def ends(law):
    grid = np.array([0.0, 1.0])
    u = {name: g.ravel() for name, g in zip(law.coefficients, np.meshgrid(*[grid] * len(law.coefficients)), strict=True)}
    change = law.change(HOT_C, u)
    return float(np.min(change)), float(np.max(change))


@pytest.mark.parametrize(
    ("text", "low", "high"),
    [
        ("±50 ppm/K", (-3e-3, 0.0), (0.0, 3e-3)),  # 60 K · 50 ppm/K
        ("-220 ±100 ppm/K", (-320e-6 * 60, -220e-6 * 60), (-220e-6 * 60, -120e-6 * 60)),
        ("C0G", (-1.8e-3, 0.0), (0.0, 1.8e-3)),
    ],
)
def test_linear(text, low, high):
    law = parse_law(text)
    assert ends(one_sided(law, -1)) == pytest.approx(low, abs=1e-15)
    assert ends(one_sided(law, 1)) == pytest.approx(high, abs=1e-15)


def test_quartz_keeps_within_and_splits_the_whole():
    for text in ("AT ±2 arcmin", "AT ±30 ppm -40..85 °C", "fork -0.035 ±0.009 ppm/K² 25 °C", "fork -0.035 ppm/K² 25 ±5 °C"):
        law = parse_law(text)
        low, high = one_sided(law, -1), one_sided(law, 1)
        whole = ends(law)
        assert min(ends(low)[0], ends(high)[0]) == pytest.approx(whole[0], rel=1e-12)
        assert max(ends(low)[1], ends(high)[1]) == pytest.approx(whole[1], rel=1e-12)
    at = parse_law("AT ±2 arcmin")
    assert one_sided(at, -1).angles == pytest.approx((-2 / 60, 0.0))


def test_class_2_has_a_lower_half_only():
    law = parse_law("X7R")
    assert ends(one_sided(law, -1)) == pytest.approx((-0.15 * (60 / 100) ** 2, 0.0))
    assert one_sided(law, 1) == law


def test_a_law_without_spread_stays():
    law = parse_law("+80 ppm/K")
    assert one_sided(law, -1) == one_sided(law, 1) == law
