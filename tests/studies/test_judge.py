"""The first outcome in the contract's order that any corner shows."""

from __future__ import annotations

import numpy as np
import pytest

from yieldosc.solver.solution import Solution, Status
from yieldosc.studies.judge import GOOD, Judge, outcome_name, startup_s
from yieldosc.studies.results import OUTCOMES
from yieldosc.study import Requirement

FREQUENCY = Requirement("frequency_hz", 990.0, 1010.0, "out_of_limits", "Hz")
MARGIN = Requirement("startup_margin", 1.5, None, "low_margin", "1")
STARTUP = Requirement("startup_s", None, 0.1, "slow_start", "s")


def solution(frequency, margin, status, **more):
    return Solution(
        frequency_hz=np.array(frequency, dtype=float),
        startup_margin=np.array(margin, dtype=float),
        status=np.array(status, dtype=np.int8),
        **more,
    )


def names(judge, solved):
    return [outcome_name(code) for code in judge.codes(solved)]


def test_each_status_and_each_limit_has_its_outcome():
    judge = Judge((MARGIN, FREQUENCY), 1e6)
    solved = solution(
        [1000, 1000, 1000, 1000, 1000, 1000, 1000, 1011, 989],
        [2, 2, 2, 2, 0.5, 2, 1.4, 2, 2],
        [*Status, Status.STARTS, Status.STARTS, Status.STARTS],
    )
    assert names(judge, solved) == [
        "good", "no_bias", "undefined", "not_assessable", "no_start", "wrong_mode",
        "low_margin", "out_of_limits", "out_of_limits",
    ]  # fmt: skip


def test_limits_themselves_are_met_and_the_earlier_outcome_counts():
    judge = Judge((FREQUENCY, MARGIN), 1e6)
    solved = solution([990, 1010, 900, 900], [1.5, 1.5, 1.0, 1.0], [0, 0, Status.STARTS, Status.NO_START])
    assert names(judge, solved) == ["good", "good", "low_margin", "no_start"]


def test_settled_frequency_is_judged_where_there_is_one():
    solved = solution([1000, 980], [2, 2], [0, 0], settled_hz=np.array([980.0, 1000.0]))
    assert names(Judge((FREQUENCY,), 1e6), solved) == ["out_of_limits", "good"]


def test_a_value_that_is_not_a_number_meets_no_limit():
    assert names(Judge((FREQUENCY,), 1e6), solution([np.nan], [2], [0])) == ["out_of_limits"]


def test_without_a_start_up_question_margin_fails_nobody():
    assert names(Judge((MARGIN,), 1e6), solution([1000], [np.nan], [0])) == ["good"]


def test_slow_start_is_timed_from_the_growth_rate():
    # ln(1e6) = 13.8155; 0.1 s needs 138.155 per second
    growth = np.array([138.2, 138.1, -1.0, np.nan])
    solved = solution([1000] * 4, [2] * 4, [0] * 4, growth_per_s=growth)
    judge = Judge((STARTUP,), 1e6)
    assert judge.needs_growth
    assert names(judge, solved) == ["good", "slow_start", "slow_start", "slow_start"]
    assert startup_s(np.array([13.815510558]), 1e6)[0] == pytest.approx(1.0)


def test_a_limit_that_cannot_be_judged_is_named_and_fails_nobody():
    judge = Judge((Requirement("distortion", None, 0.01, "distorted", "1"), FREQUENCY), 1e6)
    solved = solution([1000], [2], [0])
    assert judge.unjudged(solved) == ("distortion",)
    assert names(judge, solved) == ["good"]


def test_codes_are_the_contracts_order():
    assert len(OUTCOMES) == GOOD
    order = ["no_bias", "undefined", "not_assessable", "no_start", "wrong_mode", "low_margin", "slow_start"]
    assert [outcome_name(c) for c in range(1, 8)] == order
