"""Result sheets: leading parts, temperatures, frequency spread."""

from __future__ import annotations

import math
from itertools import pairwise, zip_longest

from openpyxl import Workbook
from openpyxl.chart import Reference

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import Deviation, per_percent_text, upper_text
from yieldosc.reports.failing_parts import failing_sentences, variance_lines
from yieldosc.reports.findings import Summary
from yieldosc.reports.scales import with_unit
from yieldosc.reports.temperatures import caption, limited_frequency, temperature_lines
from yieldosc.reports.terminal import one_line
from yieldosc.reports.workbook_charts import BLUE, GREY, ORANGE, RED, add_line, bars, lines, span
from yieldosc.reports.workbook_page import ROW_CM, Page, Value, at, ink, put
from yieldosc.studies.digits import percent_text
from yieldosc.studies.results import Assessment, CornerResult, Distribution, FailureShare, Ranking, RankLine

SHARE = "0.0%"
FIRST_ROWS = 12
FAINT = "FFB0BCC4"
OUTLINE_COLUMN = 24  # where a chart's own numbers stand, beyond the printed area
MOST_BARS = 12
CHART_ROWS = 22
SPREAD_ROWS = 26


def leading_parts(book: Workbook, a: Assessment, summary: Summary) -> None:
    """Both rankings as tables with a chart each, then causes and draws of failing units."""
    page = Page.new(
        book, "Leading parts", "Which parts decide frequency and start-up margin",
        "Shares of variance (Sobol indices); total includes interactions. Intervals from 16 scramblings.",
        landscape=False,
    )  # fmt: skip
    for sentence in summary.leading:
        page.sentence(sentence)
    page.row += 1
    for output, name in (("frequency", "frequency"), ("margin", "start-up margin")):
        ranking = a.rankings.get(output)
        if ranking is None or not ranking.parts:
            continue
        if page.row > FIRST_ROWS:
            page.break_here()
        page.text(f"Variance of the {name} at {ranking.corner.text}", size=12, bold=True)
        _ranking(page, ranking, name)
    _failure_share(page, a)
    page.finish()


def _ranking(page: Page, ranking: Ranking, name: str) -> None:
    headings = ("Part", "Total", "Total, low", "Total, high", "First order", "Low", "High", "Mean total over corners",
                "Change of output per +1 %")  # fmt: skip
    formats = (None, *(SHARE,) * 7, None)
    top = page.row
    first, last = page.table(headings, [_index_row(line) for line in ranking.parts], formats)
    end = min(last, first + MOST_BARS - 1)
    sheet = page.sheet
    chart = bars(
        sheet, f"Parts that move the {name}", "share of variance",
        names=Reference(sheet, min_col=1, min_row=first, max_row=end),
        values=[Reference(sheet, min_col=column, min_row=top, max_row=end) for column in (2, 5)],
        number_format="0%",
    )  # fmt: skip
    chart.height = round(max(6.5, 3.2 + 0.8 * (end - first + 1)))
    chart.width = page.width_cm
    sheet.add_chart(chart, f"A{page.row}")
    page.row += math.ceil(chart.height / ROW_CM) + 1
    if ranking.causes:
        page.text("Causes inside the leading parts", bold=True)
        page.table(headings, [_index_row(line) for line in ranking.causes], formats, freeze=False)


def _index_row(line: RankLine) -> list[Value]:
    return [
        one_line(line.part), line.total.estimate, line.total.low, line.total.high,
        line.first_order.estimate, line.first_order.low, line.first_order.high, line.mean_total.estimate,
        "" if not line.per_percent else per_percent_text(line.per_percent),
    ]  # fmt: skip


def _failure_share(page: Page, a: Assessment) -> None:
    page.text("Draws of failing units against all units", size=12, bold=True)
    if not a.failure_share:
        page.text("Withheld: fewer than 30 units failed.")
        return
    for sentence in failing_sentences(a):
        page.sentence(sentence)
    rows: list[list[Value]] = [
        [one_line(f.part), f.cause, f.ks_distance, f.p_value, f.mean_shift_sd, *_variance_shares(a, f)]
        for f in a.failure_share
    ]
    headings = ("Part", "Cause", "Kolmogorov–Smirnov distance", "p value", "Mean shift, standard deviations",
                "Its share of the frequency's variance", "Its share of the margin's variance")  # fmt: skip
    formats = (None, None, "0.000", "0.0E+00", "+0.00;−0.00;0.00", SHARE, SHARE)
    page.table(headings, rows, formats, freeze=False)


def _variance_shares(a: Assessment, f: FailureShare) -> list[Value]:
    """Total indices of the part at the worst corner, for frequency and margin."""
    lines = variance_lines(a, f)
    return [lines[output].total.estimate if output in lines else "" for output in ("frequency", "margin")]


