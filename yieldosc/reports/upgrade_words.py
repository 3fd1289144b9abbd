"""What `upgrade` found, as a page: what to buy, what it costs, what else was tried."""

from __future__ import annotations

import math
from collections.abc import Iterator

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import MINUS, bare_percent, listed, points_text, signed
from yieldosc.reports.cautions import APPROVAL, REVISIONS, SAFETY
from yieldosc.reports.decision import PERCENT, Cell, Decision, Section, number_cell, points_cell, words, yield_cell
from yieldosc.reports.requirements import percent
from yieldosc.studies.digits import percent_text
from yieldosc.studies.upgrade.results import Recentre, UpgradeOption, UpgradeResult

NOTHING = 0.001  # a change of yield that is not worth a purchase
ALMOST = 0.01  # a good unit that costs so little more is worth a simpler change
MOST_ROWS, FEW_ROWS = 14, 3
MONEY = "#,##0.0000"
PLACEHOLDER = (
    "Relative prices are placeholders in prices of one common resistor; they order the sets, they are no quotation."
)
SAME_DRAWS = "Every grade on the draws of the declared parts; one row changes one purchase."
PPM_SENTENCE = "Every yield supposes that no wrong or defective part is fitted."


def upgrade_page(r: UpgradeResult) -> Decision:
    """All that is said on the result."""
    return Decision(
        title=f"{r.study.name} · {r.study.circuit.title}",
        stamp=f"digest {r.study.digest[:8]} · seed {r.provenance.seed}",
        words=_words(r),
        tone="good" if r.chosen is not None else "open" if r.target is None else "bad",
        headline=_headline(r),
        facts=_facts(r),
        sections=(
            Section(title="What to do next", sentences=tuple(_next_steps(r)), mark="→", key="steps"),
            _sets(r),
            _recentre(r),
            _singles(r),
            Section(title="How it was searched", sentences=tuple(_search(r)), key="search"),
            Section(
                title="Open points", sentences=tuple(f.text for f in r.findings if f.level == "warning"), mark="?",
                key="open",
            ),
            Section(
                title="Cautions", mark="!", key="cautions",
                sentences=(PPM_SENTENCE, *(() if r.money else (PLACEHOLDER,)), REVISIONS, APPROVAL, SAFETY),
            ),
        ),
    )  # fmt: skip


def _words(r: UpgradeResult) -> str:
    if r.chosen is None:
        if r.target is None:
            return "NO TARGET"
        return f"NO PURCHASE REACHES THE TARGET{', ANOTHER NOMINAL VALUE DOES' if _recentre_reaches(r) else ''}"
    if not r.chosen.changes:
        return "BUY NOTHING BETTER"
    return "BUY " + "; ".join(change.order for change in r.chosen.changes)


def _headline(r: UpgradeResult) -> str:
    if r.target is None:
        return "No yield target is given: grades are compared, none is chosen."
    goal = f"the yield target of {percent(r.target)}"
    if r.chosen is not None:
        done = "The declared parts reach" if not r.chosen.changes else "With this the predicted yield reaches"
        return f"{done} {goal} with its lower bound, on fresh units too."
    if r.sets:
        return f"Sets that reached {goal} on the units that chose them did not hold it on fresh units."
    if r.search is not None and r.search.exhausted:
        return f"No set of the grades offered reaches {goal}."
    tried = 0 if r.search is None else r.search.tried
    return f"None of the {tried:,} sets tried reaches {goal}, nor does the best grade of every part together."


def _facts(r: UpgradeResult) -> tuple[tuple[str, str, str], ...]:
    made = [("Yield, declared parts", percent_text(r.current, target=r.target), f"{r.confirm_units:,} units")]
    if r.chosen is not None and r.chosen.confirmed is not None and r.chosen.changes:
        made.append(
            (
                "Yield, chosen set", percent_text(r.chosen.confirmed, target=r.target),
                f"{r.confirm_units:,} fresh units; {points_text(r.chosen.difference)} on the units that chose it",
            )
        )  # fmt: skip
    if r.chosen is not None:
        made.append(("Price change per board", _price(r, r.chosen), "" if r.money else "relative, a placeholder"))
    if r.current_cost_per_good_unit is not None:
        then = None if r.chosen is None else r.chosen.cost_per_good_unit
        text = f"{r.current_cost_per_good_unit:.4f}" + ("" if then is None else f" → {then:.4f}")
        made.append(("Cost per good unit", text, _cost_note(r)))
    return tuple(made)


