"""BOM tables back as text, for drafts and result workbooks."""

from __future__ import annotations

from collections.abc import Iterator

from yieldosc.sheets.tables import Table
from yieldosc.sheets.text_guard import printable


def text_table(tables: tuple[Table, ...]) -> tuple[tuple[str, ...], ...]:
    """Heading row and rows as text; tables with other headings follow with their own heading row."""
    rows: list[tuple[str, ...]] = []
    for table in tables:
        width = max([len(table.headings), *(len(row) for row in table.grid.rows[table.first : table.last])], default=0)
        titles = {c: meaning.replace("_", " ").capitalize() for c, meaning in table.columns.items()}
        heading = tuple(
            table.headings[c] if c < len(table.headings) and table.headings[c] else titles.get(c, "")
            for c in range(width)
        )
        rows.append(_clean(heading))
        rows += [_clean(row) for row in _texts(table, width) if any(row)]
    return tuple(rows)


def _texts(table: Table, width: int) -> Iterator[tuple[str, ...]]:
    for row in range(table.first, table.last):
        yield tuple(table.grid.cell(row, c).text.strip() for c in range(width))


def _clean(row: tuple[str, ...]) -> tuple[str, ...]:
    return tuple(printable(text) for text in row)
