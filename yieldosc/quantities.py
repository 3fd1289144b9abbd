"""Text ↔ SI numbers: the only parser and the only printer of quantities.

Read: ``4k7``, ``R47``, ``2R2``, ``4.7 kΩ``, ``0u1``, ``10uH``, ``2,2k``, ``100n``, ``4,7 мкФ``, ``32.768 kHz``,
``-40 °C``, ``99.5 %``, ``30 ppm``, ``10 years``. ``M`` is mega and ``m`` is milli; slips of case that leave one
meaning (``10UF``, ``4K7``, ``12mhz``) are accepted.
"""

from __future__ import annotations

import math
import re
import unicodedata
from dataclasses import dataclass
from decimal import Decimal, DecimalException


class QuantityError(ValueError):
    """A text that is no quantity; says what was found and how to write it."""


@dataclass(frozen=True, slots=True)
class Quantity:
    """A value in SI units; `si_unit` is None where the text named none ("100n")."""

    value: float
    si_unit: str | None


_SI_UNITS = {
    "Ω": ("Ω", "ohm", "ohms", "R", "Ом", "ом", "欧", "欧姆", "オーム"),
    "F": ("F", "Ф", "f", "farad"),
    "H": ("H", "Гн", "гн", "henry"),
    "Hz": ("Hz", "Гц", "гц", "赫兹"),
    "V": ("V", "В", "volt", "volts"),
    "A": ("A", "А"),
    "W": ("W", "Вт", "watt", "watts"),
    "S": ("S", "См"),
    "s": ("s", "sec", "second", "seconds", "с"),
}
_BARE_UNITS = {  # units without prefixes: spelling → SI unit and power of ten
    "%": ("1", -2), "percent": ("1", -2), "ppm": ("1", -6), "ppb": ("1", -9),
    "°c": ("°C", 0), "c": ("°C", 0), "degc": ("°C", 0),
    "years": ("years", 0), "year": ("years", 0), "yr": ("years", 0), "yrs": ("years", 0), "y": ("years", 0),
}  # fmt: skip
_CASE_COUNTS = ("S", "s")  # siemens and seconds differ by case alone
_PREFIXES = {
    "f": -15, "p": -12, "п": -12, "n": -9, "н": -9, "u": -6, "μ": -6, "мк": -6, "m": -3, "м": -3, "": 0,
    "k": 3, "к": 3, "M": 6, "М": 6, "Meg": 6, "meg": 6, "MEG": 6, "G": 9, "Г": 9,
    "K": 3, "К": 3, "U": -6, "N": -9, "P": -12, "Мк": -6, "МК": -6,
}  # fmt: skip
_PRINTED = {-15: "f", -12: "p", -9: "n", -6: "µ", -3: "m", 0: "", 3: "k", 6: "M", 9: "G"}
_EXAMPLES = {
    "Ω": "4.7 kΩ", "F": "10 nF", "H": "10 µH", "Hz": "8 MHz", "V": "3.3 V", "A": "10 mA", "W": "100 µW", "S": "5 mS",
    "s": "5 ms", "1": "5 %", "°C": "-40 °C", "years": "10 years",
}  # fmt: skip
_MINUS = str.maketrans({"−": "-", "–": "-", "‐": "-", "‑": "-", "‒": "-", "—": "-", "﹣": "-", "⁺": "+"})


def _unit_table() -> dict[str, tuple[str, int]]:
    """Every spelling of prefix and unit → SI unit and power of ten; the case of a prefix counts."""
    table = dict(_BARE_UNITS)
    for si_unit, spellings in _SI_UNITS.items():
        for spelling in spellings:
            slips = (spelling.upper(), spelling.lower(), spelling.title())
            for case in (spelling, *(() if si_unit in _CASE_COUNTS else slips)):
                for prefix, power in _PREFIXES.items():
                    table.setdefault(prefix + case, (si_unit, power))
    for spelling, meaning in _BARE_UNITS.items():
        table[spelling.upper()] = table[spelling.title()] = meaning
    table["mhz"] = table["мгц"] = ("Hz", 6)  # all in lower case: a slip, no board runs at millihertz; "mHz" is milli
    del table["h"]  # more often hours
    return table


