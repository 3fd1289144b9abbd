"""Tolerance, temperature law, load, ESR and ppm of a part from the words of its row."""

from __future__ import annotations

import re

from yieldosc.parts.codes import class2_code
from yieldosc.parts.parameter import Given
from yieldosc.quantities import QuantityError, normal, parse_tolerance, shown
from yieldosc.sheets.cells import Amount, percent_bounds
from yieldosc.sheets.kinds import SI_UNIT
from yieldosc.sheets.partfacts import PartFacts, Source


def read_tolerance(part: PartFacts, sources: list[Source], ordered: list[Source]) -> None:
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
        part.remark(
            "warning",
            "bom-tolerance-ambiguous",
            f"{' and '.join(map(shown, texts))} stand in one cell; which is the "
            "tolerance? none was read: write it in a column Tolerance",
            source,
        )
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
        part.remark(
            "warning",
            "bom-dielectric-percent",
            f"{shown(own[0])} is what {code.code} itself changes over temperature; "
            "it was not read as the tolerance: write the tolerance in a column Tolerance",
            source,
        )
    return rest


def _tolerance_letter(part: PartFacts, ordered: list[Source], unit: str) -> None:
    """A letter of IEC 60062 behind the value: "100nF J", "4k7 F", "22pF C0G J".

    "10 K", "1 M" and "100n F" end in a prefix or in the unit: the letter counts only behind a value that has its own.
    """
    for source in (s for s in ordered if s.meaning == "value" and part.value and len(s.cell.text) < 100):
        match = re.fullmatch(
            r"(?P<value>\d\S*(?:\s?[pnuμkM]?[FHΩ])?)(?P<more>.*)[\s,/](?P<letter>[BCDFGJKM])", source.cell.text.strip()
        )
        if match is None or not re.search(r"[^\W\d_]", match["value"]):
            continue
        letter = match["letter"]
        if (letter in "BCD" and match["more"].strip(" ,/")) or (
            letter == unit and letter not in match["value"].upper()
        ):
            continue
        part.tolerance = parse_tolerance(letter, nominal=part.value, si_unit=unit)
        part.given["tolerance"] = Given(letter, source.place)


def read_law(part: PartFacts, sources: list[Source], ordered: list[Source]) -> None:
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


FORK_HZ = (10e3, 200e3)  # tuning forks are made from 10 to 200 kHz; other crystals begin above (from memory)
_CURVATURE = re.compile(  # "-0.034 ppm/°C²", "-0.04±0.01ppm/°C^2": the square is a plain 2 after normalisation
    r"-?\s?(?P<size>0[.,]0\d{1,3})\s?(?:±\s?(?P<spread>0[.,]0\d{1,3}))?\s?ppm\s?/\s?\(?(?:°\s?C|K|C)\)?\s?\^?2",
    re.IGNORECASE,
)
_OVER = re.compile(r"range|over|temp|stab|vs")


def read_crystal(part: PartFacts, sources: list[Source], ordered: list[Source]) -> None:
    """Load, ESR, ppm at 25 °C and ppm over temperature, each kept apart."""
    words = [s for s in ordered if s.meaning != "supplier_number"]
    own = {m: [s for s in sources if s.meaning == m and not s.cell.blank] for m in ("load", "esr")}
    loads: list[tuple[Source, Amount]] = [
        (s, a) for s in own["load"] + words for a in s.facts.of("F") if 1e-12 <= a.value <= 1e-10
    ]
    for source, amount in loads[:1]:
        part.load_f, part.given["load"] = amount.value, Given(amount.text, source.place)
    resistances = [
        (s, a)
        for s in own["esr"] + words
        for a in (*s.facts.of("Ω"), *(b for b in s.facts.bare if b.si_unit == "Ω"))  # "80 Ω" and "80R"
        if a.value >= 1
    ]
    for source, amount in resistances[:1]:
        part.esr_ohm, part.given["esr"] = amount.value, Given(amount.text, source.place)
    fork = part.value is not None and FORK_HZ[0] <= part.value <= FORK_HZ[1]
    for source in words:
        if source.facts.ppms:
            (_fork_ppm if fork else _crystal_ppm)(part, source)
            break
    if fork:
        _fork_law(part, words)


def _fork_ppm(part: PartFacts, source: Source) -> None:
    """The tolerance at 25 °C; a limit over temperature is none that a parabola can keep, and is asked for."""
    ppms = source.facts.ppms
    room = next((p for p in ppms if not _OVER.search(p[2]) or "25" in p[2]), ppms[0])
    size = float(f"{room[1] * 1e-6:.12g}")
    if part.tolerance is None:
        part.tolerance, part.given["tolerance"] = (-size, size), Given(room[0], source.place)
    over = [p for p in ppms if p is not room or (_OVER.search(p[2]) and "25" not in p[2])]
    if over:
        part.remark(
            "warning",
            "bom-fork",
            f"{shown(over[0][0])} seems to hold over temperature, where a tuning fork holds no such limit; "
            f"{shown(room[0])} was read as the tolerance at 25 °C: write tolerance and law in Roles where it is "
            "another crystal",
            source,
        )


def _fork_law(part: PartFacts, words: list[Source]) -> None:
    """A crystal of so low a frequency is a tuning fork: a parabola, whose curvature the row may state."""
    stated = [(s, m) for s in words for m in _CURVATURE.finditer(normal(s.cell.text[:2000]))]
    if stated:
        source, match = stated[0]
        spread = f" ±{match['spread'].replace(',', '.')}" if match["spread"] else ""
        part.law = f"fork -{match['size'].replace(',', '.')}{spread} ppm/K² 25 ±5 °C"
        part.given["temperature_law"] = Given(match[0], source.place)
        return
    part.law = "fork"
    part.given["temperature_law"] = Given(part.given["value"].text, part.given["value"].place)
    part.remark(
        "note",
        "bom-fork",
        f"{shown(part.given['value'].text)} is the frequency of a tuning fork, whose usual law (fork) is assumed; "
        "write another in Roles where it is none",
    )


def _crystal_ppm(part: PartFacts, source: Source) -> None:
    at_room = [p for p in source.facts.ppms if not _OVER.search(p[2]) or "25" in p[2]]
    over = [p for p in source.facts.ppms if p not in at_room]
    if len(at_room) > 1 and not over:
        over, at_room = at_room[1:], at_room[:1]
        part.remark(
            "warning",
            "bom-crystal-ppm",
            f"{shown(at_room[0][0])} was read as the tolerance at 25 °C and "
            f"{shown(over[0][0])} as the limit over temperature; say which is which",
            source,
        )
    if at_room and part.tolerance is None:
        size = float(f"{at_room[0][1] * 1e-6:.12g}")
        part.tolerance, part.given["tolerance"] = (-size, size), Given(at_room[0][0], source.place)
    if not over:
        return
    if source.facts.range_c is None:
        part.remark(
            "warning",
            "bom-crystal-range",
            f"{shown(over[0][0])} holds over a temperature range that is not stated; "
            "write the law in Roles, for example AT ±30 ppm -40..85 °C",
            source,
        )
        return
    low, high = source.facts.range_c
    cut = "AT " if (part.value or 0) > 8e5 else ""
    part.law = f"{cut}±{over[0][1]:g} ppm {low:g}..{high:g} °C"
    part.given["temperature_law"] = Given(over[0][0], source.place)
    if cut:
        part.remark(
            "note",
            "bom-crystal-cut",
            f"{part.law!r}: an AT cut is assumed; write another law in Roles where it is not",
            source,
        )
