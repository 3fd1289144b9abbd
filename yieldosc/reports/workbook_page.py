"""Pages of the result workbook: text that stays text, tables with frozen headings, widths that fit, print set-up."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

from openpyxl import Workbook
from openpyxl.cell.cell import Cell, MergedCell
from openpyxl.styles import Alignment, Border, Font, PatternFill, Side
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.pagebreak import Break
from openpyxl.worksheet.properties import PageSetupProperties
from openpyxl.worksheet.worksheet import Worksheet

from yieldosc.sheets.text_guard import begins_like_formula, printable

A4 = 9
INK = "FF1F3A4D"
GREY_INK = "FF5A6B75"
HEAD = PatternFill("solid", start_color="FFDCE6EC")
RULE = Side(style="thin", color="FF9FB3BF")
WIDEST = 60  # characters; longer texts wrap
NARROWEST = 7
LINE_POINTS = 14.5
CM_PER_CHARACTER = 0.2
ROW_CM = 0.5  # a little less than a row's height, so that a chart never covers text

Value = str | float | int | None


def ink(size: float = 10, *, bold: bool = False, colour: str = INK) -> Font:
    """The one typeface of the workbook."""
    return Font(name="Calibri", size=size, bold=bold, color=colour)


def at(sheet: Worksheet, row: int, column: int) -> Cell:
    """A cell that can be written; the hidden cells of a merged range cannot."""
    cell = sheet.cell(row, column)
    if not isinstance(cell, Cell):
        raise ValueError(f"{cell.coordinate} lies inside a merged range")
    cell.font = ink()
    return cell


def put(cell: Cell, value: Value, number_format: str | None = None) -> Cell:
    """Write a value, never a formula: text is typed as text, and marked so that editing it does not make it one."""
    if isinstance(value, str):
        text = printable(value)
        if not text:
            return cell
        cell.value = text
        cell.data_type = "s"
        if begins_like_formula(text):
            cell.quotePrefix = True
    elif value is not None:
        cell.value = value if math.isfinite(value) else "—"
    if number_format is not None:
        cell.number_format = number_format
    return cell


@dataclass
class Page:
    """A worksheet that is filled from top to bottom; `row` is the next free one."""

    sheet: Worksheet
    row: int = 1
    widths: dict[int, float] = field(default_factory=dict)
    sentences: list[int] = field(default_factory=list)
    headings: dict[tuple[str, ...], int] = field(default_factory=dict)  # → row of the first table that has them

    @classmethod
    def new(cls, book: Workbook, name: str, heading: str, note: str, *, landscape: bool = True) -> Page:
        """A sheet with its heading and one line that says what its figures are."""
        page = cls(book.create_sheet(name))
        page.text(heading, size=14, bold=True)
        page.text(note, colour=GREY_INK)
        page.sentences.append(page.row - 1)
        page.row += 1
        print_set_up(page.sheet, landscape=landscape)
        return page

    def text(self, text: str, *, size: float = 10, bold: bool = False, colour: str = INK) -> None:
        """A line of text that may run over the cells to its right."""
        cell = put(at(self.sheet, self.row, 1), text)
        cell.font = ink(size, bold=bold, colour=colour)
        self.row += 1

    def table(
        self,
        headings: Sequence[str],
        rows: Sequence[Sequence[Value]],
        formats: Sequence[str | None],
        *,
        freeze: bool = True,
        formats_by_row: bool = False,
    ) -> tuple[int, int]:
        """A table; returns its first and last row of data. The first table's heading row is frozen, and repeated on
        every printed page. formats: one per column, or one per row."""
        top = self.row
        for column, name in enumerate(headings, start=1):
            head(put(at(self.sheet, top, column), name))
            self._widen(column, "x" * max(*map(len, name.split(" ")), len(name) // 2, 1))
        for offset, values in enumerate(rows, start=1):
            own = [formats[offset - 1]] * len(values) if formats_by_row else formats
            for column, (value, number_format) in enumerate(zip(values, own, strict=True), start=1):
                cell = put(at(self.sheet, top + offset, column), value, number_format)
                cell.border = Border(bottom=RULE)
                side = "right" if isinstance(value, int | float) else "left"
                cell.alignment = Alignment(vertical="top", wrap_text=isinstance(value, str), horizontal=side, indent=1)
                self._widen(column, shown(value, number_format))
        if freeze and self.sheet.freeze_panes is None:
            self.sheet.freeze_panes = self.sheet.cell(top + 1, 2).coordinate
        self.headings.setdefault(tuple(headings), top)
        self.row = top + len(rows) + 2
        return top + 1, top + len(rows)

    def _widen(self, column: int, text: str) -> None:
        self.widths[column] = max(self.widths.get(column, NARROWEST), min(len(text) * 1.08 + 2, WIDEST))

    def sentence(self, text: str) -> None:
        """A sentence over the whole width, wrapped."""
        self.text(text)
        self.sentences.append(self.row - 1)

    @property
    def width_cm(self) -> int:
        """Width of the table so far: what a chart below it may take."""
        return max(16, round(sum(self.widths.values()) * CM_PER_CHARACTER))

    def break_here(self) -> None:
        """The next row starts a printed page."""
        self.sheet.row_breaks.append(Break(id=self.row - 1))

    def finish(self) -> None:
        """Column widths, the printed area, and heights of rows whose text wraps, which no spreadsheet computes."""
        if (
            len(self.headings) == 1 and not self.sheet.row_breaks.brk
        ):  # one table's headings would mislead over another's columns
            (top,) = self.headings.values()
            self.sheet.print_title_rows = f"{top}:{top}"
        last = get_column_letter(max(self.widths, default=8))
        self.sheet.print_area = f"A1:{last}{self.row}"
        for column, width in self.widths.items():
            self.sheet.column_dimensions[get_column_letter(column)].width = width
        for row in self.sheet.iter_rows(max_col=len(self.widths) or 1):
            lines = max((_lines(cell, self.widths.get(cell.column or 0, 0.0)) for cell in row), default=1)
            if lines > 1:
                self.sheet.row_dimensions[row[0].row or 1].height = lines * LINE_POINTS + 3
        for number in self.sentences:
            self.sheet.merge_cells(
                start_row=number, end_row=number, start_column=1, end_column=max(self.widths, default=8)
            )
            cell = self.sheet.cell(number, 1)
            cell.alignment = Alignment(wrap_text=True, vertical="top")
            lines = lines_needed(str(cell.value), sum(self.widths.values()))
            self.sheet.row_dimensions[number].height = lines * LINE_POINTS + 2


def _lines(cell: Cell | MergedCell, width: float) -> int:
    if not isinstance(cell.value, str) or not cell.alignment.wrap_text or not width:
        return 1
    return lines_needed(cell.value, width)


def lines_needed(text: str, width: float) -> int:
    """Lines that a text takes in a column of so many characters, words kept whole."""
    room, lines, used = max(width - 1.5, 4), 1, 0.0
    for word in text.split(" "):
        if used and used + 1 + len(word) > room:
            lines, used = lines + 1, 0.0
        used += len(word) + (1 if used else 0)
        while used > room:  # a word longer than the line is broken
            lines, used = lines + 1, used - room
    return lines


def shown(value: Value, number_format: str | None) -> str:
    """Roughly what a number takes up: enough to set a width."""
    if isinstance(value, str) or value is None:
        return value or ""
    if not number_format or number_format == "General":
        return f"{value:.10g}"
    decimals = number_format.partition(".")[2]
    places = len(decimals) - len(decimals.lstrip("0"))
    number = value * 100 if "%" in number_format and '"' not in number_format else value
    return f"{number:,.{places}f}{number_format.partition(chr(34))[2].split(chr(34))[0]}  "


def head(cell: Cell) -> None:
    """The look of a heading."""
    cell.font = ink(bold=True)
    cell.fill = HEAD
    cell.alignment = Alignment(wrap_text=True, vertical="center")
    cell.border = Border(bottom=Side(style="medium", color=INK))


def print_set_up(sheet: Worksheet, *, landscape: bool, one_page: bool = False) -> None:
    """One page wide, numbered; the sign-off page also one page high."""
    sheet.page_setup.paperSize = A4
    sheet.page_setup.orientation = "landscape" if landscape else "portrait"
    sheet.page_setup.fitToWidth = 1
    sheet.page_setup.fitToHeight = 1 if one_page else 0
    sheet.sheet_properties.pageSetUpPr = PageSetupProperties(fitToPage=True)
    sheet.page_margins.left = sheet.page_margins.right = 0.5
    sheet.page_margins.top, sheet.page_margins.bottom = 0.6, 0.7
    sheet.sheet_view.showGridLines = False
    left, right = sheet.oddFooter.left, sheet.oddFooter.right  # type: ignore[union-attr]
    left.text, right.text = "&A", "Page &P of &N"
