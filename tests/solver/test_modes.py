"""Rules of the intended mode on tables small enough to solve by hand: latching, rivals, real roots, no crossing."""

from __future__ import annotations

import cmath
import math

import numpy as np
import pytest

from tests.handmade import circuit, independent, others, solve
from tests.rules import judge
from yieldosc.circuits.circuit import Branch
from yieldosc.solver.solution import Status

# -- Wien bridge with an ideal amplifier: s² + (3 − K) ω0 s + ω0² = 0 ------------------------------------------------

WIEN = (
    Branch("R1", "R", ("o", "n"), ("R1",)),
    Branch("C1", "C", ("n", "p"), ("C1",)),
    Branch("R2", "R", ("p", "gnd"), ("R2",)),
    Branch("C2", "C", ("p", "gnd"), ("C2",)),
    Branch("RF", "R", ("o", "m"), ("RF",), True),
    Branch("RG", "R", ("m", "gnd"), ("RG",)),
    Branch("A", "opamp", ("o", "p", "m"), ()),
)
WIEN_SYMBOLS = {"R1": 10e3, "C1": 10e-9, "R2": 10e3, "C2": 10e-9, "RF": 20.5e3, "RG": 10e3}
W0 = 1e4  # 1/(R C) [1/s]


def wien(table=WIEN):
    return circuit(table, "RF", W0 / (2 * math.pi), gain_of=lambda symbols, rf: 1 + rf / symbols["RG"])


@pytest.mark.parametrize("k", [3.05, 4.0, 4.9, 4.999])
def test_growth_of_a_pair(k):
    s = solve(wien(), {**WIEN_SYMBOLS, "RF": (k - 1) * 10e3})
    assert s.growth_per_s[0] == pytest.approx(W0 * (k - 3) / 2, rel=1e-9)
    assert s.startup_margin[0] == pytest.approx(k / 3, rel=1e-12)
    assert s.frequency_hz[0] == pytest.approx(W0 / (2 * math.pi), rel=1e-12)
    assert not s.overdriven[0]


@pytest.mark.parametrize("k", [5.001, 6.0, 30.0, 300.0])
def test_a_pair_that_became_two_real_roots_counts_with_the_smaller(k):
    s = solve(wien(), {**WIEN_SYMBOLS, "RF": (k - 1) * 10e3})
    half = (k - 3) / 2
    assert s.growth_per_s[0] == pytest.approx(W0 / (half + math.sqrt(half**2 - 1)), rel=1e-6)
    assert s.overdriven[0]
    assert Status(s.status[0]) is Status.STARTS
    assert others(wien(), WIEN_SYMBOLS, (k - 1) * 10e3) == ()


@pytest.mark.parametrize("k", [1.5, 2.5, 2.99])
def test_below_the_critical_gain_it_does_not_start(k):
    s = solve(wien(), {**WIEN_SYMBOLS, "RF": (k - 1) * 10e3})
    assert s.startup_margin[0] == pytest.approx(k / 3, rel=1e-12)
    assert Status(s.status[0]) is Status.NO_START
    assert np.isnan(s.growth_per_s[0])


def test_first_crossing_of_the_clipping_wien_bridge():
    """R 10 kΩ, C 10 nF, RG 10 kΩ, RF 20.5 kΩ, GBW 3 MHz: crossing 1587.76 Hz (stated check value, from a direct
    integration study; two decimals printed)."""
    table = (*WIEN[:-1], Branch("A", "opamp", ("o", "p", "m"), ("tau",)))
    s = solve(wien(table), {**WIEN_SYMBOLS, "tau": 1 / (2 * math.pi * 3e6)})
    assert s.frequency_hz[0] == pytest.approx(1587.76, abs=0.005)


# -- lead ladder ----------------------------------------------------------------------------------------------------

LEAD = (
    Branch("C1", "C", ("o", "1"), ("C",)),
    Branch("R1", "R", ("1", "gnd"), ("R",)),
    Branch("C2", "C", ("1", "2"), ("C",)),
    Branch("R2", "R", ("2", "gnd"), ("R",)),
    Branch("C3", "C", ("2", "3"), ("C",)),
    Branch("R3", "R", ("3", "m"), ("R",)),
    Branch("RF", "R", ("m", "o"), ("RF",), True),
    Branch("A", "opamp", ("o", "gnd", "m"), ("tau",)),
)


