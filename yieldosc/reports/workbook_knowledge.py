"""The sheet 'What to measure': the spread by assumption as a chart, and the bench list that follows from it."""

from __future__ import annotations

import math

from openpyxl import Workbook
from openpyxl.chart import Reference

from yieldosc.reports.amounts import listed, outward
from yieldosc.reports.knowledge_words import (
    bench_sentence,
    knowledge_lines,
    question,
    rule_text,
    span_points,
    spread_sentence,
)
from yieldosc.reports.terminal import one_line
from yieldosc.reports.workbook_charts import around_zero
from yieldosc.reports.workbook_page import ROW_CM, Page, Value
from yieldosc.studies.results import Assessment, RivalResult

POINTS = '+0.0######" points";−0.0######" points";0" points"'  # the cells are rounded to their intervals
MOST_BARS = 16


def what_to_measure(book: Workbook, a: Assessment) -> None:
    """Each piece of knowledge with the yields it spans, widest first; then what to measure and how often."""
    found = knowledge_lines(a)
    page = Page.new(
        book, "What to measure", "Spread by assumption: which piece of knowledge the yield hangs on",
        "Change of the yield in percentage points against the declared set, on the same units, one piece of knowledge "
        "at a time. A span of the sets tried, not a bound.",
    )  # fmt: skip
    if not found:
        page.sheet.freeze_panes = f"A{page.row}"
        page.text("No piece of knowledge differs from the declared set.")
        page.finish()
        return
    page.sentence(spread_sentence(a))
    rows: list[list[Value]] = [
        [one_line(k.name), _points(k.lowest), _points(k.highest), _named(k.lowest), _named(k.highest), k.sets,
         "yes" if k.measurable else "no", question(k)]
        for k in found
    ]  # fmt: skip
    headings = ("Knowledge", "Lowest", "Highest", "Lowest set", "Highest set", "Sets tried",
                "Beyond chance", "What it answers")  # fmt: skip
    top = page.row
    first, last = page.table(headings, rows, (None, POINTS, POINTS, None, None, "0", None, None))
    _chart(page, top, first, min(last, first + MOST_BARS - 1))
    _bench(page, a)
    page.finish()


def _chart(page: Page, top: int, first: int, last: int) -> None:
    sheet = page.sheet
    chart = around_zero(
        sheet, "Spread by assumption", "change of the yield in points",
        names=Reference(sheet, min_col=1, min_row=first, max_row=last),
        values=[Reference(sheet, min_col=column, min_row=top, max_row=last) for column in (2, 3)],
    )  # fmt: skip
    chart.width, chart.height = page.width_cm, round(max(7.0, 3.5 + 0.7 * (last - first + 1)))
    sheet.add_chart(chart, f"A{page.row}")
    page.row += math.ceil(chart.height / ROW_CM) + 1


def _bench(page: Page, a: Assessment) -> None:
    page.text("Bench list", size=12, bold=True)
    items = () if a.scrutiny is None else a.scrutiny.bench_list
    if not items:
        page.text("Nothing needs to be measured: no piece of knowledge moves the yield measurably.")
        return
    for item in items:
        page.sentence(f"•  {bench_sentence(item)}")
    rows: list[list[Value]] = [
        [one_line(item.knowledge), listed(list(item.parts)), item.samples, float(span_points(item)), rule_text(item)]
        for item in items
    ]
    page.row += 1
    page.table(("Knowledge", "Parts", "Samples of each", "Span", "Why so many"), rows,
               (None, None, "#,##0", POINTS, None), freeze=False)  # fmt: skip


def _points(rival: RivalResult | None) -> float:
    """Change in points, with the digits that its interval deserves."""
    return 0.0 if rival is None or rival.difference is None else outward(rival.difference)[0]


def _named(rival: RivalResult | None) -> str:
    return "declared" if rival is None else one_line(rival.name)
