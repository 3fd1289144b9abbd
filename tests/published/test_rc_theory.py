"""RC oscillators, theory (rows A01–A16). Every expected number is the source's or its formula's."""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.handmade import circuit
from tests.handmade import solve as solve_table
from tests.ladders import common_emitter_ladder, ladder, phase_shift, transfer
from tests.solver.test_agreement import solve
from yieldosc.circuits.circuit import Branch
from yieldosc.solver.solution import Status

R, C = 10e3, 10e-9
PER_RC = 1 / (2 * math.pi * R * C)


def test_a01_three_lead_sections():
    """Schubert & Kim, Fundamentals of Electronics: Book 4 (2016), sec. 12.2.1, eq. 12.12–12.19 (seen). 1e-9."""
    frequency, gain = phase_shift("lead", 3, R, C)
    assert frequency == pytest.approx(PER_RC / math.sqrt(6), rel=1e-9)
    assert gain == pytest.approx(-29, rel=1e-9)


def test_a01_three_lag_sections_are_its_mirror():
    """Same source, R and C exchanged: ω0 RC = √6, gain −29."""
    frequency, gain = phase_shift("lag", 3, R, C)
    assert frequency == pytest.approx(math.sqrt(6) * PER_RC, rel=1e-9)
    assert gain == pytest.approx(-29, rel=1e-9)


def test_a03_four_lead_sections():
    """Standard textbook result, 18.39 (from memory; verified numerically). 1e-9: exact law."""
    frequency, gain = phase_shift("lead", 4, R, C)
    assert frequency == pytest.approx(0.836660027 * PER_RC, rel=1e-9)
    assert gain == pytest.approx(-18.38775510, rel=1e-9)


@pytest.mark.parametrize(("sections", "factor", "gain"), [(5, 0.739172478, 15.43641821), (6, 0.508693165, 14.11788237)])
def test_a05_five_and_six_sections(sections, factor, gain):
    """Derived from the ladder's continued fraction (derived; verified numerically). 1e-8: digits given."""
    lag, lead = phase_shift("lag", sections, R, C), phase_shift("lead", sections, R, C)
    assert lag[0] == pytest.approx(factor * PER_RC, rel=1e-8)
    assert lead[0] == pytest.approx(PER_RC / factor, rel=1e-8)
    assert lag[1] == pytest.approx(-gain, rel=1e-8)
    assert lead[1] == pytest.approx(-gain, rel=1e-8)


def test_a06_the_2n_formula_is_right_for_three_sections_and_wrong_for_four():
    """NEGATIVE: f = 1/(2πRC√(2N)) on many pages (seen: All About Circuits thread 197316, posts by The Electrician and
    LvW, who call it a mistake). It must fit N = 3 and must not fit N = 4."""

    def repeated_mistake(n):
        return PER_RC / math.sqrt(2 * n)

    assert phase_shift("lead", 3, R, C)[0] == pytest.approx(repeated_mistake(3), rel=1e-9)
    four = phase_shift("lead", 4, R, C)[0]
    assert abs(four / repeated_mistake(4) - 1) > 1


def test_a07_buffered_sections():
    """Mancini & Palmer, Sine-Wave Oscillator, TI SLOA060 (2001), sec. 8.3 (seen as a restatement): √3, gain 8."""
    frequency, gain = phase_shift("lag", 3, R, C, buffered=True)
    assert frequency == pytest.approx(math.sqrt(3) * PER_RC, rel=1e-9)
    assert gain == pytest.approx(-8, rel=1e-9)


@pytest.mark.parametrize("k", [0.5, 1.0, 2.69, 5.0])
def test_a09_common_emitter_ladder(k):
    """Schubert & Kim, Book 4, eq. 12.26–12.29 (seen). 1e-9: exact law with hoe = 0."""
    frequency, hfe = common_emitter_ladder(k, R, C)
    assert frequency == pytest.approx(PER_RC / math.sqrt(6 + 4 * k), rel=1e-9)
    assert hfe == pytest.approx(23 + 29 / k + 4 * k, rel=1e-9)


def test_a10_least_current_gain():
    """Schubert & Kim, Book 4, eq. 12.31–12.32 (seen; the book prints 2.7 and 44.5)."""
    best = math.sqrt(29) / 2
    least = common_emitter_ladder(best, R, C)[1]
    assert best == pytest.approx(2.692582404, rel=1e-9)
    assert least == pytest.approx(44.54065923, rel=1e-8)
    assert least == pytest.approx(44.5, abs=0.05)
    for k in (best * 0.99, best * 1.01):
        assert common_emitter_ladder(k, R, C)[1] > least


def test_a12_the_bipolar_stage_does_not_need_29():
    """NEGATIVE: Telecommunication Circuits & Technology, eq. 1.2–1.4 (seen), prints the same denominator with a loop
    gain of 29; the figure belongs to a stage that the ladder does not load."""
    for k in (0.5, 1.0, 2.69, 5.0):
        assert abs(common_emitter_ladder(k, R, C)[1] / 29 - 1) > 0.5


WIEN = {"R1": R, "C1": C, "R2": R, "C2": C, "RF": 22e3, "RG": 10e3}
WIEN_NETWORK = (
    Branch("R1", "R", ("o", "n"), ("R",)),
    Branch("C1", "C", ("n", "p"), ("C",)),
    Branch("R2", "R", ("p", "gnd"), ("R",)),
    Branch("C2", "C", ("p", "gnd"), ("C",)),
    Branch("K", "gain", ("o", "p", "gnd"), ("K",), True),
)


