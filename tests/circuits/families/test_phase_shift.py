"""Phase-shift ladders: published values (ids of the project's list of checks), the requirement's own check value, and
what the trade says without a source."""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.circuits.families.common import built, solve, symbols_of
from yieldosc.solver.solution import Status

R, C = 10e3, 10e-9
RC = R * C


def equal(n: int, r: float = R, c: float = C) -> dict[str, float]:
    return {f"R{i}": r for i in range(1, n + 1)} | {f"C{i}": c for i in range(1, n + 1)}


def omega(solution) -> float:
    return 2 * math.pi * float(solution.frequency_hz[0])


def test_the_check_value_of_the_requirement():
    """Lead, 3 sections, 10 kΩ, 10 nF, RF 320 kΩ, GBW 1 MHz: 647.2527 Hz and 29.0929 by a full nodal solution (circuits.md
    4 of the specification); seven and six digits as printed."""
    s = solve("phase_shift", {"ladder": "lead"}, {**equal(3), "RF": 320e3, "GBW": 1e6})
    assert s.frequency_hz[0] == pytest.approx(647.2527, abs=5e-5)
    assert s.critical_gain[0] / R == pytest.approx(29.0929, abs=5e-5)


@pytest.mark.parametrize(
    ("sections", "w0rc", "gain", "source"),
    [
        (3, 1 / math.sqrt(6), 29, "A01: Schubert & Kim, Electronics Book 4 (2016), sec. 12.2.1, eq. 12.12-12.19, seen"),
        (4, math.sqrt(7 / 10), 901 / 49, "A03: standard textbook result (18.39), from memory"),
    ],
)
def test_lead_ladders_of_equal_sections(sections, w0rc, gain, source):
    s = solve("phase_shift", {"ladder": "lead", "sections": str(sections)}, {**equal(sections), "RF": 320e3})
    assert omega(s) * RC == pytest.approx(w0rc, rel=1e-9), source
    assert s.critical_gain[0] / R == pytest.approx(gain, rel=1e-9), source
    assert s.startup_margin[0] == pytest.approx(32 / gain, rel=1e-9)


@pytest.mark.parametrize(("sections", "w0rc", "gain"), [(3, math.sqrt(6), 29), (4, math.sqrt(10 / 7), 901 / 49)])
def test_lag_ladders_are_the_reciprocals_when_nothing_loads_them(sections, w0rc, gain):
    """Input resistor far above the ladder: the loading that is left is sections·R/RIN."""
    values = {**equal(sections), "RIN": 1e12, "RF": 40e12}
    s = solve("phase_shift", {"sections": str(sections)}, values)
    assert omega(s) * RC == pytest.approx(w0rc, rel=1e-6)
    assert s.critical_gain[0] / 1e12 == pytest.approx(gain, rel=1e-6)


def test_rl_ladder_behaves_as_lead_with_l_over_r():
    values = {f"R{i}": 1e3 for i in (1, 2, 3)} | {f"L{i}": 0.1 for i in (1, 2, 3)} | {"RIN": 1e12, "RF": 40e12}
    s = solve("phase_shift", {"ladder": "rl"}, values)
    assert omega(s) * 0.1 / 1e3 == pytest.approx(1 / math.sqrt(6), rel=1e-6)
    assert s.critical_gain[0] / 1e12 == pytest.approx(29, rel=1e-6)


def test_the_formula_with_root_2n_is_wrong_for_four_sections():
    """A06: f = 1/(2π RC √(2N)) holds for N = 3 only (forum thread "4-Stage RC phase shift oscillator", 2023, seen)."""
    s = solve("phase_shift", {"ladder": "lead", "sections": "4"}, {**equal(4), "RF": 320e3})
    assert abs(omega(s) * RC * math.sqrt(8) - 1) > 0.5


@pytest.mark.parametrize("ladder", ["lag", "lead"])
@pytest.mark.parametrize("sections", [3, 4])
def test_buffered_ladders(ladder, sections):
    """A07: √3/(RC) and gain 8 for three sections (SLOA060 (2001) sec. 8.3, restatement seen); tan(π/n)^±1 and
    (1/cos(π/n))^n in general (specification)."""
    own = {"RIN": 10e3} if ladder == "lag" else {}
    s = solve(
        "phase_shift",
        {"ladder": ladder, "sections": str(sections), "buffered": "yes"},
        {**equal(sections), "RF": 100e3, **own},
    )
    turn = math.tan(math.pi / sections)
    assert omega(s) * RC == pytest.approx(turn if ladder == "lag" else 1 / turn, rel=1e-9)
    assert s.critical_gain[0] / 10e3 == pytest.approx(math.cos(math.pi / sections) ** -sections, rel=1e-9)


