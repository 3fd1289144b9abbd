"""Common tolerance grades and what they cost relative to each other. The prices are placeholders: a user's Grades
sheet replaces them. Grades are common practice in distributors' filters, from memory."""

from __future__ import annotations

from dataclasses import dataclass, replace

from yieldosc.parts.parameter import Kind, Parameter


@dataclass(frozen=True, slots=True)
class Grade:
    """± tolerance (fraction) and a relative price (1: the loosest grade of the ladder)."""

    tolerance: float
    price_factor: float


LADDERS: dict[Kind, tuple[Grade, ...]] = {
    "resistor": (Grade(0.05, 1.0), Grade(0.01, 1.2), Grade(0.005, 3.0), Grade(0.001, 8.0), Grade(0.0005, 25.0)),
    "capacitor": (Grade(0.2, 1.0), Grade(0.1, 1.1), Grade(0.05, 1.3), Grade(0.02, 2.5), Grade(0.01, 4.0)),
    "inductor": (Grade(0.2, 1.0), Grade(0.1, 1.1), Grade(0.05, 1.3), Grade(0.02, 2.0), Grade(0.01, 5.0)),
    "crystal": (Grade(50e-6, 1.0), Grade(30e-6, 1.1), Grade(20e-6, 1.3), Grade(10e-6, 1.7), Grade(5e-6, 3.0)),
}
MAIN_TRAITS = ("R", "C", "L", "FL", "FS")


def half_width(parameter: Parameter) -> float:
    """The larger side of the tolerance, as a fraction of the typical value."""
    return max(parameter.high - parameter.typical, parameter.typical - parameter.low) / abs(parameter.typical)


def next_tighter(parameter: Parameter) -> Parameter | None:
    """The part in the next tighter grade of its ladder: same shape, law and typical value; None where there is none."""
    ladder = LADDERS.get(parameter.kind)
    if ladder is None or parameter.trait not in MAIN_TRAITS or parameter.high <= parameter.low:
        return None
    now = half_width(parameter)
    for grade in ladder:
        if grade.tolerance < now * (1 - 1e-9):
            width = grade.tolerance * abs(parameter.typical)
            return replace(parameter, low=parameter.typical - width, high=parameter.typical + width)
    return None


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
