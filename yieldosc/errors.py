"""What can be wrong with an input, said once and in full.

    YieldoscError               anything this package raises on purpose
    └── InputError              a file, a study or a command that cannot be used; carries every finding

A finding is one sentence or two: what is wrong, what was found, what is expected, what to do next.
Library code raises; only the command line prints and chooses an exit status.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

Level = Literal["error", "warning", "note"]


@dataclass(frozen=True, slots=True)
class Place:
    """Where a value stands: sheet name (or file name), row from 1, column letter, as the spreadsheet shows."""

    sheet: str | None = None
    row: int | None = None
    column: str | None = None

    def __str__(self) -> str:
        cell = f"{self.column or ''}{self.row if self.row is not None else ''}"
        return "!".join(part for part in (self.sheet or "", cell) if part)


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing a reader must know about an input: level, stable code, full text, place."""

    level: Level
    code: str
    text: str
    place: Place = Place()

    def __str__(self) -> str:
        where = str(self.place)
        return f"{where}: {self.text}" if where else self.text

    def to_dict(self) -> dict[str, object]:
        """The finding as the JSON contract writes it."""
        return {
            "level": self.level,
            "code": self.code,
            "sheet": self.place.sheet,
            "row": self.place.row,
            "column": self.place.column,
            "text": self.text,
        }


class YieldoscError(Exception):
    """Base of every error that this package raises on purpose."""


class InputError(YieldoscError):
    """An input that cannot be used; `findings` holds every problem found, errors and the rest."""

    def __init__(self, findings: Iterable[Finding]) -> None:
        self.findings: tuple[Finding, ...] = tuple(findings)
        super().__init__("\n".join(str(f) for f in self.findings if f.level == "error"))


def refusal(code: str, text: str, place: Place | None = None) -> InputError:
    """An InputError of a single error."""
    return InputError([Finding("error", code, text, place or Place())])
