"""Hartley, Colpitts with every stage, twin-T and quadrature in their limits and in published examples."""

from __future__ import annotations

import math

import pytest

from tests.circuits.families.common import solve
from tests.samples import BJT, COIL, JFET, TANK
from yieldosc.solver.solution import Status

IDEAL_FET = {"gfs": 1e-3, "Ciss": 2e-22, "Crss": 1e-22, "gos": 1e-15, "RG": 1e15}


def hartley(l1: float, l2: float, k: float, c: float, **more: float):
    values = {"L1": l1, "L2": l2, "k": k, "C": c, "CC": 1.0, **IDEAL_FET, **more}
    return solve("hartley", {"stage": "mosfet"}, values)


@pytest.mark.parametrize("load", [1e4, 1e6])
def test_c02_hartley_of_the_class_notes(load):
    """C02: ω0 = 1/√((L1 + L2) C), start gm R ≥ L1/L2, L1 at the drain (EE416 class notes, lecture 04-27, seen).

    The start condition is the high-R limit: the notes leave the load's damping of the frequency out."""
    s = hartley(40e-6, 10e-6, 0.0, 500e-12, RL=load)
    assert 2 * math.pi * s.frequency_hz[0] * math.sqrt(50e-6 * 500e-12) == pytest.approx(1, rel=2 * (200 / load) ** 2)
    assert s.critical_gain[0] * load == pytest.approx(40 / 10, rel=10 * (200 / load) ** 2 + 1e-6)


def test_c14_hartley_with_mutual_inductance():
    """C14: L1 = 1 mH, L2 = 100 µH, M = 20 µH, C = 20 pF: 1.054029 MHz (Sedha, Ex 31.4; companion notebook seen)."""
    s = hartley(1e-3, 100e-6, 20e-6 / math.sqrt(1e-3 * 100e-6), 20e-12)
    assert s.frequency_hz[0] == pytest.approx(1.054029e6, rel=1e-6)


def test_c17_gain_of_a_coupled_hartley():
    """C17: hfe = (L1 + M)/(L2 + M) = 5.09 with L1 15 mH, L2 2.945 mH, M 5 µH (Bakshi & Godse, Ex 2.22; companion
    notebook seen). As a voltage ratio of an unloaded tap it is the gm R at which a lossy drain starts."""
    m = 5e-6 / math.sqrt(15e-3 * 2.945e-3)
    s = hartley(15e-3, 2.945e-3, m, 50e-12, RL=1e9)
    assert s.critical_gain[0] * 1e9 == pytest.approx(5.09, abs=0.01)
    assert s.frequency_hz[0] == pytest.approx(168e3, rel=1e-2)


def test_windings_aid():
    """Negative control: coupling that opposes would raise the frequency; aiding lowers it."""
    assert hartley(10e-6, 10e-6, 0.5, 1e-9).frequency_hz[0] < hartley(10e-6, 10e-6, 0.0, 1e-9).frequency_hz[0]


@pytest.mark.parametrize(
    ("options", "extra"),
    [
        ({"ground": "base"}, {"CT": 1.0, "CB": 1.0, "RS": 1e9}),
        ({"ground": "collector"}, {"CC": 1.0, "RS": 1e-3}),
        ({"feed": "shunt"}, {"CC": 1.0, "CS": 1.0, "RC": 1e12}),
    ],
)
def test_every_hartley_has_the_same_tank(options, extra):
    values = {**COIL, **IDEAL_FET, **extra}
    s = solve("hartley", {"stage": "mosfet", **options}, values)
    inductance = COIL["L1"] + COIL["L2"] + 2 * COIL["k"] * math.sqrt(COIL["L1"] * COIL["L2"])
    assert s.frequency_hz[0] == pytest.approx(1 / (2 * math.pi * math.sqrt(inductance * COIL["C"])), rel=1e-6)


def test_the_coil_carries_the_collector_current_of_a_series_fed_hartley():
    """A coil resistance that leaves no collector–emitter voltage is no bias with series feed, and none with shunt."""
    stage = {**BJT, "RE": 100.0, "CC": 1e-9, "CE": 1e-7, **COIL, "L1_dcr": 2e3}
    assert Status(solve("hartley", {}, stage).status[0]) is Status.NO_BIAS
    shunt = solve("hartley", {"feed": "shunt"}, {**stage, "CS": 1e-9, "LCH": 1e-3})
    assert Status(shunt.status[0]) is not Status.NO_BIAS


# -- Colpitts ---------------------------------------------------------------------------------------------------------


def test_capacitor_across_the_coil():
    """f = 1/(2π√(L (CP + C1C2/(C1+C2)))), and in the Clapp 1/(C − CP) = 1/C1 + 1/C2 + 1/C3 (two-line derivation)."""
    ideal = {**{k: v for k, v in TANK.items() if k != "L_dcr"}, **IDEAL_FET, "RS": 1e9}
    series = 1 / (1 / TANK["C1"] + 1 / TANK["C2"])
    s = solve("colpitts", {"stage": "mosfet", "ground": "collector"}, {**ideal, "CP": 100e-12})
    expected = 1 / (2 * math.pi * math.sqrt(TANK["L"] * (series + 100e-12)))
    assert s.frequency_hz[0] == pytest.approx(expected, rel=1e-6)
    clapp = solve("colpitts", {"stage": "mosfet", "ground": "collector"}, {**ideal, "CP": 100e-12, "C3": 150e-12})
    seen = 1 / (1 / TANK["C1"] + 1 / TANK["C2"] + 1 / 150e-12) + 100e-12
    assert clapp.frequency_hz[0] == pytest.approx(1 / (2 * math.pi * math.sqrt(TANK["L"] * seen)), rel=1e-6)


