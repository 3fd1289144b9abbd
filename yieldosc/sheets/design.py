"""The Design sheet: items in any order → limits, conditions, options. Every item is declared in one table."""

from __future__ import annotations

import difflib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

from yieldosc.errors import Place
from yieldosc.parts.shapes import ShapeError, parse_shape
from yieldosc.quantities import QuantityError, parse_quantity, parse_tolerance, shown
from yieldosc.sheets.entries import Entry, Problems, faulty, folded, plain_number, quantity
from yieldosc.sheets.price_text import parse_price
from yieldosc.study import Design, Requirement


@dataclass(frozen=True, slots=True)
class Item:
    """A row of Design: value with its unit column and note."""

    name: str
    value: Entry
    unit: str = ""
    note: str = ""

    @property
    def text(self) -> str:
        return f"{self.value.written} {self.unit}".strip()


Reader = Callable[[Item, Problems], Any]


def _si(si_unit: str) -> Reader:
    return lambda item, problems: quantity(item.value, si_unit, item.name, problems, unit_text=item.unit)


def _positive(reader: Reader) -> Reader:
    def read(item: Item, problems: Problems) -> float | None:
        value = reader(item, problems)
        if value is not None and value <= 0:
            problems.error("not-positive", f"{item.name} must be above zero; found {item.text}", item.value.place)
            return None
        return None if value is None else float(value)

    return read


def _share(item: Item, problems: Problems) -> float | None:
    """A percentage between 0 and 100 % as a fraction."""
    value = quantity(item.value, "1", item.name, problems, unit_text=item.unit)
    if value is not None and not 0 < value < 1:
        problems.error(
            "not-a-share",
            f"{item.name} must lie between 0 % and 100 %, both left out; found {item.text}",
            item.value.place,
        )
        return None
    return value


def _ppm(item: Item, problems: Problems) -> float | None:
    """A share that is written in ppm as a rule: a bare number is asked to be."""
    entry = item.value
    if entry.number is not None and not entry.percent and not item.unit.strip():
        text = f'{item.name} is the bare number {entry.number:g}; write its unit, for example "{entry.number:g} ppm"'
        problems.error("bare-number", text, entry.place)
        return None
    return _share(item, problems)


def _cost(item: Item, problems: Problems) -> float | None:
    """Zero or more, with or without a currency."""
    try:
        return parse_price(item.text)[0]
    except QuantityError as error:
        problems.error("unreadable", f"{item.name}: {error}", item.value.place)
        return None


def _number(item: Item, problems: Problems) -> float | None:
    return plain_number(item.value, item.name, problems)


def _points(item: Item, problems: Problems) -> int | None:
    value = plain_number(item.value, item.name, problems)
    if value is not None and (value != int(value) or not 2 <= value <= 1001):
        problems.error(
            "bad-count", f"{item.name} must be a whole number from 2 to 1001; found {item.text}", item.value.place
        )
        return None
    return None if value is None else int(value)


def _reel_share(item: Item, problems: Problems) -> float | None:
    return reel_share(item.value, item.name, problems)


def reel_share(entry: Entry, name: str, problems: Problems) -> float | None:
    """0 … 1 as a plain number or a percentage."""
    value = entry.number
    if value is None:
        try:
            value = parse_quantity(entry.text).value
        except QuantityError:
            value = -1.0
    if not 0 <= value <= 1:
        problems.error("not-a-share", f"{name} must lie between 0 and 1; found {shown(entry.written)}", entry.place)
        return None
    return value


def tolerance(
    entry: Entry, name: str, problems: Problems, *, nominal: float | None, si_unit: str | None
) -> tuple[float, float] | None:
    """Fractions (low, high) from text with its unit or a percent cell; None with a finding."""
    if entry.number is not None and entry.percent:
        return -abs(entry.number), abs(entry.number)
    if entry.number is not None:
        problems.error(
            "bare-number",
            f'{name} is the bare number {entry.number:g}; write "{entry.number:g} %" or give the cell a percent format',
            entry.place,
        )
        return None
    try:
        return parse_tolerance(entry.text, nominal=nominal, si_unit=si_unit)
    except QuantityError as error:
        problems.error("unreadable", f"{name}: {error}", entry.place)
        return None


def _tolerance(item: Item, problems: Problems) -> tuple[float, float] | None:
    return tolerance(item.value, item.name, problems, nominal=None, si_unit=None)


def _text(item: Item, problems: Problems) -> str | None:
    return item.value.written


