"""Limiters without memory: y = f(x), both pure numbers, slope 1 where the signal is small.

x is the limiter's input times the small-signal gain, over the limiter's scale: the mean rail of a clipping output,
the largest current of a differential pair, kT/q of a single bipolar stage (whose y is collector current over its mean).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
TABLE_SAMPLES = 512
MOST_EXPONENT = 600.0  # e^x stays finite; the mean is divided out, so only differences of x matter


@dataclass(frozen=True)
class Limiter:
    """`respond(x, skew)` → y and dy/dx for samples x (n, M); skew (n, 1) is the rails' (high − low)/(high + low).
    `corners(x, skew)`, where y has some: additions to y that make its sums over samples integrals.

    odd: f(−x) = −f(x), so that only odd harmonics arise (a clipping output loses this with unequal rails);
    mean_fixed: the bias holds the mean of y at 1, whatever the amplitude, and y is divided by the waveform's own mean.
    onset_power: e − 1 to this power is smooth in the amplitude at which the excess gain e is used up.
    cell_edges: of e − 1, between which a fitted shift is one polynomial; smooth: y has no corners;
    samples_per_level: points per period over the amplitude of x that keep its frequency within 10 ppm.
    """

    name: str
    respond: Callable[[Array, Array], tuple[Array, Array]]
    odd: bool
    mean_fixed: bool = False
    onset_power: float = 0.5
    smooth: bool = True
    samples_per_level: float = 8.0
    corners: Callable[[Array, Array], Array] | None = None
    cell_edges: tuple[float, ...] = (0.0, 0.1, 0.5, 1.0, 2.0, 4.0, 8.0, 16.0, 32.0, 64.0)

    def first_amplitude(self, excess: Array) -> Array:
        """Amplitude of a sinusoidal x at which the describing function is 1/excess, interpolated in a table."""
        amplitude, gain = _table(self)
        return np.interp(np.log(excess), -np.log(gain), amplitude)


def _clip(x: Array, skew: Array) -> tuple[Array, Array]:
    low, high = skew - 1, skew + 1
    return np.clip(x, low, high), ((x > low) & (x < high)).astype(np.float64)


def _clip_corners(x: Array, skew: Array) -> Array:
    """What sums over samples of a clipped wave miss of its integrals, as additions to the samples beside each corner.

    The trapezoid rule misses J h² B2(θ)/2 at a corner of slope jump J, a fraction θ into a step h, B2 = θ² − θ + 1/6
    (Euler–Maclaurin with the corner as an end of both pieces).
    """
    extra = np.zeros(x.shape)
    for sign in (1.0, -1.0):
        rail = np.broadcast_to(skew + sign, (len(x), 1))
        beyond = sign * x > sign * rail
        rows, here = np.nonzero(beyond != np.roll(beyond, -1, axis=1))
        following = (here + 1) % x.shape[1]
        first, second = x[rows, here], x[rows, following]
        theta = (rail[rows, 0] - first) / (second - first)
        corner = -sign * np.abs(second - first) / 2 * (theta * theta - theta + 1 / 6)
        extra[rows, here] += corner * (1 - theta)
        extra[rows, following] += corner * theta
    return extra


def _tanh(x: Array, skew: Array) -> tuple[Array, Array]:
    y = np.tanh(x)
    return y, 1 - y * y


def _exp(x: Array, skew: Array) -> tuple[Array, Array]:
    y = np.exp(np.maximum(x - np.max(x, axis=1, keepdims=True), -MOST_EXPONENT))
    y = y / np.mean(y, axis=1, keepdims=True)
    return y, y


def _table(limiter: Limiter) -> tuple[Array, Array]:
    """Amplitudes (rising) and describing functions (falling) over all excess gains that a circuit may have."""
    if limiter.name not in _TABLES:
        start = 1.0 if not limiter.smooth else 1e-3
        amplitude = start + np.concatenate([[0.0], np.geomspace(1e-7, 1e6, 4000)])
        theta = (np.arange(TABLE_SAMPLES) + 0.5) * 2 * np.pi / TABLE_SAMPLES
        y, _ = limiter.respond(amplitude[:, None] * np.cos(theta), np.zeros((1, 1)))
        gain = 2 * np.mean(y * np.cos(theta), axis=1) / amplitude
        _TABLES[limiter.name] = amplitude, np.minimum.accumulate(gain)
    return _TABLES[limiter.name]


_TABLES: dict[str, tuple[Array, Array]] = {}

CLIP_CELLS = (0.0, 0.003, 0.012, 0.05, 0.15, 0.3, 0.5, 0.8, 1.2, 2.0)
CLIP = Limiter(
    "clip",
    _clip,
    odd=True,
    onset_power=1 / 3,
    smooth=False,
    samples_per_level=12.0,
    corners=_clip_corners,
    cell_edges=CLIP_CELLS,
)
TANH = Limiter("tanh", _tanh, odd=True)
EXP = Limiter("exp", _exp, odd=False, mean_fixed=True, samples_per_level=1.0)
LIMITERS = {limiter.name: limiter for limiter in (CLIP, TANH, EXP)}
