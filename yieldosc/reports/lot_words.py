"""Sentences on the yields of single lots, and on what the interval of the pooled yield does not cover."""

from __future__ import annotations

from yieldosc.reports.amounts import listed
from yieldosc.studies.digits import rate_text
from yieldosc.studies.results import Assessment, Lots

NOT_COVERED = (
    "The interval of the yield describes the pooled rate of many lots: it covers neither how far one lot lies from "
    "that, nor reels unlike those supposed."
)


def lots_sentence(a: Assessment) -> str:
    """Yields of single lots where parts share reels; empty where none do."""
    if a.lots is None:
        return ""
    lots, below = a.lots, a.lots.share_below_target
    text = f"Of {lots.lots:,} simulated lots of {lots.units_per_lot:,} units {listed(_points(lots))}."
    if below is not None:
        text += f" Share of lots that miss the target: {rate_text(below)}."
    if lots.by_chance is not None and lots.q05 < 1:
        low, high = lots.by_chance
        text += (
            f" Chance alone among {lots.units_per_lot:,} units would put nine lots in ten between {_yield(low)} and "
            f"{_yield(high)}; the rest is reels."
        )
    return f"{text} {NOT_COVERED}"


def _points(lots: Lots) -> list[str]:
    """The 5, 50 and 95 % points; a lot in which nothing failed is called that, not 100 %."""
    if lots.q05 >= 1:
        return ["at least 95 in 100 show no failing unit"]
    made = [f"one in twenty yields {_yield(lots.q05)} or less"]
    if lots.q50 >= 1:
        return [*made, "at least half show no failing unit"]
    made.append(f"half yield {_yield(lots.q50)} or less")
    last = f"yields {_yield(lots.q95)} or more" if lots.q95 < 1 else "shows no failing unit"
    return [*made, f"one in twenty {last}"]


def _yield(share: float) -> str:
    """A lot's yield; the ends are named, never 0 % or 100 %."""
    if share >= 1:
        return "no failing unit"
    return f"{100 * share:.3g} %" if share > 0 else "no good unit"
