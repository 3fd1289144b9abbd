"""A study file → Study: .xlsx with BOM, Design and Roles, or .toml beside a .csv BOM. All problems in one answer."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path

from yieldosc.circuits import own_circuit, registry
from yieldosc.circuits.circuit import Circuit, CircuitError, Family, Role
from yieldosc.errors import Finding, InputError, Place, refusal
from yieldosc.sheets.alternates import AlternateReader
from yieldosc.sheets.bom import BomReading, read_bom
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.design import DesignSheet, check_design, frequency_limits, read_design, requirements
from yieldosc.sheets.digest import digest_of
from yieldosc.sheets.entries import Problems, folded
from yieldosc.sheets.extras import branch_rows, law_tables, measured_values, named_tables
from yieldosc.sheets.factory import check_trim_items, make_design
from yieldosc.sheets.grade_rows import GradeReader
from yieldosc.sheets.grid import Book
from yieldosc.sheets.opening import open_book, read_file
from yieldosc.sheets.parameters import ParameterMaker, Sources
from yieldosc.sheets.peek import sheet_names
from yieldosc.sheets.pilot import read_pilot
from yieldosc.sheets.prices import PriceReader
from yieldosc.sheets.remarks import remark
from yieldosc.sheets.roles import COLUMNS, RoleRow, sort_rows
from yieldosc.sheets.size_limits import check_study_sizes, few_alike
from yieldosc.sheets.study_tables import StudyTables, workbook_tables
from yieldosc.sheets.text_guard import printable
from yieldosc.sheets.toml_study import toml_tables
from yieldosc.study import Study

COST = "cost of a failed unit"
WORKBOOKS = (".xlsx", ".xlsm", ".xls", ".xlsb", ".ods")


def is_study(path: Path) -> bool:
    """True for a .toml file, or a spreadsheet with a Design sheet. A path that is no file is no study."""
    if not path.is_file():
        return False
    if path.suffix.lower() == ".toml":
        return True
    if path.suffix.lower() not in WORKBOOKS:
        return False
    names = sheet_names(read_file(path, Place(printable(path.name))))
    if names is None:
        return open_book(path).sheet("Design") is not None
    return any(folded(name) == "design" for name in names)


def load_study(path: Path) -> Study:
    """Read, check and understand a study; InputError with every problem of the file.

    Warnings and notes end in `Study.findings`. Source of the layout: the project's interface contract.
    """
    path = Path(path)
    problems = Problems()
    if path.suffix.lower() == ".toml":
        tables, book = toml_tables(path, problems)
    else:
        book = open_book(path)
        if book.sheet("Design") is None:
            raise refusal(
                "not-a-study",
                f"{path.name} has no sheet Design: it is a bare BOM; make a study of it with "
                f"yieldosc draft {path.name} --circuit NAME -o STUDY.xlsx",
                Place(path.name),
            )
        check_study_sizes(book)
        tables = workbook_tables(book, problems)
    check_study_sizes(book)
    study = understood(_name(path), book, tables, problems)
    if study is None or problems.fatal:
        raise InputError(_in_order(problems))
    return study


def _in_order(problems: Problems) -> list[Finding]:
    rank = {"Design": 0, "Roles": 1}
    findings = few_alike(problems.findings)
    return sorted(findings, key=lambda f: (f.level != "error", rank.get(f.place.sheet or "", 2), f.place.row or 0))


def understood(name: str, book: Book, tables: StudyTables, problems: Problems) -> Study | None:
    """The study that the sheets hold; None with errors in `problems`."""
    sheet, limits = _design_sheet(tables, problems)
    rows = sort_rows(tables.rows, problems)
    reading = _bom(book, problems)
    if not rows and not problems.fatal:
        problems.error("no-roles", "the sheet Roles has no rows; give each role of the circuit a row", Place("Roles"))
    own = folded(sheet.circuit) == folded(own_circuit.NAME)
    circuit = _own(sheet, book, rows, problems) if own else _circuit(sheet, rows, problems)
    if circuit is None:
        return None
    lines = {line.designator: line for line in reading.lines}
    sources = Sources(
        design=sheet,
        lines=lines,
        rivals=_rivals(reading.lines),
        tables=law_tables(book, named_tables(book, tuple(rows.values())), problems),
        measured=measured_values(book, _measured_units(circuit, rows), problems),
    )
    _supply(sheet, circuit, problems)
    maker = ParameterMaker(sources, problems)
    parameters, conditions = maker.make(circuit, rows)
    low, high = (sheet.values.get(f"temperature_{end}_c") for end in ("low", "high"))
    remark(circuit, parameters, rows, lines, problems, one_temperature=low == high)
    prices = PriceReader(problems)
    grades = GradeReader(circuit, parameters, maker, prices, problems).read(book)
    alternates = AlternateReader(circuit, rows, maker, prices, problems).read(book)
    bought = _bought(sheet, maker, lines, prices)
    pilot = read_pilot(book, sheet, problems)
    trimmed = _trimmed(sheet, circuit, problems)
    design = None if limits is None or problems.fatal else make_design(sheet, limits, trimmed, problems)
    if design is None:
        return None
    study = Study(
        name=name, circuit=circuit, parameters=parameters, conditions=conditions, design=design,
        requirements=requirements(design, sheet.items),
        grades=grades, alternates=alternates, pilot=pilot, prices=bought,
        findings=tuple(few_alike(problems.findings)),
    )  # fmt: skip
    return replace(_with_echo(study, sheet, tables, reading), digest=digest_of(study))


def _design_sheet(tables: StudyTables, problems: Problems) -> tuple[DesignSheet, tuple[float, float] | None]:
    """The items of Design and the frequency limits [Hz]."""
    sheet = read_design(tables.items, tables.design_place, problems)
    limits = frequency_limits(sheet, problems)
    check_design(sheet, problems)
    check_trim_items(sheet, problems)
    return sheet, limits


def _bought(
    sheet: DesignSheet, maker: ParameterMaker, lines: Mapping[str, BomLine], prices: PriceReader
) -> dict[str, float]:
    """Prices of the parts that roles name; every price of the study in one currency."""
    bought = prices.of_bom(tuple(dict.fromkeys(maker.parts.values())), lines)
    if COST in sheet.items:
        prices.note(sheet.items[COST].text, sheet.place_of(COST))
    prices.compare()
    return bought


def _with_echo(study: Study, sheet: DesignSheet, tables: StudyTables, reading: BomReading) -> Study:
    """With the sheets as text, for reports and for the result workbook."""
    return replace(
        study,
        design_given={name: item.value.given for name, item in sheet.items.items()},
        bom=tuple(reading.lines),
        bom_rows=reading.table_rows,
        design_rows=tuple((i.name, i.value.written, i.unit, i.note) for i in tables.items),
        role_rows=tuple(tuple(_role_texts(row)) for row in tables.rows),
        extra_rows=tables.extra_rows,
    )


def _bom(book: Book, problems: Problems) -> BomReading:
    """The BOM sheet, or the table that looks like one; its errors are warnings until a role needs the line."""
    name = "BOM" if book.sheet("BOM") is not None else None
    reading = read_bom(book, name)
    for finding in reading.findings:
        level = "warning" if finding.level == "error" else finding.level
        problems.findings.append(replace(finding, level=level))
    return reading


def _rivals(lines: Sequence[BomLine]) -> dict[str, list[BomLine]]:
    """Designators with lines that differ in what a role would take from them."""
    found: dict[str, list[BomLine]] = {}
    for line in lines:
        found.setdefault(line.designator, []).append(line)

    def content(line: BomLine) -> tuple[object, ...]:
        return line.kind, line.value, line.tolerance, line.temperature_law, line.fitted

    return {name: those for name, those in found.items() if len({content(line) for line in those}) > 1}


def _circuit(sheet: DesignSheet, rows: Mapping[str, RoleRow], problems: Problems) -> Circuit | None:
    if not sheet.circuit:
        return None
    place = sheet.place_of("circuit")
    options: dict[str, str] = {}
    places: dict[str, Place] = {}
    try:
        family = registry.family(sheet.circuit)
        for written, (choice, option_place) in sheet.options.items():
            name, options_choice = _spelt(family, written, choice)
            options[name], places[name] = options_choice, option_place
        chosen = registry.complete_options(family.name, options)
    except CircuitError as error:
        for text in error.problems:
            option = next((name for name in options if f" {name} " in f"{text} " or f"'{name}'" in text), None)
            problems.error("circuit", text, place if option is None else places[option])
        return None
    if not rows:
        return None  # the missing sheet or rows are an error already
    known = {role.name: role for role in family.roles(chosen)}
    for name, row in rows.items():
        if name not in known:
            problems.error(
                "unknown-role",
                f"{family.name} has no role {name} with these options; its roles are {', '.join(known)}",
                row.place,
            )  # fmt: skip
        elif known[name].condition and known[name].unit == "V":
            problems.error(
                "supply-in-roles", f"{name} is the supply: give it in Design as supply and supply tolerance", row.place
            )
    present = {name for name in rows if name in known}
    present |= {role.name for role in known.values() if _is_supply(role)}
    present |= {role.name for role in known.values() if role.name == "CL" and "FL" in present}
    try:
        return registry.build(family.name, chosen, present)
    except CircuitError as error:
        for text in error.problems:
            problems.error("circuit", f"{family.name}: {text}", Place("Roles"))
        return None


def _spelt(family: Family, option: str, choice: str) -> tuple[str, str]:
    """Option and choice as the family spells them, whatever their case and separators; unknown ones as written."""
    for known in family.options:
        if folded(known.name) == folded(option):
            same = (name for name in known.choices if folded(name) == folded(choice))
            return known.name, next(same, choice)
    return option, choice


def _own(sheet: DesignSheet, book: Book, rows: Mapping[str, RoleRow], problems: Problems) -> Circuit | None:
    """The circuit of the sheet Circuit; the target frequency is its design frequency."""
    table = branch_rows(book, problems)
    if table is None:
        problems.error(
            "missing-sheet",
            "own_circuit needs a sheet Circuit with its branches: name, kind, from, to, control+, control-, values, "
            "gain",
            Place("Circuit"),
        )
        return None
    for option, (_, place) in sheet.options.items():
        problems.error("circuit", f"own_circuit has no option {option!r}; its branches are in the sheet Circuit", place)
    target = sheet.values.get("target_frequency_hz")
    if target is None or not rows:
        return None
    try:
        circuit = own_circuit.build_own(own_circuit.parse_rows(table), target)
    except CircuitError as error:
        for text in error.problems:
            problems.error("circuit", text, Place("Circuit"))
        return None
    known = [role.name for role in circuit.roles]
    for name, row in rows.items():
        if name not in known:
            listed = ", ".join(known)
            problems.error("unknown-role", f"the branches name no value {name}; they name {listed}", row.place)
    for name in known:
        if name not in rows:
            problems.error(
                "role-missing",
                f"the branches name the value {name}, but Roles has no row for it; add it",
                Place("Roles"),
            )
    return None if problems.fatal else circuit


def _is_supply(role: Role) -> bool:
    return role.condition and role.unit == "V"


def _supply(sheet: DesignSheet, circuit: Circuit, problems: Problems) -> None:
    if circuit.supply_role is None and "supply" in sheet.items:
        problems.error(
            "no-supply-role", f"{circuit.name} with these options has no supply in its model; remove the item supply",
            sheet.place_of("supply"),
        )  # fmt: skip
    if circuit.supply_role is not None and "supply" not in sheet.items:
        problems.error(
            "supply-missing",
            f"{circuit.name} needs the item supply ({circuit.supply_role}); add it to Design",
            sheet.place,
        )


def _measured_units(circuit: Circuit, rows: Mapping[str, RoleRow]) -> dict[str, str]:
    """Designator → SI unit of the main role that names it."""
    units = {}
    for role in circuit.roles:
        row = rows.get(role.name)
        part = None if row is None else row.cell("Part")
        if part is not None and (role.main or part.written not in units):
            units[part.written] = role.unit
    return units


def _trimmed(sheet: DesignSheet, circuit: Circuit, problems: Problems) -> Role | None:
    if "trim role" not in sheet.items or sheet.items["trim role"].value.fault:
        return None
    name = sheet.items["trim role"].value.written
    for role in circuit.roles:
        if role.name == name and not role.condition:
            return role
        if role.name == name:
            text = f"trim role {name} is an operating condition, the same for every unit; name a part"
            problems.error("unknown-role", text, sheet.place_of("trim role"))
            return None
    problems.error("unknown-role", f"trim role {name} is no role of this circuit", sheet.place_of("trim role"))
    return None


def _name(path: Path) -> str:
    return path.stem.removesuffix("-result")


def _role_texts(row: RoleRow) -> list[str]:
    texts = []
    for column in COLUMNS:
        entry = row.cell(column)
        texts.append(row.role if column == "Role" else "" if entry is None else entry.written)
    return texts
