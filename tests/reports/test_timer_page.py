"""A circuit without a start-up question: its page shows frequency and distortion and says so."""

import io
from dataclasses import replace

import pytest

from tests.samples import SAMPLES
from yieldosc.circuits import registry
from yieldosc.parts.parameter import Parameter
from yieldosc.parts.shapes import Uniform
from yieldosc.reports.console import make_console, print_assessment
from yieldosc.reports.workbook import make_workbook
from yieldosc.studies.assess import assess
from yieldosc.study import Design, Requirement, Study


@pytest.fixture(scope="module", params=["timer_astable", "schmitt_rc", "square_to_sine"])
def found(request):
    sample = SAMPLES[request.param]
    circuit = registry.build(request.param, sample.options, sample.values)
    values = {role.name: sample.values.get(role.name, role.default) for role in circuit.roles}
    parts = tuple(
        Parameter(
            role=role.name, part=role.name, trait=role.trait, kind="other", unit=role.unit, nominal=values[role.name],
            low=0.99 * values[role.name], typical=values[role.name], high=1.01 * values[role.name], shape=Uniform(),
            pedigree="guaranteed",
        )
        for role in circuit.roles
        if role.name != circuit.supply_role
    )  # fmt: skip
    design = Design(
        target_frequency_hz=1.0, frequency_low_hz=1e-9, frequency_high_hz=1e9, temperature_low_c=25.0,
        temperature_high_c=25.0, supply_v=values.get(circuit.supply_role), yield_target=0.9,
    )  # fmt: skip
    limits = (
        Requirement("frequency_hz", 1e-9, 1e9, "out_of_limits", "Hz"),
        Requirement("startup_margin", 1.0, None, "low_margin", "1"),
    )
    study = Study(
        name="timer", circuit=circuit, parameters=parts, conditions={}, design=design, requirements=limits, digest="0" * 64
    )
    return request.param, assess(study, units=4096, workers=1)


def page(assessment):
    stream = io.StringIO()
    print_assessment(assessment, make_console(stream))
    return stream.getvalue()


def test_page_says_that_there_is_no_start_up_question(found):
    name, assessment = found
    text = page(assessment)
    assert "no start-up question: this circuit has no growing oscillation, it switches" in text
    assert "Runs" in text
    assert "does not latch" in text
    assert "Start-up margin" not in text
    assert ("dist. median" in text) == (name == "square_to_sine")
    assert max(map(len, text.splitlines())) <= 100


def test_margins_are_null_and_distortion_stands_where_there_is_one(found):
    name, assessment = found
    corner = assessment.corners[0]
    assert corner.margin is None
    assert (corner.distortion is not None) == (name == "square_to_sine")
    headings = {cell.value for row in make_workbook(assessment)["Temperatures"].iter_rows() for cell in row}
    assert ("Distortion, median" in headings) == (name == "square_to_sine")


def test_a_timer_that_latches_fails_as_no_start(found):
    name, assessment = found
    if name == "timer_astable":
        # Rd/(RA + Rd) above vl: the low phase never ends (the definition of latching in the timer's own equations)
        ra = assessment.study.parameter("RA").typical
        latched = tuple(replace(p, low=ra, typical=ra, high=ra) if p.role == "Rd" else p for p in assessment.study.parameters)
        again = assess(replace(assessment.study, parameters=latched), units=4096, workers=1)
        assert again.outcomes["no_start"] == 4096
    else:
        assert assessment.outcomes["no_start"] == 0
