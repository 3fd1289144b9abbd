"""What helps a person to fill in a draft: where a figure is found, and which words of a BOM line point to its part."""

from __future__ import annotations

import re

from yieldosc.sheets.bomline import BomLine

# Trait of a role → where its figures come from (common layout of data sheets, from memory).
SOURCES = {
    "Cm": "data sheet of the crystal, or asked of its maker; a few fF",
    "C0": "data sheet of the crystal; a few pF",
    "ESR": "the data sheet's largest is Max; Min and Typ are asked of the maker or measured",
    "CL": "the load that the crystal was ordered for",
    "gm": "data sheet of the stage at its supply; the least one decides the start",
    "Rout": "data sheet of the stage",
    "GBW": "data sheets often give only Typ: bounds are asked of the maker or assumed",
    "RO": "data sheet, open loop",
    "VSAT": "data sheet at the supply and load of the board, from the mid-supply",
    "hFE": "data sheet at the operating current; classes narrow it",
    "VBE": "data sheet at the operating current",
    "VA": "from the output conductance of the data sheet: VA = IC/hoe",
    "fT": "data sheet at the operating current",
    "Cob": "data sheet at the operating voltage",
    "IDSS": "data sheet, a wide range as a rule",
    "VGSoff": "data sheet, a wide range as a rule, as a magnitude",
    "gfs": "data sheet at the operating current",
    "gos": "data sheet at the operating current",
    "Ciss": "data sheet",
    "Crss": "data sheet",
    "dcr": "data sheet of the coil; at the working frequency it is larger: ω·L/Q",
    "k": "measured with the windings in series aiding and opposing",
    "vh": "data sheet of the timer; 0.667 as a rule",
    "vl": "data sheet of the timer; 0.333 as a rule",
    "VTP": "data sheet at the supply of the board",
    "VTN": "data sheet at the supply of the board",
    "RS_start": "cold resistance of the lamp or thermistor",
    "RS_full": "resistance at full amplitude",
    "RF_full": "RF beside what limits it, at full amplitude",
}
# Traits of active parts → words of the line that such a part bears.
_ACTIVE = (
    (("GBW", "RO", "VSAT", "VSAT_high", "VSAT_low"), r"op[- ]?amp|amplifier|verstärker|операц|運算|运放|opv"),
    (("vh", "vl", "Rd"), r"timer|\b\w*555\w*\b"),
    (("VTP", "VTN"), r"schmitt|trigger|inverter|gate|logic"),
    (("gm", "Rout", "Cin", "Cout", "Cfb"), r"inverter|controller|\bmcu\b|gate|logic|\bsoc\b"),
    (("hFE", "VBE", "VA", "fT", "Cob"), r"\bnpn\b|\bpnp\b|\bbjt\b|bipolar"),
    (("IDSS", "VGSoff"), r"jfet|junction"),
    (("gfs",), r"mosfet|mos\b"),
)
_LAMP = re.compile(r"\blamp\b|bulb|filament|glühlampe|\bptc\b|thermistor", re.IGNORECASE)
_NO_LAMP = re.compile(r"\bled\b|neon|holder|socket", re.IGNORECASE)


def named_so(trait: str, lines: list[BomLine]) -> list[BomLine]:
    """Those of the lines whose words name such a part; () for a trait without words."""
    pattern = next((words for traits, words in _ACTIVE if trait in traits), None)
    if pattern is None:
        return []
    return [line for line in lines if re.search(pattern, line.source_text, re.IGNORECASE)]


def lamp(lines: list[BomLine]) -> BomLine | None:
    """The first line that is called a lamp or a thermistor, whatever its kind."""
    found = (line for line in lines if _LAMP.search(line.source_text) and not _NO_LAMP.search(line.source_text))
    return next(found, None)
