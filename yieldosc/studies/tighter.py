"""What the next tighter grade of a leading part does to the yield, on the same draws."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.grades import next_tighter, tolerance_text
from yieldosc.parts.parameter import Parameter
from yieldosc.studies.estimates import yield_estimate
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Ranking, Tighter
from yieldosc.studies.rivals import good_units, paired_difference
from yieldosc.studies.run import Setup

LEADING = 3  # parts of each ranking


def leading_parts(rankings: Mapping[str, Ranking]) -> tuple[str, ...]:
    """The leading parts of every ranking, reels left out, each once."""
    names = [
        line.part
        for ranking in rankings.values()
        for line in [line for line in ranking.parts if not line.part.startswith("reel ")][:LEADING]
    ]
    return tuple(dict.fromkeys(names))


def tighter(
    setup: Setup,
    parts: Sequence[str],
    declared_good: NDArray[np.bool_],
    *,
    confidence: float = 0.95,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> tuple[Tighter, ...]:
    """One line per part that has a tighter grade, in the order of `parts`. declared_good (n,): units 0 … n − 1."""
    declared = setup.population.parameters
    steps = [(part, p, better) for part in parts for p, better in _steps(declared, part)]
    sets = [tuple(better if p is old else p for p in declared) for _, old, better in steps]
    flags = good_units(setup, sets, len(declared_good), workers=workers, meter=meter) if sets else []
    return tuple(
        Tighter(
            part=part,
            from_tolerance=tolerance_text(old),
            to_tolerance=tolerance_text(better),
            yield_=yield_estimate(len(good) - int(np.count_nonzero(good)), len(good), confidence),
            difference=paired_difference(good, declared_good, confidence),
        )
        for (part, old, better), good in zip(steps, flags, strict=True)
    )


def _steps(declared: Sequence[Parameter], part: str) -> list[tuple[Parameter, Parameter]]:
    """The part's role with a tighter grade, and the parameter of that grade."""
    found = []
    for parameter in declared:
        better = next_tighter(parameter) if parameter.part == part else None
        if better is not None:
            found.append((parameter, better))
    return found[:1]
