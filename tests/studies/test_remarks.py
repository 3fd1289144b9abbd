"""Every finding and caution of a run, whole."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from yieldosc.solver.solution import Status
from yieldosc.studies.assess import assess
from yieldosc.studies.extremes import outside_finding
from yieldosc.studies.results import Band

QUICK = {"units": 8192, "rival_units": 4096, "workers": 1}


def texts(assessment, code):
    return [f.text for f in assessment.findings if f.code == code]


def altered(evaluator, **change):
    """The ideal bridge with something done to its solutions: field → function of (solution, values)."""

    class Altered(evaluator):
        def solve(self, values, temperature_c, **settings):
            solution = super().solve(values, temperature_c, **settings)
            arrays = {name: np.broadcast_to(v, solution.status.shape) for name, v in values.items()}
            return replace(solution, **{name: made(solution, arrays) for name, made in change.items()})

    return Altered()


def test_no_target(make_study, ideal_wien):
    found = assess(make_study(gain=4.0, yield_target=None), evaluator=ideal_wien(), **QUICK)
    assert texts(found, "no-target") == [
        "No yield target is given, so nothing is met or missed: add 'yield target'."
    ]


def test_unsolved_units_are_counted_as_failures_and_withhold_the_ranks(make_study, ideal_wien):
    def status(solution, values):
        return np.where(values["C1"] > 1.049e-8, Status.UNDEFINED, solution.status).astype(np.int8)

    def frequency(solution, values):
        return np.where(values["C1"] > 1.049e-8, np.nan, solution.frequency_hz)

    found = assess(make_study(gain=4.0), evaluator=altered(ideal_wien, status=status, frequency_hz=frequency), **QUICK)
    count = found.outcomes["undefined"]
    assert 0 < count < 8192 * 0.02
    assert texts(found, "undefined-units") == [
        f"{count} of 8192 units could not be solved at some corner; they are counted as failures."
    ]
    (withheld,) = texts(found, "rank-withheld")
    assert withheld.startswith("No parts are ranked: ")
    assert withheld.endswith(" evaluations gave an output that is not a number.")
    assert found.rankings == {}


def test_audit_disagreement(make_study, ideal_wien):
    found = assess(
        make_study(gain=4.0),
        evaluator=altered(ideal_wien, audited=lambda s, v: 8, disagreeing=lambda s, v: 1),
        **QUICK,
    )
    assert texts(found, "audit-disagreement") == [
        "1 of 8 audited unit-corners differ by more than 1e-6 in margin between the fast and the exact path "
        "(one unit in 512 is audited)."
    ]


def test_ranks_over_substitutes_are_withheld(make_study, ideal_wien):
    found = assess(make_study(gain=4.0, rf=0.01), evaluator=ideal_wien(never_biased_above_rf=30_150), **QUICK)
    shown = sorted(texts(found, "rank-withheld"))
    assert len(shown) == 2
    for output, text in zip(("frequency", "margin"), shown, strict=True):
        assert text.startswith(f"Parts are not ranked for {output}: ")
        assert text.endswith(
            " of the evaluations have no bias, more than 1 %: "
            "indices over substituted values would rank the substitute, not the parts."
        )
    assert found.outcomes["no_bias"] > 0


def test_monte_carlo_outside_the_extremes():
    band = Band(
        output="startup_margin", temperature_c=-40.0, extreme=(1.5, 2.5), rss=(1.4, 2.6), monte_carlo=(1.6, 2.75),
        method="", note="outside",
    )  # fmt: skip
    assert outside_finding(band, (1.5, 2.5)).text == (
        "At -40 °C the simulated start-up margin runs from 1.6 to 2.75, outside the searched extremes 1.5 to 2.5: "
        "the search missed an extreme inside the box; trust the simulated range."
    )
