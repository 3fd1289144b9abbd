"""Settled frequencies behind the solver's seam: a fitted shift against the full balance, its checks and its fallbacks."""

import pickle
from dataclasses import replace

import numpy as np
import pytest

from tests.settle.tables import circuit_of, tank
from yieldosc.circuits import registry
from yieldosc.evaluators import make_evaluator
from yieldosc.settle import fast as fast_module
from yieldosc.settle.crossing import FirstHarmonic
from yieldosc.settle.evaluator import SettlingEvaluator
from yieldosc.settle.fast import FEWEST, fast
from yieldosc.settle.prepared import prepare
from yieldosc.settle.settled import solve
from yieldosc.settle.shift import FAST_TOLERANCE, FittedShift
from yieldosc.solver import NetworkEvaluator
from yieldosc.solver import make_evaluator as crossing_evaluator
from yieldosc.solver.solution import Status

WIEN = {"R1": 1e4, "C1": 1e-8, "R2": 1e4, "C2": 1e-8, "RF": 21.5e3, "RG": 1e4, "GBW": 3e6, "VSAT": 12.0}
SPREAD = {"R": 0.01, "C": 0.05, "G": 0.3, "V": 0.05}


@pytest.fixture(autouse=True, scope="module")
def every_call_checked():
    """Calls of a few thousand units are checked now and then only; here all are."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(fast_module, "CHECKED_OF", 1)
        yield



def drawn(nominal, n, seed=2):
    rng = np.random.default_rng(seed)
    return {k: v * (1 + SPREAD[k[0]] * rng.uniform(-1, 1, n)) for k, v in nominal.items()}


def wien(limiter="clip", **changes):
    values = {k: v for k, v in {**WIEN, **changes}.items() if v is not None}
    return registry.build("wien_bridge", {"limiter": limiter}, values), values


@pytest.fixture(scope="module")
def clipped():
    """1,200 units near the edge of starting, by the evaluator and by the full balance."""
    circuit, nominal = wien(RF=20.8e3)
    values = drawn(nominal, 1200)
    solution = make_evaluator(circuit, nominal).solve(values, 40.0)
    full = solve(circuit, values, 40.0, solution, limiter="clip")
    return circuit, nominal, values, solution, full


def test_an_undeclared_limiter_leaves_settled_hz_empty():
    circuit, nominal = wien("none", VSAT=None)
    evaluator = make_evaluator(circuit, nominal)
    assert isinstance(evaluator, NetworkEvaluator)
    solution = evaluator.solve(drawn(nominal, 3), 25.0)
    assert solution.settled_hz is None
    assert solution.distortion is None


def test_fitted_shift_agrees_with_the_full_balance(clipped):
    _, _, _, solution, full = clipped
    account = solution.settling
    assert account.method == "fitted shift"
    assert (account.limiter, account.checked, account.fell_back) == ("clip", 24, False)
    assert 0 < account.residual < FAST_TOLERANCE
    assert account.full < 60
    apart = np.abs(solution.settled_hz / full.settled_hz - 1)
    assert np.max(apart) < 2 * FAST_TOLERANCE
    assert np.sqrt(np.mean(apart**2)) < FAST_TOLERANCE / 4
    assert np.max(np.abs(solution.distortion - full.distortion_out)) < 1e-3
    starts = solution.status == Status.STARTS
    assert np.median(solution.settled_hz[starts] / solution.frequency_hz[starts] - 1) < -3e-3  # there is a shift to fit


def test_units_that_do_not_start_stay_at_their_crossing(clipped):
    _, _, _, solution, _ = clipped
    dead = solution.status == Status.NO_START
    assert 0 < np.count_nonzero(dead) < 600
    np.testing.assert_array_equal(solution.settled_hz[dead], solution.frequency_hz[dead])
    np.testing.assert_array_equal(solution.distortion[dead], 0.0)


def test_no_digit_depends_on_the_neighbours(clipped):
    """The same units in another order and in other company, after other calls, and from a copy of the evaluator."""
    circuit, nominal, values, solution, full = clipped
    evaluator = pickle.loads(pickle.dumps(make_evaluator(circuit, nominal)))
    evaluator.solve(drawn(nominal, 700, seed=9), -20.0)
    chosen = np.random.default_rng(0).permutation(1200)[:900]
    part = evaluator.solve({k: v[chosen] for k, v in values.items()}, 40.0)
    np.testing.assert_array_equal(part.settled_hz, solution.settled_hz[chosen])
    np.testing.assert_array_equal(part.distortion, solution.distortion[chosen])
    few = np.flatnonzero(solution.status == Status.STARTS)[:5]
    alone = solve(circuit, {k: v[few] for k, v in values.items()}, 40.0, solved_rows(solution, few), limiter="clip")
    np.testing.assert_array_equal(alone.settled_hz, full.settled_hz[few])
    np.testing.assert_array_equal(alone.distortion_in, full.distortion_in[few])


def solved_rows(solution, rows):
    return replace(
        solution,
        frequency_hz=solution.frequency_hz[rows],
        startup_margin=solution.startup_margin[rows],
        status=solution.status[rows],
    )


def test_few_units_are_solved_in_full():
    circuit, nominal = wien(RF=23e3)
    solution = make_evaluator(circuit, nominal).solve(drawn(nominal, FEWEST - 1), 25.0)
    assert solution.settling.method == "full"
    assert solution.settling.full == FEWEST - 1
    assert solution.settling.checked == 0


def test_a_fit_that_is_off_is_found_out_and_replaced(clipped):
    """A fit of wrong figures must fail its check, and every unit then be solved in full."""
    circuit, nominal, values, solution, full = clipped
    live = prepare(circuit, values, 40.0, solution, limiter="clip")

    class Wrong(FittedShift):
        def predict(self, live):
            guess = super().predict(live)
            return replace(guess, figures=replace(guess.figures, shift=guess.figures.shift - 1e-4))

    evaluator = make_evaluator(circuit, nominal)
    found = fast(live, solution, Wrong(evaluator._training), limiter="clip")
    assert found.account.fell_back
    assert found.account.residual == pytest.approx(1e-4, rel=0.2)
    assert found.account.full == len(live.rows)
    np.testing.assert_array_equal(found.settled.settled_hz, full.settled_hz)


def test_units_that_no_fit_holds_are_solved_in_full():
    """A bridge of R1 = 3 R2 and C2 = 3 C1 is far broader than any that was trained around equal arms."""
    circuit, nominal = wien(RF=23e3)
    values = drawn(nominal, 400)
    for role, factor in (("R1", 3.0), ("C2", 3.0), ("RF", 2.9)):
        values[role] = values[role] * np.where(np.arange(400) % 4 == 0, factor, 1.0)
    solution = make_evaluator(circuit, nominal).solve(values, 25.0)
    started = np.count_nonzero(solution.status[::4] == Status.STARTS)
    assert solution.settling.full >= started > 50
    full = solve(circuit, values, 25.0, solution, limiter="clip")
    np.testing.assert_array_equal(solution.settled_hz[::4], full.settled_hz[::4])
    assert np.max(np.abs(solution.settled_hz / full.settled_hz - 1)) < 2 * FAST_TOLERANCE


def test_a_unit_without_convergence_is_undefined(monkeypatch):
    circuit, nominal = wien(RF=23e3)
    values = drawn(nominal, 8)
    monkeypatch.setattr("yieldosc.settle.balance.MOST_STEPS", 1)
    solution = make_evaluator(circuit, nominal).solve(values, 25.0)
    assert set(solution.status) == {Status.UNDEFINED}
    assert solution.settling.not_converged == 8
    assert np.isfinite(solution.settled_hz).all()


def test_a_growing_unit_whose_loop_is_not_found_is_undefined(monkeypatch):
    circuit, nominal = wien(RF=23e3)
    lost = FirstHarmonic(np.array([np.nan, 1.0]), np.array([np.nan, 0.9]))
    monkeypatch.setattr("yieldosc.settle.prepared.first_harmonic", lambda network, omega: lost)
    solution = make_evaluator(circuit, nominal).solve(drawn(nominal, 2), 25.0)
    assert set(solution.status) == {Status.UNDEFINED}
    np.testing.assert_array_equal(solution.settled_hz, solution.frequency_hz)


def test_a_level_control_settles_at_the_crossing():
    circuit, nominal = wien("agc", RS_start=300.0, RS_full=2200.0, RF=22e3, VSAT=None)
    solution = make_evaluator(circuit, nominal).solve(drawn(nominal, 50), 25.0)
    assert (solution.control_reach > 1).all()
    assert solution.settling.method == "held"
    np.testing.assert_array_equal(solution.settled_hz, solution.frequency_hz)
    np.testing.assert_array_equal(solution.distortion, 0.0)


def test_a_level_control_at_its_stop_clips_with_the_gain_that_is_left():
    """RF falls from 23 kΩ to 21 kΩ, where the gain is still 3.1: the stage clips as one with RF = 21 kΩ does."""
    circuit, nominal = wien("agc", RF_full=21e3, RF=23e3, VSAT=10.0)
    found = make_evaluator(circuit, nominal).solve({k: np.array([v]) for k, v in nominal.items()}, 25.0)
    plain, alike = wien("clip", RF=21e3, VSAT=10.0)
    expected = make_evaluator(plain, alike).solve({k: np.array([v]) for k, v in alike.items()}, 25.0)
    assert found.control_reach[0] < 1
    assert found.settled_hz[0] == pytest.approx(expected.settled_hz[0], rel=1e-9)
    assert found.distortion[0] == pytest.approx(expected.distortion[0], rel=1e-6)
    assert found.settled_hz[0] < 0.995 * found.frequency_hz[0]


def high_q(q=3000.0):
    rows, values = tank(q, 2.0)
    return circuit_of(rows, "gm", 1 / (2 * np.pi), limiter="clip"), values


def tank_units(values, n=300):
    rng = np.random.default_rng(4)
    return {k: v * (1 + 0.01 * rng.uniform(-1, 1, n)) for k, v in values.items()}


def test_a_shift_far_inside_the_limits_is_shown_and_not_computed_unit_by_unit():
    circuit, values = high_q()
    units = tank_units(values)
    wide = SettlingEvaluator(circuit, values, crossing_evaluator(circuit, values), limits_width_hz=0.05)
    solution = wide.solve(units, 25.0)
    account = solution.settling
    assert account.method == "no shift"
    assert 0 < account.largest_shift < account.tolerance == pytest.approx(1e-6 * 0.05 * 2 * np.pi, rel=0.01)
    assert account.residual == pytest.approx(account.largest_shift, rel=1e-6)
    np.testing.assert_allclose(solution.settled_hz, solution.frequency_hz, rtol=1e-12)
    full = solve(circuit, units, 25.0, solution, limiter="clip")
    np.testing.assert_allclose(solution.distortion, full.distortion_out, rtol=1e-2)
    assert np.max(np.abs(full.settled_hz / full.first_hz - 1)) < 1 / (8 * 2800**2)


def test_the_same_shift_counts_where_the_limits_are_narrow():
    circuit, values = high_q(300.0)
    narrow = SettlingEvaluator(circuit, values, crossing_evaluator(circuit, values), limits_width_hz=1e-6)
    solution = narrow.solve(tank_units(values), 25.0)
    assert solution.settling.method == "fitted shift"
    assert np.median(solution.settled_hz / solution.frequency_hz - 1) < -1e-7


def test_the_checked_sample_is_spread_over_the_block():
    rows = fast_module._sample(8192)
    assert len(set(rows)) == 24
    assert rows.min() < 1500
    assert rows.max() > 6500
