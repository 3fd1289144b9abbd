"""One line per temperature: the worst over supply and age of what its corners show."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from yieldosc.studies.results import Assessment, CornerResult, Distribution, Estimate


@dataclass(frozen=True, slots=True)
class TemperatureLine:
    """Frequencies [Hz]; margins None where there is no start-up question. Every entry is the worst of its corners:
    lowest 0.1 % quantile, highest 99.9 % quantile, the median farthest from the target."""

    temperature_c: float
    corners: int
    startup_failures: int | None
    startup_rate: Estimate | None
    frequency_q001_hz: float
    frequency_q50_hz: float
    frequency_q999_hz: float
    margin_min: float | None
    margin_q001: float | None
    yield_: Estimate
    distortion_q50: float | None = None
    distortion_q999: float | None = None


def temperature_lines(a: Assessment) -> tuple[TemperatureLine, ...]:
    """In rising temperature."""
    by_temperature: dict[float, list[CornerResult]] = {}
    for corner in a.corners:
        by_temperature.setdefault(corner.corner.temperature_c, []).append(corner)
    target = a.study.design.target_frequency_hz
    return tuple(_line(t, by_temperature[t], target) for t in sorted(by_temperature))


def limited_frequency(result: CornerResult) -> Distribution:
    """The frequency that limits apply to: settled where a limiter is declared, else the crossing."""
    return result.settled_hz or result.frequency_hz


def _line(temperature_c: float, here: Sequence[CornerResult], target_hz: float) -> TemperatureLine:
    frequencies = [limited_frequency(c) for c in here]
    margins = [c.margin for c in here if c.margin is not None]
    asked = [c for c in here if c.startup_failures is not None]
    dead = max(asked, key=lambda c: c.startup_failures or 0) if asked else None
    return TemperatureLine(
        temperature_c=temperature_c,
        corners=len(here),
        startup_failures=None if dead is None else dead.startup_failures,
        startup_rate=None if dead is None else dead.startup_rate,
        frequency_q001_hz=min((d.q001 for d in frequencies), key=_last_if_nan),
        frequency_q50_hz=max((d.q50 for d in frequencies), key=lambda f: -_last_if_nan(-abs(f - target_hz))),
        frequency_q999_hz=max((d.q999 for d in frequencies), key=lambda f: -_last_if_nan(-f)),
        margin_min=min((m.min for m in margins), default=None),
        margin_q001=min((m.q001 for m in margins), default=None),
        yield_=min((c.yield_ for c in here), key=lambda e: e.estimate),
        distortion_q50=max((c.distortion.q50 for c in here if c.distortion is not None), default=None),
        distortion_q999=max((c.distortion.q999 for c in here if c.distortion is not None), default=None),
    )


def _last_if_nan(value: float) -> float:
    """A corner at which no unit has a gain has no frequency: it must not win."""
    return math.inf if math.isnan(value) else value


def caption(a: Assessment) -> str:
    """What the table shows and how its corners were put together."""
    per = max(line.corners for line in temperature_lines(a))
    worst = f"; each entry is the worst of {per} corners of supply and age" if per > 1 else ""
    return f"bounds at {percent_word(a)} confidence, for one temperature at a time{worst}"


def percent_word(a: Assessment) -> str:
    """ "95 %"."""
    return f"{a.study.design.confidence * 100:.10g} %"
