"""Crystal circuits: the gain window, both start-up figures, third overtones and traps."""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.circuits.families.common import built, solve, solve_circuit, symbols_of
from tests.independent import Unit, from_branches
from tests.samples import BJT, JFET, QUARTZ
from yieldosc.solver.solution import Status

WINDOW = {
    **QUARTZ,
    "VCC": 5.0,
    "hFE": 150.0,
    "RB1": 22e3,
    "RB2": 10e3,
    "RE": 1e3,
    "L": 4.7e-6,
    "L_dcr": 1.0,
    "C1": 100e-12,
    "C2": 470e-12,
    "RL": 5e3,
}


def poles_at(share: float) -> list[complex]:
    """Growing poles of the window case at a share of its transconductance, by the independent solution."""
    circuit, arrays = built("crystal_common_base", {}, WINDOW)
    symbols = symbols_of(circuit, arrays)
    unit = Unit(
        from_branches(circuit.branches, {**symbols, "gm": share * symbols["gm"]}, "gm"), w0=2 * math.pi * 8e6, r0=100.0
    )
    return [complex(p) for p in unit.growing()]


def test_the_gain_window():
    """The requirement's case (a full nodal solution): margin 0.291, nothing grows, not the 13.7 of a loop gain."""
    s = solve("crystal_common_base", {}, WINDOW)
    assert s.startup_margin[0] == pytest.approx(0.291, abs=5e-4)
    assert Status(s.status[0]) is Status.NO_START
    assert poles_at(1.0) == []


@pytest.mark.parametrize(
    ("share", "frequency_hz"), [(0.070, None), (0.076, 8e6), (0.285, 8e6), (0.297, None), (1.90, None), (2.0, 6.3e6)]
)
def test_what_grows_at_other_gains(share, frequency_hz):
    """Crystal mode between 0.073 and 0.291 of the transconductance, the coil near 6.3 MHz from 1.95 times upward."""
    growing = poles_at(share)
    assert len(growing) == (0 if frequency_hz is None else 2)
    if frequency_hz is not None:
        assert abs(growing[0].imag) / (2 * math.pi) == pytest.approx(frequency_hz, rel=0.01 if frequency_hz < 7e6 else 1e-3)


def test_a_4_mhz_crystal_on_a_coil():
    """Common practice, no source: a 4 MHz crystal in a common-base circuit with a coil has been seen at 6.56 MHz. With a
    coil that resonates there and 20 pF across the crystal the model's unit is a wrong mode, and says at which frequency;
    with 4 pF across the crystal the base is not grounded well enough for the coil's mode."""
    values = {**WINDOW, "FL": 4e6, "ESR": 60.0, "C0": 20e-12, "L": 6.8e-6}
    s = solve("crystal_common_base", {}, values)
    assert Status(s.status[0]) is Status.WRONG_MODE
    assert s.other_mode_hz[0] == pytest.approx(6.56e6, rel=0.05)
    assert Status(solve("crystal_common_base", {}, {**values, "C0": 4e-12}).status[0]) is Status.NO_START


# -- start-up figures ---------------------------------------------------------------------------------------------------

BARE = {"RF": 1e15, "Rout": 1e15, "Cin": 1e-22, "Cout": 1e-22, "Cfb": 1e-22}


def test_e11_critical_transconductance():
    """E11: 4 ESR ω² (C0 + CL)² = 0.82792242 mA/V for ESR 80 Ω, 16 MHz, C0 7 pF, CL 9 pF; 17 mA/V is margin 20.5333; with
    100 Ω in series with the crystal 1.86282545 and 9.12592 (ST AN2867 rev 18 p. 13 and a worked notebook, seen). The
    formula is the low-loss limit: the quadratic term in gm is 1 % here and falls with ESR²; at a thousandth of the ESR the
    gate's 1e12 Ω (1e-12 S beside 0.8e-6 S) is what is left."""
    arm = {"FL": 16e6, "CL": 9e-12, "Cm": 1e-15, "C0": 7e-12, "C1": 18e-12, "C2": 18e-12}
    lossy = solve("pierce", {}, {**arm, **BARE, "ESR": 80.0, "gm": 17e-3})
    assert lossy.critical_gain[0] == pytest.approx(0.82792242e-3, rel=0.012)
    scaled = solve("pierce", {}, {**arm, **BARE, "ESR": 80e-3, "gm": 17e-6})
    assert scaled.critical_gain[0] == pytest.approx(0.82792242e-6, rel=3e-6)
    assert scaled.startup_margin[0] == pytest.approx(20.5333, abs=1e-4)
    series = solve("pierce", {}, {**arm, **BARE, "ESR": 180e-3, "gm": 17e-6})
    assert series.critical_gain[0] == pytest.approx(1.86282545e-6, rel=3e-6)
    assert series.startup_margin[0] == pytest.approx(9.12592, abs=3e-5)


@pytest.mark.parametrize(("share", "ratio"), [(1.0, 1.0), (0.5, 0.8), (2.0, 0.8)])
def test_e13_largest_negative_resistance(share, ratio):
    """E13: ω = 2π 10 MHz, C1 = C2 = 20 pF, C3 = 5 pF: gm_opt = 7.539822 mS, max |Rneg| = 1061.0330 Ω (Vittoz, Degrauwe &
    Bitz, IEEE JSSC 23 (1988) 774, from memory). Away from it the circle gives 2x/(1 + x²), x = gm/gm_opt."""
    values = {"FS": 1e7, "Cm": 1e-20, "C0": 5e-12, "ESR": 10.0, "C1": 20e-12, "C2": 20e-12}
    s = solve("pierce", {}, {**values, **BARE, "gm": share * 7.539822e-3})
    assert s.resistance_ratio[0] * 10 == pytest.approx(ratio * 1061.0330, rel=1e-6)


