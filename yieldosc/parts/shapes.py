"""How initial values lie between their bounds: inverse distribution functions, exact at both ends.

Bounds may be unequal: each side of the typical value is scaled on its own, and half the units lie on each side.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr, ndtri

from yieldosc.parts.parameter import Shape

Array = NDArray[np.float64]
ACCEPTED = "uniform, normal, normal 2, normal-open, triangular, hollow, hollow 0.4, fixed, measured, min/typ/max"


class ShapeError(ValueError):
    """A shape text that is none; the message lists what is accepted."""


def _sided(low: float, typical: float, high: float, position: Array) -> Array:
    """position −1 … 1 (beyond for open shapes) → value, each side scaled by its own half."""
    if high - typical == typical - low:
        return typical + (high - typical) * position
    return np.where(position < 0, typical + (typical - low) * position, typical + (high - typical) * position)


@dataclass(frozen=True, slots=True)
class Uniform:
    """Flat between the bounds, wherever the typical value lies."""

    text: str = "uniform"
    bounded: bool = True

    def initial(self, low: float, typical: float, high: float, u: Array) -> Array:
        return low + (high - low) * u


@dataclass(frozen=True, slots=True)
class Split:
    """Half the units flat below the typical value, half flat above: what min/typ/max says without more knowledge."""

    text: str = "min/typ/max"
    bounded: bool = True

    def initial(self, low: float, typical: float, high: float, u: Array) -> Array:
        return _sided(low, typical, high, 2 * u - 1)


@dataclass(frozen=True, slots=True)
class Normal:
    """Normal, the tolerance being `sigmas` standard deviations; cut at the tolerance, or open.

    Unequal bounds: half the units on each side of the typical value, each half with its own standard deviation.
    """

    sigmas: float = 3.0
    cut: bool = True

    @property
    def text(self) -> str:
        name = "normal" if self.cut else "normal-open"
        return name if self.sigmas == 3.0 else f"{name} {self.sigmas:g}"

    @property
    def bounded(self) -> bool:
        return self.cut

    def initial(self, low: float, typical: float, high: float, u: Array) -> Array:
        if not self.cut:
            return _sided(low, typical, high, ndtri(u) / self.sigmas)
        tail = float(ndtr(-self.sigmas))
        position = np.clip(ndtri(tail + (1 - 2 * tail) * u) / self.sigmas, -1.0, 1.0)
        return _sided(low, typical, high, position)


@dataclass(frozen=True, slots=True)
class Triangular:
    """Peak at the typical value, zero at the bounds."""

    text: str = "triangular"
    bounded: bool = True

    def initial(self, low: float, typical: float, high: float, u: Array) -> Array:
        position = np.where(u < 0.5, np.sqrt(2 * u) - 1, 1 - np.sqrt(2 * np.maximum(1 - u, 0.0)))
        return _sided(low, typical, high, position)


@dataclass(frozen=True, slots=True)
class Hollow:
    """Flat with the inner fraction missing: better grades were sorted out."""

    inner: float = 0.4
    bounded: bool = True

    @property
    def text(self) -> str:
        return f"hollow {self.inner:g}"

    def initial(self, low: float, typical: float, high: float, u: Array) -> Array:
        side = 2 * u - 1
        position = np.where(side < 0, -1.0, 1.0) * (self.inner + (1 - self.inner) * np.abs(side))
        return _sided(low, typical, high, position)


@dataclass(frozen=True, slots=True)
class Fixed:
    """No spread."""

    text: str = "fixed"
    bounded: bool = True

    def initial(self, low: float, typical: float, high: float, u: Array) -> Array:
        return np.full_like(np.asarray(u, dtype=np.float64), typical)


@dataclass(frozen=True, slots=True)
class Measured:
    """Resampled from measured values: every value of the column is as likely as every other."""

    values: tuple[float, ...]
    text: str = "measured"
    bounded: bool = True

    def initial(self, low: float, typical: float, high: float, u: Array) -> Array:
        ordered = np.sort(np.asarray(self.values, dtype=np.float64))
        return ordered[np.minimum((np.asarray(u) * len(ordered)).astype(np.int64), len(ordered) - 1)]


def is_min_typ_max(shape: Shape) -> bool:
    """True for the shape that stands for min/typ/max."""
    return isinstance(shape, Split)


def parse_shape(text: str) -> Shape:
    """The shape that a text names; ShapeError with the accepted texts otherwise. "measured" needs its column and is
    made by whoever holds it."""
    # a hyphen joins words ("normal-open"); before a number it is a sign, and no number here may be negative
    words = re.sub(r"[\s_]+|-(?=[a-z])", " ", text.strip().lower()).split()
    name, number = " ".join(w for w in words if not _is_number(w)), [float(w) for w in words if _is_number(w)]
    simple: dict[str, Shape] = {
        "uniform": Uniform(), "triangular": Triangular(), "fixed": Fixed(), "min/typ/max": Split(), "split": Split(),
    }  # fmt: skip
    if name in simple and not number:
        return simple[name]
    if name in ("normal", "normal open") and len(number) <= 1 and (not number or number[0] > 0):
        return Normal(number[0] if number else 3.0, cut=name == "normal")
    if name == "hollow" and len(number) <= 1 and (not number or 0 < number[0] < 1):
        return Hollow(number[0] if number else 0.4)
    if name == "measured":
        raise ShapeError(
            f"{text!r} needs measured values: write it in the Shape of one role, and the values in the sheet Measured"
        )
    raise ShapeError(f"{text!r} is no shape; write one of: {ACCEPTED}")


def _is_number(word: str) -> bool:
    return re.fullmatch(r"\d+(\.\d+)?", word) is not None