def _shape(item: Item, problems: Problems) -> str | None:
    try:
        return parse_shape(item.value.text).text
    except ShapeError as error:
        problems.error("unknown-shape", f"{item.name}: {error}", item.value.place)
        return None


ITEMS: dict[str, tuple[str, Reader]] = {  # item → field of Design and how it is read
    "target frequency": ("target_frequency_hz", _positive(_si("Hz"))),
    "least margin": ("least_margin", _positive(_number)),
    "longest start-up time": ("longest_startup_s", _positive(_si("s"))),
    "start-up ratio": ("startup_ratio", _positive(_number)),
    "most distortion": ("most_distortion", _share),
    "most drive": ("most_drive_w", _positive(_si("W"))),
    "temperature low": ("temperature_low_c", _si("°C")),
    "temperature high": ("temperature_high_c", _si("°C")),
    "temperature points": ("temperature_points", _points),
    "supply": ("supply_v", _positive(_si("V"))),
    "supply tolerance": ("supply_tolerance", _tolerance),
    "life": ("life_years", _positive(_si("years"))),
    "yield target": ("yield_target", _share),
    "confidence": ("confidence", _share),
    "default shape": ("default_shape", _shape),
    "reel share": ("reel_share", _reel_share),
    "bench frequency": ("bench_frequency_hz", _positive(_si("Hz"))),
    "build quantity": ("build_quantity", _positive(_number)),
    "cost of a failed unit": ("failed_unit_cost", _cost),
    "test temperature": ("test_temperature_c", _si("°C")),
    "measurement sd": ("measurement_sd_hz", _text),  # it and all below: understood in `factory`
    "measurement bias": ("measurement_bias_hz", _text),
    "escape limit": ("escape_limit", _ppm),
    "trim role": ("trim_role", _text),
    "trim low": ("trim_low", _text),
    "trim high": ("trim_high", _text),
    "trim step": ("trim_step", _text),
    "pilot column": ("pilot_column", _text),
}
LIMITS = ("frequency limit low", "frequency limit high")
NAMES = ("circuit", "option <name>", *LIMITS, *ITEMS)
REQUIRED = ("circuit", "target frequency", *LIMITS, "temperature low", "temperature high")
_BY_KEY = {folded(name): name for name in ("circuit", *LIMITS, *ITEMS)}


@dataclass(slots=True)
class DesignSheet:
    """What the Design sheet says: circuit, options, fields of Design, items as written."""

    circuit: str = ""
    options: dict[str, tuple[str, Place]] = field(default_factory=dict)
    values: dict[str, Any] = field(default_factory=dict)
    items: dict[str, Item] = field(default_factory=dict)
    place: Place = field(default_factory=Place)

    def place_of(self, name: str) -> Place:
        return self.items[name].value.place if name in self.items else self.place


def read_design(items: list[Item], place: Place, problems: Problems) -> DesignSheet:
    """Sort items by name, read each, name the unknown, doubled and missing ones."""
    sheet = DesignSheet(place=place)
    for item in items:
        _sort(item, sheet, problems)
    for name in REQUIRED:
        if name not in sheet.items:
            problems.error("missing-item", f'Design has no item "{name}"; add it', place)
    for name, item in sheet.items.items():
        if item.value.blank or faulty(item.value, item.name, problems):
            continue
        if name in ITEMS:
            field_name, reader = ITEMS[name]
            value = reader(item, problems)
            if value is not None:
                sheet.values[field_name] = value
    if "circuit" in sheet.items and not sheet.items["circuit"].value.fault:
        sheet.circuit = sheet.items["circuit"].value.written
    return sheet


def _sort(item: Item, sheet: DesignSheet, problems: Problems) -> None:
    key = folded(item.name)
    if item.value.blank:
        if _BY_KEY.get(key) == "trim step":
            return  # left blank: the trim is continuous
        if key in _BY_KEY or key.startswith("option"):
            problems.error("empty-item", f'"{item.name}" has no value; fill it in or remove the row', item.value.place)
            sheet.items.setdefault(_BY_KEY.get(key, item.name), item)
        return
    if key.startswith("option") and key != "option":
        option = item.name.strip()[len("option") :].strip(" _-").replace(" ", "_")
        if folded(option) in map(folded, sheet.options):
            problems.error("doubled-item", f'"{item.name}" stands twice; keep one', item.value.place)
        if not item.value.fault:
            sheet.options[option] = (item.value.written, item.value.place)
        sheet.items[f"option {option}"] = item
    elif key not in _BY_KEY:
        close = difflib.get_close_matches(key, _BY_KEY, n=1)
        hint = f'; did you mean "{_BY_KEY[close[0]]}"?' if close else f"; the items are: {', '.join(NAMES)}"
        problems.error("unknown-item", f"{shown(item.name)} is no item of Design{hint}", item.value.place)
    elif _BY_KEY[key] in sheet.items:
        problems.error("doubled-item", f'"{item.name}" stands twice; keep one', item.value.place)
    else:
        sheet.items[_BY_KEY[key]] = item


