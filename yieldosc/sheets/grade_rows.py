"""The sheet Grades: what a kind of part, or one part, can be bought as."""

from __future__ import annotations

from collections.abc import Sequence

from yieldosc.circuits.circuit import Circuit
from yieldosc.errors import Place
from yieldosc.parts.parameter import Kind, Law, Parameter
from yieldosc.quantities import shown
from yieldosc.sheets.columns import Layout, Row, named_rows
from yieldosc.sheets.design import tolerance
from yieldosc.sheets.entries import Entry, Problems, faulty, folded, plain_number
from yieldosc.sheets.grid import Book
from yieldosc.sheets.kinds import SI_UNIT
from yieldosc.sheets.parameters import ParameterMaker
from yieldosc.sheets.prices import PriceReader
from yieldosc.study import GradeRow

COLUMNS = ("Kind or Part", "Tolerance", "Temperature law", "Price", "Price factor")
LAYOUT = Layout("Grades", COLUMNS, "Kind or Part", ("Kind", "Part"))
KINDS: tuple[Kind, ...] = ("resistor", "capacitor", "inductor", "crystal", "transistor", "ic", "diode")
_KIND = {word: kind for kind in KINDS for word in (kind, f"{kind}s")} | {"coil": "inductor", "coils": "inductor"}


class GradeReader:
    """Reads the rows of Grades for the parts of one study; problems are collected."""

    def __init__(
        self,
        circuit: Circuit,
        parameters: Sequence[Parameter],
        maker: ParameterMaker,
        prices: PriceReader,
        problems: Problems,
    ) -> None:
        self.maker, self.prices, self.problems = maker, prices, problems
        self.kinds = {p.kind for p in parameters}
        self.parts = set(maker.parts.values())
        self.main = {p.part: p for p in parameters if p.role in maker.parts and circuit.role(p.role).main}

    def read(self, book: Book) -> tuple[GradeRow, ...]:
        """Every row of the sheet Grades; () where the book has none."""
        grid = book.sheet(LAYOUT.sheet)
        if grid is None:
            return ()
        rows = [row for row in named_rows(grid, LAYOUT, self.problems) if not self._faulty(row)]
        made = [grade for row in rows if (grade := self._grade(row)) is not None]
        self._doubled(made)
        self._unpriced(made)
        self._unused(made)
        return tuple(made)

    def _faulty(self, row: Row) -> bool:
        told = [faulty(entry, f"Grades {column}", self.problems) for column, entry in row.cells.items()]
        return any(told)

    def _grade(self, row: Row) -> GradeRow | None:
        before = len(self.problems.findings)
        target = self._target(row)
        if target is None:
            return None
        written, law_cell, priced, factor_cell = (row.cell(column) for column in LAYOUT.columns[1:])
        if written is None and law_cell is None:
            self.problems.error(
                "grade-empty",
                f"the grade of {target} has neither a tolerance nor a temperature law; give one",
                row.place,
            )
        if priced is not None and factor_cell is not None:
            self.problems.error(
                "two-prices", f"the grade of {target} has both a price and a price factor; keep one", priced.place
            )
        price = None if priced is None else self.prices.read(priced, f"{target} price")
        factor = None if factor_cell is None else self._factor(factor_cell, target)
        bounds = None if written is None else self._tolerance(written, target)
        law = None if law_cell is None else self._law(law_cell, target)
        if any(f.level == "error" for f in self.problems.findings[before:]):
            return None
        return GradeRow(
            target=target, by_part=target in self.parts, tolerance=bounds, law=law,
            law_text=None if law_cell is None else law_cell.written, price=price, price_factor=factor,
            place=str(row.place),
        )  # fmt: skip

    def _target(self, row: Row) -> str | None:
        entry = row.cell("Kind or Part")
        if entry is None:
            self.problems.error(
                "grade-without-target", "this grade names no kind and no part; write one, or clear the row", row.place
            )
            return None
        name = entry.written
        kind = _KIND.get(folded(name))
        if kind is not None:
            return kind
        for spelling in (name, name.upper()):
            if spelling in self.parts:
                return spelling
        self.problems.error(
            "unknown-part",
            f"Grades names {shown(name)}, which is no kind of part and no part of a role; write a designator that "
            f"Roles names, or a kind: {', '.join(KINDS)}",
            entry.place,
        )
        return None

    def _tolerance(self, entry: Entry, target: str) -> tuple[float, float] | None:
        p = self.main.get(target)
        nominal, unit = (None, None) if p is None else (p.typical, p.unit)
        return tolerance(entry, f"{target} tolerance", self.problems, nominal=nominal, si_unit=unit)

    def _factor(self, entry: Entry, target: str) -> float | None:
        name = f"{target} price factor"
        value = plain_number(entry, name, self.problems)
        if value is not None and value <= 0:
            self.problems.error("not-positive", f"{name} must be above zero; found {entry.written}", entry.place)
            return None
        return value

    def _law(self, entry: Entry, target: str) -> Law | None:
        p = self.main.get(target)
        unit = p.unit if p is not None else next((SI_UNIT[k] for k in KINDS if k == target and k in SI_UNIT), "")
        return self.maker.checked_law(target, entry.written, unit, entry.place)

    def _doubled(self, made: Sequence[GradeRow]) -> None:
        seen: dict[tuple[object, ...], GradeRow] = {}
        for grade in made:
            first = seen.setdefault((grade.target, grade.tolerance, grade.law_text), grade)
            if first is not grade:
                self.problems.error(
                    "doubled-grade",
                    f"this grade of {grade.target} stands at {first.place} too; keep one row",
                    _place(grade),
                )

    def _unpriced(self, made: Sequence[GradeRow]) -> None:
        bare = [grade for grade in made if grade.price is None and grade.price_factor is None]
        if bare:
            rows = ", ".join(str(_place(grade).row) for grade in bare)
            self.problems.add(
                "note",
                "grade-without-price",
                f"no price and no price factor in Grades row {rows}: upgrade shows what such a grade does to the "
                "yield, but not what it costs",
                _place(bare[0]),
            )

    def _unused(self, made: Sequence[GradeRow]) -> None:
        idle = [grade for grade in made if not grade.by_part and grade.target not in self.kinds]
        for kind in dict.fromkeys(grade.target for grade in idle):
            place = next(_place(grade) for grade in idle if grade.target == kind)
            text = f"no role of this study is of the kind {kind}: its grades are not used"
            self.problems.add("note", "grade-not-used", text, place)


def _place(grade: GradeRow) -> Place:
    sheet, _, row = grade.place.rpartition("!")
    return Place(sheet, int(row))