_UNITS = _unit_table()
_PREFIX_ONLY = {k: v for k, v in _PREFIXES.items() if k and k != "f"}
_INFIX = {**_PREFIX_ONLY, "R": 0, "r": 0, "Ω": 0, "V": 0, "v": 0}
_NUMBER = r"[+-]?(?:\d[\d., ]*|[.,]\d+)(?:[eE][+-]?\d+)?"
_PLAIN = re.compile(rf"(?P<number>{_NUMBER})\s*(?P<unit>.*)", re.DOTALL)
_MIDDLE = re.compile(
    rf"(?P<sign>[+-]?)(?P<whole>\d+)\s?(?P<letter>{'|'.join(sorted(_INFIX, key=len, reverse=True))})\s?"
    r"(?P<part>\d+)\s*(?P<unit>\D*)"
)
_LEADING = re.compile(r"(?P<letter>[Rrpnuμ])(?P<part>\d+)(?P<unit>\D*)")


def normal(text: str) -> str:
    """Compatibility forms, minus signs, blanks and quotes of any script in one spelling (Ω, μ, '-', ' ')."""
    plain = unicodedata.normalize("NFKC", text).translate(_MINUS)
    return " ".join(plain.split()).strip("'\"")


def shown(text: str, length: int = 40) -> str:
    """The text as a message may quote it: one line, printable, cut."""
    line = "".join(c if c.isprintable() else " " for c in " ".join(text.split()))
    return f'"{line[: length - 1]}…"' if len(line) > length else f'"{line}"'


def parse_quantity(text: str, si_unit: str | None = None, *, decimal_comma: bool = False) -> Quantity:
    """Value in SI units. With `si_unit`, a text without unit is in that unit and another unit is refused.

    A comma before exactly three digits ("12,500") may be decimal or thousands: refused unless `decimal_comma`
    says how to read it. Raises QuantityError.
    """
    plain = normal(text)
    found = _middle_letter(plain) or _leading_letter(plain) or _number_and_unit(plain, si_unit, decimal_comma)
    if found is None:
        raise _unreadable(text, si_unit)
    number, power, unit = found
    if si_unit is not None and unit is not None and unit != si_unit:
        raise QuantityError(f"{shown(text)} is in {_named(unit)}, expected {_named(si_unit)}: {_example(si_unit)}")
    try:
        value = float(number.scaleb(power))
    except (DecimalException, OverflowError):
        raise _unreadable(text, si_unit) from None
    if not math.isfinite(value):
        raise _unreadable(text, si_unit)
    return Quantity(value, unit or si_unit)


Found = tuple[Decimal, int, str | None]


def _middle_letter(plain: str) -> Found | None:
    """4k7, 2R2, 3V3, 32k768, 4n7F."""
    match = _MIDDLE.fullmatch(plain)
    if match is None:
        return None
    letter, tail = match["letter"], match["unit"].strip()
    unit = {"R": "Ω", "r": "Ω", "Ω": "Ω", "V": "V", "v": "V"}.get(letter)
    if tail:
        named = _UNITS.get(tail)
        if named is None or named[1] != 0 or named[0] in ("°C", "years") or unit not in (None, named[0]):
            return None
        unit = named[0]
    return Decimal(f"{match['sign']}{match['whole']}.{match['part']}"), _INFIX[letter], unit


def _leading_letter(plain: str) -> Found | None:
    """R47, p68, u1."""
    match = _LEADING.fullmatch(plain)
    if match is None:
        return None
    unit = "Ω" if match["letter"] in "Rr" else None
    tail = match["unit"].strip()
    if tail:
        named = _UNITS.get(tail)
        if named is None or named[1] != 0 or unit not in (None, named[0]):
            return None
        unit = named[0]
    return Decimal(f"0.{match['part']}"), _INFIX[match["letter"]], unit