def _cost_note(r: UpgradeResult) -> str:
    failed = r.study.design.failed_unit_cost
    build = r.study.design.build_quantity
    note = f"(parts {r.parts_price:.4f} + share of failed units × {failed or 0:g}) / yield"
    if failed is None:
        note += "; no cost of a failed unit is given, so scrap costs its parts only"
    if build is not None and r.chosen is not None and r.chosen.cost_per_good_unit and r.current_cost_per_good_unit:
        change = (r.chosen.cost_per_good_unit - r.current_cost_per_good_unit) * build
        note += f"; over {build:,.0f} good units {f'{change:+,.0f}'.replace('-', MINUS)}"
    return note


def _price(r: UpgradeResult, option: UpgradeOption) -> str:
    if option.price_change is not None:
        return signed(f"{option.price_change:.4f}")
    return signed(f"{option.relative_price:.1f}")


def _next_steps(r: UpgradeResult) -> Iterator[str]:
    if r.chosen is not None and r.chosen.changes:
        yield f"Buy {listed([change.order for change in r.chosen.changes])}.{_why(r)}"
    elif r.chosen is not None:
        yield "Keep the declared grades: the target needs no better part."
    elif r.target is not None and not _recentre_reaches(r):
        yield "Change the limit, the circuit or its nominal values, or trim each board: no purchase reaches the target."
    yield from _simpler(r)
    best = _best_recentre(r)
    if best and (r.chosen is None or r.chosen.changes):
        reaches = " and reaches the target" if _recentre_reaches(r) else ""
        yield (
            f"Re-centre {best.part}: {_value(best.from_value, best)} → {_value(best.to_value, best)} (E{best.series}) "
            f"moves the yield by {points_text(best.difference)}{reaches}; it costs nothing."
        )
    relaxed = _relaxable(r)
    if relaxed:
        yield (
            f"Looser grades to consider, one at a time: {listed(relaxed)}. Each keeps the yield within "
            f"{NOTHING * 100:g} points of the declared one."
        )
    idle = _idle(r)
    if idle and r.target is not None and r.current.low < r.target:
        yield f"Better grades of {listed(idle)} buy nothing: none moves the yield by {NOTHING * 100:g} points."
    if r.target is None:
        yield "State a yield target in the Design sheet: without one no set can be chosen."
    if not r.money and r.singles:
        yield "Put prices into the BOM or the Grades sheet: with them the set is chosen by the cost of a good unit."


def _why(r: UpgradeResult) -> str:
    """What makes the choice one that is not obvious."""
    if _pair(r):
        return " No single part reaches the target; these do together."
    if r.target is not None and r.current.low >= r.target:
        return " The declared parts reach the target too, but a good unit costs less with this."
    return ""


def _simpler(r: UpgradeResult) -> Iterator[str]:
    """A set with fewer changes whose good unit costs almost the same."""
    if r.chosen is None or not r.chosen.cost_per_good_unit:
        return
    for other in r.sets:
        cost = other.cost_per_good_unit
        held = r.target is not None and other.confirmed is not None and other.confirmed.low >= r.target
        if cost and held and 0 < len(other.changes) < len(r.chosen.changes):
            dearer = cost / r.chosen.cost_per_good_unit - 1
            if dearer < ALMOST:
                orders = listed([change.order for change in other.changes])
                yield f"With fewer changes, {orders}: a good unit costs {cost:.4f}, {dearer * 100:.2g} % more."
                return


def _pair(r: UpgradeResult) -> bool:
    assert r.chosen is not None and r.target is not None
    return len(r.chosen.changes) > 1 and not any(o.yield_.low >= r.target for o in r.singles)


def _recentre_reaches(r: UpgradeResult) -> bool:
    best = _best_recentre(r)
    return best is not None and r.target is not None and best.yield_.low >= r.target


def _best_recentre(r: UpgradeResult) -> Recentre | None:
    return r.recentre[0] if r.recentre else None


def _value(value: float, nominal: Recentre) -> str:
    return format_quantity(value, nominal.unit, 4)


def _relaxable(r: UpgradeResult) -> list[str]:
    """Looser, cheaper, and no loss that could be seen; only where the target is held."""
    if r.target is None or r.current.low < r.target:
        return []
    cheaper = [o for o in r.singles if o.looser and o.relative_price < 0]
    kept = [o for o in cheaper if o.difference.low > -NOTHING and o.yield_.low >= r.target]
    return [o.changes[0].text for o in kept]


