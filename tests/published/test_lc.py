"""LC oscillators (rows C01–C18). Examples marked "notebook" were seen as companion notebooks, public re-workings of the
book's example (github.com/FOSSEE/Python-Textbook-Companions); the book pages themselves were not seen. R = 1 GΩ stands
for the books' lossless tank."""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.ladders import crossing, fet_colpitts, fet_hartley
from tests.solver.test_agreement import solve
from yieldosc.circuits.circuit import Branch

LOSSLESS = 1e9


def test_c01_fet_colpitts():
    """EE416 class notes, lectures 04-22 and 04-27 (seen): ω0 = √((C1+C2)/(L C1 C2)), start gm R ≥ C2/C1. 1e-9: exact
    laws, at any R."""
    for r in (1e3, 47e3):
        frequency, start = fet_colpitts(10e-6, 220e-12, 680e-12, r)
        assert frequency == pytest.approx(math.sqrt(900 / (10e-6 * 220e-12 * 680)) / (2 * math.pi), rel=1e-9)
        assert start == pytest.approx(680 / 220, rel=1e-9)


def test_c01_the_capacitors_are_not_exchangeable():
    """NEGATIVE (sources disagree on C2/C1 or C1/C2: it depends on which stands at the output)."""
    assert abs(fet_colpitts(10e-6, 680e-12, 220e-12, 47e3)[1] / (680 / 220) - 1) > 0.5


def test_c02_fet_hartley():
    """Same notes (M form: examveda Q207976; seen): ω0 = 1/√((L1+L2)C), start gm R ≥ L1/L2."""
    frequency, start = fet_hartley(10e-6, 4e-6, 0.0, 470e-12, LOSSLESS)
    assert frequency == pytest.approx(1 / (2 * math.pi * math.sqrt(14e-6 * 470e-12)), rel=1e-9)
    assert start == pytest.approx(2.5, rel=1e-9)


@pytest.mark.parametrize(
    ("l", "c1", "c2", "c3", "wanted_hz", "tolerance", "source"),
    [
        (15e-6, 1e-9, 10e-9, None, 1.362922e6, 1e-6, "C05 Malvino & Bates, Electronic Principles, Ex 23-3 p. 904"),
        (15e-6, 1e-9, 10e-9, 50e-12, 5.969194e6, 1e-6, "C06 Malvino & Bates, Ex 23-4 p. 908 (prints 5.97)"),
        (50e-3, 0.1e-6, 10e-9, None, 7465.029, 2e-7, "C08 Floyd, Electronic Devices, Ex 16.3 p. 530"),
        (470e-6, 0.1e-6, 1e-6, None, 24.348e3, 2.1e-4, "C10 Sedha, A Textbook of Applied Electronics, Ex 31.9 p. 793"),
        (5e-6, 1e-9, 10e-9, None, 2.36065e6, 2.2e-3, "C10 Sedha, Ex 31.8 p. 793"),
        (40e-3, 100e-12, 500e-12, None, 87.1728e3, 1.2e-4, "C12 Bakshi & Godse, Analog Electronics, Ex 2.26 p. 2-85"),
    ],
)
def test_colpitts_and_clapp_examples(l, c1, c2, c3, wanted_hz, tolerance, source):  # noqa: E741 -- the coil's letter
    """Notebooks, seen; verified numerically. Tolerance: the digits given there."""
    assert fet_colpitts(l, c1, c2, LOSSLESS, c3)[0] == pytest.approx(wanted_hz, rel=tolerance), source


def test_c05_least_gain():
    """Malvino & Bates, Ex 23-3: B = 0.1, so the voltage gain must reach 10 (notebook, seen)."""
    assert fet_colpitts(15e-6, 1e-9, 10e-9, LOSSLESS)[1] == pytest.approx(10, rel=1e-6)


def test_c08_loaded_tank():
    """Floyd, Ex 16.3 p. 530 (notebook, seen): Q = 8 gives 7407.383 Hz = f0 √(Q²/(Q²+1)), the resonance of a parallel
    tank whose coil has a series resistance ωL/Q. 1e-3 Hz: digits given."""
    table = (
        Branch("L", "L", ("a", "gnd"), ("L", "r")),
        Branch("C", "C", ("a", "gnd"), ("C",)),
        Branch("g", "transconductance", ("a", "gnd", "gnd", "a"), ("g",), True),
    )
    symbols = {"L": 50e-3, "C": 0.1e-6 * 10e-9 / 110e-9, "r": 2 * math.pi * 7407.383 * 50e-3 / 8, "g": 1e-3}
    assert crossing(table, symbols, "g", 7465.0)[0] == pytest.approx(7407.383, abs=1e-3)


