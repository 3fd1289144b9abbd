"""One parameter's value at corners, and grades."""

import numpy as np
import pytest

from yieldosc.parts.grades import next_tighter, tolerance_text
from yieldosc.parts.laws import parse_law
from yieldosc.parts.parameter import Ageing, Parameter
from yieldosc.parts.shapes import Uniform
from yieldosc.parts.values import at_corner, initial_values, nominal_value, variables


def capacitor(**change):
    values = dict(
        role="C1", part="C1", trait="C", kind="capacitor", unit="F", nominal=1e-8, low=0.95e-8, typical=1e-8,
        high=1.05e-8, shape=Uniform(),
    )  # fmt: skip
    return Parameter(**{**values, **change})


def test_factors_multiply():
    part = capacitor(law=parse_law("±50 ppm/K"), solder=(-0.01, 0.0), drift=(-0.02, 0.02))
    u = {"initial": np.array([1.0]), "law slope": np.array([1.0]), "solder": np.array([0.0]), "drift": np.array([1.0])}
    value = at_corner(part, initial_values(part, u), u, 85.0, 10.0)
    assert value == pytest.approx(1.05e-8 * (1 + 50e-6 * 60) * 0.99 * 1.02)
    assert at_corner(part, initial_values(part, u), u, 85.0, 0.0) == pytest.approx(1.05e-8 * 1.003 * 0.99)
    assert variables(part) == ("initial", "law slope", "solder", "drift")


def test_absolute_law_is_added_after_the_factors():
    part = capacitor(role="VBE", unit="V", nominal=0.65, low=0.6, typical=0.65, high=0.7, law=parse_law("-2 mV/K", si_unit="V"))
    assert nominal_value(part, 65.0) == pytest.approx(0.65 - 0.08)


def test_class_2_ageing_over_ten_years():
    # 2.5 % per decade from 1000 h: 10 years of 8766 h are 1.943 decades (arithmetic of the stated law)
    part = capacitor(ageing=Ageing(0.025, 1000.0))
    assert nominal_value(part, 25.0, 10.0) == pytest.approx(1e-8 * (1 - 0.025 * np.log10(87.66)))
    assert nominal_value(part, 25.0, 0.0) == 1e-8


def test_no_cause_no_array():
    part = capacitor(low=1e-8, high=1e-8)
    assert variables(part) == ()
    assert np.ndim(initial_values(part, {})) == 0


def test_next_tighter_grade_keeps_shape_and_centre():
    tighter = next_tighter(capacitor())
    assert (tighter.low, tighter.high) == pytest.approx((0.98e-8, 1.02e-8))
    assert tighter.typical == 1e-8
    assert next_tighter(capacitor(low=0.99e-8, high=1.01e-8)) is None
    assert next_tighter(capacitor(trait="Cob", kind="transistor")) is None


@pytest.mark.parametrize(
    ("low", "high", "text"),
    [(0.95e-8, 1.05e-8, "±5 %"), (0.8e-8, 1.8e-8, "+80/−20 %"), (1e-8 * (1 - 20e-6), 1e-8 * (1 + 20e-6), "±20 ppm"),
     (1e-8, 1e-8, "fixed")],
)  # fmt: skip
def test_tolerance_texts(low, high, text):
    assert tolerance_text(capacitor(low=low, high=high)) == text
