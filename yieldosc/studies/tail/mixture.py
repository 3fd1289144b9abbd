"""A Gaussian mixture fitted to weighted draws by expectation and maximisation, its size by BIC.

SciPy has the nearest-centre start and the triangular solver but no mixture, hence this one. Dempster, Laird & Rubin,
J. R. Stat. Soc. B 39 (1977) 1; Schwarz, Ann. Stat. 6 (1978) 461 (both from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.cluster.vq import vq
from scipy.linalg import solve_triangular
from scipy.special import logsumexp

Array = NDArray[np.float64]
MOST_COMPONENTS = 6
STEPS = 60
RIDGE = 1e-4  # of a standard normal's variance: keeps a component that collapses on few draws regular
WIDER = 1.15
WIDE = 2.25
WIDE_SHARE = 0.15


@dataclass(frozen=True, slots=True)
class Mixture:
    """weights (k,), means (k, d), factors (k, d, d): Cholesky factors of the covariances."""

    weights: Array
    means: Array
    factors: Array

    def log_density(self, z: Array) -> Array:
        """(n,) of z (n, d)."""
        return np.asarray(logsumexp(_log_parts(z, self), axis=1))

    def draw(self, count: int, generator: np.random.Generator) -> Array:
        """(count, d)"""
        which = generator.choice(len(self.weights), size=count, p=self.weights)
        noise = generator.standard_normal((count, self.means.shape[1]))
        return np.asarray(self.means[which] + np.einsum("nij,nj->ni", self.factors[which], noise))

    def widened(self) -> Mixture:
        """Covariance × 1.15, with 15 % of the weight at 2.25 × the covariance: tails heavier than the fit's."""
        return Mixture(
            np.concatenate([(1 - WIDE_SHARE) * self.weights, WIDE_SHARE * self.weights]),
            np.concatenate([self.means, self.means]),
            np.concatenate([np.sqrt(WIDER) * self.factors, np.sqrt(WIDE) * self.factors]),
        )


def fitted(z: Array, weights: Array, generator: np.random.Generator) -> Mixture:
    """The mixture of the lowest BIC of draws z (n, d) with weights (n,); the effective number of draws counts."""
    share = weights / weights.sum()
    effective = 1 / float((share**2).sum())
    d = z.shape[1]
    best, least = None, np.inf
    for k in range(1, MOST_COMPONENTS + 1):
        free = k * (1 + d + d * (d + 1) // 2) - 1
        if k > 1 and free > effective / 2:
            break
        mixture, likelihood = _em(z, share, k, generator)
        bic = -2 * effective * likelihood + free * np.log(effective)
        if bic >= least:
            break
        best, least = mixture, bic
    if best is None:
        raise ValueError("No mixture could be fitted: the draws have no finite density.")
    return best


def _em(z: Array, share: Array, k: int, generator: np.random.Generator) -> tuple[Mixture, float]:
    picked = z[generator.choice(len(z), size=k, p=share, replace=False)]
    label, _ = vq(z, picked)  # draws that chains repeat may be picked twice: an empty component keeps no weight
    mixture = _maximised(z, np.eye(k)[label] * share[:, None])
    likelihood = -np.inf
    for _ in range(STEPS):
        parts = _log_parts(z, mixture)
        total = logsumexp(parts, axis=1)
        now = float(share @ total)
        if now - likelihood < 1e-5:
            break
        likelihood = now
        mixture = _maximised(z, np.exp(parts - total[:, None]) * share[:, None])
    return mixture, now


def _maximised(z: Array, belongs: Array) -> Mixture:
    mass = belongs.sum(axis=0) + 1e-12
    means = (belongs.T @ z) / mass[:, None]
    factors = []
    for j in range(len(mass)):
        off = z - means[j]
        covariance = (off * belongs[:, j, None]).T @ off / mass[j]
        factors.append(np.linalg.cholesky(covariance + RIDGE * np.eye(z.shape[1])))
    return Mixture(mass / mass.sum(), means, np.array(factors))


def _log_parts(z: Array, mixture: Mixture) -> Array:
    found = np.empty((len(z), len(mixture.weights)))
    for j, (weight, mean, factor) in enumerate(zip(mixture.weights, mixture.means, mixture.factors, strict=True)):
        y = solve_triangular(factor, (z - mean).T, lower=True)
        found[:, j] = np.log(weight) - np.log(np.diag(factor)).sum() - 0.5 * (y**2).sum(axis=0)
    return np.asarray(found - 0.5 * z.shape[1] * np.log(2 * np.pi))
