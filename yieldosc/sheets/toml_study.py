"""A study as text: .toml with design items and roles, beside a BOM file."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

from yieldosc.errors import Place, refusal
from yieldosc.sheets.design import Item
from yieldosc.sheets.entries import Entry, Problems, folded
from yieldosc.sheets.grid import Book, Cell, Grid
from yieldosc.sheets.opening import open_book
from yieldosc.sheets.roles import COLUMNS, RoleRow
from yieldosc.sheets.study_tables import StudyTables

MOST_BYTES = 2_000_000
KEYS = ("bom", "design", "roles", "tables", "measured", "circuit")
_COLUMN = {folded(name): name for name in COLUMNS}


def toml_tables(path: Path, problems: Problems) -> tuple[StudyTables, Book]:
    """Items and rows of the file, and the book of its BOM with the tables and measurements as sheets of their own."""
    content = _parsed(path)
    file = Place(path.name)
    for key in content:
        if key not in KEYS:
            problems.error("unknown-item", f"{key!r} is no table of a study; they are: {', '.join(KEYS)}", file)
    items = [
        Item(str(name).replace("_", " "), _entry(value, Place("Design"))) for name, value in _table(content, "design")
    ]
    rows = _rows(content.get("roles", []), problems, file)
    book = _book(path, content.get("bom"), file)
    extra = (*_measured(content), *_law_sheets(content), *_branches(content))
    return StudyTables(items, rows, Place("Design")), Book(book.path, "toml", (*book.sheets, *extra))


def _parsed(path: Path) -> dict[str, Any]:
    try:
        data = path.read_bytes() if path.stat().st_size <= MOST_BYTES else None
    except OSError as error:
        raise refusal("unreadable-file", f"{path.name} cannot be read: {error.strerror}", Place(path.name)) from None
    if data is None:
        raise refusal("too-large", f"{path.name} is larger than {MOST_BYTES:,} bytes; a study is not", Place(path.name))
    try:
        return tomllib.loads(data.decode("utf-8-sig"))
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise refusal("not-toml", f"{path.name} is no valid TOML: {error}", Place(path.name)) from None


def _table(content: dict[str, Any], key: str) -> list[tuple[str, Any]]:
    value = content.get(key, {})
    return list(value.items()) if isinstance(value, dict) else []


def _entry(value: Any, place: Place) -> Entry:
    """Numbers stay numbers, everything else is its text."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        return Entry(str(value), place)
    return Entry(str(value), place, float(value))


def _rows(value: Any, problems: Problems, file: Place) -> list[RoleRow]:
    """[[roles]] with a key role, or [roles.R1]."""
    if isinstance(value, dict):
        value = [{"role": name, **cells} for name, cells in value.items() if isinstance(cells, dict)]
    rows = []
    for number, cells in enumerate(value if isinstance(value, list) else [], start=1):
        place = Place("Roles", number, None)
        found = {}
        for key, text in (cells if isinstance(cells, dict) else {}).items():
            name = _COLUMN.get(folded(key))
            if name is None:
                problems.error(
                    "unknown-column", f"{key!r} is no column of Roles; they are: {', '.join(COLUMNS)}", place
                )
            else:
                entry = _entry(text, place)
                if not entry.blank:
                    found[name] = entry
        rows.append(RoleRow(found.pop("Role").written if "Role" in found else "", found, place))
    return rows


def _book(path: Path, name: Any, file: Place) -> Book:
    if not isinstance(name, str) or not name:
        raise refusal("missing-item", f'{path.name} names no BOM; add a line bom = "FILE.csv"', file)
    target = path.parent / name
    if Path(name).is_absolute() or ".." in Path(name).parts:
        raise refusal("bom-outside", f"bom = {name!r}: the BOM must stand in the study's own folder", file)
    return open_book(target)


def _measured(content: dict[str, Any]) -> list[Grid]:
    columns = _table(content, "measured")
    if not columns:
        return []
    lists = [values if isinstance(values, list) else [values] for _, values in columns]
    head = tuple(Cell("text", name) for name, _ in columns)
    body = [
        tuple(_cell(values[r]) if r < len(values) else Cell("empty") for values in lists)
        for r in range(max(map(len, lists)))
    ]
    return [Grid("Measured", (head, *body))]


def _branches(content: dict[str, Any]) -> list[Grid]:
    """[[circuit]] tables, one per branch, as the sheet Circuit."""
    rows = [row for row in content.get("circuit", []) if isinstance(row, dict)]
    if not rows:
        return []
    keys = list(dict.fromkeys(key for row in rows for key in row))
    head = tuple(Cell("text", key) for key in keys)
    return [Grid("Circuit", (head, *(tuple(_cell(row.get(key, "")) for key in keys) for row in rows)))]


def _law_sheets(content: dict[str, Any]) -> list[Grid]:
    """[tables] coil = [[-40, "-100 ppm"], …] → sheets named as the laws name them."""
    head = (Cell("text", "Temperature"), Cell("text", "Change"))
    return [
        Grid(name, (head, *(tuple(_cell(v) for v in point) for point in points if isinstance(point, list))))
        for name, points in _table(content, "tables")
        if isinstance(points, list)
    ]


def _cell(value: Any) -> Cell:
    entry = _entry(value, Place())
    return Cell("text", entry.text) if entry.number is None else Cell("number", entry.text, entry.number)
