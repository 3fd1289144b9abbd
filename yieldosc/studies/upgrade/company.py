"""Grades in two companies: with every other purchase as declared, and with every other one in its best grade.

A grade can gain nothing while another part fails every unit, and decide once that part is better. So a grade is called
beaten only where it is beaten on the draws in both companies.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.upgrade.prices import Prices
from yieldosc.studies.upgrade.purchases import Choice
from yieldosc.studies.upgrade.search import undominated
from yieldosc.studies.upgrade.trial import Trial, all_flags

Flags = NDArray[np.bool_]
Judged = Sequence[tuple[Choice, Flags]]


@dataclass(frozen=True)
class Company:
    """One purchase: good units of its declared grade and of its others, one company after the other (n + m,)."""

    declared: Flags
    offered: Judged

    @property
    def silent(self) -> bool:
        """No unit is good in any grade and company: the draws tell the grades from each other in nothing."""
        return not self.declared.any() and not any(good.any() for _, good in self.offered)

    def kept(self, prices: Prices) -> list[Choice]:
        """Grades that no other one beats in both companies."""
        return [c for c, _ in self.offered] if self.silent else undominated(self.declared, self.offered, prices)

    def best(self, kept: Sequence[Choice], prices: Prices) -> tuple[int, Choice] | None:
        """What the most helpful grade gains, and that grade; None where none gains anything."""
        base = int(np.count_nonzero(self.declared))
        gains = [(int(np.count_nonzero(good)) - base, c) for c, good in self.offered if c in kept]
        if not gains:
            return None
        gain, choice = max(gains, key=lambda pair: (pair[0], prices.order(pair[1])))
        return (gain, choice) if gain > 0 or self.silent else None


def companies(
    trial: Trial,
    declared: Flags,
    alone: Mapping[str, Judged],
    prices: Prices,
    *,
    workers: Workers,
    meter: Meter | None = None,
) -> dict[str, Company]:
    """alone: of each purchase its other grades and their good units (n,) while all else is as declared. trial: of the
    other company (m units)."""
    top = {name: _top(judged, prices) for name, judged in alone.items() if judged}
    sets: list[tuple[Choice, ...]] = []
    for name, judged in alone.items():
        others = tuple(choice for other, choice in top.items() if other != name)
        sets += [others, *((*others, choice) for choice, _ in judged)]
    found = iter(all_flags(trial, sets, workers=workers, meter=meter))
    made = {}
    for name, judged in alone.items():
        base = np.concatenate([declared, next(found)])
        made[name] = Company(base, [(choice, np.concatenate([good, next(found)])) for choice, good in judged])
    return made


def _top(judged: Judged, prices: Prices) -> Choice:
    """The grade with most good units alone; of equals the dearest."""
    return max(judged, key=lambda pair: (int(np.count_nonzero(pair[1])), prices.order(pair[0])))[0]
