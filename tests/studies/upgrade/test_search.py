"""The order of sets, what may be set aside, and how sets are judged, on choices that need no circuit."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from yieldosc.studies.upgrade.purchases import Choice
from yieldosc.studies.upgrade.results import Change
from yieldosc.studies.upgrade.search import in_price_order, undominated

PRICES = st.lists(st.lists(st.integers(-5, 9), max_size=3), max_size=4)


class Money:
    """What the search asks of prices."""

    money = True

    @staticmethod
    def order(choice):
        return choice.price


def choice(name, price):
    change = Change(part=name, from_tolerance="±5 %", tolerance=f"±{price} %", from_law=None, temperature_law=None)
    return Choice(change=change, parameters={}, relative_price=price, price=price, looser=False)


@given(PRICES)
@settings(max_examples=200, deadline=None)
def test_every_set_comes_once_cheapest_first(lists):
    grades = [[choice(f"P{i}.{k}", float(p)) for k, p in enumerate(those)] for i, those in enumerate(lists)]
    found = list(in_price_order(grades, Money.order))
    wanted = [tuple(c for c in chosen if c is not None) for chosen in product(*([None, *those] for those in grades))]
    names = [frozenset(c.change.part for c in chosen) for _, chosen in found]
    assert len(names) == len(set(names)) == len(wanted)
    assert set(names) == {frozenset(c.change.part for c in chosen) for chosen in wanted}
    prices = [price for price, _ in found]
    assert prices == pytest.approx(sorted(prices))
    assert prices == pytest.approx([sum(c.price for c in chosen) for _, chosen in found])


@given(st.integers(0, 2**32 - 1))
@settings(max_examples=100, deadline=None)
def test_what_is_kept_holds_the_cheapest_grade_of_every_yield(seed):
    """Whatever units are good: for each yield level, the cheapest grade that reaches it is kept (or the declared)."""
    random = np.random.default_rng(seed)
    declared = random.random(12) < 0.5
    offered = [
        (choice(f"G{i}", float(random.integers(-2, 4))), random.random(12) < random.choice([0.3, 0.9])) for i in range(5)
    ]
    kept = undominated(declared, offered, Money)
    flags = {c.change.part: good for c, good in offered}
    options = [(0.0, declared), *((c.price, good) for c, good in offered)]
    left = [(0.0, declared), *((c.price, flags[c.change.part]) for c in kept)]
    # nested failing units: whatever other parts reject, the units that stay good are a superset, and no dearer
    for others in random.random((6, 12)) < 0.7:
        for level in range(13):
            def cheapest(those, others=others, level=level):
                return min((p for p, good in those if np.count_nonzero(good & others) >= level), default=np.inf)

            assert cheapest(left) == cheapest(options)


def test_of_equal_grades_one_is_kept():
    good = np.array([True, False, True])
    twins = [(choice("A", 1.0), good), (choice("B", 1.0), good)]
    assert [c.change.part for c in undominated(np.array([True, False, False]), twins, Money)] == ["A"]


def test_a_dearer_grade_that_saves_one_unit_more_is_kept():
    few, more = np.array([True, False, False]), np.array([True, True, False])
    other = np.array([False, True, True])
    offered = [(choice("A", 1.0), few), (choice("B", 2.0), more), (choice("C", 3.0), other)]
    assert [c.change.part for c in undominated(np.array([False, False, False]), offered, Money)] == ["A", "B", "C"]
    assert [c.change.part for c in undominated(few, offered, Money)] == ["B", "C"]
