"""The console summary of an assessment: verdict, yield and range, temperatures, ranks, rivals, advice, cautions."""

from __future__ import annotations

from rich.console import Console
from rich.text import Text

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import (
    Deviation,
    bare_percent,
    bare_points,
    margin_text,
    per_percent_text,
    share_text,
    upper_text,
)
from yieldosc.reports.console_decision import print_section
from yieldosc.reports.console_knowledge import print_knowledge
from yieldosc.reports.extra_words import extra_sections
from yieldosc.reports.findings import Summary, summarise
from yieldosc.reports.temperatures import caption, temperature_lines
from yieldosc.reports.terminal import hanging, heading, line, one_line, plain_table
from yieldosc.sheets.text_guard import printable
from yieldosc.studies.digits import percent_text
from yieldosc.studies.results import Assessment, Ranking

STYLES = {
    "meets": "bold green",
    "does not meet": "bold red",
    "not proven": "bold yellow",
    "not assessable": "bold yellow",
}
BAR = 36  # columns of a bar that stands for 100 %
MOST_PARTS = 8
MOST_NOTES = 10
MOST_RIVALS = 8
MOST_MEANING = 72  # the whole text stands in the workbook
PER_PERCENT = 25  # columns beside a bar


def print_assessment(a: Assessment, console: Console) -> None:
    """The whole summary; every sentence comes from `findings`."""
    summary = summarise(a)
    _title(a, console)
    _verdict(a, summary, console)
    _requirements(summary, console)
    _temperatures(a, console)
    for output, name in (("frequency", "frequency"), ("margin", "start-up margin")):
        if output in a.rankings:
            _bars(a.rankings[output], name, console)
    _rivals(a, console)
    print_knowledge(a, console)
    _grades(a, console)
    for section in extra_sections(a):
        print_section(section, console)
    _sentences("What decides it", summary.deciding, "•", console)
    _sentences("Capability and demonstration", summary.capability, "•", console)
    _sentences("What to do next", summary.next_steps, "→", console)
    _sentences("Open points", (*summary.open_points, summary.pedigrees), "?", console)
    _input_notes(a, console)
    _sentences("Cautions", summary.cautions, "!", console)


def _title(a: Assessment, console: Console) -> None:
    left = f"{printable(a.study.name)} · {a.study.circuit.title}"
    right = f"digest {a.study.digest[:8]} · seed {a.provenance.seed}"
    gap = console.width - len(left) - len(right)
    console.print()
    if gap >= 2:
        console.print(Text(left, "bold").append(" " * gap).append(right, style="not bold dim"), soft_wrap=True)
    else:
        console.print(Text(left, "bold"))
        console.print(Text(right, "dim"))
    console.print("─" * console.width, soft_wrap=True)


def _verdict(a: Assessment, summary: Summary, console: Console) -> None:
    style = STYLES[a.verdict]
    console.print(Text(summary.verdict, style))
    console.print(line(summary.headline))
    for condition in summary.conditions:
        console.print(line(condition))
    console.print()
    wide = max(len(summary.yield_label), len(summary.range_label)) + 3
    for label, value, note in (
        (summary.yield_label, summary.yield_value, summary.yield_note),
        (summary.range_label, summary.range_value, summary.range_note),
    ):
        console.print(Text("  " + label.ljust(wide)).append(value, style="bold"), soft_wrap=True)
        hanging(console, "", note, indent=wide + 1, style="dim")


def _requirements(summary: Summary, console: Console) -> None:
    heading(console, "Requirements", "a unit that misses several counts at the first of them")
    table = plain_table(
        ("requirement", ""), ("limit", ""), ("units", "right"), ("share missing it", ""), ("verdict", "")
    )
    for r in summary.requirements[:-1]:
        table.add_row(line(r.name), line(r.limit), r.failing, r.share, r.verdict)
    console.print(table)


