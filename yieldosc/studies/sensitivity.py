"""Sobol' indices of any function of the unit cube by independent scramblings. The only file that knows SALib.

A and B come from SALib's sampler, the indices from SALib's estimators (Saltelli et al., Comput. Phys. Commun. 181
(2010) 259, table 2 (b) and (f)). Each scrambling is one replicate; intervals come from the spread of the replicates.
SALib answers one NaN with zeros and ignores seed 0: a NaN raises here, and seeds are mapped to non-zero ones.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from SALib.analyze import sobol as salib_estimators
from SALib.sample import sobol as salib_sampler

from yieldosc.errors import YieldoscError
from yieldosc.population import small_seed

Array = NDArray[np.float64]
Model = Callable[[Array], Array]  # inputs (d, n) in (0, 1) → outputs (k, n)
REPLICATES = 16
CONSTANT_SD = 1e-13  # an output that varies less is rounding, not an answer


class NotANumberError(YieldoscError):
    """An output of the model is not a number: no index can be given."""


@dataclass(frozen=True, slots=True)
class Replicate:
    """Indices of k outputs and g groups from one scrambling; nan for an output that does not vary."""

    first: Array  # (k, g)
    total: Array  # (k, g)
    variance: Array  # (k,)


def replicate(
    model: Model, *, dimensions: int, groups: Sequence[Sequence[int]], base: int, seed: int, number: int
) -> Replicate:
    """One scrambling. groups: input positions of each group; cost base · (g + 2) evaluations; base a power of two."""
    a, b = _saltelli_pair(dimensions, base, small_seed(seed, f"sobol scrambling {number}"))
    crossed = [a, b]
    for group in groups:
        mixed = a.copy()
        mixed[:, list(group)] = b[:, list(group)]
        crossed.append(mixed)
    outputs = model(np.concatenate(crossed).T)
    if np.isnan(outputs).any():
        bad = int(np.isnan(outputs).any(axis=0).sum())
        raise NotANumberError(f"{bad} of {outputs.shape[1]} evaluations gave an output that is not a number")
    return _indices(outputs.reshape(len(outputs), len(groups) + 2, base))


def _indices(outputs: Array) -> Replicate:
    """outputs (k, 2 + g, n): rows A, B, then A with each group taken from B."""
    k, rows, _ = outputs.shape
    flat = outputs.reshape(k, -1)
    centred = outputs - flat.mean(axis=1)[:, None, None]
    sd = flat.std(axis=1)
    varies = sd > CONSTANT_SD
    first, total = np.full((k, rows - 2), np.nan), np.full((k, rows - 2), np.nan)
    if varies.any():
        scaled = np.moveaxis(centred[varies] / sd[varies][:, None, None], 0, -1)  # (rows, n, varying outputs)
        a, b = scaled[0], scaled[1]
        for group in range(rows - 2):
            first[varies, group] = salib_estimators.first_order(a, scaled[group + 2], b)
            total[varies, group] = salib_estimators.total_order(a, scaled[group + 2], b)
    variance = np.where(varies, outputs[:, :2].reshape(k, -1).var(axis=1), 0.0)
    return Replicate(first, total, variance)


def _saltelli_pair(dimensions: int, base: int, seed: int) -> tuple[Array, Array]:
    """The independent matrices A and B (base, d) of one scrambling.

    SALib fills its crossed rows one element at a time; two groups are the fewest it crosses, and the crossing itself
    is done in `replicate` (a test compares it with SALib's own).
    """
    names = [f"x{i}" for i in range(dimensions)]
    problem: dict[str, object] = {"num_vars": dimensions, "names": names, "bounds": [[0.0, 1.0]] * dimensions}
    step = 3
    if dimensions > 1:
        problem["groups"] = ["one"] + ["rest"] * (dimensions - 1)
        step = 4
    rows = salib_sampler.sample(problem, base, calc_second_order=False, seed=seed)
    # The scrambled points may touch 0 or 1, where the tails of an open shape are infinite.
    inside = np.clip(rows, 2.0**-54, 1 - 2.0**-53)
    return inside[0::step], inside[step - 1 :: step]