@pytest.mark.parametrize(
    ("rf", "gbw", "frequency_hz", "decimals"), [(320e3, 1e6, 647.2527, 4), (435e3, 10e6, 649.5, 1)]
)
def test_lead_ladder_check_values(rf, gbw, frequency_hz, decimals):
    """Lead, 3 sections, 10 kΩ, 10 nF (stated check values, full nodal solution)."""
    made = circuit(LEAD, "RF", 1 / (2 * math.pi * 1e-4 * math.sqrt(6)), gain_of=lambda symbols, g: g / symbols["R"])
    s = solve(made, {"C": 10e-9, "R": 10e3, "RF": rf, "tau": 1 / (2 * math.pi * gbw)})
    assert s.frequency_hz[0] == pytest.approx(frequency_hz, abs=0.5 * 10**-decimals)
    if gbw == 1e6:
        assert s.critical_gain[0] / 10e3 == pytest.approx(29.0929, abs=5e-5)
        assert s.startup_margin[0] == pytest.approx(32 / 29.0929, rel=2e-6)
    assert Status(s.status[0]) is Status.STARTS


# -- two parallel tanks in series across a negative conductance −g -------------------------------------------------

TANKS = (
    Branch("R1", "R", ("a", "m"), ("R1",)),
    Branch("L1", "L", ("a", "m"), ("L1",)),
    Branch("C1", "C", ("a", "m"), ("C1",)),
    Branch("R2", "R", ("m", "gnd"), ("R2",)),
    Branch("L2", "L", ("m", "gnd"), ("L2",)),
    Branch("C2", "C", ("m", "gnd"), ("C2",)),
    Branch("Cp", "C", ("a", "gnd"), ("Cp",)),
    Branch("g", "transconductance", ("a", "gnd", "gnd", "a"), ("g",), True),
)


def tanks(r1, r2, c2=1e-9, f2=5e6):
    """Tank 1: 1 MHz, 1 nF, the design frequency. Tank 2: f2."""

    def coil(c, f):
        return 1 / (c * (2 * math.pi * f) ** 2)

    return {"R1": r1, "C1": 1e-9, "L1": coil(1e-9, 1e6), "R2": r2, "C2": c2, "L2": coil(c2, f2), "Cp": 1e-15}


RIVALS = circuit(TANKS, "g", 1e6)


@pytest.mark.parametrize(
    ("r1", "r2", "c2", "g", "status"),
    [
        # critical conductances are close to 1/R1 and 1/R2; growth close to (g − 1/R)/2C
        (4e3, 1e3, 1e-9, 0.5e-3, Status.STARTS),  # only the intended grows
        (4e3, 1e3, 1e-10, 1.3e-3, Status.STARTS),  # the other grows faster, but its critical gain is four times higher
        (4e3, 3e3, 1e-10, 0.6e-3, Status.WRONG_MODE),  # it grows faster, its critical gain only 4/3
        (4e3, 3e3, 1e-8, 0.6e-3, Status.STARTS),  # the same, but slower
        (4e3, 8e3, 1e-9, 0.2e-3, Status.WRONG_MODE),  # only the other grows
        (4e3, 8e3, 1e-9, 0.1e-3, Status.NO_START),
    ],
)
def test_two_modes_on_one_gain_element(r1, r2, c2, g, status):
    symbols = {**tanks(r1, r2, c2), "g": g}
    s = solve(RIVALS, symbols)
    assert Status(s.status[0]) is status
    assert s.startup_margin[0] == pytest.approx(g * r1, rel=0.02)
    want = judge(independent(RIVALS, symbols), 1e6)
    assert want.outcome == status.name.lower()
    assert s.startup_margin[0] == pytest.approx(want.margin, rel=1e-9)
    if want.growth_per_s is not None:
        assert s.growth_per_s[0] == pytest.approx(want.growth_per_s, rel=1e-6)
    rival = others(RIVALS, symbols, g)
    grows = g * r2 > 1.02
    assert len(rival) == (1 if grows else 0)
    if grows:
        assert rival[0] == pytest.approx(5e6, rel=0.02)
        assert s.other_mode_hz[0] == pytest.approx(rival[0], rel=1e-12)


