"""Which random variables a study has, and how their u ∈ (0, 1) are drawn: one per cause of each role, joined by reels.

With reel share ρ each variable is z = √ρ z_reel + √(1−ρ) z_part and u = Φ(z): every part keeps its own
distribution, ρ = 1 makes the parts of a reel identical. Stream names never change with the rest of the part list.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr, ndtri

from yieldosc.parts.parameter import Parameter
from yieldosc.parts.values import variables
from yieldosc.population.streams import SMALLEST, uniforms, uniforms_at

Array = NDArray[np.float64]
Draws = dict[str, dict[str, Array]]  # role → cause → u (n,)
LARGEST = 1 - 2.0**-53  # the largest double below 1


@dataclass(frozen=True, slots=True)
class Variable:
    """One cause of one role: its own stream and, where parts of a reel share it, the reel's stream."""

    role: str
    part: str
    cause: str
    stream: str
    reel: str | None
    reel_stream: str | None
    share: float

    @property
    def own_counts(self) -> bool:
        """False at reel share 1: the part's own stream has no effect."""
        return self.reel_stream is None or self.share < 1

    @property
    def reel_counts(self) -> bool:
        return self.reel_stream is not None and self.share > 0


def study_variables(parameters: Iterable[Parameter]) -> tuple[Variable, ...]:
    """Every random variable, in the order of the parameters and of their causes."""
    return tuple(_variable(p, cause) for p in parameters for cause in variables(p))


def _variable(parameter: Parameter, cause: str) -> Variable:
    reel = parameter.reel
    return Variable(
        role=parameter.role,
        part=parameter.part,
        cause=cause,
        stream=f"{parameter.role}: {cause}",
        reel=reel,
        reel_stream=None if reel is None else f"reel {reel} {parameter.trait}: {cause}",
        share=0.0 if reel is None else parameter.reel_share,
    )


def combine(every: Iterable[Variable], source: Callable[[str], Array]) -> Draws:
    """u of each variable from independent uniforms: source(stream name) → u (n,). Reel streams are read once."""
    draws: Draws = {}
    reels: dict[str, Array] = {}
    for variable in every:
        if variable.reel_counts and variable.reel_stream not in reels:
            reels[str(variable.reel_stream)] = source(str(variable.reel_stream))
        draws.setdefault(variable.role, {})[variable.cause] = _joined(variable, reels, source)
    return draws


def _joined(variable: Variable, reels: Mapping[str, Array], source: Callable[[str], Array]) -> Array:
    if not variable.reel_counts:
        return source(variable.stream)
    reel = reels[str(variable.reel_stream)]
    if not variable.own_counts:
        return reel
    share = variable.share
    z = np.sqrt(share) * ndtri(reel) + np.sqrt(1 - share) * ndtri(source(variable.stream))
    return np.asarray(np.clip(ndtr(z), SMALLEST, LARGEST))


@dataclass(frozen=True, slots=True)
class Streams:
    """Where the uniforms of numbered units come from. units_per_lot: units of a lot share their reels' draws."""

    seed: int
    purpose: str = "units"
    units_per_lot: int | None = None

    def block(self, every: Iterable[Variable], start: int, count: int) -> Draws:
        """Draws of units start … start + count − 1."""
        return combine(every, lambda name: self._consecutive(name, start, count))

    def at(self, every: Iterable[Variable], numbers: NDArray[np.int64]) -> Draws:
        """Draws of the units of these numbers (m,), regenerated."""
        return combine(every, lambda name: self._scattered(name, numbers))

    def _consecutive(self, name: str, start: int, count: int) -> Array:
        if self.units_per_lot is not None and name.startswith("reel "):
            lots = np.arange(start, start + count) // self.units_per_lot
            first = int(lots[0])
            drawn = uniforms(self.seed, self.purpose, name, first, int(lots[-1]) - first + 1)
            return np.asarray(drawn[lots - first])
        return uniforms(self.seed, self.purpose, name, start, count)

    def _scattered(self, name: str, numbers: NDArray[np.int64]) -> Array:
        if self.units_per_lot is not None and name.startswith("reel "):
            return uniforms_at(self.seed, self.purpose, name, numbers // self.units_per_lot)
        return uniforms_at(self.seed, self.purpose, name, numbers)
