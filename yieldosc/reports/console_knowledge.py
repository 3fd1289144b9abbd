"""The spread by assumption on the console: one bar per piece of knowledge around the declared yield."""

from __future__ import annotations

from rich.console import Console
from rich.text import Text

from yieldosc.reports.knowledge_words import bench_sentences, change_points, knowledge_lines, spread_sentence
from yieldosc.reports.terminal import hanging, heading, line, one_line
from yieldosc.studies.results import Assessment

BAR = 34
MOST_LINES = 8


def print_knowledge(a: Assessment, console: Console) -> None:
    """Bars from the lowest to the highest yield that each piece of knowledge allows; then what to measure."""
    found = knowledge_lines(a)
    if not found:
        return
    if not any(k.measurable for k in found):
        heading(console, "Spread by assumption")
        hanging(console, "•", spread_sentence(a))
        return
    heading(console, "Spread by assumption", "change of the yield in points against the declared set, one at a time")
    least = min((k.fall for k in found), default=0.0)
    most = max((k.rise for k in found), default=0.0)
    names = max(len(one_line(k.name)) for k in found[:MOST_LINES])
    for k in found[:MOST_LINES]:
        text = Text(f"  {one_line(k.name).ljust(names)}  ")
        for cells, style in _bar(k.fall, k.rise, least, most):
            text.append(cells, style=style)
        text.append(f"  {change_points(k.lowest)} to {change_points(k.highest)}")
        console.print(text, soft_wrap=True)
    rest = len(found) - MOST_LINES
    if rest > 0:
        console.print(line(f"  and {rest} more with narrower spans, on the workbook's sheet 'What to measure'", "dim"))
    sentences = bench_sentences(a)
    if sentences:
        heading(console, "What to measure")
        for sentence in sentences:
            hanging(console, "•", sentence)


def _bar(fall: float, rise: float, least: float, most: float) -> tuple[tuple[str, str], ...]:
    """Cells of a bar with a mark at the declared set."""
    extent = (most - least) or 1.0
    zero = round(-least / extent * (BAR - 1))
    first = round((fall - least) / extent * (BAR - 1))
    last = round((rise - least) / extent * (BAR - 1))
    return (
        ("░" * first, "dim"),
        ("█" * (zero - first), "cyan"),
        ("│", "bold"),
        ("█" * (last - zero), "cyan"),
        ("░" * (BAR - 1 - last), "dim"),
    )
