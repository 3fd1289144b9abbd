"""Sentences on which assumption the yield hangs, and what to measure on the bench for it."""

from __future__ import annotations

from yieldosc.reports.amounts import MINUS, listed, signed
from yieldosc.reports.requirements import percent
from yieldosc.studies.digits import rounded
from yieldosc.studies.results import Assessment, RivalResult
from yieldosc.studies.scrutiny import BenchItem, Knowledge

QUESTIONS = {
    "shape": "how values lie inside their tolerances",
    "reel share": "how alike the parts of one reel are",
    "lot side": "in which half of its tolerance a whole lot lies",
    "temperature laws": "which way temperature coefficients lean",
}
WILKS = "Wilks, Ann. Math. Statist. 12 (1941) 91"


def knowledge_lines(a: Assessment) -> tuple[Knowledge, ...]:
    """Pieces of knowledge, the widest span first."""
    return () if a.scrutiny is None else a.scrutiny.knowledge


def question(k: Knowledge) -> str:
    """What the piece of knowledge would answer."""
    return QUESTIONS.get(k.name, f"where {k.name} lies between its bounds")


def change_points(rival: RivalResult | None) -> str:
    """Change against the declared set in points: "−12.3", "0" where no set lies on that side."""
    if rival is None or rival.difference is None:
        return "0"
    d = rival.difference
    return signed(rounded(100 * d.estimate, 100 * d.low, 100 * d.high).estimate)


def spread_sentence(a: Assessment) -> str:
    """Which piece of knowledge the yield hangs on most, or that none moves it measurably."""
    found = knowledge_lines(a)
    if not found:
        return ""
    moving = [k for k in found if k.measurable]
    if not moving:
        return (
            f"None of the {len(found)} pieces of knowledge tried one at a time moves the yield measurably: nothing "
            "needs to be measured for it."
        )
    first = moving[0]
    text = (
        f"The yield hangs most on {first.name} ({question(first)}): {change_points(first.lowest)} to "
        f"{change_points(first.highest)} points against the declared set"
    )
    if len(moving) > 1:
        then = moving[1]
        text += f"; then on {then.name}: {change_points(then.lowest)} to {change_points(then.highest)} points"
    return text + "."


def bench_sentences(a: Assessment) -> tuple[str, ...]:
    """One per item of the bench list."""
    return () if a.scrutiny is None else tuple(bench_sentence(item) for item in a.scrutiny.bench_list)


def bench_sentence(item: BenchItem) -> str:
    """What to measure, how many samples, and why so many."""
    parts = listed(list(item.parts))
    gain = f"{span_points(item)} points of yield hang on it"
    sure = percent(item.confidence)
    if item.quantity == "distribution":
        return (
            f"Measure the values of {item.samples} pieces of each of {parts}: their least and greatest value enclose "
            f"{percent(item.coverage or 0)} of the lot with {sure} confidence; {gain}."
        )
    if item.quantity == "weak side":
        return (
            f"Measure {item.knowledge} on {item.samples} pieces: the weakest bounds {percent(item.coverage or 0)} of "
            f"all pieces with {sure} confidence; {gain}."
        )
    within = f"their mean is known to {percent(item.reach or 0)} of the half-width of its spread with {sure} confidence"
    if item.quantity == "temperature coefficient":
        where = "at the coldest and hottest temperature"
        return f"Measure {parts} {where}, {item.samples} pieces of each: {within}; {gain}."
    if item.quantity == "within a reel":
        return f"Measure {item.samples} pieces of each of {parts} from each of two or more reels: {within}; {gain}."
    return f"Measure {item.samples} pieces from each reel of {parts}: {within}; {gain}."


def _settings(item: BenchItem) -> str:
    return f"p = {item.coverage:g}, C = {item.confidence:g}: {WILKS}; no distribution supposed"


def span_points(item: BenchItem) -> str:
    """The span in points, with two digits of its half."""
    return rounded(100 * item.span, 0.0, 100 * item.span).estimate


def rule_text(item: BenchItem) -> str:
    """The formula behind the number of samples, with its source."""
    if item.rule == "Wilks, two-sided":
        return f"1 − n·pⁿ⁻¹ + (n − 1)·pⁿ ≥ C, {_settings(item)}"
    if item.rule == "Wilks, one-sided":
        return f"1 − pⁿ ≥ C, {_settings(item)}"
    return (
        f"t(n {MINUS} 1)·s/√n ≤ {item.reach:g} half-widths, s = 1/√3 half-width (flat), C = {item.confidence:g}: "
        "Student's interval of a mean"
    )
