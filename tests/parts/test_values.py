"""One parameter's value at corners, and grades."""

import numpy as np
import pytest

from yieldosc.parts.grades import next_tighter, tolerance_text
from yieldosc.parts.laws import parse_law
from yieldosc.parts.parameter import Ageing, Parameter
from yieldosc.parts.shapes import Uniform
from yieldosc.parts.values import HOURS_PER_YEAR, at_corner, initial_values, nominal_value, variables


def capacitor(**change):
    values = {
        "role": "C1", "part": "C1", "trait": "C", "kind": "capacitor", "unit": "F",
        "nominal": 1e-8, "low": 0.95e-8, "typical": 1e-8, "high": 1.05e-8, "shape": Uniform(),
    }  # fmt: skip
    return Parameter(**{**values, **change})


def test_factors_multiply():
    part = capacitor(law=parse_law("±50 ppm/K"), solder=(-0.01, 0.0), drift=(-0.02, 0.02))
    u = {"initial": np.array([1.0]), "law slope": np.array([1.0]), "solder": np.array([0.0]), "drift": np.array([1.0])}
    value = at_corner(part, initial_values(part, u), u, 85.0, 10.0)
    assert value == pytest.approx(1.05e-8 * (1 + 50e-6 * 60) * 0.99 * 1.02)
    assert at_corner(part, initial_values(part, u), u, 85.0, 0.0) == pytest.approx(1.05e-8 * 1.003 * 0.99)
    assert variables(part) == ("initial", "law slope", "solder", "drift")


def test_absolute_law_is_added_after_the_factors():
    law = parse_law("-2 mV/K", si_unit="V")
    part = capacitor(role="VBE", unit="V", nominal=0.65, low=0.6, typical=0.65, high=0.7, law=law)
    assert nominal_value(part, 65.0) == pytest.approx(0.65 - 0.08)


def test_class_2_ageing_over_ten_years():
    # 2.5 % per decade from 1000 h: 10 years of 8766 h are 1.943 decades (arithmetic of the stated law)
    part = capacitor(ageing=Ageing(0.025, 1000.0))
    assert nominal_value(part, 25.0, 10.0) == pytest.approx(1e-8 * (1 - 0.025 * np.log10(87.66)))
    assert nominal_value(part, 25.0, 0.0) == 1e-8


@pytest.mark.parametrize(
    ("per_decade", "reference_h", "hours", "loss"),
    # a maker's technical note on ceramic ageing (seen): X7R 1 h to 1000 h −7.5 %, Y5V −21 %; ten years of a 2.5 % part,
    # closed form: 4.9 % counted from 1000 h, 12.4 % counted from 1 h
    [(0.025, 1.0, 1000.0, 0.075), (0.07, 1.0, 1000.0, 0.21), (0.025, 1000.0, 87_660.0, 0.049),
     (0.025, 1.0, 87_660.0, 0.124)],
)  # fmt: skip
def test_published_ageing(per_decade, reference_h, hours, loss):
    part = capacitor(ageing=Ageing(per_decade, reference_h))
    found = 1 - nominal_value(part, 25.0, hours / HOURS_PER_YEAR) / 1e-8
    assert round(found, 3) == pytest.approx(loss)


def test_ageing_never_raises_a_value():
    part = capacitor(ageing=Ageing(0.025, 1000.0))
    assert nominal_value(part, 25.0, 0.01) == pytest.approx(1e-8)  # 88 h, before the reference


def test_a_cause_without_a_draw_stands_in_its_middle():
    part = capacitor(law=parse_law("-220 ±100 ppm/K"), solder=(-0.01, 0.0), drift=(-0.02, 0.02))
    assert nominal_value(part, 85.0, 10.0) == pytest.approx(1e-8 * (1 - 220e-6 * 60) * 0.995)
    half = {name: np.array([0.5]) for name in variables(part)}
    middle = at_corner(part, initial_values(part, half), half, 85.0, 10.0)
    assert middle == pytest.approx([nominal_value(part, 85.0, 10.0)])


def test_draws_are_not_changed():
    part = capacitor(law=parse_law("X7R"), solder=(-0.01, 0.01), drift=(-0.02, 0.02))
    u = {name: np.linspace(0.1, 0.9, 5) for name in variables(part)}
    before = {name: values.copy() for name, values in u.items()}
    start = initial_values(part, u)
    kept = start.copy()
    at_corner(part, start, u, 85.0, 10.0)
    assert np.array_equal(start, kept)
    assert all(np.array_equal(u[name], before[name]) for name in u)


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


@pytest.mark.parametrize(
    ("kind", "trait", "unit", "now", "expected"),
    [("resistor", "R", "Ω", 0.05, 0.01), ("resistor", "R", "Ω", 0.01, 0.005), ("capacitor", "C", "F", 0.2, 0.1),
     ("inductor", "L", "H", 0.1, 0.05), ("crystal", "FL", "Hz", 30e-6, 20e-6)],
)  # fmt: skip
def test_ladders_of_grades(kind, trait, unit, now, expected):
    # grades in common use, from memory
    part = capacitor(kind=kind, trait=trait, unit=unit, nominal=1.0, typical=1.0, low=1 - now, high=1 + now)
    tighter = next_tighter(part)
    assert (tighter.low, tighter.high) == pytest.approx((1 - expected, 1 + expected), rel=1e-12)
    assert (tighter.shape, tighter.typical) == (part.shape, 1.0)
