"""The kind of a part: from the letters of its designator, then from the words of its line."""

from __future__ import annotations

import re

from yieldosc.parts.parameter import Kind

_LETTERS: dict[str, Kind] = {
    "R": "resistor", "RN": "resistor", "RV": "resistor", "VR": "resistor", "RP": "resistor", "RS": "resistor",
    "C": "capacitor", "CP": "capacitor", "L": "inductor", "Y": "crystal", "XTAL": "crystal", "QZ": "crystal",
    "XT": "crystal", "ZQ": "crystal", "CR": "diode", "D": "diode", "LED": "diode", "ZD": "diode", "VD": "diode",
    "Q": "transistor", "T": "transistor", "TR": "transistor", "VT": "transistor", "U": "ic", "IC": "ic", "DA": "ic",
    "DD": "ic", "OP": "ic",
}  # fmt: skip

_WORDS: tuple[tuple[Kind, str], ...] = (
    # First match wins: what only sounds like a part (a bead, a transformer, a holder) stands before the parts.
    ("other", r"ferrite|\bbeads?\b|\bferr\b|transformer|трансформатор|磁珠|connector|header|socket|switch|button|jack|"
              r"thermistor|термистор|\bntc\b|varistor|photo ?cell|\bldr\b|"
              r"standoff|terminal|fuse|ptc\b|test ?point|battery|speaker|buzzer|разъем|连接器|"
              r"feedthrough"),
    ("ic", r"\b(ocxo|tcxo|vcxo|mems)\b|amplifier|regulator|microcontroller|converter|eeprom|transceiver|^\W*ic\b|"
           r"integrated circuit|микросхема"),
    ("crystal", r"crystal|\bxtal|quartz|\bquarz|кварц|晶振|水晶|晶体|resonator|резонатор|谐振器|\bhc-?49|cristal"),
    ("ic", r"oscillator|\bosc\b|генератор"),
    ("resistor", r"resistor|\bres\b|widerst|резистор|电阻|抵抗|résistance|resistenc|resistors|thick ?film|thin ?film|"
                 r"potentiom|\bpots?\b|trimmer|trimpot"),
    ("capacitor", r"capacitor|\bcaps?\b|kondensator|condens|конденсатор|电容|"
                  r"コンデンサ|\bmlcc\b|tantal|electrolytic|\belko\b|"
                  r"capacit"),
    ("inductor", r"inductor|\bchoke|\bspule|drossel|дроссель|индуктивн|电感|コイル|inductance|\bcoil\b|\bind\b"),
    ("diode", r"\bdiode|schottky|\bzener|\bled\b|rectifier|\btvs\b|диод|二极管|light emitting"),
    ("transistor", r"transistor|mosfet|\bbjt\b|\b(npn|pnp|jfet)\b|транзистор|三极管"),
)  # fmt: skip

_NEVER_ELSE = ("FB", "FL", "F", "LED", "TP", "J", "P", "H")  # their ohms are no resistor's
SI_UNIT: dict[Kind, str] = {"resistor": "Ω", "capacitor": "F", "inductor": "H", "crystal": "Hz"}
KIND_OF_UNIT: dict[str, Kind] = {"Ω": "resistor", "F": "capacitor", "H": "inductor"}


def letters_of(designator: str) -> str:
    """The kind letters of a designator: "M0:C12" → "C", "kC1" → "C"."""
    bare = designator.rpartition(":")[2]
    match = re.match(r"[a-z]?([A-Z]{1,4})(?=[\d$_?]|$)", bare) or re.match(r"([A-Za-z]{1,5})(?=[\d$_?]|$)", bare)
    return match[1].upper() if match is not None else ""


def kind_from_letters(designator: str) -> Kind:
    """Kind by the usual letters; "other" where they say nothing."""
    return _LETTERS.get(letters_of(designator), "other")


def kind_from_words(text: str) -> Kind | None:
    """Kind that the words of a line name; None where they name none."""
    plain = text.casefold()
    for kind, pattern in _WORDS:
        if re.search(pattern, plain):
            return kind
    return None


def settled_kind(letters: str, by_letter: Kind, by_words: Kind | None, units: set[str], frequency_stated: bool) -> Kind:
    """The kind that the whole line speaks for. `units`: those of Ω, F and H that its cells state."""
    if by_letter in ("resistor", "capacitor", "inductor"):
        return _passive(by_letter, by_words, units, frequency_stated)
    if by_letter == "crystal":
        no_crystal = by_words == "ic" or (by_words == "other" and not frequency_stated)
        return by_words if no_crystal and by_words is not None else "crystal"
    if letters in _NEVER_ELSE:
        return by_letter
    named = by_words == "crystal" and (frequency_stated or by_letter == "other")
    if named or (letters == "Q" and by_words is None and frequency_stated):
        return "crystal"
    if by_letter == "other":
        return _unlettered(letters, by_words, units, frequency_stated)
    return _active(by_letter, by_words, units)


def _passive(by_letter: Kind, by_words: Kind | None, units: set[str], frequency_stated: bool) -> Kind:
    """R, C and L keep their letter unless unit and words speak against it; ohms alone may be an ESR."""
    if SI_UNIT[by_letter] in units or by_words == by_letter:
        return by_letter
    for unit in units - {"Ω"} or units:
        if by_words == KIND_OF_UNIT[unit] or (unit != "Ω" and by_words is None):
            return KIND_OF_UNIT[unit]
    if by_words == "crystal" and frequency_stated and not units:
        return "crystal"
    return "other" if by_words == "other" and by_letter == "inductor" else by_letter


def _unlettered(letters: str, by_words: Kind | None, units: set[str], frequency_stated: bool) -> Kind:
    """Letters that say nothing: words, then a frequency at X or G, then the one unit that is stated."""
    if by_words is not None:
        return by_words
    if frequency_stated and letters in ("X", "G", "XO", ""):
        return "crystal"
    return KIND_OF_UNIT[next(iter(units))] if len(units) == 1 else "other"


def _active(by_letter: Kind, by_words: Kind | None, units: set[str]) -> Kind:
    """Transistors, ICs and diodes: overridden only by words that the unit confirms, or by what is no such part."""
    if by_words == "other":
        return "other"
    confirmed = by_words in SI_UNIT and by_words is not None and SI_UNIT[by_words] in units
    return by_words if confirmed and by_words is not None and by_letter != "diode" else by_letter


def article(kind: Kind) -> str:
    """"a resistor", "an inductor"."""
    return f"an {kind}" if kind[0] in "aeiou" else f"a {kind}"
