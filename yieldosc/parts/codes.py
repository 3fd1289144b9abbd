"""Published letter codes of parts: tolerances, temperature coefficients, ceramic dielectrics, preferred numbers.

Where lists in print disagree, the choice is noted; no standard's own text was open, so every table is second-hand.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from yieldosc.quantities import SMALL_CAPACITOR_F, SMALL_CAPACITOR_LETTERS_PF, TOLERANCE_LETTERS

PPM = 1e-6


@dataclass(frozen=True, slots=True)
class Tolerance:
    """Bounds as fractions of the value, or in farads where `absolute`."""

    low: float
    high: float
    absolute: bool = False

    def fractions(self, value: float) -> tuple[float, float]:
        """(low, high) as fractions of a value."""
        return (self.low / value, self.high / value) if self.absolute else (self.low, self.high)


TEN_PICOFARAD = SMALL_CAPACITOR_F


def tolerance_letter(letter: str, capacitance_f: float | None = None) -> Tolerance | None:
    """The tolerance that a letter of IEC 60062 stands for (table: `quantities`); None for any other letter.

    capacitance_f: of a capacitor, whose B, C, D (F, G) mean picofarads below 10 pF; None for other parts, which know no
    asymmetric letters.
    """
    key = letter.strip().upper()
    if capacitance_f is not None and capacitance_f < TEN_PICOFARAD and key in SMALL_CAPACITOR_LETTERS_PF:
        size = SMALL_CAPACITOR_LETTERS_PF[key] * 1e-12
        return Tolerance(-size, size, absolute=True)
    low, high = TOLERANCE_LETTERS.get(key, (0.0, 0.0))
    if high == 0.0 or (capacitance_f is None and low != -high):
        return None
    return Tolerance(low / 100, high / 100)


# EIA-198 class 1 as printed in a maker's catalogue (seen). Lists differ on the multiplier digits: "+1" is 5 there and 4
# in copies of another table; 5 is used, since that catalogue gives 4 as −10000.
_CLASS1_SIGNIFICANT = {
    "C": 0.0, "B": 0.3, "L": 0.8, "A": 0.9, "M": 1.0, "P": 1.5, "R": 2.2, "S": 3.3, "T": 4.7, "V": 5.6, "U": 7.5,
}  # fmt: skip
_CLASS1_MULTIPLIER = {
    "0": -1, "1": -10, "2": -100, "3": -1000, "4": -10000, "5": 1, "6": 10, "7": 100, "8": 1000, "9": 10000,
}  # fmt: skip
_CLASS1_LIMIT = {"G": 30, "H": 60, "J": 120, "K": 250, "L": 500, "M": 1000, "N": 2500}
_CLASS1_NAMES = {"NP0": "C0G", "NPO": "C0G", "COG": "C0G", "CG": "C0G", "CH": "C0H", "МП0": "C0G"}


def class1_code(code: str) -> tuple[float, float] | None:
    """(typical, limit) in 1/K of a class-1 ceramic code; None when it is none. "C0G" → (0, 30e-6)."""
    key = code.strip().upper()
    key = _CLASS1_NAMES.get(key, key)
    if len(key) != 3 or key[0] not in _CLASS1_SIGNIFICANT:
        return None
    if key[1] not in _CLASS1_MULTIPLIER or key[2] not in _CLASS1_LIMIT:
        return None
    return _CLASS1_SIGNIFICANT[key[0]] * _CLASS1_MULTIPLIER[key[1]] * PPM, _CLASS1_LIMIT[key[2]] * PPM


@dataclass(frozen=True, slots=True)
class Class2:
    """A class-2 ceramic code: temperatures [°C] and the change between them, fractions of the value at 25 °C."""

    code: str
    low_c: float
    high_c: float
    change_low: float
    change_high: float


# EIA-198 by way of a distributor's page (seen); the second digit of +45 °C is 2 in some lists, 3 in others.
_CLASS2_LOW = {"Z": 10.0, "Y": -30.0, "X": -55.0}
_CLASS2_HIGH = {"2": 45.0, "4": 65.0, "5": 85.0, "6": 105.0, "7": 125.0, "8": 150.0, "9": 200.0}
_CLASS2_CHANGE = {
    "A": (-1.0, 1.0), "B": (-1.5, 1.5), "C": (-2.2, 2.2), "D": (-3.3, 3.3), "E": (-4.7, 4.7), "F": (-7.5, 7.5),
    "P": (-10.0, 10.0), "R": (-15.0, 15.0), "S": (-22.0, 22.0), "T": (-33.0, 22.0), "U": (-56.0, 22.0),
    "V": (-82.0, 22.0),
}  # fmt: skip


def class2_code(code: str) -> Class2 | None:
    """A class-2 ceramic code such as X7R; None when it is none."""
    key = code.strip().upper()
    if len(key) != 3 or key[0] not in _CLASS2_LOW or key[1] not in _CLASS2_HIGH or key[2] not in _CLASS2_CHANGE:
        return None
    low, high = _CLASS2_CHANGE[key[2]]
    return Class2(key, _CLASS2_LOW[key[0]], _CLASS2_HIGH[key[1]], low / 100, high / 100)


# IEC 60062 letters for a resistor's temperature coefficient, ± ppm/K. The letters are from memory; their values are
# those of the colour bands black, brown, red, yellow, orange, violet and grey as printed in a decoder's table (seen).
# Z is left out: remembered for the green band (20) and for the blue one (10).
_RESISTOR_TCR_PPM = {"U": 250, "S": 100, "R": 50, "Q": 25, "P": 15, "M": 5, "K": 1}


def resistor_tcr_letter(letter: str) -> float | None:
    """± limit [1/K] that a resistor's temperature-coefficient letter stands for."""
    found = _RESISTOR_TCR_PPM.get(letter.strip().upper())
    return None if found is None else found * PPM


