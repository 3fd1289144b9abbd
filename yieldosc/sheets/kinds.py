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
              r"standoff|terminal|fuse|ptc\b|test ?point|battery|speaker|buzzer|potentiometer holder|фьюз|разъем|连接器|"
              r"feedthrough"),
    ("ic", r"\b(ocxo|tcxo|vcxo|mems)\b|amplifier|regulator|microcontroller|converter|eeprom|transceiver|^\W*ic\b|"
           r"integrated circuit|микросхема"),
    ("crystal", r"crystal|\bxtal|quartz|\bquarz|кварц|晶振|水晶|晶体|resonator|резонатор|谐振器|\bhc-?49|cristal"),
    ("ic", r"oscillator|\bosc\b|генератор"),
    ("resistor", r"resistor|\bres\b|widerst|резистор|电阻|抵抗|résistance|resistenc|resistors|thick ?film|thin ?film|"
                 r"potentiom|\bpots?\b|trimmer|trimpot|photo ?cell|\bldr\b"),
    ("capacitor", r"capacitor|\bcaps?\b|kondensator|condens|конденсатор|电容|コンデンサ|\bmlcc\b|tantal|electrolytic|\belko\b|"
                  r"capacit"),
    ("inductor", r"inductor|\bchoke|\bspule|drossel|дроссель|индуктивн|电感|コイル|inductance|\bcoil\b|\bind\b"),
    ("diode", r"\bdiode|schottky|\bzener|\bled\b|rectifier|\btvs\b|диод|二极管|light emitting"),
    ("transistor", r"transistor|mosfet|\bbjt\b|\b(npn|pnp|jfet)\b|транзистор|三极管"),
)  # fmt: skip

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