def _number_and_unit(plain: str, si_unit: str | None, decimal_comma: bool) -> Found | None:
    match = _PLAIN.fullmatch(plain)
    number = None if match is None else _number(match["number"].strip(), plain, decimal_comma)
    if match is None or number is None:
        return None
    tail = match["unit"].replace(" ", "")
    if not tail:
        return number, 0, None
    if tail in ("E", "e") and si_unit in (None, "Ω"):
        return number, 0, "Ω"  # "470E": E for ohm where nothing follows
    if tail in _PREFIX_ONLY and si_unit not in ("s", "S", "°C", "1", "years"):
        return number, _PREFIX_ONLY[tail], None
    if tail == "f" and si_unit in (None, "F"):
        figure = match["number"].strip()
        raise QuantityError(
            f'{shown(plain)} may be femtofarads or farads; write "{figure} fF" for femtofarads, "{figure} F" for farads'
        )
    named = _UNITS.get(tail) or _UNITS.get(tail.rstrip("."))
    return None if named is None else (number, named[1], named[0])


def _number(text: str, whole: str, decimal_comma: bool) -> Decimal | None:
    """Decimal point or comma; thousands marks where they can be nothing else."""
    mantissa, _, exponent = text.replace("E", "e").partition("e")
    mantissa = mantissa.strip()
    if " " in mantissa:
        if not re.fullmatch(r"[+-]?\d{1,3}( \d{3})+([.,]\d+)?", mantissa):
            return None
        mantissa = mantissa.replace(" ", "")
    commas, dots = mantissa.count(","), mantissa.count(".")
    if commas and dots:
        first, last = (",", ".") if mantissa.rfind(".") > mantissa.rfind(",") else (".", ",")
        if not re.fullmatch(rf"[+-]?\d{{1,3}}(\{first}\d{{3}})+\{last}\d+", mantissa):
            return None
        mantissa = mantissa.replace(first, "").replace(last, ".")
    elif commas > 1 or dots > 1:
        if not re.fullmatch(r"[+-]?[1-9]\d{0,2}([.,]\d{3})+", mantissa):
            return None
        mantissa = mantissa.replace(",", "").replace(".", "")
    elif commas:
        if not decimal_comma and re.fullmatch(r"[+-]?[1-9]\d{0,2},\d{3}", mantissa):
            bare = mantissa.replace(",", "")
            raise QuantityError(
                f"{shown(whole)} can be read with a decimal comma or with a thousands comma; "
                f"write {mantissa.replace(',', '.')} or {bare}"
            )
        mantissa = mantissa.replace(",", ".")
    try:
        return Decimal(mantissa + (f"e{exponent}" if exponent else ""))
    except DecimalException:
        return None


def _unreadable(text: str, si_unit: str | None) -> QuantityError:
    if not text.strip():
        return QuantityError(f"the cell is empty; write {_example(si_unit)}")
    kind = "a quantity" if si_unit is None else f"a quantity in {_named(si_unit)}"
    return QuantityError(f"{shown(text)} is not {kind}; write {_example(si_unit)}")


def _named(si_unit: str) -> str:
    return "% or ppm" if si_unit == "1" else si_unit


def _example(si_unit: str | None) -> str:
    return f'for example "{_EXAMPLES.get(si_unit or "Ω", "1.5")}"'


def parse_fraction(text: str) -> float:
    """A fraction written with its unit: "99.5 %", "30 ppm". A bare number is refused: 5 or 0.05? QuantityError."""
    plain = normal(text)
    try:
        bare = parse_quantity(plain).si_unit is None
    except QuantityError:
        bare = False
    if bare:
        raise QuantityError(f'{shown(text)} has no unit; write "{plain} %" or "{plain} ppm"')
    return parse_quantity(text, "1").value


