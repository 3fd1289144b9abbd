"""One battery over every registered circuit. A new circuit needs one row in tests/samples.py, nothing here."""

from __future__ import annotations

import pickle

import numpy as np
import pytest

from tests.independent import Unit, from_branches
from tests.samples import SAMPLES
from yieldosc.circuits import registry
from yieldosc.circuits.circuit import CircuitError
from yieldosc.solver import make_evaluator
from yieldosc.solver.solution import Status

NAMES = registry.names()
DIRECT = ("timer_astable", "schmitt_rc", "square_to_sine")  # formulas in place of a network
NETWORKS = tuple(name for name in NAMES if name not in DIRECT)
FIELDS = ("frequency_hz", "startup_margin", "growth_per_s", "critical_gain", "upper_ratio", "status")


def built(name, changes=None):
    sample = SAMPLES[name]
    values = {**sample.values, **(changes or {})}
    values = {k: v for k, v in values.items() if v is not None}
    circuit = registry.build(name, sample.options, values)
    full = {r.name: float(values.get(r.name, r.default)) for r in circuit.roles}
    return circuit, full


def solve(circuit, full, n=1, temperature_c=25.0, **changed):
    values = {k: np.full(n, v) for k, v in full.items()} | changed
    return make_evaluator(circuit, full).solve(values, temperature_c, growth=True)


@pytest.fixture(params=NAMES)
def every(request):
    if request.param not in SAMPLES:
        pytest.fail(f"{request.param} has no row in tests/samples.py")
    return request.param


@pytest.fixture(params=NETWORKS)
def name(request):
    if request.param not in SAMPLES:
        pytest.fail(f"{request.param} has no row in tests/samples.py")
    return request.param


def test_circuits_of_formulas_say_so(every):
    circuit, full = built(every)
    assert (circuit.direct is not None) == (every in DIRECT)
    assert bool(circuit.branches) == bool(circuit.gain_symbol) == (every not in DIRECT)
    s = solve(circuit, full)
    assert bool(np.isnan(s.startup_margin[0])) == (every in DIRECT)


def test_the_sample_starts(name):
    circuit, full = built(name)
    s = solve(circuit, full)
    assert Status(s.status[0]) is Status.STARTS
    assert s.startup_margin[0] > 1
    assert s.growth_per_s[0] > 0


def test_scalar_equals_vector_bit_for_bit(name):
    circuit, full = built(name)
    rng = np.random.default_rng(3)
    drawn = {k: v * rng.uniform(0.95, 1.05, 40) for k, v in full.items()}
    evaluator = make_evaluator(circuit, full)
    whole = evaluator.solve(drawn, 25.0, growth=True)
    for row in (0, 11, 39):
        one = evaluator.solve({k: v[row : row + 1] for k, v in drawn.items()}, 25.0, growth=True)
        for field in FIELDS:
            np.testing.assert_array_equal(getattr(whole, field)[row], getattr(one, field)[0], err_msg=field)


def test_closed_form_in_its_limit(every):
    sample = SAMPLES[every]
    circuit, full = built(every, sample.ideal)
    s = solve(circuit, full)
    design = float(np.ravel(circuit.design_frequency({k: np.array([v]) for k, v in full.items()}))[0])
    assert s.frequency_hz[0] == pytest.approx(design, rel=sample.tolerance)


def test_the_closed_form_is_not_the_answer_elsewhere(every):
    """Negative control: the sample itself lies further from the closed form than the limit's tolerance."""
    circuit, full = built(every)
    s = solve(circuit, full)
    design = float(np.ravel(circuit.design_frequency({k: np.array([v]) for k, v in full.items()}))[0])
    assert abs(s.frequency_hz[0] / design - 1) > SAMPLES[every].tolerance


@pytest.mark.parametrize("temperature_c", [-40.0, 25.0, 85.0])
def test_its_own_branch_table_solved_independently(name, temperature_c):
    circuit, full = built(name)
    arrays = {k: np.array([v]) for k, v in full.items()}
    s = solve(circuit, full, temperature_c=temperature_c)
    symbols = circuit.derive(arrays, temperature_c, frozenset()).symbols
    one = {k: float(np.ravel(v)[0]) for k, v in symbols.items()}
    w0 = 2 * np.pi * float(s.frequency_hz[0])
    unit = Unit(from_branches(circuit.branches, one, circuit.gain_symbol), w0=w0, r0=SAMPLES[name].level_ohm)
    nearest = min((c for c in unit.crossings if c.enters), key=lambda c: abs(c.omega / w0 - 1))
    assert s.frequency_hz[0] == pytest.approx(float(nearest.omega) / (2 * np.pi), rel=1e-9)
    assert s.critical_gain[0] == pytest.approx(float(nearest.gain), rel=1e-9)
    assert len(unit.growing()) == (2 if s.startup_margin[0] > 1 else 0)


