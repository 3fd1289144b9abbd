"""The workbook of `limits`."""

from __future__ import annotations

from openpyxl import Workbook
from openpyxl.chart import Reference
from openpyxl.utils import get_column_letter

from yieldosc.reports.limits_words import limits_page
from yieldosc.reports.workbook_charts import BLUE, ORANGE, add_line, lines, span
from yieldosc.reports.workbook_decision import Placed, add_chart, decision_pages, provenance_page
from yieldosc.reports.workbook_inputs import contract_sheets
from yieldosc.studies.limits.results import LimitsResult

SHEETS = (
    ("Test limits", ("steps", "rates", "method", "open", "cautions")),
    ("Trade", ("trade",)),
    ("Series resistance", ("resistance",)),
    ("Trim", ("trim",)),
)


def limits_workbook(r: LimitsResult) -> Workbook:
    """All sheets, in reading order."""
    book = Workbook()
    book.remove(book.worksheets[0])
    book.properties.title = "Factory test limits, escapes and false rejects"
    book.properties.creator = f"yieldosc {r.provenance.versions.get('yieldosc', '')}".strip()
    decision_pages(book, limits_page(r), SHEETS, {"trade": _trade_chart, "trim": _trim_chart})
    provenance_page(book, r.provenance, (("Units that chose, and fresh units", f"{r.units:,} each"),))
    contract_sheets(book, r.study)
    return book


def _trade_chart(at: Placed) -> None:
    """Good units rejected over bad units shipped, both in ppm."""
    sheet = at.page.sheet
    columns = [cell.value for cell in sheet[at.first - 1]]
    x, y = columns.index("escapes") + 1, columns.index("false rejects") + 1
    chart = lines("Good units rejected against bad units shipped", "bad, shipped [ppm]", "good, rejected [ppm]")
    rows = range(at.first, at.last + 1)
    add_line(
        chart, "test limits", Reference(sheet, min_col=x, min_row=at.first, max_row=at.last),
        Reference(sheet, min_col=y, min_row=at.first, max_row=at.last), BLUE, marks=True,
    )  # fmt: skip
    span(chart, *([float(sheet.cell(r, c).value or 0) for r in rows] for c in (x, y)))  # type: ignore[arg-type]
    chart.legend = None
    add_chart(at.page, chart)


def _trim_chart(at: Placed) -> None:
    """0.1 % and 99.9 % points of the frequency over the corners, before and after."""
    sheet = at.page.sheet
    chart = lines("Frequency from the target, before and after the trim", "corner", "deviation")
    count = at.last - at.first + 1
    number = at.page.sheet.max_column + 2
    for k in range(count):
        sheet.cell(at.first + k, number, k + 1)  # the corners' numbers, which the chart runs over
    x = Reference(sheet, min_col=number, min_row=at.first, max_row=at.last)
    for column, name, colour, dashed in (
        (2, "low, before", ORANGE, True), (3, "high, before", ORANGE, False),
        (4, "low, after", BLUE, True), (5, "high, after", BLUE, False),
    ):  # fmt: skip
        y = Reference(sheet, min_col=column, min_row=at.first, max_row=at.last)
        add_line(chart, name, x, y, colour, dashed=dashed, marks=True)
    sheet.column_dimensions[get_column_letter(number)].width = 3
    at.page.break_here()
    add_chart(at.page, chart)