def test_a_buffer_before_the_input_resistor_changes_nothing_in_a_buffered_lead():
    """R3 into a virtual ground, or to ground with a buffer and RIN of its own: the same section either way."""
    options = {"ladder": "lead", "buffered": "yes"}
    direct = solve("phase_shift", options, {**equal(3), "RF": 90e3})
    own = solve("phase_shift", options, {**equal(3), "RF": 180e3, "RIN": 20e3})
    assert own.frequency_hz[0] == pytest.approx(direct.frequency_hz[0], rel=1e-12)
    assert own.startup_margin[0] == pytest.approx(direct.startup_margin[0], rel=1e-12)


@pytest.mark.parametrize(
    ("r", "c", "wanted_hz", "tolerance", "source"),
    [
        (10e3, 1e-9, 6497.473, 1e-6, "B01: Floyd, Electronic Devices, Ex 16.2 (companion notebook seen)"),
        (1e6, 68e-12, 955.51, 5e-4, "B03: Mehta, Principles of Electronics, Ex 14.7 (companion notebook seen)"),
        (3.249e3, 0.1e-6, 200.0, 1e-2, "B05: Gayakwad, Op-Amps and Linear ICs, Ex 7.12 (companion notebook seen)"),
        (6.497e3, 10e-9, 1000.0, 1e-3, "B06: Sivakumar, Linear Integrated Circuit, Ex 13.1 (companion notebook seen)"),
    ],
)
def test_published_examples(r, c, wanted_hz, tolerance, source):
    s = solve("phase_shift", {"ladder": "lead"}, {**equal(3, r, c), "RF": 30 * r})
    assert s.frequency_hz[0] == pytest.approx(wanted_hz, rel=tolerance), source
    assert s.startup_margin[0] == pytest.approx(30 / 29, rel=1e-9), source


def test_published_buffered_example():
    """B07: R = 1 kΩ, C = 0.1 µF: 918.88 Hz, gain 8 (Neamen, Ex 15.4; companion notebook seen)."""
    values = {**equal(3, 1e3, 0.1e-6), "RF": 9e3}
    s = solve("phase_shift", {"ladder": "lead", "buffered": "yes"}, values)
    assert s.frequency_hz[0] == pytest.approx(918.88, abs=0.01)
    assert s.critical_gain[0] == pytest.approx(8e3, rel=1e-9)


# -- the common-emitter ladder: hoe = 0, base current driven ------------------------------------------------------------

QUIET = {"VA": 1e12, "fT": 1e18, "Cob": 1e-24, "RB1": 1e12, "VCC": 1e9, "hFE": 100.0, "VBE": 0.65}


def emitter_stage(k: float, r: float = R, c: float = C):
    """Lead, three sections, RC = k R, R3 + rin = R; the base's own bias resistor is out of the way."""
    bare = {**{f: v for f, v in equal(3, r, c).items() if f != "R3"}, "RC": k * r, **QUIET, "R3": 1.0}
    circuit, arrays = built("phase_shift", {"stage": "bjt", "ladder": "lead"}, bare)
    rin = symbols_of(circuit, arrays)["rin"]
    return solve("phase_shift", {"stage": "bjt", "ladder": "lead"}, {**bare, "R3": r - rin}), rin


@pytest.mark.parametrize("k", [0.5, 1.0, math.sqrt(29) / 2, 5.0])
def test_common_emitter_ladder(k):
    """A09: ω = 1/(RC √(6 + 4k)), hFE ≥ 23 + 29/k + 4k (Schubert & Kim, Book 4, eq. 12.26-12.29, seen)."""
    s, rin = emitter_stage(k)
    assert omega(s) * RC == pytest.approx(1 / math.sqrt(6 + 4 * k), rel=1e-5)
    assert s.critical_gain[0] * rin == pytest.approx(23 + 29 / k + 4 * k, rel=1e-5)


def test_least_current_gain_over_k():
    """A10: k = √29/2, hFE 44.54065923 (book prints 2.7 and 44.5; Schubert & Kim, Book 4, eq. 12.31-12.32, seen)."""
    s, rin = emitter_stage(math.sqrt(29) / 2)
    least = s.critical_gain[0] * rin
    assert least == pytest.approx(44.54065923, rel=1e-5)
    for k in (2.4, 3.0):
        other, other_rin = emitter_stage(k)
        assert other.critical_gain[0] * other_rin > least