@pytest.mark.parametrize("factor", [1e-6, 1e-3, 1e3, 1e6])
def test_finite_at_the_edges(name, factor):
    """One value at a time absurdly small or large: no exception, no warning, and every outcome has its numbers."""
    circuit, full = built(name)
    n = len(full)
    grid = {k: np.full(n, v) for k, v in full.items()}
    for row, key in enumerate(full):
        grid[key][row] *= factor
    s = make_evaluator(circuit, full).solve(grid, 25.0, growth=True)
    biased = s.status != Status.NO_BIAS
    assert np.all(np.isfinite(s.startup_margin[biased]))
    assert np.all(np.isfinite(s.frequency_hz[biased]))
    assert np.all(s.frequency_hz[biased] > 0)
    starts = s.status == Status.STARTS
    assert np.all(s.startup_margin[starts] > 1)
    assert np.all(s.growth_per_s[starts] > 0)
    assert np.all(s.startup_margin[s.status == Status.NO_START] <= 1)


def test_gain_swept_through_its_limit_flips_the_outcome(name):
    """Scaling the gain element's value by the margin's own distance: 1.001 times critical grows, 0.999 times not."""
    circuit, full = built(name)
    base = solve(circuit, full)
    factor = base.critical_gain[0]
    arrays = {k: np.array([v]) for k, v in full.items()}
    symbols = circuit.derive(arrays, 25.0, frozenset()).symbols
    one = {k: float(np.ravel(v)[0]) for k, v in symbols.items()}
    for share, poles in ((0.999, 0), (1.001, 2)):
        table = from_branches(circuit.branches, {**one, circuit.gain_symbol: share * factor}, circuit.gain_symbol)
        unit = Unit(table, w0=2 * np.pi * float(base.frequency_hz[0]), r0=SAMPLES[name].level_ohm)
        assert len(unit.growing()) == poles


def test_every_missing_role_is_named(every):
    sample = SAMPLES[every]
    roles = registry.family(every).roles(registry.complete_options(every, sample.options))
    required = [r for r in roles if r.required]
    with pytest.raises(CircuitError) as caught:
        registry.build(every, sample.options, ())
    assert list(caught.value.problems)[: len(required)] == [f"role {r.name} is missing: {r.meaning}" for r in required]


def test_an_unknown_role_is_named(every):
    sample = SAMPLES[every]
    with pytest.raises(CircuitError) as caught:
        registry.build(every, sample.options, [*sample.values, "Rbogus"])
    assert list(caught.value.problems) == [f"{every} has no role 'Rbogus' with these options"]


def test_it_travels_to_another_process(every):
    circuit, full = built(every)
    evaluator = make_evaluator(circuit, full)
    there = pickle.loads(pickle.dumps(evaluator))
    values = {k: np.full(3, v) for k, v in full.items()}
    for field in FIELDS:
        np.testing.assert_array_equal(
            getattr(there.solve(values, 85.0, growth=True), field),
            getattr(evaluator.solve(values, 85.0, growth=True), field),
        )


def test_it_describes_itself(every):
    circuit, _ = built(every)
    assert circuit.closed_form
    assert circuit.range_text
    assert circuit.schematic.strip()
    assert circuit.assumptions
    assert {r.name for r in circuit.roles} >= set(SAMPLES[every].values)
    assert sum(row.gain_element for row in circuit.branches) == (0 if every in DIRECT else 1)
    for role in circuit.roles:
        assert role.meaning
        assert role.unit
        assert circuit.role(role.name) is role


def test_options_have_defaults(every):
    family = registry.family(every)
    assert registry.complete_options(every, {}) == {o.name: o.choices[0] for o in family.options}


def test_every_registered_circuit_has_a_sample_and_no_sample_is_left_over():
    assert set(SAMPLES) == set(NAMES)
