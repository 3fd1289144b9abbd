"""The facts in a cell of free text: which number is the value, which the voltage, the size, the tolerance?

``0.1uF/50V/X7R``, ``680R 5% 0603 1/10W 100ppm``, ``4.7uf6.3V``, ``Crystal 32.768kHz ±20ppm 12.5pF 70kΩ``.
Facts are taken out one sort after the other, the unmistakable ones first; what is left may be the value.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from yieldosc.parts.codes import class1_code, class2_code
from yieldosc.quantities import QuantityError, normal, parse_quantity, parse_tolerance

_N = r"(?:\d+(?:[.,]\d+)?|[.,]\d+)"
_PLUS_MINUS = r"(?:±|\+\s?/?\s?-|-\s?/\s?\+|<=|≤|<)"
_DIELECTRIC = re.compile(
    r"(?<![A-Za-zА-Яа-я\d])(C[0O]G|NP[0O]|МП[0O0О]|[XYZ][2-9][A-Z]|[CULMPRSTV][0-9][GHJKL]|CH|CG)(?![A-Za-z\d])"
)
_PER_KELVIN = re.compile(
    rf"(?P<sign>{_PLUS_MINUS}|[+-])?\s?(?P<size>{_N})\s?ppm\s?/\s?(?:°|deg\.?\s?)?\s?[CK](?:elvin)?(?![A-Za-z])",
    re.IGNORECASE,
)
_RANGE_C = re.compile(
    r"(?P<low>[+-]?\d{1,3})\s?(?:°|deg)?\s?C?\s?(?:~|to|\.{2,3}|…|/|-(?=\s?\+))\s?\+?(?P<high>\d{2,3})\s?(?:°\s?C|deg\s?C|℃|C\b)",
    re.IGNORECASE,
)
_SIDES = re.compile(rf"(?:\+\s?{_N}\s?%?\s?[/,]?\s?-\s?{_N}|-\s?{_N}\s?%?\s?[/,]?\s?\+\s?{_N})\s?%")
_PERCENT = re.compile(rf"{_PLUS_MINUS}?\s?(?:{_N}\s?%|(?<![\d.,])%\s?{_N}(?![\d.,]*\s?%))")
_PPM = re.compile(
    rf"{_PLUS_MINUS}?\s?(?P<size>{_N})\s?ppm(?!\s?/\s?(?:°|deg)?\s?[CK])(?=(?P<after>[^,;/]{{0,24}}))", re.IGNORECASE
)
_ABSOLUTE = re.compile(rf"(?:±|\+\s?/?\s?-)\s?{_N}\s?[pnuμ]F", re.IGNORECASE)
_AT_FREQUENCY = re.compile(rf"@\s?{_N}\s?[kMG]?Hz", re.IGNORECASE)
_ENDLESS = re.compile(r"\d{20,}")  # no number of a BOM; would make the patterns below slow
_URL = re.compile(r"(?:https?://|www\.)\S+", re.IGNORECASE)
_POWER_SHARE = re.compile(r"(?<!\d)\d{1,2}\s?/\s?\d{1,2}\s?W(?![A-Za-z])", re.IGNORECASE)
_SIZE = re.compile(
    r"(?<![\w.,])(01005|0[2-9]\d\d|1008|1[28]\d\d|20[12]\d|2[25]\d\d|3216|3225|3528|5032|6032|7343)(?![\w.,]|\s?[A-Za-zΩμ%])"
)
_OHM = r"(?:ohms?|Ω|Ом|ом|Ohms?|OHMS?|欧)"
_UNITS = rf"(?:{_OHM}|Hz|HZ|hz|Гц|F|Ф|f|H|h|Гн|V|v|В|A|W|w|Вт)"
_PREFIX = r"(?:Meg|MEG|meg|мк|МК|[pnuμmkKMGUNPпнмкМКГ])"
_WITH_UNIT = re.compile(
    rf"(?<![A-Za-z\d.,-])(?P<text>\d+[kKMRr]\d+\s?{_OHM}|\d+[munpμ]\d+\s?[FH]|{_N}\.?\s?-?{_PREFIX}?\s?{_UNITS})(?:DC|AC)?(?![A-Za-zА-Яа-я])"
)
_GLUED = re.compile(rf"(?<![A-Za-z\d.,-])(?P<text>{_N}\s?{_PREFIX}?{_UNITS})(?=\d)")
_BARE = re.compile(
    rf"(?<![\w.,%±/-])(?P<text>\d+[kKMmunpμRrVv]\d+|[Rr]\d{{1,3}}|{_N}\s?(?:{_PREFIX}|R|r|E)|{_N}[kKMRr]\s?(?=[FGJ]\b))(?![\w%]|\.\d)"
)


@dataclass(frozen=True, slots=True)
class Amount:
    """A number of the text with its SI unit; None for "100n", which has none."""

    text: str
    value: float
    si_unit: str | None
    comma: bool = False  # a comma before three digits was taken for a decimal one


@dataclass(slots=True)
class Facts:
    """What one cell says. Percentages and ppm in the order written."""

    amounts: list[Amount] = field(default_factory=list)
    bare: list[Amount] = field(default_factory=list)  # "100n", "4k7": the unit follows from the kind
    percents: list[str] = field(default_factory=list)
    absolutes: list[str] = field(default_factory=list)
    ppms: list[tuple[str, float, str]] = field(default_factory=list)  # text, size in ppm, the words behind it
    slopes: list[str] = field(default_factory=list)  # "±100 ppm/K"
    dielectric: str | None = None
    range_c: tuple[float, float] | None = None

    def of(self, si_unit: str) -> list[Amount]:
        """Amounts in that SI unit."""
        return [amount for amount in self.amounts if amount.si_unit == si_unit]


class _Text:
    """Text from which matches are taken out, leaving a gap that joins nothing."""

    def __init__(self, text: str) -> None:
        self.rest = text

    def take(self, pattern: re.Pattern[str], gap: str = "|") -> list[re.Match[str]]:
        found = list(pattern.finditer(self.rest))
        for match in reversed(found):
            self.rest = f"{self.rest[: match.start()]} {gap} {self.rest[match.end() :]}"
        return found


def read_facts(text: str) -> Facts:
    """Every fact of a cell's text."""
    plain = _ENDLESS.sub("…", _URL.sub(" ", text[:2000]).replace("_", " "))
    facts, rest = Facts(), _Text(normal(plain))
    rest.take(_AT_FREQUENCY)
    for match in rest.take(_PER_KELVIN):
        sign = match["sign"] or "±"
        facts.slopes.append(f"{sign if sign in ('+', '-') else '±'}{match['size'].replace(',', '.')} ppm/K")
    for match in rest.take(_RANGE_C, "over range"):
        low, high = float(match["low"]), float(match["high"])
        facts.range_c = (low, high) if low < high else facts.range_c
    facts.absolutes += [match[0] for match in rest.take(_ABSOLUTE)]
    facts.percents += [match[0].strip() for match in rest.take(_SIDES)]
    facts.percents += [match[0].strip() for match in rest.take(_PERCENT)]
    _take_ppm(facts, rest)
    rest.take(_POWER_SHARE)
    _take_dielectric(facts, rest)
    for pattern in (_GLUED, _WITH_UNIT):
        facts.amounts += [amount for match in rest.take(pattern) if (amount := _amount(match["text"])) is not None]
    rest.take(_SIZE)
    facts.bare += [amount for match in rest.take(_BARE) if (amount := _amount(match["text"])) is not None]
    return facts


