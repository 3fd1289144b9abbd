"""A unit's digits depend on that unit alone: not on its block, its place in it, or on how large it is."""

from __future__ import annotations

import numpy as np
import pytest

from tests.samples import CHOICES
from tests.solver.test_agreement import draw
from yieldosc.circuits import registry
from yieldosc.solver import make_evaluator

FIELDS = (
    "frequency_hz",
    "startup_margin",
    "growth_per_s",
    "critical_gain",
    "upper_ratio",
    "other_mode_hz",
    "status",
    "overdriven",
)
PICKED = [
    pytest.param(name, *choice, id=f"{name}-{number}")
    for name, choices in CHOICES.items()
    for number, choice in enumerate(choices())
    if number % (25 if name == "colpitts" else 7) == 0
]


def _population(name, options, values, n, spread):
    circuit = registry.build(name, options, values)
    drawn = draw(values, n, spread, seed=5)
    full = {r.name: drawn[r.name] if r.name in drawn else np.full(n, r.default) for r in circuit.roles}
    return make_evaluator(circuit, {r.name: values.get(r.name, r.default) for r in circuit.roles}), full


def _assert_same(left, right):
    for field in FIELDS:
        np.testing.assert_array_equal(getattr(left, field), np.asarray(right[field]), err_msg=field)


@pytest.mark.parametrize(("name", "options", "values"), PICKED)
def test_order_and_block_size_change_no_digit(name, options, values):
    n = 230
    evaluator, full = _population(name, options, values, n, 0.3)
    whole = evaluator.solve(full, 25.0, growth=True)
    order = np.random.default_rng(1).permutation(n)
    turned = evaluator.solve({k: v[order] for k, v in full.items()}, 25.0, growth=True)
    back = np.argsort(order)
    _assert_same(whole, {f: getattr(turned, f)[back] for f in FIELDS})
    for size in (1, 37):
        starts = range(0, n, size) if size > 1 else range(0, 20)
        parts = [evaluator.solve({k: v[i : i + size] for k, v in full.items()}, 25.0, growth=True) for i in starts]
        pieced = {f: np.concatenate([getattr(p, f) for p in parts]) for f in FIELDS}
        for field in FIELDS:
            wanted = getattr(whole, field)[: len(pieced[field])]
            np.testing.assert_array_equal(pieced[field], wanted, err_msg=f"{field}, blocks of {size}")


def test_an_evaluator_made_twice_gives_the_same_digits():
    name, (options, values) = "pierce", next(CHOICES["pierce"]())
    first, full = _population(name, options, values, 20, 0.3)
    second, _ = _population(name, options, values, 20, 0.3)
    first.solve({k: v[:7] for k, v in full.items()}, 85.0)  # another corner before: a cache must change nothing
    one, two = first.solve(full, 25.0, growth=True), second.solve(full, 25.0, growth=True)
    _assert_same(one, {f: getattr(two, f) for f in FIELDS})


def test_a_role_that_is_one_number_for_all_units_gives_the_same_answer():
    """A shared value (a supply corner) is part of the reference unit; digits may move in the last place only."""
    name, options, values = PICKED[3].values
    evaluator, full = _population(name, options, values, 10, 0.2)
    key = next(iter(values))
    full[key] = np.full(10, values[key])
    arrays = evaluator.solve(full, 25.0, growth=True)
    shared = evaluator.solve({**full, key: np.float64(values[key])}, 25.0, growth=True)
    np.testing.assert_allclose(shared.frequency_hz, arrays.frequency_hz, rtol=1e-14)
    np.testing.assert_allclose(shared.startup_margin, arrays.startup_margin, rtol=1e-12)


def test_no_argument_is_modified():
    name, options, values = PICKED[-1].values
    evaluator, full = _population(name, options, values, 10, 0.2)
    before = {k: v.copy() for k, v in full.items()}
    evaluator.solve(full, -40.0, growth=True, audit=np.ones(10, dtype=bool))
    evaluator.other_modes(full, -40.0)
    for key, array in before.items():
        np.testing.assert_array_equal(full[key], array)
