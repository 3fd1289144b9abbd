"""A study as text: .toml with design items and roles, beside a BOM file."""

from __future__ import annotations

import re
import sys
import tomllib
from pathlib import Path
from typing import Any

from yieldosc.errors import Place, refusal
from yieldosc.sheets.child_limits import CELLS
from yieldosc.sheets.design import Item
from yieldosc.sheets.entries import Entry, Problems, folded
from yieldosc.sheets.grid import Book, Cell, Grid
from yieldosc.sheets.opening import open_book, read_file
from yieldosc.sheets.roles import COLUMNS, RoleRow
from yieldosc.sheets.size_limits import STUDY_ROWS
from yieldosc.sheets.study_tables import StudyTables, sheet_texts
from yieldosc.sheets.text_guard import printable

MOST_BYTES = 1_000_000
MOST_DOTS = 300  # of one line, plain decimals aside; a key may stand in quotes, so that strings count too
_DECIMAL = re.compile(r"(?<![\w.])\d+\.\d+(?![\w.])")
MOST_TEXT = 32_767  # characters of a cell
ROW_TABLES = {"circuit": "Circuit", "grades": "Grades", "alternates": "Alternates", "pilot": "Pilot"}  # key → sheet
KEYS = ("bom", "design", "roles", "tables", "measured", *ROW_TABLES)
_COLUMN = {folded(name): name for name in COLUMNS}


def toml_tables(path: Path, problems: Problems) -> tuple[StudyTables, Book]:
    """Items and rows of the file, and the book of its BOM with the other tables as sheets of their own.

    Items stand in [design] or at the top of the file.
    """
    content = _parsed(path)
    file = Place(path.name)
    _check_sizes(content, file)
    above = [(key, value) for key, value in content.items() if _is_item(key, value)]
    items_above = dict(above)
    for key in content:
        if key not in KEYS and key not in items_above:
            problems.error("unknown-item", f"{key!r} is no table of a study; they are: {', '.join(KEYS)}", file)
    items = [
        Item(str(name).replace("_", " "), _entry(value, Place("Design")))
        for name, value in (*above, *_table(content, "design", problems, file))
    ]
    rows = _rows(content.get("roles", []), problems, file)
    book = _book(path, content.get("bom"), file)
    extra = (*_measured(content, problems, file), *_law_sheets(content, problems, file))
    extra += (*_row_sheets(content, problems, file), *_pilot(path, content.get("pilot"), problems, file))
    texts = {grid.name: sheet_texts(grid) for grid in extra}
    return StudyTables(items, rows, Place("Design"), extra_rows=texts), Book(book.path, "toml", (*book.sheets, *extra))


def _check_sizes(content: dict[str, Any], file: Place) -> None:
    """InputError for more items or roles than a study needs; the other tables are sheets and counted as such."""
    design, roles = content.get("design"), content.get("roles")
    items = len(content) + (len(design) if isinstance(design, dict) else 0)
    for what, number, most in (
        ("items", items, STUDY_ROWS["Design"]),
        ("roles", len(roles) if isinstance(roles, list | dict) else 0, STUDY_ROWS["Roles"]),
        ("cells", max((_cells(content.get(key)) for key in (*ROW_TABLES, "measured")), default=0), CELLS),
    ):
        if number > most:
            text = f"the file has {number} {what}; at most {most} are read: delete what does not belong to the study"
            raise refusal("sheet-limit", text, file)


def _cells(table: Any) -> int:
    """Cells of the sheet that a table becomes: rows as wide as the keys of all, columns as long as the longest."""
    if isinstance(table, list):
        return len(table) * len({key for row in table if isinstance(row, dict) for key in row})
    if isinstance(table, dict):
        return len(table) * max((len(column) for column in table.values() if isinstance(column, list)), default=1)
    return 0


def _is_item(key: str, value: Any) -> bool:
    """An item of Design at the top of the file; `circuit` there names the circuit, [[circuit]] holds branches."""
    return not isinstance(value, dict | list) and (key not in KEYS or key == "circuit")


def _parsed(path: Path) -> dict[str, Any]:
    place = Place(printable(path.name))
    data = read_file(path, place)
    if len(data) > MOST_BYTES:
        raise refusal("file-limit", f"the file has more than {MOST_BYTES:,} bytes; a study has not", place)
    try:
        text = data.decode("utf-8-sig")
        _check_keys(text, place)
        return tomllib.loads(text)
    except RecursionError:
        raise refusal("not-toml", "the file nests its tables too deeply; a study has no such tables", place) from None
    except ValueError as error:  # not TOML, not UTF-8, or a number of thousands of digits
        reason = printable(" ".join(str(error).split()))[:200]
        raise refusal("not-toml", f"the file is no valid TOML: {reason}; correct it there", place) from None