def format_quantity(value: float, si_unit: str | None, digits: int = 4) -> str:
    """ "4.7 kΩ", "10 nF", "1.591 kHz": `digits` significant digits without trailing zeros.

    What is printed reads back as exactly the value rounded to those digits.
    """
    suffix = "" if si_unit in (None, "1") else str(si_unit)
    if not math.isfinite(value):
        return f"{value:g} {suffix}".strip()
    number = Decimal(f"{value:.{digits - 1}e}")
    if number == 0:
        return f"0 {suffix}".strip()
    power = number.adjusted() // 3 * 3
    if si_unit in ("1", "°C", "years"):
        power = 0
    if power not in _PRINTED or (suffix == "" and power == -15):
        return f"{number.normalize():e} {suffix}".strip().replace("e+", "e")
    mantissa = f"{number.scaleb(-power).normalize():f}"
    return f"{mantissa} {_PRINTED[power]}{suffix}".strip()


# Letter → low and high in percent: IEC 60062:2016 by way of a calculator's table (seen); E, H, N and asymmetric ones
# from memory. Below 10 pF some letters of capacitors are in picofarads (maker's table and an EIA list, both seen).
TOLERANCE_LETTERS = {
    "E": (-0.005, 0.005), "L": (-0.01, 0.01), "P": (-0.02, 0.02), "W": (-0.05, 0.05), "B": (-0.1, 0.1),
    "C": (-0.25, 0.25), "D": (-0.5, 0.5), "F": (-1.0, 1.0), "G": (-2.0, 2.0), "H": (-3.0, 3.0), "J": (-5.0, 5.0),
    "K": (-10.0, 10.0), "M": (-20.0, 20.0), "N": (-30.0, 30.0), "Q": (-10.0, 30.0), "T": (-10.0, 50.0),
    "S": (-20.0, 50.0), "Z": (-20.0, 80.0),
}  # fmt: skip
SMALL_CAPACITOR_LETTERS_PF = {"B": 0.1, "C": 0.25, "D": 0.5, "F": 1.0, "G": 2.0}
SMALL_CAPACITOR_F = 10e-12

_PLUS_MINUS = re.compile(r"\+\s?/?\s?-|-\s?/\s?\+|±")
_SIZE = r"(?:\d+(?:[.,]\d+)*|[.,]\d+)"  # a dot or a comma belongs to it only before a figure: "-3..+1 %"
_TWO_SIDES = re.compile(
    rf"(?P<one>[+-]\s?{_SIZE})\s?(?P<unit_one>[^\d\s+\-/.,;…]*?)\s?(?:/|,|;|…|\.\.\.?|to)?\s?"
    rf"(?P<two>[+-]\s?{_SIZE})\s?(?P<unit_two>\S.*)?"
)


def parse_tolerance(text: str, *, nominal: float | None = None, si_unit: str | None = None) -> tuple[float, float]:
    """Low and high as fractions of the nominal value, low ≤ 0 ≤ high.

    ``±5 %``, ``%5``, ``<= 5 %``, ``+80/-20 %``, ``-0/+50 ppm``, letters of IEC 60062, and absolute ones
    (``±0.25 pF``), which need `nominal` and its `si_unit`. A number without unit or sign of only one side is refused.
    """
    plain = normal(text)
    letter = plain.upper()
    if letter in TOLERANCE_LETTERS:
        return letter_tolerance(letter, nominal if si_unit == "F" else None)
    sides = _TWO_SIDES.fullmatch(plain)
    if sides is not None and sides["one"][0] != sides["two"][0]:
        unit = sides["unit_two"] or sides["unit_one"] or ""
        bounds = sorted(
            _part(side.replace(" ", "") + (own or unit), text, nominal, si_unit)
            for side, own in ((sides["one"], sides["unit_one"]), (sides["two"], sides["unit_two"]))
        )
        return _checked(bounds[0], bounds[1], text)
    bare = re.sub(r"^(<=|≤|<|max\.?|tol\.?|tolerance)\s*", "", plain, flags=re.IGNORECASE)
    bare, signs = _PLUS_MINUS.subn("", bare)
    bare = re.sub(r"^%\s?([\d.,]+)$", r"\1%", bare.strip())
    if not signs and bare[:1] in ("+", "-"):
        raise QuantityError(f'{shown(text)} names one side only; write "±5 %" or "-0/+50 ppm"')
    size = _part(bare, text, nominal, si_unit)
    return _checked(-size, size, text)


