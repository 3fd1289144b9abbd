"""Evidence sheets: extremes, sets of assumptions, better grades and lots, worst units."""

from __future__ import annotations

import math

from openpyxl import Workbook
from openpyxl.chart import Reference

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import Deviation, bare_percent, outward
from yieldosc.reports.findings import Summary
from yieldosc.reports.lot_words import lots_sentence
from yieldosc.reports.scales import decimals_of, scaled_unit, with_unit
from yieldosc.reports.terminal import one_line
from yieldosc.reports.workbook_charts import bars
from yieldosc.reports.workbook_page import ROW_CM, Page, Value
from yieldosc.studies.digits import rate_text
from yieldosc.studies.results import Assessment, Band, Estimate, Look, Lots

POINTS = '+0.0######" points";−0.0######" points";0" points"'  # the cells are rounded to their intervals
PERCENT = '0.0######" %"'


def extremes(book: Workbook, a: Assessment) -> None:
    """Three bands per output and temperature."""
    scale = Deviation.of(a.study.design)
    page = Page.new(
        book, "Extremes", "Three bands: extreme value, root-sum-square, simulated",
        f"Frequency as deviation from {format_quantity(scale.target_hz, 'Hz', 9)} in {scale.unit}. Only extreme value "
        "is meant as a bound: as far as its search reaches, and only where every shape is bounded.", landscape=False,
    )  # fmt: skip
    headings = ("Temperature", "Extreme, low", "Extreme, high", "Root-sum-square, low", "Root-sum-square, high",
                "Simulated, low", "Simulated, high", "Last gain of the search", "Remark")  # fmt: skip
    deviation = with_unit(scale.decimals, scale.unit, signed=True)
    for output, title, number_format in (
        ("frequency_hz", "Frequency", deviation), ("startup_margin", "Start-up margin", "0.000"),
    ):  # fmt: skip
        chosen = [band for band in a.bands if band.output == output]
        if not chosen:
            continue
        page.text(title, size=12, bold=True)
        for method in dict.fromkeys(band.method for band in chosen):
            page.sentence(f"Extreme: {method}.")
        page.sentence("The last gain is what the finest step still added to an end. It is evidence, not a certificate: "
                      "an extreme that the search did not come near would not show in it.")  # fmt: skip
        rows = [_band_row(band, scale) for band in chosen]
        page.table(headings, rows, ('0.##" °C"', *(number_format,) * 7, None))
    page.finish()


def _band_row(band: Band, scale: Deviation) -> list[Value]:
    def pair(bounds: tuple[float, float] | None) -> list[Value]:
        if bounds is None:
            return ["open", "open"]
        return [scale.value(v) for v in bounds] if band.output == "frequency_hz" else list(bounds)

    gap = band.gap
    if gap is not None and band.output == "frequency_hz":
        gap = gap / scale.target_hz * scale.scale
    return [band.temperature_c, *pair(band.extreme), *pair(band.rss), *pair(band.monte_carlo), gap, band.note]


def assumptions(book: Workbook, a: Assessment, summary: Summary) -> None:
    """Every set tried, lowest first behind the declared one, with a chart of failing units."""
    page = Page.new(
        book, "Assumptions", "The same units under other assumptions",
        f"{summary.range_label}: {summary.range_value}; {summary.range_note}.",
    )  # fmt: skip
    first_set, *others = a.rivals or (None,)
    if first_set is None:
        page.text("No set was tried.")
        return
    ordered = [first_set, *sorted((r for r in others if r is not None), key=lambda r: r.yield_.estimate)]
    target, sheet = a.study.design.yield_target, page.sheet
    rows: list[list[Value]] = [
        [
            r.name,
            bare_percent(r.yield_),
            *_bounds(r.yield_, target),
            r.yield_.failures,
            *_points(r.difference),
            r.meaning,
        ]
        for r in ordered
    ]
    headings = ("Set", "Yield", "Low", "High", "Units failing", "Change", "Change, low", "Change, high", "Meaning")
    top = page.row
    first, last = page.table(headings, rows, (None, None, PERCENT, PERCENT, "#,##0", *(POINTS,) * 3, None))
    if not any(r.yield_.failures for r in ordered):
        page.text("No unit failed in any set.")
        page.finish()
        return
    allows = "" if target is None else f"; the target allows {(1 - target) * a.rival_units:,.0f}"
    chart = bars(
        sheet, f"Units failing of {a.rival_units:,}{allows}", "units failing",
        names=Reference(sheet, min_col=1, min_row=first, max_row=last),
        values=[Reference(sheet, min_col=5, min_row=top, max_row=last)], number_format="#,##0",
    )  # fmt: skip
    chart.width, chart.height = page.width_cm, round(max(7.0, 3.5 + 0.8 * len(rows)))
    sheet.add_chart(chart, f"A{page.row}")
    page.row += math.ceil(chart.height / ROW_CM)
    page.finish()


