"""Level control at its stops, and what crossings leave out: figures from the definitions, texts whole."""

import numpy as np
import pytest

from yieldosc.circuits import registry
from yieldosc.parts.parameter import Parameter
from yieldosc.parts.shapes import Fixed
from yieldosc.solver import make_evaluator
from yieldosc.studies.reach import reach_findings
from yieldosc.studies.remarks import settling_findings
from yieldosc.studies.run import Setup
from yieldosc.study import Design, Requirement, Study

VALUES = {"R1": 1e4, "C1": 1e-8, "R2": 1e4, "C2": 1e-8, "RF": 21e3, "RG": 1e4, "RS_start": 100.0}


def stabilised(full_ohm: float) -> Setup:
    values = {**VALUES, "RS_full": full_ohm}
    circuit = registry.build("wien_bridge", {}, values)
    parts = tuple(
        Parameter(
            role=role, part=role, trait=circuit.role(role).trait, kind="other", unit=circuit.role(role).unit,
            nominal=value, low=value, typical=value, high=value, shape=Fixed(), pedigree="guaranteed",
        )
        for role, value in values.items()
    )  # fmt: skip
    design = Design(
        target_frequency_hz=1591.5, frequency_low_hz=1500.0, frequency_high_hz=1700.0,
        temperature_low_c=25.0, temperature_high_c=25.0,
    )  # fmt: skip
    requirement = Requirement("frequency_hz", 1500.0, 1700.0, "out_of_limits", "Hz")
    study = Study(
        name="wien", circuit=circuit, parameters=parts, conditions={}, design=design, requirements=(requirement,)
    )
    return Setup.of(study, make_evaluator(circuit, values), seed=1)


@pytest.mark.parametrize(
    ("full_ohm", "level", "clipping"),
    # critical gain 3; at full control K = 1 + 21/(10 + RS_full): 3 is reached at RS_full = 500 Ω
    # no unit and every unit of 4,096: 1 − 0.025^(1/4096) = 900.2 ppm, outward to two digits
    [(600.0, "note", "below 910 ppm"), (400.0, "warning", "above 99.909 %")],
)
def test_reach_of_the_stabiliser(full_ohm, level, clipping):
    reach = 3 / (1 + 21e3 / (1e4 + full_ohm))
    (found,) = reach_findings(stabilised(full_ohm), 4096, 0.95)
    assert found.level == level
    assert found.text == (
        f"Level control, over 4,096 units and every corner: {clipping} reach the stop of full control and clip "
        f"(least control reach {reach:.4g}, where 1 is the stop); below 910 ppm are at the stop of full gain and do "
        "not start."
    )


def test_a_circuit_without_level_control_has_no_reach(make_study, ideal_wien):
    assert reach_findings(Setup.of(make_study(), ideal_wien(), seed=1), 4096, 0.95) == []


def test_without_a_limiter_the_report_says_what_is_left_out(make_study, ideal_wien):
    (found,) = settling_findings(Setup.of(make_study(), ideal_wien(), seed=1), ())
    assert found.text == (
        "No limiter is declared, so every frequency is a crossing: where the circuit runs when its level is held "
        "without distortion. A stage that clips settles elsewhere, a low-Q RC circuit the more the larger its excess "
        "gain; that shift is left out."
    )


def test_no_reach_is_finite_where_nothing_starts():
    values = {**VALUES, "RS_start": 5000.0, "RS_full": 9000.0}  # K = 1 + 21/15 = 2.4: no unit starts
    circuit = registry.build("wien_bridge", {}, values)
    solution = make_evaluator(circuit, values).solve({k: np.array([v]) for k, v in values.items()}, 25.0)
    assert solution.control_reach[0] == pytest.approx(3 / (1 + 21 / 19), rel=1e-9)
