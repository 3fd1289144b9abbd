"""Sets of grades on the draws of the declared set: which units are good, and whether a set can reach the target."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.parameter import Parameter
from yieldosc.studies.estimates import clopper_pearson, tango, yield_estimate
from yieldosc.studies.judge import GOOD
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Estimate
from yieldosc.studies.run import Setup, inner_pieces
from yieldosc.studies.upgrade.purchases import Choice

Flags = NDArray[np.bool_]
SCREENS = (512, 4096, 16_384)  # units after which a hopeless set is dropped
SURE = 0.9999  # confidence of dropping it: one in ten thousand promising sets may be lost at each screen
Answer = Literal["reaches", "misses", "undecided"]


@dataclass(frozen=True)
class Trial:
    """Re-simulation of sets. units: on which a set must prove itself; start: the first of them."""

    setup: Setup
    units: int
    target: float | None
    confidence: float
    start: int = 0
    declared: Flags | None = None  # good units of the declared set, which later trials are compared with

    def flags(self, choices: Sequence[Choice], count: int | None = None) -> Flags:
        """Which of the units start … start + count − 1 are good with these grades (count,)."""
        setup = self._with(choices)
        n = self.units if count is None else count
        return np.concatenate([setup.codes(first, size) == GOOD for first, size in inner_pieces(self.start, n)])

    def _with(self, choices: Iterable[Choice]) -> Setup:
        changed: dict[str, Parameter] = {}
        for choice in choices:
            changed |= choice.parameters
        population = self.setup.population
        parameters = tuple(changed.get(p.role, p) for p in population.parameters)
        return replace(self.setup, population=population.with_parameters(parameters))

    def judged(self, choices: Sequence[Choice]) -> tuple[Answer, Estimate]:
        """Whether a set reaches the target with its lower bound; dropped early where its upper bound cannot."""
        assert self.target is not None
        for count in SCREENS:
            if count >= self.units:
                break
            flags = self.flags(choices, count)
            good = int(np.count_nonzero(flags))
            if self._most(flags, good) < self.target:
                return "misses", yield_estimate(count - good, count, self.confidence)
        good = int(np.count_nonzero(self.flags(choices)))
        found = yield_estimate(self.units - good, self.units, self.confidence)
        if found.low >= self.target:
            return "reaches", found
        return ("misses" if found.high < self.target else "undecided"), found


    def _most(self, flags: Flags, good: int) -> float:
        """Upper bound of a set's yield from its first units: counted alone, or as the declared yield and a difference
        on the same units, whichever is lower."""
        count = len(flags)
        alone = 1 - clopper_pearson(count - good, count, 2 * SURE - 1).low
        if self.declared is None or self.start:
            return alone
        whole, same = self.declared, self.declared[:count]
        lost = len(whole) - int(np.count_nonzero(whole))
        declared = 1 - clopper_pearson(lost, len(whole), 2 * SURE - 1).low
        gained, missed = int(np.count_nonzero(flags & ~same)), int(np.count_nonzero(same & ~flags))
        return min(alone, declared + tango(gained, missed, count, 2 * SURE - 1).high)


@dataclass(frozen=True)
class _Flagging:
    trial: Trial
    sets: tuple[tuple[Choice, ...], ...]

    @property
    def pieces(self) -> int:
        return len(self.sets)

    def __call__(self, number: int) -> Flags:
        return self.trial.flags(self.sets[number])


@dataclass(frozen=True)
class _Judging:
    trial: Trial
    sets: tuple[tuple[Choice, ...], ...]

    def __call__(self, number: int) -> tuple[Answer, Estimate]:
        return self.trial.judged(self.sets[number])


def all_flags(
    trial: Trial, sets: Sequence[tuple[Choice, ...]], *, workers: Workers, meter: Meter | None = None
) -> list[Flags]:
    """Good units of each set, one set per piece of work."""
    job = _Flagging(trial, tuple(sets))
    found = []
    with workers.in_order(job, job.pieces) as answers:
        for flags in answers:
            found.append(flags)
            if meter is not None:
                meter.done(len(flags))
    return found


def all_judged(
    trial: Trial, sets: Sequence[tuple[Choice, ...]], *, workers: Workers, meter: Meter | None = None
) -> list[tuple[Answer, Estimate]]:
    """Whether each set reaches the target."""
    found = []
    with workers.in_order(_Judging(trial, tuple(sets)), len(sets)) as answers:
        for answer in answers:
            found.append(answer)
            if meter is not None:
                meter.done(answer[1].units or 0)
    return found


