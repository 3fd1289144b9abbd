"""One row of a BOM → what it says of the part: kind, value, tolerance, law, load, ESR, fitted or not.

Words of the row come first; what is left open may be decoded from a part number and is marked so.
"""

from __future__ import annotations

import re

from yieldosc.parts.codes import class1_code, class2_code
from yieldosc.parts.parameter import Given, Kind
from yieldosc.quantities import QuantityError, format_quantity, parse_quantity, shown
from yieldosc.sheets.cells import Amount
from yieldosc.sheets.cross_checks import check_footprint, check_link, check_thermistor
from yieldosc.sheets.headings import Meaning
from yieldosc.sheets.kinds import (
    KIND_OF_UNIT,
    SI_UNIT,
    article,
    kind_from_letters,
    kind_from_words,
    letters_of,
    settled_kind,
)
from yieldosc.sheets.partfacts import VALUED, PartFacts, Source, close
from yieldosc.sheets.partnumbers import decode_part_number
from yieldosc.sheets.traits import read_crystal, read_law, read_tolerance

# Text columns in the order in which they are believed.
_ORDER: tuple[Meaning, ...] = (
    "value",
    "frequency",
    "name",
    "description",
    "kind",
    "note",
    "part_number",
    "supplier_number",
)
_WORDY: tuple[Meaning, ...] = ("value", "name", "description", "kind", "note", "part_number")
_BARE_LETTERS: dict[Kind, str] = {
    "resistor": "kKMRrmEк", "capacitor": "pnuμmPNUFпнм", "inductor": "nuμmUNHнм", "crystal": "kKM",
}  # fmt: skip
_NOT_FITTED = re.compile(
    r"(?<![A-Za-z])(dnp|dnf|dni|dns|not[ _-]?(populated|fitted|placed|mounted|stuffed)|no[ _-]?stuff|unpopulated|"
    r"do not (populate|fit|place|stuff|install|mount)|"
    r"nicht best(ü|ue)ckt|не устанавливать|不贴|不焊|未実装)(?![A-Za-z])",
    re.IGNORECASE,
)


def understand(designator: str, sources: list[Source]) -> PartFacts:
    """Everything that the row's cells say of the part of that designator."""
    part = PartFacts()
    ordered = sorted(
        (s for s in sources if s.meaning in _ORDER), key=lambda s: (_ORDER.index(s.meaning or "note"), s.column)
    )
    part.fitted = _fitted(sources)
    part.kind = _kind(designator, ordered, part)
    numbers = [s for s in sources if s.meaning == "part_number" and not s.cell.blank]
    part.part_number = numbers[0].cell.text.strip() if numbers else None
    check_footprint(designator, part, sources)
    check_thermistor(designator, part, ordered)
    if part.kind not in VALUED:
        return part
    _value(part, ordered)
    read_tolerance(part, sources, ordered)
    read_law(part, sources, ordered)
    if part.kind == "crystal":
        read_crystal(part, sources, ordered)
    _decode(part, ordered)
    check_link(part, sources)
    return part


def _fitted(sources: list[Source]) -> bool:
    for source in sources:
        text = source.cell.text.strip().casefold()
        if source.meaning == "not_fitted" and text not in ("", "0", "no", "n", "false", "-", "nein", "fitted"):
            return False
        if source.meaning == "fitted" and text in (
            "no",
            "n",
            "0",
            "false",
            "nein",
            "not fitted",
            "dnp",
            "нет",
            "否",
            "x no",
        ):
            return False
        if source.meaning in ("value", "name", "description", "note", "part_number", "fitted", "quantity") and (
            _NOT_FITTED.search(text) or (source.meaning == "value" and text in ("nc", "n.c.", "nf", "np", "n/c"))
        ):
            return False
        if source.meaning in ("value", "name") and re.search(
            r"(?:^|[\s,/(])(?:NC|NF|NP)\)?$", source.cell.text.strip()
        ):
            return False
    return True


def _kind(designator: str, sources: list[Source], part: PartFacts) -> Kind:
    """By letter, then overridden by what the row says; an override against a clear letter is a contradiction."""
    by_letter = kind_from_letters(designator)
    words = " ; ".join(s.cell.text for s in sources if s.meaning in _WORDY and s.meaning != "part_number")
    by_words = kind_from_words(words)
    telling = [s.facts for s in sources if s.meaning in ("value", "name", "description")]
    stated = [amount.si_unit for facts in telling for amount in (*facts.amounts, *facts.bare)]
    units = {unit for unit in stated if unit in KIND_OF_UNIT}
    hertz = "Hz" in stated or any(s.meaning == "frequency" and not s.cell.blank for s in sources)
    kind = settled_kind(letters_of(designator), by_letter, by_words, units, hertz)
    if kind != by_letter and by_letter in ("resistor", "capacitor", "inductor") and kind in VALUED:
        part.remark(
            "warning",
            "bom-kind-contradiction",
            f"{designator} has the letter of a {by_letter}, but its line says "
            f"{kind}; it was read as {kind}: correct the designator or the line",
        )
    elif _named_otherwise(kind, by_letter, by_words, units):
        part.remark(
            "warning",
            "bom-kind-contradiction",
            f"{designator} has the letter of {article(kind)}, but its line names {article(by_words or kind)}; it was "
            f"read as {kind}: correct the designator or the line",
        )
    if (
        kind == "crystal"
        and re.search(r"resonator|резонатор", words, re.IGNORECASE)
        and "crystal" not in words.casefold()
    ):
        part.remark(
            "warning",
            "bom-resonator",
            f"{designator} is called a resonator; it was read as a crystal: a ceramic "
            "resonator needs its own tolerance and temperature law",
        )
    return kind


