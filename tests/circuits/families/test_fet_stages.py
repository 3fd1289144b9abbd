"""Bias and temperature laws of the field-effect stages, derived here again; who may bring a law of their own."""

from __future__ import annotations

import math

import numpy as np
import pytest

from yieldosc.circuits.stages import JFET, MOSFET

FIGURES = {"VDD": 24.0, "IDSS": 8e-3, "VGSoff": 4.0, "RG": 1e6, "Ciss": 6e-12, "Crss": 2e-12, "gos": 20e-6}
INSULATED = {"gfs": 5e-3, "RG": 1e6, "Ciss": 6e-12, "Crss": 2e-12, "gos": 50e-6}


def point(values, temperature_c=25.0, rfeed=0.0, rdc=0.0, own_law=frozenset(), stage=JFET):
    arrays = {k: np.array([v]) for k, v in values.items()}
    bias = stage.solve(arrays, temperature_c, own_law, rfeed, rdc)
    return {k: float(np.ravel(v)[0]) for k, v in bias.symbols.items()}, bias.no_bias


@pytest.mark.parametrize(("vgs", "gm"), [(0.5, 3.5e-3), (1.5, 2.5e-3), (2.5, 1.5e-3)])
def test_m05_transconductance(vgs, gm):
    """M05: IDSS 8 mA, VP −4 V: 3.5, 2.5, 1.5 mS at VGS −0.5, −1.5, −2.5 V by formula (Boylestad & Nashelsky, Ex 8.1 and 8.2,
    seen). The source resistor is the one that makes this VGS."""
    drain_a = 8e-3 * (1 - vgs / 4) ** 2
    symbols, no_bias = point(FIGURES, rdc=vgs / drain_a)
    assert symbols["gm"] == pytest.approx(gm, rel=1e-9)
    assert not no_bias[0]


def bisected_current(b, vp, rdc):
    """Id = B (Vp − Id Rdc)² between 0 and Vp/Rdc, where the left side less the right rises."""
    low, high = 0.0, vp / rdc
    for _ in range(200):
        middle = (low + high) / 2
        low, high = (middle, high) if middle < b * (vp - middle * rdc) ** 2 else (low, middle)
    return low


@pytest.mark.parametrize("temperature_c", [-40.0, 25.0, 85.0])
@pytest.mark.parametrize("rdc", [47.0, 1e3, 22e3])
def test_bias_by_bisection(temperature_c, rdc):
    kelvin = temperature_c + 273.15
    b = 8e-3 / 16 * (kelvin / 298.15) ** -2.1
    vp = 4.0 + 2.2e-3 * (temperature_c - 25)
    symbols, _ = point(FIGURES, temperature_c, rdc=rdc)
    assert symbols["gm"] == pytest.approx(2 * math.sqrt(b * bisected_current(b, vp, rdc)), rel=1e-9)
    assert symbols["rout"] == pytest.approx(50e3, rel=1e-12)
    assert (symbols["cin"], symbols["cfb"]) == (pytest.approx(4e-12, rel=1e-12), 2e-12)
    assert (symbols["rin"], symbols["rb"]) == (1e12, 1e6)


def test_without_a_source_resistor_the_current_is_idss():
    symbols, _ = point(FIGURES)
    assert symbols["gm"] == pytest.approx(2 * 8e-3 / 4, rel=1e-12)


def test_no_bias_where_the_drain_leaves_saturation():
    """VDD − Id (Rfeed + Rdc) = Vp − Id Rdc: at Rfeed = (VDD − Vp)/Id the stage stops being one."""
    drain_a = bisected_current(8e-3 / 16, 4.0, 1e3)
    edge = (24.0 - 4.0) / drain_a
    assert not point(FIGURES, rfeed=edge * 0.999, rdc=1e3)[1][0]
    assert point(FIGURES, rfeed=edge * 1.001, rdc=1e3)[1][0]


def test_no_bias_without_a_pinch_off_voltage():
    """At −40 °C 2.2 mV/K take 0.143 V off: a part of 0.1 V has no channel to control, and its figures stay finite."""
    symbols, no_bias = point({**FIGURES, "VGSoff": 0.1}, -40.0, rdc=1e3)
    assert no_bias[0]
    assert all(np.isfinite(v) for v in symbols.values())
    assert not point({**FIGURES, "VGSoff": 0.2}, -40.0, rdc=1e3)[1][0]


def test_own_laws_replace_the_built_in_ones():
    """A value that arrives with a law applied is used as it is: at 85 °C the 25 °C figures come back."""
    symbols, _ = point(FIGURES, 85.0, rdc=1e3, own_law=frozenset({"IDSS", "VGSoff"}))
    room, _ = point(FIGURES, 25.0, rdc=1e3)
    assert symbols == room
    assert point(FIGURES, 85.0, rdc=1e3)[0]["gm"] != pytest.approx(room["gm"], rel=1e-2)
    own, _ = point(INSULATED, 85.0, own_law=frozenset({"gfs"}), stage=MOSFET)
    assert own["gm"] == 5e-3


@pytest.mark.parametrize("temperature_c", [-40.0, 25.0, 85.0])
def test_mosfet_transconductance(temperature_c):
    symbols, no_bias = point(INSULATED, temperature_c, stage=MOSFET)
    assert symbols["gm"] == pytest.approx(5e-3 * ((temperature_c + 273.15) / 298.15) ** -1.5, rel=1e-12)
    assert no_bias is None
