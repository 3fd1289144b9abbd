"""Timers, Schmitt triggers and filtered squares: published examples, and waveforms integrated here step by step."""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.circuits.families.common import solve
from yieldosc.solver.solution import Status


def timer(**values: float):
    return solve("timer_astable", {}, values)


@pytest.mark.parametrize(
    ("ra", "rb", "c", "wanted_hz", "tolerance", "source"),
    [
        (2.2e3, 4.7e3, 22e-9, 5653.19, 2e-6, "D02: Floyd, Electronic Devices, Ex 16.6, exact law (notebook seen)"),
        (2.2e3, 4.7e3, 22e-9, 5642.63, 5e-3, "D02: the same with 1.44 for 1/ln 2, as the book rounds"),
        (2.2e3, 3.9e3, 0.1e-6, 1442.70, 5e-6, "D04: Gayakwad, Ex 9.7, exact law (notebook seen)"),
        (14.427e3, 7.213e3, 1e-9, 50e3, 1e-4, "D05: Franco 3e, Ex 10.3, exact law (notebook seen)"),
        (14.4e3, 7.2e3, 1e-9, 50e3, 5e-3, "D05: the book's values, from 1.44"),
    ],
)
def test_published_timers(ra, rb, c, wanted_hz, tolerance, source):
    assert timer(RA=ra, RB=rb, C=c).frequency_hz[0] == pytest.approx(wanted_hz, rel=tolerance), source


def test_d01_law_and_duty():
    """D01: t_high = ln 2 (RA+RB) C, t_low = ln 2 RB C, D = (RA+RB)/(RA+2RB) (LM555 sheet, Fairchild rev 1.1.0 eq. 9-11,
    seen); D02: duty 59.4828 %; D04: 0.4228 ms and 0.2703 ms."""
    s = timer(RA=2.2e3, RB=4.7e3, C=22e-9)
    assert s.duty[0] == pytest.approx(0.594828, abs=5e-7)
    s = timer(RA=2.2e3, RB=3.9e3, C=0.1e-6)
    high = s.duty[0] / s.frequency_hz[0]
    assert high == pytest.approx(0.4228e-3, abs=5e-8)
    assert 1 / s.frequency_hz[0] - high == pytest.approx(0.2703e-3, abs=5e-8)
    assert s.frequency_hz[0] == pytest.approx(1 / (math.log(2) * (2.2e3 + 2 * 3.9e3) * 0.1e-6), rel=1e-9)


def integrated(up, down, high, low, delay, *, steps=40_000):
    """(frequency, duty) of a capacitor between two thresholds, run with small exact steps; up, down: (target, tau).

    The switch follows a crossing by `delay`; crossings are placed inside a step by linear interpolation."""
    dt = (up[1] + down[1]) / steps
    v, t, rising, due = low, 0.0, True, None
    edges = []
    while len(edges) < 5:
        target, tau = up if rising else down
        new = target + (v - target) * math.exp(-dt / tau)
        threshold = high if rising else low
        if due is None and (v - threshold) * (new - threshold) <= 0 and new != v and (new > v) == rising:
            due = t + dt * (threshold - v) / (new - v) + delay
        if due is not None and due <= t + dt:
            v = target + (v - target) * math.exp(-(due - t) / tau)
            t, due, rising = due, None, not rising
            edges.append(t)
            continue
        v, t = new, t + dt
    period = edges[4] - edges[2]
    first_is_rise_end = (edges[3] - edges[2]) / period
    return 1 / period, 1 - first_is_rise_end


@pytest.mark.parametrize(("rd", "td"), [(0.0, 0.0), (30.0, 2e-6), (300.0, 5e-6)])
def test_timer_waveform_by_integration(rd, td):
    """Against the capacitor's voltage run step by step; edges 2 and 4 end a charge."""
    ra, rb, c = 2.2e3, 4.7e3, 22e-9
    s = timer(RA=ra, RB=rb, C=c, Rd=rd, td=td, vh=0.65, vl=0.30)
    up, down = (1.0, (ra + rb) * c), (rd / (ra + rd), (rb + ra * rd / (ra + rd)) * c)
    f, duty = integrated(up, down, 0.65, 0.30, td)
    assert s.frequency_hz[0] == pytest.approx(f, rel=1e-6)
    assert s.duty[0] == pytest.approx(duty, rel=1e-5)


