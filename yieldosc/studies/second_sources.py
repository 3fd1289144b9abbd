"""Second sources: every allowed combination of alternates on the same draws; the worst one carries the verdict."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import product

import numpy as np

from yieldosc.errors import refusal
from yieldosc.studies.estimates import yield_estimate
from yieldosc.studies.extra_results import Combination
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.rivals import good_units, paired_difference
from yieldosc.studies.run import QUANTUM, Setup
from yieldosc.study import Alternate, Study

UNITS = 2 * QUANTUM
MOST = 64
DECLARED = "as declared"


@dataclass(frozen=True)
class Fitting:
    """Which alternate is fitted where, and the study with these parts."""

    fitted: tuple[tuple[str, str], ...]  # (part, alternate)
    study: Study


def fittings(study: Study) -> tuple[Fitting, ...]:
    """Every combination, the declared one first; InputError where there are more than 64."""
    choices = _choices(study.alternates)
    count = math.prod(len(those) for those in choices.values())
    if count > MOST:
        raise refusal(
            "too-many-alternates",
            f"the sheet Alternates allows {count:,} combinations; at most {MOST} are run: leave out alternates that "
            "are no worse than another in every column",
        )
    return tuple(_fittings(study, choices))


def _choices(alternates: Sequence[Alternate]) -> dict[str, list[Alternate | None]]:
    found: dict[str, list[Alternate | None]] = {}
    for alternate in alternates:
        found.setdefault(alternate.part, [None]).append(alternate)
    return found


def _fittings(study: Study, choices: dict[str, list[Alternate | None]]) -> Iterator[Fitting]:
    for chosen in product(*choices.values()):
        changed = {p.role: p for alternate in chosen if alternate is not None for p in alternate.parameters}
        names = tuple(
            (part, DECLARED if alternate is None else alternate.name)
            for part, alternate in zip(choices, chosen, strict=True)
        )
        yield Fitting(names, replace(study, parameters=tuple(changed.get(p.role, p) for p in study.parameters)))


def worst_fitting(
    study: Study, setup: Setup, *, workers: Workers | None = None, meter: Meter | None = None
) -> tuple[Study, tuple[Combination, ...]]:
    """The study as its worst combination is fitted, and the table of all; as it is where no part has an alternate."""
    if not study.alternates:
        return study, ()
    every = fittings(study)
    found, worst = compared(setup, every, confidence=study.design.confidence, workers=workers, meter=meter)
    return every[worst].study, found


def compared(
    setup: Setup,
    every: Sequence[Fitting],
    *,
    confidence: float,
    units: int = UNITS,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> tuple[tuple[Combination, ...], int]:
    """Yield of each combination on units 0 … units − 1 of the same draws, and which of them is worst."""
    flags = good_units(setup, [f.study.parameters for f in every], units, workers=workers, meter=meter)
    found = tuple(
        Combination(
            fitted=fitting.fitted,
            yield_=yield_estimate(units - int(np.count_nonzero(good)), units, confidence),
            difference=paired_difference(good, flags[0], confidence),
        )
        for fitting, good in zip(every, flags, strict=True)
    )
    worst = min(range(len(found)), key=lambda i: found[i].yield_.estimate)
    return found, worst