def _take_ppm(facts: Facts, rest: _Text) -> None:
    for match in rest.take(_PPM):
        after = match["after"].casefold().partition("ppm")[0]
        facts.ppms.append((match[0].strip(), float(match["size"].replace(",", ".")), after))


def _take_dielectric(facts: Facts, rest: _Text) -> None:
    for match in rest.take(_DIELECTRIC):
        code = match[1].upper().replace("О", "0").replace("МП0", "NP0").replace("МПO", "NP0")
        code = {"COG": "C0G", "NPO": "NP0"}.get(code, code)
        if class1_code(code) is not None or class2_code(code) is not None:
            facts.dielectric = facts.dielectric or code


def _amount(text: str) -> Amount | None:
    plain = re.sub(r"(?<=\d)-(?=[A-Za-z])", "", text.strip())
    plain = re.sub(r"(?<=\d)[.,](?=\s?[A-Za-zΩμ])", "", plain)
    try:
        quantity = parse_quantity(plain, decimal_comma=True)
    except QuantityError:
        return None
    comma = re.match(r"[1-9]\d{0,2},\d{3}(?!\d)", plain) is not None
    return Amount(text.strip(), quantity.value, quantity.si_unit, comma)


def percent_bounds(text: str) -> tuple[float, float] | None:
    """A tolerance text as fractions; None where it is none."""
    try:
        return parse_tolerance(text)
    except QuantityError:
        return None
