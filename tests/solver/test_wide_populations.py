"""Units far from the nominal: values spread by a factor of up to five either way, crystals with losses 100 times too
high. Every outcome occurs; every number still agrees with the independent solution, and no warning is raised."""

from __future__ import annotations

import dataclasses
import math

import numpy as np
import pytest

from tests.samples import CHOICES
from tests.solver.test_agreement import assert_agrees, draw, independent, solve
from yieldosc.circuits import registry
from yieldosc.solver import make_evaluator, network_evaluator
from yieldosc.solver.solution import Status
from yieldosc.solver.sturm import positive_roots

SPREAD = 1.6


def wide(name, number, n=8):
    options, values = list(CHOICES[name]())[number]
    drawn = draw(values, n, SPREAD, seed=2000 + number)
    if name == "pierce":
        drawn["ESR"] *= np.exp(np.random.default_rng(number).uniform(0, 5, n))
    return options, values, drawn


# colpitts 77, 95 and 98 hold units with two growing pairs; pierce 12 and 15 units whose margin is limited from above
# although the nominal unit's is not; pierce 17 a watch crystal whose gate resistance of 1e12 Ω shows in the margin
@pytest.mark.parametrize(
    ("name", "number"),
    [
        ("wien_bridge", 2),
        ("wien_bridge", 20),
        ("colpitts", 2),
        ("colpitts", 77),
        ("colpitts", 95),
        ("colpitts", 98),
        ("pierce", 12),
        ("pierce", 15),
        ("pierce", 17),
    ],
)
def test_far_units_agree(name, number):
    options, values, drawn = wide(name, number)
    solution = solve(name, options, drawn, values, 25.0)
    compared = 0
    for row in range(8):
        if solution.status[row] == Status.NO_BIAS:
            continue
        compared += 1
        unit = {k: float(v[row]) for k, v in drawn.items()}
        assert_agrees(solution, row, independent(name, options, unit, 25.0))
    assert compared >= 3


@pytest.mark.parametrize(("name", "number"), [("wien_bridge", 21), ("colpitts", 10), ("colpitts", 70), ("pierce", 12)])
def test_audit_of_every_unit_finds_no_difference(name, number):
    """The fast path and the exact path agree on every unit that the fast path accepts, and it accepts most."""
    options, values, drawn = wide(name, number, n=400)
    circuit = registry.build(name, options, values)
    full = {r.name: drawn[r.name] if r.name in drawn else np.full(400, r.default) for r in circuit.roles}
    evaluator = make_evaluator(circuit, {r.name: values.get(r.name, r.default) for r in circuit.roles})
    solution = evaluator.solve(full, 25.0, audit=np.ones(400, dtype=bool))
    assert solution.disagreeing == 0
    assert solution.audited + solution.exact == 400
    assert solution.audited > 20


def test_audit_notices_a_wrong_fast_path(monkeypatch):
    """Negative control: a fast path without its doubts about missing roots is caught by the audit."""
    options, values, drawn = wide("pierce", 12, n=400)
    circuit = registry.build("pierce", options, values)
    full = {r.name: drawn[r.name] if r.name in drawn else np.full(400, r.default) for r in circuit.roles}
    evaluator = make_evaluator(circuit, {r.name: values.get(r.name, r.default) for r in circuit.roles})
    honest = evaluator.solve(full, 25.0)
    ((key, reference),) = evaluator._references.items()
    assert reference.idle
    evaluator._references[key] = dataclasses.replace(reference, idle=(), order=())
    monkeypatch.setattr(network_evaluator, "positive_roots", lambda poly: np.full(400, len(reference.tracked)))
    blind = evaluator.solve(full, 25.0)
    assert blind.exact < honest.exact
    wrong = ~np.isclose(blind.startup_margin, honest.startup_margin, rtol=1e-6)
    assert wrong.any()  # so the doubts are needed
    audited = evaluator.solve(full, 25.0, audit=np.ones(400, dtype=bool))
    assert audited.disagreeing >= np.count_nonzero(wrong)  # an upper limit that does not yet decide counts too
    np.testing.assert_allclose(audited.startup_margin, honest.startup_margin, rtol=1e-10)  # and it is put right