def temperatures(book: Workbook, a: Assessment) -> None:
    """One line per temperature with two charts, then every corner."""
    scale = Deviation.of(a.study.design)
    target = format_quantity(scale.target_hz, "Hz", 9)
    page = Page.new(
        book, "Temperatures", "Start-up, frequency and margin over temperature",
        f"Frequency as deviation from {target} in {scale.unit}; {caption(a)}.",
        landscape=False,
    )  # fmt: skip
    deviation = with_unit(scale.decimals, scale.unit, signed=True)
    rows: list[list[Value]] = [
        [
            t.temperature_c, t.startup_failures, "—" if t.startup_rate is None else upper_text(t.startup_rate),
            scale.value(t.frequency_q001_hz), scale.value(t.frequency_q50_hz), scale.value(t.frequency_q999_hz),
            t.margin_min, t.margin_q001, percent_text(t.yield_), t.distortion_q50, t.distortion_q999,
        ]
        for t in temperature_lines(a)
    ]  # fmt: skip
    headings: tuple[str, ...] = (
                "Temperature", "Units that do not start", "At most", "Frequency, 0.1 % quantile", "Frequency, median",
                "Frequency, 99.9 % quantile", "Margin, smallest", "Margin, 0.1 % quantile", "Good here",
                "Distortion, median", "Distortion, 99.9 % quantile")  # fmt: skip
    formats: tuple[str | None, ...] = (
        '0.##" °C"', "#,##0", None, *(deviation,) * 3, "0.000", "0.000", None, "0.00%", "0.00%",
    )  # fmt: skip
    if all(t.distortion_q50 is None for t in temperature_lines(a)):
        rows, headings, formats = [row[:-2] for row in rows], headings[:-2], formats[:-2]
    first, last = page.table(headings, rows, formats)
    page.row += 1
    _frequency_chart(page, a, first, last)
    if any(t.margin_min is not None for t in temperature_lines(a)):
        _margin_chart(page, a, first, last)
    page.row += 2 * CHART_ROWS
    page.break_here()
    _every_corner(page, a, scale)
    page.finish()


def _frequency_chart(page: Page, a: Assessment, first: int, last: int) -> None:
    scale, sheet, rows = Deviation.of(a.study.design), page.sheet, temperature_lines(a)
    chart = lines("Frequency over temperature", "temperature [°C]", f"deviation from target [{scale.unit}]")
    x = Reference(sheet, min_col=1, min_row=first, max_row=last)
    for column, name, colour in ((4, "0.1 % quantile", GREY), (5, "median", BLUE), (6, "99.9 % quantile", ORANGE)):
        add_line(chart, name, x, Reference(sheet, min_col=column, min_row=first, max_row=last), colour, marks=True)
    limits = [scale.value(a.study.design.frequency_low_hz), scale.value(a.study.design.frequency_high_hz)]
    ends = (rows[0].temperature_c, rows[-1].temperature_c)
    for i, (limit, name) in enumerate(zip(limits, ("lower limit", "upper limit"), strict=True)):
        points = _outline(page, OUTLINE_COLUMN + 4 * i, first, [(end, limit) for end in ends], name)
        add_line(chart, name, *points, RED, dashed=True)
    values = [scale.value(f) for t in rows for f in (t.frequency_q001_hz, t.frequency_q999_hz)]
    span(chart, ends, [*(v for v in values if math.isfinite(v)), *limits])
    chart.width = page.width_cm
    sheet.add_chart(chart, f"A{page.row}")


def _margin_chart(page: Page, a: Assessment, first: int, last: int) -> None:
    sheet, rows = page.sheet, temperature_lines(a)
    chart = lines("Start-up margin over temperature", "temperature [°C]", "gain over critical gain")
    x = Reference(sheet, min_col=1, min_row=first, max_row=last)
    for column, name, colour in ((7, "smallest", GREY), (8, "0.1 % quantile", BLUE)):
        add_line(chart, name, x, Reference(sheet, min_col=column, min_row=first, max_row=last), colour, marks=True)
    least = a.study.design.least_margin
    ends = (rows[0].temperature_c, rows[-1].temperature_c)
    points = _outline(page, OUTLINE_COLUMN + 8, first, [(end, least) for end in ends], "least margin")
    add_line(chart, "least margin", *points, RED, dashed=True)
    margins = [m for t in rows for m in (t.margin_min, t.margin_q001) if m is not None]
    span(chart, ends, [*margins, least])
    chart.width = page.width_cm
    sheet.add_chart(chart, f"A{page.row + CHART_ROWS}")