def test_nearest_crossing_in_ln_f_is_the_intended_one():
    """Both tanks lie within a factor 2 of the design frequency; the nearer one counts, not the stronger."""
    symbols = {**tanks(4e3, 40e3, f2=1.7e6), "g": 0.5e-3}
    s = solve(RIVALS, symbols)
    assert s.frequency_hz[0] == pytest.approx(1e6, rel=0.02)
    elsewhere = solve(circuit(TANKS, "g", 1.5e6), symbols)
    assert elsewhere.frequency_hz[0] == pytest.approx(1.7e6, rel=0.02)


def test_a_crossing_beyond_a_factor_two_is_not_the_intended_mode():
    s = solve(circuit(TANKS, "g", 2.2e6), {**tanks(4e3, 8e3), "g": 0.5e-3})
    assert Status(s.status[0]) is Status.WRONG_MODE
    assert s.startup_margin[0] < 1


# -- latching -------------------------------------------------------------------------------------------------------

# A parallel tank (1 MHz, 100 nF, R1) in series with R2 ∥ C2 across −g: a pair enters at 1/R1, a real pole at 1/R2.
LATCH = (
    Branch("R1", "R", ("a", "m"), ("R1",)),
    Branch("L1", "L", ("a", "m"), ("L1",)),
    Branch("C1", "C", ("a", "m"), ("C1",)),
    Branch("R2", "R", ("m", "gnd"), ("R2",)),
    Branch("C2", "C", ("m", "gnd"), ("C2",)),
    Branch("g", "transconductance", ("a", "gnd", "gnd", "a"), ("g",), True),
)
LATCHING = circuit(LATCH, "g", 1e6)
LATCH_SYMBOLS = {"R1": 400.0, "C1": 100e-9, "L1": 1 / (100e-9 * (2 * math.pi * 1e6) ** 2), "C2": 20e-9}


@pytest.mark.parametrize(
    ("r2", "gain", "status", "latches"),
    [
        # growth close to (g − 1/R1)/2C1 of the pair and (g − 1/R2)/C2 of the real pole [1/s]
        (100.0, 2e-3, Status.NO_START, False),
        (100.0, 5e-3, Status.STARTS, False),
        (100.0, 12e-3, Status.STARTS, True),  # 4.8e4 against 1e5, but the pair needs a quarter of the gain
        (250.0, 4.1e-3, Status.STARTS, True),  # 8e3 against 5e3
        (250.0, 8e-3, Status.WRONG_MODE, True),  # 2.8e4 against 2e5, at 5/8 of its gain
        (1000.0, 1.5e-3, Status.WRONG_MODE, True),  # only the real pole grows
        (1000.0, 5e-3, Status.WRONG_MODE, True),
    ],
)
def test_a_real_pole_through_zero_is_another_mode_at_0_hz(r2, gain, status, latches):
    symbols = {**LATCH_SYMBOLS, "R2": r2, "g": gain}
    s = solve(LATCHING, symbols)
    assert Status(s.status[0]) is status
    assert s.startup_margin[0] == pytest.approx(gain * 400, rel=0.02)
    assert others(LATCHING, symbols, gain) == ((0.0,) if latches else ())
    growing = independent(LATCHING, symbols).growing()
    real = [p for p in growing if abs(p.imag) < 1e-20 * abs(p)]
    assert len(real) == int(latches)
    assert np.isnan(s.other_mode_hz[0]) if not latches else s.other_mode_hz[0] == 0
    pair = [float(p.real) for p in growing if p.imag > 0 and abs(p.imag) > 1e-20 * abs(p)]
    if pair:
        assert s.growth_per_s[0] == pytest.approx(pair[0], rel=1e-6)
    else:
        assert np.isnan(s.growth_per_s[0])


OVERDRIVEN_LATCH = (
    Branch("RD", "R", ("q", "p"), ("RD",)),
    Branch("Rs", "R", ("q", "x"), ("Rs",)),
    Branch("L", "L", ("x", "y"), ("L",)),
    Branch("C", "C", ("y", "p"), ("C",)),
    Branch("R", "R", ("p", "gnd"), ("R",)),
    Branch("Cp", "C", ("p", "gnd"), ("Cp",)),
    Branch("K", "gain", ("q", "p", "gnd"), ("K",), True),
)


