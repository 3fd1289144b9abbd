"""Extremes searched over the box, root-sum-square and Monte Carlo, against closed forms."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from yieldosc.parts.linear import Linear
from yieldosc.parts.shapes import Normal
from yieldosc.population import Bench, Population
from yieldosc.solver.solution import Solution, Status
from yieldosc.studies.box import Box, box_at, search
from yieldosc.studies.extremes import bands
from yieldosc.studies.gather import layouts
from yieldosc.studies.root_sum_square import root_sum_square_ends
from yieldosc.studies.run import Setup
from yieldosc.studies.yields import corner_results, run_units
from yieldosc.study import Corner

AT_25 = Corner(25.0, None, 0.0)


def found(study, evaluator, units=20_000):
    setup = Setup.of(study, evaluator, seed=1)
    bins = layouts(setup, units)
    results = corner_results(run_units(setup, bins, 0, units), setup.corners, 0.95)
    return bands(setup.population, setup.bench, results, streams=setup.streams, units=units)


def band(study, evaluator, output="frequency_hz"):
    made, findings = found(study, evaluator)
    assert findings == ()
    return next(b for b in made if b.output == output)


def test_one_over_rc_worst_case_and_root_sum_square(make_study, ideal_wien):
    # Exact: f = 1/(RC), R ±1 %, C ±5 %: −5.7049 %, +6.3264 %; RSS sd 2.94392 %. Identical parts make the bridge that.
    study = make_study(gain=4.0, share=1.0)
    made = band(study, ideal_wien())
    nominal = study.design.target_frequency_hz
    assert made.extreme[0] / nominal - 1 == pytest.approx(-0.057049, abs=1e-6)
    assert made.extreme[1] / nominal - 1 == pytest.approx(0.063264, abs=1e-6)
    assert made.rss[1] / nominal - 1 == pytest.approx(3 * 0.0294392, rel=1e-4)
    assert made.rss[0] / nominal - 1 == pytest.approx(-3 * 0.0294392, rel=1e-4)


def test_independent_parts_have_the_smaller_root_sum_square(make_study, ideal_wien):
    made = band(make_study(gain=4.0), ideal_wien())
    nominal = make_study().design.target_frequency_hz
    # half of each of two relative deviations, uniform: √(2·(0.01² + 0.05²)/4/3)
    expected = np.sqrt(2 * (0.01**2 + 0.05**2) / 4 / 3)
    assert made.rss[1] / nominal - 1 == pytest.approx(3 * expected, rel=1e-4)
    assert made.extreme[0] <= made.monte_carlo[0] < made.monte_carlo[1] <= made.extreme[1]


def test_extreme_margin_of_the_bridge(make_study, ideal_wien):
    # K = 3.2, all R ±1 %, all C ±5 %: least (1 + 2.2·0.99/1.01)/(1 + 1.01/0.99 + 1.05/0.95) > 1: it always starts
    made = band(make_study(gain=3.2, rf=0.01), ideal_wien(), "startup_margin")
    least = (1 + 2.2 * 0.99 / 1.01) / (1 + 1.01 / 0.99 + 1.05 / 0.95)
    assert made.extreme[0] == pytest.approx(least, rel=1e-12)
    assert made.extreme[0] > 1


def test_temperature_widens_the_box(make_study, ideal_wien):
    def drifting(p):
        return replace(p, law=Linear(0.0, 100e-6, "±100 ppm/K")) if p.kind == "capacitor" else p

    study = make_study(gain=4.0, change=drifting, temperature_low_c=125.0, temperature_high_c=125.0)
    box = box_at(Population.of(study), study.design.corners()[0])
    assert box.low["C1"] == pytest.approx(9.5e-9 * 0.99)
    assert box.high["C1"] == pytest.approx(10.5e-9 * 1.01)


def test_open_shapes_have_no_extreme(make_study, ideal_wien):
    def opened(p):
        return replace(p, shape=Normal(3, cut=False)) if p.kind == "capacitor" else p

    made = band(make_study(gain=4.0, change=opened), ideal_wien())
    assert made.extreme is None
    assert "open" in made.method


def test_more_roles_than_corners_can_try_are_searched():
    roles = [f"x{i}" for i in range(20)]
    box = Box(dict.fromkeys(roles, -1.0), dict.fromkeys(roles, 2.0))
    weights = np.where(np.arange(20) % 3 == 0, -1.0, 2.0)

    def outputs(values):
        return (weights[:, None] * np.array([values[r] for r in roles])).sum(axis=0)[None]

    made = search(box, outputs)
    assert made.low[0] == pytest.approx(np.minimum(-weights, 2 * weights).sum())
    assert made.high[0] == pytest.approx(np.maximum(-weights, 2 * weights).sum())
    assert made.gap[0] == 0  # the finest step gained nothing
    assert made.method == (
        "64 corners and those that slopes point to of the box of 20 roles and 64 points inside, the best refined by "
        "coordinate search to 1/256 of the box"
    )


def test_an_extreme_inside_the_box_is_found():
    box = Box({"x": -1.0, "y": -1.0}, {"x": 1.0, "y": 1.0})
    made = search(box, lambda v: (1 - v["x"] ** 2 - v["y"] ** 2)[None])
    assert (made.low[0], made.high[0]) == (-1.0, 1.0)
    assert made.method.startswith("all 4 corners of the box of 2 roles and 64 points inside")


def test_an_extreme_off_every_grid_is_found_to_the_stated_step():
    # greatest value 1 at x = 0.3137, y = −0.7219; steps of 1/256 of a box of width 2: off by at most 1/256 in each
    box = Box({"x": -1.0, "y": -1.0}, {"x": 1.0, "y": 1.0})
    made = search(box, lambda v: (1 - (v["x"] - 0.3137) ** 2 - (v["y"] + 0.7219) ** 2)[None])
    assert 1 - 2 / 256**2 <= made.high[0] <= 1
    assert 0 <= made.gap[0] < 1e-3


def test_a_ridge_between_two_gains_is_climbed():
    # a gain window: the margin is the smaller of two ratios, greatest (1.5) on a ridge inside the box, at a = b
    box = Box({"a": 0.5, "b": 0.5}, {"a": 2.0, "b": 2.0})
    made = search(box, lambda v: np.minimum(v["a"] / v["b"], 2.25 * v["b"] / v["a"])[None])
    assert made.high[0] == pytest.approx(1.5, rel=0.01)
    assert made.low[0] == pytest.approx(0.25, rel=1e-12)


def test_a_skewed_margin_has_a_band_above_zero():
    # ln-normal: the ends are exact quantiles e^(±3 s) of the median (closed form); the plain band passes zero
    low, high = root_sum_square_ends(2.0, 1.0, "startup_margin")
    assert (low, high) == pytest.approx((2 * np.exp(-1.5), 2 * np.exp(1.5)))
    assert root_sum_square_ends(2.0, 1.0, "frequency_hz") == (-1.0, 5.0)
    assert root_sum_square_ends(0.0, 1.0, "startup_margin") == (-3.0, 3.0)  # no logarithm to take


def test_a_peak_that_the_search_misses_is_found_from_the_simulated_units(make_study):
    class Spike:
        """A narrow peak that no corner and no coarse step sees."""

        def solve(self, values, temperature_c, *, own_law=frozenset(), growth=False, audit=None):
            x = np.asarray(values["C1"]) / 10e-9 - 1
            frequency = 1600 + 100 * np.exp(-(((x - 0.0113) / 0.0005) ** 2)) + 0 * np.asarray(values["R1"])
            ones = np.ones(frequency.shape)
            return Solution(
                frequency_hz=frequency, startup_margin=2 * ones, status=np.zeros(ones.shape, dtype=np.int8)
            )

    study = make_study()
    setup = Setup.of(study, Spike(), seed=1)
    bins = layouts(setup, 20_000)
    results = corner_results(run_units(setup, bins, 0, 20_000), setup.corners, 0.95)
    missed, findings = bands(setup.population, setup.bench, results)
    assert [f.code for f in findings] == ["monte-carlo-outside-extremes"]  # without the units: a negative control
    assert missed[0].note == (
        "simulated units lie beyond the searched extremes and widen them: the search missed an extreme"
    )
    assert missed[0].extreme[1] == missed[0].monte_carlo[1]
    again, findings = found(study, Spike(), units=8192)  # all of them are among the first
    assert findings == () and again[0].note == ""
    assert again[0].extreme[1] >= again[0].monte_carlo[1]
    assert "again from the outermost simulated units" in again[0].method


def test_no_margin_band_without_a_start_up_question(make_study, ideal_wien):
    class Timer(ideal_wien):
        def solve(self, values, temperature_c, **settings):
            solution = super().solve(values, temperature_c, **settings)
            nothing = np.full(solution.frequency_hz.shape, np.nan)
            return replace(
                solution, startup_margin=nothing, status=np.full(nothing.shape, Status.STARTS, dtype=np.int8)
            )

    made, _ = found(make_study(), Timer())
    assert {b.output for b in made} == {"frequency_hz"}


def test_bench_ratio_scales_every_band(make_study, ideal_wien):
    study = make_study(gain=4.0)
    population = Population.of(study)
    setup = Setup.of(study, ideal_wien(), seed=1, bench_ratio=1.01)
    bins = layouts(setup, 8192)
    results = corner_results(run_units(setup, bins, 0, 8192), setup.corners, 0.95)
    scaled = bands(population, setup.bench, results)[0][0]
    plain = bands(population, Bench(ideal_wien()), results)[0][0]
    assert scaled.extreme[0] == pytest.approx(1.01 * plain.extreme[0])
