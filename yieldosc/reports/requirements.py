"""The requirement table: each limit, the units that miss it, and the joint yield that alone carries the verdict."""

from __future__ import annotations

from dataclasses import dataclass

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import Deviation
from yieldosc.studies.digits import percent_text, rate_text
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.results import Assessment
from yieldosc.study import Requirement

NOT_STARTING = ("no_bias", "undefined", "not_assessable", "no_start", "wrong_mode")
NAMES = {
    "frequency_hz": "Frequency",
    "startup_margin": "Start-up margin",
    "startup_s": "Start-up time",
    "distortion": "Distortion",
    "drive_w": "Drive of the crystal",
}


@dataclass(frozen=True, slots=True)
class RequirementLine:
    """One row: what is required, its limit, units that miss it, their share, and what follows for the target."""

    name: str
    limit: str
    failing: str
    share: str
    verdict: str


def requirement_lines(a: Assessment) -> tuple[RequirementLine, ...]:
    """Starting first, then each limit, then all together. A unit that misses several is counted once, at the first."""
    starting = sum(a.outcomes.get(name, 0) for name in NOT_STARTING)
    asked = any(corner.margin is not None for corner in a.corners)
    lines = [_line(a, "Start-up" if asked else "Runs", "on the intended mode" if asked else "does not latch", starting)]
    lines += [
        _line(a, NAMES.get(r.attribute, r.attribute), limit_text(a, r), a.outcomes.get(r.outcome, 0))
        for r in a.study.requirements
        if asked or r.attribute not in ("startup_margin", "startup_s")
    ]
    target = a.study.design.yield_target
    lines.append(
        RequirementLine(
            name="All together: joint yield",
            limit="no target given" if target is None else f"at least {percent(target)}",
            failing=f"{a.yield_.failures or 0:,}",
            share=percent_text(a.yield_, target=target),
            verdict=a.verdict,
        )
    )
    return tuple(lines)


def _line(a: Assessment, name: str, limit: str, failing: int) -> RequirementLine:
    units = a.yield_.units or sum(a.outcomes.values())
    rate = clopper_pearson(failing, units, a.study.design.confidence)
    return RequirementLine(name, limit, f"{failing:,}", rate_text(rate), _alone(a, rate.low, rate.high))


def _alone(a: Assessment, low: float, high: float) -> str:
    """What this requirement's failures do to the target by themselves; later rows lack units counted earlier."""
    target = a.study.design.yield_target
    if target is None:
        return "no target"
    allowed = 1 - target
    if low > allowed:
        return "misses alone"
    return "within target" if high <= allowed else "undecided"


def percent(fraction: float) -> str:
    """A given fraction as per cent, digits as given: "99.5 %"."""
    return f"{fraction * 100:.10g} %"


SHARES = ("distortion",)  # attributes that are read in per cent


def limit_text(a: Assessment, requirement: Requirement) -> str:
    """ "−3 % to +3 % of 1 kHz", "at least 1.05", "at most 50 ms"."""
    low, high, unit = requirement.low, requirement.high, requirement.unit
    if requirement.attribute == "frequency_hz" and low is not None and high is not None:
        scale = Deviation.of(a.study.design)
        return f"{scale.limit_text(low)} to {scale.limit_text(high)} of {format_quantity(scale.target_hz, 'Hz', 7)}"
    bounds = []
    if low is not None:
        bounds.append(f"at least {_bound(low, unit)}")
    if high is not None:
        text = percent(high) if requirement.attribute in SHARES else _bound(high, unit)
        bounds.append(f"at most {text}")
    return " and ".join(bounds) or "none"


def _bound(value: float, unit: str) -> str:
    return f"{value:.10g}" if unit == "1" else format_quantity(value, unit, 6)