def letter_tolerance(letter: str, capacitance_f: float | None = None) -> tuple[float, float]:
    """A tolerance letter of IEC 60062 as fractions; B, C, D, F and G are absolute for capacitors below 10 pF."""
    if capacitance_f is not None and 0 < capacitance_f < SMALL_CAPACITOR_F and letter in SMALL_CAPACITOR_LETTERS_PF:
        size = SMALL_CAPACITOR_LETTERS_PF[letter] * 1e-12 / capacitance_f
        return -size, size
    low, high = TOLERANCE_LETTERS[letter]
    return float(Decimal(str(low)).scaleb(-2)), float(Decimal(str(high)).scaleb(-2))


def _part(part: str, text: str, nominal: float | None, si_unit: str | None) -> float:
    """One side as a fraction; an absolute one is divided by the nominal value."""
    try:
        quantity = parse_quantity(part, decimal_comma=True)
    except QuantityError:
        raise _no_tolerance(text) from None
    if quantity.si_unit == "1":
        return quantity.value
    if quantity.si_unit is None:
        if quantity.value == 0 and normal(part).strip("+-0.,") == "":
            return 0.0
        raise QuantityError(f'{shown(text)} has no unit; write "{part} %" or "{part} ppm"')
    if nominal is None or si_unit is None:
        raise QuantityError(f'{shown(text)} is absolute and the value is not known; write it in %, for example "±5 %"')
    if quantity.si_unit != si_unit or nominal <= 0:
        raise QuantityError(
            f"{shown(text)} is in {_named(quantity.si_unit)} but the value is in {_named(si_unit)}; "
            'write it in %, for example "±5 %"'
        )
    return quantity.value / nominal


def _no_tolerance(text: str) -> QuantityError:
    if not text.strip():
        return QuantityError('the cell is empty; write a tolerance, for example "±5 %"')
    return QuantityError(f'{shown(text)} is not a tolerance; write for example "±5 %", "+80/-20 %", "±0.25 pF" or "J"')


def _checked(low: float, high: float, text: str) -> tuple[float, float]:
    if not low <= 0 <= high:
        raise QuantityError(f'{shown(text)} does not hold the nominal value; write for example "-20/+80 %"')
    if low <= -1:
        raise QuantityError(f"{shown(text)} lets the value reach zero; write a tolerance below 100 %")
    return low + 0.0, high + 0.0


def parse_deviation(text: str, target_hz: float) -> float:
    """A frequency limit [Hz]: "-50 ppm" and "2 %" are deviations from the target, "7.9996 MHz" is the limit itself."""
    if _PLUS_MINUS.match(normal(text)):
        raise QuantityError(f'{shown(text)} names two limits; write one in each cell: "-50 ppm" and "50 ppm"')
    quantity = parse_quantity(text)
    if quantity.si_unit == "1":
        return target_hz * (1 + quantity.value)
    if quantity.si_unit != "Hz":
        raise QuantityError(f'{shown(text)} is not a frequency limit; write "-50 ppm", "-1 %" or "7.9996 MHz"')
    if quantity.value <= 0:
        raise QuantityError(f'{shown(text)} is no frequency; write the limit itself, "7.9996 MHz", or "-50 ppm"')
    return quantity.value