def _temperatures(a: Assessment, console: Console) -> None:
    scale = Deviation.of(a.study.design)
    heading(
        console,
        "Temperatures",
        f"frequency: deviation from {format_quantity(scale.target_hz, 'Hz', 9)} in {scale.unit}",
    )
    rows = temperature_lines(a)
    starting = ("no start", "at most") if any(r.startup_rate is not None for r in rows) else ()
    margins = ("margin min", "margin 0.1 %") if any(r.margin_min is not None for r in rows) else ()
    distorted = ("dist. median", "dist. 99.9 %") if any(r.distortion_q50 is not None for r in rows) else ()
    columns = ("°C", *starting, "f 0.1 %", "f median", "f 99.9 %", *margins, *distorted, "good here")
    table = plain_table(*((name, "right") for name in columns))
    for row in rows:
        cells = {
            "°C": f"{row.temperature_c:g}".replace("-", "−"),
            "no start": "—" if row.startup_failures is None else f"{row.startup_failures:,}",
            "at most": "—" if row.startup_rate is None else upper_text(row.startup_rate),
            "f 0.1 %": scale.text(row.frequency_q001_hz, unit=False),
            "f median": scale.text(row.frequency_q50_hz, unit=False),
            "f 99.9 %": scale.text(row.frequency_q999_hz, unit=False),
            "margin min": margin_text(row.margin_min),
            "margin 0.1 %": margin_text(row.margin_q001),
            "dist. median": _distortion(row.distortion_q50),
            "dist. 99.9 %": _distortion(row.distortion_q999),
            "good here": bare_percent(row.yield_),
        }
        table.add_row(*(cells[name] for name in columns))
    console.print(table)
    if not margins:
        console.print(line("no start-up question: this circuit has no growing oscillation, it switches", "dim"))
    console.print(line(caption(a), "dim"))


def _distortion(value: float | None) -> str:
    return "—" if value is None else f"{value * 100:.3g} %"


def _bars(ranking: Ranking, name: str, console: Console) -> None:
    heading(
        console,
        f"Parts that move the {name}",
        f"share of its variance at {ranking.corner.text}, interactions included",
    )
    if ranking.withheld:
        console.print(line(f"Not ranked: {ranking.withheld}."))
        return
    shown = [(one_line(p.part), p, share_text(p.total)) for p in ranking.parts[:MOST_PARTS]]
    names = max((len(name) for name, _, _ in shown), default=1)
    room = console.width - names - max((len(share) for _, _, share in shown), default=0) - PER_PERCENT
    width = max(8, min(BAR, room))
    for label, part, share in shown:
        filled = max(0, min(width, round(part.total.estimate * width)))
        text = Text(f"  {label.ljust(names)}  ")
        text.append("█" * filled, style="cyan").append("░" * (width - filled), style="dim")
        text.append(f"  {share}")
        if part.per_percent:
            text.append(f"  {per_percent_text(part.per_percent)} per +1 %", style="dim")
        console.print(text, soft_wrap=True)
    rest = len(ranking.parts) - MOST_PARTS
    if rest > 0:
        last = shown[-1][2]
        none_above = last if last.startswith("below") else f"none above {last}"
        console.print(line(f"  and {rest} more, {'each ' if last.startswith('below') else ''}{none_above}", "dim"))


def _rivals(a: Assessment, console: Console) -> None:
    heading(console, "Sets of assumptions tried", f"{a.rival_units:,} units each, the same draws; not a bound")
    table = plain_table(("set", ""), ("meaning", ""), ("yield", "right"), ("change in points", "right"))
    first, *others = a.rivals
    others.sort(key=lambda r: r.yield_.estimate)
    left_out = max(0, len(others) - MOST_RIVALS)
    kept = others if not left_out else [*others[: MOST_RIVALS - 2], *others[-2:]]
    for rival in (first, *kept):
        change = "" if rival.difference is None else bare_points(rival.difference)
        table.add_row(line(rival.name), line(_cut(rival.meaning)), bare_percent(rival.yield_), change)
    console.print(table)
    if left_out:
        console.print(line(f"{left_out} more lie between; all stand on the workbook's sheet 'Assumptions'", "dim"))


def _cut(meaning: str) -> str:
    return meaning if len(meaning) <= MOST_MEANING else f"{meaning[: MOST_MEANING - 1].rstrip(' ,')}…"


def _grades(a: Assessment, console: Console) -> None:
    if not a.tighter:
        return
    heading(console, "The next tighter grade, one part at a time", "the same draws")
    table = plain_table(
        ("part", ""), ("from", "right"), ("to", "right"), ("yield", "right"), ("change in points", "right")
    )
    for t in a.tighter:
        table.add_row(
            one_line(t.part), t.from_tolerance, t.to_tolerance, percent_text(t.yield_), bare_points(t.difference)
        )
    console.print(table)


def _input_notes(a: Assessment, console: Console) -> None:
    """Notes only: warnings are among the open points already."""
    notes = tuple(str(f) for f in a.findings if f.level == "note")
    more = len(notes) - MOST_NOTES
    tail = (f"and {more} more on the sheet 'Import findings'",) if more > 0 else ()
    _sentences("Notes on the input", (*notes[:MOST_NOTES], *tail), "·", console)


def _sentences(title: str, sentences: tuple[str, ...], mark: str, console: Console) -> None:
    if not sentences:
        return
    heading(console, title)
    for sentence in sentences:
        hanging(console, mark, sentence)
