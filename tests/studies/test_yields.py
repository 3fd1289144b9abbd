"""Joint yield: the plan of looks, the same digits for any cut of the work, and what each corner shows."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from yieldosc.parts.linear import Linear
from yieldosc.studies.assess import assess
from yieldosc.studies.estimates import LookPlan
from yieldosc.studies.gather import layouts
from yieldosc.studies.judge import GOOD
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.run import Setup, inner_pieces
from yieldosc.studies.serialise import assessment_dict
from yieldosc.studies.yields import corner_results, joint_yield, outcome_counts, run_units

COLD_TO_HOT = {"temperature_low_c": -20.0, "temperature_high_c": 70.0, "temperature_points": 4}


def drifting(p):
    return replace(p, law=Linear(0.0, 50e-6, "±50 ppm/K"), drift=(-0.01, 0.01)) if p.kind == "capacitor" else p


def timeless(assessment):
    document = assessment_dict(assessment)
    document["provenance"] = {**document["provenance"], "started": "", "seconds": 0}
    return document


def test_neither_workers_nor_block_size_change_a_digit(make_study, ideal_wien):
    study = make_study(gain=3.1, rf=0.01, share=0.5, change=drifting, life_years=10.0, **COLD_TO_HOT)
    settings = {"units": 30_000, "seed": 0, "rival_units": 4096, "evaluator": ideal_wien()}
    alone = timeless(assess(study, workers=1, **settings))
    assert timeless(assess(study, workers=2, **settings)) == alone
    assert timeless(assess(study, workers=1, block=8192, **settings)) == alone
    assert timeless(assess(study, workers=3, block=1, **settings)) == alone
    other_seed = timeless(assess(study, workers=1, **settings | {"seed": 1}))
    assert other_seed["yield"] != alone["yield"]


def test_nor_with_the_circuits_own_solver(make_study, make_part):
    def with_op_amp(p):
        return replace(p, law=Linear(0.0, 50e-6, "±50 ppm/K"))

    study = make_study(gain=3.1, rf=0.01, change=with_op_amp, extra=[make_part("GBW", 1e6, 0.3)], **COLD_TO_HOT)
    settings = {"units": 20_000, "seed": 1, "rival_units": 4096}
    alone = timeless(assess(study, workers=1, **settings))
    assert alone["provenance"]["audited"] > 0
    assert alone["provenance"]["disagreeing"] == 0
    assert timeless(assess(study, workers=2, block=8192, **settings)) == alone


def test_solver_blocks_are_cut_at_absolute_multiples():
    assert inner_pieces(50_000, 20_000) == [(50_000, 7344), (57_344, 8192), (65_536, 4464)]
    assert inner_pieces(0, 100) == [(0, 100)]


def test_a_look_continues_where_the_last_one_stopped(make_study, ideal_wien):
    setup = Setup.of(make_study(gain=3.1), ideal_wien(), seed=3)
    bins = layouts(setup, 30_000)
    whole = run_units(setup, bins, 0, 30_000)
    first = run_units(setup, bins, 0, 10_000, workers=Workers(2))
    rest = run_units(setup, bins, 10_000, 30_000, workers=Workers(2), block=8192)
    assert np.array_equal(first.joint + rest.joint, whole.joint)
    assert np.array_equal(np.concatenate([first.failing, rest.failing]), whole.failing)
    codes = setup.codes(0, 30_000)
    assert np.array_equal(np.flatnonzero(codes < GOOD), whole.failing)


def test_progress_adds_up(make_study, ideal_wien):
    setup = Setup.of(make_study(), ideal_wien(), seed=1)
    seen = []
    meter = Meter(lambda done, total: seen.append((done, total)))
    meter.expect(60_000)
    run_units(setup, layouts(setup, 50_000), 0, 50_000, workers=Workers(2), meter=meter)
    assert seen[-1] == (50_000, 60_000) and len(seen) > 1
    meter.done(20_000)
    assert seen[-1] == (70_000, 70_000)


def test_corner_figures_against_direct_statistics(make_study, ideal_wien):
    study = make_study(gain=3.1, rf=0.01, change=drifting, **COLD_TO_HOT)
    setup = Setup.of(study, ideal_wien(), seed=2)
    units = 20_000
    bins = layouts(setup, units)
    gathered = run_units(setup, bins, 0, units)
    solved = [setup.bench.solve(setup.block(0, units), corner) for corner in setup.corners]
    for result, solution in zip(corner_results(gathered, setup.corners, 0.95), solved, strict=True):
        f, found = solution.frequency_hz, result.frequency_hz
        assert found.mean == pytest.approx(f.mean(), rel=1e-14)
        assert found.sd == pytest.approx(f.std(ddof=1), rel=1e-11)
        assert (found.min, found.max) == (f.min(), f.max())
        width = (found.edges[1] - found.edges[0])
        for q, value in ((0.001, found.q001), (0.5, found.q50), (0.999, found.q999)):
            assert value == pytest.approx(np.quantile(f, q), abs=width)
        assert sum(found.counts) == units
        assert result.startup_failures == np.count_nonzero(solution.startup_margin < 1)
        codes = setup.judge.codes(solution)
        assert result.yield_.failures == np.count_nonzero(codes < GOOD)
    joint = setup.codes(0, units)
    assert sum(outcome_counts(gathered).values()) == units
    assert outcome_counts(gathered)["good"] == np.count_nonzero(joint == GOOD)
    assert gathered.first.sum() == np.count_nonzero(joint < GOOD)


def test_joint_interval_covers_as_often_as_it_says(make_study, ideal_wien):
    # 16.678 % outside ±3 %: known from two independent computations
    study = make_study(gain=4.0)
    trials, units, covered = 300, 2000, 0
    for seed in range(trials):
        plan = LookPlan(first=units, looks=1, confidence=0.9)
        run = joint_yield(Setup.of(study, ideal_wien(), seed=seed), plan, None)
        covered += run.estimate.low <= 1 - 0.16678 <= run.estimate.high
    # Clopper–Pearson covers at least as often as stated
    assert stats.binomtest(covered, trials, 0.9, alternative="less").pvalue > 1e-3


def test_verdicts_under_the_plan_are_seldom_false(make_study, ideal_wien):
    # The target stands exactly at the true yield: either verdict would be false, and at most 1 − confidence may be.
    trials, wrong, several = 300, 0, 0
    study = make_study(gain=4.0, yield_target=1 - 0.16678)
    for seed in range(trials):
        plan = LookPlan(first=256, looks=4, confidence=0.9)
        run = joint_yield(Setup.of(study, ideal_wien(), seed=seed), plan, study.design.yield_target)
        wrong += run.verdict != "not proven"
        several += len(run.looks) > 1
    assert several > trials / 2
    assert stats.binomtest(wrong, trials, 0.1, alternative="greater").pvalue > 1e-3


@pytest.mark.parametrize(("target", "verdict"), [(0.80, "meets"), (0.86, "does not meet")])
def test_a_clear_case_needs_one_look(make_study, ideal_wien, target, verdict):
    study = make_study(gain=4.0, yield_target=target)
    plan = LookPlan(first=20_000, looks=4, confidence=0.95)
    run = joint_yield(Setup.of(study, ideal_wien(), seed=0), plan, target)
    assert run.verdict == verdict
    assert [look.units for look in run.looks] == [20_000]
    assert run.looks_planned == 4
