"""What a study reader assumed or preferred, said once per file: laws, ageing, sources, and what beat the BOM."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

from yieldosc.circuits.circuit import Circuit
from yieldosc.errors import Place
from yieldosc.parts.laws import LawError, parse_law
from yieldosc.parts.parameter import Parameter
from yieldosc.quantities import format_quantity
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.entries import Entry, Problems
from yieldosc.sheets.roles import RoleRow


def remark(
    circuit: Circuit,
    parameters: Sequence[Parameter],
    rows: Mapping[str, RoleRow],
    lines: Mapping[str, BomLine],
    problems: Problems,
    *,
    one_temperature: bool,
) -> None:
    """Warnings and notes about parameters that are themselves in order."""
    named = [p for p in parameters if p.role in rows and rows[p.role].cell("Part") is not None]
    main = [p for p in named if circuit.role(p.role).main]
    for p in main:
        _beats_bom(p, rows[p.role], lines[p.part], problems)
    _same_part(main, rows, problems)
    if not one_temperature:
        _without_law(circuit, main, problems)
    _ageing(parameters, problems)
    _pedigrees(rows, problems)


def _beats_bom(p: Parameter, row: RoleRow, line: BomLine, problems: Problems) -> None:
    """What stands in Roles is used, and the BOM's own word is shown beside it."""
    for entry, here, there in (*_values(p, row, line), *_laws(p, row, line)):
        problems.add(
            "note",
            "roles-beat-bom",
            f"{p.role}: Roles says {here}, the BOM line of {line.designator} says {there}; Roles is used",
            entry.place,
        )


def _values(p: Parameter, row: RoleRow, line: BomLine) -> list[tuple[Entry, str, str]]:
    found = []
    typical = row.cell("Typ")
    if typical is not None and line.value is not None and not math.isclose(p.typical, line.value, rel_tol=1e-12):
        found.append((typical, typical.written, _bom_text(line, "value", format_quantity(line.value, line.si_unit))))
    if line.tolerance is None:
        return found
    there = _bom_text(line, "tolerance", "+{1:g}/{0:g} %".format(*(side * 100 for side in line.tolerance)))
    bounds = {side: row.cell(side) for side in ("Min", "Max")}
    given = {side: entry for side, entry in bounds.items() if entry is not None}
    written, shape = row.cell("Tolerance"), row.cell("Shape")
    if given:
        here = ", ".join(f"{side} {entry.written}" for side, entry in given.items())
        found.append((next(iter(given.values())), here, there))
    elif written is not None:
        spread = (p.low / p.typical - 1, p.high / p.typical - 1)
        if any(abs(a - b) > 1e-12 for a, b in zip(spread, line.tolerance, strict=True)):
            found.append((written, written.written, there))
    elif shape is not None and p.shape.text == "fixed" and line.tolerance != (0.0, 0.0):
        found.append((shape, shape.written, there))
    return found


def _laws(p: Parameter, row: RoleRow, line: BomLine) -> list[tuple[Entry, str, str]]:
    entry, text = row.cell("Temperature law"), line.temperature_law
    if entry is None or text is None:
        return []
    try:
        law = parse_law(text, tables={}, si_unit=p.unit)
        same = (law is None) == (p.law is None) and (law is None or p.law is None or law.text == p.law.text)
    except LawError:  # a crystal's ppm over temperature without its cut
        same = False
    return [] if same else [(entry, entry.written, _bom_text(line, "temperature_law", text))]


def _bom_text(line: BomLine, name: str, otherwise: str) -> str:
    given = line.given.get(name)
    return otherwise if given is None else given.text


def _same_part(main: Sequence[Parameter], rows: Mapping[str, RoleRow], problems: Problems) -> None:
    """One resistor or capacitor in two places; a tapped coil is one part in two roles rightly."""
    first: dict[str, str] = {}
    for p in main:
        if p.kind not in ("resistor", "capacitor"):
            continue
        other = first.setdefault(p.part, p.role)
        if other != p.role:
            problems.add(
                "warning",
                "part-in-two-places",
                f"{other} and {p.role} both name {p.part}: they are drawn as two parts; name another designator, "
                f"unless {p.part} is an array",
                rows[p.role].place_of("Part"),
            )


def _without_law(circuit: Circuit, main: Sequence[Parameter], problems: Problems) -> None:
    """One warning for all parts that are taken as constant over temperature."""
    bare = [
        p.role
        for p in main
        if p.law is None and "law" not in p.given and circuit.role(p.role).builtin_law is None
    ]
    if bare:
        problems.add(
            "warning",
            "no-law",
            f"no temperature law for {', '.join(bare)}: taken as constant over temperature; write none to say that "
            "this is meant, or give the law",
        )


def _ageing(parameters: Sequence[Parameter], problems: Problems) -> None:
    """One note per law whose ageing nobody stated."""
    aged: dict[tuple[str, float, float], list[str]] = {}
    for p in parameters:
        if p.ageing is not None and p.law is not None:
            aged.setdefault((p.law.text, p.ageing.per_decade, p.ageing.reference_h), []).append(p.role)
    for (law, per_decade, reference_h), roles in aged.items():
        problems.add(
            "note",
            "ageing-assumed",
            f"{', '.join(roles)} ({law}): a loss of {per_decade * 100:g} % per decade of time from {reference_h:g} h "
            "on is assumed over the life; write Drift in Roles to state another",
            Place("Roles"),
        )


def _pedigrees(rows: Mapping[str, RoleRow], problems: Problems) -> None:
    silent = [name for name, row in rows.items() if row.cell("Source") is None and name != "CL"]
    if silent:
        problems.add(
            "note",
            "pedigree-assumed",
            f"no Source for {', '.join(silent)}: counted as assumed; a verdict then holds on that condition",
            Place("Roles"),
        )  # fmt: skip
