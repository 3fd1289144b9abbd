"""Every family that declares a limiter settles with every limiter that suits it; the others are refused."""

import numpy as np
import pytest

from tests.samples import SAMPLES
from yieldosc.circuits import registry
from yieldosc.circuits.circuit import CircuitError
from yieldosc.evaluators import make_evaluator
from yieldosc.settle.evaluator import SettlingEvaluator
from yieldosc.solver.solution import Status

SUITED = {
    "wien_bridge": ("agc", "clip"),
    "phase_shift": ("agc", "clip"),
    "twin_t": ("agc", "clip"),
    "quadrature": ("agc",),
    "colpitts": ("agc", "tanh", "exp"),
    "hartley": ("agc", "tanh"),
    "pierce": ("agc", "tanh"),
    "crystal_colpitts": ("agc", "tanh", "exp"),
    "crystal_common_base": ("agc", "tanh", "exp"),
}
CASES = [(name, limiter) for name, limiters in SUITED.items() for limiter in limiters]


def made(name, limiter):
    sample = SAMPLES[name]
    circuit = registry.build(name, {**sample.options, "limiter": limiter}, sample.values)
    return circuit, {role.name: float(sample.values.get(role.name, role.default)) for role in circuit.roles}


@pytest.mark.parametrize(("name", "limiter"), CASES)
def test_the_sample_of_a_family_settles(name, limiter):
    circuit, values = made(name, limiter)
    evaluator = make_evaluator(circuit, values)
    assert isinstance(evaluator, SettlingEvaluator)
    solution = evaluator.solve({k: np.full(3, v) for k, v in values.items()}, 25.0)
    assert set(solution.status) == {Status.STARTS}
    assert solution.settling.not_converged == 0
    apart = solution.settled_hz / solution.frequency_hz - 1
    if limiter == "agc":
        assert (apart == 0).all()
    else:
        assert (np.abs(apart) > 1e-12).all()
        assert (np.abs(apart) < 0.2).all()
        assert (solution.distortion > 0).all()


def test_a_limiter_that_does_not_suit_the_stage_is_refused():
    texts = {
        ("hartley", "exp"): "limiter = exp does not suit this stage; choose one of none, agc, tanh",
        ("colpitts", "clip"): "limiter = clip does not suit this stage; choose one of none, agc, tanh, exp",
        ("phase_shift", "tanh"): "limiter = tanh does not suit this stage; choose one of none, agc, clip",
    }
    for (name, limiter), text in texts.items():
        sample = SAMPLES[name]
        with pytest.raises(CircuitError) as caught:
            registry.build(name, {**sample.options, "limiter": limiter}, sample.values)
        assert list(caught.value.problems) == [text]


def test_families_without_an_option_have_no_limiter():
    without = {name for name in registry.names() if all(o.name != "limiter" for o in registry.family(name).options)}
    assert without == {"timer_astable", "schmitt_rc", "square_to_sine"}


def test_a_hard_driven_stage_is_reached_from_a_weakly_driven_one():
    """The describing function alone leads Newton nowhere here: the crystal passes every harmonic of the pulses."""
    circuit, values = made("crystal_common_base", "exp")
    evaluator = make_evaluator(circuit, values)
    units = {k: np.full(5, v) for k, v in values.items()}
    units["RB1"] = units["RB1"] * np.array([1.0, 1.1, 1.2, 1.3, 1.4])
    solution = evaluator.solve(units, 25.0)
    assert solution.settling.not_converged == 0
    shift = solution.settled_hz / solution.frequency_hz - 1
    assert (np.diff(shift) < 0).all()  # less current, less gain to spare, less shift: one branch of solutions
