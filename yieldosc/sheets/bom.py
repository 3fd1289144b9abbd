"""The BOM of a book: every part as it was understood, with findings for all that was assumed, doubted or not read."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import PurePath

from yieldosc.errors import Finding, InputError, Level, Place, refusal
from yieldosc.quantities import format_quantity, shown
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.designators import DesignatorList, parse_designators
from yieldosc.sheets.grid import Book, Cell, column_letters
from yieldosc.sheets.headings import Meaning
from yieldosc.sheets.kinds import SI_UNIT, letters_of
from yieldosc.sheets.partfacts import VALUED, PartFacts, Source, make_source
from yieldosc.sheets.plausibility import doubts
from yieldosc.sheets.size_limits import BOM_CHARACTERS, BOM_PARTS, BOM_ROWS, few_alike
from yieldosc.sheets.table_text import text_table
from yieldosc.sheets.tables import Table, find_tables, is_heading
from yieldosc.sheets.text_guard import printable
from yieldosc.sheets.understanding import understand

_TOTAL = re.compile(
    r"\W*(sub)?(total|sum|summe|gesamt|итого|всего|合计|合計|price|board count|approved|checked|drawn)\b", re.I
)
_TITLE_LENGTH = 60


@dataclass(frozen=True, slots=True)
class BomReading:
    """Lines in the order of the sheet; all findings; the table as text, heading row first, for writing back."""

    lines: tuple[BomLine, ...]
    findings: tuple[Finding, ...]
    table_rows: tuple[tuple[str, ...], ...]


def read_bom(book: Book, sheet: str | None = None) -> BomReading:
    """Reads every BOM table of the book, or of the named sheet. Raises InputError when there is none."""
    if sheet is not None and book.sheet(sheet) is None:
        names = ", ".join(printable(grid.name) for grid in book.sheets)
        raise refusal("bom-no-sheet", f"there is no sheet {shown(sheet)}; the file has: {names}", Place(book.path))
    tables = find_tables(book, sheet)
    if not tables:
        raise _no_table(book)
    _check_size(book, tables)
    reader = _Reader(book)
    for table in tables:
        reader.read(table)
    reader.finish(tables)
    if not reader.lines:
        raise _no_table(book)
    return BomReading(tuple(reader.lines), tuple(few_alike(reader.findings)), text_table(tables))


def _check_size(book: Book, tables: tuple[Table, ...]) -> None:
    rows = [table.grid.rows[r] for table in tables for r in range(table.first, table.last)]
    characters = sum(len(cell.text) for row in rows for cell in row)
    if len(rows) > BOM_ROWS or characters > BOM_CHARACTERS:
        raise _too_large(book, f"{len(rows)} rows with {characters} characters", f"{BOM_ROWS} and {BOM_CHARACTERS}")


def _too_large(book: Book, found: str, limit: str) -> InputError:
    text = f"the BOM holds {found}; at most {limit} are read: give the BOM of one board"
    return refusal("bom-limit", text, Place(printable(PurePath(book.path).name)))


def reel_key(line: BomLine) -> str:
    """Parts of equal key come from one reel: equal part number, or without one equal kind, value, tolerance "
    "and law."""
    if line.part_number and len(re.findall(r"\w", line.part_number)) > 2:
        return "number " + "".join(line.part_number.split()).upper()
    if line.value is None:
        return f"part {line.scope or ''} {line.designator}"
    bounds = "" if line.tolerance is None else f"{line.tolerance[0]:.9g}/{line.tolerance[1]:.9g}"
    return f"{line.kind} {line.value:.9g} {bounds} {line.temperature_law or ''}".rstrip()


def _no_table(book: Book) -> InputError:
    return refusal(
        "bom-no-table",
        "no table of parts was found; give a sheet with a heading row such as "
        "Designator, Value, Tolerance, Description",
        Place(printable(book.path)),
    )


