"""The assembled assessment: JSON contract, verdict and its conditions, findings, and single pieces of evidence."""

from __future__ import annotations

import json
from dataclasses import dataclass, replace

import numpy as np
import pytest

from yieldosc.errors import Finding
from yieldosc.parts.linear import Linear
from yieldosc.parts.shapes import Split
from yieldosc.solver.solution import Status
from yieldosc.studies.assess import assess
from yieldosc.studies.failure_share import failure_share
from yieldosc.studies.judge import GOOD
from yieldosc.studies.lots import lot_yields, lots
from yieldosc.studies.results import OUTCOMES
from yieldosc.studies.run import Setup
from yieldosc.studies.serialise import assessment_dict, finite
from yieldosc.studies.worst_units import worst_units
from yieldosc.study import Requirement

QUICK = {"units": 8192, "rival_units": 4096, "workers": 1}


def quick(study, evaluator, **settings):
    return assess(study, evaluator=evaluator, **QUICK | settings)


def codes_of(assessment):
    return [f.code for f in assessment.findings]


def test_json_has_the_contracts_keys_and_nothing_that_json_cannot_write(make_study, ideal_wien):
    study = make_study(gain=3.1, rf=0.01, share=0.5, temperature_low_c=0.0, temperature_high_c=50.0)
    document = assessment_dict(quick(study, ideal_wien()))
    json.dumps(document, allow_nan=False)
    assert {
        "verdict", "conditions", "yield", "outcomes", "corners", "ranking", "rivals", "bands", "findings", "provenance",
    } <= set(document)  # fmt: skip
    assert set(document["yield"]) == {"estimate", "low", "high", "confidence", "units", "failures"}
    assert set(document["outcomes"]) >= {
        "good", "no_bias", "undefined", "not_assessable", "no_start", "wrong_mode",
        "low_margin", "slow_start", "out_of_limits", "distorted",
    }  # fmt: skip
    assert sum(document["outcomes"].values()) == document["yield"]["units"] == 8192
    corner = document["corners"][0]
    assert {"temperature_c", "supply_v", "age_years", "frequency_hz", "settled_hz", "startup", "yield"} <= set(corner)
    assert set(corner["frequency_hz"]) == {"mean", "sd", "min", "max", "q001", "q50", "q999"}
    assert set(corner["startup"]) == {"failures", "rate", "tail", "margin_min", "margin_q001"}
    assert set(document["ranking"]) == {"frequency", "margin"}
    assert {"part", "first_order", "total"} <= set(document["ranking"]["margin"][0])
    assert {"name", "yield"} <= set(document["rivals"][0])
    assert {"output", "temperature_c", "extreme", "rss", "monte_carlo"} <= set(document["bands"][0])
    assert {"seed", "input_sha256", "versions", "started", "seconds"} <= set(document["provenance"])
    assert document["lots"]["lots"] >= 1000


def test_a_circuit_without_a_start_up_question_has_none(make_study, ideal_wien):
    class Timer(ideal_wien):
        def solve(self, values, temperature_c, **settings):
            solution = super().solve(values, temperature_c, **settings)
            nothing = np.full(solution.frequency_hz.shape, np.nan)
            return replace(solution, startup_margin=nothing, status=np.zeros(nothing.shape, dtype=np.int8))

    document = assessment_dict(quick(make_study(gain=1.5), Timer()))
    json.dumps(document, allow_nan=False)
    assert document["corners"][0]["startup"] is None
    assert document["ranking"]["margin"] == [] and document["ranking"]["frequency"]
    assert document["outcomes"]["no_start"] == document["outcomes"]["low_margin"] == 0
    assert document["nominal"][0]["startup_margin"] is None


def test_no_unit_with_a_gain_leaves_nulls_and_no_traceback(make_study, ideal_wien):
    found = quick(make_study(gain=4.0, rf=0.01), ideal_wien(never_biased_above_rf=0.0))
    document = assessment_dict(found)
    json.dumps(document, allow_nan=False)
    assert found.outcomes["no_bias"] == 8192
    assert document["corners"][0]["frequency_hz"]["mean"] is None
    assert document["corners"][0]["startup"]["failures"] == 8192
    assert found.verdict == "does not meet"


def test_nothing_that_differs_between_units_still_has_a_yield(make_study, ideal_wien):
    found = quick(make_study(gain=4.0, r=0.0, c=0.0), ideal_wien())
    assert found.outcomes["good"] == 8192
    assert found.rankings == {} and found.tighter == ()
    assert [r.name for r in found.rivals] == ["declared"]


def test_what_is_not_finite_is_null():
    assert finite({"a": (float("nan"), 1.0), "b": [float("inf")], "c": "x", "d": 3}) == {
        "a": [None, 1.0], "b": [None], "c": "x", "d": 3,
    }  # fmt: skip


@pytest.mark.parametrize(("target", "verdict"), [(0.80, "meets"), (0.86, "does not meet"), (0.8332, "not proven")])
def test_verdict_of_the_joint_yield(make_study, ideal_wien, target, verdict):
    # 16.678 % fail; at the last target one seed in twenty gives a false verdict, and seed 1 is one of them
    assert quick(make_study(gain=4.0, yield_target=target), ideal_wien(), seed=2).verdict == verdict


