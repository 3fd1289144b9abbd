"""The result workbook: a sign-off page, the evidence behind it, and the study itself so that it can be run again.

Every cell holds a written value: no formula that could be edited into a pass.
"""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from openpyxl import Workbook

from yieldosc.reports.extra_words import extra_sections
from yieldosc.reports.findings import summarise
from yieldosc.reports.workbook_capability import capability_sheet
from yieldosc.reports.workbook_decision import section_page
from yieldosc.reports.workbook_evidence import assumptions, better_grades, extremes, worst_units
from yieldosc.reports.workbook_inputs import contract_sheets, import_findings, inputs_used, method, provenance
from yieldosc.reports.workbook_knowledge import what_to_measure
from yieldosc.reports.workbook_results import frequency_spread, leading_parts, temperatures
from yieldosc.reports.workbook_signoff import sign_off
from yieldosc.studies.results import Assessment


def make_workbook(a: Assessment) -> Workbook:
    """All sheets, in reading order."""
    summary = summarise(a)
    book = Workbook()
    book.remove(book.worksheets[0])
    book.properties.title = f"Predicted production yield: {summary.verdict.lower()}"
    book.properties.creator = f"yieldosc {a.provenance.versions.get('yieldosc', '')}".strip()
    sign_off(book, a, summary)
    leading_parts(book, a, summary)
    temperatures(book, a)
    frequency_spread(book, a)
    extremes(book, a)
    assumptions(book, a, summary)
    what_to_measure(book, a)
    better_grades(book, a)
    capability_sheet(book, a)
    for section in extra_sections(a):
        section_page(book, section, section.key.capitalize())
    inputs_used(book, a)
    import_findings(book, a)
    worst_units(book, a)
    method(book, a)
    provenance(book, a)
    contract_sheets(book, a.study)
    return book


def write_workbook(a: Assessment, path: Path | str) -> None:
    """Write whole to a temporary name beside `path`, then rename; whether `path` may be replaced is the caller's."""
    save_whole(make_workbook(a), Path(path))


def save_whole(book: Workbook, target: Path) -> None:
    """Write to a temporary name beside `target`, then rename."""
    handle, name = tempfile.mkstemp(prefix=".", suffix=".xlsx", dir=target.parent)
    os.close(handle)
    temporary = Path(name)
    try:
        book.save(temporary)
        temporary.replace(target)
    finally:
        temporary.unlink(missing_ok=True)