class _Reader:
    """Goes through the tables row by row."""

    def __init__(self, book: Book) -> None:
        self.book = book
        self.lines: list[BomLine] = []
        self.findings: list[Finding] = list(book.findings)
        self.seen: dict[tuple[str, str], BomLine] = {}
        self.scope: str | None = None
        self.table: Table
        self.several = False

    def read(self, table: Table) -> None:
        self.table, self.scope = table, None
        if table.grid.hidden:
            self._say(
                "note", "bom-hidden-sheet", "the sheet is hidden; its parts were read too", table.heading_row or 0
            )
        if table.heading_row is None:
            self._say(
                "note",
                "bom-headings-guessed",
                "the table has no headings; its columns were told by their content: " + self._meanings(),
                0,
            )
        elif table.guessed and table.designator is not None:
            self._say(
                "note",
                "bom-headings-guessed",
                f"column {column_letters(table.designator)} was read as designators by its content",
                table.heading_row,
                table.designator,
            )
        for row in range(table.first, table.last):
            self._row(row)

    def finish(self, tables: tuple[Table, ...]) -> None:
        """Findings over the whole BOM: plausibility, and how many tolerances are left to be asked for."""
        self.findings += doubts(self.lines)
        valued = [line for line in self.lines if line.kind in VALUED and line.fitted and line.value]
        missing = sum(line.tolerance is None for line in valued)
        if missing:
            text = (
                f"{missing} of {len(valued)} resistors, capacitors, inductors and crystals state no "
                "tolerance; none is "
                "assumed: write it in a column Tolerance or in Roles for the parts of the circuit"
            )
            self.findings.append(Finding("note", "bom-tolerance-missing", text, Place(tables[0].grid.name)))

    def _meanings(self) -> str:
        known = sorted(self.table.columns.items())
        return ", ".join(f"{column_letters(c)} {meaning.replace('_', ' ')}" for c, meaning in known)

    def _say(self, level: Level, code: str, text: str, row: int, column: int | None = None) -> None:
        self.findings.append(Finding(level, code, printable(text), self.table.grid.place(row, column)))

    def _row(self, row: int) -> None:
        cells = self.table.grid.rows[row]
        filled = [(c, cell) for c, cell in enumerate(cells) if not cell.blank]
        if not filled:
            return
        for column, cell in filled:
            self._cell_errors(row, column, cell)
        if self._repeated(cells):
            self._say("note", "bom-heading-repeated", "the heading is repeated here; the row was skipped", row)
            return
        self._lead(filled)
        found = self._designators(cells)
        title = len(filled) == 1 and found is not None and not any(c.isdigit() for name in found.names for c in name)
        total = found is not None and _TOTAL.match(cells[self.table.designator or 0].text) is not None
        if found is None or title or total or not (found.names or found.junk):
            if not self._without_part(row, filled):
                self._lines(row, cells, DesignatorList(("",)))
            return
        self._lines(row, cells, found)

    def _cell_errors(self, row: int, column: int, cell: Cell) -> None:
        if cell.kind == "error":
            self._say(
                "warning",
                "bom-cell-error",
                f"the cell holds the error {cell.text}; it was not read: correct it",
                row,
                column,
            )
        elif cell.kind == "formula_without_result":
            self._say(
                "warning",
                "bom-formula-empty",
                "the cell holds a formula without a stored result; open the file in a spreadsheet program and save it",
                row,
                column,
            )

    def _repeated(self, cells: tuple[Cell, ...]) -> bool:
        own = [text.casefold() for text in self.table.headings if text]
        same = sum(cell.text.strip().casefold() in own for cell in cells if cell.kind == "text" and not cell.blank)
        return is_heading(cells) and same >= 2

    def _lead(self, filled: list[tuple[int, Cell]]) -> None:
        """A first column without a heading that holds text names the section of the rows that follow."""
        column, cell = filled[0]
        nameless = column < len(self.table.headings) and not self.table.headings[column]
        first = self.table.designator is not None and column < self.table.designator
        if nameless and first and len(filled) > 1 and cell.kind == "text" and len(cell.text) <= _TITLE_LENGTH:
            self.scope = printable(" ".join(cell.text.split()))

    def _designators(self, cells: tuple[Cell, ...]) -> DesignatorList | None:
        column = self.table.designator
        if column is None or column >= len(cells) or cells[column].kind not in ("text", "number"):
            return None
        return parse_designators(cells[column].text)

    def _without_part(self, row: int, filled: list[tuple[int, Cell]]) -> bool:
        """Titles, totals and notes; True when the row holds no part."""
        texts = [cell.text for _, cell in filled if cell.kind == "text"]
        words = [text for text in texts if re.search(r"[^\W\d]{2}", text)]
        if not words or any(_TOTAL.match(text) for text in texts):
            self._say(
                "note",
                "bom-row-skipped",
                f"{shown(texts[0] if texts else filled[0][1].text)}: a total or a number without "
                "a part; the row was skipped",
                row,
            )
            return True
        if len(filled) > 1 and self.table.designator is None:
            return False
        if len(filled) <= 1 or not self._tells(filled):
            title = printable(" ".join(words[0].split()))
            if (
                len(title) <= _TITLE_LENGTH
                and not title.startswith("*")
                and title[-1] not in ".!,"
                and len(filled) == 1
            ):
                self.scope = title
                self._say("note", "bom-section", f"{shown(title)} was read as the title of the rows below", row)
            else:
                self._say("note", "bom-row-skipped", f"{shown(words[0])}: a note; the row was skipped", row)
            return True
        self._say(
            "note", "bom-no-designator", f"{shown(words[0])} has no designator; the row is shown and used nowhere", row
        )
        return False

    def _tells(self, filled: list[tuple[int, Cell]]) -> bool:
        """True when a cell of the row stands under a heading that can describe a part."""
        carriers: set[Meaning] = {"value", "description", "name", "part_number", "quantity"}
        return sum(self.table.columns.get(column) in carriers for column, _ in filled) >= 2

    def _lines(self, row: int, cells: tuple[Cell, ...], found: DesignatorList) -> None:
        sources = self._sources(row, cells)
        column = self.table.designator
        if found.junk:
            self._say(
                "warning",
                "bom-designator-junk",
                f"{', '.join(map(shown, found.junk[:5]))} cannot be read as a "
                "designator; write a list such as R1, R2, R5-R8",
                row,
                column,
            )
        parts: dict[str, PartFacts] = {}
        names = found.names or ("",)
        for name in names:
            key = letters_of(name)
            if key not in parts:
                parts[key] = understand(name, sources)
        zero = self._quantity(row, sources, found)
        text = printable(" | ".join(source.cell.text.strip() for source in sources if not source.cell.blank))
        for part in parts.values():
            self._remarks(row, part)
        self._add([self._line(name, parts[letters_of(name)], row, sources, text, zero) for name in names])
        for key, part in parts.items():
            self._unread(row, part, [name for name in names if letters_of(name) == key], zero)

    def _line(self, name: str, part: PartFacts, row: int, sources: list[Source], text: str, zero: bool) -> BomLine:
        return BomLine(
            designator=printable(name),
            kind=part.kind,
            value=part.value,
            si_unit=SI_UNIT.get(part.kind) if part.value is not None else None,
            tolerance=part.tolerance,
            temperature_law=part.law,
            load_f=part.load_f,
            esr_ohm=part.esr_ohm,
            fitted=part.fitted and not zero,
            part_number=part.part_number,
            scope=self.scope,
            place=self.table.grid.place(row, self.table.designator),
            source_text=text,
            decoded=tuple(part.decoded),
            given=dict(part.given),
            row_cells={source.heading: source.cell.text.strip() for source in sources if not source.cell.blank},
        )

    def _sources(self, row: int, cells: tuple[Cell, ...]) -> list[Source]:
        sources, taken = [], set()
        for column, cell in enumerate(cells):
            heading = self.table.headings[column] if column < len(self.table.headings) else ""
            heading = printable(" ".join(heading.split())) or column_letters(column)
            if heading in taken:
                heading = f"{heading} ({column_letters(column)})"
            taken.add(heading)
            place = str(self.table.grid.place(row, column))
            meaning = self.table.columns.get(column)
            if meaning is None and cell.kind == "text" and not self._lead_column(column):
                meaning = "note"
            sources.append(make_source(meaning, heading, column, cell, place))
        return sources

    def _lead_column(self, column: int) -> bool:
        return column < len(self.table.headings) and not self.table.headings[column]

    def _quantity(self, row: int, sources: list[Source], found: DesignatorList) -> bool:
        """Compares count and quantity; True when the quantity is zero: not fitted."""
        for source in (s for s in sources if s.meaning == "quantity" and not s.cell.blank):
            match = re.match(r"\s*(\d+)(?:[.,]0+)?\s*(?:$|\D)", source.cell.text)
            if match is None or found.names in ((), ("",)):
                continue
            quantity, count = int(match[1]), found.count or len(found.names)
            if quantity == 0:
                return True
            if quantity != count:
                self._say(
                    "warning",
                    "bom-quantity-mismatch",
                    f"the quantity is {quantity}, but {count} designators stand in the "
                    "row; the designators were taken: correct the wrong one",
                    row,
                    source.column,
                )
            elif found.count and found.count != len(found.names):
                self._say(
                    "warning",
                    "bom-designator-count",
                    f"{found.count} parts are announced, but only {len(found.names)} designators named; name them all",
                    row,
                    self.table.designator,
                )
            return False
        return False

    def _remarks(self, row: int, part: PartFacts) -> None:
        for level, code, text, column in part.remarks:
            self._say(level, code, text, row, column)
        if part.decoded:
            what = ", ".join(name.replace("_", " ") for name in part.decoded)
            text = part.given[part.decoded[0]].text
            self._say(
                "note", "bom-decoded", f"{what} read from {shown(text)} only; write it in words where it is wrong", row
            )

    def _unread(self, row: int, part: PartFacts, names: list[str], zero: bool) -> None:
        if part.kind in VALUED and part.value is None and part.fitted and not zero and names != [""]:
            example = {"resistor": 4700.0, "capacitor": 1e-8, "inductor": 1e-5, "crystal": 8e6}[part.kind]
            self._say(
                "warning",
                "bom-value-unread",
                f"no value could be read for {_few(names)} ({part.kind}); write it in a "
                f'column Value, for example "{format_quantity(example, SI_UNIT[part.kind])}"',
                row,
            )

    def _add(self, lines: list[BomLine]) -> None:
        """Keeps every line; designators that stood in an earlier row are reported once per row."""
        again = [
            (self.seen[key], line)
            for line in lines
            if (key := _identity(line)) in self.seen and re.search(r"\d", line.designator)
        ]
        if again:
            before, line = again[0]
            same = all(_content(old) == _content(new) for old, new in again)
            verb = "stand" if len(again) > 1 else "stands"
            text = (
                f"{_few([new.designator for _, new in again])} {verb} above too, first in row "
                f"{before.place.row}, with "
                f"{'the same' if same else 'another'} value; all lines are kept: delete or rename one"
            )
            level: Level = "note" if same and before.scope != line.scope else "warning"
            self.findings.append(Finding(level, "bom-duplicate-designator", text, line.place))
        for line in lines:
            self.seen.setdefault(_identity(line), line)
        self.lines += lines
        if len(self.lines) > BOM_PARTS:
            raise _too_large(self.book, f"more than {BOM_PARTS} parts", f"{BOM_PARTS} parts")


def _identity(line: BomLine) -> tuple[str, str]:
    return line.place.sheet or "", line.designator


def _content(line: BomLine) -> tuple[object, ...]:
    return line.kind, line.value, line.tolerance


def _few(names: list[str]) -> str:
    return ", ".join(names[:4]) + (f" and {len(names) - 4} more" if len(names) > 4 else "")
