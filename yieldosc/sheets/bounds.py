"""Min, Typ, Max and Tolerance of a role → absolute bounds and the shape between them."""

from __future__ import annotations

from dataclasses import dataclass

from yieldosc.circuits.circuit import Role
from yieldosc.parts.parameter import Given, Shape
from yieldosc.parts.shapes import Fixed, ShapeError, Split, Uniform, parse_shape
from yieldosc.quantities import QuantityError, format_quantity, parse_quantity
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.design import tolerance
from yieldosc.sheets.entries import Entry, Problems
from yieldosc.sheets.roles import RoleRow


@dataclass(frozen=True, slots=True)
class Bounds:
    """SI values, low ≤ typical ≤ high."""

    low: float
    typical: float
    high: float
    shape: Shape
    given: dict[str, Given]
    assumed: bool = False  # the role's default stands in


class BoundsReader:
    """Reads the bounds of one role; every problem goes to `problems`, and then the answer is None."""

    def __init__(
        self, role: Role, row: RoleRow | None, line: BomLine | None, default_shape: str, problems: Problems
    ) -> None:
        self.role, self.row, self.line, self.problems = role, row, line, problems
        self.default_shape = default_shape
        self.given: dict[str, Given] = {}
        self.measured = False

    def read(self) -> Bounds | None:  # noqa: PLR0911 -- each way to state a spread returns its own bounds
        if self.row is None:
            return self._default()
        before = len(self.problems.findings)
        least, typical, most = (self._value(column) for column in ("Min", "Typ", "Max"))
        if any(f.level == "error" for f in self.problems.findings[before:]):
            return None
        if typical is None:
            typical = self._from_bom()
        shape = self._shape()
        written = self.row.cell("Tolerance")
        if self.measured and (least is not None or most is not None or written is not None):
            other = "a tolerance" if written is not None else "Min or Max"
            self.problems.error(
                "two-spreads",
                f"{self.role.name} has both the shape measured and {other}; keep one of them",
                self.row.place_of("Shape"),
            )
            return None
        if (least is not None or most is not None) and written is not None:
            self.problems.error(
                "two-spreads", f"{self.role.name} has both a tolerance and Min or Max; keep one of them", written.place
            )
            return None
        if least is not None or most is not None:
            return self._min_max(least, typical, most, shape)
        if typical is None:
            if self.role.default is not None:
                return self._default()
            self._no_value()
            return None
        return self._toleranced(typical, written, shape)

    # -- pieces ---------------------------------------------------------------------------------------------------

    def _value(self, column: str) -> float | None:
        """A bound in SI units; a bare number is in the role's SI base unit."""
        assert self.row is not None
        entry = self.row.cell(column)
        if entry is None:
            return None
        value = role_value(entry, self.role, f"{self.role.name} {column}", self.problems)
        if value is not None:
            self.given[column.lower()] = entry.given
        return value

    def _from_bom(self) -> float | None:
        if self.line is None or not self.role.main or self.line.value is None:
            return None
        given = self.line.given.get("value")
        if given is not None:
            self.given["typ"] = given
        return self.line.value

    def _shape(self) -> Shape | None:
        assert self.row is not None
        entry = self.row.cell("Shape")
        if entry is None:
            return None
        if entry.text.strip().casefold() == "measured":
            self.measured = True  # its bounds come from the Measured sheet
            return None
        try:
            shape = parse_shape(entry.text)
        except ShapeError as error:
            self.problems.error("unknown-shape", f"{self.role.name} shape: {error}", entry.place)
            return None
        self.given["shape"] = entry.given
        return shape

    def _min_max(
        self, least: float | None, typical: float | None, most: float | None, shape: Shape | None
    ) -> Bounds | None:
        assert self.row is not None
        name, unit = self.role.name, self.role.unit
        if least is None or most is None:
            bound = least if least is not None else most
            assert bound is not None
            side = "Min" if least is not None else "Max"
            self.problems.add(
                "warning",
                "one-bound-only",
                f"{name} has only {side} {format_quantity(bound, unit)}: every unit gets that value, and the verdict "
                "holds on this condition; give the other bound to let it vary",
                self.row.place_of(side),
            )
            return Bounds(bound, bound, bound, Fixed(), self.given)
        if not least <= (typical if typical is not None else least) <= most:
            typ_text = "" if typical is None else f", Typ {format_quantity(typical, unit)}"
            self.problems.error(
                "bounds-order",
                f"{name}: Min {format_quantity(least, unit)}{typ_text}, Max {format_quantity(most, unit)} do not rise",
                self.row.place,
            )
            return None
        if typical is None:
            return Bounds(least, (least + most) / 2, most, shape or Uniform(), self.given)
        return Bounds(least, typical, most, shape or Split(), self.given)

    def _toleranced(self, typical: float, written: Entry | None, shape: Shape | None) -> Bounds | None:
        assert self.row is not None
        spread: tuple[float, float] | None
        if written is not None:
            spread = tolerance(
                written, f"{self.role.name} tolerance", self.problems, nominal=typical, si_unit=self.role.unit
            )
            if spread is None:
                return None
            self.given["tolerance"] = written.given
        elif self.measured or (shape is not None and shape.text == "fixed"):
            spread = (0.0, 0.0)
        elif self.line is not None and self.role.main and self.line.tolerance is not None:
            spread = self.line.tolerance
            if "tolerance" in self.line.given:
                self.given["tolerance"] = self.line.given["tolerance"]
        else:
            self._no_tolerance()
            return None
        low, high = typical * (1 + spread[0]), typical * (1 + spread[1])
        fixed = low == high
        return Bounds(low, typical, high, Fixed() if fixed else shape or parse_shape(self.default_shape), self.given)

    def _default(self) -> Bounds | None:
        value = self.role.default
        if value is None:
            return None
        self.problems.add(
            "warning",
            "default-used",
            f"{self.role.name} ({self.role.meaning}) is not given: {format_quantity(value, self.role.unit)} without "
            "spread is assumed; give it in Roles if it matters",
        )
        return Bounds(value, value, value, Fixed(), {}, assumed=True)

    def _no_value(self) -> None:
        assert self.row is not None
        if self.line is not None and self.role.main:
            self.problems.error(
                "value-missing",
                f"{self.role.name}: the BOM line of {self.line.designator} has no value that can be read "
                f"({self.line.source_text or 'empty'}); give Typ in Roles",
                self.row.place,
            )
        else:
            self.problems.error(
                "value-missing",
                f"{self.role.name} has no value: give Typ with a tolerance, or Min and Max"
                + (", or name its part of the BOM" if self.role.main else ""),
                self.row.place,
            )

    def _no_tolerance(self) -> None:
        assert self.row is not None
        part = f" ({self.line.designator})" if self.line is not None else ""
        self.problems.error(
            "tolerance-missing",
            f"{self.role.name}{part} has no tolerance: it is asked for, never assumed; write it in the Tolerance "
            "column of Roles or of the BOM, give Min and Max, or give the shape fixed",
            self.row.place,
        )


def role_value(entry: Entry, role: Role, name: str, problems: Problems) -> float | None:
    """The value of a cell in the role's SI unit, above zero unless the role may be zero; None with a finding."""
    if entry.number is not None and not entry.percent:
        value = entry.number
    else:
        try:
            value = parse_quantity(entry.written, role.unit if role.unit != "1" else None).value
        except QuantityError as error:
            problems.error("unreadable", f"{name}: {error}", entry.place)
            return None
    if value < 0 or (value == 0 and not role.may_be_zero):
        problems.error("not-positive", f"{name} must be above zero; found {entry.written}", entry.place)
        return None
    return value