def wien(changes=None):
    values = {**WIEN, **(changes or {})}
    s = solve("wien_bridge", {}, {k: np.array([v]) for k, v in values.items()}, values, 25.0)
    return float(s.frequency_hz[0]), (1 + values["RF"] / values["RG"]) / float(s.startup_margin[0])


def test_a13_wien_bridge():
    """Standard result; industrialmonitordirect.com note on the 1/3 attenuation (seen). 1e-12: exact law."""
    frequency, gain = wien()
    assert frequency == pytest.approx(PER_RC, rel=1e-12)
    assert gain == pytest.approx(3, rel=1e-12)
    symbols = {"R": R, "C": C, "K": 3.0}
    assert transfer(WIEN_NETWORK, symbols, 1 / (R * C)) == pytest.approx(1 / 3, rel=1e-12)
    for x in (0.1, 0.5, 2.0, 7.0):
        assert transfer(WIEN_NETWORK, symbols, x / (R * C)) == pytest.approx(1 / (3 + 1j * (x - 1 / x)), rel=1e-12)


@pytest.mark.parametrize("ratio", [1.999, 2.001])
def test_a_fixed_gain_pair_cannot_hold_a_wien_bridge(ratio):
    """Common practice, no source: the network passes 1/3, and no pair of resistors is exactly 2 to 1. A little below the
    bridge does not start, a little above its amplitude grows without end until something else limits it."""
    values = {**WIEN, "RF": ratio * WIEN["RG"]}
    s = solve("wien_bridge", {}, {k: np.array([v]) for k, v in values.items()}, values, 25.0)
    assert (Status(int(s.status[0])) is Status.STARTS) == (ratio > 2)
    assert (s.growth_per_s[0] > 0) == (ratio > 2)


def test_a13_unequal_arms():
    """1/(2π√(R1C1R2C2)) and 1 + R1/R2 + C2/C1: the bridge's balance, R1 and R2 not exchangeable (negative control)."""
    changes = {"R1": 12e3, "C1": 8e-9, "R2": 9e3, "C2": 11e-9}
    frequency, gain = wien(changes)
    assert frequency == pytest.approx(1 / (2 * math.pi * math.sqrt(12e3 * 8e-9 * 9e3 * 11e-9)), rel=1e-12)
    assert gain == pytest.approx(1 + 12 / 9 + 11 / 8, rel=1e-12)
    swapped = wien({**changes, "R1": 9e3, "R2": 12e3})
    assert swapped[0] == pytest.approx(frequency, rel=1e-12)
    assert abs(swapped[1] / gain - 1) > 0.1


@pytest.mark.parametrize(
    ("ratio", "shift", "gain"),
    [
        (1 / 1000, 0.995530109, 3.0000268),
        (1 / 100, 0.957793585, 3.0024810),
        (1 / 30, 0.876269860, 3.0233962),
        (1 / 10, 0.716852976, 3.1532882),
    ],
)
def test_a15_wien_bridge_with_a_one_pole_op_amp(ratio, shift, gain):
    """From Acl·β = 1 with A = ω_t/s (derived; verified numerically). 1e-8: digits given."""
    frequency, critical = wien({"GBW": PER_RC / ratio, "RF": 21.6e3 if ratio > 0.05 else 20.2e3})
    # the loop's frequency depends on the critical gain, not on the gain that the board has
    assert frequency == pytest.approx(shift * PER_RC, rel=1e-8)
    assert critical == pytest.approx(gain, rel=2e-8)


def test_a15_first_order_law():
    """Δf/f0 = −4.5 f0/GBW; at 1/1000 the next order is 20 times smaller than the tolerance of 1 %."""
    frequency, _ = wien({"GBW": 1000 * PER_RC})
    assert frequency / PER_RC - 1 == pytest.approx(-4.5e-3, rel=0.01)


TWIN_T = (
    Branch("R1", "R", ("o", "x"), ("R",)),
    Branch("R2", "R", ("x", "e"), ("R",)),
    Branch("C3", "C", ("x", "gnd"), ("C3",)),
    Branch("C1", "C", ("o", "y"), ("C",)),
    Branch("C2", "C", ("y", "e"), ("C",)),
    Branch("R3", "R", ("y", "gnd"), ("R3",)),
    Branch("K", "gain", ("o", "e", "gnd"), ("K",), True),
)


def test_a16_twin_t():
    """R, R, 2C and C, C, R/2 (standard textbook result, from memory; verified numerically). 1e-9."""
    symbols = {"R": R, "C": C, "C3": 2 * C, "R3": R / 2, "K": 1.0}
    assert abs(transfer(TWIN_T, symbols, 1 / (R * C))) < 1e-9
    assert transfer(TWIN_T, symbols, 2 / (R * C)) == pytest.approx(0.123287671 + 0.328767123j, abs=1e-9)
    for x in (0.2, 0.9, 3.0):
        law = (1 - x**2) / (1 - x**2 + 4j * x)
        assert transfer(TWIN_T, symbols, x / (R * C)) == pytest.approx(law, rel=1e-9)


def test_a_non_inverting_ladder_does_not_oscillate():
    """NEGATIVE: with the wrong sign of the gain no pair grows at any gain below the one at which it latches, 1."""
    made = circuit(ladder("lag", 3), "K", math.sqrt(6) * PER_RC)
    s = solve_table(made, {"R": R, "C": C, "K": 0.9})
    assert Status(s.status[0]) is Status.NO_START
    assert s.startup_margin[0] < 1