def _idle(r: UpgradeResult) -> list[str]:
    """Purchases of which no better grade moves the yield."""
    by_part: dict[str, list[UpgradeOption]] = {}
    for option in r.singles:
        if not option.looser:
            by_part.setdefault(option.changes[0].part, []).append(option)
    return [part for part, options in by_part.items() if all(o.difference.high < NOTHING for o in options)]


def _columns(r: UpgradeResult, first: str, *more: tuple[str, str]) -> tuple[tuple[str, str], ...]:
    price = "price" if r.money else "rel. price"
    cost = (("per good unit", "right"),) if r.money else ()
    return ((first, ""), ("yield", "right"), *more, ("points", "right"), (price, "right"), *cost)


def _row(r: UpgradeResult, option: UpgradeOption, *more: Cell) -> tuple[Cell, ...]:
    price = option.price_change if r.money else option.relative_price
    cost = (number_cell(option.cost_per_good_unit, _money(option.cost_per_good_unit), MONEY),) if r.money else ()
    text = "; ".join(change.text for change in option.changes) or "as declared"
    return (
        words(text), Cell(bare_percent(option.yield_), option.yield_.estimate, PERCENT), *more,
        points_cell(option.difference), number_cell(price, _price(r, option), MONEY if r.money else "0.0"), *cost,
    )  # fmt: skip


def _money(value: float | None) -> str | None:
    return None if value is None else f"{value:.4f}"


def _sets(r: UpgradeResult) -> Section:
    rows = tuple(_row(r, option, _confirmed(option)) for option in r.sets)
    return Section(
        title="Cheapest sets that reach the target",
        note="the choice and its runners-up; yield on the units that chose, then on as many fresh ones",
        columns=_columns(r, "set", ("on fresh units", "right")), rows=rows, key="sets",
    )  # fmt: skip


def _confirmed(option: UpgradeOption) -> Cell:
    if option.confirmed is None:
        return words("—")
    return Cell(bare_percent(option.confirmed), option.confirmed.estimate, PERCENT)


def _recentre(r: UpgradeResult) -> Section:
    best: dict[str, Recentre] = {}
    for nominal in r.recentre:
        best.setdefault(nominal.part, nominal)
    rows = tuple(
        (
            words(n.part), words(_value(n.from_value, n)), words(_value(n.to_value, n)), words(f"E{n.series}"),
            yield_cell(n.yield_), points_cell(n.difference),
        )
        for n in best.values()
    )  # fmt: skip
    return Section(
        title="Other nominal values that help", note="one part at a time, the same draws; the best value of each part",
        columns=(
            ("part", ""), ("from", "right"), ("to", "right"), ("series", ""), ("yield", "right"), ("points", "right"),
        ),
        rows=rows, key="recentre", most=MOST_ROWS,
    )  # fmt: skip


def _singles(r: UpgradeResult) -> Section:
    ordered = sorted(r.singles, key=lambda o: (-round(o.difference.estimate, 4), o.relative_price))
    moving = sum(o.difference.low > 0 or o.difference.high < 0 for o in r.singles)
    return Section(
        title="Every grade alone", note=f"{SAME_DRAWS} Points: on the first {r.units:,} units.",
        columns=_columns(r, "purchase"),
        rows=tuple(_row(r, option) for option in ordered), key="singles",
        most=max(FEW_ROWS, min(moving, MOST_ROWS)),
    )  # fmt: skip


def _search(r: UpgradeResult) -> Iterator[str]:
    s = r.search
    if s is None:
        return
    combined = listed([f"({name})" if "," in name else name for name in s.purchases])
    yield (
        f"Of the grades of {combined or 'no purchase'} {s.dominated} were set aside, because another, no dearer one "
        f"fails only where they do. Sets left: {s.possible:,}; tried, in the order of their price, on up to "
        f"{r.confirm_units:,} units each: {s.tried:,}. Yield is not monotone in tolerance, so sets are enumerated."
    )
    if s.left_out:
        yield f"Not combined, because frequency and margin lean less on them: {'; '.join(s.left_out)}."
    if not s.exhausted and r.chosen is not None and math.isfinite(r.chosen.relative_price):
        yield "Not every cheaper set was tried: the choice reaches the target, but may not be the cheapest that does."
    yield (
        f"Chosen on units 1 to {r.confirm_units:,}, confirmed on the next {r.confirm_units:,}. Single grades: counted "
        f"on the first {r.units:,} units, or the declared yield plus the difference on them (Tango's score interval), "
        "whichever is known better."
    )


