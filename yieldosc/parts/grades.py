"""Common grades of parts, tolerance and temperature law, and what they cost relative to each other.

The prices are placeholders: a user's Grades replace the ladders. Grades are common practice in distributors' filters,
from memory.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

from yieldosc.parts.ceramic import Class2Law, default_ageing
from yieldosc.parts.laws import LawError, parse_law
from yieldosc.parts.linear import Linear
from yieldosc.parts.parameter import Kind, Law, Parameter
from yieldosc.parts.quartz import AtLaw


@dataclass(frozen=True, slots=True)
class Grade:
    """± tolerance (fraction) and a relative price (1: the loosest grade of the ladder)."""

    tolerance: float
    price_factor: float


@dataclass(frozen=True, slots=True)
class LawGrade:
    """A temperature law and a relative price (1: the loosest of the ladder)."""

    law: str
    price_factor: float


LADDERS: dict[Kind, tuple[Grade, ...]] = {
    "resistor": (Grade(0.05, 1.0), Grade(0.01, 1.2), Grade(0.005, 3.0), Grade(0.001, 8.0), Grade(0.0005, 25.0)),
    "capacitor": (Grade(0.2, 1.0), Grade(0.1, 1.1), Grade(0.05, 1.3), Grade(0.02, 2.5), Grade(0.01, 4.0)),
    "inductor": (Grade(0.2, 1.0), Grade(0.1, 1.1), Grade(0.05, 1.3), Grade(0.02, 2.0), Grade(0.01, 5.0)),
    "crystal": (Grade(50e-6, 1.0), Grade(30e-6, 1.1), Grade(20e-6, 1.3), Grade(10e-6, 1.7), Grade(5e-6, 3.0)),
}
RESISTOR_LAWS = tuple(
    LawGrade(f"±{slope} ppm/K", factor)
    for slope, factor in ((200, 1.0), (100, 1.1), (50, 1.5), (25, 2.5), (10, 6.0), (5, 12.0))
)
CRYSTAL_LAWS = ((50, 1.0), (30, 1.15), (20, 1.4), (15, 1.8), (10, 2.6))  # ± ppm over the same temperatures
KIND_PRICES: dict[Kind, float] = {"resistor": 1.0, "capacitor": 2.0, "inductor": 10.0, "crystal": 40.0}  # placeholders
CLASS_1 = "C0G"
CLASS_1_FACTOR = 2.0  # against class 2
LARGEST_CLASS_1_F = 100e-9
MAIN_TRAITS = ("R", "C", "L", "FL", "FS")


def half_width(parameter: Parameter) -> float:
    """The larger side of the tolerance, as a fraction of the typical value."""
    return max(parameter.high - parameter.typical, parameter.typical - parameter.low) / abs(parameter.typical)


def with_tolerance(parameter: Parameter, low: float, high: float) -> Parameter:
    """The part with other bounds (fractions of its typical value): same shape, law and typical value."""
    width = abs(parameter.typical)
    return replace(parameter, low=parameter.typical + low * width, high=parameter.typical + high * width)


def with_law(parameter: Parameter, law: Law | None) -> Parameter:
    """The part with another temperature law; a class-1 part does not age as a class-2 part does."""
    ageing = (parameter.ageing or default_ageing(law.text)) if isinstance(law, Class2Law) else None
    return replace(parameter, law=law, ageing=ageing)


def price_at(tolerance: float, ladder: Sequence[Grade]) -> float:
    """Relative price of a tolerance: between two grades in proportion on logarithmic scales, beyond them the end's."""
    ordered = sorted(ladder, key=lambda g: g.tolerance)
    if tolerance <= ordered[0].tolerance:
        return ordered[0].price_factor
    for tight, loose in pairwise(ordered):
        if tolerance <= loose.tolerance * (1 + 1e-9):
            part = math.log(tolerance / tight.tolerance) / math.log(loose.tolerance / tight.tolerance)
            return float(tight.price_factor * (loose.price_factor / tight.price_factor) ** part)
    return ordered[-1].price_factor


def next_tighter(parameter: Parameter) -> Parameter | None:
    """The part in the next tighter grade of its ladder: same shape, law and typical value; None where there is none."""
    ladder = LADDERS.get(parameter.kind)
    if ladder is None or parameter.trait not in MAIN_TRAITS or parameter.high <= parameter.low:
        return None
    now = half_width(parameter)
    for grade in ladder:
        if grade.tolerance < now * (1 - 1e-9):
            return with_tolerance(parameter, -grade.tolerance, grade.tolerance)
    return None


def law_grades(parameter: Parameter) -> tuple[tuple[Law, float], ...]:
    """Laws that the part can be bought with, and their prices relative to its present law; its own is left out."""
    law = parameter.law
    if isinstance(law, Linear) and parameter.kind == "resistor" and not law.typical and not law.absolute:
        prices = [Grade(float(g.law.strip("± pm/K")) * 1e-6, g.price_factor) for g in RESISTOR_LAWS]
        now = price_at(law.limit, prices)
        found = [(_law(g.law), g.price_factor / now) for g in RESISTOR_LAWS]
        return tuple((made, f) for made, f in found if isinstance(made, Linear) and made.limit != law.limit)
    if isinstance(law, Class2Law) and parameter.kind == "capacitor" and parameter.typical <= LARGEST_CLASS_1_F:
        class_1 = _law(CLASS_1)
        return () if class_1 is None else ((class_1, CLASS_1_FACTOR),)
    if isinstance(law, AtLaw) and law.range_c is not None:
        return _crystal_laws(law)
    return ()


def _crystal_laws(law: AtLaw) -> tuple[tuple[Law, float], ...]:
    assert law.range_c is not None
    low_c, high_c = law.range_c
    now = float(law.text.split("±")[1].split("ppm")[0])
    prices = [Grade(ppm * 1e-6, factor) for ppm, factor in CRYSTAL_LAWS]
    present = price_at(now * 1e-6, prices)
    made = ((ppm, _law(f"AT ±{ppm} ppm {low_c:g}..{high_c:g} °C"), factor) for ppm, factor in CRYSTAL_LAWS)
    return tuple((found, factor / present) for ppm, found, factor in made if found is not None and ppm != now)


def _law(text: str) -> Law | None:
    """The law, or None where no part can have it (an AT cut below the least possible limit)."""
    try:
        return parse_law(text)
    except LawError:
        return None


def looser_law(law: Law, present: Law | None) -> bool:
    """True where `law` allows more than `present`, as far as both say so in the same terms."""
    if isinstance(law, Linear) and isinstance(present, Linear):
        return law.limit > present.limit
    if isinstance(law, AtLaw) and isinstance(present, AtLaw):
        return law.widest[1] - law.widest[0] > present.widest[1] - present.widest[0]
    return False


def tolerance_text(parameter: Parameter) -> str:
    """"±5 %", "+80/−20 %", "±20 ppm"."""
    if parameter.high <= parameter.low or not parameter.typical:
        return "fixed"
    low = (parameter.low - parameter.typical) / abs(parameter.typical)
    high = (parameter.high - parameter.typical) / abs(parameter.typical)
    scale, unit = (1e6, "ppm") if max(-low, high) < 0.5e-3 else (100.0, "%")
    if abs(low + high) <= 1e-9 * (high - low):
        return f"±{_digits(high * scale)} {unit}"
    return f"+{_digits(high * scale)}/−{_digits(-low * scale)} {unit}"


def _digits(number: float) -> str:
    return f"{round(number, 9):.6g}"
