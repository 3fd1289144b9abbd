"""One page of a decision, said once: console and workbook are drawn from it, so they cannot disagree."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from yieldosc.reports.amounts import bare_points
from yieldosc.studies.digits import percent_text, rate_text
from yieldosc.studies.results import Estimate

PERCENT = "0.0000%"
POINTS = '+0.000" points";−0.000" points";0.000" points"'
Tone = Literal["good", "bad", "open"]


@dataclass(frozen=True, slots=True)
class Cell:
    """What a console shows; a workbook takes the number where there is one."""

    text: str
    number: float | int | None = None
    number_format: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """A table, or sentences behind a mark. key: what a chart finds it by; most: rows that a console shows."""

    title: str
    note: str = ""
    columns: tuple[tuple[str, str], ...] = ()  # heading, and "right" or ""
    rows: tuple[tuple[Cell, ...], ...] = ()
    sentences: tuple[str, ...] = ()
    mark: str = "•"
    key: str = ""
    most: int = 100


@dataclass(frozen=True, slots=True, kw_only=True)
class Decision:
    """A page: what was decided, the figures in large, then the evidence."""

    title: str  # study and circuit
    stamp: str  # digest and seed
    words: str  # the decision in capitals
    tone: Tone
    headline: str
    facts: tuple[tuple[str, str, str], ...]  # label, value, note
    sections: tuple[Section, ...]


def words(text: str) -> Cell:
    """A cell of text."""
    return Cell(text)


def yield_cell(estimate: Estimate | None, *, target: float | None = None) -> Cell:
    """A yield with its interval."""
    if estimate is None:
        return Cell("—")
    return Cell(percent_text(estimate, target=target), estimate.estimate, PERCENT)


def rate_cell(estimate: Estimate | None) -> Cell:
    """A failure rate with its interval, "below …" where nothing was seen."""
    if estimate is None:
        return Cell("—")
    if estimate.failures is None and estimate.estimate * 1e9 < 1:
        return Cell(rate_text(none_seen(estimate)), estimate.estimate, PERCENT)
    return Cell(rate_text(estimate), estimate.estimate, PERCENT)


def none_seen(estimate: Estimate) -> Estimate:
    """The same rate as one of no failures: only its upper bound says anything."""
    return Estimate(
        estimate=0.0, low=0.0, high=estimate.high, confidence=estimate.confidence, units=estimate.units, failures=0
    )


def points_cell(difference: Estimate) -> Cell:
    """A difference of yields in percentage points."""
    return Cell(bare_points(difference), difference.estimate * 100, POINTS)


def number_cell(value: float | None, text: str | None = None, number_format: str | None = None) -> Cell:
    """A number with its own text; a dash where there is none."""
    if value is None or not math.isfinite(value):
        return Cell("—")
    return Cell(f"{value:.4g}" if text is None else text, value, number_format)
