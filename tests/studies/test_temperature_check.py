"""Units between the temperatures of the grid: an AT-cut whose curve turns there, against its own formula on 501 points."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from yieldosc.parts.laws import parse_law
from yieldosc.parts.shapes import Uniform
from yieldosc.parts.table_law import table_law
from yieldosc.studies.assess import assess
from yieldosc.studies.between import dense, halves, turning_points
from yieldosc.studies.judge import GOOD
from yieldosc.studies.run import Setup
from yieldosc.studies.temperature_check import temperature_check, with_between
from yieldosc.study import Requirement

LIMIT = 18e-6  # of the value; the frequency moves by half of it
RANGE_C = {"temperature_low_c": -40.0, "temperature_high_c": 85.0}


def turning_study(make_study, **design):
    """C1 ± 5 ppm with an AT-cut's law stands for a crystal; nothing else differs between units."""

    def crystal(p):
        if p.role != "C1":
            return p
        half = 5e-6 * p.nominal
        law = parse_law("AT ±30 ppm -40..85 °C")
        return replace(p, low=p.nominal - half, high=p.nominal + half, shape=Uniform(), reel=None, law=law)

    return make_study(gain=4.0, r=0.0, c=0.0, window=LIMIT / 2, change=crystal, **RANGE_C | design)


def on_temperatures(setup, temperatures_c, units):
    """Good units (n,) by the published cubic (Gerber & Ballato 1985 p. 101, as quoted), written out again."""
    block = setup.block(0, units)
    law = setup.population.parameters[2].law
    angle = law.angles[0] + (law.angles[1] - law.angles[0]) * block.draws["C1"]["law angle"]
    start = block.initial("C1") / 10e-9
    good = np.ones(units, dtype=bool)
    for t in temperatures_c:
        d = t - 25.0
        value = start * (1 - 5.08e-6 * angle * d - 0.45e-9 * d**2 + 108.6e-12 * d**3)
        good &= np.abs(value**-0.5 - 1) <= LIMIT / 2
    return good


def test_the_grid_alone_loses_nothing_that_is_not_found(make_study, ideal_wien):
    study = turning_study(make_study)
    setup = Setup.of(study, ideal_wien(), seed=1)
    units = 40_960
    grid = on_temperatures(setup, study.design.temperatures_c, units)
    fine = on_temperatures(setup, np.linspace(-40, 85, 501), units)
    # 1.7 points of yield that a coarse grid would have made up; the same cubic on 200,000 other units gives 1.70
    assert np.mean(grid) - np.mean(fine) == pytest.approx(0.017, abs=0.0015)
    assert np.array_equal(setup.codes(0, units) >= GOOD, grid)  # without looking between: they are lost
    looked = with_between(setup).codes(0, units) >= GOOD
    assert np.count_nonzero(looked != fine) <= 0.0002 * units


def test_the_run_counts_them_and_says_so(make_study, ideal_wien):
    study = turning_study(make_study, yield_target=0.75)
    a = assess(study, units=40_960, rival_units=4096, workers=1, evaluator=ideal_wien())
    setup = Setup.of(study, ideal_wien(), seed=1)
    grid = on_temperatures(setup, study.design.temperatures_c, 40_960)
    fine = on_temperatures(setup, np.linspace(-40, 85, 501), 40_960)
    check = a.scrutiny.temperatures
    assert abs(check.flips - np.count_nonzero(grid & ~fine)) <= 8
    assert a.yield_.failures == pytest.approx(np.count_nonzero(~fine), abs=8)
    assert not check.grid_enough and check.enough
    assert check.missed <= 8
    assert sum(c.first_failures for c in a.corners) + check.flips == a.yield_.failures
    # the rivals are judged the same way, so that differences compare like with like
    assert a.rivals[0].yield_.failures == pytest.approx(np.count_nonzero(~fine[:4096]), abs=3)


def test_straight_laws_need_no_second_look(make_study, ideal_wien):
    def drifting(p):
        return replace(p, law=parse_law("±50 ppm/K")) if p.kind == "capacitor" else p

    study = make_study(gain=4.0, change=drifting, temperature_low_c=0.0, temperature_high_c=50.0)
    a = assess(study, units=8192, rival_units=4096, workers=1, evaluator=ideal_wien())
    check = a.scrutiny.temperatures
    assert check.flips == check.missed == 0
    # f = 1/√(…(1 + αd)) is bent by less than (αd)²: 25 K · 50 ppm/K squared is 1.6e-6, a window is 0.03
    assert check.excursion < 1e-4
    assert check.grid_enough == (check.flip_rate.high < check.allowed)


