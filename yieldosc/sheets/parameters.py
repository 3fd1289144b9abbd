"""Rows of Roles and lines of the BOM → parameters: who stands behind a role, its bounds, law, drift and pedigree."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from yieldosc.circuits.circuit import Circuit, Role
from yieldosc.errors import Place
from yieldosc.parts.ceramic import Class2Law, default_ageing
from yieldosc.parts.laws import LawError, parse_law
from yieldosc.parts.parameter import PEDIGREES, Kind, Law, Parameter, Pedigree
from yieldosc.parts.shapes import Measured
from yieldosc.quantities import format_quantity, shown
from yieldosc.sheets.bom import reel_key
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.bounds import Bounds, BoundsReader, role_value
from yieldosc.sheets.design import DesignSheet, reel_share, tolerance
from yieldosc.sheets.entries import Entry, Problems, faulty
from yieldosc.sheets.roles import RoleRow

SPREAD = ("Min", "Max", "Tolerance", "Shape", "Temperature law", "Solder", "Drift", "Reel share")
PASSIVE = ("resistor", "capacitor", "inductor", "crystal")


@dataclass(frozen=True, slots=True)
class Sources:
    """Everything that parameters are made from."""

    design: DesignSheet
    lines: Mapping[str, BomLine]  # designator → line
    rivals: Mapping[str, Sequence[BomLine]]  # designator → its lines, where they say different things
    tables: Mapping[str, Sequence[tuple[float, float]]]
    measured: Mapping[str, tuple[float, ...]]


class ParameterMaker:
    """Makes the parameters and conditions of one study; problems are collected."""

    def __init__(self, sources: Sources, problems: Problems) -> None:
        self.sources, self.problems = sources, problems
        values = sources.design.values
        self.default_shape: str = values.get("default_shape", "uniform")
        self.share: float = values.get("reel_share", 0.0)
        self.life: float | None = values.get("life_years")
        self.range_c = (values.get("temperature_low_c"), values.get("temperature_high_c"))
        self.parts: dict[str, str] = {}  # role → designator, where its row names one

    def working_with(self, problems: Problems) -> ParameterMaker:
        """The same maker with a list of problems of its own."""
        return ParameterMaker(self.sources, problems)

    def make(self, circuit: Circuit, rows: Mapping[str, RoleRow]) -> tuple[tuple[Parameter, ...], dict[str, float]]:
        parameters, conditions = [], {}
        for role in circuit.roles:
            if role.name == circuit.supply_role:
                continue
            row = rows.get(role.name)
            if row is not None and self._faulty(row):
                continue
            if role.condition:
                value = self._condition(role, row)
                if value is not None:
                    conditions[role.name] = value
                continue
            made = self.parameter(role, row)
            if made is not None:
                parameters.append(made)
        return tuple(parameters), conditions

    def _faulty(self, row: RoleRow) -> bool:
        """True, with findings, for a row with a cell that has no value: nothing more can be said of it."""
        names = {column: column if column in ("Min", "Typ", "Max") else column.lower() for column in row.cells}
        told = [faulty(entry, f"{row.role} {names[column]}", self.problems) for column, entry in row.cells.items()]
        return any(told)

    def _condition(self, role: Role, row: RoleRow | None) -> float | None:
        """An operating condition: one value, from Typ or from the crystal's BOM line."""
        if row is not None:
            self._without_spread(row)
        entry = None if row is None else row.cell("Typ")
        if entry is not None:
            return role_value(entry, role, f"{role.name} Typ", self.problems)
        line = None if row is None else self._line(role, row)
        if role.name == "CL" and line is not None and line.load_f is not None:
            return line.load_f
        place = Place("Roles") if row is None else row.place
        self.problems.error("value-missing", f"{role.name} ({role.meaning}) has no value: give it as Typ", place)
        return None

    def _without_spread(self, row: RoleRow) -> None:
        """An operating condition has one value for all units."""
        unused = [column for column in SPREAD if row.cell(column) is not None]
        if unused:
            self.problems.add(
                "warning",
                "condition-without-spread",
                f"{row.role} is an operating condition, the same for every unit: {', '.join(unused)} not used",
                row.place_of(unused[0]),
            )

    def _line(self, role: Role, row: RoleRow) -> BomLine | None:
        """The BOM line that the row names, checked for kind and unit."""
        entry = row.cell("Part")
        if entry is None:
            return None
        name = entry.written
        line = self.sources.lines.get(name) or self.sources.lines.get(name.upper())
        if line is None:
            self.problems.error(
                "unknown-part", f"{role.name} names {shown(name)}, which is not in the BOM", entry.place
            )
            return None
        if line.designator in self.sources.rivals:
            places = ", ".join(str(rival.place) for rival in self.sources.rivals[line.designator])
            self.problems.error(
                "ambiguous-part",
                f"{role.name} names {line.designator}, which stands on several lines of the BOM that differ "
                f"({places}); rename or delete all but one",
                entry.place,
            )
        if not line.fitted:
            self.problems.error(
                "not-fitted", f"{role.name} names {name}, which the BOM marks as not fitted", entry.place
            )
        wrong_kind = role.kind in PASSIVE and line.kind not in (role.kind, "other")
        passive_for_active = role.kind in ("transistor", "ic") and line.kind in PASSIVE
        if wrong_kind or passive_for_active:
            self.problems.error(
                "wrong-kind",
                f"{role.name} needs a {role.kind}, but {name} is a {line.kind} ({line.source_text})",
                entry.place,
            )
        elif role.main and line.value is not None and line.si_unit not in (None, role.unit):
            self.problems.error(
                "wrong-unit",
                f"{role.name} is in {role.unit}, but the BOM gives {name} as "
                f"{format_quantity(line.value, line.si_unit)}",
                entry.place,
            )
        return line

    def parameter(self, role: Role, row: RoleRow | None) -> Parameter | None:
        """The population of a role from its row and its BOM line; None with findings."""
        before = len(self.problems.findings)
        line = None if row is None else self._line(role, row)
        part = row.cell("Part") if row is not None else None
        if part is not None:
            self.parts[role.name] = _part_name(role, part, line)
        if any(f.code == "unknown-part" for f in self.problems.findings[before:]):
            return None  # its value and tolerance cannot be told
        bounds = BoundsReader(role, row, line, self.default_shape, self.problems).read()
        if bounds is not None and row is not None:
            bounds = self._measured(role, row, bounds)
        law = self._law(role, row, line)
        solder, drift = (self._pair(role, row, column) for column in ("Solder", "Drift"))
        share = self._share(role, row)
        pedigree = self._pedigree(role, row)
        if bounds is None or any(f.level == "error" for f in self.problems.findings[before:]):
            return None
        given = dict(bounds.given)
        for column, key in (("Temperature law", "law"), ("Solder", "solder"), ("Drift", "drift"), ("Source", "source")):
            entry = None if row is None else row.cell(column)
            if entry is not None:
                given[key] = entry.given
        if law is not None and "law" not in given and line is not None and "temperature_law" in line.given:
            given["law"] = line.given["temperature_law"]
        ageing = None
        if self.life and isinstance(law, Class2Law) and (row is None or row.cell("Drift") is None):
            ageing = default_ageing(law.text)
        note = row.cell("Note") if row is not None else None
        return Parameter(
            role=role.name, part=_part_name(role, part, line), trait=role.trait,
            kind=line.kind if line is not None else _kind(role), unit=role.unit,
            nominal=bounds.typical, low=bounds.low, typical=bounds.typical, high=bounds.high, shape=bounds.shape,
            law=law, solder=solder, drift=drift, ageing=ageing,
            reel=None if line is None else _reel_name(line), reel_share=share,
            pedigree="assumed" if bounds.assumed else pedigree, given=given, note="" if note is None else note.written,
            declared=_declared(bounds, line),
        )  # fmt: skip

    def _measured(self, role: Role, row: RoleRow, bounds: Bounds) -> Bounds:
        entry = row.cell("Shape")
        if entry is None or entry.text.strip().lower() != "measured":
            return bounds
        part = row.cell("Part")
        values = self.sources.measured.get("" if part is None else part.written)
        if not values:
            self.problems.error(
                "no-measurements",
                f"{role.name} has the shape measured, but Measured has no column for its part",
                entry.place,
            )
            return bounds
        return Bounds(min(values), bounds.typical, max(values), Measured(values), bounds.given)

    def _law(self, role: Role, row: RoleRow | None, line: BomLine | None) -> Law | None:
        entry = None if row is None else row.cell("Temperature law")
        place, text = (None, None) if entry is None else (entry.place, entry.written)
        if text is None and line is not None and role.main and line.temperature_law is not None:
            text, place = line.temperature_law, line.place
            if role.kind == "crystal" and not self._known_cut(role, text, place):
                return None
        if text is None:
            return None
        return self.checked_law(role.name, text, role.unit, place)

    def checked_law(self, name: str, text: str, si_unit: str, place: Place | None) -> Law | None:
        """The law that a text names, fit for the temperatures of the study; None for "none", or with a finding."""
        try:
            law = parse_law(text, tables=self.sources.tables, si_unit=si_unit)
        except LawError as error:
            self.problems.error("unknown-law", f"{name} temperature law: {error}", place)
            return None
        self._in_range(name, law, place)
        return law

    def _known_cut(self, role: Role, text: str, place: Place | None) -> bool:
        """A crystal's law from the BOM: a tuning fork by its frequency, or an AT cut by its ppm over temperature, is
        assumed and said; any other cut is asked for."""
        if text.startswith("fork"):
            if text == "fork":
                self.problems.add(
                    "warning",
                    "crystal-law-assumed",
                    f"{role.name}: the BOM gives the frequency of a tuning fork and no law; its usual law is assumed; "
                    "write the law in Roles",
                    place,
                )
            return True
        if not text.startswith("AT "):
            self.problems.error(
                "crystal-cut-unknown",
                f"{role.name}: the BOM gives {text} over temperature, but not the cut; write the law in Roles, "
                "for example fork or AT ±30 ppm -40..85 °C",
                place,
            )
            return False
        self.problems.add(
            "warning",
            "crystal-law-assumed",
            f"{role.name}: the BOM gives {text.removeprefix('AT ')} over temperature; an AT cut is assumed; "
            "write the law in Roles",
            place,
        )
        return True

    def _in_range(self, name: str, law: Law | None, place: Place | None) -> None:
        low, high = self.range_c
        if law is not None and not law.absolute and low is not None and high is not None:
            self._stays_positive(name, law, (low, high), place)
        if law is None or law.range_c is None or low is None or high is None:
            return
        if low < law.range_c[0] or high > law.range_c[1]:
            self.problems.error(
                "law-range",
                f"{name}: {law.text} holds from {law.range_c[0]:g} to {law.range_c[1]:g} °C, the study goes from "
                f"{low:g} to {high:g} °C; narrow the study or give another law",
                place,
            )

    def _stays_positive(self, name: str, law: Law, range_c: tuple[float, float], place: Place | None) -> None:
        """A law that takes the whole value away inside the study's range describes no part."""
        ends = [np.full(1, u) for u in (0.0, 1.0)]
        for temperature_c in range_c:
            changes = [float(np.min(law.change(temperature_c, dict.fromkeys(law.coefficients, u)))) for u in ends]
            if min(changes) <= -1:
                self.problems.error(
                    "law-impossible",
                    f"{name}: {law.text} would leave nothing of the value at {temperature_c:g} °C; check its sign "
                    "and its unit",
                    place,
                )
                return

    def _pair(self, role: Role, row: RoleRow | None, column: str) -> tuple[float, float]:
        entry = None if row is None else row.cell(column)
        if entry is None:
            return (0.0, 0.0)
        found = tolerance(entry, f"{role.name} {column.lower()}", self.problems, nominal=None, si_unit=None)
        if found is not None and column == "Drift" and not self.life and found != (0.0, 0.0):
            self.problems.error(
                "life-missing", f"{role.name} has a drift, but Design has no life; add the item life", entry.place
            )
        return found or (0.0, 0.0)

    def _share(self, role: Role, row: RoleRow | None) -> float:
        entry = None if row is None else row.cell("Reel share")
        if entry is None:
            return self.share
        found = reel_share(entry, f"{role.name} reel share", self.problems)
        return self.share if found is None else found

    def _pedigree(self, role: Role, row: RoleRow | None) -> Pedigree:
        entry = None if row is None else row.cell("Source")
        if entry is None:
            return "assumed"
        for pedigree in PEDIGREES:
            if entry.written.casefold() == pedigree:
                return pedigree
        self.problems.error(
            "unknown-source",
            f"{role.name} source is {shown(entry.written)}; write one of: {', '.join(PEDIGREES)}",
            entry.place,
        )
        return "assumed"


_KINDS: dict[str, Kind] = {
    "resistor": "resistor",
    "capacitor": "capacitor",
    "inductor": "inductor",
    "crystal": "crystal",
    "transistor": "transistor",
    "ic": "ic",
}


def _part_name(role: Role, entry: Entry | None, line: BomLine | None) -> str:
    """The designator as the BOM writes it, or the role's own name where no part stands behind it."""
    if line is not None:
        return line.designator
    return role.name if entry is None else entry.written


def _kind(role: Role) -> Kind:
    """The kind of a role without a BOM line."""
    return _KINDS.get(role.kind, "other")


def _reel_name(line: BomLine) -> str:
    """The reel's key as ranks print it: the part number, or what stands for one."""
    return " ".join(reel_key(line).removeprefix("number ").removeprefix("part ").split())


def _declared(bounds: Bounds, line: BomLine | None) -> tuple[float, float] | None:
    """The bounds of the BOM's tolerance, where measured values stand in its place."""
    if not isinstance(bounds.shape, Measured) or line is None or line.tolerance is None:
        return None
    low, high = line.tolerance
    return bounds.typical * (1 + low), bounds.typical * (1 + high)
