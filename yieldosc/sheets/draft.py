"""A study workbook from a bare BOM: its table copied, a part proposed per role, every open cell marked."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from openpyxl import Workbook
from openpyxl.styles import Alignment, Font, PatternFill
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.worksheet import Worksheet

from yieldosc.circuits import registry
from yieldosc.circuits.circuit import CircuitError, Role
from yieldosc.errors import Finding, Place
from yieldosc.parts.parameter import PEDIGREES
from yieldosc.quantities import format_quantity
from yieldosc.sheets.bom import BomReading, read_bom
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.grid import Book
from yieldosc.sheets.hints import SOURCES
from yieldosc.sheets.propose import Proposal, propose
from yieldosc.sheets.roles import COLUMNS
from yieldosc.sheets.study_tables import DESIGN_COLUMNS

HEADING = PatternFill("solid", fgColor="DCE6EC")
OPEN = PatternFill("solid", fgColor="FBE3B5")
WIDEST = 52


@dataclass(frozen=True, slots=True)
class Draft:
    """What was proposed, and the cells that a person still has to fill ("Roles!F3: tolerance of R1")."""

    proposals: tuple[Proposal, ...]
    open_cells: tuple[str, ...]
    findings: tuple[Finding, ...]


def write_draft(book: Book, *, circuit: str, options: Mapping[str, str], path: Path) -> Draft:
    """Write the workbook to `path`; the BOM file is only read. InputError where it has no table of parts."""
    reading = read_bom(book, "BOM" if book.sheet("BOM") is not None else None)
    chosen = registry.complete_options(circuit, options)
    roles = registry.family(circuit).roles(chosen)
    proposals = _with_needed(circuit, chosen, roles, propose(roles, reading.lines, circuit))
    workbook = Workbook()
    sheet = workbook.active
    assert isinstance(sheet, Worksheet)
    sheet.title = "BOM"
    _fill(sheet, list(reading.table_rows))
    open_cells = _design(workbook.create_sheet("Design"), circuit, options, roles, reading)
    open_cells += _roles(workbook.create_sheet("Roles"), roles, proposals, reading)
    workbook.active = 2
    workbook.save(path)
    by_name = {role.name: role for role in roles}
    doubts = [
        Finding(
            "warning", "draft-doubt", f"{p.role}: {p.part or 'no part'} proposed, {p.reason}; {p.doubt}", Place("Roles")
        )
        for p in proposals
        if p.doubt and not _left_out(by_name[p.role], p)
    ]
    return Draft(tuple(_worth_telling(roles, proposals)), tuple(open_cells), (*reading.findings, *doubts))


def _with_needed(
    circuit: str, options: Mapping[str, str], roles: tuple[Role, ...], proposals: list[Proposal]
) -> list[Proposal]:
    """Proposals in which optional roles are wanted too: usual ones, and those without which nothing can be built."""
    usual = {"RB2"} if options.get("bias") == "divider" else set()
    usual |= {"RE", "RS"} | ({"CE"} if options.get("ground", "emitter") == "emitter" else set())
    by_name = {role.name: role for role in roles}
    made = [
        replace(p, wanted=True, doubt=_joined(p.doubt, "delete the row where the board has none"))
        if p.role in usual and by_name[p.role].optional
        else p
        for p in proposals
    ]
    for _ in roles:
        kept = {p.role: p for p in made}
        absent = [r for r in roles if r.name in kept and _left_out(r, kept[r.name])]
        present = {r.name for r in roles if r not in absent}
        try:
            registry.build(circuit, options, present)
        except CircuitError as error:
            asked = [(r.name, t) for t in error.problems for r in absent if re.search(rf"(?:give|needs) {r.name}\b", t)]
            if not asked:
                return made
            name, text = asked[0]
            made = [replace(p, wanted=True, doubt=_joined(p.doubt, text)) if p.role == name else p for p in made]
        else:
            return made
    return made


def _joined(*texts: str) -> str:
    return "; ".join(text for text in texts if text)


def _worth_telling(roles: tuple[Role, ...], proposals: list[Proposal]) -> list[Proposal]:
    """Proposals for the roles that the draft holds, and optional roles that several parts might play."""
    by_name = {role.name: role for role in roles}
    return [p for p in proposals if "are possible" in p.reason or not _left_out(by_name[p.role], p)]


def _write(sheet: Worksheet, row: int, column: int, text: str, *, fill: PatternFill | None = None) -> None:
    cell = sheet.cell(row, column)
    cell.value = text
    cell.data_type = "s"  # text stays text, whatever it begins with
    cell.alignment = Alignment(vertical="top", wrap_text=True)
    if fill is not None:
        cell.fill = fill
    if row == 1:
        cell.font = Font(bold=True)
        cell.fill = HEADING


def _fill(sheet: Worksheet, rows: list[tuple[str, ...]]) -> None:
    for r, row in enumerate(rows, start=1):
        for c, text in enumerate(row, start=1):
            if text:
                _write(sheet, r, c, text)
    _widths(sheet)


def _widths(sheet: Worksheet) -> None:
    for number, column in enumerate(sheet.iter_cols(), start=1):
        longest = max(len(str(cell.value)) for cell in column)
        sheet.column_dimensions[get_column_letter(number)].width = min(max(10, longest + 2), WIDEST)
    sheet.freeze_panes = "A2"


def _design(
    sheet: Worksheet, circuit: str, options: Mapping[str, str], roles: tuple[Role, ...], reading: BomReading
) -> list[str]:
    crystal = next((line for line in reading.lines if line.kind == "crystal" and line.fitted and line.value), None)
    target = "" if crystal is None or crystal.value is None else format_quantity(crystal.value, "Hz", 9)
    supply = any(role.condition and role.unit == "V" for role in roles)
    rows = [
        ("circuit", circuit, ""),
        *((f"option {name}", choice, "") for name, choice in options.items()),
        (
            "target frequency",
            target,
            "for example 8 MHz" if not target else f"from {crystal.designator}" if crystal else "",
        ),
        ("frequency limit low", "", "for example -100 ppm, -3 % or 7.9992 MHz"),
        ("frequency limit high", "", "for example 100 ppm, 3 % or 8.0008 MHz"),
        ("temperature low", "", "for example -20 °C"),
        ("temperature high", "", "for example 60 °C"),
        *((("supply", "", "for example 5 V"), ("supply tolerance", "±0 %", "for example ±5 %")) if supply else ()),
        ("yield target", "", "for example 99.9 %"),
    ]
    _fill(sheet, [DESIGN_COLUMNS])
    open_cells = []
    for r, (item, value, note) in enumerate(rows, start=2):
        _write(sheet, r, 1, item)
        _write(sheet, r, 2, value, fill=None if value else OPEN)
        _write(sheet, r, 4, f"fill in: {note}" if not value else note)
        if not value:
            open_cells.append(f"Design!B{r}: {item}")
    _widths(sheet)
    return open_cells


def _roles(sheet: Worksheet, roles: tuple[Role, ...], proposals: list[Proposal], reading: BomReading) -> list[str]:
    lines = {line.designator: line for line in reading.lines}
    by_role = {p.role: p for p in proposals}
    _fill(sheet, [COLUMNS])
    open_cells: list[str] = []
    r = 1
    for role in roles:
        if role.condition and role.unit == "V":
            continue
        proposal = by_role.get(role.name, Proposal(role.name, None, role.meaning))
        if _left_out(role, proposal):
            continue
        r += 1
        # a load is a figure of the crystal
        owner = by_role["FL"] if role.name == "CL" and "FL" in by_role else proposal
        open_cells += _role(sheet, r, role, proposal, lines.get(owner.part or ""))
    _choices(sheet, "L", PEDIGREES, r)
    _widths(sheet)
    return open_cells


def _left_out(role: Role, proposal: Proposal) -> bool:
    """Optional roles that nothing speaks for, and defaults, stay out: a person adds what the board has."""
    if role.name in ("FL", "CL"):
        return False
    if role.name == "FS":
        return True  # the other way to give a crystal's frequency
    if proposal.wanted or role.required:
        return False
    return role.default is not None or not (role.main and proposal.part is not None and not proposal.doubt)


def _role(sheet: Worksheet, r: int, role: Role, proposal: Proposal, line: BomLine | None) -> list[str]:
    open_cells = []

    def leave_open(column: str, what: str) -> None:
        position = COLUMNS.index(column) + 1
        _write(sheet, r, position, "", fill=OPEN)
        open_cells.append(f"Roles!{sheet.cell(r, position).coordinate}: {what} of {role.name}")

    _write(sheet, r, 1, role.name)
    main = role.main and role.kind != "any"
    from_bom = line is not None and main and line.value is not None and not proposal.own_value
    if proposal.part is not None:
        _write(sheet, r, 2, proposal.part)
    elif main:
        leave_open("Part", "part")
    if role.name == "CL":
        load = None if line is None else line.load_f
        if load is None:
            leave_open("Typ", "load capacitance")
        else:
            _write(sheet, r, COLUMNS.index("Typ") + 1, format_quantity(load, "F"))
    elif not main:
        for column in ("Min", "Typ", "Max"):
            leave_open(column, column.lower())
    elif not from_bom and proposal.part is not None:
        leave_open("Typ", "value")
    if main and line is not None and line.tolerance is None:
        leave_open("Tolerance", "tolerance")
    if main and line is not None and line.temperature_law is None:
        leave_open("Temperature law", "temperature law")
    if not role.condition:
        leave_open("Source", "source")
    doubt = f"; check: {proposal.doubt}" if proposal.doubt else ""
    source = f"; {SOURCES[role.trait]}" if not main and role.trait in SOURCES else ""
    _write(sheet, r, len(COLUMNS), f"{role.meaning} — {proposal.reason}{doubt}{source}{_stated(role, line)}")
    return open_cells


def _stated(role: Role, line: BomLine | None) -> str:
    """A figure of the crystal that its BOM line gives and that no cell takes over by itself."""
    if role.trait != "ESR" or line is None or line.esr_ohm is None:
        return ""
    return f"; the BOM says {format_quantity(line.esr_ohm, 'Ω')}"


def _choices(sheet: Worksheet, column: str, texts: tuple[str, ...], last: int) -> None:
    validation = DataValidation(type="list", formula1=f'"{",".join(texts)}"', allow_blank=True)
    sheet.add_data_validation(validation)
    validation.add(f"{column}2:{column}{max(last, 2)}")
