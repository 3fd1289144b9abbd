"""Bias, temperature laws and small-signal figures of the stages, derived here again from circuit laws."""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.drawn import BJT_DEFAULTS, K_OVER_Q, bjt_point
from yieldosc.circuits import stages
from yieldosc.circuits.stages import (
    INVERTER,
    bjt,
    emitter_branches,
    feed_resistance_ohm,
    stage_branches,
    thermal_voltage_v,
)

DIVIDER = {**BJT_DEFAULTS, "VCC": 5.0, "RB1": 22e3, "RB2": 10e3, "hFE": 150.0}
COLLECTOR = {**BJT_DEFAULTS, "VCC": 5.0, "RB1": 180e3, "hFE": 150.0}


def arrays(values):
    return {k: np.array([v]) for k, v in values.items()}


def solved(values, bias, temperature_c=25.0, rfeed=0.0, rdc=0.0, own_law=frozenset()):
    out = bjt(bias).solve(arrays(values), temperature_c, own_law, rfeed, rdc)
    return {k: float(np.ravel(v)[0]) for k, v in out.symbols.items()}, bool(out.no_bias[0])


@pytest.mark.parametrize(
    ("temperature_c", "millivolt"), [(16.85, 24.990266), (25.0, 25.692579), (26.85, 25.852000), (85.0, 30.862979)]
)
def test_thermal_voltage(temperature_c, millivolt):
    """M01: kT/q at 290, 298.15, 300 and 358.15 K, k and q exact since SI 2019 (derived)."""
    assert thermal_voltage_v(temperature_c) * 1e3 == pytest.approx(millivolt, rel=1e-6)


@pytest.mark.parametrize(("temperature_c", "millisiemens"), [(25.0, 38.9217), (26.85, 38.6817)])
def test_transconductance_of_one_milliampere(temperature_c, millisiemens):
    """M02: gm = IC/VT at 1 mA (standard; relation seen at xtronics.com). Ic = 150 (VCC − VBE)/RB1 is set to 1 mA."""
    own = frozenset({"hFE", "VBE"})
    symbols, _ = solved({**DIVIDER, "RB1": 150 * 4.35 / 1e-3} | {"RB2": 1e18}, "divider", temperature_c, own_law=own)
    assert symbols["gm"] * 1e3 == pytest.approx(millisiemens, abs=1e-4)


@pytest.mark.parametrize("temperature_c", [-40.0, 25.0, 85.0])
@pytest.mark.parametrize(
    ("values", "bias", "rfeed", "rdc"),
    [
        (DIVIDER, "divider", 820.0, 680.0),
        ({k: v for k, v in DIVIDER.items() if k != "RB2"} | {"RB1": 470e3}, "divider", 820.0, 0.0),
        (COLLECTOR, "collector", 820.0, 0.0),
        (COLLECTOR, "collector", 1.2e3, 330.0),
    ],
)
def test_bias_by_mesh_equations(values, bias, rfeed, rdc, temperature_c):
    """Currents from Kirchhoff's two mesh equations, solved as a linear system."""
    beta = values["hFE"] * (1 + 0.005 * (temperature_c - 25))
    vbe = values["VBE"] - 2e-3 * (temperature_c - 25)
    if bias == "collector":
        # VCC = (Ic + Ib) Rfeed + Ib RB1 + VBE + (Ic + Ib) Rdc;  Ic = beta Ib
        matrix = np.array([[rfeed + rdc, rfeed + rdc + values["RB1"]], [1, -beta]])
        ic, ib = np.linalg.solve(matrix, [values["VCC"] - vbe, 0])
        vce = values["VCC"] - (ic + ib) * (rfeed + rdc)
    else:
        rb2 = values.get("RB2", 1e30)
        # unknowns Ic, Ib, V(base): base node, emitter loop, beta
        matrix = np.array([[0, 1, 1 / values["RB1"] + 1 / rb2], [-rdc, -rdc, 1], [1, -beta, 0]])
        ic, ib, _ = np.linalg.solve(matrix, [values["VCC"] / values["RB1"], vbe, 0])
        vce = values["VCC"] - ic * rfeed - (ic + ib) * rdc
    symbols, no_bias = solved(values, bias, temperature_c, rfeed, rdc)
    vt = K_OVER_Q * (temperature_c + 273.15)
    assert symbols["gm"] == pytest.approx(ic / vt, rel=1e-9)
    assert symbols["rin"] == pytest.approx(beta * vt / ic, rel=1e-9)
    assert symbols["rout"] == pytest.approx(100 / ic, rel=1e-9)
    assert symbols["cin"] == pytest.approx(max(ic / vt / (2 * math.pi * 300e6) - 2e-12, 0), rel=1e-9)
    assert symbols["cfb"] == 2e-12
    parallel = values["RB1"] if "RB2" not in values else 1 / (1 / values["RB1"] + 1 / values["RB2"])
    assert symbols["rb"] == pytest.approx(parallel, rel=1e-12)
    assert no_bias == (not vce > 0.2)
    assert bjt_point(values, temperature_c, bias, rfeed, rdc) == pytest.approx((ic, vce), rel=1e-9)