def test_a_timer_latches_where_its_switch_cannot_reach_the_lower_threshold():
    """v∞ = Rd/(RA + Rd) ≥ vl: from Rd = RA/2 upward at vl = 1/3; just below, it still runs."""
    latched = timer(RA=2e3, RB=4.7e3, C=22e-9, Rd=1000.1)
    assert Status(latched.status[0]) is Status.NO_START
    assert latched.frequency_hz[0] == 0
    running = timer(RA=2e3, RB=4.7e3, C=22e-9, Rd=999.9)
    assert Status(running.status[0]) is Status.STARTS
    assert 0 < running.frequency_hz[0] < 0.3 * timer(RA=2e3, RB=4.7e3, C=22e-9).frequency_hz[0]


@pytest.mark.parametrize("td", [0.0, 500e-9])
def test_schmitt_waveform_by_integration(td):
    s = solve("schmitt_rc", {}, {"R": 10e3, "C": 1e-9, "VTP": 2.9, "VTN": 1.9, "VCC": 5.0, "td": td})
    f, duty = integrated((5.0, 1e-5), (0.0, 1e-5), 2.9, 1.9, td)
    assert s.frequency_hz[0] == pytest.approx(f, rel=1e-6)
    assert s.duty[0] == pytest.approx(duty, rel=1e-5)


def test_schmitt_thresholds_as_volts_or_shares():
    rest = {"R": 10e3, "C": 1e-9, "VCC": 3.3}
    volts = solve("schmitt_rc", {}, {**rest, "VTP": 0.6 * 3.3, "VTN": 0.4 * 3.3})
    shares = solve("schmitt_rc", {"thresholds": "fractions"}, {**rest, "VTP": 0.6, "VTN": 0.4})
    assert volts.frequency_hz[0] == pytest.approx(shares.frequency_hz[0], rel=1e-14)
    lower = solve("schmitt_rc", {}, {**rest, "VCC": 3.0, "VTP": 0.6 * 3.3, "VTN": 0.4 * 3.3})
    assert abs(lower.frequency_hz[0] / volts.frequency_hz[0] - 1) > 1e-4


@pytest.mark.parametrize(("high", "low"), [(5.5, 1.0), (2.0, 2.5)])
def test_a_schmitt_trigger_latches_without_a_swing(high, low):
    s = solve("schmitt_rc", {}, {"R": 10e3, "C": 1e-9, "VTP": high, "VTN": low, "VCC": 5.0})
    assert Status(s.status[0]) is Status.NO_START
    assert s.frequency_hz[0] == 0


# -- filtered squares ---------------------------------------------------------------------------------------------------


def square(sections: int, values: dict[str, float], **options: str):
    return solve("square_to_sine", {"sections": str(sections), **options}, values)


def test_an_open_filter_shows_the_square_s_own_harmonics():
    """D09: distortion √(π²/8 − 1) of a 50 % square counts all harmonics (Blagouchine & Moreau 2011, seen). Up to the 51st
    the series 1/n² of odd n from 3 lacks the rest, which is summed here."""
    s = square(1, {"F": 1e3, "V": 5.0, "R1": 1e-3, "C1": 1e-12})
    rest = math.pi**2 / 8 - sum(1 / n**2 for n in range(1, 52, 2))
    assert s.distortion[0] ** 2 + rest == pytest.approx(0.483425847608679**2, rel=1e-6)
    assert s.amplitude_v[0] == pytest.approx(2 * 5.0 / math.pi, rel=1e-9)


def test_d11_butterworth_of_first_and_second_order():
    """D11: square through a Butterworth low-pass with its cut-off at the fundamental: 0.163528531 (n = 1), 0.053483492
    (n = 2) (Blagouchine & Moreau 2011, percentages from memory). rc: 2πf RC = 1; lc with its source as damping: R = √(2L/C)."""
    w = 2 * math.pi * 1e3
    first = square(1, {"F": 1e3, "V": 1.0, "R1": 1e3, "C1": 1 / (w * 1e3)})
    rest = sum(1 / (n**2 * (1 + n**2)) for n in range(53, 20001, 2)) * 2
    assert math.sqrt(first.distortion[0] ** 2 + rest) == pytest.approx(0.163528531, abs=1e-6)
    inductance, capacitance = 0.1, 1 / (w**2 * 0.1)
    second = square(
        1,
        {"F": 1e3, "V": 1.0, "L1": inductance, "C1": capacitance, "ROUT": math.sqrt(2 * inductance / capacitance)},
        filter="lc",
    )
    assert second.distortion[0] == pytest.approx(0.053483492, abs=1e-6)
    assert second.amplitude_v[0] == pytest.approx(2 / math.pi / math.sqrt(2), rel=1e-9)
    assert second.phase_deg[0] == pytest.approx(-90, abs=1e-9)


