"""What is collected about one part of a row, and the cells that it comes from."""

from __future__ import annotations

from dataclasses import dataclass, field

from yieldosc.errors import Level
from yieldosc.parts.parameter import Given, Kind
from yieldosc.sheets.cells import Facts, read_facts
from yieldosc.sheets.grid import Cell
from yieldosc.sheets.headings import Meaning

VALUED: tuple[Kind, ...] = ("resistor", "capacitor", "inductor", "crystal")


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


def close(one: float, other: float) -> bool:
    """Equal within a thousandth."""
    return abs(one - other) <= 1e-3 * max(abs(one), abs(other))
