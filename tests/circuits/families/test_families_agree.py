"""Every option of every family against a solution that shares no code with the solver, on drawn units at −40, 25 and
85 °C: frequency 1e-9, margin 1e-6, growth 1e-4, outcome and number of growing poles (the requirement's tolerances).

The independent side reads the family's branch table and symbols; the tables themselves are held by closed forms,
published examples and, for the first three circuits, by elements drawn by hand (tests/solver/test_agreement.py).
"""

from __future__ import annotations

import numpy as np
import pytest

from tests.circuits.families.cases import ALL
from tests.circuits.families.common import full_values, independent, solve_circuit
from tests.rules import judge
from tests.solver.test_agreement import assert_agrees, draw
from yieldosc.circuits import registry

CASES = [pytest.param(*case, id=f"{case[0]}-{number}") for number, case in enumerate(ALL)]


@pytest.mark.parametrize("temperature_c", [-40.0, 25.0, 85.0])
@pytest.mark.parametrize(("name", "options", "values"), CASES)
def test_units_agree(name, options, values, temperature_c):
    # k has no logarithm at 0 and must stay below 1; supplies are conditions
    loose = {k: v for k, v in values.items() if k not in ("k", "VDD")}
    drawn = draw(loose, 1, 0.1, seed=int(temperature_c) + 40 + len(values))
    circuit = registry.build(name, options, values)
    arrays = full_values(circuit, values) | drawn
    solution = solve_circuit(circuit, arrays, temperature_c)
    unit = independent(circuit, arrays, temperature_c, level_ohm=1e3)
    design = float(np.ravel(circuit.design_frequency(arrays))[0])
    band = {}
    if circuit.band is not None:
        centre, half = circuit.band(arrays)
        band = {"centre_hz": float(centre[0]), "half": float(half[0])}
    want = judge(unit, design, **band)
    assert_agrees(solution, 0, want)
    assert np.isfinite(solution.startup_margin[0])


def test_every_family_with_a_network_is_among_the_cases():
    direct = {"timer_astable", "schmitt_rc", "square_to_sine"}
    assert {case[0] for case in ALL} | {"wien_bridge"} == set(registry.names()) - direct


def test_every_choice_is_among_the_cases():
    for name in {case[0] for case in ALL}:
        for option in registry.family(name).options:
            if option.name == "limiter" or name == "colpitts":  # the bjt's grounds stand in tests/samples.py
                continue
            used = {case[1].get(option.name, option.choices[0]) for case in ALL if case[0] == name}
            assert used == set(option.choices), (name, option.name)
