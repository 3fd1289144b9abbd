"""What a row says against its own reading: another value in a link, a thermistor, the footprint of another part."""

from __future__ import annotations

import math
import re

from yieldosc.parts.parameter import Kind
from yieldosc.quantities import format_quantity, shown
from yieldosc.sheets.kinds import SI_UNIT, article
from yieldosc.sheets.partfacts import PartFacts, Source, close

_URL = re.compile(r"(?:https?://|www\.)\S+", re.IGNORECASE)
_UNITS = {"ohm": "Ω", "ohms": "Ω", "f": "F", "h": "H", "hz": "Hz"}
_PREFIX = {"": 1.0, "p": 1e-12, "n": 1e-9, "u": 1e-6, "µ": 1e-6, "m": 1e-3, "k": 1e3, "g": 1e9}
_LINKED = re.compile(
    r"(?<![\d.,])(?:(?P<whole>\d{1,4})[-_.,])?(?P<last>\d{1,6})[-_]?(?P<prefix>[pnuµmkg]?)[-_]?(?P<unit>ohms?|f|h|hz)"
    r"(?![a-z\d])"
)
_THERMISTOR = re.compile(r"(?<![A-Z\d])(NTC|PTC)[A-Z]{0,4}[-_]?\d", re.IGNORECASE)
_FOOTPRINTS: tuple[tuple[Kind, str], ...] = (  # how drawing programs name the land patterns of parts (seen in BOMs)
    ("inductor", r"(?:IND|INDUCTOR|L)(?:[-_]|(?=\d{4}))"),
    ("capacitor", r"(?:CAP|CAPACITOR|C)(?:[-_]|(?=\d{4}))"),
    ("resistor", r"(?:RES|RESISTOR|R)(?:[-_]|(?=\d{4}))"),
    ("crystal", r"(?:CRYSTAL|XTAL|HC-?49)"),
)


def check_link(part: PartFacts, sources: list[Source]) -> None:
    """A shop's link names the part that is bought; a value in its words that differs is a contradiction.

    Links lose signs: "-4-7-kohm" is 4.7 kΩ, "10-f" 10 µF, "2uh" 2.2 µH. They contradict only where no reading fits.
    """
    unit = SI_UNIT[part.kind]
    if part.value is None or not part.value:
        return
    for source in sources:
        for url in _URL.findall(source.cell.text[:2000]):
            words = [m for m in _LINKED.finditer(url.casefold()) if _UNITS[m["unit"]] == unit]
            if words and not any(_fits(part.value, match, unit) for match in words):
                found = f"{words[0]['last']} {words[0]['prefix']}{words[0]['unit']}".replace("  ", " ")
                part.remark(
                    "warning",
                    "bom-value-contradiction",
                    f"the link says {shown(found)}, the line {format_quantity(part.value, unit)}; the line was taken: "
                    "correct the wrong one",
                    source,
                )
                return


def _fits(value: float, match: re.Match[str], unit: str) -> bool:
    scales = [_PREFIX[match["prefix"]]]
    if match["prefix"] == "m" and unit in ("Ω", "Hz"):
        scales.append(1e6)  # links are in lower case
    if not match["prefix"] and unit in ("F", "H"):
        scales += [1e-12, 1e-9, 1e-6, 1e-3]  # and without letters beyond ASCII
    texts = [match["last"]]
    if match["whole"]:
        texts += [f"{match['whole']}.{match['last']}", f"{match['whole']}{match['last']}"]
    without_decimals = any(math.floor(value / scale * (1 + 1e-9)) == float(match["last"]) for scale in scales)
    return without_decimals or any(close(value, float(text) * scale) for text in texts for scale in scales)


def check_thermistor(designator: str, part: PartFacts, sources: list[Source]) -> None:
    """A resistor whose part number is that of a thermistor changes with temperature by percents per kelvin."""
    if part.kind != "resistor":
        return
    for source in sources:
        if source.meaning in ("part_number", "name", "value", "description") and _THERMISTOR.search(source.cell.text):
            part.remark(
                "warning",
                "bom-thermistor",
                f"{shown(source.cell.text.strip())} is the number of a thermistor; {designator} was read as a "
                "resistor: where it is none, correct the line, else give its temperature law in Roles",
                source,
            )
            return


def check_footprint(designator: str, part: PartFacts, sources: list[Source]) -> None:
    """The letter of an IC on a line that says nothing of its part, at the footprint of another kind."""
    if part.kind not in ("ic", "transistor"):
        return
    for source in (s for s in sources if s.meaning == "package"):
        text = source.cell.text.strip()
        kind = next((k for k, pattern in _FOOTPRINTS if re.match(pattern, text, re.IGNORECASE)), None)
        if kind is not None and designator:
            part.remark(
                "warning",
                "bom-kind-doubt",
                f"{designator} is kept as {part.kind} by its letter, but the footprint {shown(text)} is that of "
                f"{article(kind)}; correct the designator where it is one",
                source,
            )
            return
