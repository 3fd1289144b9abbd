"""A study that declares a limiter: limits apply where the circuit settles, and the report says what that did."""

import re

import pytest

import yieldosc
from tests.sheets.studies import write


@pytest.fixture(scope="module")
def clipped(tmp_path_factory):
    path = write(
        tmp_path_factory.mktemp("clip") / "clip.xlsx",
        design={"option limiter": "clip", "temperature low": "25 °C", "temperature high": "25 °C"},
        roles={"VSAT": {"Min": "9 V", "Typ": "10 V", "Max": "11 V", "Source": "characterised"}},
    )
    return yieldosc.assess(yieldosc.load(path), units=4096, workers=1)


def test_settled_frequency_stands_beside_the_crossing(clipped):
    (corner,) = clipped.corners
    assert corner.settled_hz.q50 < corner.frequency_hz.q50
    # the nominal unit, solved alone by full harmonic balance
    unit = yieldosc.circuit("wien_bridge").evaluate(
        {"R1": 15.8e3, "C1": 1e-8, "R2": 15.8e3, "C2": 1e-8, "RF": 22e3, "RG": 1e4, "GBW": 1e6, "VSAT": 10.0},
        options={"limiter": "clip"},
    )
    alone = unit.settled_hz / unit.frequency_hz - 1
    assert corner.settled_hz.q50 / corner.frequency_hz.q50 - 1 == pytest.approx(alone, rel=0.1)
    assert corner.distortion.q50 == pytest.approx(unit.distortion, rel=0.1)


def test_limits_apply_to_the_settled_frequency(clipped, tmp_path):
    path = write(tmp_path / "plain.xlsx", design={"temperature low": "25 °C", "temperature high": "25 °C"})
    free = yieldosc.assess(yieldosc.load(path), units=4096, workers=1)  # the same units, held instead of clipped
    assert clipped.outcomes["out_of_limits"] > free.outcomes["out_of_limits"] + 300


def test_the_report_says_so(clipped):
    (found,) = [f for f in clipped.findings if f.code == "settling-included"]
    assert re.fullmatch(
        r"The limiter is clip: limits apply to the frequency where the circuit settles\. Its median lies −\d\.\d+ % "
        r"from the crossing's at every corner; the spread of that shift is in every rate\.",
        found.text,
    )


def test_json_carries_both(clipped):
    corner = clipped.to_dict()["corners"][0]
    assert corner["settled_hz"]["q50"] < corner["frequency_hz"]["q50"]
