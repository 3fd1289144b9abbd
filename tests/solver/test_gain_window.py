"""The gain window: a crystal at the base of a common-base stage whose loop gain says 13.7 and which does not start.

All figures are those of the requirement (a full nodal solution): the crystal mode grows only between 0.073 and 0.291
of the actual transconductance; from 1.95 times upward the circuit runs on its coil near 6.3 MHz; the margin is 0.291.
"""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest

from tests.drawn import K_OVER_Q, bjt_point
from tests.handmade import circuit, independent, others, solve
from tests.rules import judge
from tests.solver.test_agreement import assert_agrees
from yieldosc.circuits.circuit import Branch
from yieldosc.solver.solution import Status

TABLE = (
    Branch("X", "crystal", ("b", "gnd"), ("Lm", "Cm", "ESR")),
    Branch("C0", "C", ("b", "gnd"), ("C0",)),
    Branch("L", "L", ("c", "gnd"), ("L", "L_dcr")),
    Branch("RL", "R", ("c", "gnd"), ("RL",)),
    Branch("C1", "C", ("c", "e"), ("C1",)),
    Branch("C2", "C", ("e", "gnd"), ("C2",)),
    Branch("RE", "R", ("e", "gnd"), ("RE",)),
    Branch("gm", "transconductance", ("c", "e", "b", "e"), ("gm",), True),
    Branch("rin", "R", ("b", "e"), ("rin",)),
    Branch("rout", "R", ("c", "e"), ("rout",)),
    Branch("cin", "C", ("b", "e"), ("cin",)),
    Branch("cfb", "C", ("b", "c"), ("cfb",)),
    Branch("rb", "R", ("b", "gnd"), ("rb",)),
)
FS = 8e6 / math.sqrt(1 + 15e-15 / (4e-12 + 18e-12))


def _symbols() -> dict[str, float]:
    ic, vce = bjt_point({"VCC": 5.0, "hFE": 150.0, "RB1": 22e3, "RB2": 10e3}, 25.0, "divider", 1.0, 1e3)
    assert ic > 0
    assert vce > 0.2
    gm = ic / (K_OVER_Q * 298.15)
    return {
        "Lm": 1 / ((2 * math.pi * FS) ** 2 * 15e-15),
        "Cm": 15e-15,
        "ESR": 40.0,
        "C0": 4e-12,
        "L": 4.7e-6,
        "L_dcr": 1.0,
        "RL": 5e3,
        "C1": 100e-12,
        "C2": 470e-12,
        "RE": 1e3,
        "gm": gm,
        "rin": 150 / gm,
        "rout": 100 / ic,
        "cin": gm / (2 * math.pi * 300e6) - 2e-12,
        "cfb": 2e-12,
        "rb": 22e3 * 10e3 / 32e3,
    }


SYMBOLS = _symbols()
GM = SYMBOLS["gm"]
MADE = circuit(TABLE, "gm", 8e6, band=(FS, 15e-15 / 4e-12))


def test_the_margin_is_0_291_and_nothing_grows():
    s = solve(MADE, SYMBOLS)
    assert s.startup_margin[0] == pytest.approx(0.291, abs=5e-4)
    assert Status(s.status[0]) is Status.NO_START
    assert np.isnan(s.other_mode_hz[0])
    assert np.isnan(s.growth_per_s[0])
    assert others(MADE, SYMBOLS, GM) == ()
    assert independent(MADE, SYMBOLS).growing() == []


def test_the_loop_gain_at_zero_phase_is_13_7_all_the_same():
    """A check of the trap itself: 1/0.073 is the loop gain at the crystal's zero-phase point."""
    first = independent(MADE, SYMBOLS).crossings[0]
    assert float(GM / first.gain) == pytest.approx(13.7, abs=0.05)


@pytest.mark.parametrize(
    ("share", "status"),
    [
        (0.0725, Status.NO_START),
        (0.0735, Status.STARTS),
        (0.15, Status.STARTS),
        (0.290, Status.STARTS),
        (0.292, Status.NO_START),
        (1.0, Status.NO_START),
        (1.945, Status.NO_START),
        (1.96, Status.WRONG_MODE),
        (5.0, Status.WRONG_MODE),
    ],
)
def test_gain_swept_through_each_limit_flips_the_outcome(share, status):
    s = solve(MADE, SYMBOLS, [share * GM])
    assert Status(s.status[0]) is status
    low, high = 0.0730052, 0.2906182  # the window's limits, to more digits, from the 80-digit solution below
    assert s.startup_margin[0] == pytest.approx(min(share / low, high / share), rel=1e-5)
    assert (s.startup_margin[0] > 1) == (status is Status.STARTS)


def test_the_limits_to_80_digits():
    low, high, coil = independent(MADE, SYMBOLS).crossings
    assert [low.enters, high.enters, coil.enters] == [True, False, True]
    s = solve(MADE, SYMBOLS, [0.15 * GM])
    # the crystal's frequency is where F, the difference of two nearly equal products, is 0: a few 1e-14 here
    assert s.frequency_hz[0] == pytest.approx(float(low.omega / (2 * mpmath.pi)), rel=1e-13)
    assert s.critical_gain[0] == pytest.approx(float(low.gain), rel=1e-10)
    assert s.upper_ratio[0] * 0.15 * GM == pytest.approx(float(high.gain), rel=1e-10)
    assert float(coil.gain) / GM == pytest.approx(1.95, abs=0.005)


def test_above_1_95_times_it_runs_on_the_coil_near_6_3_mhz():
    s = solve(MADE, SYMBOLS, [2.5 * GM])
    assert s.other_mode_hz[0] == pytest.approx(6.3e6, rel=0.02)
    assert others(MADE, SYMBOLS, 2.5 * GM) == pytest.approx((float(s.other_mode_hz[0]),))
    assert s.frequency_hz[0] == pytest.approx(8e6, rel=1e-3)  # still the crystal's crossing, which does not grow


def test_one_block_holds_every_outcome():
    shares = np.array([0.05, 0.15, 0.5, 1.0, 2.5, 0.2])
    s = solve(MADE, SYMBOLS, shares * GM, audit=np.ones(6, dtype=bool))
    assert [Status(x).name for x in s.status] == [
        "NO_START",
        "STARTS",
        "NO_START",
        "NO_START",
        "WRONG_MODE",
        "STARTS",
    ]
    assert s.disagreeing == 0


@pytest.mark.parametrize("seed", range(24))
def test_boards_far_from_this_one(seed):
    """Coil and crystal modes in every order and together, against the independent solution and its own following of
    pairs. Counting crossings alone cannot tell which pair leaves where two are growing."""
    rng = np.random.default_rng(seed)
    board = {n: v * math.exp(rng.uniform(-1, 1)) if n not in ("Lm", "Cm") else v for n, v in SYMBOLS.items()}
    board["RL"] = 5e3 * math.exp(rng.uniform(-1, 3))
    board["rin"] = rng.uniform(3, 30) * SYMBOLS["rin"]
    board["L"] = 4.7e-6 * math.exp(rng.uniform(-0.5, 0.5))
    board["gm"] = GM * math.exp(rng.uniform(-3, 2))
    half = 15e-15 / board["C0"]
    made = circuit(TABLE, "gm", 8e6, band=(FS, half))
    want = judge(independent(made, board), 8e6, centre_hz=FS, half=half)
    assert_agrees(solve(made, board), 0, want)
