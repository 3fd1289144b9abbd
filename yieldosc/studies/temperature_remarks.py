"""What was done so that no unit fails unseen between two temperatures, as a finding."""

from __future__ import annotations

import math

from yieldosc.errors import Finding
from yieldosc.studies.digits import rate_text
from yieldosc.studies.scrutiny import TemperatureCheck


def temperature_findings(check: TemperatureCheck | None) -> list[Finding]:
    """One finding; a warning where units were missed that matter, none at a single temperature."""
    if check is None:
        return []
    if check.missed and not check.enough:
        return [Finding("warning", "temperatures-too-coarse", f"{_flips(check)} {_missed(check)}")]
    return [Finding("note", "between-temperatures", f"{_flips(check)} {_nothing_missed(check)}")]


def _flips(c: TemperatureCheck) -> str:
    """What was looked at and found beside the grid."""
    if c.reach == 0:
        return (
            f"Between the {c.temperatures} temperatures no unit of {c.pilot:,} comes nearer to a limit than at them, "
            f"so none of {c.units:,} was judged there: {rate_text(c.flip_rate)} fail only there."
        )
    near = f"good units within {_percent(c.reach)} of a limit's window were"
    who = "all good units were" if math.isinf(c.reach) else near
    looked = f"Between the {c.temperatures} temperatures {who} judged too, halfway and at their own turning points"
    if not c.flips:
        return f"{looked}: none of {c.units:,} fails only there, {rate_text(c.flip_rate)}."
    counted = "1 fails" if c.flips == 1 else f"{c.flips:,} fail"
    return f"{looked}: of {c.units:,} {counted} only there, {rate_text(c.flip_rate)}, counted as failing."


def _nothing_missed(c: TemperatureCheck) -> str:
    allowed = f"a tenth of the half-width of the yield's interval is {_rate(c.allowed)}"
    if c.grid_enough:
        return f"The temperatures alone are dense enough: {allowed}."
    found = "none more fails" if not c.missed else f"{c.missed} more fail"
    again = f"Eight times as dense, {found} of {c.checked:,}, {rate_text(c.missed_rate)}"
    if c.enough:
        return f"{again}: dense enough, for {allowed}."
    return f"{again}; {allowed}, less than so many units can show."


def _missed(c: TemperatureCheck) -> str:
    return (
        f"Eight times as dense, {c.missed:,} of {c.checked:,} more fail, {rate_text(c.missed_rate)}, and are not "
        f"counted; allowed is {_rate(c.allowed)}, a tenth of the half-width of the yield's interval: state more "
        "'temperature points'."
    )


def _percent(fraction: float) -> str:
    return f"{100 * fraction:.2g} %"


def _rate(fraction: float) -> str:
    return f"{fraction * 1e6:.2g} ppm" if fraction < 1e-4 else f"{fraction * 100:.2g} %"
