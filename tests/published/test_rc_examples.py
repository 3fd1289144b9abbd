"""RC oscillators, worked examples with part values (rows B01–B18). Most were seen as companion notebooks: public
re-workings of the book's example with its inputs and printed output; the book pages themselves were not seen.
The notebooks stand at github.com/FOSSEE/Python-Textbook-Companions."""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.ladders import common_emitter_ladder, phase_shift
from tests.published.test_rc_theory import wien
from tests.solver.test_agreement import solve


def test_b01_floyd_16_2():
    """Floyd, Electronic Devices, Ex 16.2 p. 525 (notebook, seen): 10 kΩ, 1 nF. 1e-6: digits given."""
    frequency, gain = phase_shift("lead", 3, 10e3, 1e-9)
    assert frequency == pytest.approx(6497.473, rel=1e-6)
    assert -gain * 10e3 == pytest.approx(290e3, rel=1e-6)


def test_b03_mehta_14_7():
    """V. K. Mehta, Principles of Electronics, Ex 14.7 p. 378 (notebook prints 955; seen). 0.5 Hz: its rounding."""
    assert phase_shift("lead", 3, 1e6, 68e-12)[0] == pytest.approx(955.51, abs=0.5)


def test_b05_gayakwad_7_12():
    """Gayakwad, Op-Amps and Linear ICs, Ex 7.12 (notebook, seen): 200 Hz with 0.1 µF. 1 %: the book's rounding."""
    frequency, gain = phase_shift("lead", 3, 3.249e3, 0.1e-6)
    assert frequency == pytest.approx(200, rel=0.01)
    assert -gain * 33e3 == pytest.approx(957e3, rel=0.01)


def test_b06_sivakumar_13_1():
    """Sivakumar, Linear Integrated Circuit, Ex 13.1 p. 378 (notebook, seen): 1 kHz with 10 nF. 0.1 %."""
    frequency, gain = phase_shift("lead", 3, 6.497e3, 10e-9)
    assert frequency == pytest.approx(1e3, rel=1e-3)
    assert -gain * 6.497e3 == pytest.approx(188.4e3, rel=1e-3)


def test_b07_neamen_15_4():
    """Neamen, Electronic Circuit Analysis and Design, Ex 15.4 p. 940 (notebook, seen): buffered, 1 kΩ, 0.1 µF. The
    example's sections are high-pass: ω0 RC = 1/√3. 0.01 Hz: printed digits."""
    frequency, gain = phase_shift("lead", 3, 1e3, 0.1e-6, buffered=True)
    assert frequency == pytest.approx(918.88, abs=0.01)
    assert -gain == pytest.approx(8, rel=1e-9)


@pytest.mark.parametrize("k", [0.230013, 31.519987])
def test_b09_bakshi_2_25(k):
    """Bakshi & Godse, Analog Electronics, Ex 2.25 p. 2-84 (notebook, seen): hfe = 150 is the limit at both roots of
    4k² − 127k + 29 = 0. 0.1 %: six digits of k; R within 1 %: the book takes 12 kΩ."""
    assert common_emitter_ladder(k, 12.1e3, 1e-9)[1] == pytest.approx(150, rel=1e-3)
    if k < 1:
        assert common_emitter_ladder(k, 12.100e3, 1e-9)[0] == pytest.approx(5e3, rel=1e-3)
        assert common_emitter_ladder(k, 12e3, 1e-9)[0] == pytest.approx(5e3, rel=0.01)


def test_b11_chattopadhyay_11_4():
    """Chattopadhyay & Rakshit, Electronics Fundamentals and Applications, ch. 11 Ex 4 p. 264 (notebook, seen)."""
    assert common_emitter_ladder(1.0, 4.7e3, 10e-9)[0] == pytest.approx(1070.83, abs=0.01)


def test_b12_bakshi_2_33():
    """Bakshi & Godse, Ex 2.33 p. 2-89 (notebook, seen): FET with gm 5 mS, 1 kHz, R 10 kΩ. 0.1 %: printed digits."""
    frequency, gain = phase_shift("lead", 3, 10e3, 6.497e-9)
    assert frequency == pytest.approx(1e3, rel=1e-3)
    assert -gain / 5e-3 == pytest.approx(5.8e3, rel=1e-3)


def test_b14_floyd_16_1():
    """Floyd, Electronic Devices, Ex 16.1 p. 524 (notebook, seen): 10 kΩ, 10 nF; R3 1 kΩ with a JFET of 500 Ω below it
    wants RF = 3 kΩ. 1e-6: digits given."""
    changes = {"RG": 1e3, "RS_start": 500.0, "RS_full": 900.0, "RF": 3e3}
    values = {"R1": 10e3, "C1": 10e-9, "R2": 10e3, "C2": 10e-9, **changes}
    s = solve("wien_bridge", {}, {k: np.array([v]) for k, v in values.items()}, values, 25.0)
    assert s.frequency_hz[0] == pytest.approx(1591.549, rel=1e-6)
    assert s.startup_margin[0] == pytest.approx(1, rel=1e-9)


def test_b16_sivakumar_13_3():
    """Sivakumar, Ex 13.3 (notebook, seen): 10 kΩ, 2.4 nF, 6.63 kHz. 0.01 kHz: printed digits."""
    assert wien({"C1": 2.4e-9, "C2": 2.4e-9})[0] == pytest.approx(6.63e3, abs=10)


def test_b17_fiore_9_2():
    """Fiore, Op Amps and Linear ICs, Ex 9.2 p. 307 (notebook, seen): 1.1 … 11.1 kΩ, 0.1 µF. Half a unit of the last
    digit printed; the gain 3.27 starts."""
    fast, critical = wien({"R1": 1.1e3, "R2": 1.1e3, "C1": 0.1e-6, "C2": 0.1e-6})
    slow, _ = wien({"R1": 11.1e3, "R2": 11.1e3, "C1": 0.1e-6, "C2": 0.1e-6})
    assert fast == pytest.approx(1447, abs=0.5)
    assert slow == pytest.approx(143.4, abs=0.05)
    assert pytest.approx(3.27, abs=0.005) == 1 + 12.7 / 5.6
    assert critical < 1 + 12.7 / 5.6


def test_b18_the_published_error_is_four_times_too_high():
    """INCB page MA119E prints 1592.35 Hz for 20 kΩ and 20 nF (the wrong value seen); 397.887 Hz is right."""
    frequency, _ = wien({"R1": 20e3, "R2": 20e3, "C1": 20e-9, "C2": 20e-9})
    assert frequency == pytest.approx(397.887, abs=0.001)
    assert 1592.35 / frequency == pytest.approx(4, abs=0.01)
    assert math.isclose(wien()[0], 1592.35, rel_tol=1e-3)  # it is the value of 10 kΩ and 10 nF
