"""Measured boards of a pilot build against the prediction: named tests, their power, and what they put in doubt.

Each reading becomes z = Φ⁻¹(F(reading)), F the predicted distribution at the test: standard normal where prediction
holds (probability integral transform; Rosenblatt, Ann. Math. Statist. 23 (1952) 470). Then: location by the z test,
spread by the χ² test of variance, shape by Kolmogorov and Smirnov, no-starts by the exact binomial test, each at α/4
(Bonferroni), so that all hold together.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray
from scipy import stats
from scipy.special import ndtri

from yieldosc.population import uniforms
from yieldosc.solver.solution import Status
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.extra_results import Doubt, PilotResult, PilotTest
from yieldosc.studies.nominal import nominal_points, slopes
from yieldosc.studies.results import Estimate
from yieldosc.studies.rivals import rival_sets
from yieldosc.studies.run import INNER, QUANTUM, Setup, inner_pieces
from yieldosc.study import Corner, Pilot, Study

Array = NDArray[np.float64]
UNITS = 8 * QUANTUM
RIVAL_UNITS = INNER
POWER = 0.8
TESTS = 4
SMALL_SHIFT = 0.25  # of the half-width of the limits: a shift that a pilot must be able to see
SMALL_SPREAD = 1.5  # ratio of standard deviations that it must be able to see
MOST_DOUBTS = 3
CLEAR = math.log(20.0)  # log likelihood ratio from which an assumption is called in doubt: 20 to 1


def pilot_result(study: Study, setup: Setup, corner: Corner, pilot: Pilot) -> PilotResult:
    """Readings of built boards against the declared population at the test's corner."""
    alpha = (1 - study.design.confidence) / TESTS
    predicted, silent = _readings(setup, corner, study, UNITS)
    measured = np.asarray(pilot.frequency_hz)
    z = _scores(measured, predicted)
    tests = (_location(z, alpha), _spread(z, alpha), _shape(z, alpha), _starts(pilot, silent, alpha))
    sd, half = float(predicted.std()), (study.design.frequency_high_hz - study.design.frequency_low_hz) / 2
    shift = (stats.norm.ppf(1 - alpha / 2) + stats.norm.ppf(POWER)) / math.sqrt(max(len(z), 1)) * sd
    ratio = _detectable_ratio(len(z), alpha)
    return PilotResult(
        column=pilot.column,
        boards=pilot.boards,
        no_starts=pilot.no_starts,
        corner=corner,
        measured_mean_hz=float(measured.mean()),
        measured_sd_hz=float(measured.std(ddof=1)) if len(measured) > 1 else math.nan,
        predicted_mean_hz=float(predicted.mean()),
        predicted_sd_hz=sd,
        predicted_no_start=silent,
        tests=tests,
        detectable_shift_hz=float(shift),
        detectable_spread_ratio=ratio,
        verdict=_verdict(tests, z, shift <= SMALL_SHIFT * half and ratio <= SMALL_SPREAD),
        doubts=_doubts(study, setup, corner, measured),
        bench_frequency_hz=_bench(study, setup, measured, predicted),
    )


def _readings(setup: Setup, corner: Corner, study: Study, units: int) -> tuple[Array, Estimate]:
    """Predicted readings of the boards that start (m,), the instrument's noise included, and the share that do not."""
    found = []
    for first, size in inner_pieces(0, units):
        solution = setup.bench.solve(setup.block(first, size), corner)
        starts = solution.status == Status.STARTS
        noise = ndtri(uniforms(setup.streams.seed, "pilot", "reading", first, size))
        read = solution.limit_frequency_hz + (study.design.measurement_sd_hz or 0.0) * noise
        found.append(read[starts])
    read = np.concatenate(found)
    return read, clopper_pearson(units - len(read), units, study.design.confidence)


def _scores(measured: Array, predicted: Array) -> Array:
    ordered = np.sort(predicted)
    rank = (np.searchsorted(ordered, measured, "left") + np.searchsorted(ordered, measured, "right")) / 2
    beyond = _beyond(measured, ordered)
    inside = ndtri((rank + 0.5) / (len(ordered) + 1))
    return np.where(np.isnan(beyond), inside, beyond)


def _beyond(measured: Array, ordered: Array) -> Array:
    """Readings outside everything predicted lie at their distance from the mean in standard deviations, at least at the
    outermost score."""
    mean, sd = ordered.mean(), ordered.std()
    most = float(ndtri(1 - 0.5 / (len(ordered) + 1)))
    distance = (measured - mean) / (sd if sd > 0 else 1.0)
    far = np.copysign(np.maximum(np.abs(distance), most), distance)
    return np.where((measured < ordered[0]) | (measured > ordered[-1]), far, np.nan)


def _location(z: Array, alpha: float) -> PilotTest:
    n = len(z)
    p = float(2 * stats.norm.sf(abs(z.mean()) * math.sqrt(n))) if n else 1.0
    return PilotTest(name="location", method="z test of the mean score", p_value=p, rejects=bool(p < alpha))


def _spread(z: Array, alpha: float) -> PilotTest:
    n = len(z)
    if n < 2:
        return PilotTest(name="spread", method="χ² test of the variance", p_value=1.0, rejects=False)
    statistic = (n - 1) * float(z.var(ddof=1))
    p = float(min(2 * min(stats.chi2.cdf(statistic, n - 1), stats.chi2.sf(statistic, n - 1)), 1.0))
    return PilotTest(name="spread", method="χ² test of the variance", p_value=p, rejects=p < alpha)