def _check_keys(text: str, place: Place) -> None:
    """Refuses keys of very many parts: reading them takes time and memory without bounds."""
    for number, line in enumerate(text.splitlines(), start=1):
        if _DECIMAL.sub("0", line).count(".") > MOST_DOTS:
            text = f"this line holds more than {MOST_DOTS} points outside plain decimals; break it into several lines"
            raise refusal("not-toml", text, Place(place.sheet, number))


def _table(content: dict[str, Any], key: str, problems: Problems, file: Place) -> list[tuple[str, Any]]:
    value = content.get(key, {})
    if not isinstance(value, dict):
        problems.error("wrong-form", f"{key} must be a table of its own: write it below a line [{key}]", file)
        return []
    return list(value.items())


def _entry(value: Any, place: Place) -> Entry:
    """Numbers stay numbers, everything else is its text; so are infinity and what is too large to compute with."""
    if isinstance(value, bool) or not isinstance(value, int | float) or not abs(value) <= sys.float_info.max:
        return Entry(str(value)[:MOST_TEXT], place)
    return Entry(str(value), place, float(value))


def _rows(value: Any, problems: Problems, file: Place) -> list[RoleRow]:
    """[[roles]] with a key role, or [roles.R1]."""
    if isinstance(value, dict):
        value = [{"role": name, **cells} if isinstance(cells, dict) else cells for name, cells in value.items()]
    if not isinstance(value, list) or not all(isinstance(cells, dict) for cells in value):
        problems.error("wrong-form", "roles must be tables: write [[roles]] with a key role, or [roles.NAME]", file)
        return []
    rows = []
    for number, cells in enumerate(value, start=1):
        place = Place("Roles", number, None)
        found = {}
        for key, text in cells.items():
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
    if _outside(name):
        raise refusal("bom-outside", f"bom = {name!r}: the BOM must stand in the study's own folder", file)
    return open_book(path.parent / name)


def _outside(name: str) -> bool:
    return Path(name).is_absolute() or ".." in Path(name).parts


def _pilot(path: Path, value: Any, problems: Problems, file: Place) -> list[Grid]:
    """pilot = "FILE.csv", or [pilot] with a list of boards per column; [[pilot]] is read with the other row tables."""
    if isinstance(value, str) and _outside(value):
        problems.error("pilot-outside", f"pilot = {value!r}: the file must stand in the study's own folder", file)
    elif isinstance(value, str):
        return [Grid("Pilot", grid.rows) for grid in open_book(path.parent / value).sheets[:1]]
    elif isinstance(value, dict) and value:
        return [_columns_sheet("Pilot", list(value.items()))]
    return []


def _measured(content: dict[str, Any], problems: Problems, file: Place) -> list[Grid]:
    columns = _table(content, "measured", problems, file)
    return [_columns_sheet("Measured", columns)] if columns else []


def _columns_sheet(name: str, columns: list[tuple[str, Any]]) -> Grid:
    """One column of cells per list."""
    lists = [values if isinstance(values, list) else [values] for _, values in columns]
    head = tuple(Cell("text", heading) for heading, _ in columns)
    body = [
        tuple(_cell(values[r]) if r < len(values) else Cell("empty") for values in lists)
        for r in range(max(map(len, lists)))
    ]
    return Grid(name, (head, *body))


def _row_sheets(content: dict[str, Any], problems: Problems, file: Place) -> list[Grid]:
    """[[circuit]], [[grades]] and the like, one table per row, as the sheets of a workbook."""
    made = []
    for key, name in ROW_TABLES.items():
        rows = content.get(key, [])
        if _is_item(key, rows) or (key == "pilot" and isinstance(rows, str | dict)):
            continue
        if not isinstance(rows, list) or not all(isinstance(row, dict) for row in rows):
            problems.error("wrong-form", f"{key} must be tables: write each row below a line [[{key}]]", file)
            continue
        keys = list(dict.fromkeys(heading for row in rows for heading in row))
        head = tuple(Cell("text", heading.replace("_", " ")) for heading in keys)
        if rows:
            made.append(Grid(name, (head, *(tuple(_cell(row.get(heading, "")) for heading in keys) for row in rows))))
    return made


def _law_sheets(content: dict[str, Any], problems: Problems, file: Place) -> list[Grid]:
    """[tables] coil = [[-40, "-100 ppm"], …] → sheets named as the laws name them."""
    head = (Cell("text", "Temperature"), Cell("text", "Change"))
    made = []
    for name, points in _table(content, "tables", problems, file):
        if isinstance(points, list) and all(isinstance(point, list) for point in points):
            made.append(Grid(name, (head, *(tuple(_cell(v) for v in point) for point in points))))
        else:
            problems.error(
                "wrong-form", f'the table {name} must be a list of points: {name} = [[-40, "-100 ppm"], [25, 0]]', file
            )
    return made


def _cell(value: Any) -> Cell:
    entry = _entry(value, Place())
    return Cell("text", entry.text) if entry.number is None else Cell("number", entry.text, entry.number)
