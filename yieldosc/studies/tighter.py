"""What the next tighter grade of a leading part does to the yield, on the same draws."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.grades import next_tighter, tolerance_text
from yieldosc.parts.parameter import Parameter
from yieldosc.parts.shapes import is_min_typ_max
from yieldosc.studies.estimates import yield_estimate
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Ranking, Tighter
from yieldosc.studies.rivals import good_units, paired_difference
from yieldosc.studies.run import Setup

LEADING = 3  # parts of each ranking


def leading_parts(rankings: Mapping[str, Ranking]) -> tuple[str, ...]:
    """The leading lines of every ranking, parts and reels, each once."""
    return tuple(dict.fromkeys(line.part for ranking in rankings.values() for line in ranking.parts[:LEADING]))


def tighter(
    setup: Setup,
    parts: Sequence[str],
    declared_good: NDArray[np.bool_],
    *,
    confidence: float = 0.95,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> tuple[Tighter, ...]:
    """One line per purchase that has a tighter grade, in the order of `parts`. declared_good (n,): units 0 … n − 1.

    What is bought as one (a reel, a row of the BOM) is bought whole: all its parts get the better grade.
    """
    declared = setup.population.parameters
    purchases = {frozenset(better): better for part in parts if (better := _better(declared, part))}
    steps = [(_names(declared, better), better) for better in purchases.values()]
    sets = [tuple(better.get(p.role, p) for p in declared) for _, better in steps]
    flags = good_units(setup, sets, len(declared_good), workers=workers, meter=meter) if sets else []
    return tuple(
        Tighter(
            part=part,
            from_tolerance=tolerance_text(next(p for p in declared if p.role in better)),
            to_tolerance=tolerance_text(next(iter(better.values()))),
            yield_=yield_estimate(len(good) - int(np.count_nonzero(good)), len(good), confidence),
            difference=paired_difference(good, declared_good, confidence),
        )
        for (part, better), good in zip(steps, flags, strict=True)
    )


def _better(declared: Sequence[Parameter], part: str) -> dict[str, Parameter]:
    """Role → parameter of the next tighter grade, for every part that is bought together with `part`."""
    reels = {p.reel for p in declared if p.reel is not None and part in (p.part, f"reel {p.reel}")}
    found = {}
    for parameter in declared:
        # min/typ/max is what a data sheet knows of a value, not a grade that can be bought.
        if (parameter.part == part or parameter.reel in reels) and not is_min_typ_max(parameter.shape):
            better = next_tighter(parameter)
            if better is not None:
                found[parameter.role] = better
    return found


def _names(declared: Sequence[Parameter], better: Mapping[str, Parameter]) -> str:
    """The designators of one purchase."""
    return ", ".join(dict.fromkeys(p.part for p in declared if p.role in better))
