"""Capability against textbook indices, exact coverage, and simulated pilots."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from yieldosc.studies.assess import assess
from yieldosc.studies.capability import LEAST_UNITS, demonstrations, pilot, pilots, ppk_of, quantile
from yieldosc.studies.tally import Histogram, Moments


def histogram_of(values, bins=4000):
    low, high = values.min() - 1, values.max() + 1
    made = Histogram.empty(low=low, width=(high - low) / bins, bins=bins)
    made.add(values)
    return made, Moments.of(values)


def test_textbook_indices_of_a_normal_process():
    # NIST/SEMATECH e-Handbook 6.1.6: LSL 8, USL 20, mean 16, s 2: Cp 1.0, Cpk 0.6667 (from memory, verified)
    first, last = 16 + 2 * stats.norm.ppf([0.00135, 0.99865])
    assert ppk_of(first, 16, last, (8.0, 20.0)) == pytest.approx(2 / 3, rel=1e-4)
    assert (20 - 8) / (last - first) == pytest.approx(1.0, rel=1e-4)
    # a question page (book not named): USL 100, LSL 90, mean 97, s 1.6: Cpk 0.625
    first, last = 97 + 1.6 * stats.norm.ppf([0.00135, 0.99865])
    assert ppk_of(first, 97, last, (90.0, 100.0)) == pytest.approx(0.625, rel=1e-4)
    assert ppk_of(first, 97, last, (90.0, None)) == pytest.approx(7 / 4.8, rel=1e-4)


def test_the_least_number_of_units_is_what_the_intervals_need():
    # 0.99865ⁿ ≤ 0.025: the largest unit lies beyond the upper point with 97.5 % confidence
    assert 0.99865**LEAST_UNITS <= 0.025 < 0.99865 ** (LEAST_UNITS - 1)


def test_order_statistic_intervals_cover_as_often_as_they_say():
    rng = np.random.default_rng(5)
    truth = stats.expon.ppf([0.00135, 0.5, 0.99865])
    covered = np.zeros(3)
    for _ in range(300):
        histogram, whole = histogram_of(rng.exponential(size=LEAST_UNITS), bins=20_000)
        for k, share in enumerate((0.00135, 0.5, 0.99865)):
            interval = quantile(histogram, whole, share, 0.95)
            covered[k] += interval.low <= truth[k] <= interval.high
    # the least and greatest value cut the tails' intervals: at 2,731 units exactly 97.5 % on that side
    assert (covered >= stats.binom.ppf(1e-4, 300, 0.95)).all()
    assert covered[1] < 300


def test_a_pilots_index_is_non_central_t():
    rng = np.random.default_rng(2)
    for ppk, boards in ((1.33, 10), (0.6, 30)):
        x = rng.standard_normal((40_000, boards))
        shown = (3 * ppk - x.mean(axis=1)) / (3 * x.std(axis=1, ddof=1))
        found = pilot(ppk, boards)
        assert np.mean((shown >= found.low) & (shown <= found.high)) == pytest.approx(0.95, abs=0.005)
        assert (found.low, found.high) == pytest.approx(np.quantile(shown, [0.025, 0.975]), rel=0.02)


def test_few_boards_show_little():
    ten, hundred = pilot(1.33, 10), pilot(1.33, 100)
    assert ten.low < 0.9 and ten.high > 2.2
    assert hundred.high - hundred.low < (ten.high - ten.low) / 3


def test_demonstrations():
    # ln(0.05)/ln(1 − p): 2995, 29956, 299572 (closed form; rule of three 3000, …); 1 % needs 299 (Wilks)
    found = {round(d.rate, 9): d.boards for d in demonstrations(0.99)}
    assert found == {0.01: 299, 1e-3: 2995, 1e-4: 29956, 1e-5: 299572}
    assert len(demonstrations(0.999)) == 3  # 1 − 0.999 is 1000 ppm, not beside it
    assert [d.boards for d in demonstrations(None)] == [2995, 29956, 299572]


def test_indices_of_an_assessment(make_study, ideal_wien):
    # Identical parts: f = f0/(ab), a within ± 1 %, b within ± 5 %. The 0.135 % and 99.865 % points by fine integration.
    study = make_study(gain=4.0, share=1.0, rf=0.01)
    a = assess(study, units=16_384, rival_units=4096, workers=1, evaluator=ideal_wien())
    (frequency, margin) = a.scrutiny.capability
    grid = (np.arange(2000) + 0.5) / 1000 - 1
    f = 1 / ((1 + 0.01 * grid[:, None]) * (1 + 0.05 * grid[None]))
    first, middle, last = np.quantile(f, [0.00135, 0.5, 0.99865])
    exact = min((1.03 - middle) / (last - middle), (middle - 0.97) / (middle - first))
    assert frequency.ppk.low <= exact <= frequency.ppk.high
    assert frequency.ppk.estimate == pytest.approx(exact, rel=0.02)
    assert frequency.pp == pytest.approx(0.06 / (last - first), rel=0.02)
    assert not frequency.normal and frequency.normal_ppk < frequency.ppk.low  # a flat distribution has no tails
    assert margin.pp is None and margin.output == "margin"
    assert [p.boards for p in a.scrutiny.pilots] == [10, 30, 100]


def test_too_few_units_have_no_index(make_study, ideal_wien):
    a = assess(make_study(gain=4.0), units=LEAST_UNITS - 1, rival_units=1024, workers=1, evaluator=ideal_wien())
    assert a.scrutiny.capability == () and pilots(()) == ()
    nothing = assess(make_study(gain=4.0, r=0.0, c=0.0), units=4096, rival_units=1024, workers=1, evaluator=ideal_wien())
    assert nothing.scrutiny.capability == ()
