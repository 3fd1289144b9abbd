"""Every choice of parts of three circuits against the independent solution, on random units at −40, 25 and 85 °C.

Tolerances are those of the requirement: frequency 1e-9, margin 1e-6, growth 1e-4, number of growing poles exact.
"""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np
import pytest

from tests.drawn import DRAWN
from tests.independent import Unit
from tests.rules import Verdict, judge
from tests.samples import CHOICES, SAMPLES
from yieldosc.circuits import registry
from yieldosc.solver import make_evaluator
from yieldosc.solver.solution import Solution, Status

CASES = [
    pytest.param(name, options, values, id=f"{name}-{number}")
    for name, choices in CHOICES.items()
    for number, (options, values) in enumerate(choices())
]


def closed_form_hz(name: str, v: Mapping[str, float]) -> float:
    """The design frequency as the specification states it, from role values."""
    if name == "wien_bridge":
        return 1 / (2 * math.pi * math.sqrt(v["R1"] * v["C1"] * v["R2"] * (v["C2"] + v.get("CIN", 0.0))))
    if name == "colpitts":
        capacitance = 1 / sum(1 / v[c] for c in ("C1", "C2", "C3") if c in v)
        return 1 / (2 * math.pi * math.sqrt(v["L"] * capacitance))
    one = v["C1"] + v.get("CS1", 0.0)
    two = v["C2"] + v.get("CS2", 0.0)
    load = one * two / (one + two) + v.get("CX", 0.0)
    return series_hz(v) * math.sqrt(1 + v["Cm"] / (v["C0"] + load))


def series_hz(v: Mapping[str, float]) -> float:
    return v["FS"] if "FS" in v else v["FL"] / math.sqrt(1 + v["Cm"] / (v["C0"] + v["CL"]))


def independent(name: str, options: Mapping[str, str], v: Mapping[str, float], temperature_c: float) -> Verdict:
    """The verdict on one unit from elements drawn by hand."""
    design = closed_form_hz(name, v)
    unit = Unit(DRAWN[name](v, options, temperature_c), w0=2 * math.pi * design, r0=SAMPLES[name].level_ohm)
    if name == "wien_bridge":
        lower_arm = v["RG"] + v.get("RS_start", 0.0)
        return judge(unit, design, ratio=lambda rf: 1 + rf / lower_arm)
    if name == "pierce":
        return judge(unit, design, centre_hz=series_hz(v), half=v["Cm"] / v["C0"])
    return judge(unit, design)


def draw(values: Mapping[str, float], n: int, spread: float, seed: int) -> dict[str, np.ndarray]:
    """n units: every value times exp(±spread), uniform in the logarithm."""
    rng = np.random.default_rng(seed)
    fixed = ("FL", "FS", "CL", "VCC", "VBE")
    return {k: np.full(n, x) if k in fixed else x * np.exp(rng.uniform(-spread, spread, n)) for k, x in values.items()}


def solve(
    name: str, options: Mapping[str, str], drawn: Mapping[str, np.ndarray], nominal: Mapping[str, float], t: float
) -> Solution:
    circuit = registry.build(name, options, drawn)
    n = len(next(iter(drawn.values())))
    values = {r.name: drawn[r.name] if r.name in drawn else np.full(n, r.default) for r in circuit.roles}
    full = {r.name: nominal.get(r.name, r.default) for r in circuit.roles}
    return make_evaluator(circuit, full).solve(values, t, growth=True)


def assert_agrees(solution: Solution, row: int, want: Verdict) -> None:
    assert solution.frequency_hz[row] == pytest.approx(want.frequency_hz, rel=1e-9)
    assert solution.startup_margin[row] == pytest.approx(want.margin, rel=1e-6)
    status = Status(solution.status[row])
    if status is not Status.NOT_ASSESSABLE:  # the range is the circuit's statement, not the network's
        assert status.name.lower() == want.outcome
    growth = solution.growth_per_s[row]
    if want.growth_per_s is None:
        assert np.isnan(growth)
    else:
        assert growth == pytest.approx(want.growth_per_s, rel=1e-4)
        assert bool(solution.overdriven[row]) == want.overdriven


@pytest.mark.parametrize("temperature_c", [-40.0, 25.0, 85.0])
@pytest.mark.parametrize(("name", "options", "values"), CASES)
def test_units_agree(name, options, values, temperature_c):
    drawn = draw(values, 1, 0.15, seed=int(temperature_c) + 40 + 1000 * len(values))
    solution = solve(name, options, drawn, values, temperature_c)
    assert solution.status[0] != Status.NO_BIAS
    for row in range(1):
        unit = {k: float(x[row]) for k, x in drawn.items()}
        assert_agrees(solution, row, independent(name, options, unit, temperature_c))


def _one_unit(name: str, number: int) -> tuple[dict[str, str], dict[str, float], Solution]:
    options, values = list(CHOICES[name]())[number]
    return options, values, solve(name, options, {k: np.array([v]) for k, v in values.items()}, values, 85.0)


@pytest.mark.parametrize(
    ("name", "number", "one", "two"),
    [
        ("wien_bridge", 0, "RF", "RG"),
        ("colpitts", 5, "C1", "C2"),
        ("pierce", 0, "C0", "C1"),
        ("colpitts", 5, "RB1", "RB2"),
    ],
)
def test_swapped_roles_do_not_agree(name, number, one, two):
    """Negative control: the same comparison with two roles exchanged on one side must fail."""
    options, values, solution = _one_unit(name, number)
    assert_agrees(solution, 0, independent(name, options, values, 85.0))
    with pytest.raises(AssertionError):
        assert_agrees(solution, 0, independent(name, options, {**values, one: values[two], two: values[one]}, 85.0))


@pytest.mark.parametrize(("name", "number"), [("colpitts", 5), ("pierce", 0)])
def test_a_wrong_temperature_law_does_not_agree(name, number):
    """Negative control: the independent side without its temperature laws must fail at 85 °C."""
    options, values, solution = _one_unit(name, number)
    with pytest.raises(AssertionError):
        assert_agrees(solution, 0, independent(name, options, values, 25.0))
