"""Quartz (rows E01–E13). Rows E16 and E17 state practice and titles: no number to test."""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.handmade import circuit
from tests.handmade import solve as solve_table
from tests.independent import Element, Unit
from yieldosc.circuits import crystal, registry
from yieldosc.circuits.circuit import Branch
from yieldosc.solver import make_evaluator

ARM = (
    Branch("X", "crystal", ("a", "gnd"), ("Lm", "Cm", "ESR")),
    Branch("C0", "C", ("a", "gnd"), ("C0",)),
    Branch("g", "transconductance", ("a", "gnd", "gnd", "a"), ("g",), True),
)


def _parallel_hz(lm, cm, c0, resistance):
    """Where a negative conductance across the crystal runs: its parallel resonance."""
    series = 1 / (2 * math.pi * math.sqrt(lm * cm))
    made = circuit(ARM, "g", series * math.sqrt(1 + cm / c0), band=(series, cm / c0))
    s = solve_table(made, {"Lm": lm, "Cm": cm, "ESR": resistance, "C0": c0, "g": 1.0})
    return series, float(s.frequency_hz[0])


def test_e01_series_and_parallel_resonance():
    """Malvino & Bates, Electronic Principles, Ex 23-5 p. 912 (companion notebook, seen): 3 H, 0.05 pF, 10 pF. 1 Hz."""
    series, parallel = _parallel_hz(3.0, 0.05e-12, 10e-12, 10.0)
    assert series == pytest.approx(410.936e3, abs=1)
    assert parallel == pytest.approx(411.962e3, abs=1)


def test_e02_resonances_and_q():
    """Salivahanan et al., Electronic Devices and Circuits, Ex 15.12 p. 489; Prakash & Rawat Misc 8.5 p. 305 (companion
    notebook, seen): 0.5 H, 0.06 pF, 1 pF, 5 kΩ; Q 577.35 and 594.42. 10 Hz and 0.01. fs and fp are those of the
    lossless crystal, so the resonances are taken at a thousandth of the resistance."""
    series, parallel = _parallel_hz(0.5, 0.06e-12, 1e-12, 5.0)
    assert series == pytest.approx(918.881e3, abs=10)
    assert parallel == pytest.approx(946.046e3, abs=10)
    assert 2 * math.pi * series * 0.5 / 5e3 == pytest.approx(577.35, abs=0.01)
    assert 2 * math.pi * parallel * 0.5 / 5e3 == pytest.approx(594.42, abs=0.01)


def test_e05_exact_parallel_resonance_and_its_approximation():
    """Embry-Riddle EE412 note on crystal impedance (seen; its 10 368 comes from a rounded C1): 0.1 rad/s."""
    cm, lm, c0 = 2.199113e-15, 0.08, 8e-12
    series, parallel = _parallel_hz(lm, cm, c0, 1e-3)
    w_series = 2 * math.pi * series
    assert w_series == pytest.approx(75_393_036, abs=1)
    assert 2 * math.pi * parallel - w_series == pytest.approx(10_361.65, abs=0.1)
    assert w_series * cm / (2 * c0) == pytest.approx(10_362.36, abs=0.1)


QUARTZ = {"FS": np.array([10e6]), "Cm": np.array([20e-15]), "C0": np.array([5e-12]), "ESR": np.array([50.0])}


def test_e08_load_resonance_and_trim_sensitivity():
    """Petermann pull page; AN2867 rev 18 p. 15 for R_L; IEC 60122-1 as quoted (formulas seen, numbers derived). 1e-9
    in fs; 1e-5 in the slope: finite difference of 1 fF on a curve of 20 pF."""
    loaded = crystal.loaded_frequency_hz(QUARTZ, np.array([20e-12]))[0] / 10e6 - 1
    assert loaded * 1e6 == pytest.approx(399.920, abs=5e-4)
    up, down = (crystal.loaded_frequency_hz(QUARTZ, np.array([20e-12 + d]))[0] for d in (0.5e-15, -0.5e-15))
    ppm_per_pf = (down - up) / 10e6 / 1e-15 * 1e-12 * 1e6
    assert ppm_per_pf == pytest.approx(16.000, rel=2e-3)  # exact slope is 1 − 3 Cm/(2·2(C0 + CL)) of it
    assert pytest.approx(1.5625, rel=1e-12) == (1 + 5 / 20) ** 2


def test_e08_resistance_at_load_is_what_the_network_presents():
    """R_L = ESR (1 + C0/CL)²: crystal and CL in series resonate with that resistance (AN2867 rev 18 p. 15, formula
    seen). 1e-3: ESR is 50 Ω against reactances of 800 Ω and the formula leaves out their square."""
    lm = 1 / ((2 * math.pi * 10e6) ** 2 * 20e-15)
    table = (
        Branch("X", "crystal", ("a", "m"), ("Lm", "Cm", "ESR")),
        Branch("C0", "C", ("a", "m"), ("C0",)),
        Branch("CL", "C", ("m", "gnd"), ("CL",)),
        Branch("RN", "R", ("a", "q"), ("RN",), True),
        Branch("K", "gain", ("q", "gnd", "gnd"), ("one",)),
    )
    # a resistance RN from a to ground (q is held at 0): the loop's current is steady where RN = −R_L
    made = circuit(table, "RN", 10e6 * (1 + 4e-4), band=(10e6, 4e-3))
    s = solve_table(made, {"Lm": lm, "Cm": 20e-15, "ESR": 5.0, "C0": 5e-12, "CL": 20e-12, "RN": -1.0, "one": 1.0})
    assert -s.critical_gain[0] == pytest.approx(5.0 * 1.5625, rel=1e-3)
    assert s.frequency_hz[0] == pytest.approx(10e6 * (1 + 399.920e-6), rel=1e-7)


