"""Native charts: bars and lines over cells, with axis titles, nothing three-dimensional."""

from __future__ import annotations

import math
from collections.abc import Sequence

from openpyxl.chart import BarChart, Reference, ScatterChart, Series
from openpyxl.chart.axis import ChartLines, NumericAxis
from openpyxl.chart.legend import Legend
from openpyxl.chart.shapes import GraphicalProperties
from openpyxl.drawing.line import LineProperties
from openpyxl.worksheet.worksheet import Worksheet

BLUE, ORANGE, RED, GREY = "2F6F8F", "C77B30", "B23A3A", "8A99A3"


def _plain(chart: BarChart | ScatterChart, title: str, x_title: str, y_title: str) -> None:
    chart.title, chart.x_axis.title, chart.y_axis.title = title, x_title or None, y_title
    for titled in (chart, chart.x_axis, chart.y_axis):
        if titled.title is not None:
            titled.title.overlay = False
    for axis in (chart.x_axis, chart.y_axis):
        axis.delete = False
        axis.crosses = "min"  # axes along the edges, not through 0
        axis.tickLblPos = "low"
    chart.width, chart.height = 24, 10
    chart.y_axis.majorGridlines = ChartLines(spPr=GraphicalProperties(ln=LineProperties(solidFill="DDE4E8")))
    chart.legend = Legend(legendPos="b")


def bars(
    sheet: Worksheet, title: str, axis: str, *, names: Reference, values: Sequence[Reference], number_format: str
) -> BarChart:
    """Horizontal bars from 0, first row on top. values: columns whose first cell is the series' name."""
    chart = BarChart()
    chart.type, chart.style = "bar", 10
    _plain(chart, title, "", axis)
    for reference, colour in zip(values, (BLUE, GREY), strict=False):
        chart.add_data(reference, titles_from_data=True)
        chart.series[-1].graphicalProperties = GraphicalProperties(solidFill=colour)
    chart.set_categories(names)
    chart.x_axis.scaling.orientation = "maxMin"  # the first row on top …
    chart.y_axis.crosses, chart.y_axis.tickLblPos = "max", "nextTo"  # … and its values still at the bottom
    chart.y_axis.scaling.min = 0
    chart.y_axis.number_format, chart.y_axis.numFmt.sourceLinked = number_format, False
    chart.gapWidth = 40
    if len(values) == 1:
        chart.legend = None
    return chart


def lines(title: str, x_title: str, y_title: str) -> ScatterChart:
    """An empty chart of numbers over numbers; `add_line` fills it."""
    chart = ScatterChart()
    chart.style, chart.scatterStyle = 13, "lineMarker"
    _plain(chart, title, x_title, y_title)
    chart.x_axis.majorGridlines = None
    for axis in (chart.x_axis, chart.y_axis):
        axis.number_format = "General"
        axis.numFmt.sourceLinked = False  # the cells' own formats carry SI units, the titles say them once
    return chart


def add_line(
    chart: ScatterChart,
    name: str,
    x: Reference,
    y: Reference,
    colour: str,
    *,
    dashed: bool = False,
    marks: bool = False,
) -> None:
    """One line through (x, y)."""
    series = Series(y, x, title=name)
    properties = LineProperties(solidFill=colour, w=19050)
    if dashed:
        properties.prstDash = "dash"
    series.graphicalProperties = GraphicalProperties(ln=properties)
    series.marker.symbol = "circle" if marks else "none"
    if marks:
        series.marker.size = 5
        series.marker.graphicalProperties = GraphicalProperties(solidFill=colour)
    series.smooth = False
    chart.series.append(series)


def span(chart: ScatterChart, x: Sequence[float], y: Sequence[float]) -> None:
    """Axes that hold the data with a little room, at round numbers."""
    assert isinstance(chart.x_axis, NumericAxis) and isinstance(chart.y_axis, NumericAxis)
    chart.x_axis.scaling.min, chart.x_axis.scaling.max, chart.x_axis.majorUnit = rounded_axis(min(x), max(x))
    chart.y_axis.scaling.min, chart.y_axis.scaling.max, chart.y_axis.majorUnit = rounded_axis(min(y), max(y))


def rounded_axis(low: float, high: float) -> tuple[float, float, float]:
    """Ends and step of an axis: 4 to 10 steps of 1, 2 or 5 times a power of ten."""

    extent = (high - low) or abs(high) or 1.0
    power = 10.0 ** math.floor(math.log10(extent / 4))
    step = next(power * m for m in (1, 2, 5, 10) if extent / (power * m) <= 8)
    first, last = math.floor(low / step) * step, math.ceil(high / step) * step
    return (first, last, step) if last > first else (first - step, last + step, step)


def around_zero(
    sheet: Worksheet, title: str, axis: str, *, names: Reference, values: Sequence[Reference]
) -> BarChart:
    """Horizontal bars to both sides of 0, first row on top. values: two columns whose first cells are the names."""
    chart = bars(sheet, title, axis, names=names, values=values, number_format="General")
    chart.grouping, chart.overlap = "stacked", 100  # a fall and a rise share one line
    chart.y_axis.scaling.min = None
    chart.x_axis.tickLblPos = "low"  # names at the edge, not beside the zero line
    chart.y_axis.crosses = "max"
    chart.x_axis.crosses = "autoZero"
    return chart
