"""Difference, determinism, placeholders, intervals of an upgrade run."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from yieldosc.studies.estimates import clopper_pearson, tango, yield_estimate
from yieldosc.studies.upgrade.moved import best_known, moved_yield
from yieldosc.studies.upgrade.upgrade import upgrade

TOLERANCES = {"R1": 0.04, "R2": 0.05, "C1": 0.08, "C2": 0.06}
WEIGHTS = dict.fromkeys(TOLERANCES, -0.5)


@pytest.fixture
def plain(linear):
    return linear(tolerances=TOLERANCES, weights=WEIGHTS, yield_target=0.9)


def test_no_number_of_workers_changes_a_digit(plain):
    study, evaluator = plain
    one, two = (upgrade(study, units=4096, workers=w, evaluator=evaluator) for w in (1, 2))
    assert replace(one, provenance=two.provenance) == two
    assert upgrade(study, units=4096, workers=1, seed=2, evaluator=evaluator).current != one.current


def test_differences_are_those_of_the_same_units(plain):
    """A tighter grade of every part, on the same draws: its difference has a narrower interval than two counts apart."""
    study, evaluator = plain
    r = upgrade(study, units=8192, workers=1, evaluator=evaluator)
    for option in r.singles:
        assert option.difference.units == r.units
        apart = 2 * 1.96 * np.sqrt(2 * 0.25 / r.units)
        assert option.difference.high - option.difference.low < apart
        assert option.difference.low <= option.difference.estimate <= option.difference.high
    base = [o for o in r.singles if o.changes[0].part == "C1"]
    tight = {o.changes[0].tolerance: o.difference.estimate for o in base}
    assert set(tight) == {"±2 %", "±5 %", "±10 %"}  # one looser, two tighter grades of the ladder
    assert tight["±2 %"] > tight["±5 %"] > 0 > tight["±10 %"]


def test_placeholders_where_a_price_is_missing(plain):
    study, evaluator = plain
    r = upgrade(replace(study, prices={"R1": 0.1}), units=2048, workers=1, evaluator=evaluator)
    assert not r.money
    assert r.parts_price is None
    assert {o.price_change for o in r.options} == {None}
    assert {o.cost_per_good_unit for o in r.options} == {None}
    assert [f.text for f in r.findings if f.code == "placeholder-prices"] == [
        "no price for R2; C1; C2: sets are ordered by relative prices, which are placeholders; give prices in the BOM "
        "(price of one part) or in Grades"
    ]


def test_money_where_every_price_is_known(plain):
    study, evaluator = plain
    r = upgrade(replace(study, prices=dict.fromkeys(TOLERANCES, 0.5)), units=2048, workers=1, evaluator=evaluator)
    assert r.money
    assert r.parts_price == 2.0
    assert not any(f.code == "placeholder-prices" for f in r.findings)
    # ladder factors from memory: capacitors 5 % at 1.3, 2 % at 2.5; C1 declared ±8 %, between 10 % (1.1) and 5 % (1.3)
    option = next(o for o in r.singles if o.changes[0].text == "C1 ±8 % → ±2 %")
    declared = 1.3 * (1.1 / 1.3) ** (np.log(0.08 / 0.05) / np.log(0.1 / 0.05))
    assert option.price_change == pytest.approx(0.5 * (2.5 / declared - 1), rel=1e-9)


def test_without_a_target_nothing_is_chosen(linear):
    study, evaluator = linear(tolerances=TOLERANCES, weights=WEIGHTS, yield_target=None)
    r = upgrade(study, units=2048, workers=1, evaluator=evaluator)
    assert (r.chosen, r.sets, r.search) == (None, (), None)
    assert [f.text for f in r.findings if f.code == "no-yield-target"] == [
        "no yield target in Design: grades are compared, but no set can be chosen; give the yield wanted"
    ]


def test_no_part_with_a_tolerance_has_no_other_grade(linear):
    study, evaluator = linear(tolerances={}, weights=WEIGHTS, yield_target=0.9)
    r = upgrade(study, units=2048, workers=1, evaluator=evaluator)
    assert r.singles == ()
    assert [f.text for f in r.findings if f.code == "no-other-grade"] == [
        "no part has another grade: the built-in ladders know resistors, capacitors, inductors and crystals with a "
        "tolerance; the sheet Grades can name others"
    ]


def test_a_declared_trim_is_said_to_be_left_out(linear):
    study, evaluator = linear(
        tolerances=TOLERANCES, weights=WEIGHTS, yield_target=0.9, trim_role="R1", trim_low=9e3, trim_high=11e3
    )  # fmt: skip
    r = upgrade(study, units=2048, workers=1, evaluator=evaluator)
    assert [f.text for f in r.findings if f.code == "trim-not-applied"] == [
        "boards are judged as they are assembled, without the trim of R1: `limits` shows what the trim does"
    ]


def test_the_choice_is_confirmed_on_units_that_did_not_choose_it(plain):
    study, evaluator = plain
    r = upgrade(study, units=8192, workers=1, evaluator=evaluator)
    assert r.chosen.confirmed.units == r.confirm_units == 8192
    assert r.chosen.confirmed.failures != r.chosen.yield_.failures  # other draws
    assert r.chosen.confirmed.low >= study.design.yield_target
    assert len(r.sets) <= 3


@pytest.mark.parametrize(("better", "worse"), [(0.06, 0.01), (0.0, 0.03)])
def test_a_moved_yield_covers(better, worse):
    """The declared yield counted on 16,384 units, moved by a difference on the first 2,048 of them: 95 % at least."""
    random = np.random.default_rng(4)
    truth, held = 0.8 + better - worse, 0
    for _ in range(400):
        u = random.random(16_384)
        good = u < 0.8
        then = (u[:2048] < 0.8 - worse) | ((u[:2048] >= 1 - better) & (u[:2048] >= 0.8))
        gained, lost = int((then & ~good[:2048]).sum()), int((good[:2048] & ~then).sum())
        found = moved_yield(yield_estimate(int((~good).sum()), 16_384), tango(gained, lost, 2048))
        held += found.low <= truth <= found.high
    assert held / 400 >= 0.93


def test_the_better_known_of_two_is_taken():
    narrow, wide = clopper_pearson(500, 1000), clopper_pearson(5, 10)
    none = tango(0, 0, 1000)
    assert best_known(narrow, none, wide).estimate == narrow.estimate
    assert best_known(wide, none, narrow) == narrow