def test_op_amp_colpitts():
    """C12: C1 = 100 pF, C2 = 500 pF, L = 40 mH: 87.1728 kHz and gain 5, C1 = 50 pF for gain 10 (Bakshi & Godse, Ex 2.26;
    companion notebook seen): the gain C2/C1 is from the output to the far end of an unloaded tank."""
    values = {"L": 40e-3, "C1": 100e-12, "C2": 500e-12, "RO": 1e9, "RIN": 1e14, "RF": 6e14}
    s = solve("colpitts", {"stage": "opamp"}, values)
    assert s.frequency_hz[0] == pytest.approx(87.1728e3, rel=1e-4)
    assert s.critical_gain[0] / 1e14 == pytest.approx(5, rel=1e-4)
    half = solve("colpitts", {"stage": "opamp"}, {**values, "C1": 50e-12})
    assert half.critical_gain[0] / 1e14 == pytest.approx(10, rel=1e-4)


def test_the_collector_choke_shifts_the_frequency():
    """Common practice, no source: the collector's choke is part of the resonance and raises the frequency.

    It takes 1/(ω² LCH) off C1: Δf/f = ½ (L/LCH) (C2/(C1 + C2))² to first order; here 1/50 less 1/500."""
    stage = {**BJT, **TANK, "CC": 10e-9, "CE": 1e-7}
    small = solve("colpitts", {}, {**stage, "LCH": 50 * TANK["L"]}).frequency_hz[0]
    large = solve("colpitts", {}, {**stage, "LCH": 500 * TANK["L"]}).frequency_hz[0]
    share = (TANK["C2"] / (TANK["C1"] + TANK["C2"])) ** 2
    assert small / large - 1 == pytest.approx(0.5 * (1 / 50 - 1 / 500) * share, rel=0.1)


def test_source_follower_gate_may_rest_on_the_coil():
    """Without CC the gate sits at DC ground through the coil, which is a JFET's own bias. CC in series with the tank's
    capacitance C raises the frequency by C/(2 CC)."""
    options = {"stage": "jfet", "ground": "collector"}
    direct = solve("colpitts", options, {**JFET, **TANK})
    coupled = solve("colpitts", options, {**JFET, **TANK, "CC": 100e-9})
    assert Status(direct.status[0]) is Status.STARTS
    series = 1 / (1 / TANK["C1"] + 1 / TANK["C2"])
    assert coupled.frequency_hz[0] / direct.frequency_hz[0] - 1 == pytest.approx(series / (2 * 100e-9), rel=0.05)


# -- twin-T and quadrature ----------------------------------------------------------------------------------------------

TWIN = {"R1": 10e3, "R2": 10e3, "R3": 5e3, "C1": 10e-9, "C2": 10e-9, "C3": 20e-9, "RF": 10e3, "RG": 1e3}


def test_balanced_twin_t():
    """A16: null at ω = 1/(RC), so that any positive feedback starts it (standard result, from memory)."""
    s = solve("twin_t", {}, TWIN)
    assert 2 * math.pi * s.frequency_hz[0] * 1e-4 == pytest.approx(1, rel=1e-12)
    assert s.critical_gain[0] == pytest.approx(1, rel=1e-9)
    assert s.startup_margin[0] == pytest.approx(1.1, rel=1e-9)


@pytest.mark.parametrize("share", [0.9, 1.1])
def test_unbalanced_twin_t_passes_what_the_divider_must_overcome(share):
    """R3 off balance: the transfer T of the two paths at the crossing, computed from their admittances, is real, and
    K_c = 1/(1 − T)."""
    s = solve("twin_t", {}, {**TWIN, "R3": share * 5e3})
    p = 2j * math.pi * s.frequency_hz[0]

    def path(series: complex, shunt: complex) -> tuple[complex, complex]:
        """Short-circuit transfer and input admittance of a symmetric T."""
        middle = 2 / series + 1 / shunt
        return 1 / series**2 / middle, (1 / series) * (1 / series + 1 / shunt) / middle

    forward, own = (sum(pair) for pair in zip(path(10e3, 1 / (p * 20e-9)), path(1 / (p * 10e-9), share * 5e3), strict=True))
    t = forward / own
    assert abs(t.imag) < 1e-12
    assert s.critical_gain[0] == pytest.approx(1 / (1 - t.real), rel=1e-12)


QUAD = {"R1": 10e3, "C1": 10e-9, "R2": 10e3, "C2": 10e-9, "R3": 12e3, "C3": 8e-9}


def test_quadrature_by_routh_of_its_cubic():
    """s³R1C1R2C2R3C3 + s²R1C1R3C3 + sR3C3 + 1: the axis is crossed at R2C2 = R3C3, ω² = 1/(R1C1R3C3) (Routh 1877)."""
    s = solve("quadrature", {}, {**QUAD, "R2": 11e3})
    assert s.critical_gain[0] == pytest.approx(12e3 * 8e-9 / 10e-9, rel=1e-12)
    assert 2 * math.pi * s.frequency_hz[0] == pytest.approx(1 / math.sqrt(10e3 * 10e-9 * 12e3 * 8e-9), rel=1e-12)
    assert Status(s.status[0]) is Status.STARTS
    assert Status(solve("quadrature", {}, {**QUAD, "R2": 9e3}).status[0]) is Status.NO_START


def test_op_amp_lag_starts_a_quadrature_earlier():
    """Both op-amps' lag adds phase: with a finite GBW a smaller R2 is enough."""
    ideal, real = (solve("quadrature", {}, {**QUAD, **extra}) for extra in ({}, {"GBW": 1e6}))
    assert real.critical_gain[0] < ideal.critical_gain[0]
