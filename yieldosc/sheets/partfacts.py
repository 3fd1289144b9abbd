"""One row of a BOM → what it says of the part: kind, value, tolerance, law, load, ESR, fitted or not.

Words of the row come first; what is left open may be decoded from a part number and is marked so.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, field

from yieldosc.errors import Level
from yieldosc.parts.codes import class1_code, class2_code
from yieldosc.parts.parameter import Given, Kind
from yieldosc.quantities import QuantityError, format_quantity, parse_quantity, parse_tolerance, shown
from yieldosc.sheets.cells import Amount, Facts, percent_bounds, read_facts
from yieldosc.sheets.grid import Cell
from yieldosc.sheets.headings import Meaning
from yieldosc.sheets.kinds import KIND_OF_UNIT, SI_UNIT, kind_from_letters, kind_from_words, letters_of
from yieldosc.sheets.partnumbers import decode_part_number

VALUED: tuple[Kind, ...] = ("resistor", "capacitor", "inductor", "crystal")
# Text columns in the order in which they are believed.
_ORDER: tuple[Meaning, ...] = (
    "value", "frequency", "name", "description", "kind", "note", "part_number", "supplier_number",
)  # fmt: skip
_WORDY: tuple[Meaning, ...] = ("value", "name", "description", "kind", "note", "part_number")
_BARE_LETTERS: dict[Kind, str] = {
    "resistor": "kKMRrmEк", "capacitor": "pnuμmPNUFпнм", "inductor": "nuμmUNHнм", "crystal": "kKM",
}  # fmt: skip
_NOT_FITTED = re.compile(
    r"(?<![A-Za-z])(dnp|dnf|dni|dns|not[ _-]?(populated|fitted|placed|mounted|stuffed)|no[ _-]?stuff|unpopulated|"
    r"do not (populate|fit|place|stuff|install|mount)|nicht best(ü|ue)ckt|не устанавливать|不贴|不焊|未実装)(?![A-Za-z])",
    re.IGNORECASE,
)


@dataclass(frozen=True, slots=True)
class Source:
    """One cell of the row: its meaning, heading, cell, place as text, and the facts in it."""

    meaning: Meaning | None
    heading: str
    column: int
    cell: Cell
    place: str
    facts: Facts


@dataclass(slots=True)
class PartFacts:
    """What a row says of one part, with remarks (level, code, text, column)."""

    kind: Kind = "other"
    value: float | None = None
    tolerance: tuple[float, float] | None = None
    law: str | None = None
    load_f: float | None = None
    esr_ohm: float | None = None
    fitted: bool = True
    part_number: str | None = None
    decoded: list[str] = field(default_factory=list)
    given: dict[str, Given] = field(default_factory=dict)
    remarks: list[tuple[Level, str, str, int | None]] = field(default_factory=list)

    def remark(self, level: Level, code: str, text: str, source: Source | None = None) -> None:
        self.remarks.append((level, code, text, None if source is None else source.column))


def make_source(meaning: Meaning | None, heading: str, column: int, cell: Cell, place: str) -> Source:
    """A source with the facts of its text read."""
    return Source(meaning, heading, column, cell, place, read_facts(cell.text))


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
    if part.kind not in VALUED:
        return part
    _value(part, ordered)
    _tolerance(part, sources, ordered)
    _law(part, sources, ordered)
    if part.kind == "crystal":
        _crystal(part, sources, ordered)
    _decode(part, ordered)
    return part


def _fitted(sources: list[Source]) -> bool:
    for source in sources:
        text = source.cell.text.strip().casefold()
        if source.meaning == "not_fitted" and text not in ("", "0", "no", "n", "false", "-", "nein", "fitted"):
            return False
        if source.meaning == "fitted" and text in ("no", "n", "0", "false", "nein", "not fitted", "dnp", "нет", "否", "x no"):
            return False
        if source.meaning in ("value", "name", "description", "note", "part_number", "fitted", "quantity") and (
            _NOT_FITTED.search(text) or (source.meaning == "value" and text in ("nc", "n.c.", "nf", "np", "n/c"))
        ):
            return False
        if source.meaning in ("value", "name") and re.search(r"(?:^|[\s,/(])(?:NC|NF|NP)\)?$", source.cell.text.strip()):
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
    kind = _settled(letters_of(designator), by_letter, by_words, units, hertz)
    if kind != by_letter and by_letter in ("resistor", "capacitor", "inductor") and kind in VALUED:
        part.remark("warning", "bom-kind-contradiction", f"{designator} has the letter of a {by_letter}, but its line says "
                    f"{kind}; it was read as {kind}: correct the designator or the line")  # fmt: skip
    if kind == "crystal" and re.search(r"resonator|резонатор", words, re.IGNORECASE) and "crystal" not in words.casefold():
        part.remark("warning", "bom-resonator", f"{designator} is called a resonator; it was read as a crystal: a ceramic "
                    "resonator needs its own tolerance and temperature law")  # fmt: skip
    return kind


def _settled(letters: str, by_letter: Kind, by_words: Kind | None, units: set[str], hertz: bool) -> Kind:
    own = SI_UNIT.get(by_letter)
    if by_letter in ("resistor", "capacitor", "inductor"):
        if own in units or (by_words == by_letter):
            return by_letter
        for unit in units - {"Ω"} or units:
            if by_words == KIND_OF_UNIT[unit] or (unit != "Ω" and by_words is None):
                return KIND_OF_UNIT[unit]
        if by_words == "crystal" and hertz and not units:
            return "crystal"
        return "other" if by_words == "other" and by_letter == "inductor" else by_letter
    if by_letter == "crystal":
        return "ic" if by_words == "ic" else ("other" if by_words == "other" and not hertz else "crystal")
    if letters in ("FB", "FL", "F", "LED", "TP", "J", "P", "H"):
        return by_letter
    if by_words == "crystal" and (hertz or by_letter == "other"):
        return "crystal"
    if by_letter == "other":
        if by_words in ("resistor", "capacitor", "inductor", "diode", "transistor", "ic"):
            return by_words
        if by_words is None and len(units) == 1:
            return KIND_OF_UNIT[next(iter(units))]
        return "crystal" if hertz and letters in ("X", "G", "ZQ", "XO", "") and by_words is None else "other"
    if by_letter == "transistor" and by_words is None and hertz and letters == "Q":
        return "crystal"
    if by_words == "other":
        return "other"
    if by_words in ("resistor", "capacitor", "inductor") and SI_UNIT[by_words] in units and by_letter != "diode":
        return by_words
    return by_letter


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
        elif not _close(found[1].value, amount.value) and amount.si_unit is not None:
            part.remark("warning", "bom-value-contradiction", f"{shown(found[1].text)} stands beside {shown(amount.text)}; "
                        f"{format_quantity(found[1].value, unit)} was read: correct the wrong one", source)  # fmt: skip
    if found is None:
        return
    source, amount = found
    part.value = amount.value
    part.given["value"] = Given(amount.text, source.place)
    if amount.comma and not (part.kind == "crystal" and 1e4 <= amount.value <= 3e8):
        part.remark("warning", "bom-comma", f"{shown(amount.text)} was read with a decimal comma as "
                    f"{format_quantity(amount.value, unit)}; write a point where that is wrong", source)  # fmt: skip


def _close(one: float, other: float) -> bool:
    return abs(one - other) <= 1e-3 * max(abs(one), abs(other))


def _candidate(kind: Kind, source: Source, plain: bool) -> Amount | None:
    """The amount of a cell that can be the value: with unit, with a fitting prefix, or (`plain`) a bare number."""
    unit = SI_UNIT[kind]
    stated = source.facts.of(unit)
    if stated:
        return stated[0]
    letters = _BARE_LETTERS[kind]
    for amount in source.facts.bare:
        marks = re.sub(r"[\d.,\s]", "", amount.text)
        if amount.si_unit in (None, unit) and marks and all(c in letters for c in marks):
            return amount
    if plain and kind == "resistor":
        return _bare_number(source)
    return None


def _bare_number(source: Source) -> Amount | None:
    """Ohms: a number cell, or a text that begins with a number standing alone ("0/WAKE", "100 0.1%")."""
    match = re.match(r"\s*(\d+(?:[.,]\d+)?)(?=\s*(?:$|[/;(]|,\s|\s+[\d±+<]+[^\s]*\s*%))", source.cell.text)
    if match is None or re.fullmatch(r"0\d{3,4}", match[1]):
        return None
    try:
        return Amount(match[1], parse_quantity(match[1], decimal_comma=True).value, None)
    except QuantityError:
        return None


def _tolerance(part: PartFacts, sources: list[Source], ordered: list[Source]) -> None:
    unit = SI_UNIT[part.kind]
    for source in (s for s in sources if s.meaning == "tolerance" and not s.cell.blank):
        if source.cell.kind == "percent" and source.cell.number is not None:
            size = abs(source.cell.number)
            part.tolerance, part.given["tolerance"] = (-size, size), Given(source.cell.text, source.place)
            return
        try:
            part.tolerance = parse_tolerance(source.cell.text, nominal=part.value, si_unit=unit)
            part.given["tolerance"] = Given(source.cell.text, source.place)
            return
        except QuantityError as error:
            part.remark("warning", "bom-tolerance-unread", str(error), source)
    for source in (s for s in ordered if s.meaning != "supplier_number"):
        texts = [*source.facts.absolutes, *source.facts.percents]
        if texts and _take_tolerance(part, source, texts, unit):
            return
    _tolerance_letter(part, ordered, unit)


def _take_tolerance(part: PartFacts, source: Source, texts: list[str], unit: str) -> bool:
    """True when the percentages of the cell settle the tolerance, or settle that it must be asked for."""
    texts = _without_dielectric(part, source, texts)
    bounds = []
    for text in texts:
        try:
            found = parse_tolerance(text, nominal=part.value, si_unit=unit)
        except QuantityError:
            continue
        if found not in bounds:
            bounds.append(found)
    if len(bounds) > 1:
        part.remark("warning", "bom-tolerance-ambiguous", f"{' and '.join(map(shown, texts))} stand in one cell; which is the "
                    "tolerance? none was read: write it in a column Tolerance", source)  # fmt: skip
        return True
    if bounds:
        part.tolerance, part.given["tolerance"] = bounds[0], Given(texts[0], source.place)
    return bool(bounds)


def _without_dielectric(part: PartFacts, source: Source, texts: list[str]) -> list[str]:
    """Percentages without the one that is the dielectric's own change over temperature."""
    code = class2_code(source.facts.dielectric or "")
    if code is None or part.kind != "capacitor":
        return texts
    own = [text for text in texts if percent_bounds(text) == (-code.change_high, code.change_high)]
    rest = [text for text in texts if text not in own]
    if own and not rest:
        part.remark("warning", "bom-dielectric-percent", f"{shown(own[0])} is what {code.code} itself changes over temperature; "
                    "it was not read as the tolerance: write the tolerance in a column Tolerance", source)  # fmt: skip
    return rest


