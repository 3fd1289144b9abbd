"""What the structure of a part number says: value code, tolerance letter, dielectric.

Makers build these numbers alike: size, dielectric, tolerance letter, value code in three or four digits or with R, K, M
as the point. The shapes below are read without knowing the maker; what they give is always marked as decoded, and never
beats what the BOM says in words. A shape that fits by accident is possible: hence the mark.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from yieldosc.parts.codes import class1_code, class2_code, tolerance_letter
from yieldosc.parts.parameter import Kind


@dataclass(frozen=True, slots=True)
class Decoded:
    """Facts from a part number; None where it says nothing."""

    text: str
    value: float | None
    tolerance: tuple[float, float] | None
    law: str | None = None


_SIZE = r"(?:01005|0201|0402|0603|0805|1206|1210|1812|2010|2512)"
_POINT = r"\d+[RKM]\d*|[RKM]\d+"
# value: code; tol: letter; law: dielectric in letters or as one letter of a series.
_RESISTORS = (
    rf"^[A-Z]{{2,5}}{_SIZE}-?(?P<tol>[BCDFGJK])[A-Z]{{0,2}}-?(?:07|13|7[WNT])(?P<value>\d+[RKM]\d*)L?",
    rf"^[A-Z]{{2,5}}{_SIZE}(?P<tol>[BCDFGJK])T(?P<value>{_POINT})$",
    rf"^[A-Z]{{2,5}}{_SIZE}(?P<value>{_POINT})(?P<tol>[BCDFGJK])[A-Z]",
    rf"^[A-Z]{{2,3}}{_SIZE}-?(?P<tol>[BCDFGJ])[A-Z]-?(?P<value>\d{{3,4}}|{_POINT})(?:[A-Z]|$)",
    r"^ERJ-?[A-Z0-9]{2,4}?(?P<tol>[BCDFGJ])(?P<value>\d{3,4}|\d+R\d+|R\d+)[VXDC]",
    r"^ERA-?\d[A-Z]{2}(?P<tol>[BCD])(?P<value>\d{3,4})[XVPC]",
    rf"^{_SIZE}W[A-Z0-9](?P<tol>[BCDFGJ])(?P<value>\d{{4}})T",
    rf"^{_SIZE}W2(?P<tol>[BCDFGJ])(?P<value>\d{{4}})T",
    r"^R[KN]73[A-Z]?\d?[A-Z]{3,4}(?P<value>\d{3,4}|\d+R\d*)(?P<tol>[BCDFGJ])",
    rf"^[A-Z]{{2}}\d{{2}}(?P<tol>[BCDFGJ])[A-Z]{{2,3}}(?P<value>\d{{3,4}}|{_POINT})$",
    rf"^[A-Z]{{2}}{_SIZE}-?(?P<value>{_POINT})-?(?P<tol>[BCDFGJ])[A-Z]*$",
    rf"^[A-Z]{{2,4}}-?\d?[A-Z]{{0,2}}(?:{_SIZE})?(?:ZT)?(?P<value>0R00|0000Z0)",
    r"^MCR\d{2}[A-Z]{2,4}?(?P<tol>[DFJ])(?P<value>\d{3,4}|\d+R\d*)$",
)
_CAPACITORS = (
    r"^C\d{4}[CXYT](?P<value>\d{3}|\dR\d)(?P<tol>[BCDFGJKMZ])\d(?P<law_last>[GRPUV])",
    r"^CL\d{2}(?P<law_first>[ABCFXYJ])(?P<value>\d{3}|\dR\d)(?P<tol>[BCDFGJKMZ])",
    r"^G[RCJ][MJT][A-Z0-9]{3}(?P<law_pair>5C|R7|R6|C7|C8|D7|C6|F5|7U)[0-9A-Z]{2}(?P<value>\d{3}|\dR\d)(?P<tol>[BCDFGJKMZ])",
    rf"^CC{_SIZE}(?P<tol>[BCDFGJKMZ])[A-Z](?P<law>NPO|NP0|C0G|X7R|X5R|Y5V|X6S|X7S)\d[A-Z]{{2}}(?P<value>\d{{3}}|\dR\d)",
    rf"^{_SIZE}[A-Z0-9](?P<law_rated>[ACDG])(?P<value>\d{{3}}|\dR\d)(?P<tol>[BCDFGJKMZ])[A-Z0-9]T",
    r"^C\d{4}(?P<law>X5R|X7R|X6S|X7S|X7T|C0G|NP0|CH|Y5V)[0-9][A-Z](?P<value>\d{3}|\dR\d)(?P<tol>[BCDFGJKMZ])",
    r"^[A-Z]MK\d{3}(?:B)?(?P<law_short>BJ|B7|CG|C6|AC|CH)(?P<value>\d{3}|\dR\d)(?P<tol>[BCDFGJKMZ])",
    r"^T[A-Z]{2}[A-Z](?P<value>\d{3})(?P<tol>[JKM])\d{3}",
    r"^T\d{3}[A-Z](?P<value>\d{3})(?P<tol>[JKM])\d{3}",
    rf"^[A-Z]{{2}}{_SIZE}-(?P<value>\d+(?:[RPNU]\d*))-?(?P<tol>[BCDFGJKM])$",
)
_INDUCTORS = (
    r"^[A-Z]{2,6}\d{3,5}[A-Z]{0,2}-?(?P<value>\d+[RN]\d*|R\d+)(?P<tol>[JKMN])?(?:[A-Z0-9-]*)$",
    r"^[A-Z]{2,6}\d{3,5}[A-Z]{0,2}-(?P<value>\d{3})(?P<tol>[JKMN])",
)
_CRYSTALS = (
    r"(?P<value>\d{1,3}(?:\.\d{1,6})?)(?P<scale>[MK])HZ",
    r"-(?P<value>\d{1,3}(?:\.\d{1,6})?)(?P<scale>M)(?:HZ)?(?:-|$)",
)
_LAWS = {  # letters of series names for a dielectric, as printed in makers' tables of part numbers (from memory)
    "law_last": {"G": "C0G", "R": "X7R", "P": "X5R", "U": "Z5U", "V": "Y5V"},
    "law_first": {"C": "C0G", "B": "X7R", "A": "X5R", "F": "Y5V", "X": "X6S", "Y": "X7S"},
    "law_pair": {"5C": "C0G", "R7": "X7R", "R6": "X5R", "C7": "X7S", "C8": "X6S", "D7": "X7T",
                 "F5": "Y5V", "7U": "U2J"},
    "law_rated": {"A": "C0G", "C": "X7R", "D": "X5R", "G": "Y5V"},
    "law_short": {"BJ": "X5R", "B7": "X7R", "CG": "C0G", "CH": "C0H"},
}  # fmt: skip
_SHAPES: dict[Kind, tuple[re.Pattern[str], ...]] = {
    "resistor": tuple(map(re.compile, _RESISTORS)),
    "capacitor": tuple(map(re.compile, _CAPACITORS)),
    "inductor": tuple(map(re.compile, _INDUCTORS)),
    "crystal": tuple(map(re.compile, _CRYSTALS)),
}


def decode_part_number(text: str, kind: Kind) -> Decoded | None:
    """What a part number says of a part of that kind; None when its shape is unknown."""
    for token in re.split(r"[\s,;/()]+", text.upper()):
        for bare in (token, token.rpartition("_")[2], token.partition("-")[2]):
            if 6 <= len(bare) <= 40 and re.search(r"\d", bare) and re.search(r"[A-Z]", bare):
                found = _shape(bare, kind)
                if found is not None:
                    return found
    return None


def _shape(number: str, kind: Kind) -> Decoded | None:
    for pattern in _SHAPES.get(kind, ()):
        match = pattern.search(number)
        if match is None:
            continue
        groups = match.groupdict()
        value = _frequency(groups) if kind == "crystal" else _code(groups["value"], kind)
        if value is None:
            continue
        return Decoded(number, value, _tolerance(groups.get("tol"), value, kind), _law(groups))
    return None


def _frequency(groups: dict[str, str | None]) -> float:
    return float(groups["value"] or "0") * (1e6 if groups["scale"] == "M" else 1e3)


def _code(code: str, kind: Kind) -> float | None:
    """104 → 10·10⁴ of pF, Ω or µH; 4R7, 82N, R47 with the letter as the point."""
    unit = {"capacitor": 1e-12, "inductor": 1e-6}.get(kind, 1.0)
    if not code.strip("0RZ"):
        return 0.0
    if code.isdigit():
        digits, power = code[:-1], int(code[-1])
        return None if len(code) not in (3, 4) or power == 9 else _exact(float(digits) * 10.0**power * unit)
    letter = next(c for c in code if c.isalpha())
    scale = {"R": unit, "K": 1e3, "M": 1e6, "N": 1e-9, "P": 1e-12, "U": 1e-6}[letter]
    return _exact(float(f"0{code.replace(letter, '.')}0") * scale)


def _exact(value: float) -> float:
    """Without the last bits that a multiplication leaves: 2.2e-10 and not 2.2000000000000002e-10."""
    return float(f"{value:.12g}")


def _tolerance(letter: str | None, value: float, kind: Kind) -> tuple[float, float] | None:
    if not letter or not value:
        return None
    found = tolerance_letter(letter, value if kind == "capacitor" else None)
    return None if found is None else found.fractions(value)


def _law(groups: dict[str, str | None]) -> str | None:
    for name, table in _LAWS.items():
        if groups.get(name):
            return table.get(groups[name] or "")
    law = groups.get("law")
    if law is None:
        return None
    code = "C0G" if law in ("NPO", "NP0") else law
    return code if class1_code(code) is not None or class2_code(code) is not None else None
