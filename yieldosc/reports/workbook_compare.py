"""The workbook of `compare`: one page, and the second study behind it."""

from __future__ import annotations

from openpyxl import Workbook

from yieldosc.reports.compare_words import compare_page
from yieldosc.reports.workbook_decision import decision_pages, provenance_page
from yieldosc.reports.workbook_inputs import contract_sheets
from yieldosc.studies.compare.results import CompareResult

SHEETS = (("Change note", ("differences", "rates", "steps", "meaning", "notes", "cautions")),)


def compare_workbook(r: CompareResult) -> Workbook:
    """All sheets, in reading order."""
    book = Workbook()
    book.remove(book.worksheets[0])
    book.properties.title = f"{r.before.name} and {r.after.name}: what changed"
    book.properties.creator = f"yieldosc {r.provenance.versions.get('yieldosc', '')}".strip()
    decision_pages(book, compare_page(r), SHEETS)
    digests = (
        ("Digest of the first study", r.before.digest), ("Digest of the second study", r.after.digest),
        ("Units of each", f"{r.units:,}"),
    )  # fmt: skip
    provenance_page(book, r.provenance, digests)
    contract_sheets(book, r.after)
    return book