@pytest.mark.parametrize("kind", ["rc", "lc"])
@pytest.mark.parametrize("sections", [1, 2, 3, 4])
def test_amplitude_and_distortion_by_a_nodal_solution_and_fourier_sums(kind, sections):
    """Ladder solved as a complex nodal matrix at each harmonic; the square's spectrum from a sampled period."""
    f, duty, height = 5e3, 0.37, 3.3
    values: dict[str, float] = {"F": f, "D": duty, "V": height, "ROUT": 60.0, "RLOAD": 12e3}
    for i in range(1, sections + 1):
        values |= {f"C{i}": (10 + i) * 1e-9}
        values |= {f"R{i}": 1e3 * i} if kind == "rc" else {f"L{i}": 0.02 * i, f"L{i}_dcr": 3.0 * i}
    s = square(sections, values, filter=kind)
    samples = 1 << 16
    wave = np.where(np.arange(samples) < duty * samples, height, 0.0)
    spectrum = np.fft.rfft(wave) / samples * 2

    def gain(n: int) -> complex:
        w = 2 * math.pi * f * n
        matrix = np.zeros((sections, sections), dtype=complex)
        feed = np.zeros(sections, dtype=complex)
        for i in range(1, sections + 1):
            z = values[f"R{i}"] if kind == "rc" else values[f"L{i}_dcr"] + 1j * w * values[f"L{i}"]
            y = 1 / (z + (60.0 if i == 1 else 0.0))
            matrix[i - 1, i - 1] += y + 1j * w * values[f"C{i}"]
            if i == 1:
                feed[0] = y
            else:
                matrix[i - 2, i - 2] += y
                matrix[i - 1, i - 2] -= y
                matrix[i - 2, i - 1] -= y
        matrix[-1, -1] += 1 / 12e3
        return complex(np.linalg.solve(matrix, feed)[-1])

    lines = {n: abs(spectrum[n] * gain(n)) for n in range(1, 52)}
    assert s.amplitude_v[0] == pytest.approx(lines[1], rel=1e-4)
    wanted = math.sqrt(sum(v**2 for n, v in lines.items() if n > 1)) / lines[1]
    assert s.distortion[0] == pytest.approx(wanted, rel=1e-3)
    assert s.phase_deg[0] == pytest.approx(math.degrees(np.angle(gain(1))), abs=1e-6)


def test_sources_in_front_of_the_filter():
    parts = {"R1": 1e3, "C1": 47e-9, "R2": 10e3, "C2": 4.7e-9}
    clock = {"RA": 2.2e3, "RB": 4.7e3, "C": 22e-9}
    by_timer = square(2, {**clock, "V": 5.0, **parts}, source="timer_astable")
    alone = timer(**clock)
    given = square(2, {"F": alone.frequency_hz[0], "D": alone.duty[0], "V": 5.0, **parts})
    for field in ("frequency_hz", "amplitude_v", "distortion", "phase_deg", "duty"):
        assert getattr(by_timer, field)[0] == pytest.approx(getattr(given, field)[0], rel=1e-14)
    trigger = {"R": 10e3, "C": 1e-9, "VTP": 2.9, "VTN": 1.9, "VCC": 5.0}
    by_trigger = square(2, {**trigger, **parts}, source="schmitt_rc")
    alone = solve("schmitt_rc", {}, trigger)
    given = square(2, {"F": alone.frequency_hz[0], "D": alone.duty[0], "V": 5.0, **parts})
    assert by_trigger.distortion[0] == pytest.approx(given.distortion[0], rel=1e-14)
    assert by_trigger.amplitude_v[0] == pytest.approx(given.amplitude_v[0], rel=1e-14)


def test_no_start_up_question_and_no_growth():
    s = timer(RA=2.2e3, RB=4.7e3, C=22e-9)
    assert np.isnan(s.startup_margin[0])
    assert s.growth_per_s is None
    assert s.critical_gain is None


def test_a_latched_timer_gives_no_sine():
    parts = {"R1": 1e3, "C1": 47e-9}
    s = square(1, {"RA": 2e3, "RB": 4.7e3, "C": 22e-9, "Rd": 1500.0, "V": 5.0, **parts}, source="timer_astable")
    assert Status(s.status[0]) is Status.NO_START
    assert np.isnan(s.distortion[0])