@pytest.mark.parametrize("k", [0.230013, 31.519987])
def test_hfe_150_has_two_ratios(k):
    """B09: 4k² − 127k + 29 = 0 for hFE = 150 (Bakshi & Godse, Analog Electronics, Ex 2.25; companion notebook seen)."""
    s, rin = emitter_stage(k)
    assert s.critical_gain[0] * rin == pytest.approx(150, rel=1e-4)


def test_equal_collector_resistor_example():
    """B11: RC = R = 4.7 kΩ, C = 10 nF: 1070.83 Hz (Chattopadhyay & Rakshit, ch. 11 Ex 4; companion notebook seen)."""
    s, _ = emitter_stage(1.0, 4.7e3, 10e-9)
    assert s.frequency_hz[0] == pytest.approx(1070.83, abs=0.02)


def test_the_figure_of_29_is_not_a_bipolar_stage_s():
    """Negative control: some books print 29 for the bjt; with k = 1 the current gain needed is 56."""
    s, rin = emitter_stage(1.0)
    assert s.critical_gain[0] * rin == pytest.approx(56, rel=1e-5)


def test_field_effect_ladder():
    """B12: gm = 5 mS, 1 kHz, R = 10 kΩ: C = 6.497 nF, RL ≥ 29/gm = 5.8 kΩ for a ladder that does not load the drain
    (Bakshi & Godse, Ex 2.33; companion notebook seen). Here the ladder is a thousand times RC."""
    values = {"R1": 5.8e6, "R2": 5.8e6, "C1": 11.2e-12, "C2": 11.2e-12, "C3": 11.2e-12, "RG": 5.8e6, "RC": 5.8e3}
    stage = {"gfs": 5e-3, "Ciss": 2e-21, "Crss": 1e-21, "gos": 1e-12}
    s = solve("phase_shift", {"stage": "mosfet", "ladder": "lead"}, {**values, **stage})
    assert s.critical_gain[0] == pytest.approx(5e-3, rel=3e-3)
    assert s.frequency_hz[0] == pytest.approx(1 / (2 * math.pi * math.sqrt(6) * 5.8e6 * 11.2e-12), rel=3e-3)


# -- common practice, no source ---------------------------------------------------------------------------------------


def test_a_measured_lag_ladder():
    """Common practice, no source: three 560 Ω / 10 nF lag sections around a common-emitter stage were measured at
    58.7 kHz; the unloaded √6 formula says 69.5 kHz. With plausible bias parts the loaded model comes within 10 %."""
    values = {**equal(3, 560.0, 10e-9), "CC": 1e-6, "RC": 1.5e3, "hFE": 200.0}
    bias = {"VCC": 9.0, "RB1": 47e3, "RB2": 10e3, "RE": 470.0, "CE": 100e-6}
    s = solve("phase_shift", {"stage": "bjt"}, {**values, **bias})
    assert Status(s.status[0]) is Status.STARTS
    assert s.frequency_hz[0] == pytest.approx(58.7e3, rel=0.1)
    assert math.sqrt(6) / (2 * math.pi * 560 * 10e-9) == pytest.approx(69.5e3, rel=2e-3)


def test_one_section():
    """Common practice, no source: 1 kΩ and 3 nF have their corner at 53 kHz; 560 Ω and 10 nF turn 50 kHz by about 60°."""
    assert 1 / (2 * math.pi * 1e3 * 3e-9) == pytest.approx(53e3, rel=0.01)
    assert math.degrees(math.atan(2 * math.pi * 50e3 * 560 * 10e-9)) == pytest.approx(60, abs=1)


def test_design_frequency_of_unequal_sections_is_where_the_ladder_turns():
    """Against a numeric search of the phase of the ladder's chain matrix."""
    values = {"R1": 8e3, "R2": 15e3, "R3": 5e3, "R4": 22e3, "C1": 3e-9, "C2": 12e-9, "C3": 7e-9, "C4": 1e-9}
    circuit, arrays = built("phase_shift", {"ladder": "lead", "sections": "4"}, {**values, "RF": 1e6})
    design = float(np.ravel(circuit.design_frequency(arrays))[0])

    def ratio(w: float) -> complex:
        chain = np.eye(2, dtype=complex)
        for i in (1, 2, 3, 4):
            series = np.array([[1, 1 / (1j * w * values[f"C{i}"])], [0, 1]])
            shunt = np.array([[1, 0], [1 / values[f"R{i}"], 1]])
            chain = chain @ series @ shunt
        return 1 / chain[0, 0]

    at = ratio(2 * math.pi * design)
    assert at.real < 0
    assert abs(at.imag) < 1e-12