def _named_otherwise(kind: Kind, by_letter: Kind, by_words: Kind | None, units: set[str]) -> bool:
    """True where words name another passive part, and no unit confirms the letter."""
    passive = ("resistor", "capacitor", "inductor")
    return (
        kind == by_letter
        and kind in passive
        and by_words in passive
        and by_words != kind
        and (SI_UNIT[kind] not in units)
    )


def _value(part: PartFacts, sources: list[Source]) -> None:
    """The first value in the order of trust; further ones that differ are contradictions."""
    unit = SI_UNIT[part.kind]
    has_value_column = any(s.meaning in ("value", "frequency") and not s.cell.blank for s in sources)
    found: tuple[Source, Amount] | None = None
    for source in sources:
        if source.meaning == "supplier_number" or (source.meaning == "part_number" and not source.facts.of(unit)):
            continue
        plain = source.meaning in ("value", "frequency") or (source.meaning == "name" and not has_value_column)
        amount = _candidate(part.kind, source, plain)
        if amount is None:
            continue
        if found is None:
            found = (source, amount)
        elif not close(found[1].value, amount.value) and amount in source.facts.amounts:
            part.remark(
                "warning",
                "bom-value-contradiction",
                f"{shown(found[1].text)} stands beside {shown(amount.text)}; "
                f"{format_quantity(found[1].value, unit)} was read: correct the wrong one",
                source,
            )
    if found is None:
        return
    source, amount = found
    part.value = amount.value
    part.given["value"] = Given(amount.text, source.place)
    if amount.comma and not (part.kind == "crystal" and 1e4 <= amount.value <= 3e8):
        part.remark(
            "warning",
            "bom-comma",
            f"{shown(amount.text)} was read with a decimal comma as "
            f"{format_quantity(amount.value, unit)}; write a point where that is wrong",
            source,
        )


def _candidate(kind: Kind, source: Source, plain: bool) -> Amount | None:
    """The amount of a cell that can be the value: with unit, with a fitting prefix, or (`plain`) a bare number."""
    unit = SI_UNIT[kind]
    stated = source.facts.of(unit)
    if stated:
        return stated[0]
    letters = _BARE_LETTERS[kind]
    for amount in source.facts.bare:
        marks = re.sub(r"[\d.,\s]", "", amount.text)
        if not plain and amount.text[0] in "Rr":
            continue  # "R4" in running text is a designator
        if amount.si_unit in (None, unit) and marks and all(c in letters for c in marks):
            return amount
    if plain and kind == "resistor":
        return _bare_number(source)
    return None


def _bare_number(source: Source) -> Amount | None:
    """Ohms: a number cell, or a text that begins with a number standing alone ("0/WAKE", "100 0.1%")."""
    match = re.match(
        r"\s*(\d+(?:[.,]\d+)?)(?=\s*(?:$|[/;(]|,\s|\s+[\d±+<]+[^\s]*\s*%))", source.cell.text.replace("_", " ")
    )
    if match is None or re.fullmatch(r"0\d{3,4}", match[1]):
        return None
    try:
        return Amount(match[1], parse_quantity(match[1], decimal_comma=True).value, None)
    except QuantityError:
        return None


def _decode(part: PartFacts, ordered: list[Source]) -> None:
    """What the words left open, from the first cell whose part number can be read; others must agree with it."""
    unit, first = SI_UNIT[part.kind], None
    for source in sorted(ordered, key=lambda s: s.meaning != "part_number"):
        found = decode_part_number(source.cell.text, part.kind)
        if found is None:
            continue
        if part.value is not None and found.value is not None and not close(part.value, found.value):
            part.remark(
                "warning",
                "bom-number-contradiction",
                f"the part number {shown(found.text)} reads as "
                f"{format_quantity(found.value, unit)}, the line says {format_quantity(part.value, unit)}; the line "
                "was taken: correct the wrong one",
                source,
            )
        elif first is None or first.text == found.text or (found.tolerance, found.law) != (first.tolerance, first.law):
            for name, fact in (("value", found.value), ("tolerance", found.tolerance), ("temperature_law", found.law)):
                _fill(part, name, fact, source, found.text)
        first = first or found
    for source in ordered:
        if part.law is None and part.kind == "capacitor" and source.facts.dielectric:
            _fill(part, "temperature_law", source.facts.dielectric, source, source.facts.dielectric)


def _fill(part: PartFacts, name: str, found: object, source: Source, text: str) -> None:
    """Takes over a decoded fact where nothing is known yet; a known one that differs is a contradiction."""
    attribute = "law" if name == "temperature_law" else name
    held = getattr(part, attribute)
    if found is None:
        return
    if held is None:
        setattr(part, attribute, found)
        part.decoded.append(name)
        part.given[name] = Given(text, source.place)
    elif _differs(held, found):
        words = "temperature law" if name == "temperature_law" else name
        part.remark(
            "warning",
            "bom-number-contradiction",
            f"the part number {shown(text)} reads as another {words} than "
            f"{shown(part.given[name].text)}; the latter was taken: correct the wrong one",
            source,
        )


def _differs(held: object, found: object) -> bool:
    if isinstance(held, tuple) and isinstance(found, tuple):
        return any(not close(a, b) for a, b in zip(held, found, strict=True))
    if isinstance(held, str) and isinstance(found, str):
        known = class1_code(held) is not None or class2_code(held) is not None
        return known and held.replace("NP0", "C0G") != found
    return False
