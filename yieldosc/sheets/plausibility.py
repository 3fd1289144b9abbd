"""Questions that a careful colleague would ask of values that were read without trouble."""

from __future__ import annotations

import re
from collections import Counter, defaultdict
from collections.abc import Iterable, Iterator

from yieldosc.errors import Finding
from yieldosc.parts.codes import class1_code
from yieldosc.parts.parameter import Kind
from yieldosc.quantities import format_quantity, shown
from yieldosc.sheets.bomline import BomLine

# What is sold as a part (common practice): beyond, a prefix was slipped.
_USUAL: dict[Kind, tuple[float, float]] = {
    "resistor": (1e-4, 1e10), "capacitor": (1e-13, 10.0), "inductor": (1e-10, 100.0), "crystal": (1e4, 3e8),
}  # fmt: skip
_LARGEST_CLASS1_F = 1e-6
_LOAD_F = (3e-12, 60e-12)  # capacitors at a crystal


def doubts(lines: Iterable[BomLine]) -> list[Finding]:
    """Warnings for values that are possible and yet more likely slips; nothing is changed."""
    rows: dict[tuple[str | None, int | None], list[BomLine]] = defaultdict(list)
    for line in lines:
        if line.fitted and line.value is not None:
            rows[line.place.sheet, line.place.row].append(line)
    found = [finding for group in rows.values() for finding in _of_row(group)]
    return found + list(_load_capacitors(list(rows.values())))


def _of_row(group: list[BomLine]) -> Iterator[Finding]:
    line = group[0]
    value, unit = line.value or 0.0, line.si_unit
    text = line.given["value"].text if "value" in line.given else line.source_text
    low, high = _USUAL.get(line.kind, (0.0, float("inf")))
    if value != 0 and not low <= value <= high:
        yield Finding(
            "warning",
            "bom-implausible-value",
            f"{shown(text)} reads as {format_quantity(value, unit)}, which no "
            f"{line.kind} has; was another prefix meant?",
            line.place,
        )
    elif line.kind == "resistor" and 0 < value < 0.1 and re.search(r"\d\s?[mм]$", text):
        yield Finding(
            "warning",
            "bom-implausible-value",
            f"{shown(text)} reads as {format_quantity(value, unit)}: m is milli; write M for megaohms",
            line.place,
        )
    elif line.kind == "capacitor" and value > _LARGEST_CLASS1_F and class1_code(line.temperature_law or "") is not None:
        yield Finding(
            "warning",
            "bom-implausible-value",
            f"{format_quantity(value, unit)} with {line.temperature_law}: so large "
            "a class 1 capacitor is rare; check value and dielectric",
            line.place,
        )


def _load_capacitors(groups: list[list[BomLine]]) -> Iterator[Finding]:
    """A pair of nanofarads in a BOM with a crystal and no pair of picofarads: 22 nF for 22 pF?"""
    for sheet in {group[0].place.sheet for group in groups}:
        own = [group for group in groups if group[0].place.sheet == sheet]
        if not any(group[0].kind == "crystal" for group in own):
            continue
        capacitors = [group for group in own if group[0].kind == "capacitor"]
        if any(_LOAD_F[0] <= (group[0].value or 0.0) <= _LOAD_F[1] for group in capacitors):
            continue
        times = Counter(line.value for group in capacitors for line in group)
        for group in capacitors:
            value = group[0].value or 0.0
            words = group[0].source_text.casefold()
            marked = times[value] == 2 or "load" in words or "crystal" in words
            if marked and _LOAD_F[0] <= value * 1e-3 <= _LOAD_F[1]:
                yield Finding(
                    "warning",
                    "bom-load-capacitor",
                    f"{format_quantity(value, 'F')} would be a thousand times a usual "
                    f"load capacitor of a crystal, and there is no other; was {format_quantity(value * 1e-3, 'F')} "
                    "meant?",
                    group[0].place,
                )
