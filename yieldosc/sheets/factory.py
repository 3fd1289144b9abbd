"""Items of Design about test and trim: their texts depend on the target or on the trimmed role."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Any

from yieldosc.circuits.circuit import Role
from yieldosc.parts.codes import series_between
from yieldosc.quantities import Quantity, QuantityError, format_quantity, parse_quantity, parse_tolerance
from yieldosc.sheets.design import DesignSheet, Item
from yieldosc.sheets.entries import Problems, quantity
from yieldosc.study import Design

SERIES = ("E3", "E6", "E12", "E24", "E48", "E96", "E192")
LEAST_VALUES = 2  # one value is no choice
TRIM = ("trim role", "trim low", "trim high")


def make_design(
    sheet: DesignSheet, limits: tuple[float, float], trimmed: Role | None, problems: Problems
) -> Design | None:
    """The Design, with the texts about test and trim now read; None with findings."""
    values = dict(sheet.values)
    _measurement(sheet, values, problems)
    if trimmed is not None:
        _trim(sheet, values, trimmed, problems)
    if problems.fatal:
        return None
    return Design(frequency_low_hz=limits[0], frequency_high_hz=limits[1], **values)


def check_trim_items(sheet: DesignSheet, problems: Problems) -> None:
    """A trim has a role and both ends; steps alone are no trim."""
    given = [name for name in TRIM if name in sheet.items]
    step = "trim step" in sheet.items
    if (given or step) and len(given) < len(TRIM):
        listed = ", ".join([*given, *(["trim step"] if step else [])])
        problems.error(
            "trim-incomplete",
            f"a trim needs trim role, trim low and trim high; only {listed} given",
            sheet.place_of(given[0] if given else "trim step"),
        )


def _measurement(sheet: DesignSheet, values: dict[str, Any], problems: Problems) -> None:
    target_hz = values["target_frequency_hz"]
    if "measurement_sd_hz" in values:
        item = sheet.items["measurement sd"]
        sd = _of_target(item, target_hz, problems)
        if sd is not None and sd <= 0:
            problems.error("not-positive", f"{item.name} must be above zero; found {item.text}", item.value.place)
        values["measurement_sd_hz"] = sd
    if "measurement_bias_hz" in values:
        item = sheet.items["measurement bias"]
        bias = _of_target(item, target_hz, problems)
        if bias is not None and bias < 0:
            text = f"{item.name} must be zero or above, it is taken to either side; found {item.text}"
            problems.error("not-positive", text, item.value.place)
        values["measurement_bias_hz"] = bias


def _of_target(item: Item, target_hz: float, problems: Problems) -> float | None:
    """[Hz] from Hz, or from ppm or % of the target; 0 needs no unit."""
    if item.value.number == 0 or item.text == "0":
        return 0.0
    if item.value.number is None or item.value.percent or item.unit.strip():
        try:
            found = parse_quantity(item.text.removeprefix("±").strip())
        except QuantityError:
            found = Quantity(0.0, None)
        if found.si_unit in ("Hz", "1"):
            return found.value if found.si_unit == "Hz" else found.value * target_hz
    problems.error(
        "unreadable", f'{item.name} must be in Hz, ppm or %; found {item.text}: write for example "0.2 ppm"',
        item.value.place,
    )  # fmt: skip
    return None


def _trim(sheet: DesignSheet, values: dict[str, Any], role: Role, problems: Problems) -> None:
    for name in ("trim low", "trim high"):
        if name in sheet.items and not sheet.items[name].value.fault:
            item = sheet.items[name]
            values[name.replace(" ", "_")] = quantity(item.value, role.unit, name, problems, unit_text=item.unit)
    if "trim_step" in values:
        values.update(_steps(sheet.items["trim step"], role, problems))
    _check_order(sheet, values, role, problems)


def _steps(item: Item, role: Role, problems: Problems) -> dict[str, Any]:
    """Equal steps, equal steps with a tolerance of their own, or the values of a series."""
    series = item.text.upper().replace(" ", "")
    if series in SERIES:
        return {"trim_step": None, "trim_series": series}
    if re.fullmatch(r"E\d+", series):
        text = f"trim step {item.text} is no series of preferred values; write one of {', '.join(SERIES)}"
        problems.error("unknown-series", text, item.value.place)
        return {"trim_step": None}
    if item.value.number is not None and not item.unit.strip():
        return {"trim_step": quantity(item.value, role.unit, item.name, problems)}
    size, sign, tolerance = item.text.replace("+/-", "±").replace("+-", "±").partition("±")
    try:
        step = parse_quantity(size, role.unit).value
        own = parse_tolerance("±" + tolerance, nominal=step or None, si_unit=role.unit)[1] if sign else 0.0
    except QuantityError as error:
        problems.error("unreadable", f"{item.name}: {error}", item.value.place)
        return {"trim_step": None}
    return {"trim_step": step, "trim_step_tolerance": own}


def _count(series: str, low: float, high: float) -> int:
    """Values of the series from low to high."""
    try:
        return len(series_between(int(series[1:]), low, high))
    except ValueError:
        return 0


def _check_order(sheet: DesignSheet, values: Mapping[str, Any], role: Role, problems: Problems) -> None:
    """A trim goes from a lower value to a higher one, above zero, in steps that fit between."""
    low, high, step = (values.get(f"trim_{name}") for name in ("low", "high", "step"))
    if not isinstance(low, float) or not isinstance(high, float):
        return  # a problem of its own
    from_, to = (format_quantity(value, role.unit) for value in (low, high))
    if not 0 < low < high:
        problems.error(
            "trim-order",
            f"trim low {from_} and trim high {to} must be above zero and rise",
            sheet.place_of("trim low"),
        )
    elif values.get("trim_series") and _count(values["trim_series"], low, high) < LEAST_VALUES:
        problems.error(
            "trim-order",
            f"{values['trim_series']} has fewer than two values between {from_} and {to}; widen the trim",
            sheet.place_of("trim step"),
        )
    elif isinstance(step, float) and not 0 < step <= high - low:
        problems.error(
            "trim-order",
            f"trim step {sheet.items['trim step'].text} must be above zero and fit between {from_} and {to}",
            sheet.place_of("trim step"),
        )
