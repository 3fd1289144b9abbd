"""How much a study or a BOM may hold, and how many findings of one sort are told: far above any board's need."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable

from yieldosc.errors import Finding, InputError, Level, Place
from yieldosc.sheets.grid import Book

BOM_ROWS = 5_000
BOM_PARTS = 10_000
BOM_CHARACTERS = 1_000_000
STUDY_ROWS = {"Design": 500, "Roles": 1_000, "Grades": 1_000, "Alternates": 1_000, "Circuit": 1_000}
STUDY_COLUMNS = 50  # of those sheets
ALIKE = 200  # findings of one code that are told in full


def check_study_sizes(book: Book) -> None:
    """InputError where a sheet of a study is larger than any study needs."""
    found = []
    for name, most in STUDY_ROWS.items():
        grid = book.sheet(name)
        if grid is None:
            continue
        columns = max(map(len, grid.rows), default=0)
        if len(grid.rows) > most or columns > STUDY_COLUMNS:
            text = (
                f"the sheet {name} has {len(grid.rows)} rows and {columns} columns; at most {most} and {STUDY_COLUMNS} "
                "are read: delete what does not belong to the study"
            )
            found.append(Finding("error", "sheet-limit", text, Place(grid.name)))
    if found:
        raise InputError(found)


def few_alike(findings: Iterable[Finding]) -> list[Finding]:
    """The first `ALIKE` findings of every code, and one more that counts the rest."""
    told: list[Finding] = []
    times: Counter[tuple[Level, str]] = Counter()
    for finding in findings:
        key = finding.level, finding.code
        times[key] += 1
        if times[key] <= ALIKE:
            told.append(finding)
    for key, count in times.items():
        if count > ALIKE:
            last = next(f for f in reversed(told) if (f.level, f.code) == key)
            text = f"{count - ALIKE} more findings of this sort ({key[1]}) are not listed; correct those above first"
            told.append(Finding(last.level, "more-findings", text, Place(last.place.sheet)))
    return told