def test_e10_pull_between_two_loads():
    """Petermann; Cardinal glossary "Pullability" (formula seen): Δf/f = (C1/2)(1/(C0+CLeff) − 1/(C0+CLnom)), the first
    order of the exact law: the second is Cm/(4(C0+CL)) = 2e-4 of it."""
    nominal, effective = (crystal.loaded_frequency_hz(QUARTZ, np.array([c]))[0] for c in (20e-12, 15e-12))
    first_order = 20e-15 / 2 * (1 / 20e-12 - 1 / 25e-12)
    assert (effective - nominal) / nominal == pytest.approx(first_order, rel=2e-3)
    assert effective > nominal  # negative control: less load, higher frequency


@pytest.mark.parametrize(
    ("resistance", "critical", "margin"), [(80.0, 0.82792242e-3, 20.5333), (180.0, 1.86282545e-3, 9.12592)]
)
def test_e11_critical_transconductance(resistance, critical, margin):
    """ST AN2867 rev 18 p. 13 (formula seen quoted; a worked notebook, seen): gm_crit = 4 ESR ω² (C0 + CL)², 16 MHz,
    7 pF, 9 pF; a resistor of 100 Ω counts with the ESR. The network must approach it as ESR goes to 0 (low-loss limit
    of Vittoz, Degrauwe & Bitz, from memory): 2e-6 at a thousandth of the resistance, gm_crit is linear there."""
    assert 4 * resistance * (2 * math.pi * 16e6) ** 2 * (16e-12) ** 2 == pytest.approx(critical, rel=1e-8)
    assert 17e-3 / critical == pytest.approx(margin, rel=1e-5)
    share = 1e-3
    values = {"FL": 16e6, "CL": 9e-12, "Cm": 1e-15, "C0": 7e-12, "ESR": resistance * share, "C1": 18e-12, "C2": 18e-12}
    values |= {"RF": 1e15, "Rout": 1e15, "gm": 17e-3 * share, "Cin": 1e-21, "Cout": 1e-21, "Cfb": 1e-21}
    made = registry.build("pierce", {"stage": "inverter"}, values)
    s = make_evaluator(made, values).solve({k: np.array([v]) for k, v in values.items()}, 25.0)
    assert s.frequency_hz[0] == pytest.approx(16e6, rel=1e-7)
    gate = 1e-12  # siemens of the stage's input, which the formula leaves out
    assert s.critical_gain[0] == pytest.approx(critical * share + gate, rel=2e-5)
    assert s.startup_margin[0] == pytest.approx(margin, rel=1e-4)


def test_e11_swapped_resistances_do_not_fit():
    """NEGATIVE: taking the resistance at load for the series resistance is wrong by (1 + C0/CL)² = 3.16."""
    right, wrong = (4 * r * (2 * math.pi * 16e6) ** 2 * (16e-12) ** 2 for r in (80.0, 80.0 * (1 + 7 / 9) ** 2))
    assert abs(wrong / right - 1) > 2


def test_e13_exact_three_point_impedance():
    """Vittoz, Degrauwe & Bitz, IEEE JSSC 23 (1988) 774 (from memory; verified numerically): 10 MHz, 20, 20, 5 pF.
    gm_opt = 7.539822 mS, greatest |R| = 1061.0330 Ω. The starting side is tested on the solver in the tests of the
    modes; here the independent solution is held against the formula, 1e-6."""
    w, gm = 2 * math.pi * 10e6, 7.539822e-3
    assert w * (20e-12 + 20e-12 + 20e-12 * 20e-12 / 5e-12) == pytest.approx(gm, rel=1e-6)

    def resistance(gain):
        y1 = y2 = 1j * w * 20e-12
        y3 = 1j * w * 5e-12
        # impedance seen between g and d of C3 ∥ (C1, C2, gm): unit current in at g, out at d
        v = np.linalg.solve(np.array([[y1 + y3, -y3], [gain - y3, y2 + y3]]), np.array([1.0, -1.0]))
        return (v[0] - v[1]).real

    assert resistance(gm) == pytest.approx(-1061.0330, rel=1e-6)
    assert resistance(gm * 1.01) > resistance(gm) < resistance(gm * 0.99)
    cm = 1e-16
    rows = [
        Element("arm", ("g", "d"), (1 / (w**2 * cm), cm, 1061.0330 * 0.999)),
        Element("C", ("g", "d"), (5e-12,)),
        Element("C", ("g", "gnd"), (20e-12,)),
        Element("C", ("d", "gnd"), (20e-12,)),
        Element("gm", ("d", "gnd", "g", "gnd"), (gm,), gain=True),
    ]
    assert len(Unit(rows, w0=w).growing()) == 2
