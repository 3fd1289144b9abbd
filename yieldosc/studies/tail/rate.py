"""The rate of one failure mode: regions by subset simulation, the figure by importance sampling on fresh draws."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.stats import t as student

from yieldosc.population.streams import small_seed
from yieldosc.studies.tail.mixture import Mixture, fitted
from yieldosc.studies.tail.subset import LimitState, SubsetRun, subset_simulation

Array = NDArray[np.float64]
RUNS = 3  # two to fit, one held out
PILOT = 4000
TARGET_CV = 0.03
MOST_DRAWS = 200_000
MEAN_OFF, VARIANCE_OFF = 0.25, 0.35  # an idle input taken for active costs effort only, never bias
PER_LEVEL = (2000, 8000)
LAST_RUNS, LAST_PER_LEVEL = 10, 10_000


@dataclass(frozen=True, slots=True, kw_only=True)
class SmallRate:
    """bounded: the figure is where the search gave up, no estimate; low is 0 then, high no certificate."""

    probability: float
    low: float
    high: float
    cv: float
    methods: tuple[str, ...]
    flags: tuple[str, ...]
    evaluations: int
    active: tuple[int, ...] = ()
    bounded: bool = False


def small_rate(
    limit_state: LimitState, dimension: int, *, seed: int, name: str, confidence: float = 0.95, floor: float = 0.0
) -> SmallRate:
    """P(g(z) ≤ 0), z (n, dimension) standard normal. name: of the failure mode, keys its draws. floor: probability
    below which the mode is bounded only. Raises ValueError when the limit state gives a NaN."""
    spent = 0
    flags: tuple[str, ...] = ()
    for per_level in PER_LEVEL:
        generator = np.random.Generator(np.random.Philox(small_seed(seed, f"tail {name} {per_level}")))
        runs = [
            subset_simulation(limit_state, dimension, generator=generator, per_level=per_level, floor=floor)
            for _ in range(RUNS)
        ]
        spent += sum(run.evaluations for run in runs)
        if not all(run.reached for run in runs):
            most = max(run.probability for run in runs)
            return SmallRate(
                probability=most, low=0.0, high=most, cv=np.inf, methods=("subset simulation",),
                flags=("not reached",), evaluations=spent, bounded=True,
            )  # fmt: skip
        sampler = _Sampler.of(runs, limit_state, dimension, generator)
        found = sampler.figure(runs, confidence)
        spent += sampler.evaluations
        flags = found.flags
        if not flags:
            return _spent(found, spent)
    return _last(limit_state, dimension, seed, name, confidence, spent, flags)


def _spent(found: SmallRate, spent: int) -> SmallRate:
    return SmallRate(
        probability=found.probability, low=found.low, high=found.high, cv=found.cv, methods=found.methods,
        flags=found.flags, evaluations=spent, active=found.active,
    )  # fmt: skip


class _Sampler:
    """Importance sampling on a mixture of the active inputs; counts its own evaluations."""

    def __init__(self, limit_state: LimitState, dimension: int, generator: np.random.Generator) -> None:
        self.limit_state, self.dimension, self.generator = limit_state, dimension, generator
        self.evaluations = 0
        self.active: NDArray[np.int64] = np.arange(dimension)
        self.mixture: Mixture

    @classmethod
    def of(
        cls, runs: list[SubsetRun], limit_state: LimitState, dimension: int, generator: np.random.Generator
    ) -> _Sampler:
        made = cls(limit_state, dimension, generator)
        z = np.concatenate([run.failures for run in runs[:2]])
        off = np.maximum(np.abs(z.mean(axis=0)) / MEAN_OFF, np.abs(z.var(axis=0) - 1) / VARIANCE_OFF)
        made.active = np.flatnonzero(off > 1) if (off > 1).any() else np.array([int(off.argmax())])
        made._fit(z, np.ones(len(z)))
        for _ in range(2):
            drawn, weights = made.draw(PILOT)
            hit = weights > 0
            if hit.sum() > 2 * len(made.active) + 10:
                made._fit(drawn[hit], weights[hit])
        return made

    def _fit(self, z: Array, weights: Array) -> None:
        self.mixture = fitted(z[:, self.active], weights, self.generator).widened()

    def log_weight(self, z: Array) -> Array:
        x = z[:, self.active]
        normal = -0.5 * (x**2).sum(axis=1) - 0.5 * x.shape[1] * np.log(2 * np.pi)
        return np.asarray(normal - self.mixture.log_density(x))

    def draw(self, count: int) -> tuple[Array, Array]:
        """Fresh z (count, d) and their weights, 0 where they do not fail."""
        z = self.generator.standard_normal((count, self.dimension))
        z[:, self.active] = self.mixture.draw(count, self.generator)
        g = self.limit_state(z)
        self.evaluations += count
        return z, np.where(g <= 0, np.exp(self.log_weight(z)), 0.0)

    def figure(self, runs: list[SubsetRun], confidence: float) -> SmallRate:
        _, pilot = self.draw(PILOT)
        rough = _cv(pilot) * np.sqrt(PILOT)
        count = int(np.clip((rough / TARGET_CV) ** 2, PILOT, MOST_DRAWS)) if np.isfinite(rough) else MOST_DRAWS
        _, weights = self.draw(count)
        p, cv = float(weights.mean()), _cv(weights)
        if p == 0:
            return SmallRate(
                probability=0.0, low=0.0, high=0.0, cv=cv, methods=(), flags=("no failure drawn",), evaluations=0
            )
        spread = float(student.ppf(0.5 + confidence / 2, max(2, int((weights > 0).sum()) - 1))) * cv
        return SmallRate(
            probability=p, low=p * np.exp(-spread), high=min(1.0, p * np.exp(spread)), cv=cv,
            methods=("subset simulation", "importance sampling"), flags=self._flags(weights, runs, p, cv),
            evaluations=0, active=tuple(int(i) for i in self.active),
        )  # fmt: skip

    def _flags(self, weights: Array, runs: list[SubsetRun], p: float, cv: float) -> tuple[str, ...]:
        flags = []
        if weights.max() > 0.02 * weights.sum():
            flags.append("largest weight above 2 %")
        # Among failures the mean weight is E_q[w²]/p; the held-out failures come from that very distribution.
        held = np.exp(self.log_weight(runs[-1].failures))
        if (held > 50 * float((weights**2).mean()) / p).mean() > 0.002:
            flags.append("held-out failures outside the mixture")
        subset = float(np.mean([run.probability for run in runs]))
        joint = np.sqrt(cv**2 + np.mean([run.cv**2 for run in runs]) / len(runs))
        if abs(np.log(subset / p)) > 3 * joint:
            flags.append("methods differ")
        return tuple(flags)


def _cv(weights: Array) -> float:
    mean = float(weights.mean())
    return float(weights.std(ddof=1)) / mean / np.sqrt(len(weights)) if mean > 0 else np.inf


def _last(
    limit_state: LimitState, dimension: int, seed: int, name: str, confidence: float, spent: int,
    flags: tuple[str, ...],
) -> SmallRate:  # fmt: skip
    """Ten independent runs of subset simulation: their mean, with a t interval of its logarithm."""
    generator = np.random.Generator(np.random.Philox(small_seed(seed, f"tail {name} last")))
    runs = [
        subset_simulation(limit_state, dimension, generator=generator, per_level=LAST_PER_LEVEL)
        for _ in range(LAST_RUNS)
    ]
    found = np.array([run.probability for run in runs])
    p, cv = float(found.mean()), _cv(found)
    spread = float(student.ppf(0.5 + confidence / 2, LAST_RUNS - 1)) * cv
    reached = all(run.reached for run in runs)
    return SmallRate(
        probability=p, low=p * np.exp(-spread) if reached else 0.0, high=min(1.0, p * np.exp(spread)), cv=cv,
        methods=("subset simulation, ten runs",), flags=flags,
        evaluations=spent + sum(run.evaluations for run in runs), bounded=not reached,
    )  # fmt: skip