def test_one_temperature_asks_no_question(make_study, ideal_wien):
    a = assess(make_study(gain=4.0), units=8192, rival_units=4096, workers=1, evaluator=ideal_wien())
    assert a.scrutiny.temperatures is None


def test_a_table_is_looked_at_where_it_bends(make_study, ideal_wien):
    # straight between its points: 0 at both ends of each interval of the grid, +2 % at 40 °C
    law = table_law([(-40, 0.0), (30, 0.0), (40, 0.02), (50, 0.0), (85, 0.0)], "table bump")

    def bumped(p):
        return replace(p, law=law) if p.role == "C1" else p

    study = make_study(gain=4.0, r=0.0, c=0.0, window=0.005, change=bumped, temperature_points=2, **RANGE_C)
    setup = Setup.of(study, ideal_wien(), seed=1)
    assert (setup.codes(0, 8) >= GOOD).all()
    assert 40.0 in halves(setup.population, study.design.temperatures_c)
    assert (with_between(setup).codes(0, 8) < GOOD).all()


def test_turning_points_of_a_parabola_are_exact():
    t = np.array([-40.0, -10.0, 25.0, 60.0])
    turn = 13.0
    curve = 0.1 + 1e-3 * ((t - turn) ** 2 - 200)  # lowest value 0.1 − 0.2: it crosses the limit at its turn
    monotone = 0.1 + 1e-3 * t + 0.05
    far = 5.0 + 1e-3 * (t - turn) ** 2
    found = turning_points(t, np.array([curve, monotone, far]).T[:, :, None])
    assert found[0, 0] == pytest.approx(turn, abs=30 / 32 + 1e-9)
    assert np.isnan(found[1:]).all()
    assert np.isnan(turning_points(t[:2], np.ones((2, 1, 1)))).all()


def test_dense_temperatures_hold_the_grid():
    grid = (-40.0, 25.0, 85.0)
    assert set(grid) <= set(dense(grid)) and len(dense(grid)) == 17


def test_units_that_stop_starting_between_are_found(make_study, ideal_wien):
    class Dip(ideal_wien):
        """The margin dips below 1 around 10 °C for every unit, and is fine at the ends."""

        def solve(self, values, temperature_c, **settings):
            solution = super().solve(values, temperature_c, **settings)
            margin = solution.startup_margin * 0 + 1 + (((temperature_c - 10) / 50) ** 2 - 0.01)
            status = np.where(margin >= 1, 0, 4).astype(np.int8)
            return replace(solution, startup_margin=margin, status=status)

    study = make_study(gain=4.0, window=0.2, temperature_points=2, temperature_low_c=-40.0, temperature_high_c=85.0)
    setup = Setup.of(study, Dip(), seed=1)
    assert (setup.codes(0, 64) >= GOOD).all()
    assert (with_between(setup).codes(0, 64) < GOOD).all()


def test_rows_of_a_block_are_the_same_units(make_study, ideal_wien):
    study = make_study(gain=4.0, rf=0.01)
    setup = Setup.of(study, ideal_wien(), seed=1)
    block = setup.block(0, 100)
    block.adjust("R1", np.linspace(0.9, 1.1, 100))
    rows = np.array([3, 50, 7])
    part, corner = block.rows(rows).values(setup.corners[0]), setup.corners[0]
    for role, value in block.values(corner).items():
        assert np.array_equal(np.broadcast_to(part[role], 3), np.broadcast_to(value, 100)[rows])


def test_growth_limits_are_looked_at_too(make_study, ideal_wien):
    study = turning_study(make_study, longest_startup_s=1.0)
    assert Requirement("startup_s", None, 1.0, "slow_start", "s") in study.requirements
    setup = with_between(Setup.of(study, ideal_wien(), seed=1))
    assert len(setup.between.reach) == 4


def test_another_mode_between_the_temperatures_makes_every_unit_be_looked_at(make_study, ideal_wien):
    class Jump(ideal_wien):
        """Between 5 and 20 °C another mode takes over, far from every limit."""

        def solve(self, values, temperature_c, **settings):
            solution = super().solve(values, temperature_c, **settings)
            jumped = 5 < temperature_c < 20
            return replace(solution, status=np.full(solution.status.shape, 5 if jumped else 0, dtype=np.int8))

    study = make_study(gain=4.0, window=0.2, temperature_points=2, temperature_low_c=-40.0, temperature_high_c=85.0)
    setup = with_between(Setup.of(study, Jump(), seed=1))
    assert set(setup.between.reach) == {np.inf}
    # neither halfway (−7.5 °C) nor at a turning point: the dense search after the run is what finds it
    near = np.arange(64)
    assert temperature_check(setup, near, 64, 0, 0.01, 0.95).missed == 64
