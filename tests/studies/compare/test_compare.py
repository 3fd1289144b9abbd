"""Two studies on the same draws: nothing where nothing changed, exactly the change where one thing did."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from yieldosc.parts.laws import parse_law
from yieldosc.parts.shapes import Measured
from yieldosc.parts.table_law import TableLaw
from yieldosc.reports.compare_words import compare_page
from yieldosc.studies.compare.compare import compare
from yieldosc.studies.compare.differences import differences

UNITS = 16_384


@pytest.fixture
def run(ideal_wien):
    def ran(before, after, units=UNITS, **settings):
        solvers = (ideal_wien(), ideal_wien())
        return compare(before, after, units=units, evaluators=solvers, **{"workers": 1} | settings)

    return ran


def changed(study, role, **fields):
    return replace(study, parameters=tuple(replace(p, **fields) if p.role == role else p for p in study.parameters))


def tightened(study, role, fraction):
    p = study.parameter(role)
    return changed(study, role, low=p.typical * (1 - fraction), high=p.typical * (1 + fraction))


def said(found):
    return [(d.group, d.name, d.before, d.after) for d in found]


def test_the_same_study_differs_in_nothing(make_study, run):
    study = make_study()
    r = run(study, study)
    assert r.differences == ()
    assert r.steps == ()
    assert all(c.difference.estimate == 0 and c.before == c.after for c in r.rates)
    assert [(f.level, f.text) for f in r.findings] == [
        ("note", "the two studies say the same in everything that a yield depends on")
    ]
    page = compare_page(r)
    assert page.words == "NO DIFFERENCE SHOWN"
    assert page.headline == "The studies say the same in everything that counts."


def test_one_tolerance_is_one_difference_and_the_exact_gain(make_study, run):
    """P(both capacitors within what ±3 % allows), by the study's own formula on draws of numpy's own."""
    before = make_study(r=0.0, c=0.05)
    after = tightened(tightened(before, "C1", 0.01), "C2", 0.01)
    r = run(before, after)
    assert said(r.differences) == [
        ("part", "C1 tolerance", "±5 %", "±1 %"), ("part", "C2 tolerance", "±5 %", "±1 %"),
    ]  # fmt: skip
    c1, c2 = 1 + 0.05 * (2 * np.random.default_rng(1).random((2, 1_000_000)) - 1)
    inside = float((np.abs(1 / np.sqrt(c1 * c2) - 1) <= 0.03).mean())
    change = r.rates[0]
    assert change.name == "yield"
    sd = math.sqrt(inside * (1 - inside) * (1 / UNITS + 1e-6))
    assert change.before.estimate == pytest.approx(inside, abs=3.5 * sd)
    assert change.after.failures == 0
    assert change.difference.estimate == pytest.approx(1 - inside, abs=3.5 * sd)


def test_a_change_that_does_everything_is_the_whole_of_it(make_study, run):
    """C1 and RF changed; RF moves neither frequency nor the start here: C1's step equals the total."""
    before = make_study(r=0.01, c=0.05, gain=5.0)
    after = tightened(tightened(before, "C1", 0.01), "RF", 0.01)
    r = run(before, after)
    steps = {s.name: s.difference for s in r.steps}
    assert steps["C1"] == r.rates[0].difference
    assert steps["RF"].estimate == 0
    assert list(steps) == ["C1", "RF"]  # largest first
    assert meaning_of(r)[-1].startswith("C1 does most of it: +")


def meaning_of(r):
    return next(s.sentences for s in compare_page(r).sections if s.key == "meaning")


def test_changes_that_act_on_each_other_are_said_to(make_study, run):
    """Both rows tight pass every board; each alone leaves the other's spread: the whole is more than the sum."""
    before = make_study(r=0.05, c=0.05, gain=5.0)
    after = make_study(r=0.01, c=0.01, gain=5.0)
    r = run(before, after)
    alone = sum(s.difference.estimate for s in r.steps)
    assert r.together == r.rates[0].difference  # as many units for the steps as for the whole here
    assert meaning_of(r)[-1] == (
        f"The changes do not add up: {alone * 100:+.2f} points one by one, {r.together.estimate * 100:+.2f} together on "
        "the same units; they act on each other."
    )


def test_steps_on_fewer_units_than_the_whole_are_not_called_interplay(make_study, run):
    """The first 16,384 units and all 32,768 do not fail equally often: that is chance, not one change on another."""
    before = make_study(r=0.01, c=0.05, gain=5.0)
    after = tightened(tightened(before, "C1", 0.01), "RF", 0.01)
    r = run(before, after, units=2 * UNITS)
    assert r.step_units == UNITS
    assert r.together.estimate == pytest.approx(sum(s.difference.estimate for s in r.steps), abs=1e-12)
    assert not any("add up" in sentence for sentence in meaning_of(r))


def test_a_single_change_needs_no_steps(make_study, run):
    before = make_study()
    assert run(before, tightened(before, "C1", 0.02), units=2048).steps == ()


def test_the_difference_is_taken_on_the_same_units(make_study, run):
    """Gained and lost are counts of single units: (after − before) of the counts is their difference."""
    before = make_study(c=0.05)
    r = run(before, tightened(before, "C1", 0.02), units=4096)
    change = r.rates[0]
    assert change.difference.estimate == pytest.approx((change.before.failures - change.after.failures) / 4096, abs=1e-12)
    # two counts apart would give ± 1.96 √(p q/n + p q/n); the same units give less
    apart = 1.96 * math.sqrt(sum(e.estimate * (1 - e.estimate) for e in (change.before, change.after)) / 4096)
    assert change.difference.high - change.difference.low < 2 * apart


