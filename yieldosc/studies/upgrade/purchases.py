"""What is bought as one, and its grades: from the user's Grades, else from the built-in ladders."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from yieldosc.parts.grades import (
    KIND_PRICES,
    LADDERS,
    MAIN_TRAITS,
    Grade,
    half_width,
    law_grades,
    looser_law,
    price_at,
    tolerance_text,
    with_law,
    with_tolerance,
)
from yieldosc.parts.parameter import Law, Parameter
from yieldosc.parts.shapes import Measured, is_min_typ_max
from yieldosc.studies.upgrade.results import Change
from yieldosc.study import GradeRow, Study

TIGHTER, LOOSER = 2, 1  # built-in grades on either side of the declared one
SAME = 1e-9


@dataclass(frozen=True)
class Choice:
    """One grade of one purchase."""

    change: Change
    parameters: Mapping[str, Parameter]  # role → the part in this grade
    relative_price: float  # change per board, in prices of a common resistor (placeholder)
    price: float | None  # change per board in money
    looser: bool


@dataclass(frozen=True)
class Purchase:
    """Parts that are bought as one: a row of the BOM, or a part."""

    name: str
    members: tuple[Parameter, ...]  # main values
    parts: int
    price: float | None  # of one part, in the declared grade
    choices: tuple[Choice, ...]

    @property
    def roles(self) -> tuple[str, ...]:
        return tuple(p.role for p in self.members)


def purchases(study: Study) -> tuple[Purchase, ...]:
    """Every purchase that has another grade, in the order of the parts."""
    groups: dict[str, list[Parameter]] = {}
    for p in study.parameters:
        if _can_be_bought(p):
            groups.setdefault(p.reel or p.part, []).append(p)
    made = (_purchase(study, tuple(members)) for members in groups.values())
    return tuple(purchase for purchase in made if purchase.choices)


def _can_be_bought(p: Parameter) -> bool:
    """A main value with a grade of its own: min/typ/max is what a data sheet knows, a measured lot is at hand."""
    graded = p.trait in MAIN_TRAITS and p.kind in LADDERS
    return graded and p.typical > 0 and not is_min_typ_max(p.shape) and not isinstance(p.shape, Measured)


def _purchase(study: Study, members: tuple[Parameter, ...]) -> Purchase:
    designators = tuple(dict.fromkeys(p.part for p in members))
    name, first = ", ".join(designators), members[0]
    rows = _rows(study.grades, designators, first.kind)
    price = _declared_price(study, rows, first, designators)
    grades = _user_grades(rows, first) if study.grades else _ladder_grades(first)
    choices = []
    for tolerance, law, factor, absolute in grades:
        choice = _choice(name, members, len(designators), tolerance, law, factor, absolute, price)
        if choice is not None:
            choices.append(choice)
    return Purchase(name, members, len(designators), price, tuple(choices))


def _rows(grades: Sequence[GradeRow], designators: Sequence[str], kind: str) -> tuple[GradeRow, ...]:
    """The user's rows for these parts; those of the kind where no row names one of the parts."""
    own = tuple(row for row in grades if row.by_part and row.target in designators)
    return own or tuple(row for row in grades if not row.by_part and row.target == kind)


def _declared_price(
    study: Study, rows: Sequence[GradeRow], p: Parameter, designators: Sequence[str]
) -> float | None:
    for row in rows:
        if row.price is not None and _is_declared(row, p):
            return row.price
    return next((study.prices[d] for d in designators if d in study.prices), None)


def _is_declared(row: GradeRow, p: Parameter) -> bool:
    low, high = p.low / p.typical - 1, p.high / p.typical - 1
    same = row.tolerance is None or (abs(row.tolerance[0] - low) < SAME and abs(row.tolerance[1] - high) < SAME)
    return same and (row.law_text is None or _text(row.law) == _text(p.law))


_Grade = tuple[tuple[float, float] | None, "Law | bool | None", float | None, float | None]
KEEP_LAW = False  # in place of a law: the declared one


def _user_grades(rows: Sequence[GradeRow], p: Parameter) -> Iterator[_Grade]:
    for row in rows:
        if not _is_declared(row, p):
            yield row.tolerance, KEEP_LAW if row.law_text is None else row.law, row.price_factor, row.price


def _ladder_grades(p: Parameter) -> Iterator[_Grade]:
    """Around the declared grade: other tolerances, other laws, and both one or two grades better."""
    ladder = LADDERS[p.kind]
    spread = p.high > p.low and p.shape.text != "fixed"
    now = half_width(p) if spread else None
    tolerances: list[tuple[tuple[float, float] | None, float]] = [(None, 1.0)]
    if now is not None:
        present = price_at(now, ladder)
        tolerances += [((-g.tolerance, g.tolerance), g.price_factor / present) for g in _around(ladder, now)]
        tighter = [t for t in tolerances[1:] if t[0] is not None and t[0][1] < now]
    else:
        tighter = []
    laws = _laws_around(p)
    for tolerance, factor in tolerances[1:]:
        yield tolerance, KEEP_LAW, factor, None
    for law, factor in laws:
        yield None, law, factor, None
    better = [(law, factor) for law, factor in laws if not looser_law(law, p.law)]
    for (tolerance, a), (law, b) in zip(tighter, better, strict=False):
        yield tolerance, law, a * b, None


def _around(ladder: Sequence[Grade], now: float) -> list[Grade]:
    tighter = [g for g in ladder if g.tolerance < now * (1 - SAME)]
    looser = [g for g in ladder if g.tolerance > now * (1 + SAME)]
    return [*looser[-LOOSER:], *tighter[:TIGHTER]]


def _laws_around(p: Parameter) -> list[tuple[Law, float]]:
    offered = law_grades(p)
    looser = [(law, f) for law, f in offered if looser_law(law, p.law)]
    tighter = [(law, f) for law, f in offered if not looser_law(law, p.law)]
    return [*looser[-LOOSER:], *tighter[:TIGHTER]]


def _choice(
    name: str,
    members: tuple[Parameter, ...],
    parts: int,
    tolerance: tuple[float, float] | None,
    law: Law | bool | None,
    factor: float | None,
    absolute: float | None,
    price: float | None,
) -> Choice | None:
    made = {}
    for p in members:
        better = p if tolerance is None else with_tolerance(p, *tolerance)
        if not isinstance(law, bool):
            better = with_law(better, law)
        made[p.role] = better
    first, then = members[0], made[members[0].role]
    if made == {p.role: p for p in members}:
        return None
    new = absolute if absolute is not None else None if price is None or factor is None else price * factor
    relative = factor if factor is not None else absolute / price if absolute is not None and price else 1.0
    return Choice(
        change=Change(
            part=name, from_tolerance=tolerance_text(first), tolerance=tolerance_text(then),
            from_law=_text(first.law), temperature_law=_text(then.law),
        ),
        parameters=made,
        relative_price=(relative - 1) * parts * KIND_PRICES.get(first.kind, 1.0),
        price=None if new is None or price is None else (new - price) * parts,
        looser=_is_looser(first, then),
    )  # fmt: skip


def _text(law: Law | None) -> str | None:
    return None if law is None else law.text


def _is_looser(first: Parameter, then: Parameter) -> bool:
    wider = then.low < first.low or then.high > first.high
    return wider or (then.law is not None and looser_law(then.law, first.law))
