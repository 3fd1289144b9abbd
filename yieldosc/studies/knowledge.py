"""Which piece of knowledge the yield hangs on: rivals grouped by what they differ in, and the sets that single out
temperature laws and single values: of active devices, and those that are assumed."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.law_sides import one_sided
from yieldosc.parts.parameter import Parameter
from yieldosc.studies.estimates import yield_estimate
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import RivalResult
from yieldosc.studies.rivals import Rival, bounded_spread, good_units, half_tolerance, paired_difference
from yieldosc.studies.run import QUANTUM, Setup
from yieldosc.studies.scrutiny import Knowledge

DEVICES = ("transistor", "ic", "diode")
UNSURE = ("assumed", "typical", "simulated")
MOST_UNITS = QUANTUM  # per set that singles out laws or one value of a device
LOT_SIDE = "lot side"
BY_NAME = {  # rival sets that differ in one piece of knowledge alone; the others mix several
    "all uniform": "shape", "all normal": "shape", "hollow": "shape",
    "same reel": "reel share", "independent": "reel share",
    "declared tolerance": LOT_SIDE, "class-2 low": "temperature laws", "whole crystal angle": "temperature laws",
}  # fmt: skip
SIDES = ((-1, "low"), (1, "high"))


@dataclass(frozen=True, slots=True)
class _Single:
    knowledge: str
    rival: Rival


def knowledge(
    setup: Setup,
    rivals: Sequence[RivalResult],
    declared_good: NDArray[np.bool_],
    *,
    devices: Collection[str] | None = None,
    confidence: float = 0.95,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> tuple[Knowledge, ...]:
    """Largest span first. rivals: those of the assessment; declared_good (n,): units 0 … n − 1 of the declared set.

    devices: parts whose single values are tried (None: all that have some). Cost: half of n, at most
    4,096 units per set.
    """
    declared = setup.population.parameters
    declared_good = declared_good[: min(MOST_UNITS, max(len(declared_good) // 2, 1))]
    singles = tuple(s for s in _singles(declared, devices) if s.rival.parameters != declared)
    sets = [s.rival.parameters for s in singles]
    flags = good_units(setup, sets, len(declared_good), workers=workers, meter=meter) if sets else []
    tried: dict[str, list[RivalResult]] = {}
    for rival in rivals:
        name = LOT_SIDE if rival.name.startswith("one-sided lots") else BY_NAME.get(rival.name)
        if name is not None:
            tried.setdefault(name, []).append(rival)
    for single, good in zip(singles, flags, strict=True):
        failures = len(good) - int(np.count_nonzero(good))
        result = RivalResult(
            name=single.rival.name,
            meaning=single.rival.meaning,
            yield_=yield_estimate(failures, len(good), confidence),
            difference=paired_difference(good, declared_good, confidence),
        )
        tried.setdefault(single.knowledge, []).append(result)
    made = [_spanned(name, _roles(name, declared), results) for name, results in tried.items()]
    return tuple(sorted(made, key=lambda k: (-k.span, k.name)))


def device_name(parameter: Parameter) -> str:
    """ "U1 gm"; a value of no part by its role alone."""
    return parameter.role if parameter.part == parameter.role else f"{parameter.part} {parameter.role}"


def is_single_value(parameter: Parameter) -> bool:
    """A value worth a question of its own: an active device's, or one that nobody guarantees or measured."""
    return bounded_spread(parameter) and (parameter.kind in DEVICES or parameter.pedigree in UNSURE)


def _singles(declared: Sequence[Parameter], devices: Collection[str] | None) -> Iterator[_Single]:
    for side, word in SIDES:
        changed = tuple(p if p.law is None else replace(p, law=one_sided(p.law, side)) for p in declared)
        meaning = f"every temperature coefficient in the {'lower' if side < 0 else 'upper'} half of its spread"
        yield _Single("temperature laws", Rival(f"temperature laws {word}", meaning, changed))
    for parameter in declared:
        if not is_single_value(parameter) or (devices is not None and parameter.part not in devices):
            continue
        name = device_name(parameter)
        for side, word in SIDES:
            changed = tuple(half_tolerance(p, side) if p is parameter else p for p in declared)
            meaning = f"{name} in the {'lower' if side < 0 else 'upper'} half of its spread"
            yield _Single(name, Rival(f"{name} {word}", meaning, changed))


def _spanned(name: str, roles: tuple[str, ...], results: Sequence[RivalResult]) -> Knowledge:
    def change(rival: RivalResult) -> float:
        return 0.0 if rival.difference is None else rival.difference.estimate

    low, high = min(results, key=change), max(results, key=change)
    return Knowledge(
        name=name, roles=roles, sets=len(results), lowest=low if change(low) < 0 else None,
        highest=high if change(high) > 0 else None,
    )  # fmt: skip


def _roles(name: str, declared: Sequence[Parameter]) -> tuple[str, ...]:
    """The roles that a piece of knowledge is about."""
    if name == "temperature laws":
        return tuple(p.role for p in declared if p.law is not None and p.law.coefficients)
    if name == "reel share":
        reels = [p.reel for p in declared if p.spread and p.reel is not None]
        return tuple(p.role for p in declared if p.spread and p.reel is not None and reels.count(p.reel) > 1)
    if name in ("shape", LOT_SIDE):
        return tuple(p.role for p in declared if bounded_spread(p))
    return tuple(p.role for p in declared if device_name(p) == name)
