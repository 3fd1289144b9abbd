"""Measured boards against the prediction: the size of each test, its power, the cases that it must tell apart."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.stats import binom, norm

from yieldosc.studies import pilot as module
from yieldosc.studies.declared import declared_setup
from yieldosc.studies.declared import factory_corner as corner_of_the_test
from yieldosc.studies.pilot import pilot_result
from yieldosc.study import Pilot

BOARDS = 30


@pytest.fixture
def bench(make_study, ideal_wien):
    """The study, its set-up, and `measure(n, seed)`: readings of boards drawn by numpy from the same tolerances."""

    class Bench:
        study = make_study(r=0.01, c=0.02, gain=5.0, window=0.03)
        setup = declared_setup(study, seed=1, evaluator=ideal_wien())
        corner = corner_of_the_test(study)

        def measure(self, boards, seed, c=0.02, r=0.01, same_reel=False, shift=0.0):
            random = np.random.default_rng(seed)
            r1, r2 = 1 + r * (2 * random.random((2, boards)) - 1)
            c1, c2 = 1 + c * (2 * random.random((2, boards)) - 1)
            if same_reel:
                r2, c2 = r1, c1
            return self.study.design.target_frequency_hz * (1 + shift) / np.sqrt(r1 * r2 * c1 * c2)

        def judged(self, readings, no_starts=0):
            pilot = Pilot(column="f", frequency_hz=tuple(readings), no_starts=no_starts, place="Pilot!A2")
            return pilot_result(self.study, self.setup, self.corner, pilot)

    return Bench()


@pytest.fixture
def quick(monkeypatch):
    """The prediction drawn once, and no search for doubts: what many pilots need."""
    readings, known = module._readings, {}

    def once(setup, corner, study, units):
        if units not in known:
            known[units] = readings(setup, corner, study, units)
        return known[units]

    monkeypatch.setattr(module, "_readings", once)
    monkeypatch.setattr(module, "_doubts", lambda *_: ())
    null = {}

    def same_null(samples):
        key = samples.shape
        if key not in null or key[0] == 1:
            null[key] = lilliefors(samples)
        return null[key]

    lilliefors = module._lilliefors
    monkeypatch.setattr(module, "_lilliefors", same_null)


def spread_of(bench):
    """sd of ln f: ½ √(2 (t_r² + t_c²)/3)."""
    return bench.study.design.target_frequency_hz * 0.5 * np.sqrt(2 * (0.01**2 + 0.02**2) / 3)


def test_no_more_than_5_in_100_good_pilots_are_called_anything(bench, quick):
    """All four tests together; 300 pilots, 3 standard deviations of the count."""
    verdicts = [bench.judged(bench.measure(BOARDS, 1000 + s)).verdict for s in range(300)]
    called = sum(v not in ("consistent", "not enough data") for v in verdicts)
    assert called <= binom.ppf(0.9987, 300, 0.05)


def test_each_test_rejects_good_pilots_as_often_as_it_says(bench, quick):
    """α = 5 %/4 each; over 300 pilots at most 12 of one test (binomial, 0.1 %)."""
    counts: dict[str, int] = {}
    for seed in range(300):
        for test in bench.judged(bench.measure(BOARDS, 5000 + seed)).tests:
            counts[test.name] = counts.get(test.name, 0) + test.rejects
    assert set(counts) == {"location", "spread", "shape", "no-starts"}
    assert max(counts.values()) <= binom.ppf(0.999, 300, 0.0125)


def test_the_shift_that_it_says_it_finds_is_found_in_four_of_five(bench, quick):
    first = bench.judged(bench.measure(BOARDS, 1))
    target = bench.study.design.target_frequency_hz
    # normal theory for readings of the predicted spread: (z₁₋α/₂ + z₀.₈) sd/√n, from the formula's own sd
    expected = (norm.ppf(1 - 0.0125 / 2) + norm.ppf(0.8)) * spread_of(bench) / np.sqrt(BOARDS)
    assert first.detectable_shift_hz == pytest.approx(expected, rel=0.02)
    found = 0
    for seed in range(200):
        r = bench.judged(bench.measure(BOARDS, 2000 + seed, shift=first.detectable_shift_hz / target))
        found += next(t for t in r.tests if t.name == "location").rejects
    assert 0.70 <= found / 200 <= 0.90


def test_the_spread_that_it_says_it_finds_is_found_about_as_often(bench, quick):
    """For normal readings four of five; these, sums of uniform ones, have lighter tails."""
    ratio = bench.judged(bench.measure(BOARDS, 1)).detectable_spread_ratio
    found = 0
    for seed in range(200):
        readings = bench.measure(BOARDS, 3000 + seed)
        middle = bench.study.design.target_frequency_hz
        r = bench.judged(middle + ratio * (readings - middle))
        found += next(t for t in r.tests if t.name == "spread").rejects
    assert found / 200 >= 0.70


@pytest.mark.parametrize(
    ("how", "words"),
    [
        ({}, "consistent"),
        ({"shift": 0.012}, "shifted"),
        ({"c": 0.05}, "wider"),
        ({"c": 0.003, "r": 0.003}, "narrower"),
    ],
)
def test_what_is_wrong_is_named(bench, how, words):
    r = bench.judged(bench.measure(60, 11, **how))
    assert r.verdict == words


def test_boards_that_do_not_start(bench):
    r = bench.judged(bench.measure(57, 11), no_starts=3)
    assert r.verdict == "more no-starts"
    assert (r.boards, r.no_starts) == (60, 3)
    assert r.predicted_no_start.failures == 0
    # one of a thousand is no proof where the prediction allows 1 in 9,000
    assert bench.judged(bench.measure(60, 11), no_starts=0).verdict == "consistent"


def test_two_things_at_once(bench):
    assert bench.judged(bench.measure(60, 11, shift=0.02, c=0.05)).verdict.startswith("shifted and wider")


def test_another_shape(bench):
    """Two lots, one standard deviation to either side: mean and spread as predicted, two humps."""
    sd, target = spread_of(bench), bench.study.design.target_frequency_hz
    noise = np.random.default_rng(4).normal(0, 0.15, 80)
    r = bench.judged(target + sd * (np.repeat([-1.0, 1.0], 40) + noise))
    assert r.verdict == "of another shape"


def test_few_boards_are_not_enough(bench):
    assert bench.judged(bench.measure(4, 3)).verdict == "not enough data"
    one = bench.judged(bench.measure(1, 3))
    assert one.verdict == "not enough data"
    assert one.bench_frequency_hz is None
    assert one.detectable_spread_ratio == np.inf


def test_readings_far_outside_everything_predicted_do_not_break_it(bench):
    r = bench.judged([1.0, 1e9, *bench.measure(10, 5)])
    assert "wider" in r.verdict


def test_a_same_reel_pilot_puts_independence_in_doubt(bench):
    """R1 = R2 and C1 = C2: √2 times the spread. Likelihood names that assumption first."""
    r = bench.judged(bench.measure(60, 21, same_reel=True))
    assert r.verdict == "wider"
    assert "same reel" in r.doubts[0].name
    assert r.doubts[0].log_likelihood_ratio > np.log(20)


def test_a_good_pilot_puts_nothing_in_doubt(bench):
    assert bench.judged(bench.measure(60, 22)).doubts == ()


def test_a_one_sided_lot_is_named(bench):
    """All resistors from the lower half of their tolerance, all capacitors from the upper one."""
    random = np.random.default_rng(8)
    r1, r2 = 1 - 0.01 * random.random((2, 60))
    c1, c2 = 1 + 0.02 * random.random((2, 60))
    r = bench.judged(bench.study.design.target_frequency_hz / np.sqrt(r1 * r2 * c1 * c2))
    assert "shifted" in r.verdict
    assert r.doubts[0].name == "one-sided lots: R1/R2 low, C1/C2 high"


def test_the_bench_frequency_that_would_centre_the_prediction(bench):
    """Readings 0.8 % high: nominal · 1.008, and its interval shrinks with √n."""
    target = bench.study.design.target_frequency_hz
    few, many = (bench.judged(bench.measure(n, 31, shift=0.008)).bench_frequency_hz for n in (20, 320))
    assert many.low <= target * 1.008 <= many.high
    assert few.low <= target * 1.008 <= few.high
    assert (few.high - few.low) / (many.high - many.low) == pytest.approx(4, rel=0.3)


def test_the_instruments_noise_is_part_of_the_prediction(bench):
    """sd 1 % of the target added to the predicted spread in squares."""
    noise = 0.01 * bench.study.design.target_frequency_hz
    calm = bench.judged(bench.measure(20, 1))
    noisy = replace(bench.study, design=replace(bench.study.design, measurement_sd_hz=noise))
    pilot = Pilot(column="f", frequency_hz=tuple(bench.measure(20, 1)), no_starts=0, place="Pilot!A2")
    found = pilot_result(noisy, bench.setup, bench.corner, pilot)
    assert found.predicted_sd_hz == pytest.approx(np.hypot(calm.predicted_sd_hz, noise), rel=0.01)
