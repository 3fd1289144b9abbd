"""Money: price of a set, cost of a good unit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from yieldosc.studies.upgrade.purchases import Choice, Purchase
from yieldosc.study import Study


@dataclass(frozen=True)
class Prices:
    """parts: price of all priced parts of one board; failed: what a failed unit costs beside its parts."""

    money: bool
    parts: float | None
    failed: float

    @classmethod
    def of(cls, study: Study, offered: Sequence[Purchase]) -> Prices:
        """Money counts where every part with another grade has a price in its declared grade and in the others."""
        known = [p.price is not None and all(c.price is not None for c in p.choices) for p in offered]
        money = bool(known) and all(known)
        roles = dict.fromkeys(p.part for p in study.parameters)
        by_purchase = {part: p.price for p in offered for part in (m.part for m in p.members)}
        prices = [by_purchase.get(part, study.prices.get(part)) for part in roles]
        total = sum(price for price in prices if price is not None)
        return cls(money, total if money else None, study.design.failed_unit_cost or 0.0)

    def change(self, choices: Sequence[Choice]) -> float | None:
        """Price change of a set in money."""
        if not self.money:
            return None
        return sum(choice.price or 0.0 for choice in choices)

    def order(self, choice: Choice) -> float:
        """What sets are ordered by: money, or relative prices."""
        return (choice.price or 0.0) if self.money else choice.relative_price

    def per_good_unit(self, change: float | None, yield_: float) -> float | None:
        """(parts + share of failed units · cost of one)/yield; None without prices or without a good unit."""
        if self.parts is None or change is None or yield_ <= 0:
            return None
        return (self.parts + change + (1 - yield_) * self.failed) / yield_
