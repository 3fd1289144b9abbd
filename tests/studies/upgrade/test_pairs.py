"""Where no single part helps: the pair is found, and where nothing helps, that is said."""

from __future__ import annotations

from dataclasses import replace

import pytest

from yieldosc.parts.shapes import Hollow
from yieldosc.reports.upgrade_words import upgrade_page
from yieldosc.studies.upgrade.upgrade import upgrade

NAMES = ("R1", "R2", "C1", "C2")
WIDE = {"R1": 0.1, "C1": 0.1, "R2": 0.001, "C2": 0.001}
PRICES = dict.fromkeys(NAMES, 1.0)


def sentences(r, key="steps"):
    return next(s.sentences for s in upgrade_page(r).sections if s.key == key)


@pytest.fixture
def two_doors(linear, grade):
    """R1 decides at 25 °C, C1 at 60 °C; sorted ±10 % parts (nothing within ±4 %) never meet ±1 %, ±1 % ones always do.

    Neither part alone gains a single unit; both together pass every unit.
    """

    def made(**changes):
        rows = [grade(role, t, price=1.0 + p) for role in ("R1", "C1", "R2") for t, p in ((0.05, 0.2), (0.009, 0.5))]
        return linear(
            tolerances=WIDE, shape=Hollow(0.4), grades=rows, prices=PRICES,
            weights={"R1": 1.0, "R2": 0.01}, hot_weights={"C1": 1.0, "C2": 0.01},
            **{"yield_target": 0.95, "temperature_low_c": 25.0, "temperature_high_c": 60.0, "temperature_points": 2}
            | changes,
        )  # fmt: skip

    return made


def test_a_pair_is_found_though_each_part_alone_gains_nothing(two_doors):
    study, evaluator = two_doors()
    r = upgrade(study, units=4096, workers=1, evaluator=evaluator)
    assert r.current.estimate == 0
    assert all(o.yield_.estimate == 0 for o in r.singles)
    assert {(c.part, c.tolerance) for c in r.chosen.changes} == {("R1", "±0.9 %"), ("C1", "±0.9 %")}
    assert r.chosen.confirmed.failures == 0
    first = sentences(r)[0]
    assert first.startswith("Buy ")
    assert first.endswith(" No single part reaches the target; these do together.")


def test_half_a_pair_is_enough_where_half_the_trouble_is_left(two_doors):
    """Negative control: with a good C1 the search buys R1 alone and says nothing of pairs."""
    study, evaluator = two_doors()
    parameters = tuple(
        replace(p, low=p.typical * 0.995, high=p.typical * 1.005) if p.role == "C1" else p for p in study.parameters
    )
    r = upgrade(replace(study, parameters=parameters), units=4096, workers=1, evaluator=evaluator)
    assert [(c.part, c.tolerance) for c in r.chosen.changes] == [("R1", "±0.9 %")]
    assert sentences(r)[0] == "Buy R1 with ±0.9 % in place of ±10 %."


def test_no_purchase_reaches_the_target(linear, grade):
    study, evaluator = linear(
        tolerances={"R1": 0.01, "R2": 0.01}, weights={"R1": 1.0, "R2": 1.0}, off=0.02, prices=PRICES,
        grades=[grade("R1", 0.001, price=2.0), grade("R2", 0.001, price=2.0)], yield_target=0.9,
    )  # fmt: skip
    r = upgrade(study, units=4096, workers=1, evaluator=evaluator)
    assert r.chosen is None
    assert r.sets == ()
    assert r.search.exhausted
    page = upgrade_page(r)
    assert page.words == "NO PURCHASE REACHES THE TARGET"
    assert page.headline == "No set of the grades offered reaches the yield target of 90 %."
    assert sentences(r)[0] == (
        "Change the limit, the circuit or its nominal values, or trim each board: no purchase reaches the target."
    )
