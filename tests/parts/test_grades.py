"""The ladders of common grades, and what the next ones of a part are."""

from __future__ import annotations

from dataclasses import replace

import pytest

from yieldosc.parts.codes import e_series, series_between
from yieldosc.parts.grades import (
    CRYSTAL_LAWS,
    LADDERS,
    RESISTOR_LAWS,
    Grade,
    half_width,
    law_grades,
    looser_law,
    next_tighter,
    price_at,
    tolerance_text,
    with_law,
    with_tolerance,
)
from yieldosc.parts.laws import parse_law
from yieldosc.parts.parameter import Parameter
from yieldosc.parts.shapes import Uniform


def part(kind="capacitor", value=10e-9, low=-0.05, high=0.05, **changes):
    trait = {"capacitor": "C", "resistor": "R", "inductor": "L", "crystal": "FL"}[kind]
    made = Parameter(
        role=f"{trait}1", part=f"{trait}1", trait=trait, kind=kind, unit="1", nominal=value, typical=value,
        low=value * (1 + low), high=value * (1 + high), shape=Uniform(),
    )  # fmt: skip
    return replace(made, **changes)


@pytest.mark.parametrize("kind", sorted(LADDERS))
def test_a_better_grade_is_never_cheaper(kind):
    tolerances = [g.tolerance for g in LADDERS[kind]]
    prices = [g.price_factor for g in LADDERS[kind]]
    assert tolerances == sorted(tolerances, reverse=True)
    assert prices == sorted(prices)
    assert prices[0] == 1.0


def test_better_laws_are_never_cheaper():
    for ladder in ([(float(g.law.strip("± pm/K")), g.price_factor) for g in RESISTOR_LAWS], CRYSTAL_LAWS):
        assert [w for w, _ in ladder] == sorted((w for w, _ in ladder), reverse=True)
        assert [p for _, p in ladder] == sorted(p for _, p in ladder)


def test_prices_between_grades_lie_on_a_straight_line_of_logarithms():
    ladder = (Grade(0.1, 1.0), Grade(0.01, 4.0))
    assert price_at(0.1, ladder) == 1.0
    assert price_at(0.01, ladder) == 4.0
    assert price_at(0.1**1.5, ladder) == pytest.approx(2.0)  # half the decade, half the ratio
    assert price_at(0.001, ladder) == 4.0
    assert price_at(0.5, ladder) == 1.0


@pytest.mark.parametrize(
    ("kind", "now", "then"),
    [("capacitor", 0.05, 0.02), ("resistor", 0.01, 0.005), ("resistor", 0.03, 0.01), ("crystal", 20e-6, 10e-6)],
)
def test_the_next_tighter_grade(kind, now, then):
    better = next_tighter(part(kind, 1e4, -now, now))
    assert half_width(better) == pytest.approx(then)
    assert better.typical == 1e4


def test_no_grade_tighter_than_the_last_and_none_without_a_tolerance():
    assert next_tighter(part("capacitor", low=-0.01, high=0.01)) is None
    assert next_tighter(part(low=0.0, high=0.0)) is None
    assert next_tighter(part(trait="ESR")) is None


def test_an_uneven_tolerance_counts_by_its_larger_side():
    p = part(low=-0.2, high=0.8)
    assert half_width(p) == pytest.approx(0.8)
    assert tolerance_text(p) == "+80/−20 %"
    assert half_width(next_tighter(p)) == pytest.approx(0.2)


@pytest.mark.parametrize(
    ("low", "high", "text"),
    [(-0.05, 0.05, "±5 %"), (-20e-6, 20e-6, "±20 ppm"), (-0.001, 0.001, "±0.1 %"), (-0.03, 0.01, "+1/−3 %"), (0, 0, "fixed")],
)
def test_tolerances_as_people_write_them(low, high, text):
    assert tolerance_text(part(low=low, high=high)) == text


def test_other_bounds_keep_value_shape_and_law():
    p = part(law=parse_law("X7R"))
    better = with_tolerance(p, -0.01, 0.02)
    assert (better.low, better.high) == (pytest.approx(9.9e-9), pytest.approx(10.2e-9))
    assert replace(better, low=p.low, high=p.high) == p


def test_a_class_1_part_does_not_age():
    p = with_law(part(), parse_law("X7R"))
    assert p.ageing is not None
    assert with_law(p, parse_law("C0G")).ageing is None
    assert with_law(p, None).law is None


def test_resistor_laws_leave_the_present_one_out_and_cost_in_proportion_to_it():
    found = {law.text: factor for law, factor in law_grades(part("resistor", 1e4, law=parse_law("±100 ppm/K")))}
    assert set(found) == {"±200 ppm/K", "±50 ppm/K", "±25 ppm/K", "±10 ppm/K", "±5 ppm/K"}
    assert found["±50 ppm/K"] == pytest.approx(1.5 / 1.1)


def test_a_class_2_capacitor_can_be_class_1_up_to_100_nf():
    assert [law.text for law, _ in law_grades(part(value=100e-9, law=parse_law("X7R")))] == ["C0G"]
    assert law_grades(part(value=220e-9, law=parse_law("X7R"))) == ()
    assert law_grades(part(law=parse_law("C0G"))) == ()


def test_crystals_over_the_same_temperatures():
    laws = law_grades(part("crystal", 8e6, -20e-6, 20e-6, law=parse_law("AT ±30 ppm -40..85 °C")))
    assert {law.text for law, _ in laws} <= {f"AT ±{p} ppm -40..85 °C" for p, _ in CRYSTAL_LAWS} - {"AT ±30 ppm -40..85 °C"}
    assert all(law.range_c == (-40.0, 85.0) for law, _ in laws)


def test_what_is_looser():
    assert looser_law(parse_law("±200 ppm/K"), parse_law("±100 ppm/K"))
    assert not looser_law(parse_law("±50 ppm/K"), parse_law("±100 ppm/K"))
    wide, narrow = (parse_law(f"AT ±{p} ppm -40..85 °C") for p in (50, 20))
    assert looser_law(wide, narrow)
    assert not looser_law(narrow, wide)
    assert not looser_law(parse_law("C0G"), parse_law("X7R"))


# IEC 60063 (the lists of E12 and E24, from memory)
@pytest.mark.parametrize(
    ("count", "low", "high", "values"),
    [
        (12, 8.2e3, 15e3, (8.2e3, 10e3, 12e3, 15e3)),
        (24, 4.3e-12, 5.6e-12, (4.3e-12, 4.7e-12, 5.1e-12, 5.6e-12)),
        (6, 0.9, 10.0, (1.0, 1.5, 2.2, 3.3, 4.7, 6.8, 10.0)),
        (3, 5.0, 5e3, (10, 22, 47, 100, 220, 470, 1000, 2200, 4700)),
    ],
)
def test_series_between_two_values(count, low, high, values):
    assert series_between(count, low, high) == values


def test_a_range_without_a_value_is_refused():
    with pytest.raises(ValueError, match=r"^E12 has no value from 1\.01 to 1\.19$"):
        series_between(12, 1.01, 1.19)


def test_a_whole_decade_holds_the_whole_series():
    for count in (3, 6, 12, 24, 48, 96, 192):
        assert len(series_between(count, 1.0, 9.99)) == len(e_series(count)) == count
