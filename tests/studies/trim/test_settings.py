"""Four kinds of trim on boards whose needed setting is a formula."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.stats import kstest

from tests.studies.trim.conftest import UNITS

E24 = [1.0, 1.1, 1.2, 1.3, 1.5, 1.6, 1.8, 2.0, 2.2, 2.4, 2.7, 3.0, 3.3, 3.6, 3.9, 4.3, 4.7, 5.1, 5.6, 6.2, 6.8, 7.5,
       8.2, 9.1]  # fmt: skip  # IEC 60063, from memory


def test_a_continuous_trim_sets_what_the_formula_says(bench):
    b = bench()
    _, setting = b.trimmed()
    assert setting == pytest.approx(b.needed_ohm(), rel=1e-9)


def test_an_own_tolerance_of_the_trimmed_part_is_taken_up(bench):
    b = bench(own=0.1)
    frequency, setting = b.trimmed()
    assert setting == pytest.approx(b.needed_ohm(), rel=1e-9)
    assert frequency == pytest.approx(b.trim.target_hz, rel=1e-9)


def test_what_is_left_after_a_continuous_trim_is_the_reading(bench):
    """f − target = −(bias + noise) of each unit's reading: normal with the instrument's sd around minus the bias."""
    b = bench(sd=1e-4, bias=2e-4)
    frequency, _ = b.trimmed()
    left = frequency / b.trim.target_hz - 1
    assert left == pytest.approx(b.goal_hz() / b.trim.target_hz - 1, abs=1e-9)
    assert kstest((left + 2e-4) / 1e-4, "norm").pvalue > 0.01


def test_steps_leave_half_a_step_at_most_evenly_spread(bench):
    """100 Ω steps of 10 kΩ; the setting left is the nearest step in frequency, f ∝ 1/√R."""
    b = bench(trim_step=100.0)
    frequency, setting = b.trimmed()
    steps = (setting - b.trim.low) / 100
    assert steps == pytest.approx(np.round(steps), abs=1e-6)
    off = (setting - b.needed_ohm()) / 100
    assert np.abs(off).max() < 0.5 + 0.003  # the nearest in frequency: of 1/√R, not of R, so the middle lies 0.2 % off
    assert kstest(off, "uniform", args=(-0.5, 1.0)).pvalue > 0.01
    assert frequency == pytest.approx(b.trim.target_hz * np.sqrt(b.needed_ohm() / setting), rel=1e-9)


def test_no_other_step_would_read_nearer_to_the_target(bench):
    b = bench(trim_step=150.0, sd=1e-3)
    frequency, setting = b.trimmed()
    away = np.abs(frequency - b.goal_hz())
    for other in (-150.0, 150.0):
        moved = np.clip(setting + other, b.trim.low, b.trim.high)
        assert (np.abs(frequency * np.sqrt(setting / moved) - b.goal_hz()) >= away - 1e-9).all()


def test_a_range_that_is_no_whole_number_of_steps_ends_at_the_last_whole_one(bench):
    b = bench(low=9.0e3, high=10.05e3, trim_step=100.0)
    _, setting = b.trimmed()
    assert setting.max() == pytest.approx(10.0e3)
    assert setting.min() == pytest.approx(9.0e3)


def test_a_bank_of_switched_steps_has_steps_of_its_own(bench):
    """Each step ±10 %, drawn per unit: the setting left is one of that unit's own sums, the nearest to its target."""
    b = bench(low=8e3, high=13e3, trim_step=500.0, trim_step_tolerance=0.1)
    frequency, setting = b.trimmed()
    draw = b.setup.draw(0, UNITS)
    sums = 8e3 + np.cumsum([np.zeros(UNITS), *(500 * (0.9 + 0.2 * draw(f"step {i}")) for i in range(10))], axis=0)
    away = np.abs(frequency * np.sqrt(setting / sums) - b.goal_hz())
    best = sums[away.argmin(axis=0), np.arange(UNITS)]
    assert setting == pytest.approx(best, rel=1e-9)
    assert np.abs(setting % 500).max() > 50  # not the nominal steps


def test_a_fitted_part_is_the_nearest_series_value_in_ratio_with_a_draw_of_its_own(bench):
    b = bench(low=8e3, high=13e3, own=0.01, trim_series="E24")
    _, setting = b.trimmed()
    ladder = np.array([10 ** e * m for e in (3, 4) for m in E24])
    ladder = ladder[(ladder >= 8e3 - 1) & (ladder <= 13e3 + 1)]
    chosen = ladder[np.abs(np.log(ladder[:, None] / b.needed_ohm())).argmin(axis=0)]
    before = b.values()["R1"] / b.study.parameter("R1").typical
    fitted = setting * before  # the resistance that is on the board
    deviation = fitted / chosen - 1
    assert np.abs(deviation).max() <= 0.01 + 1e-9
    assert kstest(deviation, "uniform", args=(-0.01, 0.02)).pvalue > 0.01
    # another part than the one that was read: no relation to its deviation
    assert abs(np.corrcoef(deviation, before)[0, 1]) < 4 / math.sqrt(UNITS)


def test_a_value_without_tolerance_is_fitted_as_it_is(bench):
    b = bench(low=8e3, high=13e3, trim_series="E24")
    _, setting = b.trimmed()
    assert set(np.round(setting, 6)) <= {8200.0, 9100.0, 10000.0, 11000.0, 12000.0, 13000.0}


def test_stops_hold(bench):
    b = bench(low=9.9e3, high=10.1e3)
    _, setting = b.trimmed()
    assert setting == pytest.approx(np.clip(b.needed_ohm(), 9.9e3, 10.1e3), rel=1e-9)


def test_a_unit_that_gives_no_reading_is_left_alone(bench):
    """Gain 2.9: 1 + R1/R2 + C2/C1 is 3 and more for every setting of many boards, which then never start."""
    b = bench(gain=2.0, low=9e3, high=11e3)
    _, setting = b.trimmed(2000)
    assert (setting == b.study.parameter("R1").typical).all()