def test_a_capacitance_of_zero_in_some_units_raises_no_warning():
    """gm/(2π fT) below Cob leaves cin = 0: a first-order prediction in ln cin has no value there."""
    options, values = list(CHOICES["colpitts"]())[3]
    drawn = {k: np.full(6, v) for k, v in values.items()}
    drawn["Cob"] = np.array([1e-15, 2e-12, 50e-12, 1e-15, 2e-12, 80e-12])
    drawn["fT"] = np.array([300e6, 300e6, 300e6, 1e12, 1e12, 300e6])
    solution = solve("colpitts", options, drawn, {**values, "Cob": 1e-12, "fT": 300e6}, 25.0)
    for row in range(6):
        unit = {k: float(v[row]) for k, v in drawn.items()}
        assert_agrees(solution, row, independent("colpitts", options, unit, 25.0))


def test_no_bias_units_say_so_and_disturb_nobody():
    options, values = list(CHOICES["colpitts"]())[1]
    drawn = {k: np.full(4, v) for k, v in values.items()}
    drawn["RB2"] = np.array([10e3, 10.0, 10e3, 1e3])  # the second and fourth base stand below VBE
    solution = solve("colpitts", options, drawn, values, 25.0)
    alone = solve("colpitts", options, {k: v[:1] for k, v in drawn.items()}, values, 25.0)
    assert [Status(s) for s in solution.status] == [Status.STARTS, Status.NO_BIAS, Status.STARTS, Status.NO_BIAS]
    for field in ("frequency_hz", "startup_margin", "growth_per_s"):
        got = getattr(solution, field)
        assert got[0] == got[2] == getattr(alone, field)[0]
    assert np.all(np.isfinite(solution.startup_margin))


def test_a_saturated_stage_has_no_bias():
    options, values = next(CHOICES["colpitts"]())
    drawn = {k: np.array([v]) for k, v in values.items()} | {"RC": np.array([3.3e3])}
    # Ohm's law: Ic = 150 (1.5625 − 0.65)/(6875 + 151·680) = 1.249 mA,
    # and 5 − 1.249 mA·3300 − 1.258 mA·680 = 0.02 V, below 0.2 V
    assert Status(solve("colpitts", options, drawn, values, 25.0).status[0]) is Status.NO_BIAS


def _polynomial(roots):
    poly = np.poly(roots)[::-1]
    return [np.array([c]) for c in np.real(poly)]


@pytest.mark.parametrize(
    ("roots", "positive"),
    [
        ([1.0, 2.0, -3.0], 2),
        ([-1.0, -2.0], 0),
        ([0.5 + 1j, 0.5 - 1j, 4.0], 1),
        ([1.0, 1.001, 1.002, 1.003], 4),
        ([1.0 + 1e-5j, 1.0 - 1e-5j, 1.002], 1),
        ([7.0], 1),
    ],
)
def test_sturm_counts_positive_roots(roots, positive):
    assert positive_roots(_polynomial(roots)).tolist() == [positive]


def test_sturm_takes_each_unit_by_its_own_degree():
    """x − x² has one positive root (0 is none); 1 + x² breaks the chain down, which is said."""
    one, two = _polynomial([2.0, -1.0, 3.0]), [np.array([-6.0]), np.array([1.0]), np.array([1.0]), np.array([0.0])]
    poly = [np.concatenate([a, b]) for a, b in zip(one, two, strict=True)]
    assert positive_roots(poly).tolist() == [2, 1]
    assert positive_roots([np.array([0.0, 1.0]), np.array([1.0, 0.0]), np.array([-1.0, 1.0])]).tolist() == [1, -1]


def test_verdicts_of_these_tests_can_fail():
    """Negative control of the comparison itself: a margin off by 2e-6 is refused."""
    options, values, drawn = wide("pierce", 12, n=1)
    solution = solve("pierce", options, drawn, values, 25.0)
    want = independent("pierce", options, {k: float(v[0]) for k, v in drawn.items()}, 25.0)
    assert_agrees(solution, 0, want)
    for change in ({"margin": want.margin * (1 + 2e-6)}, {"frequency_hz": want.frequency_hz * (1 + 2e-9)}):
        with pytest.raises(AssertionError):
            assert_agrees(solution, 0, dataclasses.replace(want, **change))
    assert math.isfinite(want.margin)
