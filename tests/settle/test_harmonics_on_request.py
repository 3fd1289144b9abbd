"""Harmonics of a settled unit through the public call: they add up to the distortion, and start from the mean."""

import numpy as np
import pytest

import yieldosc
from yieldosc.errors import InputError

WIEN = {"R1": 1e4, "C1": 1e-8, "R2": 1e4, "C2": 1e-8, "RF": 20.5e3, "RG": 1e4, "GBW": 3e6, "VSAT": 2.5}


def test_harmonics_make_up_the_distortion():
    circuit = yieldosc.circuit("wien_bridge")
    unit = circuit.evaluate(WIEN, {"limiter": "clip"})
    waves = circuit.harmonics(WIEN, {"limiter": "clip"})
    assert waves.settled_hz[0] == pytest.approx(unit.settled_hz, rel=1e-12)
    for wave, distortion in ((waves.at_output, unit.distortion), (waves.at_limiter, unit.distortion_in)):
        assert abs(wave[0, 1]) == pytest.approx(1.0)
        assert np.sqrt(np.sum(np.abs(wave[0, 2:]) ** 2)) == pytest.approx(distortion, rel=1e-9)
        assert np.abs(wave[0, 0::2]).max() == 0  # equal rails: no mean, no even harmonic


def test_without_a_limiter_there_are_none():
    values = {name: value for name, value in WIEN.items() if name != "VSAT"}
    with pytest.raises(InputError) as caught:
        yieldosc.circuit("wien_bridge").harmonics(values, {})
    assert [f.text for f in caught.value.findings] == ["harmonics need a limiter: give the option limiter"]