def test_resistance_ratio_is_one_where_the_margin_is():
    """At the critical transconductance the circuit replaces exactly what the arm loses; both figures cross 1 together."""
    values = {**QUARTZ, "C1": 27e-12, "C2": 22e-12, "RF": 1e6, "gm": 5e-3, "CX": 1e-12, "RS_series": 100.0}
    gm = float(solve("pierce", {}, values).critical_gain[0])
    critical = solve("pierce", {}, {**values, "gm": gm})
    assert critical.startup_margin[0] == pytest.approx(1, rel=1e-9)
    assert critical.resistance_ratio[0] == pytest.approx(1, rel=1e-6)
    for share in (0.9, 1.1):
        s = solve("pierce", {}, {**values, "gm": share * gm})
        assert (s.resistance_ratio[0] > 1) == (s.startup_margin[0] > 1) == (share > 1)


@pytest.mark.parametrize(
    ("name", "options", "values"),
    [
        ("crystal_colpitts", {}, {**QUARTZ, **BJT, "C1": 100e-12, "C2": 100e-12, "CT": 100e-12}),
        ("crystal_common_base", {}, WINDOW),
        ("pierce", {"stage": "jfet"}, {**QUARTZ, **JFET, "C1": 33e-12, "C2": 33e-12, "RC": 1e3, "CE": 1e-8}),
    ],
)
def test_impedance_at_the_arm_by_a_nodal_matrix(name, options, values):
    """−R/ESR against a complex nodal matrix of the branch table without the arm, fed by one ampere."""
    circuit, arrays = built(name, options, values)
    s = solve_circuit(circuit, arrays)
    symbols = symbols_of(circuit, arrays)
    p = 2j * math.pi * float(s.frequency_hz[0])
    nodes = sorted({n for row in circuit.branches for n in row.nodes} - {"gnd"})
    at = {n: i for i, n in enumerate(nodes)}
    matrix = np.zeros((len(nodes), len(nodes)), dtype=complex)
    feed = np.zeros(len(nodes), dtype=complex)

    def stamp(current, voltage, y):
        for i, a in zip(current, (1, -1), strict=True):
            for j, b in zip(voltage, (1, -1), strict=True):
                if "gnd" not in (i, j):
                    matrix[at[i], at[j]] += a * b * y

    for row in circuit.branches:
        v = [symbols[n] for n in row.symbols]
        if row.kind == "crystal":
            for node, sign in zip(row.nodes, (1, -1), strict=True):
                if node != "gnd":
                    feed[at[node]] += sign
            ends = row.nodes
            continue
        if row.kind == "transconductance":
            stamp(row.nodes[:2], row.nodes[2:], v[0])
            continue
        impedance = {"R": v[0], "C": 1 / (p * v[0]), "L": p * v[0] + sum(v[1:])}[row.kind]
        stamp(row.nodes, row.nodes, 1 / impedance)
    volts = np.linalg.solve(matrix, feed)
    z = sum(sign * volts[at[n]] for n, sign in zip(ends, (1, -1), strict=True) if n != "gnd")
    assert s.resistance_ratio[0] == pytest.approx(-z.real / values["ESR"], rel=1e-6)


def test_circuits_without_a_crystal_have_no_resistance_ratio():
    assert solve("wien_bridge", {}, {"R1": 1e4, "C1": 1e-8, "R2": 1e4, "C2": 1e-8, "RF": 22e3, "RG": 1e4}).resistance_ratio is None


# -- overtones ------------------------------------------------------------------------------------------------------------

PIERCE = {**QUARTZ, "C1": 27e-12, "C2": 22e-12, "RF": 1e6, "gm": 5e-3}
OVERTONE = {"Cm3": 4e-15, "ESR3": 15.0}


def test_third_overtone_stands_at_three_times_fs():
    circuit, arrays = built("pierce", {}, {**PIERCE, **OVERTONE})
    symbols = symbols_of(circuit, arrays)
    arm = [1 / (2 * math.pi * math.sqrt(symbols[lm] * symbols[cm])) for lm, cm in (("Lm", "Cm"), ("Lm3", "Cm3"))]
    assert arm[1] / arm[0] == pytest.approx(3, rel=1e-12)
    other, arrays = built("pierce", {}, {**PIERCE, **OVERTONE, "F3": 24.05e6})
    symbols = symbols_of(other, arrays)
    assert 1 / (2 * math.pi * math.sqrt(symbols["Lm3"] * symbols["Cm3"])) == pytest.approx(24.05e6, rel=1e-12)


def test_a_trap_keeps_the_overtone_from_growing():
    """A lively overtone grows beside the fundamental; a trap resonant there takes its gain, and the fundamental starts."""
    lively = solve("pierce", {}, {**PIERCE, **OVERTONE})
    assert lively.other_mode_hz[0] == pytest.approx(24e6, rel=1e-3)
    trap = {"LTRAP": 1e-6, "CTRAP": 1 / ((2 * math.pi * 24e6) ** 2 * 1e-6)}
    trapped = solve("pierce", {}, {**PIERCE, **OVERTONE, **trap})
    assert Status(trapped.status[0]) is Status.STARTS
    assert np.isnan(trapped.other_mode_hz[0])