def _shape(z: Array, alpha: float) -> PilotTest:
    """Of the scores with their own mean and spread taken out, by Lilliefors' distance simulated for this n."""
    n = len(z)
    if n < 8:
        return PilotTest(name="shape", method="Lilliefors' test", p_value=1.0, rejects=False)
    distance = _lilliefors(z[None, :])[0]
    null = _lilliefors(np.random.Generator(np.random.Philox(key=n)).standard_normal((4000, n)))
    p = (1 + int(np.count_nonzero(null >= distance))) / (1 + len(null))
    return PilotTest(name="shape", method="Lilliefors' test", p_value=p, rejects=bool(p < alpha))


def _lilliefors(samples: Array) -> Array:
    """Largest distance between the distribution of each standardised sample (m, n) and the normal one (m,)."""
    n = samples.shape[1]
    scaled = (samples - samples.mean(axis=1, keepdims=True)) / samples.std(axis=1, ddof=1, keepdims=True)
    cdf = stats.norm.cdf(np.sort(scaled, axis=1))
    steps = np.arange(n + 1) / n
    return np.asarray(np.maximum(np.abs(cdf - steps[:-1]).max(axis=1), np.abs(cdf - steps[1:]).max(axis=1)))


def _starts(pilot: Pilot, silent: Estimate, alpha: float) -> PilotTest:
    """Against the upper bound of the predicted share, so that its own uncertainty does not reject it."""
    found = stats.binomtest(pilot.no_starts, pilot.boards, silent.high, alternative="greater")
    return PilotTest(
        name="no-starts", method="exact binomial test", p_value=float(found.pvalue), rejects=bool(found.pvalue < alpha)
    )


def _detectable_ratio(n: int, alpha: float) -> float:
    """Ratio of standard deviations above 1 that the χ² test finds in four of five pilots of n boards."""
    if n < 2:
        return math.inf
    return math.sqrt(stats.chi2.ppf(1 - alpha / 2, n - 1) / stats.chi2.ppf(1 - POWER, n - 1))


def _verdict(tests: Sequence[PilotTest], z: Array, enough: bool) -> str:
    by_name = {test.name: test.rejects for test in tests}
    words = []
    if by_name["no-starts"]:
        words.append("more no-starts")
    if by_name["location"]:
        words.append("shifted")
    if by_name["spread"]:
        words.append("wider" if z.std(ddof=1) > 1 else "narrower")
    if by_name["shape"]:
        words.append("of another shape")
    if words:
        return " and ".join(words)
    return "consistent" if enough else "not enough data"


def _doubts(study: Study, setup: Setup, corner: Corner, measured: Array) -> tuple[Doubt, ...]:
    """Assumptions under which the readings are at least 20 times as likely as under the declared set, best first."""
    declared = setup.population.parameters
    single, patterns = rival_sets(declared, slopes(setup.population, setup.bench, corner))
    base = _log_likelihood(study, setup, corner, measured)
    found = []
    for rival in (*single, *patterns):
        other = setup.with_parameters(rival.parameters)
        gain = _log_likelihood(study, other, corner, measured) - base
        if gain > CLEAR:
            found.append(Doubt(name=rival.name, meaning=rival.meaning, log_likelihood_ratio=gain))
    return tuple(sorted(found, key=lambda d: -d.log_likelihood_ratio)[:MOST_DOUBTS])


def _log_likelihood(study: Study, setup: Setup, corner: Corner, measured: Array) -> float:
    """Of independent readings under a smoothed histogram of the predicted ones (Silverman's bandwidth)."""
    read, _ = _readings(setup, corner, study, RIVAL_UNITS)
    if len(read) < 2 or not read.std() > 0:
        return -math.inf
    width = 1.06 * float(read.std()) * len(read) ** -0.2
    kernel = np.exp(-0.5 * ((measured[:, None] - read[None, :]) / width) ** 2)
    density = kernel.mean(axis=1) / (width * math.sqrt(2 * math.pi))
    floor = 1e-9 / float(read.std())  # a reading outside everything predicted speaks against a set, but not for ever
    return float(np.log(density + floor).sum())


def _bench(study: Study, setup: Setup, measured: Array, predicted: Array) -> Estimate | None:
    """The nominal unit's frequency times measured over predicted mean: what `bench frequency` would centre on."""
    if len(measured) < 2:
        return None
    reference = nominal_points(setup.population, setup.bench, setup.corners)
    at_25 = min(reference, key=lambda p: (abs(p.corner.temperature_c - 25), p.corner.age_years))
    nominal = at_25.settled_hz or at_25.frequency_hz
    logs = np.log(measured) - math.log(predicted.mean())
    quantile = float(stats.t.ppf(0.5 + study.design.confidence / 2, len(logs) - 1))
    half = quantile * float(logs.std(ddof=1)) / math.sqrt(len(logs))
    middle = float(logs.mean())
    return Estimate(
        estimate=nominal * math.exp(middle), low=nominal * math.exp(middle - half),
        high=nominal * math.exp(middle + half), confidence=study.design.confidence, units=len(logs),
    )  # fmt: skip
