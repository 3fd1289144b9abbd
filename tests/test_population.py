"""Streams, reels and blocks: the digits of a unit depend on its number and on nothing else."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from scipy import stats

from yieldosc.parts.linear import Linear
from yieldosc.parts.parameter import Parameter
from yieldosc.parts.shapes import Uniform
from yieldosc.population import Bench, Population, Streams, study_variables, uniforms, uniforms_at
from yieldosc.solver.solution import Solution
from yieldosc.study import Corner

AT_25 = Corner(25.0, None, 0.0)


def resistor(role, **changes):
    made = Parameter(
        role=role, part=role, trait="R", kind="resistor", unit="Ω", nominal=1e4, low=0.99e4, typical=1e4, high=1.01e4,
        shape=Uniform(),
    )  # fmt: skip
    return replace(made, **changes)


def population(*parameters):
    return Population(parameters, {}, None, frozenset())


def test_any_cut_of_a_stream_gives_the_same_digits():
    whole = uniforms(7, "units", "R1: initial", 0, 20_000)
    cuts = (0, 1, 3, 4096, 4097, 8192, 12_290, 20_000)
    pieces = [uniforms(7, "units", "R1: initial", a, b - a) for a, b in pairwise(cuts)]
    assert np.array_equal(np.concatenate(pieces), whole)
    numbers = np.array([19_999, 0, 4096, 4095, 12])
    assert np.array_equal(uniforms_at(7, "units", "R1: initial", numbers), whole[numbers])


@pytest.mark.parametrize(
    "other",
    [
        (0, "units", "R1: initial"),
        (1, "lots", "R1: initial"),
        (1, "units", "R2: initial"),
        (11, "units", "R1: initial"),
    ],
)
def test_seed_purpose_and_name_each_make_another_stream(other):
    u, v = uniforms(1, "units", "R1: initial", 0, 50_000), uniforms(*other, 0, 50_000)
    assert not np.any(u == v)
    assert abs(np.corrcoef(u, v)[0, 1]) < 5 / np.sqrt(50_000)


def test_a_name_cannot_be_cut_elsewhere_to_give_the_same_stream():
    assert uniforms(1, "a", "bc", 0, 1) != uniforms(1, "ab", "c", 0, 1)


@pytest.mark.parametrize("seed", [0, 1, 2**63 - 1])
def test_uniform_and_open(seed):
    u = uniforms(seed, "units", "C1: initial", 0, 200_000)
    assert u.min() > 0 and u.max() < 1
    assert stats.kstest(u, "uniform").pvalue > 1e-4


def test_reel_share_keeps_every_distribution_and_joins_the_parts():
    # Of z: correlation ρ. Of uniform values: (6/π)·asin(ρ/2), e.g. Kruskal 1958 (from memory).
    share = 0.5
    parts = [resistor(role, reel="10 kΩ", reel_share=share) for role in ("R1", "R2")]
    made = population(*parts)
    values = made.block(Streams(3), 0, 200_000).values(AT_25)
    for role in ("R1", "R2"):
        scaled = (values[role] / 1e4 - 1) / 0.02 + 0.5
        assert stats.kstest(scaled, "uniform").pvalue > 1e-4
    expected = 6 / np.pi * np.arcsin(share / 2)
    assert np.corrcoef(values["R1"], values["R2"])[0, 1] == pytest.approx(expected, abs=0.01)


def test_reel_share_one_makes_identical_parts_and_none_independent_ones():
    def drawn(share):
        parts = [resistor(role, reel="10 kΩ", reel_share=share) for role in ("R1", "R2")]
        values = population(*parts).block(Streams(3), 0, 10_000).values(AT_25)
        return values["R1"], values["R2"]

    assert np.array_equal(*drawn(1.0))
    assert abs(np.corrcoef(*drawn(0.0))[0, 1]) < 0.05


def test_reels_join_equal_traits_only():
    fl = resistor("FL", trait="FL", reel="8 MHz", reel_share=1.0)
    esr = resistor("ESR", trait="ESR", reel="8 MHz", reel_share=1.0)
    values = population(fl, esr).block(Streams(3), 0, 10_000).values(AT_25)
    assert abs(np.corrcoef(values["FL"], values["ESR"])[0, 1]) < 0.05


def test_another_part_changes_no_draw_of_the_rest():
    alone = population(resistor("R1")).block(Streams(1), 0, 5000).values(AT_25)["R1"]
    beside = population(resistor("R0"), resistor("R1"), resistor("R9")).block(Streams(1), 0, 5000).values(AT_25)["R1"]
    assert np.array_equal(alone, beside)


def test_units_of_a_lot_share_their_reels_and_nothing_else():
    made = population(resistor("R1", reel="r", reel_share=1.0), resistor("R2"))
    streams = Streams(5, "lots", units_per_lot=100)
    values = made.block(streams, 150, 400).values(AT_25)
    lots = np.split(values["R1"], [50, 150, 250, 350])
    assert all(np.ptp(lot) == 0 for lot in lots)
    assert len({lot[0] for lot in lots}) == 5
    assert len(np.unique(values["R2"])) == 400
    numbers = np.array([549, 150, 151, 333])
    again = made.block_at(streams, numbers).values(AT_25)
    assert np.array_equal(again["R1"], values["R1"][numbers - 150])


def test_an_adjusted_role_is_adjusted_at_every_corner():
    block = population(resistor("R1"), resistor("R2")).block(Streams(1), 0, 10)
    before = block.values(AT_25)
    block.adjust("R1", np.full(10, 1.1))
    for corner in (AT_25, Corner(70.0, None, 10.0)):
        after = block.values(corner)
        assert after["R1"] == pytest.approx(1.1 * before["R1"])
        assert np.array_equal(after["R2"], before["R2"])


def test_conditions_and_supply_arrive_once_and_parts_per_unit():
    made = Population((resistor("R1"),), {"CL": 18e-12}, "VCC", frozenset())
    values = made.block(Streams(1), 0, 10).values(Corner(25.0, 3.3, 0.0))
    assert values["CL"] == 18e-12 and values["CL"].ndim == 0
    assert values["VCC"] == 3.3 and values["VCC"].ndim == 0
    assert values["R1"].shape == (10,)


def test_a_law_of_the_users_own_on_a_stage_role_replaces_the_built_in_one():
    def gm(law):
        return resistor("gm", trait="gm", kind="ic", nominal=1e-3, low=1e-3, typical=1e-3, high=1e-3, law=law)

    linear = Linear(-0.003, 0.0, "-0.3 %/K")
    made = Population((gm(linear), resistor("R1", law=linear)), {}, None, frozenset({"gm", "fT"}))
    assert made.own_law == frozenset({"gm"})
    assert made.with_parameters((gm(None),)).own_law == frozenset()
    seen = {}

    class Recorder:
        def solve(self, values, temperature_c, *, own_law=frozenset(), growth=False, audit=None):
            seen.update(own_law=own_law, gm=float(values["gm"]), temperature_c=temperature_c)
            ones = np.ones(3)
            return Solution(frequency_hz=ones, startup_margin=ones, status=np.zeros(3, dtype=np.int8))

    Bench(Recorder()).solve(made.block(Streams(1), 0, 3), Corner(75.0, None, 0.0))
    assert seen == {"own_law": frozenset({"gm"}), "gm": pytest.approx(1e-3 * 0.85), "temperature_c": 75.0}


def test_stream_names_are_stable():
    # Names are part of every recorded result: a change of these lines changes every digit ever reported.
    own, joined = resistor("R1"), resistor("R2", reel="10 kΩ", reel_share=0.5)
    assert [v.stream for v in study_variables([own, joined])] == ["R1: initial", "R2: initial"]
    assert [v.reel_stream for v in study_variables([own, joined])] == [None, "reel 10 kΩ R: initial"]
