"""Parts of failing units beside the shares of variance: whole sentences."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.reports.fixture import flawless_assessment, tone_assessment
from yieldosc.reports.deciding import causes_sentence
from yieldosc.reports.failing_parts import failing_sentences

A = tone_assessment()
C1 = A.failure_share[0]
STANDS_OUT = "stands out: its draws lie {} standard deviations on the {} side of those of all units."


def sentences(*shares):
    return failing_sentences(replace(A, failure_share=shares))


def test_a_part_that_leads_both_needs_one_sentence():
    assert sentences(C1) == ("Among failing units C1 (initial) " + STANDS_OUT.format("0.84", "low"),)


def test_what_fails_units_need_not_lead_the_variance():
    r4 = replace(C1, part="R4", cause="temperature", mean_shift_sd=1.25)
    assert sentences(r4, replace(C1, ks_distance=0.1)) == (
        "Among failing units R4 (temperature) " + STANDS_OUT.format("1.25", "high"),
        "R4 does not lead the variance (it holds 14.0 % (12.8 % to 15.2 %) of the variance of the start-up margin): what "
        "spreads the output most is not what fails units most.",
    )


def test_what_leads_the_variance_need_not_fail_units():
    r4 = replace(C1, part="R4", cause="initial")
    assert sentences(r4, replace(C1, ks_distance=0.01, p_value=0.7))[-1] == (
        "C1 leads the variance of the start-up margin, but failing units draw it like all others: tightening it would "
        "save few of them."
    )


def test_nothing_stands_out_by_chance_alone():
    # 0.04 each over ten draws is what chance gives in one of three runs
    assert sentences(*(replace(C1, part=f"R{i}", p_value=0.04) for i in range(10))) == (
        "Among failing units no part's draws stand out from those of all units: they fail by many parts together.",
    )
    assert failing_sentences(flawless_assessment()) == ()


@pytest.mark.parametrize("part", ["C1", "C1 Cm"])
def test_a_role_belongs_to_its_part(part):
    assert len(sentences(replace(C1, part=part))) == 1


def test_causes_of_the_leading_parts():
    assert causes_sentence(A.rankings["frequency"]) == (
        "Frequency by cause, of the whole variance: C1: initial 33.0 % (31.8 % to 34.2 %) and temperature 7.0 % (5.8 % "
        "to 8.2 %)."
    )
    assert causes_sentence(A.rankings["margin"]) == ""
