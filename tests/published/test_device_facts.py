"""Facts of devices and waves: rows D06, D12, M03 and M07 of the collected check values, each with its source."""

import math

import numpy as np
import pytest

from yieldosc.circuits.stages.bjt import ROLES
from yieldosc.parts.laws import parse_law
from yieldosc.quantities import parse_tolerance

K_OVER_Q = 1.380649e-23 / 1.602176634e-19  # exact since SI 2019


def test_d06_a_timer_data_sheet_can_be_entered_as_it_stands():
    """Timer data sheets (SNAS548 sec. 6.5, SLFS022A p. 5; seen): initial 2.25 %, 150 ppm/K, 0.3 %/V (astable)."""
    assert parse_tolerance("±2.25 %") == pytest.approx((-0.0225, 0.0225))
    law = parse_law("±150 ppm/K")
    ends = [float(law.change(70.0, {"slope": np.array([u])})[0]) for u in (0.0, 1.0)]
    assert ends == pytest.approx([-6.75e-3, 6.75e-3])


@pytest.mark.parametrize(("order", "wanted"), [(1, 0.369486182095204), (2, 0.181141613793829)])
def test_d12_a_sawtooth_through_a_butterworth_filter(order, wanted):
    """OEIS A300714 and A300727 (Blagouchine 2018; seen, verified numerically). No circuit here makes a sawtooth, so the
    row holds the definition of distortion that the filters' pages use: harmonics from the second on over the first,
    each times the filter's gain (Butterworth: 1/√(1 + n^2N) at n times the cut-off)."""
    n = np.arange(1, 2_000_001, dtype=float)
    peaks = 1 / n / np.sqrt(1 + n ** (2 * order))
    assert math.sqrt(float(np.sum(peaks[1:] ** 2))) / peaks[0] == pytest.approx(wanted, abs=1e-9)


def test_m03_the_slope_of_a_junction():
    """An answer on a question-and-answer site (499317, seen): (V − (3 V_T + V_G))/T at 0.6 V, 1.11 V, 300 K is
    −1.9585 mV/K; Sedra & Smith say about −2 mV/K, which is the stage's built-in law."""
    slope = (0.6 - (3 * K_OVER_Q * 300 + 1.11)) / 300
    assert slope * 1e3 == pytest.approx(-1.9585, abs=1e-4)
    law = next(role.builtin_law for role in ROLES if role.name == "VBE")
    assert float(law.split()[0]) == pytest.approx(slope * 1e3, abs=0.05)


def test_m07_current_gain_rises_within_the_quoted_band():
    """Formula pages (weak sources, seen): β rises 0.5 to 1 %/K; the built-in law takes the lower end."""
    law = next(role.builtin_law for role in ROLES if role.name == "hFE")
    assert 0.5 <= float(law.split()[0]) <= 1.0
