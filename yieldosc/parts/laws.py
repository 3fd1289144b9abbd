"""Text ↔ temperature law, and the variants of a law that rival assumptions ask for."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping, Sequence
from dataclasses import replace

from yieldosc.parts.ceramic import Class2Law
from yieldosc.parts.codes import class1_code, class2_code
from yieldosc.parts.linear import Linear
from yieldosc.parts.parameter import Law
from yieldosc.parts.quartz import ARCMINUTE, ROOM_C, AtLaw, ForkLaw, at_law, least_limit, possible_angles
from yieldosc.parts.table_law import table_law

ACCEPTED = (
    "±50 ppm/K, -220 ±100 ppm/K, 0.5 %/K, -2 mV/K, C0G, U2J, X7R, AT ±30 ppm -40..85 °C, AT ±2 arcmin, "
    "fork, fork -0.035 ±0.009 ppm/K² 25 ±5 °C, table NAME"
)
_SIZE = r"(?:\d+(?:\.\d+)?|\.\d+)(?:e[-+]?\d+)?"
_NUMBER = rf"[-+]?{_SIZE}"
_PREFIX = {"p": 1e-12, "n": 1e-9, "µ": 1e-6, "u": 1e-6, "m": 1e-3, "": 1.0, "k": 1e3, "M": 1e6}
_PER_KELVIN = r"/\s*(?:K|°\s*C|C|deg\s*C?)"


class LawError(ValueError):
    """A law text that is none; the message says what was found and what is accepted."""


def parse_law(
    text: str, *, tables: Mapping[str, Sequence[tuple[float, float]]] | None = None, si_unit: str = ""
) -> Law | None:
    """The law that a text names; None for "none". LawError otherwise.

    tables: sheet name → (temperature [°C], change as a fraction); si_unit: the value's own, for laws such as -2 mV/K.
    """
    plain = _plain(text)
    _refuse_numbers(text.strip(), plain)
    plain = re.sub(r"(?<=\d),(?=\d)", ".", plain)
    if plain.lower() in ("none", "0"):
        return None
    for reader in (_ceramic, _at, _fork, _linear):
        law = reader(plain, si_unit)
        if law is not None:
            return law
    if plain.lower().startswith("table"):
        return _table(plain, tables or {})
    raise LawError(f"{text.strip()!r} is no temperature law; write one of: {ACCEPTED}")


def _plain(text: str) -> str:
    out = text.strip().replace("−", "-").replace("–", "-").replace("μ", "µ").replace("+/-", "±").replace("+-", "±")
    out = out.replace("\u2126", "Ω").replace("℃", "°C")  # the ohm sign and the one-character degree Celsius
    return re.sub(r"±\s+", "±", out)


def _refuse_numbers(written: str, plain: str) -> None:
    """LawError for numbers of two readings, and for numbers too large to compute with."""
    if plain.lower().startswith("table"):
        return  # a sheet's name may hold anything
    if re.search(r"(?<![\d.,])[1-9]\d{0,2},\d{3}(?!\d)", plain):
        raise LawError(
            f"{written!r} can be read with a decimal comma or with a thousands comma; "
            "write a decimal point, or no comma"
        )
    if any(not math.isfinite(float(number)) for number in re.findall(_NUMBER, plain, re.I)):
        raise LawError(f"{written!r} holds a number that is too large; write a temperature law such as ±50 ppm/K")


def _ceramic(text: str, si_unit: str) -> Law | None:
    class1 = class1_code(text)
    if class1 is not None:
        return Linear(class1[0], class1[1], text.upper().replace("NPO", "NP0").replace("COG", "C0G"))
    class2 = class2_code(text)
    return None if class2 is None else Class2Law(class2)


def _linear(text: str, si_unit: str) -> Law | None:
    unit = r"(?P<unit>ppm|%|(?P<prefix>(?-i:[pnµumkM]?))(?P<si>V|A|Ω|F|H|S|Hz))"  # the case of a prefix counts
    found = re.fullmatch(rf"(?P<typical>{_NUMBER})?\s*(?:±(?P<limit>{_SIZE}))?\s*{unit}\s*{_PER_KELVIN}", text, re.I)
    if found is None or (found["typical"] is None and found["limit"] is None):
        return None
    relative = {"ppm": 1e-6, "%": 1e-2}.get(found["unit"].lower())
    if relative is not None and found["unit"].lower() == "ppm" and found["limit"] is None and text[0] not in "+-":
        raise LawError(
            f"{text!r} may be a limit or a known slope; write ±{text} for a limit, +{text} for a known slope"
        )
    if relative is None:
        if found["si"] != si_unit:
            raise LawError(f"{text!r} changes {found['si']}, but the value is in {si_unit or 'another unit'}")
        relative = _PREFIX[found["prefix"] or ""]
    typical, limit = float(found["typical"] or 0.0), float(found["limit"] or 0.0)
    return Linear(typical * relative, limit * relative, text, absolute=found["si"] is not None)


def _at(text: str, si_unit: str) -> Law | None:
    if not re.match(r"AT\b", text, re.I):
        return None
    angle = re.fullmatch(rf"AT\s*±({_SIZE})\s*(?:arcmin|['′])", text, re.I)
    if angle is not None:
        half = float(angle[1]) * ARCMINUTE
        return AtLaw((-half, half), (-half, half), text, None)
    found = re.fullmatch(
        rf"AT\s*±({_SIZE})\s*ppm\s*({_NUMBER})\s*(?:°?C)?\s*(?:\.\.+|…|to)\s*({_NUMBER})\s*(?:°\s*C|C)?", text, re.I
    )
    if found is None:
        raise LawError(f"{text!r} is no AT law; write AT ±30 ppm -40..85 °C, or AT ±2 arcmin")
    limit, low_c, high_c = float(found[1]) * 1e-6, float(found[2]), float(found[3])
    if low_c >= high_c:
        raise LawError(f"{text!r}: the range must rise, for example -40..85 °C")
    if not low_c <= ROOM_C <= high_c:
        raise LawError(f"{text!r}: the range must hold 25 °C, from which changes count, for example -40..85 °C")
    first, last = possible_angles(limit, low_c, high_c)
    if first > last:
        least = math.ceil(least_limit(low_c, high_c) * 1e7) / 10  # upward, so that the limit named is accepted
        raise LawError(
            f"{text!r}: no AT cut stays within ±{limit * 1e6:g} ppm from {low_c:g} to {high_c:g} °C; "
            f"the least possible is ±{least:.1f} ppm"
        )
    return at_law(limit, low_c, high_c, text)


def _fork(text: str, si_unit: str) -> Law | None:
    if not re.match(r"fork\b", text, re.I):
        return None
    if text.lower() == "fork":
        return ForkLaw((0.026e-6, 0.044e-6), (20.0, 30.0), "fork")
    found = re.fullmatch(
        rf"fork\s*-({_SIZE})\s*(?:±({_SIZE}))?\s*ppm/K(?:²|2|\^2)"
        rf"(?:\s+({_NUMBER})\s*(?:±({_SIZE}))?\s*(?:°\s*C|C))?",
        text,
        re.I,
    )
    if found is None:
        raise LawError(f"{text!r} is no tuning-fork law; write fork, or fork -0.035 ±0.009 ppm/K² 25 ±5 °C")
    beta, spread = float(found[1]) * 1e-6, float(found[2] or 0) * 1e-6
    turnover, width = (25.0, 5.0) if found[3] is None else (float(found[3]), float(found[4] or 0))
    if spread >= beta:
        raise LawError(f"{text!r}: the spread of the curvature must be smaller than the curvature")
    return ForkLaw((beta - spread, beta + spread), (turnover - width, turnover + width), text)


def _table(text: str, tables: Mapping[str, Sequence[tuple[float, float]]]) -> Law:
    name = text[len("table") :].strip()
    by_name = {key.strip().casefold(): points for key, points in tables.items()}
    points = by_name.get(name.casefold())
    if points is None:
        raise LawError(f"{text!r} names a sheet that is not there; add a sheet {name!r} with Temperature and Change")
    try:
        return table_law(points, text)
    except ValueError as error:
        raise LawError(str(error)) from None


def lower_ends(law: Law) -> Law:
    """A class-2 law with both ends in the negative half of its box; any other law as it is."""
    return replace(law, negative_half=True) if isinstance(law, Class2Law) else law


def whole_interval(law: Law) -> Law:
    """An AT law over every angle that its data sheet allows; any other law as it is."""
    return replace(law, angles=law.widest) if isinstance(law, AtLaw) else law
