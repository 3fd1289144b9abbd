"""The sign-off page: one printed page that says what was analysed, what came out, and who stands for it."""

from __future__ import annotations

from collections.abc import Sequence

from openpyxl import Workbook
from openpyxl.styles import Alignment, Border, PatternFill, Side
from openpyxl.worksheet.worksheet import Worksheet

from yieldosc.reports.findings import Summary
from yieldosc.reports.workbook_page import INK, RULE, at, head, ink, lines_needed, print_set_up, put
from yieldosc.studies.results import Assessment

WIDTHS = (24, 29, 9, 25, 17)
WHOLE = float(sum(WIDTHS))
MOST_OPEN = 8
FILLS = {"meets": "FFDDEEDD", "does not meet": "FFF4D9D6", "not proven": "FFFBEBCB", "not assessable": "FFFBEBCB"}
BOX = Side(style="thin", color=INK)


def sign_off(book: Workbook, a: Assessment, summary: Summary) -> None:
    """Portrait, one page high and wide."""
    sheet = book.create_sheet("Sign-off")
    for column, width in zip("ABCDE", WIDTHS, strict=True):
        sheet.column_dimensions[column].width = width
    page = _Form(sheet)
    page.sentence("Predicted production yield: sign-off", size=16, bold=True)
    _analysed(page, a)
    _verdict(page, a, summary)
    _requirements(page, summary)
    page.section("Leading parts")
    for sentence in summary.leading:
        page.sentence(sentence)
    if summary.spread:
        page.section("What the yield hangs on")
        page.sentence(summary.spread)
    page.section("What to do next")
    for step in summary.next_steps:
        page.sentence(f"•  {step}")
    page.section("Open points")
    page.sentence(summary.pedigrees)
    for point in summary.open_points[:MOST_OPEN]:
        page.sentence(f"•  {point}")
    if len(summary.open_points) > MOST_OPEN:
        page.sentence(f"•  and {len(summary.open_points) - MOST_OPEN} more, on the sheet 'Import findings'")
    page.section("Cautions")
    for caution in summary.cautions:
        page.sentence(f"•  {caution}", size=8.5)
    _signatures(page)
    print_set_up(sheet, landscape=False, one_page=True)
    sheet.print_area = f"A1:E{page.row - 1}"


class _Form:
    """Rows of merged cells, each high enough for its text."""

    def __init__(self, sheet: Worksheet) -> None:
        self.sheet = sheet
        self.row = 1

    def sentence(self, text: str, *, size: float = 10, bold: bool = False, fill: str | None = None) -> None:
        self._span(1, 5, text, size=size, bold=bold, fill=fill, width=WHOLE)
        self.row += 1

    def pair(self, label: str, text: str, *, size: float = 10, bold: bool = False) -> None:
        """A label and what stands behind it."""
        cell = put(at(self.sheet, self.row, 1), label)
        cell.font = ink(colour="FF5A6B75")
        cell.alignment = Alignment(vertical="center", wrap_text=True)
        self._span(2, 5, text, size=size, bold=bold, width=WHOLE - WIDTHS[0])
        self.row += 1

    def section(self, title: str) -> None:
        self.sheet.row_dimensions[self.row].height = 5
        self.row += 1
        self.sentence(title, bold=True, size=11)
        for column in range(1, 6):
            self.sheet.cell(self.row - 1, column).border = Border(bottom=BOX)

    def cells(self, texts: Sequence[str], *, heading: bool = False) -> None:
        lines = 1
        for column, (text, width) in enumerate(zip(texts, WIDTHS, strict=True), start=1):
            cell = put(at(self.sheet, self.row, column), text)
            cell.alignment = Alignment(wrap_text=True, vertical="center", horizontal="center" if column == 3 else None)
            cell.border = Border(bottom=RULE)
            if heading:
                head(cell)
            lines = max(lines, lines_needed(text, width))
        self.sheet.row_dimensions[self.row].height = 15.0 * lines
        self.row += 1

    def _span(
        self, first: int, last: int, text: str, *, size: float, bold: bool, width: float, fill: str | None = None
    ) -> None:
        self.sheet.merge_cells(start_row=self.row, end_row=self.row, start_column=first, end_column=last)
        cell = put(at(self.sheet, self.row, first), text)
        cell.font = ink(size, bold=bold)
        cell.alignment = Alignment(wrap_text=True, vertical="center")
        if fill is not None:
            for column in range(first, last + 1):
                self.sheet.cell(self.row, column).fill = PatternFill("solid", start_color=fill)
        lines = lines_needed(text, width * 10 / size * (0.93 if bold else 1.0))
        self.sheet.row_dimensions[self.row].height = max(15.0, lines * size * 1.3 + 2)


def _analysed(page: _Form, a: Assessment) -> None:
    p, study = a.provenance, a.study
    chosen = ", ".join(f"{key} = {choice}" for key, choice in study.circuit.options.items())
    page.pair("Study", study.name, bold=True)
    page.pair("Circuit", study.circuit.title + (f" ({chosen})" if chosen else ""))
    page.pair("Input digest", f"SHA-256 {p.input_sha256}", size=9)
    page.pair("Run", f"{p.started}, yieldosc {p.versions.get('yieldosc', '')}, seed {p.seed}, "
                     f"{a.yield_.units or 0:,} units, {len(a.corners)} corners")  # fmt: skip
    page.pair("Revisions", "BOM ____________   schematic ____________   layout ____________")


def _verdict(page: _Form, a: Assessment, summary: Summary) -> None:
    page.section("Result")
    fill = FILLS[a.verdict]
    page.sentence(summary.verdict, size=16, bold=True, fill=fill)
    page.sentence(summary.headline, fill=fill)
    for condition in summary.conditions:
        page.sentence(condition, fill=fill)
    for label, value, note in (
        (summary.yield_label, summary.yield_value, summary.yield_note),
        (summary.range_label, summary.range_value, summary.range_note),
    ):
        page.pair(label, value, size=15, bold=True)
        page.pair("", note, size=8.5)


def _requirements(page: _Form, summary: Summary) -> None:
    page.section("Requirements")
    page.cells(("Requirement", "Limit", "Units", "Share that misses it", "Verdict"), heading=True)
    for r in summary.requirements[:-1]:
        page.cells((r.name, r.limit, r.failing, r.share, r.verdict))
    joint = summary.requirements[-1]
    page.cells((joint.name, joint.limit, joint.failing, f"yield {joint.share}", joint.verdict))
    for column in range(1, 6):
        page.sheet.cell(page.row - 1, column).font = ink(bold=True)


def _signatures(page: _Form) -> None:
    page.section("Approval")
    page.cells(("", "Name", "Date", "Signature", ""), heading=True)
    for who in ("Prepared", "Checked", "Approved"):
        page.cells((who, "", "", "", ""))
        page.sheet.row_dimensions[page.row - 1].height = 21
        page.sheet.merge_cells(start_row=page.row - 1, end_row=page.row - 1, start_column=4, end_column=5)
        for column in range(1, 6):
            page.sheet.cell(page.row - 1, column).border = Border(bottom=BOX)
