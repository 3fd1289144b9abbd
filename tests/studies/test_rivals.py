"""Rival sets: only those that differ, on the same units, with the known effects."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from yieldosc.parts.shapes import Fixed, Split, Uniform
from yieldosc.studies.nominal import reference_corner, slopes
from yieldosc.studies.parallel import Workers
from yieldosc.studies.rivals import paired_difference, rival_sets, rivals
from yieldosc.studies.run import Setup

UNITS = 20_480


def tried(study, evaluator, *, seed=1, workers=None):
    setup = Setup.of(study, evaluator, seed=seed)
    leaning = slopes(setup.population, setup.bench, reference_corner(study))
    return {r.name: r for r in rivals(setup, leaning, units=UNITS, workers=workers)[0]}


def names(study, leaning=None):
    single, patterns = rival_sets(study.parameters, leaning or {})
    return [r.name for r in single], [r.name for r in patterns]


def test_only_sets_that_differ_are_tried(make_study):
    single, patterns = names(make_study())
    assert single == ["all normal", "same reel", "hollow", "hollow, same reel"]
    assert patterns == [
        "one-sided lots: R1/R2 low, C1/C2 low",
        "one-sided lots: R1/R2 low, C1/C2 high",
        "one-sided lots: R1/R2 high, C1/C2 low",
        "one-sided lots: R1/R2 high, C1/C2 high",
    ]
    single, _ = names(make_study(share=1.0))
    assert single == ["all normal", "independent", "hollow", "hollow, same reel"]


def test_nothing_to_vary_leaves_nothing_to_try(make_study):
    assert names(make_study(r=0.0, c=0.0)) == ([], [])


def test_known_yields_of_the_bridge(make_study, ideal_wien):
    # Share outside ±3 %: uniform 16.678 %, same reel 39.9 %, normal cut at 3 sd 1.07 %; four standard errors allowed
    found = tried(make_study(gain=4.0), ideal_wien())
    for name, outside in (("declared", 0.16678), ("same reel", 0.399), ("all normal", 0.0107)):
        error = np.sqrt(outside * (1 - outside) / UNITS)
        assert 1 - found[name].yield_.estimate == pytest.approx(outside, abs=4 * error)
    assert found["declared"].difference is None
    assert found["same reel"].difference.high < -0.2
    assert found["all normal"].difference.low > 0.1


def test_one_sided_lots_move_the_frequency(make_study, ideal_wien):
    # Resistors and capacitors all in their low halves: frequencies from 0 to +6.3 %, all in the high: 0 to −5.7 %
    found = tried(make_study(gain=4.0), ideal_wien())
    low = found["one-sided lots: R1/R2 low, C1/C2 low"].yield_.estimate
    mixed = found["one-sided lots: R1/R2 high, C1/C2 low"].yield_.estimate
    assert low < found["declared"].yield_.estimate
    assert low < mixed


def test_a_squeezed_tolerance_keeps_its_shape_in_half_the_room(make_study):
    _, patterns = rival_sets(make_study().parameters, {})
    c1 = next(p for r, p in [(r, p) for r in patterns for p in r.parameters] if p.role == "C1" and p.high == p.nominal)
    assert (c1.low, c1.typical, c1.high) == pytest.approx((9.5e-9, 9.75e-9, 10e-9))


def test_more_reels_than_patterns_are_leaned_by_gradient(make_study, ideal_wien):
    def apart(p):
        return replace(p, reel=None)

    study = make_study(gain=3.2, rf=0.01, change=apart)
    seven = replace(study, parameters=(*study.parameters, replace(study.parameter("RG"), role="RO", part="RO")))
    leaning = {"R1": (-0.5, -0.3), "R2": (-0.5, 0.3), "C1": (-0.5, 0.3), "C2": (-0.5, -0.3), "RF": (0.0, 0.7)}
    _, patterns = names(seven, leaning)
    assert patterns == [f"one-sided lots, {o} {d}" for o in ("frequency", "margin") for d in ("low", "high")]
    _, made = rival_sets(seven.parameters, leaning)
    low_margin = {p.role: p.high < 1.001 * p.nominal for p in made[2].parameters}
    assert low_margin["RF"] and low_margin["R2"] and low_margin["C1"]
    assert not low_margin["R1"] and not low_margin["C2"]


def test_many_patterns_are_screened_to_the_lowest_and_the_highest(make_study, ideal_wien):
    study = make_study(gain=3.1, rf=0.01)  # four reels: sixteen patterns
    found = [name for name in tried(study, ideal_wien(), workers=Workers(2)) if name.startswith("one-sided")]
    assert len(found) == 4


def test_weak_half_of_min_typ_max(make_study, ideal_wien):
    # Half the units flat below the typical gain: the weak half is all of them there.
    def loose_gain(p):
        if p.role != "RF":
            return replace(p, shape=Fixed(), low=p.typical, high=p.typical)
        return replace(p, shape=Split(), low=0.9 * p.typical, high=1.1 * p.typical)

    study = make_study(gain=3.0 * 1.02, change=loose_gain)
    found = tried(study, ideal_wien())
    # K = 1 + 2.06·x starts from x = 2/2.06 on; x flat in 0.9 … 1.1, or in 0.9 … 1
    least = 2 / 2.06
    for name, share in (("declared", (1.1 - least) / 0.2), ("weak half", (1 - least) / 0.1)):
        assert found[name].yield_.estimate == pytest.approx(share, abs=4 * np.sqrt(share * (1 - share) / UNITS))


def test_rivals_share_the_declared_draws(make_study, ideal_wien):
    def fixed_resistors(p):
        return replace(p, shape=Fixed(), low=p.typical, high=p.typical) if p.kind == "resistor" else p

    setup = Setup.of(make_study(), ideal_wien(), seed=1)
    other = replace(setup, population=setup.population.with_parameters(make_study(change=fixed_resistors).parameters))
    corner = setup.corners[0]
    assert np.array_equal(setup.block(0, 100).values(corner)["C1"], other.block(0, 100).values(corner)["C1"])


def test_paired_difference_counts_only_units_that_change():
    declared = np.array([True] * 90 + [False] * 10)
    changed = np.array([True] * 85 + [False] * 5 + [True] * 8 + [False] * 2)
    found = paired_difference(changed, declared, 0.95)
    assert found.estimate == pytest.approx(0.03)
    assert found.low < 0.03 < found.high


def test_the_uniform_rival_replaces_every_other_shape(make_study):
    study = make_study(change=lambda p: replace(p, shape=Split()) if p.high > p.low else p)
    single, _ = rival_sets(study.parameters, {})
    uniform = next(r for r in single if r.name == "all uniform")
    assert {type(p.shape) for p in uniform.parameters if p.high > p.low} == {Uniform}