def frequency_limits(sheet: DesignSheet, problems: Problems) -> tuple[float, float] | None:
    """Limits [Hz]: ppm and % are deviations from the target, Hz is absolute; both sides of the target."""
    target = sheet.values.get("target_frequency_hz")
    found = [_limit(sheet.items[name], target, problems) for name in LIMITS if name in sheet.items]
    if target is None or len(found) < 2 or None in found:
        return None
    low, high = (float(limit) for limit in found if limit is not None)
    if not low < target < high:
        low_text, high_text = (sheet.items[name].text for name in LIMITS)
        problems.error(
            "limits-exclude-target",
            f"the limits {low_text} and {high_text} do not enclose the target {sheet.items['target frequency'].text}; "
            "the low one is negative as a deviation, or below the target in Hz",
            sheet.place_of(LIMITS[0]),
        )
        return None
    return low, high


def _limit(item: Item, target: float | None, problems: Problems) -> float | None:
    entry = item.value
    if entry.blank or entry.fault:
        return None  # said already
    if entry.number is not None and not entry.percent and not item.unit.strip():
        problems.error(
            "bare-number",
            f'{item.name} is the bare number {entry.number:g}; write its unit: "{entry.number:g} ppm", '
            f'"{entry.number:g} %" or "{entry.number:g} Hz"',
            entry.place,
        )
        return None
    try:
        found = parse_quantity(item.text)
    except QuantityError as error:
        problems.error("unreadable", f"{item.name}: {error}", entry.place)
        return None
    absolute = found.si_unit == "Hz"
    if not absolute and found.si_unit != "1":
        problems.error("unreadable", f"{item.name} must be in ppm, % or Hz; found {shown(item.text)}", entry.place)
    elif (found.value if absolute else 1 + found.value) <= 0:
        problems.error(
            "not-positive",
            f"{item.name} must lie above 0 Hz; found {item.text}: a deviation is written in ppm or %, "
            "a frequency in Hz is the limit itself",
            entry.place,
        )
    elif absolute:
        return found.value
    elif target is not None:
        return float(target * (1 + found.value))
    return None


def check_design(sheet: DesignSheet, problems: Problems) -> None:
    """Items that contradict each other."""
    values = sheet.values
    low, high = values.get("temperature_low_c"), values.get("temperature_high_c")
    if low is not None and high is not None and low > high:
        problems.error(
            "temperatures-upside-down",
            f"temperature low {low:g} °C is above temperature high {high:g} °C; swap them",
            sheet.place_of("temperature low"),
        )
    tested = values.get("test_temperature_c")
    for name, value in (("temperature low", low), ("temperature high", high), ("test temperature", tested)):
        if value is not None and not -273.15 < value < 1000:
            problems.error("impossible", f"{name} {value:g} °C is no temperature of a board", sheet.place_of(name))
    if "supply_tolerance" in values and "supply_v" not in values:
        problems.error(
            "supply-missing", "supply tolerance without supply; add the item supply", sheet.place_of("supply tolerance")
        )


def requirements(design: Design, items: Mapping[str, Item]) -> tuple[Requirement, ...]:
    """The limits as objects, each with the cells that it came from."""

    def given(*names: str) -> tuple[Any, ...]:
        return tuple(items[name].value.given for name in names if name in items)

    made = [
        Requirement(
            "frequency_hz",
            design.frequency_low_hz,
            design.frequency_high_hz,
            "out_of_limits",
            "Hz",
            given=given(*LIMITS),
        ),
        Requirement("startup_margin", design.least_margin, None, "low_margin", "1", given=given("least margin")),
    ]
    optional = (
        ("startup_s", design.longest_startup_s, "slow_start", "s", "longest start-up time"),
        ("distortion", design.most_distortion, "distorted", "1", "most distortion"),
        ("drive_w", design.most_drive_w, "over_drive", "W", "most drive"),
    )
    for attribute, high, outcome, unit, name in optional:
        if high is not None:
            made.append(Requirement(attribute, None, high, outcome, unit, given=given(name)))  # type: ignore[arg-type]
    return tuple(made)
