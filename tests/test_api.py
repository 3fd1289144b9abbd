"""The Python interface as its contract shows it."""

from pathlib import Path

import numpy as np
import pytest

import yieldosc
from yieldosc.circuits import registry

EXAMPLES = Path(__file__).parents[1] / "bom_examples"
WIEN = {"R1": 1e4, "C1": 1e-8, "R2": 1e4, "C2": 1e-8, "RF": 20.5e3, "RG": 1e4, "GBW": 3e6}


def test_one_unit_in_floats():
    # crossing of this unit by a separate integration study: 1587.76 Hz (printed to 0.01 Hz)
    unit = yieldosc.circuit("wien_bridge").evaluate(WIEN, options={}, temperature_c=25.0)
    assert unit.frequency_hz == pytest.approx(1587.76, abs=0.005)
    assert unit.settled_hz is None
    assert unit.outcome == "starts"
    assert isinstance(unit.outcome, yieldosc.Outcome)
    assert unit.other_modes_hz == ()
    assert unit.startup_margin == pytest.approx(3.05 / 3.0000076, rel=1e-6)  # K/K_c, K_c of a one-pole op-amp


def test_arrays_give_arrays_and_agree_with_floats():
    circuit = yieldosc.circuit("wien_bridge")
    values = {**WIEN, "R1": np.array([0.99e4, 1e4, 1.2e4])}
    units = circuit.evaluate(values)
    assert list(units.outcome) == ["starts", "starts", "no_start"]
    for i, r1 in enumerate(values["R1"]):
        alone = circuit.evaluate({**WIEN, "R1": float(r1)})
        assert alone.frequency_hz == units.frequency_hz[i]
        assert alone.startup_margin == units.startup_margin[i]


@pytest.mark.parametrize(
    ("values", "texts"),
    [
        ({**WIEN, "R1": 0.0}, ["R1 must be a finite number above zero; found 0.0"]),
        ({k: v for k, v in WIEN.items() if k != "C1"}, ["role C1 is missing: series arm"]),
        ({**WIEN, "RX": 1.0}, ["wien_bridge has no role 'RX' with these options"]),
        (
            {**WIEN, "R1": np.ones(3), "C1": np.ones(2)},
            ["arrays must be one-dimensional and of equal length; found [2, 3]"],
        ),
    ],
)
def test_values_that_cannot_be_used(values, texts):
    with pytest.raises(yieldosc.InputError) as caught:
        yieldosc.circuit("wien_bridge").evaluate(values)
    assert [f.text for f in caught.value.findings] == texts


def test_a_circuit_that_does_not_exist():
    with pytest.raises(yieldosc.InputError) as caught:
        yieldosc.circuit("wobble")
    listed = ", ".join(registry.names())
    assert caught.value.findings[0].text == f"there is no circuit named 'wobble'; the circuits are {listed}"


def test_assess_changes_nothing_and_writes_what_it_found(tmp_path):
    study = yieldosc.load(EXAMPLES / "tide_tone_1khz.xlsx")
    before = study.digest, study.parameters
    result = yieldosc.assess(study, units=4096, seed=0, workers=1)
    assert (study.digest, study.parameters) == before
    assert result.to_dict()["verdict"] == "does not meet"
    target = tmp_path / "result.xlsx"
    result.write_workbook(target)
    with pytest.raises(yieldosc.InputError) as caught:
        result.write_workbook(target)
    assert str(caught.value) == f"{target} exists and is not overwritten; choose another name, or overwrite=True"
    again = yieldosc.load(target)  # the result workbook is itself a study
    assert again.digest == study.digest
