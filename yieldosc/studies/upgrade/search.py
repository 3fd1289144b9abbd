"""The cheapest set of grades that reaches the target: sets in the order of their price, nothing pruned on a guess.

Yield is not monotone in tolerance (a tighter grade around a wrong nominal loses units), so sets are enumerated. Set
aside beforehand is only a grade that another of the same purchase beats on the draws: no dearer, and its failing units
are nested in the other's.
"""

from __future__ import annotations

import heapq
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Estimate
from yieldosc.studies.upgrade.prices import Prices
from yieldosc.studies.upgrade.purchases import Choice
from yieldosc.studies.upgrade.trial import Trial, all_judged

Flags = NDArray[np.bool_]
Grades = Sequence[Choice]
RUNNERS_UP = 2
MOST_UNITS = 1_572_864  # evaluated by the search, at ten corners each; fewer where a study has more
BATCH = 8  # sets judged at once: fixed, so that no number of workers changes what is tried


@dataclass(frozen=True)
class Reaching:
    """A set that reaches the target on the sample that chose."""

    choices: tuple[Choice, ...]
    yield_: Estimate
    price: float
    cost: float  # what sets are compared by: cost per good unit where there are prices, else the price


@dataclass(frozen=True)
class Found:
    reaching: tuple[Reaching, ...]  # in the order of their cost
    tried: int
    possible: int
    exhausted: bool  # no untried set could be cheaper than the first of `reaching`
    best: Estimate | None


def undominated(declared: Flags, offered: Sequence[tuple[Choice, Flags]], prices: Prices) -> list[Choice]:
    """Grades of one purchase that no other one, nor the declared one, beats on the draws. Flags: good units (n,)."""
    kept = []
    others: list[tuple[float, Flags]] = [(0.0, declared)]
    others += [(prices.order(choice), good) for choice, good in offered]
    for i, (choice, good) in enumerate(offered, start=1):
        price = prices.order(choice)
        beaten = any(
            j != i and _beats(other, price, good, earlier=j < i) for j, other in enumerate(others)
        )
        if not beaten:
            kept.append(choice)
    return kept


def _beats(other: tuple[float, Flags], price: float, good: Flags, *, earlier: bool) -> bool:
    """The other is no dearer and fails only where this one fails; of equals the earlier one stays."""
    other_price, other_good = other
    if other_price > price or bool((good & ~other_good).any()):
        return False
    same = other_price == price and bool((good == other_good).all())
    return earlier or not same


def in_price_order(
    grades: Sequence[Grades], order: Callable[[Choice], float]
) -> Iterator[tuple[float, tuple[Choice, ...]]]:
    """Every set, cheapest first: of each purchase the declared grade or one of its others. Price, and what changes."""
    lists = [sorted([(0.0, None), *((order(c), c) for c in those)], key=lambda pair: pair[0]) for those in grades]
    start = tuple(0 for _ in lists)
    heap = [(sum(options[0][0] for options in lists), start)]
    while heap:
        price, at = heapq.heappop(heap)
        yield price, tuple(c for options, i in zip(lists, at, strict=True) if (c := options[i][1]) is not None)
        # a set's successors raise one position from the last raised one on, so that each set comes up once
        last = max((k for k, i in enumerate(at) if i), default=0)
        for k in range(last, len(lists)):
            if at[k] + 1 < len(lists[k]):
                step = lists[k][at[k] + 1][0] - lists[k][at[k]][0]
                heapq.heappush(heap, (price + step, (*at[:k], at[k] + 1, *at[k + 1 :])))


def cheapest(
    trial: Trial,
    grades: Sequence[Grades],
    prices: Prices,
    *,
    workers: Workers,
    meter: Meter | None = None,
    most_units: int = MOST_UNITS,
) -> Found:
    """The cheapest sets that reach the target: one, and two runners-up."""
    reaching: list[Reaching] = []
    tried, spent, best, exhausted = 0, 0, None, False
    possible = int(np.prod([float(len(those) + 1) for those in grades])) if grades else 1
    sets = in_price_order(grades, prices.order)
    while spent < most_units:
        batch = [pair for _, pair in zip(range(BATCH), sets, strict=False)]
        if not batch or _none_cheaper(reaching, batch[0][0], prices, RUNNERS_UP):
            exhausted = True
            break
        answers = all_judged(trial, [choices for _, choices in batch], workers=workers, meter=meter)
        tried += len(batch)
        for (price, choices), (answer, found) in zip(batch, answers, strict=True):
            spent += found.units or 0
            if best is None or found.estimate > best.estimate:
                best = found
            if answer == "reaches":
                reaching.append(Reaching(choices, found, price, _cost(prices, price, found)))
    if not exhausted:
        price, _ = next(sets, (np.inf, ()))
        exhausted = tried == possible or _none_cheaper(reaching, price, prices, 0)
    ordered = sorted(reaching, key=lambda r: (r.cost, r.price, len(r.choices)))
    return Found(tuple(ordered[: 1 + RUNNERS_UP]), tried, possible, exhausted, best)


def towards(
    trial: Trial, singles: Sequence[tuple[Choice, float]], prices: Prices, *, workers: Workers
) -> Reaching | None:
    """A set that reaches the target, not shown to be the cheapest: the best grade of each purchase, added one after
    the other. singles: the purchases' best grades and what each gains alone."""
    helping = sorted((s for s in singles if s[1] > 0), key=lambda s: s[1], reverse=True)
    sets = [tuple(choice for choice, _ in helping[: k + 1]) for k in range(len(helping))]
    answers = all_judged(trial, sets, workers=workers)
    for choices, (answer, found) in zip(sets, answers, strict=True):
        if answer == "reaches":
            price = sum(prices.order(choice) for choice in choices)
            return Reaching(choices, found, price, _cost(prices, price, found))
    return None


def _cost(prices: Prices, price: float, found: Estimate) -> float:
    cost = prices.per_good_unit(price if prices.money else None, found.estimate)
    return price if cost is None else cost


def _none_cheaper(reaching: Sequence[Reaching], next_price: float, prices: Prices, place: int) -> bool:
    """A good unit costs at least its parts, so sets whose parts cost more than the one at `place` cannot beat it."""
    if len(reaching) <= place:
        return False
    last = sorted(r.cost for r in reaching)[place]
    least = next_price if prices.parts is None else prices.parts + next_price
    return least > last