def _bounds(yield_: Estimate, target: float | None = None) -> list[Value]:
    """Low and high in per cent; where no unit failed the high end is called that, never 100 %, the low end likewise."""
    _, low, high = outward(yield_, target=target)
    all_failed = yield_.failures is not None and yield_.failures == yield_.units
    return ["none good" if all_failed else low, "none failed" if yield_.failures == 0 else high]


def _points(difference: Estimate | None) -> list[Value]:
    if difference is None:
        return ["", "", ""]
    return list(outward(difference))


def better_grades(book: Workbook, a: Assessment) -> None:
    """The next tighter grade of each leading part; lots where reels are shared; the looks."""
    page = Page.new(
        book, "Better grades", "What the next tighter grade of one part does", "The same draws as the declared set.",
    )  # fmt: skip
    rows: list[list[Value]] = [
        [one_line(t.part), t.from_tolerance, t.to_tolerance, bare_percent(t.yield_),
         *_bounds(t.yield_, a.study.design.yield_target), *_points(t.difference)]
        for t in a.tighter
    ]  # fmt: skip
    headings = ("Part", "From", "To", "Yield", "Low", "High", "Change", "Change, low", "Change, high")
    if rows:
        page.table(headings, rows, (None, None, None, None, PERCENT, PERCENT, *(POINTS,) * 3))
    else:
        page.text("No leading part has a tighter grade.")
    lots = a.lots
    if lots is not None:
        page.text("Lots whose units share their reels", size=12, bold=True)
        page.sentence(lots_sentence(a))
        points = [_lot_yield(q) for q in (lots.q05, lots.q50, lots.q95, *(lots.by_chance or ()))]
        points += [""] * (5 - len(points))
        rows = [[lots.lots, lots.units_per_lot, *points, _below(lots)]]
        page.table(LOT_HEADINGS, rows, ("#,##0", "#,##0", *("0.0%",) * 5, None), freeze=False)
    page.text(f"Looks at the joint yield: {len(a.looks)} of {a.looks_planned} planned", size=12, bold=True)
    looks: list[list[Value]] = [
        [k.number, k.units, k.failures, *_bounds(_look_yield(k), a.study.design.yield_target)] for k in a.looks
    ]
    page.table(("Look", "Units", "Failing", "Yield, low", "Yield, high"), looks,
               (None, "#,##0", "#,##0", PERCENT, PERCENT), freeze=False)  # fmt: skip
    page.finish()


def _look_yield(look: Look) -> Estimate:
    good = (look.units - look.failures) / look.units
    return Estimate(estimate=good, low=look.low, high=look.high, units=look.units, failures=look.failures)


LOT_HEADINGS = ("Lots", "Units each", "5 % point", "Median", "95 % point", "By chance alone, 5 %",
                "By chance alone, 95 %", "Lots below the target")  # fmt: skip


def _lot_yield(share: float) -> Value:
    """A lot in which nothing failed, or nothing was good, is called that."""
    if 0 < share < 1:
        return share
    return "none failed" if share >= 1 else "none good"


def _below(lots: Lots) -> str:
    return "no target" if lots.share_below_target is None else rate_text(lots.share_below_target)


def worst_units(book: Workbook, a: Assessment) -> None:
    """Simulated boards that fail, or nearly do, with every part value at 25 °C, new."""
    scale = Deviation.of(a.study.design)
    page = Page.new(
        book, "Worst units", "Single simulated boards: the worst of each kind of failure, and those nearest to a limit",
        "Part values at 25 °C, new. Frequency (deviation from the target) and margin at the corner named.",
    )  # fmt: skip
    units = a.worst_units
    deviation = with_unit(scale.decimals + 1, scale.unit, signed=True)
    rows: list[list[Value]] = [
        ["Outcome", "", *(u.outcome.replace("_", " ") for u in units)],
        ["Corner", "", *(u.corner.text for u in units)],
        ["Frequency", "", *(scale.value(u.frequency_hz) for u in units)],
        ["Margin", "", *(u.startup_margin for u in units)],
    ]
    formats: list[str | None] = [None, None, deviation, "0.0000"]
    for p in a.study.parameters:
        factor, si_unit = scaled_unit(p.typical, p.unit)
        rows.append([p.role, p.typical * factor, *(_scaled(u.values.get(p.role), factor) for u in units)])
        formats.append(with_unit(decimals_of(p.typical * factor), si_unit))
    page.table(["", "Typical", *(f"Unit {u.number}" for u in units)], rows, formats, formats_by_row=True)
    page.finish()


def _scaled(value: float | None, factor: float) -> float | None:
    return None if value is None else value * factor