def _tolerance_letter(part: PartFacts, ordered: list[Source], unit: str) -> None:
    """A letter of IEC 60062 behind the value: "100n J", "4k7 F"."""
    for source in (s for s in ordered if s.meaning == "value"):
        match = re.fullmatch(r"\s*(\S*\d\S*(?:\s?[pnuμkM]?[FHΩ])?)[\s,/]+([BCDFGJKM])\s*", source.cell.text)
        if match is not None and part.value:
            part.tolerance = parse_tolerance(match[2], nominal=part.value, si_unit=unit)
            part.given["tolerance"] = Given(match[2], source.place)


def _law(part: PartFacts, sources: list[Source], ordered: list[Source]) -> None:
    """Dielectric code or ppm/K, from a column of its own or from any words."""
    own = [s for s in sources if s.meaning == "law" and not s.cell.blank]
    for source in own + [s for s in ordered if s.meaning not in ("part_number", "supplier_number")]:
        facts, text = source.facts, None
        if part.kind == "capacitor":
            text = facts.dielectric or (facts.slopes[0] if facts.slopes else None)
            if text is None and facts.ppms:
                text = f"±{facts.ppms[0][1]:g} ppm/K"
        elif part.kind in ("resistor", "inductor"):
            text = facts.slopes[0] if facts.slopes else (f"±{facts.ppms[0][1]:g} ppm/K" if facts.ppms else None)
        if text is None and source in own:
            text = source.cell.text.strip()
        if text is not None:
            part.law, part.given["temperature_law"] = text, Given(text, source.place)
            return