def _every_corner(page: Page, a: Assessment, scale: Deviation) -> None:
    page.text("Every corner", size=12, bold=True)
    deviation = with_unit(scale.decimals, scale.unit, signed=True)
    rows: list[list[Value]] = []
    for c in a.corners:
        f = limited_frequency(c)
        rows.append([
            c.corner.text, c.startup_failures, scale.value(f.min), scale.value(f.q50), scale.value(f.max),
            None if c.margin is None else c.margin.min, None if c.margin is None else c.margin.q50, c.first_failures,
            percent_text(c.yield_),
        ])  # fmt: skip
    headings = ("Corner", "Units that do not start", "Frequency, smallest", "Frequency, median", "Frequency, largest",
                "Margin, smallest", "Margin, median", "Units failing here first", "Good at this corner")  # fmt: skip
    page.table(headings, rows, (None, "#,##0", *(deviation,) * 3, "0.000", "0.000", "#,##0", None), freeze=False)


def frequency_spread(book: Workbook, a: Assessment) -> None:
    """Histograms at two corners with the limits drawn."""
    scale = Deviation.of(a.study.design)
    page = Page.new(
        book, "Frequency spread", "How the frequency is spread, with its limits",
        f"Deviation from {format_quantity(scale.target_hz, 'Hz', 9)} in {scale.unit}; units in bars of equal width.",
        landscape=False,
    )  # fmt: skip
    chosen = [c for c in _two_corners(a) if limited_frequency(c).counts]
    chart = lines("Frequency of the simulated units", f"deviation from target [{scale.unit}]", "units per bar")
    start, spans, top = page.row, [0.0], 1
    page.row += SPREAD_ROWS
    for i, (corner, colour) in enumerate(zip(chosen, (BLUE, ORANGE), strict=False)):
        d = limited_frequency(corner)
        points = _outline(page, OUTLINE_COLUMN + 4 * i, start, _steps(d, scale), corner.corner.text)
        add_line(chart, corner.corner.text, *points, colour)
        spans += [scale.value(d.edges[0]), scale.value(d.edges[-1])]
        top = max(top, *d.counts)
    limits = [scale.value(a.study.design.frequency_low_hz), scale.value(a.study.design.frequency_high_hz)]
    for i, (limit, name) in enumerate(zip(limits, ("lower limit", "upper limit"), strict=True)):
        points = _outline(page, OUTLINE_COLUMN + 8 + 4 * i, start, [(limit, 0.0), (limit, float(top))], name)
        add_line(chart, name, *points, RED, dashed=True)
    span(chart, [*spans, *limits], [0.0, float(top)])
    _bars_table(page, chosen, scale)
    chart.width, chart.height = page.width_cm, 12
    page.sheet.add_chart(chart, f"A{start}")
    page.finish()


def _bars_table(page: Page, chosen: list[CornerResult], scale: Deviation) -> None:
    """The bars of each corner side by side."""
    columns = [_bars_of(limited_frequency(c), scale) for c in chosen]
    rows = [[value for cells in row for value in cells] for row in zip_longest(*columns, fillvalue=(None, None, None))]
    headings = [f"{name}, {c.corner.text}" for c in chosen for name in ("From", "To", "Units")]
    deviation = with_unit(scale.decimals + 1, scale.unit, signed=True)
    page.table(headings, rows, [deviation, deviation, "#,##0"] * len(chosen))


def _bars_of(d: Distribution, scale: Deviation) -> list[tuple[Value, Value, Value]]:
    return [
        (scale.value(low), scale.value(high), n) for (low, high), n in zip(pairwise(d.edges), d.counts, strict=True)
    ]


def _two_corners(a: Assessment) -> list[CornerResult]:
    """The new unit nearest 25 °C, and the corner where most units leave the limits, else that of the widest spread."""
    room = min(a.corners, key=lambda c: (c.corner.age_years, abs(c.corner.temperature_c - 25.0)))
    out = max(a.corners, key=lambda c: (c.failing.get("out_of_limits", 0), limited_frequency(c).sd))
    return [room] if out is room else [room, out]


def _steps(d: Distribution, scale: Deviation) -> list[tuple[float, float]]:
    """The outline of the bars."""
    made = [(scale.value(d.edges[0]), 0.0)]
    for (low, high), n in zip(pairwise(d.edges), d.counts, strict=True):
        made += [(scale.value(low), float(n)), (scale.value(high), float(n))]
    return [*made, (scale.value(d.edges[-1]), 0.0)]


def _outline(
    page: Page, column: int, row: int, points: list[tuple[float, float]], name: str
) -> tuple[Reference, Reference]:
    """Numbers that only a chart needs, to the right of the printed area."""
    sheet = page.sheet
    put(at(sheet, row, column), f"numbers of the chart: {name}").font = ink(colour=FAINT)
    for i, (x, y) in enumerate(points, start=1):
        put(at(sheet, row + i, column), x).font = ink(colour=FAINT)
        put(at(sheet, row + i, column + 1), y).font = ink(colour=FAINT)
    first, last = row + 1, row + len(points)
    return (
        Reference(sheet, min_col=column, min_row=first, max_row=last),
        Reference(sheet, min_col=column + 1, min_row=first, max_row=last),
    )