@pytest.mark.parametrize(
    ("gain", "status", "real"),
    [
        (5.0, Status.STARTS, 0),
        (8.0, Status.STARTS, 2),
        (10.9, Status.STARTS, 2),
        (11.1, Status.WRONG_MODE, 1),
        (50.0, Status.WRONG_MODE, 1),
    ],
)
def test_a_pair_that_lost_one_half_through_zero_has_ended_and_latches(gain, status, real):
    """The pair enters at K = 1 + (RD ∥ Rs)/R = 1.909, becomes two real roots, and one of them passes 0 at
    K = 1 + RD/R = 11: above it a single real root grows, which is no oscillation."""
    symbols = {"RD": 10e3, "Rs": 1e3, "L": 10e-3, "R": 1e3, "Cp": 1e-13, "K": gain}
    symbols["C"] = 1 / (10e-3 * (2 * math.pi * 1e5) ** 2)
    made = circuit(OVERDRIVEN_LATCH, "K", 1e5)
    growing = independent(made, symbols).growing()
    assert sum(abs(p.imag) < 1e-20 * abs(p) for p in growing) == real
    s = solve(made, symbols)
    assert Status(s.status[0]) is status
    assert s.startup_margin[0] == pytest.approx(min(gain / 1.9090909, 11 / gain), rel=1e-4)
    assert others(made, symbols, gain) == ((0.0,) if real == 1 else ())
    assert bool(s.overdriven[0]) == (real == 2)
    if status is Status.STARTS:
        assert s.growth_per_s[0] == pytest.approx(min(float(p.real) for p in growing), rel=1e-6)


def test_a_circuit_that_only_latches_is_the_wrong_mode_and_every_number_stays_finite():
    """D = s²LC + s(L/R2 + RC) + 1 + R/R2 − K: no pair crosses at any gain, a real pole passes 0 at K = 1 + R/R2 = 2."""
    table = (
        Branch("R", "R", ("q", "x"), ("R",)),
        Branch("L", "L", ("x", "p"), ("L",)),
        Branch("R2", "R", ("p", "gnd"), ("R2",)),
        Branch("C", "C", ("p", "gnd"), ("C",)),
        Branch("K", "gain", ("q", "p", "gnd"), ("K",), True),
    )
    symbols = {"R": 1e3, "L": 1.0, "R2": 1e3, "C": 1e-6, "K": 3.0}
    made = circuit(table, "K", 1e3)
    s = solve(made, symbols, [1.9, 2.1, 30.0])
    assert [Status(x) for x in s.status] == [Status.NO_START, Status.WRONG_MODE, Status.WRONG_MODE]
    assert s.startup_margin.tolist() == [0.0, 0.0, 0.0]  # no gain exists at which it would oscillate
    assert s.frequency_hz.tolist() == [1e3, 1e3, 1e3]
    assert np.isnan(s.other_mode_hz[0])
    assert s.other_mode_hz[1:].tolist() == [0.0, 0.0]
    assert others(made, symbols, 2.1) == (0.0,)


# -- a crystal that no gain can start -------------------------------------------------------------------------------

PIERCE = (
    Branch("X", "crystal", ("g", "d"), ("Lm", "Cm", "ESR")),
    Branch("C3", "C", ("g", "d"), ("C3",)),
    Branch("C1", "C", ("g", "gnd"), ("C1",)),
    Branch("C2", "C", ("d", "gnd"), ("C2",)),
    Branch("gm", "transconductance", ("d", "gnd", "g", "gnd"), ("gm",), True),
)
GM_OPT, R_MOST = 7.539822e-3, 1061.0330  # E13: Vittoz, Degrauwe & Bitz, IEEE JSSC 23 (1988) 774, from memory


def three_point(esr, gm):
    cm = 1e-15  # pulls the crystal by up to Cm/2C3, 1e-4; fs is set so that the middle of that range is 10 MHz
    fs = 10e6 / (1 + 5e-5)
    return {
        "Lm": 1 / ((2 * math.pi * fs) ** 2 * cm),
        "Cm": cm,
        "ESR": esr,
        "C3": 5e-12,
        "C1": 20e-12,
        "C2": 20e-12,
        "gm": gm,
    }


CRYSTAL = circuit(PIERCE, "gm", 10e6, band=(10e6, 1e-4))


def test_greatest_negative_resistance_and_its_transconductance():
    """At gm_opt an ESR just below 1061.03 Ω starts and one just above does not. 1e-4 either way: |R| goes as 1/ω, and
    the crystal is pulled within 5e-5 of 10 MHz."""
    assert Status(solve(CRYSTAL, three_point(R_MOST * 0.9999, GM_OPT)).status[0]) is Status.STARTS
    assert Status(solve(CRYSTAL, three_point(R_MOST * 1.0001, GM_OPT)).status[0]) is Status.NO_START