def test_c11_doubling_c2():
    """Sedha, Ex 31.11 p. 795 (notebook, seen): from C1 = C2 at 450 kHz to 450 √(3/4) kHz. 0.05 kHz: as printed."""
    c = 1e-9
    inductance = 2 / ((2 * math.pi * 450e3) ** 2 * c)
    assert fet_colpitts(inductance, c, c, LOSSLESS)[0] == pytest.approx(450e3, rel=1e-9)
    assert fet_colpitts(inductance, c, 2 * c, LOSSLESS)[0] == pytest.approx(389.711e3, abs=50)


def test_c12_gain():
    """Bakshi & Godse, Ex 2.26 p. 2-85 (notebook, seen): gain 5; for gain 10, C1 = 50 pF."""
    assert fet_colpitts(40e-3, 100e-12, 500e-12, LOSSLESS)[1] == pytest.approx(5, rel=1e-6)
    assert fet_colpitts(40e-3, 50e-12, 500e-12, LOSSLESS)[1] == pytest.approx(10, rel=1e-6)


def test_c14_hartley_with_mutual_inductance():
    """Sedha, Ex 31.4 p. 790 (notebook, seen): L1 1 mH, L2 100 µH, M 20 µH, C 20 pF. 5e-4 MHz: as printed."""
    frequency, _ = fet_hartley(1e-3, 100e-6, 20e-6, 20e-12, LOSSLESS)
    assert frequency == pytest.approx(1.054029e6, abs=500)
    opposed, _ = fet_hartley(1e-3, 100e-6, -20e-6, 20e-12, LOSSLESS)
    assert abs(opposed / 1.054029e6 - 1) > 0.02  # negative control: windings the other way round


def test_c17_current_gain_of_a_hartley():
    """Bakshi & Godse, Ex 2.22 p. 2-83 (notebook, seen): (L1 + M)/(L2 + M) = 5.09, Leq 17.95 mH, 168 kHz with 50 pF.
    0.01 and 0.1 %: as printed."""
    frequency, start = fet_hartley(15e-3, 2.945e-3, 5e-6, 50e-12, LOSSLESS)
    assert start == pytest.approx(5.09, abs=0.01)
    assert frequency == pytest.approx(168e3, rel=1e-3)
    assert 1 / ((2 * math.pi * frequency) ** 2 * 50e-12) == pytest.approx(17.95e-3, abs=1e-5)


def test_c18_tank():
    """Blake, Electronic Communication Systems, Ex 2.2 p. 62 (notebook, seen): 10 µH, 100 pF. 0.005 MHz: as printed."""
    table = (
        Branch("L", "L", ("a", "gnd"), ("L",)),
        Branch("C", "C", ("a", "gnd"), ("C",)),
        Branch("R", "R", ("a", "gnd"), ("R",)),
        Branch("g", "transconductance", ("a", "gnd", "gnd", "a"), ("g",), True),
    )
    symbols = {"L": 10e-6, "C": 100e-12, "R": 1e4, "g": 1e-3}
    assert crossing(table, symbols, "g", 5e6)[0] == pytest.approx(5.03292e6, abs=5e3)


@pytest.mark.parametrize(("c3", "wanted_hz"), [(None, 1.362922e6), (50e-12, 5.969194e6)])
def test_c05_and_c06_on_the_built_in_circuit(c3, wanted_hz):
    """The same books' values on the Colpitts with a real stage: within 1 %, since stage and coupling load the tank."""
    values = {"L": 15e-6, "C1": 1e-9, "C2": 10e-9, "RC": 3.9e3, "RE": 1e3, "CE": 1e-6, "VCC": 12.0, "RB1": 100e3}
    values |= {"RB2": 18e3, "hFE": 200.0, **({"C3": c3} if c3 else {"CC": 1e-6})}
    s = solve("colpitts", {"ground": "emitter"}, {k: np.array([v]) for k, v in values.items()}, values, 25.0)
    assert s.frequency_hz[0] == pytest.approx(wanted_hz, rel=0.01)
    assert s.startup_margin[0] > 1