def test_the_other_way_round_is_the_opposite(make_study, run):
    before = make_study(c=0.05)
    after = tightened(before, "C1", 0.01)
    there, back = run(before, after, units=4096), run(after, before, units=4096)
    assert back.rates[0].difference.estimate == -there.rates[0].difference.estimate
    assert back.rates[0].difference.low == pytest.approx(-there.rates[0].difference.high, abs=1e-9)
    assert compare_page(there).words == "THE SECOND STUDY YIELDS MORE"
    assert compare_page(back).words == "THE SECOND STUDY YIELDS LESS"


def test_no_number_of_workers_changes_a_digit(make_study, run):
    before = make_study(c=0.05)
    after = tightened(tightened(before, "C1", 0.01), "R1", 0.005)
    one, two = (run(before, after, workers=w) for w in (1, 2))
    assert replace(one, provenance=two.provenance) == two


def test_limits_and_conditions_are_one_step_of_their_own(make_study, run):
    before = make_study(c=0.05)
    after = tightened(make_study(c=0.05, window=0.02, yield_target=0.9), "C1", 0.01)
    r = run(before, after)
    assert {"C1", "limits and conditions"} == {s.name for s in r.steps}
    assert [n for g, n, _, _ in said(r.differences) if g == "limit"] == [
        "frequency limit low", "frequency limit high", "yield target",
    ]  # fmt: skip
    assert compare_page(r).headline == "1 part and 3 limits said differently."


def test_every_rate_that_either_shows_is_compared(make_study, run):
    before = make_study(c=0.05, gain=3.1)  # some boards do not start
    after = make_study(c=0.05, gain=3.5)
    names = [c.name for c in run(before, after, units=4096).rates]
    assert names == ["yield", "no_start", "out_of_limits"]


def test_what_parts_and_assumptions_can_say(make_study):
    a = make_study()
    b = changed(
        changed(a, "R1", typical=11e3, nominal=11e3, low=10.89e3, high=11.11e3, law=parse_law("±50 ppm/K"), solder=(-0.001, 0.001)),
        "C1", drift=(-0.002, 0.01), pedigree="assumed", part="C7",
    )  # fmt: skip
    assert said(differences(a, b)) == [
        ("part", "R1 value", "10 kΩ", "11 kΩ"),
        ("part", "R1 temperature law", "—", "±50 ppm/K"),
        ("part", "R1 solder", "—", "±0.1 %"),
        ("part", "C1 part", "C1", "C7"),
        ("part", "C1 drift", "—", "+1/-0.2 %"),
        ("assumption", "C1 source", "guaranteed", "assumed"),
    ]


def test_a_role_of_one_study_only(make_study, make_part):
    a = make_study()
    b = make_study(extra=(make_part("GBW", 1e6, 0.4),))
    assert said(differences(a, b)) == [("part", "GBW", "—", "1 MHz, ±40 %")]
    assert said(differences(b, a)) == [("part", "GBW", "1 MHz, ±40 %", "—")]


def test_tables_and_measured_lots_of_one_name_are_told_apart(make_study):
    def table(end):
        return TableLaw((-40.0, 25.0, 85.0), (0.0, 0.0, end), "table NTC")

    a = changed(changed(make_study(), "R1", law=table(0.01)), "C1", shape=Measured((9.9e-9, 10.1e-9)))
    b = changed(changed(make_study(), "R1", law=table(0.02)), "C1", shape=Measured((9.8e-9, 10.2e-9)))
    assert said(differences(a, a)) == []
    assert said(differences(a, b)) == [
        ("part", "R1 temperature law", "table NTC", "table NTC, other values"),
        ("assumption", "C1 shape", "measured", "measured, other values"),
    ]


def test_a_nominal_that_moves_by_a_few_ppm_is_seen(make_study):
    a = make_study()
    b = changed(a, "R1", typical=10e3 * (1 + 2e-6))
    assert said(differences(a, b))[0] == ("part", "R1 value", "10 kΩ", "10.00002 kΩ")


def test_what_the_factory_does_is_compared_too(make_study):
    a = make_study(measurement_sd_hz=0.5, test_temperature_c=25.0, trim_role="R1", trim_low=9e3, trim_high=11e3)
    b = make_study(
        measurement_sd_hz=1.5, test_temperature_c=20.0, trim_role="R1", trim_low=9e3, trim_high=11e3, trim_step=50.0,
        failed_unit_cost=12.5, build_quantity=1000.0,
    )  # fmt: skip
    assert said(differences(a, b)) == [
        ("condition", "trim step", "—", "50"),
        ("condition", "test temperature", "25 °C", "20 °C"),
        ("condition", "measurement sd", "500 mHz", "1.5 Hz"),
        ("condition", "build quantity", "—", "1000"),
        ("condition", "cost of a failed unit", "—", "12.5"),
    ]


def test_digests_that_differ_in_what_moves_no_yield(make_study, run):
    a = make_study()
    r = run(a, replace(a, digest="1" * 64), units=1024)
    assert [f.text for f in r.findings] == [
        "the digests differ, but in nothing that moves a yield: prices, grades, alternates, pilot boards or which parts "
        "share a reel"
    ]


def test_confidences_that_differ_are_said(make_study, run):
    r = run(make_study(), make_study(confidence=0.99), units=1024)
    assert [f.text for f in r.findings] == ["all intervals at the first study's 0.95"]
    assert said(r.differences) == [("condition", "confidence", "0.95", "0.99")]
