"""The sheet 'Capability': predicted indices with their quantiles, pilots, and boards for a demonstration."""

from __future__ import annotations

from openpyxl import Workbook

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import Deviation
from yieldosc.reports.capability_words import NAMES, capability_sentences, number, rate_words
from yieldosc.reports.scales import with_unit
from yieldosc.reports.workbook_page import Page, Value
from yieldosc.studies.results import Assessment, Estimate
from yieldosc.studies.scrutiny import Capability, Scrutiny

POINTS = ("0.135 % point", "Median", "99.865 % point")


def capability_sheet(book: Workbook, a: Assessment) -> None:
    """Sentences, then the numbers behind them."""
    scale = Deviation.of(a.study.design)
    page = Page.new(
        book, "Capability", "Predicted capability, and what boards could show of it",
        f"Frequency as deviation from {format_quantity(scale.target_hz, 'Hz', 9)} in {scale.unit}. Predicted from "
        "tolerances, not measured; never the source of a failing share.", landscape=False,
    )  # fmt: skip
    for sentence in capability_sentences(a):
        page.sentence(f"•  {sentence}")
    page.row += 1
    s = a.scrutiny or Scrutiny()
    if not s.capability:
        page.sheet.freeze_panes = f"A{page.row}"
        page.text("No index: it needs 2,731 units that vary, and a limit.")
    for c in s.capability:
        _indices(page, c, scale)
    _boards(page, s)
    page.finish()


def _indices(page: Page, c: Capability, scale: Deviation) -> None:
    page.text(f"{NAMES[c.output].capitalize()} at {c.corner}", size=12, bold=True)
    frequency = c.output == "frequency"
    number_format = with_unit(scale.decimals + 1, scale.unit, signed=True) if frequency else "0.0000"
    rows = [[name, *_three(q, scale if frequency else None)] for name, q in zip(POINTS, c.quantiles, strict=True)]
    page.table(("Quantile", "Estimate", "Low", "High"), rows, (None, *(number_format,) * 3))
    indices: list[list[Value]] = [["Ppk", *(number(v) for v in (c.ppk.estimate, c.ppk.low, c.ppk.high))]]
    if c.pp is not None:
        indices.append(["Pp", number(c.pp), "", ""])
    indices.append(["Ppk by mean and standard deviation", number(c.normal_ppk), "", ""])
    page.table(("Index", "Value", "Low", "High"), indices, (None,) * 4, freeze=False)


def _three(q: Estimate, scale: Deviation | None) -> list[Value]:
    values = (q.estimate, q.low, q.high)
    return [v if scale is None else scale.value(v) for v in values]


def _boards(page: Page, s: Scrutiny) -> None:
    if s.pilots:
        page.text("Ppk that a pilot run could show", size=12, bold=True)
        rows: list[list[Value]] = [[p.boards, number(p.low), number(p.high)] for p in s.pilots]
        page.table(("Boards", "From", "To"), rows, ("#,##0", None, None), freeze=False)
    if s.demonstrations:
        page.text("Boards without a failure that a demonstration needs", size=12, bold=True)
        needed: list[list[Value]] = [[rate_words(d.rate), d.confidence, d.boards] for d in s.demonstrations]
        page.table(("Failing share below", "Confidence", "Boards"), needed, (None, "0.0#%", "#,##0"), freeze=False)
