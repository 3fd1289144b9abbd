"""The sheet Alternates: second sources. What a row does not state is as the declared part has it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from yieldosc.circuits.circuit import Circuit, Role
from yieldosc.errors import Place
from yieldosc.parts.parameter import Parameter
from yieldosc.quantities import shown
from yieldosc.sheets.columns import Layout, Row, named_rows
from yieldosc.sheets.entries import Problems, faulty
from yieldosc.sheets.grid import Book
from yieldosc.sheets.parameters import ParameterMaker
from yieldosc.sheets.prices import PriceReader
from yieldosc.sheets.roles import RoleRow
from yieldosc.study import Alternate

VALUES = ("Min", "Typ", "Max", "Tolerance", "Shape", "Temperature law", "Solder", "Drift", "Source", "Note")
LAYOUT = Layout("Alternates", ("Part", "Alternate", "Role", *VALUES, "Price"), "Part")


@dataclass(slots=True)
class _Offer:
    """One alternate while its rows are read."""

    part: str
    name: str
    place: Place
    parameters: dict[str, Parameter]
    price: float | None = None


class AlternateReader:
    """Reads the rows of Alternates for the parts that the roles name; problems are collected."""

    def __init__(
        self,
        circuit: Circuit,
        rows: Mapping[str, RoleRow],
        maker: ParameterMaker,
        prices: PriceReader,
        problems: Problems,
    ) -> None:
        self.circuit, self.rows, self.maker, self.prices, self.problems = circuit, rows, maker, prices, problems

    def read(self, book: Book) -> tuple[Alternate, ...]:
        """Rows with equal part and alternate are one Alternate, in the order of the sheet."""
        grid = book.sheet(LAYOUT.sheet)
        if grid is None:
            return ()
        offers: dict[tuple[str, str], _Offer] = {}
        for row in named_rows(grid, LAYOUT, self.problems):
            told = [faulty(entry, f"Alternates {column}", self.problems) for column, entry in row.cells.items()]
            if not any(told):
                self._row(row, offers)
        return tuple(
            Alternate(
                part=o.part, name=o.name, parameters=tuple(o.parameters.values()), price=o.price, place=str(o.place)
            )
            for o in offers.values()
        )

    def _row(self, row: Row, offers: dict[tuple[str, str], _Offer]) -> None:
        named, called = row.cell("Part"), row.cell("Alternate")
        if named is None or called is None:
            missing = "Part" if named is None else "Alternate"
            self.problems.error("alternate-incomplete", f"this row has no {missing}; fill it in or clear it", row.place)
            return
        roles = self._roles(named.written)
        if not roles:
            self.problems.error(
                "unknown-part", f"Alternates names {shown(named.written)}, which no role names as its part", named.place
            )
            return
        part = self.maker.parts[roles[0].name]
        role = self._role(row, part, roles)
        if role is None:
            return
        offer = offers.setdefault((part, called.written), _Offer(part, called.written, row.place, {}))
        if role.name in offer.parameters:
            self.problems.error(
                "doubled-role",
                f"{offer.name} for {part} has {role.name} twice; keep one row, or name the role of the other",
                row.place,
            )
            return
        made = self._parameter(role, row, offer)
        if made is not None:
            offer.parameters[role.name] = made
        self._price(row, offer)

    def _roles(self, part: str) -> list[Role]:
        """Roles with that part, its spelling as free as in Roles."""
        for spelling in (part, part.upper()):
            found = [role for role in self.circuit.roles if self.maker.parts.get(role.name) == spelling]
            if found:
                return found
        return []

    def _role(self, row: Row, part: str, roles: list[Role]) -> Role | None:
        """The role that the row names; else the part's main role, or its only one."""
        entry = row.cell("Role")
        if entry is not None:
            for role in roles:
                if role.name == entry.written:
                    return role
            known = ", ".join(role.name for role in roles)
            self.problems.error(
                "unknown-role", f"{part} does not play the role {shown(entry.written)}; it is {known}", entry.place
            )
            return None
        main = [role for role in roles if role.main]
        chosen = main if main else roles
        if len(chosen) > 1:
            self.problems.error(
                "role-needed",
                f"{part} plays several roles: {', '.join(role.name for role in chosen)}; name one in the column Role",
                row.place,
            )
            return None
        return chosen[0]

    def _parameter(self, role: Role, row: Row, offer: _Offer) -> Parameter | None:
        shape = row.cell("Shape")
        if shape is not None and shape.written.casefold() == "measured":
            self.problems.error(
                "no-measurements",
                f"{offer.name} for {offer.part}: an alternate has no measured values; give Min and Max, or a tolerance",
                shape.place,
            )
            return None
        own = Problems()
        made = self.maker.working_with(own).parameter(role, _merged(self.rows[role.name], row))
        self.problems.findings += [f for f in own.findings if f not in self.problems.findings]
        if made is None:
            return None
        return replace(made, reel=None if made.reel is None else offer.name)

    def _price(self, row: Row, offer: _Offer) -> None:
        entry = row.cell("Price")
        price = None if entry is None else self.prices.read(entry, f"{offer.name} price")
        if entry is None or price is None:
            return
        if offer.price is not None and price != offer.price:
            self.problems.error(
                "two-prices",
                f"{offer.name} for {offer.part} costs {offer.price:g} in one row and {price:g} in another; keep one",
                entry.place,
            )
        offer.price = price


def _merged(declared: RoleRow, row: Row) -> RoleRow:
    """The declared row with what the alternate states in its place; one way to state a spread drives out the other."""
    kept = dict(declared.cells)
    stated = {column: row.cells[column] for column in VALUES if column in row.cells}
    if "Tolerance" in stated:
        kept = {column: entry for column, entry in kept.items() if column not in ("Min", "Max")}
    if "Min" in stated or "Max" in stated:
        kept.pop("Tolerance", None)
    measured = "Shape" in kept and kept["Shape"].written.casefold() == "measured"
    if measured and {"Min", "Typ", "Max", "Tolerance"} & set(stated):
        del kept["Shape"]  # the values were measured on the declared part
    return RoleRow(declared.role, {**kept, **stated}, row.place)