# IEC 60063. Up to E24 the values are a list, eight of which are not the rounded powers; E192 has one such exception.
_E24 = (1.0, 1.1, 1.2, 1.3, 1.5, 1.6, 1.8, 2.0, 2.2, 2.4, 2.7, 3.0, 3.3, 3.6, 3.9, 4.3, 4.7, 5.1, 5.6, 6.2, 6.8, 7.5,
        8.2, 9.1)  # fmt: skip
SERIES = (3, 6, 12, 24, 48, 96, 192)


def e_series(count: int) -> tuple[float, ...]:
    """The values of one decade from 1; ValueError for a count that is no E series."""
    if count not in SERIES:
        raise ValueError(f"E{count} is not a series of preferred numbers; use E3, E6, E12, E24, E48, E96 or E192")
    if count <= 24:
        return _E24[:: 24 // count]
    values = [round(10 ** (i / count), 2) for i in range(count)]
    if count == 192:
        values[185] = 9.20
    return tuple(values)


def nearest_e(value: float, count: int) -> float:
    """The series value nearest to a value (> 0) in ratio, as parts of equal relative steps are chosen."""
    return min(_ladder(value, count), key=lambda member: abs(math.log(member / value)))


def neighbours_e(value: float, count: int) -> tuple[float, float]:
    """The largest series value below and the smallest above a value (> 0), exact members left out."""
    ladder = _ladder(value, count)
    below = [v for v in ladder if v < value * (1 - 1e-9)]
    above = [v for v in ladder if v > value * (1 + 1e-9)]
    return below[-1], above[0]


def series_between(count: int, low: float, high: float) -> tuple[float, ...]:
    """Every series value from low to high (both > 0, ends included), rising; ValueError where there is none."""
    first, last = math.floor(math.log10(low)), math.floor(math.log10(high))
    ladder = (_scaled(v, e) for e in range(first, last + 1) for v in e_series(count))
    found = tuple(v for v in ladder if low * (1 - 1e-9) <= v <= high * (1 + 1e-9))
    if not found:
        raise ValueError(f"E{count} has no value from {low:g} to {high:g}")
    return found


def _ladder(value: float, count: int) -> list[float]:
    """Series values of the decade of a value and of the decades beside it, rising."""
    exponent = math.floor(math.log10(value))
    return [_scaled(v, e) for e in (exponent - 1, exponent, exponent + 1) for v in e_series(count)]


def _scaled(member: float, exponent: int) -> float:
    """The double nearest to member · 10^exponent, as if it had been typed."""
    return float(f"{member:g}e{exponent}")
