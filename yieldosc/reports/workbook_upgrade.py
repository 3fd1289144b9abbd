"""The workbook of `upgrade`."""

from __future__ import annotations

from openpyxl import Workbook
from openpyxl.chart import Reference

from yieldosc.reports.upgrade_words import upgrade_page
from yieldosc.reports.workbook_charts import bars
from yieldosc.reports.workbook_decision import Placed, add_chart, decision_pages, provenance_page
from yieldosc.reports.workbook_inputs import contract_sheets
from yieldosc.studies.upgrade.results import UpgradeResult

SHEETS = (
    ("Purchase", ("steps", "open", "cautions")),
    ("Sets", ("sets", "search")),
    ("Single grades", ("singles",)),
    ("Nominal values", ("recentre",)),
)
MOST_BARS = 30


def upgrade_workbook(r: UpgradeResult) -> Workbook:
    """All sheets, in reading order."""
    book = Workbook()
    book.remove(book.worksheets[0])
    book.properties.title = "Grades, their yield and their price"
    book.properties.creator = f"yieldosc {r.provenance.versions.get('yieldosc', '')}".strip()
    decision_pages(book, upgrade_page(r), SHEETS, {"singles": _chart})
    units = (
        ("Units that chose, and fresh units", f"{r.confirm_units:,} each"), ("Units of single grades", f"{r.units:,}"),
    )  # fmt: skip
    provenance_page(book, r.provenance, units)
    contract_sheets(book, r.study)
    return book


def _chart(at: Placed) -> None:
    """Yield of every single grade, best first."""
    sheet, last = at.page.sheet, min(at.last, at.first + MOST_BARS - 1)
    chart = bars(
        sheet, "Yield with one purchase changed", "yield",
        names=Reference(sheet, min_col=1, min_row=at.first, max_row=last),
        values=[Reference(sheet, min_col=2, min_row=at.first - 1, max_row=last)], number_format="0.0%",
    )  # fmt: skip
    chart.y_axis.scaling.max = 1.0
    chart.height = max(7.0, 0.55 * (last - at.first + 3))
    add_chart(at.page, chart)
