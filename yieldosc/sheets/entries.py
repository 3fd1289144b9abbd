"""Values of study sheets before they mean anything: text or number with its place, and the list of what is wrong."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from yieldosc.errors import Finding, Level, Place
from yieldosc.parts.parameter import Given
from yieldosc.quantities import QuantityError, parse_quantity, shown
from yieldosc.sheets.grid import Cell


@dataclass(frozen=True, slots=True)
class Entry:
    """One cell of a study: its text, its number where it is numeric, whether its format is percent, its place."""

    text: str
    place: Place
    number: float | None = None
    percent: bool = False
    fault: str = ""  # why the cell has no value: an error cell, a formula without a stored result

    @property
    def blank(self) -> bool:
        return not self.text.strip() and self.number is None and not self.fault

    @property
    def given(self) -> Given:
        """As written, and where."""
        return Given(self.written, str(self.place))

    @property
    def written(self) -> str:
        """The text that says the same in a cell of text: a percent cell with its sign."""
        if self.number is None:
            return self.text.strip()
        return f"{self.number * 100:.12g} %" if self.percent else f"{self.number!r}".removesuffix(".0")


def entry_of(cell: Cell, place: Place) -> Entry:
    """The entry of a cell."""
    if cell.kind == "error":
        return Entry(cell.text, place, fault=f"the cell holds the error {cell.text or 'value'}")
    if cell.kind == "formula_without_result":
        return Entry("", place, fault="the cell holds a formula without a stored result")
    if cell.kind in ("number", "percent"):
        return Entry(cell.text, place, cell.number, cell.kind == "percent")
    return Entry(cell.text if not cell.blank else "", place)


def folded(text: str) -> str:
    """A heading, item or name with case, blanks, hyphens and underscores ignored."""
    return re.sub(r"[\s_\-]+", "", text).casefold()


@dataclass(slots=True)
class Problems:
    """Findings of one file, collected so that all are reported at once."""

    findings: list[Finding] = field(default_factory=list)

    def add(self, level: Level, code: str, text: str, place: Place | None = None) -> None:
        self.findings.append(Finding(level, code, text, place or Place()))

    def error(self, code: str, text: str, place: Place | None = None) -> None:
        self.add("error", code, text, place)

    @property
    def fatal(self) -> bool:
        return any(f.level == "error" for f in self.findings)


def faulty(entry: Entry, name: str, problems: Problems) -> bool:
    """True, with a finding, for a cell without a value of its own; what is read from a cell passes here first."""
    if entry.fault:
        problems.error("no-value", f"{name}: {entry.fault}; type the value itself", entry.place)
    return bool(entry.fault)


def quantity(entry: Entry, si_unit: str, name: str, problems: Problems, *, unit_text: str = "") -> float | None:
    """A value in SI units, or None with a finding. A bare number is in SI units only where the Unit column says so."""
    text = entry.written if not unit_text.strip() else f"{entry.written} {unit_text.strip()}"
    if entry.number is not None and not entry.percent and not unit_text.strip():
        example = f"{entry.number:g} {_unit_word(si_unit)}"
        problems.error(
            "bare-number",
            f'{name} is the bare number {entry.number:g}; write its unit, for example "{example}"',
            entry.place,
        )
        return None
    try:
        return parse_quantity(text, si_unit).value
    except QuantityError as error:
        problems.error("unreadable", f"{name}: {error}", entry.place)
        return None


def _unit_word(si_unit: str) -> str:
    return {"1": "%", "years": "years"}.get(si_unit, si_unit)


def plain_number(entry: Entry, name: str, problems: Problems) -> float | None:
    """A number without unit, or None with a finding."""
    if entry.number is not None:
        return entry.number
    try:
        found = parse_quantity(entry.text)
    except QuantityError:
        found = None
    if found is None or found.si_unit is not None:
        problems.error("unreadable", f"{name} must be a number without unit; found {shown(entry.text)}", entry.place)
        return None
    return found.value
