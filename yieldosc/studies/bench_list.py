"""From the pieces of knowledge that matter to what should be measured, and on how many samples."""

from __future__ import annotations

from collections.abc import Sequence

from yieldosc.parts.parameter import Parameter
from yieldosc.studies.knowledge import DEVICES, LOT_SIDE
from yieldosc.studies.sample_size import mean_within, wilks_one_sided, wilks_two_sided
from yieldosc.studies.scrutiny import BenchItem, Knowledge, Quantity

MOST_ITEMS = 5
COVERAGE = 0.95
REACH = 0.25  # of the tolerance's half-width: tells a lot in one half of its tolerance from one in the middle
FLAT_SD = 3**-0.5  # standard deviation of a flat distribution, in half-widths: the widest that has one peak
QUANTITIES: dict[str, Quantity] = {
    "shape": "distribution", LOT_SIDE: "reel mean", "reel share": "within a reel",
    "temperature laws": "temperature coefficient",
}  # fmt: skip


def bench_list(
    found: Sequence[Knowledge], declared: Sequence[Parameter], leading: Sequence[str], *, confidence: float = 0.95
) -> tuple[BenchItem, ...]:
    """At most five, what moves the yield most first; nothing for knowledge that moves it by no measurable amount.

    leading: parts and "reel …" lines that lead a ranking; a piece of knowledge about none of them names all its parts.
    """
    wanted = [k for k in found if k.measurable][:MOST_ITEMS]
    return tuple(_item(k, declared, leading, confidence) for k in wanted)


def _item(k: Knowledge, declared: Sequence[Parameter], leading: Sequence[str], confidence: float) -> BenchItem:
    quantity = QUANTITIES.get(k.name, "weak side")
    parts = _parts(k, declared, leading)
    if quantity == "distribution":
        count = wilks_two_sided(COVERAGE, confidence)
        return BenchItem(knowledge=k.name, quantity=quantity, parts=parts, samples=count, rule="Wilks, two-sided",
                         confidence=confidence, coverage=COVERAGE, span=k.span)  # fmt: skip
    if quantity == "weak side":
        count = wilks_one_sided(COVERAGE, confidence)
        return BenchItem(knowledge=k.name, quantity=quantity, parts=parts, samples=count, rule="Wilks, one-sided",
                         confidence=confidence, coverage=COVERAGE, span=k.span)  # fmt: skip
    count = mean_within(REACH, FLAT_SD, confidence)
    return BenchItem(knowledge=k.name, quantity=quantity, parts=parts, samples=count, rule="t interval",
                     confidence=confidence, reach=REACH, span=k.span)  # fmt: skip


def _parts(k: Knowledge, declared: Sequence[Parameter], leading: Sequence[str]) -> tuple[str, ...]:
    """Designators, the leading ones where there are any. A device's values are listed by themselves."""
    about = [p for p in declared if p.role in k.roles and (k.name not in QUANTITIES or p.kind not in DEVICES)]
    lead = [p for p in about if p.part in leading or f"reel {p.reel}" in leading]
    return tuple(dict.fromkeys(p.part for p in lead or about))
