"""One evaluated unit on the console."""

from __future__ import annotations

import numpy as np
from rich.console import Console
from rich.text import Text

from yieldosc.quantities import format_quantity
from yieldosc.reports.terminal import line
from yieldosc.unit import Unit

MEANING = {
    "starts": "starts on the intended mode",
    "no_bias": "no bias point: the stage does not amplify",
    "undefined": "cannot be solved at these values",
    "not_assessable": "outside the range in which this circuit's model holds",
    "no_start": "does not start",
    "wrong_mode": "starts on another mode",
}
DIGITS = 9


def print_unit(unit: Unit, console: Console) -> None:
    """Every figure of a single unit, with its SI unit and what it means."""
    console.print(line(f"{unit.circuit}, one unit at {unit.temperature_c:g} °C", "bold"))
    for name, value, meaning in _rows(unit):
        text = Text(f"  {name.ljust(18)}")
        text.append(value.ljust(20), style="bold").append(meaning, style="dim")
        text.rstrip()
        console.print(text, soft_wrap=True)


def _rows(unit: Unit) -> list[tuple[str, str, str]]:
    outcome = str(unit.outcome)
    rows = [("outcome", outcome, MEANING.get(outcome, ""))]
    switches = unit.startup_margin is None and outcome == "starts"
    if switches:
        rows = [("outcome", "runs", "it switches; there is no start-up question")]
        rows.append(("frequency", _figure(unit.frequency_hz, "Hz"), "of the switching"))
    else:
        rows.append(("frequency", _figure(unit.frequency_hz, "Hz"), "where the start-up condition is just met"))
    if unit.settled_hz is not None:
        rows.append(("settled frequency", _figure(unit.settled_hz, "Hz"), "with the limiter at work"))
    if not switches:
        margin = _figure(unit.startup_margin, None, 5)
        rows.append(("start-up margin", margin, "gain over critical gain; starts above 1"))
        rows.append(("growth rate", _figure(unit.growth_per_s, "1/s", 5), "of the envelope at start-up"))
    if unit.resistance_ratio is not None:
        rows.append(("resistance ratio", _figure(unit.resistance_ratio, None, 4), "negative resistance over ESR"))
    if unit.distortion is not None:
        meaning = "at the filter's output" if switches else "once settled"
        rows.append(("distortion", f"{_number(unit.distortion) * 100:.3g} %", meaning))
    rows += _limiter_rows(unit)
    if np.any(unit.overdriven):
        rows.append(("overdriven", "yes", "the pair has become two real roots; growth is the smaller"))
    if switches:
        return rows
    found = [f for f in unit.other_modes_hz if isinstance(f, float)]
    modes = [format_quantity(f, "Hz", 6) if f else "latches (0 Hz)" for f in found]
    rows.append(("other modes", ", ".join(modes) or "none", "grow too" if modes else "no other mode grows"))
    return rows


def _limiter_rows(unit: Unit) -> list[tuple[str, str, str]]:
    """What a limiter's model says of the waves."""
    rows = []
    if unit.distortion_in is not None:
        rows.append(("", f"{_number(unit.distortion_in) * 100:.3g} %", "at the limiter's input"))
    if unit.amplitude_v is not None:
        rows.append(("amplitude", _figure(unit.amplitude_v, "V", 4), "peak of the fundamental, at the output"))
    if unit.amplitude_in_v is not None:
        rows.append(("", _figure(unit.amplitude_in_v, "V", 4), "at the limiter's input"))
    if unit.drive_w is not None:
        rows.append(("drive level", _figure(unit.drive_w, "W", 3), "of the crystal: Î²·ESR/2"))
    return rows


def _figure(value: object, si_unit: str | None, digits: int = DIGITS) -> str:
    if value is None:
        return "—"
    if si_unit in (None, "1/s"):  # no prefix: a margin of 0.93 is not "930 m"
        return f"{_number(value):.{digits}g} {si_unit or ''}".rstrip()
    return format_quantity(_number(value), si_unit, digits)


def _number(value: object) -> float:
    return float(np.ravel(np.asarray(value, dtype=np.float64))[0])