def test_without_a_target_nothing_is_proven_and_one_look_is_enough(make_study, ideal_wien):
    found = assess(make_study(gain=4.0, yield_target=None), evaluator=ideal_wien(), workers=1, rival_units=4096)
    assert found.verdict == "not proven"
    assert len(found.looks) == found.looks_planned == 1
    assert "no-target" in codes_of(found)


def test_doubtful_values_make_the_verdict_conditional(make_study, ideal_wien):
    def doubted(p):
        return replace(p, pedigree={"RF": "typical", "C1": "assumed"}.get(p.role, "guaranteed"))

    found = quick(make_study(gain=4.0, change=doubted), ideal_wien())
    assert found.verdict == "meets"
    assert found.conditions == ("if the assumed values hold: C1", "if the typical values hold: RF")


def test_a_missing_bound_is_a_condition(make_study, ideal_wien):
    finding = Finding("warning", "one-bound-only", "RF has no upper bound.")
    found = quick(replace(make_study(gain=4.0), findings=(finding,)), ideal_wien())
    assert found.conditions == ("if the missing bound is no worse than the one given: RF has no upper bound.",)
    assert found.findings[0] is finding


def test_bench_frequency_scales_every_unit_and_says_so(make_study, ideal_wien):
    study = make_study(gain=4.0)
    bench_hz = 0.99 * study.design.target_frequency_hz
    scaled = quick(replace(study, design=replace(study.design, bench_frequency_hz=bench_hz)), ideal_wien())
    plain = quick(study, ideal_wien())
    assert scaled.bench_ratio == pytest.approx(0.99)
    assert scaled.corners[0].frequency_hz.mean == pytest.approx(0.99 * plain.corners[0].frequency_hz.mean)
    assert scaled.yield_.estimate < plain.yield_.estimate
    assert scaled.conditions == ("if every unit runs at 0.99 times its prediction, as the reference board did",)
    assert [f.text for f in scaled.findings if f.code == "bench-scaled"] == [
        "The reference board ran at 1575.63394 Hz, 0.99 times its prediction: "
        "every unit's frequency is scaled by that ratio."
    ]


def test_a_limit_that_nothing_judges_leaves_no_verdict(make_study, ideal_wien):
    study = make_study(gain=4.0)
    limit = Requirement("distortion", None, 0.01, "distorted", "1")
    found = quick(replace(study, requirements=(*study.requirements, limit)), ideal_wien())
    assert found.verdict == "not assessable"
    assert [f.text for f in found.findings if f.code != "settling-left-out"] == [
        "A limit on distortion is given, but this circuit's analysis does not give distortion: no unit was judged by "
        "it, so there is no verdict. Remove the limit, or declare the limiter that makes it computable."
    ]


def test_units_outside_the_models_range_decide_no_verdict(make_study, ideal_wien):
    class Narrow(ideal_wien):
        def solve(self, values, temperature_c, **settings):
            solution = super().solve(values, temperature_c, **settings)
            outside = np.broadcast_to(values["C1"], solution.status.shape) > 1.04e-8
            return replace(solution, status=np.where(outside, Status.NOT_ASSESSABLE, solution.status).astype(np.int8))

    # a tenth lies outside: 0.75 of good ones otherwise meet 0.70 either way, but 0.80 only without them
    decided = quick(make_study(gain=4.0, yield_target=0.80), Narrow())
    assert decided.verdict == "not assessable"
    assert decided.outcomes["not_assessable"] > 0
    assert quick(make_study(gain=4.0, yield_target=0.70), Narrow()).verdict == "meets"
    assert [f.text for f in decided.findings if f.code != "settling-left-out"] == [
        f"{decided.outcomes['not_assessable']} of 8192 units lie outside the circuit's stated range (f below GBW/20 "
        "(single-pole op-amp model)) at some corner; they are counted as failures, and no verdict may depend on them."
    ]


def test_seed_zero_is_a_seed(make_study, ideal_wien):
    study = make_study(gain=4.0)
    zero, again, one = (assessment_dict(quick(study, ideal_wien(), seed=s)) for s in (0, 0, 1))
    assert zero["corners"] == again["corners"] and zero["ranking"] == again["ranking"]
    assert zero["corners"] != one["corners"] and zero["ranking"] != one["ranking"]


def test_lots_of_shared_reels(make_study, ideal_wien):
    # Reel share 0.5: mean yield 72.8 %, lots from 24 % to 93 % (5 and 95 % points, one run of about 1000 lots)
    yields = lot_yields(Setup.of(make_study(gain=4.0, share=0.5), ideal_wien(), seed=1))
    found = lots(yields, 256, 0.7)
    assert yields.mean() == pytest.approx(0.728, abs=0.03)
    assert found.q05 == pytest.approx(0.24, abs=0.09)
    assert found.q95 == pytest.approx(0.93, abs=0.02)
    assert found.share_below_target.estimate == np.mean(yields < 0.7)