def test_above_it_no_gain_at_all_starts_and_the_margin_stays_finite():
    gains = GM_OPT * np.array([0.01, 0.3, 1.0, 3.0, 100.0])
    s = solve(CRYSTAL, three_point(2 * R_MOST, GM_OPT), gains)
    assert all(Status(x) is Status.NO_START for x in s.status)
    assert np.all(np.isfinite(s.frequency_hz))
    np.testing.assert_allclose(s.frequency_hz, 10e6, rtol=5e-5)
    assert np.all((s.startup_margin > 0) & (s.startup_margin < 1))
    assert s.startup_margin.argmax() == 2  # nearest to starting at the best gain


def test_the_margin_is_continuous_where_the_crossings_vanish():
    """min(|g/gc|, |gc/g|)·exp(−|arg gc|) goes on where the two crossings, one double root at the fold, have become a
    complex pair. Roots part as the square root of the distance: 1e-5 in ESR is about 0.3 % in margin on either side."""
    fold = _fold()
    gain = 2 * GM_OPT
    inside, outside = (solve(CRYSTAL, three_point(fold * (1 + d), gain)) for d in (-1e-5, 1e-5))
    assert np.isfinite(inside.critical_gain[0])
    assert inside.startup_margin[0] == pytest.approx(0.5, rel=0.02)
    assert outside.startup_margin[0] == pytest.approx(inside.startup_margin[0], rel=0.02)


def _fold() -> float:
    """The ESR at which the crossings vanish, by bisection on the independent solution."""
    low, high = R_MOST * 0.999, R_MOST * 1.001
    for _ in range(24):
        middle = (low + high) / 2
        low, high = (middle, high) if independent(CRYSTAL, three_point(middle, GM_OPT)).crossings else (low, middle)
    return low


@pytest.mark.parametrize("excess", [1.01, 1.5, 4.0])
@pytest.mark.parametrize("drive", [0.2, 1.0, 5.0])
def test_the_rule_without_a_crossing(excess, drive):
    symbols = three_point(excess * R_MOST, drive * GM_OPT)
    s = solve(CRYSTAL, symbols)
    want = judge(independent(CRYSTAL, symbols), 10e6, centre_hz=10e6, half=1e-4)
    assert want.outcome == "no_start"
    assert s.startup_margin[0] == pytest.approx(want.margin, rel=1e-6)
    assert s.frequency_hz[0] == pytest.approx(want.frequency_hz, rel=1e-9)


# -- strongly driven ------------------------------------------------------------------------------------------------

FET = (
    Branch("L", "L", ("d", "g"), ("L", "r")),
    Branch("C1", "C", ("d", "gnd"), ("C1",)),
    Branch("C2", "C", ("g", "gnd"), ("C2",)),
    Branch("R", "R", ("d", "gnd"), ("R",)),
    Branch("gm", "transconductance", ("d", "gnd", "g", "gnd"), ("gm",), True),
)


@pytest.mark.parametrize("margin", [1.001, 3.0, 31.0, 100.0, 1e3, 1e4])
def test_strongly_driven_stages_keep_their_own_root(margin):
    """One Newton run from the crossing lands elsewhere; continuation does not. The cubic has one growing pair."""
    symbols = {"L": 15e-6, "r": 1.0, "C1": 1e-9, "C2": 1e-9, "R": 10e3}
    made = circuit(FET, "gm", 1 / (2 * math.pi * math.sqrt(15e-6 * 0.5e-9)))
    critical = float(independent(made, {**symbols, "gm": 1e-3}).crossings[0].gain)
    s = solve(made, symbols | {"gm": critical * margin})
    roots = np.roots(
        [  # s³LC1C2 + s²(L C2/R + r C1 C2) + s (C1 + C2 + r C2/R) + gm + 1/R: the class-note equation with r added
            15e-6 * 1e-18,
            15e-6 * 1e-9 / 10e3 + 1.0 * 1e-18,
            2e-9 + 1e-9 / 10e3,
            critical * margin + 1e-4,
        ]
    )
    growth = max(roots.real)
    assert s.startup_margin[0] == pytest.approx(margin, rel=1e-9)
    assert s.growth_per_s[0] == pytest.approx(growth, rel=1e-6)
    assert not s.overdriven[0]
    assert cmath.isfinite(growth)
