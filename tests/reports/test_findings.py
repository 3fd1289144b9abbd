"""Whole sentences for given results: the figures are the fixture's, the words are what a reader must see."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.reports.fixture import FAILING, UNITS, flawless_assessment, tone_assessment, tone_study
from yieldosc.errors import Finding, Place
from yieldosc.reports.amounts import Deviation, listed, margin_text, per_percent_text, signed, upper_text
from yieldosc.reports.findings import summarise
from yieldosc.studies.estimates import clopper_pearson, yield_estimate
from yieldosc.studies.results import Estimate, FailureShare, Lots


def test_a_failing_study_says_so_with_its_reason_and_its_way_out():
    s = summarise(tone_assessment())
    assert s.verdict == "DOES NOT MEET"
    assert s.headline == "The upper bound of the predicted yield misses the yield target of 99 %."
    assert s.conditions == (
        "On condition: if the assumed values hold: CIN.",
        "On condition: if the typical values hold: GBW.",
    )
    assert s.yield_note == ("95 % confidence for all 4 planned looks together; 1,010 of 50,000 units fail; look 1 of 4")
    assert s.range_label == "Range over the 4 sets tried"
    assert s.range_note == (
        "lowest: hollow, same reel; highest: all normal; 20,480 units each; a range of the sets tried, not a bound"
    )
    assert s.deciding[0] == (
        "Of 50,000 simulated units 1,010 fail: 975 run outside the frequency limits, 25 start with too little margin "
        "and 10 do not start."
    )
    assert s.next_steps == (
        "Tighten C1 from ±2 % to ±1 %: the yield changes by +1.29 points (+1.13 to +1.46) to 99.27 %, which reaches "
        "the target of 99 %.",
        "For more start-up margin make R3 higher: 1 % of it moves the nominal margin by 0.69 %.",
        "Replace assumed and typical values by guaranteed or measured ones: CIN and GBW.",
    )


def test_a_single_way_of_failing_is_not_counted_twice():
    a = tone_assessment(outcomes={"good": UNITS - FAILING, "no_start": FAILING})
    assert summarise(a).deciding[0] == ("Of 50,000 simulated units 1,010 fail, all in one way: they do not start.")


def test_yield_and_range_are_the_exact_intervals_and_the_sets_extremes():
    # 1 − 1010/50000 = 0.9798; Clopper–Pearson at 1 − 0.05/4 by scipy.stats.beta inside `yield_estimate`'s own tests;
    # the sets: 1 − 2205/20480 = 0.89233…, 1 − 9/20480 = 0.99956…
    s = summarise(tone_assessment())
    assert s.yield_value.startswith("97.98 % (97.8") and s.yield_value.endswith("98.14 %)")
    assert s.range_value == "89.23 % to 99.956 %"


def test_parts_that_cannot_be_told_apart_are_not_ordered():
    frequency, margin = summarise(tone_assessment()).leading
    assert frequency == (
        "Frequency, at 60 °C where it varies most: C1 40.1 % (38.9 % to 41.3 %) and C2 38.9 % (37.7 % to 40.1 %) of "
        "the variance; they cannot be told apart after 2 of 2 planned looks."
    )
    assert margin == (
        "Start-up margin, at 60 °C where it varies most: C1 decides 33.0 % (31.8 % to 34.2 %) of the variance, then "
        "C2 with 28.0 % (26.8 % to 29.2 %)."
    )


def test_a_withheld_ranking_gives_its_reason():
    a = tone_assessment()
    withheld = replace(a.rankings["margin"], parts=(), withheld="2.0% of the evaluations have no bias")
    s = summarise(replace(a, rankings={"margin": withheld}))
    assert s.leading == ("Start-up margin: parts are not ranked, because 2.0% of the evaluations have no bias.",)


@pytest.mark.parametrize(
    ("verdict", "conditions", "words", "headline"),
    [
        ("meets", (), "MEETS", "The lower bound of the predicted yield reaches the yield target of 99 %."),
        (
            "meets", ("if so",), "MEETS, ON CONDITIONS",
            "The lower bound of the predicted yield reaches the yield target of 99 %, on the conditions below.",
        ),
        (
            "does not meet", (), "DOES NOT MEET",
            "The upper bound of the predicted yield misses the yield target of 99 %.",
        ),
        (
            "not proven", (), "NOT PROVEN",
            "After 1 of 4 planned looks the interval of the predicted yield still contains the yield target of 99 %.",
        ),
        ("not assessable", (), "NOT ASSESSABLE", "No verdict can be given. Nothing judges the distortion."),
    ],
)  # fmt: skip
def test_every_verdict_has_its_words(verdict, conditions, words, headline):
    finding = Finding("warning", "limit-not-judged", "Nothing judges the distortion.")
    s = summarise(tone_assessment(verdict=verdict, conditions=conditions, findings=(finding,)))
    assert (s.verdict, s.headline) == (words, headline)


def test_without_a_target_nothing_is_met_or_missed():
    s = summarise(tone_assessment(tone_study(yield_target=None), verdict="not proven"))
    assert s.headline == "No yield target is given, so nothing is met or missed."
    assert s.next_steps[0] == ("State a yield target in the Design sheet: without one nothing can be met or missed.")
    assert s.requirements[-1].limit == "no target given"


def test_not_proven_names_the_units_to_try():
    assert summarise(tone_assessment(verdict="not proven")).next_steps[0] == (
        "50,000 units do not separate the yield from the target of 99 %: simulate more (--units 200000), or improve "
        "the design."
    )


def test_zero_failures_are_a_bound_and_never_zero_or_all():
    # 0 of 50000 at 1 − 0.05/4: 1 − (0.00625)^(1/50000) = 101.5 ppm; at 95 %: 1 − 0.025^(1/50000) = 73.8 ppm
    s = summarise(flawless_assessment())
    assert s.deciding[0] == ("None of 50,000 simulated units failed: the failing share is below 110 ppm, not zero.")
    assert s.yield_value == "above 99.989 %"
    assert [r.share for r in s.requirements] == ["below 74 ppm"] * 3 + ["above 99.989 %"]
    said = " ".join([s.headline, s.yield_value, s.range_value, *s.deciding, *s.next_steps, *s.open_points])
    assert "100 %" not in said and " 0 %" not in said


def test_lots_in_which_nothing_failed_are_called_that():
    not_covered = (
        "The interval of the yield describes the pooled rate of many lots: it covers neither how far one lot lies from "
        "that, nor reels unlike those supposed."
    )
    below = clopper_pearson(0, 1024)
    a = flawless_assessment()
    lots = Lots(lots=1024, units_per_lot=256, q05=1.0, q50=1.0, q95=1.0, share_below_target=below, by_chance=(1.0, 1.0))
    assert summarise(replace(a, lots=lots)).deciding[-1] == (
        "Of 1,024 simulated lots of 256 units at least 95 in 100 show no failing unit. Share of lots that miss the "
        f"target: below 3600 ppm. {not_covered}"
    )
    spread = replace(lots, q05=0.24, q50=0.78, q95=0.93, share_below_target=None, by_chance=(0.68, 0.773))
    assert summarise(replace(a, lots=spread)).deciding[-1] == (
        "Of 1,024 simulated lots of 256 units one in twenty yields 24 % or less, half yield 78 % or less and one in "
        "twenty yields 93 % or more. Chance alone among 256 units would put nine lots in ten between 68 % and 77.3 %; "
        f"the rest is reels. {not_covered}"
    )


def test_requirements_tell_what_each_costs_alone():
    # 975/50000 = 1.95 % is above the 1 % that the target allows even at its lower bound
    rows = [(r.name, r.limit, r.failing, r.verdict) for r in summarise(tone_assessment()).requirements]
    assert rows == [
        ("Start-up", "on the intended mode", "10", "within target"),
        ("Start-up margin", "at least 1.02", "25", "within target"),
        ("Frequency", "−3 % to +3 % of 1 kHz", "975", "misses alone"),
        ("All together: joint yield", "at least 99 %", "1,010", "does not meet"),
    ]


def test_open_points_hold_conditions_warnings_and_sets_that_miss():
    warning = Finding("warning", "one-bound", "RF has no upper bound.", Place("Roles", 6, "E"))
    s = summarise(replace(flawless_assessment(), findings=(warning, Finding("note", "x", "a note"))))
    assert s.open_points == (
        "Condition of the verdict: if the assumed values hold: CIN.",
        "Condition of the verdict: if the typical values hold: GBW.",
        "Roles!E6: RF has no upper bound.",
        "2 of 4 sets tried miss the target.",
    )
    assert s.pedigrees == "Of 8 values 6 are guaranteed, 1 is typical and 1 is assumed."
    assert s.next_steps[-1] == (
        "Find out whether this holds, for it would miss the target: better grades sorted out, and parts of one reel "
        "identical (yield 89.23 %)."
    )


def test_cautions_say_what_the_figures_are_not():
    assert summarise(tone_assessment()).cautions == (
        "A prediction from stated tolerances, not a measurement of boards.",
        "Every rate supposes that no wrong or defective part is on the board.",
        "Model error unknown: no bench frequency of a reference board is given to compare the prediction with.",
        "Not assessed: crystals that sleep or wake at low drive, activity dips, moisture and contamination, handling "
        "and assembly damage, layout coupling, and a clock that runs but is not recognised by what it drives.",
        "Valid only for the parts, values and revisions named here, identified by the input digest.",
        "Approval is a human decision; this page supports it and does not make it.",
        "Where a wrong or missing clock can hurt people, this is one input to the safety analysis that the governing "
        "standard requires; local codes and licensed practice decide.",
    )


def test_model_error_is_the_prediction_against_the_bench():
    # measured 1010 Hz, ratio 1.01: the prediction was 1000 Hz, 0.990 % below the measured frequency
    a = tone_assessment(tone_study(bench_frequency_hz=1010.0), bench_ratio=1.01)
    assert summarise(a).cautions[2] == (
        "Model error on the reference board: prediction −0.99 % from the measured 1.01 kHz; every unit is scaled by "
        "1.01."
    )


def test_an_off_centre_population_is_told_to_move_first():
    study = tone_study(frequency_low_hz=990.0, frequency_high_hz=1050.0)  # middle 1020, medians around 1001
    assert summarise(tone_assessment(study)).next_steps[0] == (
        "Centre the frequency first: the medians over all corners have their middle at +0.24 %, the limits theirs at "
        "+2.00 %. Other nominal values cost nothing."
    )


def test_units_on_another_mode_are_located():
    where = "Units that start on another mode run between 24 MHz and 24.1 MHz; "
    few = summarise(tone_assessment(wrong_modes_hz=(2.4e7, 2.41e7)))
    assert f"{where}too few of them are known to say which parts push a unit there." in few.deciding
    pushed = FailureShare(part="Q1 hFE", cause="initial", ks_distance=0.4, p_value=1e-9, mean_shift_sd=0.91)
    many = summarise(tone_assessment(wrong_modes_hz=(2.4e7, 2.41e7), wrong_mode_share=(pushed,)))
    assert (
        f"{where}their draws differ from those of all units most in Q1 hFE (initial, 0.91 standard deviations high)."
        in many.deciding
    )
    level = replace(pushed, p_value=0.5)
    none = summarise(tone_assessment(wrong_modes_hz=(2.4e7,), wrong_mode_share=(level,)))
    assert (
        "Units that start on another mode run at 24 MHz; no part's draws set them apart from all units." in none.deciding
    )


def test_small_words():
    assert (signed("-0.5"), signed("0.5"), signed("-0.00")) == ("−0.5", "+0.5", "0.00")
    assert [listed(list(words)) for words in ("", "a", "ab", "abc")] == ["", "a", "a and b", "a, b and c"]
    assert (margin_text(0.99999), margin_text(None), margin_text(float("nan"))) == ("0.999", "—", "—")
    assert (per_percent_text(-0.5), per_percent_text(1.1e-5)) == ("−0.50 %", "+0.11 ppm")
    assert upper_text(Estimate(estimate=0.1, low=0.0, high=0.1234)) == "13 %"
    assert yield_estimate(FAILING, UNITS).estimate == pytest.approx(0.9798)


def test_narrow_limits_are_told_in_ppm_and_wide_ones_in_per_cent():
    narrow = Deviation.of(replace(tone_study().design, frequency_low_hz=999.95, frequency_high_hz=1000.05))
    assert narrow.text(1000.0123) == "+12.3 ppm"
    assert Deviation.of(tone_study().design).text(1012.3) == "+1.23 %"
    assert narrow.text(float("nan")) == "—"
