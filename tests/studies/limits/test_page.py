"""Every sentence of the page of test limits, on results made by hand."""

from __future__ import annotations

from dataclasses import replace

import pytest

from yieldosc.errors import Finding
from yieldosc.reports.limits_words import limits_page, ppm, rate
from yieldosc.reports.workbook_limits import limits_workbook
from yieldosc.studies.digits import percent_text
from yieldosc.studies.estimates import clopper_pearson, tango, yield_estimate
from yieldosc.studies.limits.acceptance import LimitRates
from yieldosc.studies.limits.results import (
    AddedResistance,
    Floor,
    LimitsResult,
    ResistanceTest,
    TradeLine,
    TrimmedCorner,
    TrimResult,
)
from yieldosc.studies.results import Distribution, Estimate, Provenance
from yieldosc.study import Corner

UNITS = 100_000
ROOM = Corner(25.0, None, 0.0)


def estimate(ppm_value, *, high=None):
    value = ppm_value * 1e-6
    return Estimate(
        estimate=value, low=value * 0.8, high=(high or ppm_value * 1.2) * 1e-6, confidence=0.95, units=UNITS
    )  # fmt: skip


def rates(low, high, *, shipped=60.0, lost=4000.0, bound=None):
    return LimitRates(
        low_hz=low, high_hz=high, escapes_built=estimate(shipped * 0.99), escapes_shipped=estimate(shipped, high=bound),
        missed=estimate(20_000.0), false_rejects=estimate(lost), rejected=estimate(lost + 3000),
    )  # fmt: skip


@pytest.fixture
def result(make_study):
    def made(*, level=1e-4, chosen=None, bad=3000, **changes):
        study = make_study(escape_limit=level)
        study = replace(
            study, design=replace(study.design, target_frequency_hz=1000.0, frequency_low_hz=970.0, frequency_high_hz=1030.0)
        )  # fmt: skip
        chosen = chosen or rates(975.0, 1024.5)
        plain = LimitsResult(
            study=study, test_corner=ROOM, sd_hz=0.5, bias_hz=0.0, escape_limit=level, chosen=chosen,
            chosen_by_level=level is not None, confirmed=None if level is None else True,
            trade=(
                TradeLine(level=None, rates=rates(970.0, 1030.0, shipped=2500.0, lost=0.0), chosen_bound=None),
                TradeLine(level=1e-4, rates=chosen, chosen_bound=9e-5),
                TradeLine(level=1e-5, rates=None, chosen_bound=None),
            ),
            floor=Floor(rates=rates(990.0, 1010.0, shipped=10.0, bound=30.0), closing=4e-6, closing_hz=1000.0),
            bad=clopper_pearson(bad, UNITS), bad_by={"out_of_limits": bad}, units=UNITS, resistance_test=None, trim=None,
            findings=(),
            provenance=Provenance(
                seed=1, input_sha256=study.digest, versions={"yieldosc": "0"}, started="", seconds=0.0, workers=1,
                audited=0, disagreeing=0, exact=0,
            ),
        )  # fmt: skip
        return replace(plain, **changes)

    return made


def said(r, key="steps"):
    return next(s.sentences for s in limits_page(r).sections if s.key == key)


def test_confirmed_limits(result):
    page = limits_page(result())
    assert page.words == "TEST AT 25 °C: 975 Hz to 1024.5 Hz (−2.50 % to +2.45 %)"
    assert page.tone == "good"
    assert page.headline == (
        "The upper bound of shipped escapes keeps to 100 ppm on fresh units, at the fewest good units rejected."
    )
    assert said(result()) == (
        "Accept a board when it starts at 25 °C and reads 975 Hz to 1024.5 Hz (−2.50 % to +2.45 %).",
    )
    assert said(result(), "trade") == (
        "No limits on these units keep to 10 ppm: the lowest upper bound found is 30 ppm, with 990 Hz to 1010 Hz "
        "(−1.00 % to +1.00 %); as the limits close around one reading, the estimate of escapes goes to 4 ppm.",
    )