def test_saturation_is_at_0_2_volt():
    """The feed resistance at which VCE passes 0.2 V, by bisection on the hand-derived point, flips no_bias."""
    low, high = 10.0, 1e6
    for _ in range(60):
        middle = (low + high) / 2
        low, high = (middle, high) if bjt_point(DIVIDER, 25.0, "divider", middle, 680.0)[1] > 0.2 else (low, middle)
    assert solved(DIVIDER, "divider", rfeed=low * 0.999, rdc=680.0)[1] is False
    assert solved(DIVIDER, "divider", rfeed=low * 1.001, rdc=680.0)[1] is True


def test_a_stage_biased_from_its_own_collector_does_not_saturate():
    """VCE = VBE + Ib RB1 there, above 0.2 V whatever the feed (Kirchhoff)."""
    for rfeed in (1.0, 1e3, 1e6):
        assert solved(COLLECTOR, "collector", rfeed=rfeed)[1] is False


def test_a_base_below_vbe_has_no_bias_and_finite_figures():
    symbols, no_bias = solved({**DIVIDER, "RB2": 500.0}, "divider", rdc=680.0)
    assert no_bias
    assert all(math.isfinite(v) for v in symbols.values())


@pytest.mark.parametrize("temperature_c", [-40.0, 85.0])
def test_a_law_of_the_users_own_replaces_the_built_in_one(temperature_c):
    """Values in own_law arrive with their law applied: the stage must not apply its own on top."""
    applied = {"hFE": 150 * (1 + 0.005 * (temperature_c - 25)), "VBE": 0.65 - 2e-3 * (temperature_c - 25)}
    both, _ = solved({**DIVIDER, **applied}, "divider", temperature_c, rdc=680.0, own_law=frozenset(applied))
    built_in, _ = solved(DIVIDER, "divider", temperature_c, rdc=680.0)
    assert both == pytest.approx(built_in, rel=1e-12)
    twice, _ = solved({**DIVIDER, **applied}, "divider", temperature_c, rdc=680.0)
    assert abs(twice["rin"] / built_in["rin"] - 1) > 0.05  # negative control


@pytest.mark.parametrize("temperature_c", [-40.0, 25.0, 85.0])
def test_inverter(temperature_c):
    values = {"gm": 5e-3, "Rout": 20e3, "Cin": 5e-12, "Cout": 6e-12, "Cfb": 0.5e-12}
    out = INVERTER.solve(arrays(values), temperature_c, frozenset(), 0.0, 0.0)
    got = {k: float(np.ravel(v)[0]) for k, v in out.symbols.items()}
    gm = 5e-3 * ((temperature_c + 273.15) / 298.15) ** -1.5
    wanted = {"gm": gm, "rin": 1e12, "rout": 20e3, "cin": 5e-12, "cout": 6e-12, "cfb": 0.5e-12}
    assert got == pytest.approx(wanted, rel=1e-12)
    own = INVERTER.solve(arrays(values), temperature_c, frozenset({"gm"}), 0.0, 0.0)
    assert float(own.symbols["gm"][0]) == 5e-3
    assert out.no_bias is None


def test_defaults_are_those_of_the_definition():
    defaults = {r.name: r.default for r in bjt("divider").roles if r.default is not None}
    assert defaults == {"VBE": 0.65, "VA": 100.0, "fT": 300e6, "Cob": 2e-12}
    inverter = {r.name: r.default for r in INVERTER.roles if r.default is not None}
    assert inverter == {"Rout": 20e3, "Cin": 5e-12, "Cout": 5e-12, "Cfb": 0.5e-12}


def test_branches_of_a_stage():
    rows = {r.name: r for r in stage_branches(bjt("collector"), "b", "c", "e")}
    assert rows["gm"].nodes == ("c", "e", "b", "e")  # current flows from c to e, controlled by b − e
    assert rows["gm"].gain_element
    assert rows["rb"].nodes == ("b", "c")
    assert {r.name: r.nodes for r in stage_branches(bjt("divider"), "b", "c", "e")}["rb"] == ("b", "gnd")
    # with c at the supply, rout stands from ground to e and nothing is left from c to ground
    assert all(r.nodes[0] != r.nodes[1] for r in stage_branches(INVERTER, "g", "gnd", "gnd"))


def test_emitter_branches():
    def drawn(*present):
        node, rows = emitter_branches(frozenset(present))
        return node, {r.name: r.nodes for r in rows}

    assert drawn() == ("gnd", {})
    assert drawn("RE") == ("e", {"RE": ("e", "gnd")})
    assert drawn("RE", "CE") == ("e", {"RE": ("e", "gnd"), "CE": ("e", "gnd")})
    assert drawn("RE", "RE2", "CE") == ("e", {"RE": ("e", "e2"), "RE2": ("e2", "gnd"), "CE": ("e2", "gnd")})


def test_feed_resistance():
    assert feed_resistance_ohm({"RC": np.array([820.0]), "LCH_dcr": np.array([12.0])}) == 832
    assert feed_resistance_ohm({}) == 0


def test_constants():
    """SI 2019: both are exact (BIPM SI brochure, 9th edition; from memory)."""
    assert (stages.BOLTZMANN_J_PER_K, stages.ELEMENTARY_CHARGE_C) == (1.380649e-23, 1.602176634e-19)