_OVER = re.compile(r"range|over|temp|stab|vs")


def _crystal(part: PartFacts, sources: list[Source], ordered: list[Source]) -> None:
    """Load, ESR, ppm at 25 °C and ppm over temperature, each kept apart."""
    words = [s for s in ordered if s.meaning != "supplier_number"]
    own = {m: [s for s in sources if s.meaning == m and not s.cell.blank] for m in ("load", "esr")}
    loads: list[tuple[Source, Amount]] = [(s, a) for s in own["load"] + words for a in s.facts.of("F") if 1e-12 <= a.value <= 1e-10]
    for source, amount in loads[:1]:
        part.load_f, part.given["load"] = amount.value, Given(amount.text, source.place)
    resistances = [(s, a) for s in own["esr"] + words for a in s.facts.of("Ω") if a.value >= 1]
    for source, amount in resistances[:1]:
        part.esr_ohm, part.given["esr"] = amount.value, Given(amount.text, source.place)
    for source in words:
        if source.facts.ppms:
            _crystal_ppm(part, source)
            return


def _crystal_ppm(part: PartFacts, source: Source) -> None:
    at_room = [p for p in source.facts.ppms if not _OVER.search(p[2]) or "25" in p[2]]
    over = [p for p in source.facts.ppms if p not in at_room]
    if len(at_room) > 1 and not over:
        over, at_room = at_room[1:], at_room[:1]
        part.remark("warning", "bom-crystal-ppm", f"{shown(at_room[0][0])} was read as the tolerance at 25 °C and "
                    f"{shown(over[0][0])} as the limit over temperature; say which is which", source)  # fmt: skip
    if at_room and part.tolerance is None:
        size = float(f"{at_room[0][1] * 1e-6:.12g}")
        part.tolerance, part.given["tolerance"] = (-size, size), Given(at_room[0][0], source.place)
    if not over:
        return
    if source.facts.range_c is None:
        part.remark("warning", "bom-crystal-range", f"{shown(over[0][0])} holds over a temperature range that is not stated; "
                    "write the law in Roles, for example AT ±30 ppm -40..85 °C", source)  # fmt: skip
        return
    low, high = source.facts.range_c
    cut = "AT " if (part.value or 0) > 8e5 else ""
    part.law = f"{cut}±{over[0][1]:g} ppm {low:g}..{high:g} °C"
    part.given["temperature_law"] = Given(over[0][0], source.place)
    if cut:
        part.remark("note", "bom-crystal-cut", f"{part.law!r}: an AT cut is assumed; write another law in Roles where it is "
                    "not", source)  # fmt: skip


