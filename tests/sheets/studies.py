"""A small good study as a workbook, with any cell changed: what the tests of study files are made of."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path

from openpyxl import Workbook

BOM = [
    ["Designator", "Value", "Tolerance", "Description"],
    ["R1, R2", "15k8", "±1 %", "thick film, 100 ppm/K"],
    ["C1, C2", "10 nF", "±5 %", "ceramic C0G"],
    ["R3", "22k", "±1 %", "thick film, 100 ppm/K"],
    ["R4", "10k", "±1 %", "thick film, 100 ppm/K"],
    ["C9", "100 nF", "", "ceramic X7R"],
    ["R9", "DNP", "", "not fitted"],
]
DESIGN = {
    "circuit": "wien_bridge",
    "target frequency": "1 kHz",
    "frequency limit low": "-3 %",
    "frequency limit high": "3 %",
    "temperature low": "-20 °C",
    "temperature high": "60 °C",
    "yield target": "99 %",
}
COLUMNS = ["Role", "Part", "Min", "Typ", "Max", "Tolerance", "Shape", "Temperature law", "Solder", "Drift", "Reel share",
           "Source", "Note"]  # fmt: skip
ROLES: dict[str, dict[str, object]] = {
    "R1": {"Part": "R1", "Source": "guaranteed"},
    "C1": {"Part": "C1", "Source": "guaranteed"},
    "R2": {"Part": "R2", "Source": "guaranteed"},
    "C2": {"Part": "C2", "Source": "guaranteed"},
    "RF": {"Part": "R3", "Source": "guaranteed"},
    "RG": {"Part": "R4", "Source": "guaranteed"},
    "GBW": {"Min": "0.7 MHz", "Typ": "1 MHz", "Max": "1.4 MHz", "Source": "characterised"},
}


def write(
    path: Path,
    *,
    design: Mapping[str, object] | None = None,
    roles: Mapping[str, Mapping[str, object] | None] | None = None,
    bom: Sequence[Sequence[object]] | None = None,
    extra: Mapping[str, Sequence[Sequence[object]]] | None = None,
    leave_out: Sequence[str] = (),
    percent: Sequence[tuple[str, str]] = (),
    rows: Sequence[tuple[str, object]] = (),
    base: Mapping[str, Mapping[str, object]] = ROLES,
) -> Path:
    """A workbook at `path`. design, roles: changes (None takes the item or role away) of DESIGN and of `base`;
    rows: further Design rows; percent: (sheet, cell) whose number format is percent."""
    book = Workbook()
    book.remove(book.active)
    items = {**DESIGN, **(design or {})}
    table = {**base, **{k: None if v is None else {**base.get(k, {}), **v} for k, v in (roles or {}).items()}}
    sheets: dict[str, Sequence[Sequence[object]]] = {
        "BOM": bom or BOM,
        "Design": [
            ["Item", "Value", "Unit", "Note"],
            *([k, v] for k, v in items.items() if v is not None),
            *map(list, rows),
        ],
        "Roles": [COLUMNS, *([k, *(v.get(c) for c in COLUMNS[1:])] for k, v in table.items() if v is not None)],
        **(extra or {}),
    }
    for name, content in sheets.items():
        if name not in leave_out:
            sheet = book.create_sheet(name)
            for row in content:
                sheet.append(list(row))
    for name, cell in percent:
        book[name][cell].number_format = "0.0%"
    book.save(path)
    return path
