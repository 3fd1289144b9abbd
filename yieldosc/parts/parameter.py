"""One role's value and everything that makes it differ from unit to unit.

    value(T, age) = initial · (1 + law(T)) · (1 + solder) · (1 + drift(age))      relative laws
    value(T, age) = initial · (1 + solder) · (1 + drift(age)) + law(T)            absolute laws (-2 mV/K)

`initial` is drawn between `low` and `high` around `typical` by the shape. Every cause has its own random variable.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal, Protocol

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Kind = Literal["resistor", "capacitor", "inductor", "crystal", "transistor", "ic", "diode", "other"]
Pedigree = Literal["guaranteed", "characterised", "typical", "simulated", "measured", "assumed"]
PEDIGREES: tuple[Pedigree, ...] = ("guaranteed", "characterised", "typical", "simulated", "measured", "assumed")


@dataclass(frozen=True, slots=True)
class Given:
    """A value as its author wrote it: the text, and the cell that it came from ("BOM!D7")."""

    text: str
    place: str


class Shape(Protocol):
    """How initial values lie between the bounds."""

    @property
    def text(self) -> str: ...

    @property
    def bounded(self) -> bool:
        """False when values beyond `high` or `low` can be drawn."""
        ...

    def initial(self, low: float, typical: float, high: float, u: Array) -> Array:
        """Inverse distribution function: u (n,) in (0, 1) to values (n,); never decreasing in u."""
        ...


class Law(Protocol):
    """A temperature law; zero at 25 °C. Each of its coefficients is a random variable of the unit."""

    @property
    def text(self) -> str: ...

    @property
    def coefficients(self) -> tuple[str, ...]:
        """Names of the random coefficients, in a stable order; empty for a law without spread."""
        ...

    @property
    def absolute(self) -> bool:
        """True when the law's change is in the value's own unit and is added."""
        ...

    @property
    def range_c(self) -> tuple[float, float] | None:
        """Temperatures [°C] outside which the law says nothing; None without such a limit."""
        ...

    def change(self, temperature_c: float, u: Mapping[str, Array]) -> Array | float:
        """δ(T) for units whose coefficients sit at the quantiles u[name] (n,) in [0, 1] (0 and 1: the limits)."""
        ...


@dataclass(frozen=True, slots=True)
class Ageing:
    """Class-2 ceramic ageing: −`per_decade` (fraction) of the value per decade of t/`reference_h`."""

    per_decade: float
    reference_h: float = 1000.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Parameter:
    """The population of one role. SI units of the role; tolerances are absolute bounds, not fractions."""

    role: str  # "R1"
    part: str  # the designator, or the role's own name where no part stands behind it: what ranks and upgrades call it
    trait: str  # "R", "C", "ESR", "hFE": joins the same role of parts of one reel
    kind: Kind
    unit: str  # "Ω", "F", "H", "Hz", "S", "V", "1", …
    nominal: float
    low: float
    typical: float
    high: float
    shape: Shape
    law: Law | None = None  # None: the stage's built-in law where the role has one, else no dependence
    solder: tuple[float, float] = (0.0, 0.0)  # fractions, uniform between
    drift: tuple[float, float] = (0.0, 0.0)  # fractions over the stated life, uniform between
    ageing: Ageing | None = None
    reel: str | None = None  # parts of equal reel come from one reel; None: independent
    reel_share: float = 0.0
    pedigree: Pedigree = "assumed"
    declared: tuple[float, float] | None = None  # bounds of the BOM's tolerance, where measured values stand for it
    given: Mapping[str, Given] = field(default_factory=dict)  # field name → as written and where
    note: str = ""

    @property
    def spread(self) -> bool:
        """True when any cause makes units differ."""
        return (
            (self.high > self.low and self.shape.text != "fixed")
            or (self.law is not None and bool(self.law.coefficients))
            or self.solder[1] > self.solder[0]
            or self.drift[1] > self.drift[0]
        )