def _decode(part: PartFacts, ordered: list[Source]) -> None:
    """What the words left open, from the first cell whose part number can be read."""
    by_number: Callable[[Source], bool] = lambda s: s.meaning not in ("part_number",)  # noqa: E731
    for source in sorted(ordered, key=by_number):
        found = decode_part_number(source.cell.text, part.kind)
        if found is None:
            continue
        if part.value is not None and found.value is not None and not _close(part.value, found.value):
            unit = SI_UNIT[part.kind]
            part.remark("warning", "bom-number-contradiction", f"the part number {shown(found.text)} reads as "
                        f"{format_quantity(found.value, unit)}, the line says {format_quantity(part.value, unit)}; the line "
                        "was taken: correct the wrong one", source)  # fmt: skip
            return
        _fill(part, "value", found.value, source, found.text)
        _fill(part, "tolerance", found.tolerance, source, found.text)
        _fill(part, "temperature_law", found.law, source, found.text)
        return
    for source in ordered:
        if part.law is None and part.kind == "capacitor" and source.facts.dielectric:
            _fill(part, "temperature_law", source.facts.dielectric, source, source.facts.dielectric)


def _fill(part: PartFacts, name: str, found: object, source: Source, text: str) -> None:
    attribute = "law" if name == "temperature_law" else name
    held = getattr(part, attribute)
    if found is None:
        return
    if held is None:
        setattr(part, attribute, found)
        part.decoded.append(name)
        part.given[name] = Given(text, source.place)
    elif name == "tolerance" and part.tolerance is not None and _differs(part.tolerance, found):
        part.remark("warning", "bom-number-contradiction", f"the part number {shown(text)} reads as another tolerance than "
                    f"{shown(part.given['tolerance'].text)}; the line was taken: correct the wrong one", source)  # fmt: skip
    elif name == "temperature_law" and class1_code(str(held)) is None and class2_code(str(held)) is None:
        return
    elif name == "temperature_law" and str(held).replace("NP0", "C0G") != str(found):
        part.remark("warning", "bom-number-contradiction", f"the part number {shown(text)} reads as {found}, the line says "
                    f"{held}; the line was taken: correct the wrong one", source)  # fmt: skip


def _differs(one: tuple[float, float], other: object) -> bool:
    return isinstance(other, tuple) and any(not _close(a, b) for a, b in zip(one, other, strict=True))