def test_how_bad_units_fail(result):
    r = result(bad_by={"out_of_limits": 2000, "no_start": 1000})
    assert said(r, "rates") == ("Bad units of 100,000, by what they show first: 2,000 out of limits and 1,000 no start.",)
    assert said(result(bad_by={}), "rates") == ()


def test_a_population_that_keeps_to_the_level_untested(result):
    assert said(result(bad=1))[1] == (
        "The predicted population keeps to this level untested; the test finds wrong and defective parts."
    )


def test_limits_that_fresh_units_do_not_confirm(result):
    r = result(confirmed=False, chosen=rates(975.0, 1024.5, shipped=90.0, bound=130.0))
    assert limits_page(r).tone == "bad"
    assert limits_page(r).headline == (
        "Chosen to keep shipped escapes to 100 ppm, but their upper bound on fresh units is 130 ppm: not confirmed."
    )
    assert said(r) == ("Simulate more units (--units 400000), or take the next lower level of the trade below.",)


def test_no_limits_reach_the_level(result):
    r = result(chosen_by_level=False, confirmed=False, chosen=rates(970.0, 1030.0))
    assert limits_page(r).headline == (
        "No test limits at this temperature keep shipped escapes to 100 ppm: the lowest upper bound found is 30 ppm. Shown "
        "are the frequency limits themselves."
    )
    assert said(r) == (
        "Test at another temperature as well, improve the design, or accept more escapes: what fails elsewhere hardly shows "
        "in this reading.",
    )


def test_no_level(result):
    r = result(level=None)
    assert limits_page(r).tone == "open"
    assert limits_page(r).headline == (
        "No escape limit is given: these are the frequency limits themselves, without a guard band."
    )
    assert said(r) == ("State an escape limit (ppm) in the Design sheet: then test limits are chosen for it.",)


def test_a_floor_of_nothing_seen_is_no_figure(result):
    floor = Floor(rates=rates(990.0, 1010.0, shipped=10.0, bound=30.0), closing=0.0, closing_hz=1000.0)
    assert said(result(floor=floor), "trade")[0].endswith("with 990 Hz to 1010 Hz (−1.00 % to +1.00 %).")


def resistance(*lines, chosen=None, failing=40):
    made = tuple(
        AddedResistance(added_ohm=r, start_escapes=clopper_pearson(e, 16_384), false_rejects=clopper_pearson(f, 16_384))
        for r, e, f in lines
    )
    return ResistanceTest(lines=made, chosen=chosen, start_failures=clopper_pearson(failing, 16_384), units=16_384)


def test_a_series_resistance_test(result):
    test = resistance((100.0, 20, 0), (220.0, 0, 15), chosen=1)
    assert said(result(resistance_test=test))[-1] == (
        "Require a start with 220 Ω added in series with the crystal unit: it keeps boards that pass and fail to start elsewhere "
        f"to the escape limit and rejects {rate(test.lines[1].false_rejects)} of good ones."
    )
    section = next(s for s in limits_page(result(resistance_test=test)).sections if s.key == "resistance")
    assert section.note == (
        "added in series with the crystal unit: the board must still start at the test; escapes are units whose start fails "
        f"at some corner ({rate(test.start_failures)} of 16,384)"
    )


def test_a_series_resistance_test_that_is_not_needed(result):
    test = resistance((100.0, 0, 0), (220.0, 0, 15), failing=0)
    r = result(level=1e-3, resistance_test=test)
    assert said(r)[-2:] == (
        "A series-resistance test is not needed for the predicted population; it would find wrong parts.",
        "Every simulated unit starts with 100 Ω added in series: a start with it may be required at the cost of no good unit "
        "seen.",
    )


def bell(q001, q999):
    return Distribution(mean=1000.0, sd=1.0, min=q001, max=q999, q001=q001, q50=1000.0, q999=q999)


