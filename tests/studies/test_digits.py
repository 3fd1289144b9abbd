"""Digits follow the half-width; bounds go outward; nothing ties with the target. Expected texts by the rule's words."""

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from yieldosc.studies.digits import percent_text, rate_text, rounded
from yieldosc.studies.estimates import clopper_pearson, yield_estimate
from yieldosc.studies.results import Estimate


def made(estimate, low, high, failures=5, units=100):
    return Estimate(estimate=estimate, low=low, high=high, failures=failures, units=units)


def test_two_digits_of_the_half_width_and_bounds_outward():
    assert percent_text(made(0.81206, 0.80861, 0.81548)) == "81.21 % (80.86 % to 81.55 %)"
    assert percent_text(made(0.5, 0.4013, 0.5987)) == "50.0 % (40.1 % to 59.9 %)"


def test_no_tie_with_the_target():
    # low 98.504 % would print as 98.50 %, the target itself, although it meets it
    assert percent_text(made(0.98512, 0.98504, 0.9852), target=0.985) == "98.5120 % (98.5040 % to 98.5200 %)"
    shown = rounded(98.6, 98.504, 98.7, target=98.5)
    assert float(shown.low) > 98.5


def test_counts_never_read_all_or_nothing():
    assert percent_text(yield_estimate(0, 50_000)) == "above 99.9926 %"  # 1 − 0.025^(1/50000) = 73.8 ppm
    assert rate_text(clopper_pearson(0, 50_000)) == "below 74 ppm"
    assert percent_text(yield_estimate(1000, 1000)) == "below 0.37 %"
    assert rate_text(clopper_pearson(0, 100)) == "below 3.7 %"
    assert rate_text(clopper_pearson(100, 100)) == "above 96.3 %"
    # one failure: 0.025/n and about 5.57/n are its bounds; neither the share nor the yield may round to all or nothing
    assert rate_text(clopper_pearson(1, 50_000)) == "20.0 ppm (0.5 to 111.5 ppm)"
    assert percent_text(yield_estimate(1, 50_000)) == "99.99800 % (99.98885 % to 99.99995 %)"


@given(st.integers(2, 3_200_000), st.data())
def test_no_count_rounds_to_all_or_nothing(units, data):
    failures = data.draw(st.integers(1, min(units - 1, 5)) | st.integers(1, units - 1))
    for text in (percent_text(yield_estimate(failures, units)), rate_text(clopper_pearson(failures, units))):
        numbers = [float(n) for n in re.findall(r"\d+(?:\.\d+)?", text)]
        assert len(numbers) == 3
        assert min(numbers) > 0
        assert "%" not in text or max(numbers) < 100


def test_large_half_widths_round_to_tens_and_hundreds():
    assert rate_text(clopper_pearson(250, 50_000)) == "5000 ppm (4400 to 5660 ppm)"  # half-width 629 ppm
    assert rate_text(made(0.0051, 0.00213, 0.00874)) == "5100 ppm (2100 to 8800 ppm)"  # half-width 3305 ppm


def test_a_bound_alone_does_not_tie_with_the_target():
    # the lower bound is 99.99262 %: with two digits of its distance to 100 % it would read as the target
    low = yield_estimate(0, 50_000).low
    assert percent_text(yield_estimate(0, 50_000), target=0.999926) == "above 99.99262 %"
    assert low > 0.999926


def test_rates_choose_ppm_or_per_cent():
    assert rate_text(made(0.0002, 0.00015, 0.00026)) == "200 ppm (150 to 260 ppm)"
    assert rate_text(made(0.2, 0.15, 0.26)) == "20.0 % (15.0 to 26.0 %)"


@given(st.floats(0.01, 0.99), st.floats(1e-6, 0.4))
def test_shown_bounds_hold_the_bounds(estimate, half):
    low, high = max(0.0, estimate - half), min(1.0, estimate + half)
    shown = rounded(estimate, low, high)
    assert float(shown.low) <= low + 1e-9
    assert float(shown.high) >= high - 1e-9


@pytest.mark.parametrize("target", [0.5, 0.9, 0.985])
@given(gap=st.floats(1e-6, 0.01))
def test_a_bound_shown_is_on_its_side_of_the_target(target, gap):
    shown = rounded(target + 2 * gap, target + gap, target + 3 * gap, target=target)
    assert float(shown.low) > target
