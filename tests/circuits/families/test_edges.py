"""One value at a time absurdly small or large, in every option of every family: no exception, no warning, and every
outcome has its numbers."""

from __future__ import annotations

import numpy as np
import pytest

from tests.circuits.families.cases import ALL
from tests.circuits.families.common import built
from tests.samples import SAMPLES
from yieldosc.solver import make_evaluator
from yieldosc.solver.solution import Status

CASES = [pytest.param(*case, id=f"{case[0]}-{number}") for number, case in enumerate(ALL)]


def grid(arrays, factor):
    table = {k: np.full(len(arrays), float(v[0])) for k, v in arrays.items()}
    for line, key in enumerate(arrays):
        table[key][line] *= factor
    return table


@pytest.mark.parametrize(("name", "options", "values"), CASES)
def test_finite_at_the_edges(name, options, values):
    circuit, arrays = built(name, options, values)
    evaluator = make_evaluator(circuit, {k: float(v[0]) for k, v in arrays.items()})
    for factor in (1e-6, 1e-3, 1e3, 1e6):
        s = evaluator.solve(grid(arrays, factor), 25.0, growth=True)
        biased = s.status != Status.NO_BIAS
        assert np.all(np.isfinite(s.startup_margin[biased]))
        assert np.all(np.isfinite(s.frequency_hz[biased]))
        assert np.all(s.frequency_hz[biased] > 0)
        starts = s.status == Status.STARTS
        assert np.all(s.startup_margin[starts] > 1)
        assert np.all(s.growth_per_s[starts] > 0)
        assert np.all(s.startup_margin[s.status == Status.NO_START] <= 1)


@pytest.mark.parametrize("name", ["timer_astable", "schmitt_rc", "square_to_sine"])
def test_switching_circuits_at_the_edges(name):
    sample = SAMPLES[name]
    circuit, arrays = built(name, sample.options, sample.values)
    evaluator = make_evaluator(circuit, {k: float(v[0]) for k, v in arrays.items()})
    for factor in (1e-6, 1e-3, 1e3, 1e6):
        s = evaluator.solve(grid(arrays, factor), 25.0)
        starts = s.status == Status.STARTS
        assert np.all(np.isfinite(s.frequency_hz))
        assert np.all(s.frequency_hz[starts] > 0)
        assert np.all(s.frequency_hz[~starts] == 0)
        assert np.all((s.duty[starts] > 0) & (s.duty[starts] < 1))


def test_an_esr_too_high_for_any_gain():
    """|R_neg| has a largest value (E13: 1061.033 Ω, from memory): a crystal above it starts at no transconductance."""
    values = {"FS": 1e7, "Cm": 1e-17, "C0": 5e-12, "C1": 20e-12, "C2": 20e-12, "RF": 1e15, "Rout": 1e15, "Cin": 1e-22}
    values |= {"Cout": 1e-22, "Cfb": 1e-22}
    for esr, able in ((1060.0, True), (1062.0, False)):
        circuit, arrays = built("pierce", {}, {**values, "ESR": esr, "gm": 7.5398e-3})
        nominal = {k: float(v[0]) for k, v in arrays.items()}
        gm = np.geomspace(1e-4, 1.0, 41)
        gm[20] = 7.539822e-3
        s = make_evaluator(circuit, nominal).solve({k: np.full(41, v) for k, v in nominal.items()} | {"gm": gm}, 25.0)
        assert bool(np.any(s.status == Status.STARTS)) == able
        assert np.all(np.isfinite(s.startup_margin))