def test_lots_do_not_differ_without_shared_reels(make_study, ideal_wien):
    found = quick(make_study(gain=4.0), ideal_wien())
    assert found.lots is None


def test_tighter_capacitors_help_and_are_leading(make_study, ideal_wien):
    found = quick(make_study(gain=4.0, rf=0.01), ideal_wien())
    parts = [t.part for t in found.tighter]
    assert parts[0] == "C1, C2"  # one row of the BOM is one purchase
    assert found.tighter[0].difference.low > 0
    assert (found.tighter[0].from_tolerance, found.tighter[0].to_tolerance) == ("±5 %", "±2 %")


def test_a_reel_is_bought_whole(make_study, ideal_wien):
    found = quick(make_study(gain=4.0, share=1.0), ideal_wien())
    line = next(t for t in found.tighter if t.part == "C1, C2")
    # R ±1 % and C ±2 %, identical pairs: f = 1/(RC) stays within −2.94 … +3.07 %, 0.2 % of it outside ±3 %
    assert line.yield_.estimate > 0.99
    assert line.difference.low > 0.3


def test_a_min_typ_max_value_is_no_grade(make_study, ideal_wien):
    def data_sheet(p):
        return replace(p, shape=Split()) if p.role == "C1" else p

    found = quick(make_study(gain=4.0, change=data_sheet), ideal_wien())
    assert "C1" in [line.part for line in found.rankings["frequency"].parts[:2]]
    assert "C1" not in [t.part for t in found.tighter]


def test_failure_share_finds_the_part_that_fails_units(make_study, ideal_wien):
    study = make_study(gain=4.0, r=0.0, c=0.0, rf=0.05, window=0.5, least_margin=1.33)
    setup = Setup.of(study, ideal_wien(), seed=1)
    failing = np.flatnonzero(setup.codes(0, 20_000) < GOOD)
    found = failure_share(setup, failing)
    assert {line.part for line in found} == {"RF", "RG"}
    assert all(line.p_value < 1e-6 for line in found)
    shift = {line.part: line.mean_shift_sd for line in found}
    assert shift["RF"] < -0.5 and shift["RG"] > 0.5
    assert failure_share(setup, failing[:29]) == ()


def test_failure_share_of_an_idle_part_is_unremarkable(make_study, ideal_wien):
    setup = Setup.of(make_study(gain=4.0, rf=0.01), ideal_wien(), seed=1)
    failing = np.flatnonzero(setup.codes(0, 20_000) < GOOD)
    p_values = {line.part: line.p_value for line in failure_share(setup, failing)}
    assert p_values["RF"] > 1e-4 and p_values["C1"] < 1e-6


def test_worst_units_are_real_units(make_study, ideal_wien):
    def drifting(p):
        return replace(p, law=Linear(0.0, 100e-6, "±100 ppm/K")) if p.kind == "capacitor" else p

    study = make_study(gain=3.1, rf=0.01, change=drifting, temperature_low_c=-20.0, temperature_high_c=70.0)
    setup = Setup.of(study, ideal_wien(), seed=1)
    codes = setup.codes(0, 8192)
    failing = np.flatnonzero(codes < GOOD)
    found = worst_units(setup, failing, codes[failing], 8192)
    assert {u.outcome for u in found} == {"no_start", "out_of_limits", "good"}
    for unit in found:
        expected = "good" if codes[unit.number] >= GOOD else OUTCOMES[codes[unit.number]]
        assert unit.outcome == expected
        block = setup.block(unit.number, 1)
        solution = setup.bench.solve(block, unit.corner)
        assert unit.frequency_hz == pytest.approx(solution.frequency_hz[0], rel=1e-12)
        v = unit.values
        at_25 = 1 / (2 * np.pi * np.sqrt(v["R1"] * v["C1"] * v["R2"] * v["C2"]))
        assert unit.frequency_hz == pytest.approx(at_25, rel=0.006)
    out = [u.frequency_hz for u in found if u.outcome == "out_of_limits"]
    assert all(not study.design.frequency_low_hz <= f <= study.design.frequency_high_hz for f in out)


@dataclass(frozen=True)
class TrimR1:
    """Sets each unit's frequency to nominal at 25 °C by R1, as far as ± `reach` goes."""

    reach: float

    def factors(self, block, bench, draw):
        corner = replace(bench_corner, temperature_c=25.0)
        f = bench.solve(block, corner).frequency_hz
        return "R1", np.clip((f / target_hz) ** 2, 1 - self.reach, 1 + self.reach)


def test_a_trim_between_drawing_and_judging(make_study, ideal_wien):
    global bench_corner, target_hz
    study = make_study(gain=4.0)
    bench_corner, target_hz = study.design.corners()[0], study.design.target_frequency_hz
    plain = quick(study, ideal_wien())
    trimmed = quick(study, ideal_wien(), adjustment=TrimR1(0.2))
    assert trimmed.outcomes["good"] == 8192
    assert trimmed.corners[0].frequency_hz.sd < 1e-6 * plain.corners[0].frequency_hz.sd
    some = quick(study, ideal_wien(), adjustment=TrimR1(0.02))
    assert plain.outcomes["good"] < some.outcomes["good"] < 8192
