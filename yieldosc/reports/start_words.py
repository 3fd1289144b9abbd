"""Sections on what a limiter does to frequency and yield, and on a crystal circuit's two start-up figures."""

from __future__ import annotations

import math
from collections.abc import Iterator

from yieldosc.circuits.crystal import ESR_ASSUMPTION
from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import Deviation, margin_text, points_text
from yieldosc.reports.decision import Cell, Section, number_cell, words
from yieldosc.studies.digits import percent_text
from yieldosc.studies.extra_results import LimiterEffect
from yieldosc.studies.results import Assessment, CornerResult, Distribution

MEANING = {
    "clip": "the output stops at its rails",
    "tanh": "a differential pair limits its current",
    "exp": "a single bipolar stage with its mean current fixed",
    "agc": "a level control, clipping where it is at its stop",
}
MOST_ROWS = 12


def limiter_section(a: Assessment, effect: LimiterEffect) -> Section:
    """Crossing and settled frequency side by side, with distortion and amplitude where they are known."""
    scale = Deviation.of(a.study.design)
    corners = [c for c in a.corners if c.settled_hz is not None]
    known = {name for c in corners for name in c.others}
    columns = [("corner", ""), ("crossing, median", "right"), ("settled, median", "right"),
               ("crossing, sd", "right"), ("settled, sd", "right")]  # fmt: skip
    optional = [
        ("distortion_in", "dist. at limiter"), ("distortion", "dist. at output"),
        ("amplitude_in_v", "V at limiter"), ("amplitude_v", "V at output"), ("drive_w", "crystal drive"),
    ]  # fmt: skip
    shown = [(name, title) for name, title in optional if name in known or name == "distortion"]
    columns += [(title, "right") for _, title in shown]
    rows = tuple(
        (words(c.corner.text), *_frequencies(scale, c), *(_optional(c, name) for name, _ in shown)) for c in corners
    )
    return Section(
        title=f"What the limiter does: {effect.limiter}, {MEANING.get(effect.limiter, effect.limiter)}",
        note=f"limits apply to the settled frequency; deviations from {format_quantity(scale.target_hz, 'Hz', 9)}; "
        "distortion, peak volts and drive: medians",
        columns=tuple(columns), rows=rows, key="limiter", most=MOST_ROWS,
        sentences=tuple(_limiter_sentences(effect)),
    )  # fmt: skip


def _frequencies(scale: Deviation, c: CornerResult) -> tuple[Cell, ...]:
    assert c.settled_hz is not None
    both = (c.frequency_hz, c.settled_hz)
    spreads = [d.sd / scale.target_hz * scale.scale for d in both]
    return (
        *(number_cell(scale.value(d.q50), scale.text(d.q50), "0.000") for d in both),
        *(number_cell(s, f"{s:.3g} {scale.unit}", "0.000") for s in spreads),
    )


def _optional(c: CornerResult, name: str) -> Cell:
    d: Distribution | None = c.distortion if name == "distortion" else c.others.get(name)
    if d is None:
        return words("—")
    if name.startswith("distortion"):
        return number_cell(d.q50, f"{d.q50 * 100:.3g} %", "0.000%")
    return number_cell(d.q50, format_quantity(d.q50, "W" if name == "drive_w" else "V", 3), "General")


def _limiter_sentences(effect: LimiterEffect) -> Iterator[str]:
    units = effect.yield_with.units or 0
    yield (
        f"Yield with the limiter {percent_text(effect.yield_with)}, without it {percent_text(effect.yield_without)}: "
        f"{points_text(effect.difference)}, on the same {units:,} units; without it the limits apply to the crossing, "
        "and distortion is not judged."
    )
    yield (
        "The distance from the crossing holds two things: the network as it is while the limiter acts (a clipped "
        "op-amp's inverting input is no virtual ground), and the harmonics that come back through it."
    )
    yield _account(effect)


def _account(effect: LimiterEffect) -> str:
    """How settled frequencies were found, and how far the quick way was off where it was checked."""
    a = effect.account
    text = f"Found by {a.method}"
    if a.checked:
        text += (
            f"; checked in full on {a.checked:,} unit-corners: largest difference {a.residual * 1e6:.2g} ppm, "
            f"largest shift {a.largest_shift * 100:.3g} %, {a.tolerance * 1e6:.2g} ppm allowed"
        )
    text += f"; {a.full:,} unit-corners solved in full"
    if a.fell_back:
        text += ", among them whole blocks in which the quick way missed what is allowed"
    if a.capped:
        text += f"; in {a.capped:,} the frequency still moved at the most harmonics balanced"
    if a.not_converged:
        text += f"; {a.not_converged:,} did not converge and count as undefined"
    if "no shift" in a.method:
        text += "; the shift is below 1 ppm of the limits' width on a sample, so it is left out of the other units"
    return f"{text}."


def crystal_section(a: Assessment) -> Section:
    """Gain over critical gain, and −R over ESR."""
    rows = tuple(
        (
            number_cell(line.temperature_c, f"{line.temperature_c:g} °C".replace("-", "−"), '0.##" °C"'),
            number_cell(line.margin_min, margin_text(line.margin_min), "0.000"),
            number_cell(line.margin_q50, margin_text(line.margin_q50), "0.000"),
            *(_ratio(v) for v in (line.ratio_min, line.ratio_q001, line.ratio_q50)),
        )
        for line in a.crystal_start
    )
    return Section(
        title="Start-up of the crystal, both figures", key="crystal start", rows=rows, most=MOST_ROWS,
        note="margin: gain over critical gain; −R/ESR: negative resistance at the crystal's terminals over its series "
        "resistance; least over supplies and ages",
        columns=(
            ("temperature", "right"), ("margin min", "right"), ("margin median", "right"), ("−R/ESR min", "right"),
            ("−R/ESR 0.1 %", "right"), ("−R/ESR median", "right"),
        ),
        sentences=(
            f"{ESR_ASSUMPTION[0].upper()}{ESR_ASSUMPTION[1:]}: read which one the data sheet states.",
            "Practice means either figure by margin; 5 is common practice for −R/ESR, and disputed (2 to 10).",
        ),
    )  # fmt: skip


def _ratio(value: float) -> Cell:
    return number_cell(value, f"{value:.3g}" if math.isfinite(value) else None, "0.00")
