"""Rankings of the Wien bridge against the exact shares of a product, reels and causes included."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from yieldosc.parts.linear import Linear
from yieldosc.studies.nominal import nominal_points, per_percent
from yieldosc.studies.parallel import Workers
from yieldosc.studies.ranking import rankings
from yieldosc.studies.run import Setup
from yieldosc.studies.share_interval import share_interval


def ranked(study, evaluator, *, seed=0, **settings):
    setup = Setup.of(study, evaluator, seed=seed)
    nominal = [p.frequency_hz for p in nominal_points(setup.population, setup.bench, setup.corners)]
    lean = per_percent(study, setup.population, setup.bench)
    return rankings(setup, nominal, lean, **({"base": 256} | settings))


def totals(ranking):
    return {line.part: line.total.estimate for line in ranking.parts}


def log_variance(fraction):
    """Variance of ln(1 + x), x uniform within ± fraction (integrated, closed form not needed)."""
    x = np.log1p(fraction * np.linspace(-1, 1, 200_001))
    return x.var()


def test_log_frequency_of_the_bridge_has_exact_shares(make_study, ideal_wien):
    # ln f = −½ Σ ln of the four values: additive, so first order = total = each part's share of the variance
    found = ranked(make_study(gain=4.0, rf=0.01), ideal_wien())["frequency"]
    r, c = log_variance(0.01), log_variance(0.05)
    expected = {"R1": r, "R2": r, "C1": c, "C2": c}
    whole = sum(expected.values())
    for line in found.parts:
        share = expected.get(line.part, 0.0) / whole
        assert line.first_order.estimate == pytest.approx(share, abs=0.005)
        assert line.total.estimate == pytest.approx(share, abs=0.005)
        assert line.total.low - 1e-12 <= line.total.estimate <= line.total.high + 1e-12
    assert {line.part for line in found.parts[:2]} == {"C1", "C2"}
    assert found.units == 16 * 256 * 8
    assert found.withheld == "" and found.substituted == 0


def test_gain_resistors_rank_for_the_margin_only(make_study, ideal_wien):
    found = ranked(make_study(gain=4.0, rf=0.05, c=0.01), ideal_wien())
    assert {line.part for line in found["margin"].parts[:2]} == {"RF", "RG"}
    assert totals(found["frequency"])["RF"] == pytest.approx(0, abs=1e-9)


def test_slope_per_percent(make_study, ideal_wien):
    # d ln f/d ln C1 = −1/2; margin: d ln M/d ln RF = (K−1)/K
    found = ranked(make_study(gain=4.0, rf=0.01), ideal_wien())
    assert next(x for x in found["frequency"].parts if x.part == "C1").per_percent == pytest.approx(-0.5, abs=1e-6)
    assert next(x for x in found["margin"].parts if x.part == "RF").per_percent == pytest.approx(0.75, abs=1e-6)


def test_a_reel_is_its_own_line(make_study, ideal_wien):
    whole = ranked(make_study(gain=4.0, share=1.0), ideal_wien(), base=1024)["frequency"]
    assert set(totals(whole)) == {"reel 10 kΩ", "reel 10 nF"}
    shares = log_variance(0.05) / (log_variance(0.05) + log_variance(0.01))
    assert totals(whole)["reel 10 nF"] == pytest.approx(shares, abs=0.005)
    assert {line.part for line in whole.causes} == {"reel 10 kΩ: initial", "reel 10 nF: initial"}
    half = ranked(make_study(gain=4.0, share=0.5), ideal_wien())["frequency"]
    assert set(totals(half)) == {"reel 10 kΩ", "reel 10 nF", "R1", "R2", "C1", "C2"}
    assert half.parts[0].part == "reel 10 nF"


def test_causes_inside_the_leading_parts(make_study, ideal_wien):
    # At −75 °C ±500 ppm/K is ±5 %, as much as the tolerance: half of C1's share each
    def drifting(p):
        return replace(p, law=Linear(0.0, 500e-6, "±500 ppm/K")) if p.role == "C1" else p

    study = make_study(gain=4.0, c=0.05, r=0.0, change=drifting, temperature_low_c=-75.0, temperature_high_c=25.0)
    found = ranked(study, ideal_wien())["frequency"]
    assert found.corner.temperature_c == -75.0
    causes = {line.part: line.total.estimate for line in found.causes}
    assert causes["C1: initial"] == pytest.approx(1 / 3, abs=0.01)
    assert causes["C1: temperature"] == pytest.approx(1 / 3, abs=0.01)
    assert found.parts[0].total.estimate == pytest.approx(2 / 3, abs=0.01)
    # variance-weighted over corners: 2 shares at −75 °C weigh 3, 1 of 2 at 25 °C weighs 2 (9 temperatures are not used)
    assert found.parts[0].mean_total.estimate < found.parts[0].total.estimate


def test_units_without_bias_are_substituted_and_counted(make_study, ideal_wien):
    study = make_study(gain=4.0, rf=0.01)
    few = ranked(study, ideal_wien(never_biased_above_rf=30_000 * 1.0099))
    assert 0 < few["margin"].substituted < 0.01 * few["margin"].units
    assert few["margin"].parts
    many = ranked(study, ideal_wien(never_biased_above_rf=30_000 * 1.009))
    assert many["margin"].parts == ()
    assert many["margin"].withheld.endswith(
        "of the evaluations have no bias, more than 1 %: "
        "indices over substituted values would rank the substitute, not the parts"
    )


def test_an_output_that_does_not_vary_has_no_ranking(make_study, ideal_wien):
    found = ranked(make_study(gain=4.0, r=0.0, c=0.0, rf=0.01), ideal_wien())
    assert set(found) == {"margin"}


def test_workers_change_no_index(make_study, ideal_wien):
    study = make_study(gain=3.1, share=0.5)
    assert ranked(study, ideal_wien()) == ranked(study, ideal_wien(), workers=Workers(2))


def test_a_clear_leader_ends_the_looks_early(make_study, ideal_wien):
    clear = ranked(make_study(gain=4.0, share=1.0), ideal_wien(), base=1024)["frequency"]
    assert (clear.leaders, clear.looks, clear.looks_planned) == (("reel 10 nF",), 1, 2)
    assert clear.units == 16 * 256 * (2 + 2)


def test_parts_of_equal_share_are_never_told_apart(make_study, ideal_wien):
    # ln f = −½ Σ ln of the four values: C1 and C2 hold exactly the same share
    for seed in range(5):
        found = ranked(make_study(gain=4.0), ideal_wien(), seed=seed, base=128)["frequency"]
        assert set(found.leaders) == {"C1", "C2"}
        assert found.looks == 2


def test_a_small_true_difference_is_found_by_the_second_look(make_study, ideal_wien):
    def tighter(p):
        half = 0.046 * p.nominal
        return replace(p, low=p.nominal - half, high=p.nominal + half) if p.role == "C2" else p

    found = ranked(make_study(gain=4.0, change=tighter), ideal_wien(), base=1024)["frequency"]
    assert found.leaders == ("C1",)


def test_looks_order_equal_parts_no_more_often_than_they_may(make_study, ideal_wien):
    # Two looks at 1 − α/2: over many seeds at most 5 % may name one of two equal parts; 40 seeds allow 6 (binomial)
    study = make_study(gain=4.0)
    wrong = sum(
        len(ranked(study, ideal_wien(), seed=seed, base=32)["frequency"].leaders) < 2 for seed in range(40)
    )
    assert wrong <= 6


def test_shares_stay_within_what_a_share_can_be(make_study, ideal_wien):
    # one part holds the whole variance: the symmetric interval reaches beyond 100 %
    found = ranked(make_study(gain=4.0, r=0.0, rf=0.01), ideal_wien(), base=8)
    for ranking in found.values():
        for line in (*ranking.parts, *ranking.causes):
            for index in (line.first_order, line.total, line.mean_first_order, line.mean_total):
                assert 0 <= index.low <= index.estimate <= index.high <= 1


def test_an_interval_cut_to_a_share_keeps_its_coverage():
    rng = np.random.default_rng(3)
    truth, covered = 0.999, 0
    for _ in range(400):
        interval = share_interval(truth + 0.01 * rng.standard_normal(16), 0.9)
        assert interval.high <= 1
        covered += interval.low <= truth <= interval.high
    assert 0.86 * 400 <= covered <= 0.94 * 400  # 90 % of 400, three standard errors
    assert share_interval(np.full(16, 1.2) + 0.001 * rng.standard_normal(16)).low == 1.0
