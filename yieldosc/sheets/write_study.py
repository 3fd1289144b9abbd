"""A study back into sheets: what the result workbook carries, so that it can be assessed again."""

from __future__ import annotations

from yieldosc.sheets.roles import COLUMNS
from yieldosc.sheets.study_tables import DESIGN_COLUMNS
from yieldosc.study import Study

Rows = tuple[tuple[str, ...], ...]


def study_sheets(study: Study) -> list[tuple[str, Rows]]:
    """(sheet name, rows with headings first) of BOM, Design, Roles and the sheets that they name; all text."""
    return [
        ("BOM", study.bom_rows),
        ("Design", (DESIGN_COLUMNS, *study.design_rows)),
        ("Roles", (COLUMNS, *study.role_rows)),
        *study.extra_rows.items(),
    ]
