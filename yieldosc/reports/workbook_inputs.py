"""Input sheets: values exactly as used with the text and cell that they came from, findings, and the study itself."""

from __future__ import annotations

from openpyxl import Workbook
from openpyxl.styles import Alignment
from openpyxl.utils import get_column_letter

from yieldosc.parts.parameter import Parameter
from yieldosc.quantities import format_quantity
from yieldosc.reports.advice import pedigree_sentence
from yieldosc.reports.console_check import bounds_text
from yieldosc.reports.method import method_rows
from yieldosc.reports.workbook_page import Page, Value, at, head, print_set_up, put
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.write_study import study_sheets
from yieldosc.studies.results import Assessment
from yieldosc.study import Study

DIGITS = 7


def inputs_used(book: Workbook, a: Assessment) -> None:
    """Roles with every cause of spread, conditions, then the items of the design."""
    page = Page.new(book, "Inputs used", "Inputs exactly as used, with their source", pedigree_sentence(a))
    headings = ("Role", "Part", "Least", "Typical", "Most", "Shape", "Temperature law", "Solder", "Drift over life",
                "Reel", "Reel share", "Source", "Note")  # fmt: skip
    rows = [_role_row(p) for p in a.study.parameters]
    rows += [_condition_row(a, role, value) for role, value in a.study.conditions.items()]
    page.table(headings, rows, (None,) * 10 + ("0.##", None, None))
    page.text("As written, and where", size=12, bold=True)
    written = [(f"design: {name.replace('_', ' ')}", "", given) for name, given in a.study.design_given.items()]
    written += [(p.role, name.replace("_", " "), given) for p in a.study.parameters for name, given in p.given.items()]
    items: list[list[Value]] = [[of, what, given.text, given.place] for of, what, given in written]
    page.table(("Of", "What", "As written", "Cell"), items, (None,) * 4, freeze=False)
    page.finish()


def _role_row(p: Parameter) -> list[Value]:
    drift = bounds_text(p.drift) if p.drift != (0.0, 0.0) else ""
    if p.ageing is not None:
        drift = f"{drift} −{p.ageing.per_decade * 100:g} % per decade from {p.ageing.reference_h:g} h".strip()
    return [
        p.role, "" if p.part == p.role else p.part, _quantity(p.low, p.unit), _quantity(p.typical, p.unit),
        _quantity(p.high, p.unit), p.shape.text, "" if p.law is None else p.law.text,
        bounds_text(p.solder) if p.solder != (0.0, 0.0) else "", drift, p.reel or "", p.reel_share, p.pedigree,
        p.note,
    ]  # fmt: skip


def _condition_row(a: Assessment, role: str, value: float) -> list[Value]:
    shown = _quantity(value, a.study.circuit.role(role).unit)
    note = "an operating condition, without spread"
    return [role, "", "", shown, "", "condition", "", "", "", "", None, "", note]


def _quantity(value: float, si_unit: str) -> str:
    return format_quantity(value, si_unit, DIGITS)


def import_findings(book: Workbook, a: Assessment) -> None:
    """Everything a reader must know of input and run, then every BOM line as it was understood."""
    page = Page.new(
        book, "Import findings", "Findings, and the BOM as understood", "Errors would have stopped the run; "
        "warnings are open points; notes say what was read or assumed.",
    )  # fmt: skip
    rows: list[list[Value]] = [[f.level, str(f.place), f.text, f.code] for f in a.findings]
    page.table(("Level", "Place", "Finding", "Code"), rows or [["none", "", "", ""]], (None,) * 4)
    lines = [line for line in a.study.bom if isinstance(line, BomLine)]
    if lines:
        page.text("BOM lines as understood", size=12, bold=True)
        page.table(
            ("Part", "Kind", "Row as written", "Place", "Value", "Tolerance", "Temperature law", "Fitted",
             "From part number"),
            [_line_row(line) for line in lines], (None,) * 9, freeze=False,
        )  # fmt: skip
    page.finish()


def _line_row(line: BomLine) -> list[Value]:
    value = "" if line.value is None else _quantity(line.value, line.si_unit or "")
    return [
        line.designator, line.kind, line.source_text, str(line.place), value,
        bounds_text(line.tolerance) if line.tolerance else "", line.temperature_law or "",
        "yes" if line.fitted else "no", ", ".join(line.decoded),
    ]  # fmt: skip


def method(book: Workbook, a: Assessment) -> None:
    """Equations and sources."""
    page = Page.new(book, "Method", "How the figures were made", "Each step with its equation and its source.")
    page.table(("Step", "What is done", "Source"), method_rows(a), (None, None, None))
    page.finish()


def provenance(book: Workbook, a: Assessment) -> None:
    """What makes the run repeatable."""
    p = a.provenance
    page = Page.new(
        book, "Provenance", "What makes this run repeatable",
        "The sheets BOM, Design and Roles behind this one are the study itself: assess this workbook to run it again.",
        landscape=False,
    )  # fmt: skip
    rows: list[list[Value]] = [
        ["Input digest, SHA-256", p.input_sha256], ["Seed", str(p.seed)], ["Started", p.started],
        ["Seconds", f"{p.seconds:g}"], ["Worker processes", f"{p.workers} (their number changes no digit)"],
        ["Units", f"{a.yield_.units or 0:,}"], ["Units of each set of assumptions", f"{a.rival_units:,}"],
        ["Unit-corners audited by the exact path", f"{p.audited:,}"], ["of these disagreeing", f"{p.disagreeing:,}"],
        ["Unit-corners solved by the exact path", f"{p.exact:,}"],

    ]  # fmt: skip
    rows += [[f"Version of {name}", version] for name, version in p.versions.items()]
    page.table(("What", "Value"), rows, (None, None))
    page.finish()


def contract_sheets(book: Workbook, study: Study) -> None:
    """BOM, Design, Roles and the sheets that they name, exactly as the study's reader writes them."""
    for name, rows in study_sheets(study):
        sheet = book.create_sheet(name)
        widths: dict[int, int] = {}
        for r, row in enumerate(rows, start=1):
            for c, text in enumerate(row, start=1):
                if not text:
                    continue
                cell = put(at(sheet, r, c), text)
                cell.alignment = Alignment(vertical="top", wrap_text=True)
                widths[c] = max(widths.get(c, 8), min(len(text) + 2, 48))
                if r == 1:
                    head(cell)
        for c, width in widths.items():
            sheet.column_dimensions[get_column_letter(c)].width = width
        sheet.freeze_panes = "A2"
        sheet.print_title_rows = "1:1"
        print_set_up(sheet, landscape=True)
