"""Sections of an assessment that only some studies have: second sources, a pilot build, a declared trim."""

from __future__ import annotations

import math
from collections.abc import Iterator

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import Deviation, listed
from yieldosc.reports.decision import Section, number_cell, points_cell, rate_cell, words, yield_cell
from yieldosc.reports.start_words import crystal_section, limiter_section
from yieldosc.studies.extra_results import PilotResult
from yieldosc.studies.results import Assessment

ONE_LOT = "A pilot build is one lot: it says nothing of the next one's parts."


def extra_sections(a: Assessment) -> tuple[Section, ...]:
    """In the order in which they are read; none for a study without them."""
    made = []
    if a.limiter is not None:
        made.append(limiter_section(a, a.limiter))
    if a.crystal_start:
        made.append(crystal_section(a))
    if a.second_sources:
        made.append(_second_sources(a))
    if a.pilot is not None:
        made.append(_pilot(a, a.pilot))
    return tuple(made)


def _second_sources(a: Assessment) -> Section:
    ordered = sorted(a.second_sources, key=lambda c: c.yield_.estimate)
    rows = tuple((words(c.text), yield_cell(c.yield_), points_cell(c.difference)) for c in ordered)
    return Section(
        title="Second sources", key="second sources", rows=rows,
        note="every allowed combination on the same draws, worst first; change against the declared parts",
        columns=(("fitted", ""), ("yield", "right"), ("change in points", "right")),
        sentences=(f"Everything else on this page is for the worst combination: {ordered[0].text}.",),
    )  # fmt: skip


def _pilot(a: Assessment, p: PilotResult) -> Section:
    scale = Deviation.of(a.study.design)
    rows = tuple(
        (
            words(t.name), words(t.method), number_cell(t.p_value, f"{t.p_value:.2g}", "0.0000"),
            words("differs" if t.rejects else "no difference shown"),
        )
        for t in p.tests
    )  # fmt: skip
    return Section(
        title=f"Pilot build, column {p.column}: {p.verdict}", key="pilot build",
        note=f"{p.boards} boards at {p.corner.text}; mean {scale.text(p.measured_mean_hz)} measured, "
        f"{scale.text(p.predicted_mean_hz)} predicted; all tests together at the study's confidence",
        columns=(("of", ""), ("test", ""), ("p", "right"), ("finding", "")), rows=rows,
        sentences=tuple(_pilot_sentences(a, p, scale)),
    )  # fmt: skip


def _pilot_sentences(a: Assessment, p: PilotResult, scale: Deviation) -> Iterator[str]:
    if p.no_starts or p.predicted_no_start.failures:
        yield f"{p.no_starts} of {p.boards} boards did not start; predicted {rate_cell(p.predicted_no_start).text}."
    shift = scale.value(scale.target_hz + p.detectable_shift_hz)
    power = f"Four pilots in five of {p.boards} boards would show a shift of {shift:.3g} {scale.unit}"
    if math.isfinite(p.detectable_spread_ratio):
        power += f" or {p.detectable_spread_ratio:.3g} times the predicted spread"
    yield f"{power}; smaller differences go unseen."
    if p.doubts:
        named = [f"{d.name} ({math.exp(min(d.log_likelihood_ratio, 50)):,.0f} times)" for d in p.doubts]
        yield (
            "The readings are more likely under another set of assumptions than under the declared one: "
            f"{listed(named)}. What it says is the assumption most in doubt."
        )
    if p.bench_frequency_hz is not None and "shifted" in p.verdict:
        value, low, high = (
            format_quantity(f, "Hz", 9)
            for f in (p.bench_frequency_hz.estimate, p.bench_frequency_hz.low, p.bench_frequency_hz.high)
        )
        yield f"A bench frequency of {value} ({low} to {high}) would centre the prediction on these boards."
    yield ONE_LOT
