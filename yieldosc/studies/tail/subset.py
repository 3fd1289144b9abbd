"""Subset simulation with adaptive conditional sampling, in standard normal space.

Au & Beck, Probabilistic Engineering Mechanics 16 (2001) 263; Papaioannou, Betz, Zwirglmaier & Straub, ibid. 41 (2015)
89 (both from memory). The step is adapted after each step of all chains together, not after each group of chains: a
vectorised limit state is called with hundreds of units at a time.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
LimitState = Callable[[Array], Array]  # z (n, d) → g (n,), a failure where g ≤ 0, continuous
P0 = 0.1
MOST_LEVELS = 20
BEST_ACCEPTANCE = 0.44


@dataclass(frozen=True, slots=True, kw_only=True)
class SubsetRun:
    """One run. failures (m, d): correlated draws of the failure region. reached: False where the run gave up above
    g = 0, so that `probability` is the last level's and only an indication of an upper bound."""

    probability: float
    cv: float
    failures: Array
    evaluations: int
    reached: bool


def subset_simulation(
    limit_state: LimitState,
    dimension: int,
    *,
    generator: np.random.Generator,
    per_level: int = 2000,
    floor: float = 0.0,
) -> SubsetRun:
    """floor: give up below this probability. Raises ValueError when the limit state gives a NaN."""
    z = generator.standard_normal((per_level, dimension))
    g = _checked(limit_state(z))
    seeds = round(P0 * per_level)
    probability, square_cv, evaluations, scale = 1.0, 0.0, per_level, 0.6
    chains = per_level  # the first level is independent draws: chains of length one
    for _ in range(MOST_LEVELS):
        order = np.argsort(g, kind="stable")
        level = float(g[order[seeds - 1]])
        failed = g <= max(level, 0.0)
        share = float(failed.mean())
        square_cv += _square_cv(failed.reshape(-1, chains))
        probability *= share
        if level <= 0:
            return SubsetRun(
                probability=probability, cv=square_cv**0.5, failures=z[failed], evaluations=evaluations, reached=True
            )
        if probability < floor or share == 1:
            break
        chosen = generator.permutation(order[:seeds])
        z, g, scale = _chains(limit_state, z[chosen], g[chosen], level, per_level // seeds, scale, generator)
        evaluations += per_level - seeds
        chains = seeds
    return SubsetRun(
        probability=probability, cv=square_cv**0.5, failures=z[:0], evaluations=evaluations, reached=False
    )


def _chains(
    limit_state: LimitState, z: Array, g: Array, level: float, length: int, scale: float, generator: np.random.Generator
) -> tuple[Array, Array, float]:
    """Chains (length · seeds, d) inside g ≤ level, step by step, from one seed each."""
    all_z, all_g = [z], [g]
    for step in range(1, length):
        sigma = min(scale, 1.0)
        tried = np.sqrt(1 - sigma**2) * z + sigma * generator.standard_normal(z.shape)
        found = _checked(limit_state(tried))
        accepted = found <= level
        z, g = np.where(accepted[:, None], tried, z), np.where(accepted, found, g)
        all_z.append(z)
        all_g.append(g)
        scale = float(np.exp(np.log(scale) + (accepted.mean() - BEST_ACCEPTANCE) / np.sqrt(step)))
    return np.concatenate(all_z), np.concatenate(all_g), scale


def _square_cv(failed: NDArray[np.bool_]) -> float:
    """Au & Beck's δ² = (1 − p)/(pN) · (1 + γ) of indicators (length, chains)."""
    length, chains = failed.shape
    p = float(failed.mean())
    if p == 1:
        return 0.0
    x = failed - p
    gamma = sum(
        2 * (1 - k / length) * float((x[:-k] * x[k:]).mean()) / (p * (1 - p)) for k in range(1, length)
    )
    return float((1 - p) / (p * length * chains) * (1 + max(gamma, 0.0)))


def _checked(g: Array) -> Array:
    if np.isnan(g).any():
        raise ValueError("The limit state gave a value that is not a number; it must be finite wherever a unit exists.")
    return g
