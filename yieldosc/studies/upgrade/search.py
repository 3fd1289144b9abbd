"""The cheapest set of grades that reaches the target: sets in the order of their price, nothing pruned on a guess.

Yield is not monotone in tolerance (a tighter grade around a wrong nominal loses units), so sets are enumerated. Set
aside beforehand is only a grade that another of the same purchase beats on the draws: no dearer, and its failing units
are nested in the other's, with all other parts as declared and with all of them at their best.
"""

from __future__ import annotations

import heapq
import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Estimate
from yieldosc.studies.upgrade.prices import Prices
from yieldosc.studies.upgrade.purchases import Choice
from yieldosc.studies.upgrade.results import Change
from yieldosc.studies.upgrade.trial import Trial, all_judged

Flags = NDArray[np.bool_]
Grades = Sequence[Choice]
RUNNERS_UP = 2
MOST_UNITS = 1_572_864  # evaluated by the search, at ten corners each; fewer where a study has more
MOST_SETS = 384
FAR_SETS = 64  # where not even the best grade of every purchase together comes near the target
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
    best_grades: Sequence[Choice] = (),
) -> Found:
    """The cheapest sets that reach the target: one, and two runners-up.

    best_grades: of each purchase the grade that gains most alone, the most helpful first. Added one after the other
    they often reach the target, and then no dearer set need be tried; where they do not, the search is kept short.
    """
    search = _Search(trial, prices, workers, meter)
    ahead = [tuple(best_grades[: k + 1]) for k in range(len(best_grades))]
    search.judge([(sum(map(prices.order, choices)), choices) for choices in ahead])
    most_sets = MOST_SETS if search.reaching or not ahead else FAR_SETS
    possible = math.prod(len(those) + 1 for those in grades)
    sets = in_price_order(grades, prices.order)
    exhausted = False
    while search.spent < most_units and search.tried < most_sets:
        batch = [pair for _, pair in zip(range(BATCH), sets, strict=False)]
        if not batch or search.none_cheaper(batch[0][0], RUNNERS_UP):
            exhausted = True
            break
        search.judge(batch)
    if not exhausted:
        price, _ = next(sets, (math.inf, ()))
        exhausted = search.none_cheaper(price, 0) or search.tried >= possible
    ordered = sorted(search.reaching, key=lambda r: (r.cost, r.price, len(r.choices)))
    return Found(tuple(ordered[: 1 + RUNNERS_UP]), search.tried, possible, exhausted, search.best)


class _Search:
    """Sets judged so far; none twice."""

    def __init__(self, trial: Trial, prices: Prices, workers: Workers, meter: Meter | None) -> None:
        self._trial, self._prices, self._workers, self._meter = trial, prices, workers, meter
        self.reaching: list[Reaching] = []
        self.best: Estimate | None = None
        self.spent = 0
        self._known: set[frozenset[Change]] = set()

    @property
    def tried(self) -> int:
        return len(self._known)

    def judge(self, sets: Sequence[tuple[float, tuple[Choice, ...]]]) -> None:
        """Judge the sets (price, choices) that are new."""
        new = [(price, choices) for price, choices in sets if _key(choices) not in self._known]
        self._known |= {_key(choices) for _, choices in new}
        answers = all_judged(self._trial, [choices for _, choices in new], workers=self._workers, meter=self._meter)
        for (price, choices), (answer, found) in zip(new, answers, strict=True):
            self.spent += found.units or 0
            if self.best is None or found.low > self.best.low:
                self.best = found
            if answer == "reaches":
                self.reaching.append(Reaching(choices, found, price, self._cost(price, found)))

    def _cost(self, price: float, found: Estimate) -> float:
        cost = self._prices.per_good_unit(price if self._prices.money else None, found.estimate)
        return price if cost is None else cost

    def none_cheaper(self, next_price: float, place: int) -> bool:
        """A good unit costs at least its parts: sets whose parts cost more than the one at `place` cannot beat it."""
        if len(self.reaching) <= place:
            return False
        last = sorted(r.cost for r in self.reaching)[place]
        least = next_price if self._prices.parts is None else self._prices.parts + next_price
        return least > last


def _key(choices: Sequence[Choice]) -> frozenset[Change]:
    return frozenset(choice.change for choice in choices)