def trim():
    return TrimResult(
        role="R1", part="R1", kind="steps of 100 Ω", low=9e3, high=11e3, unit="Ω",
        reached=clopper_pearson(9900, 10_000), at_low=clopper_pearson(60, 10_000), at_high=clopper_pearson(40, 10_000),
        ceased=clopper_pearson(0, 10_000), unreadable=clopper_pearson(0, 10_000),
        corners=(
            TrimmedCorner(
                corner=ROOM, before=bell(960.0, 1040.0), after=bell(999.0, 1001.0), margin_before=bell(1.2, 1.4),
                margin_after=bell(1.1, 1.5),
            ),
        ),
        yield_before=yield_estimate(2000, 10_000), yield_after=yield_estimate(50, 10_000),
        difference=tango(1950, 0, 10_000), needed={"q0005": 8.6e3, "q50": 10e3, "q9995": 11.7e3}, suggested_low=8.6e3,
        suggested_high=11.7e3, suggested_reached=clopper_pearson(9989, 10_000), searched=(3e3, 33e3),
        unmet=clopper_pearson(0, 10_000), units=10_000,
    )  # fmt: skip


def test_a_trim(result):
    t = trim()
    r, none = result(trim=t), "below 370 ppm"  # 3.689 of 10,000: none of them seen, at 95 %
    assert said(r)[-1] == (
        f"Trim R1 from 8.6 kΩ to 11.7 kΩ, middle 10 kΩ: that range brings {percent_text(yield_estimate(11, 10_000))} of "
        "fresh units to the target."
    )
    section = next(s for s in limits_page(r).sections if s.key == "trim")
    assert section.title == "Trim of R1: 9 kΩ to 11 kΩ, steps of 100 Ω"
    assert section.sentences[2:] == (
        f"Setting needed: median 10 kΩ, 99.9 % of units between 8.6 kΩ and 11.7 kΩ ({none} find none from 3 kΩ to 33 kΩ).",
        "Start-up margin, 0.1 % point, worst corner: 1.200 before, 1.100 after.",
    )
    assert section.sentences[1] == (
        f"{percent_text(yield_estimate(100, 10_000))} of units reach the target within the instrument's error; "
        f"{rate(t.at_low)} end at the low stop, {rate(t.at_high)} at the high one, {none} stop oscillating first, {none} give "
        "no reading."
    )
    assert [c.text for c in section.rows[0]] == [
        "25 °C", "−4.00 %", "+4.00 %", "−0.10 %", "+0.10 %", "1.200", "1.100",
    ]  # fmt: skip


def test_open_points_are_warnings_only(result):
    findings = (Finding("warning", "a", "give the sd"), Finding("note", "b", "by the way"))
    assert said(result(findings=findings), "open") == ("give the sd",)


@pytest.mark.parametrize(
    ("share", "text"),
    [(0.0, "0 ppm"), (5e-8, "below 0.1 ppm"), (3.4e-5, "34 ppm"), (1.5e-3, "1,500 ppm"), (0.0123456, "12,346 ppm")],
)
def test_shares_in_ppm(share, text):
    assert ppm(share) == text


def test_a_rate_without_weight_is_a_bound():
    none = Estimate(estimate=1e-12, low=0.0, high=3.6889e-5, confidence=0.95, units=UNITS)
    assert rate(none) == "below 37 ppm"


def test_the_workbook(result):
    test = resistance((100.0, 20, 0), (220.0, 0, 15), chosen=1)
    book = limits_workbook(result(trim=trim(), resistance_test=test))
    assert book.sheetnames[:4] == ["Test limits", "Trade", "Series resistance", "Trim"]
    assert book["Trade"]._charts
    assert book["Trim"]._charts
    texts = {str(c.value) for row in book["Test limits"].iter_rows() for c in row if c.value is not None}
    assert "TEST AT 25 °C: 975 Hz to 1024.5 Hz (−2.50 % to +2.45 %)" in texts
