"""A decision as pages of a workbook: what to do first, then each table with its numbers, then the study itself."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace

from openpyxl import Workbook
from openpyxl.chart import BarChart, ScatterChart

from yieldosc.reports.decision import Cell, Decision, Section
from yieldosc.reports.workbook_page import ROW_CM, Page, Value
from yieldosc.studies.results import Provenance

TEXT_WIDTH = 100  # characters of a page that holds sentences alone


@dataclass(frozen=True, slots=True)
class Placed:
    """Where a section's table stands: its page, first and last row of data."""

    page: Page
    first: int
    last: int


def decision_pages(
    book: Workbook,
    decision: Decision,
    sheets: Sequence[tuple[str, Sequence[str]]],
    charts: Mapping[str, Callable[[Placed], None]] | None = None,
) -> None:
    """sheets: name and the keys of the sections on it, in order; the first sheet also carries the decision itself.
    charts: by the key of a section, what draws a chart below its table."""
    by_key = {section.key: section for section in decision.sections}
    for number, (name, keys) in enumerate(sheets):
        sections = [by_key[key] for key in keys if key in by_key and (by_key[key].rows or by_key[key].sentences)]
        if number and not sections:
            continue
        page = Page.new(book, name, decision.title if number == 0 else name, decision.stamp)
        if number == 0:
            _head(page, decision)
        for section in sections:
            table = _section(page, section)
            if table is not None and section.key in (charts or {}):
                (charts or {})[section.key](Placed(page, *table))
        if not page.widths:
            page.widths[1] = TEXT_WIDTH
        page.finish()


def section_page(book: Workbook, section: Section, name: str) -> None:
    """One section as a sheet of its own."""
    page = Page.new(book, name, section.title, section.note)
    _section(page, replace(section, title="", note=""))
    page.finish()


def add_chart(page: Page, chart: BarChart | ScatterChart) -> None:
    """Below what stands on the page, as wide as its tables; later text goes below the chart."""
    chart.width = page.width_cm
    page.sheet.add_chart(chart, f"A{page.row}")
    page.row += math.ceil(chart.height / ROW_CM) + 1


def _head(page: Page, decision: Decision) -> None:
    page.text(decision.words, size=12, bold=True)
    page.sentences.append(page.row - 1)
    page.sentence(decision.headline)
    page.row += 1
    if decision.facts:
        facts: list[list[Value]] = [list(fact) for fact in decision.facts]
        page.table(("Figure", "Value", "What it is"), facts, (None,) * 3, freeze=False)


def _section(page: Page, section: Section) -> tuple[int, int] | None:
    if section.title:
        page.text(section.title, size=12, bold=True)
    if section.note:
        page.sentence(section.note)
    placed = None
    if section.rows:
        # a number stands in a column of its own, its interval as text beside it
        headings, rows, formats = _spread(section)
        placed = page.table(headings, rows, formats, freeze=False)
    for sentence in section.sentences:
        page.sentence(f"{section.mark} {sentence}")
    if section.sentences:
        page.row += 1
    return placed


def _spread(section: Section) -> tuple[list[str], list[list[Value]], list[str | None]]:
    """Columns with numbers become two: the number, and the text with its interval where that says more."""
    headings: list[str] = []
    formats: list[str | None] = []
    double = []
    for c, (name, _) in enumerate(section.columns):
        cells = [row[c] for row in section.rows]
        numbered = any(cell.number is not None for cell in cells)
        both = numbered and any("(" in cell.text for cell in cells)
        headings += [name, f"{name}, interval"] if both else [name]
        number_format = next((cell.number_format for cell in cells if cell.number_format), None)
        formats += [number_format, None] if both else [number_format]
        double.append(both)
    rows = [[v for cell, both in zip(row, double, strict=True) for v in _values(cell, both)] for row in section.rows]
    return headings, rows, formats


def _values(cell: Cell, both: bool) -> list[Value]:
    bound = cell.text.startswith(("above", "below")) and "(" not in cell.text  # a bound alone is no number
    first: Value = cell.text if cell.number is None or bound else cell.number
    if bound:
        return [first, ""] if both else [first]
    return [first, cell.text if cell.number is not None else ""] if both else [first]


def provenance_page(book: Workbook, p: Provenance, units: Sequence[tuple[str, str]]) -> None:
    """What makes the run repeatable."""
    page = Page.new(
        book, "Provenance", "What makes this run repeatable",
        "The sheets BOM, Design and Roles behind this one are the study itself: this workbook can be run again.",
        landscape=False,
    )  # fmt: skip
    rows: list[list[Value]] = [
        ["Input digest, SHA-256", p.input_sha256], ["Seed", str(p.seed)], ["Started", p.started],
        ["Seconds", f"{p.seconds:g}"], ["Worker processes", f"{p.workers} (their number changes no digit)"],
    ]  # fmt: skip
    rows += [list(pair) for pair in units]
    rows += [[f"Version of {name}", version] for name, version in p.versions.items()]
    page.table(("What", "Value"), rows, (None, None))
    page.finish()
