"""The same units under other assumptions: what the declared set does not know, tried one at a time.

Each rival is another list of parameters for the same streams, so that differences are taken on the same units. The
range over them is a range over the sets tried, never a bound; the bound is extreme value.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import product

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.laws import lower_ends, whole_interval
from yieldosc.parts.parameter import Parameter
from yieldosc.parts.shapes import Hollow, Measured, Normal, Uniform, is_min_typ_max
from yieldosc.studies.estimates import tango, yield_estimate
from yieldosc.studies.judge import GOOD
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Estimate, RivalResult
from yieldosc.studies.run import QUANTUM, Setup

Parameters = tuple[Parameter, ...]
Change = Callable[[Parameter], Parameter]
Slopes = Mapping[str, tuple[float, float]]  # role → relative slopes of frequency and margin at the nominal unit
RIVAL_UNITS = 12_288
MOST_REELS = 6  # sign patterns are all tried up to here
SCREENED_ABOVE = 8  # more patterns than this are screened on one quantum first
KEPT = 3  # of the screened patterns, the lowest this many and the highest one are shown
SORTED_KINDS = ("resistor", "capacitor", "inductor", "crystal")  # kinds of part that are sold by grade


@dataclass(frozen=True, slots=True)
class Rival:
    """Another assumption: its name, what it supposes, and the parameters that it makes."""

    name: str
    meaning: str
    parameters: Parameters


@dataclass(frozen=True)
class _Job:
    setups: tuple[Setup, ...]
    pieces: tuple[tuple[int, int, int], ...]  # (rival, first unit, units)

    def __call__(self, number: int) -> tuple[int, NDArray[np.bool_]]:
        rival, first, count = self.pieces[number]
        return rival, self.setups[rival].codes(first, count) == GOOD


def rival_sets(declared: Parameters, slopes: Slopes) -> tuple[tuple[Rival, ...], tuple[Rival, ...]]:
    """Every set that differs from the declared one, and the sign patterns apart.

    slopes decide the patterns by gradient sign.
    """
    single = tuple(r for r in _single_sets(declared, slopes) if r.parameters != declared)
    return single, tuple(r for r in _patterns(declared, slopes) if r.parameters != declared)


def _single_sets(declared: Parameters, slopes: Slopes) -> Iterator[Rival]:
    def changed(change: Change) -> Parameters:
        return tuple(change(p) for p in declared)

    yield Rival("all uniform", "every tolerance flat between its bounds", changed(_uniform))
    yield Rival("all normal", "every tolerance normal, three standard deviations, cut", changed(_normal))
    yield Rival("same reel", "parts of one reel identical (reel share 1)", changed(_one_reel(declared)))
    yield Rival("independent", "every part on its own (reel share 0)", changed(_apart))
    yield Rival("hollow", "better grades sorted out: the inner 40 % of every tolerance missing", changed(_hollow))
    both = tuple(_one_reel(declared)(_hollow(p)) for p in declared)
    yield Rival("hollow, same reel", "better grades sorted out, and parts of one reel identical", both)
    yield Rival("class-2 low", "class-2 capacitors lose value at both ends of their range", changed(_class_2_low))
    weak = changed(lambda p: _weak_half(p, slopes))
    yield Rival("weak half", "every min/typ/max value in the half that starts worse", weak)
    yield Rival("whole crystal angle", "crystals cut anywhere in their whole angle interval", changed(_whole_angle))
    yield Rival("declared tolerance", "measured parts anywhere in their declared tolerance", changed(_next_lot))


def bounded_spread(p: Parameter) -> bool:
    """True when the initial values of units differ."""
    return p.high > p.low and p.shape.text != "fixed"


def _uniform(p: Parameter) -> Parameter:
    return replace(p, shape=Uniform()) if bounded_spread(p) else p


def _normal(p: Parameter) -> Parameter:
    return replace(p, shape=Normal()) if bounded_spread(p) else p


def _hollow(p: Parameter) -> Parameter:
    return replace(p, shape=Hollow()) if bounded_spread(p) and p.kind in SORTED_KINDS else p


def _one_reel(declared: Parameters) -> Change:
    members: dict[tuple[str | None, str], int] = {}
    for p in declared:
        members[(p.reel, p.trait)] = members.get((p.reel, p.trait), 0) + p.spread

    def change(p: Parameter) -> Parameter:
        shared = p.spread and p.reel is not None and members[(p.reel, p.trait)] > 1
        return replace(p, reel_share=1.0) if shared else p

    return change


def _apart(p: Parameter) -> Parameter:
    return replace(p, reel_share=0.0) if p.spread and p.reel is not None else p


def _class_2_low(p: Parameter) -> Parameter:
    return p if p.law is None else replace(p, law=lower_ends(p.law))


def _next_lot(p: Parameter) -> Parameter:
    """A part of which one lot was measured, as the lots after it may be."""
    if not isinstance(p.shape, Measured) or p.declared is None:
        return p
    low, high = p.declared
    return replace(p, low=low, high=high, shape=Uniform())


def _whole_angle(p: Parameter) -> Parameter:
    return p if p.law is None else replace(p, law=whole_interval(p.law))


def _weak_half(p: Parameter, slopes: Slopes) -> Parameter:
    slope = slopes.get(p.role, (0.0, 0.0))[1]
    if not is_min_typ_max(p.shape) or not slope:
        return p
    return half_tolerance(p, -1 if slope > 0 else 1)


def half_tolerance(p: Parameter, side: int) -> Parameter:
    """The whole distribution squeezed into one half of its tolerance."""
    low, high = (p.low, p.typical) if side < 0 else (p.typical, p.high)
    if not bounded_spread(p) or high <= low or isinstance(p.shape, Measured):
        return p
    shape = Uniform() if is_min_typ_max(p.shape) else p.shape
    return replace(p, low=low, typical=(low + high) / 2, high=high, shape=shape)


def _groups(declared: Parameters) -> dict[str, list[str]]:
    """Reel (or, without one, the part) → roles whose tolerance can lean to one side together."""
    groups: dict[str, list[str]] = {}
    for p in declared:
        if bounded_spread(p):
            groups.setdefault(f"{p.reel} {p.trait}" if p.reel is not None else p.role, []).append(p.role)
    return groups


def _patterns(declared: Parameters, slopes: Slopes) -> Iterator[Rival]:
    groups = _groups(declared)
    if not groups:
        return
    if len(groups) <= MOST_REELS:
        chosen = [dict(zip(groups, signs, strict=True)) for signs in product((-1, 1), repeat=len(groups))]
        for pattern in chosen:
            yield _pattern(declared, groups, pattern, "one-sided lots")
        return
    for output, name in ((0, "frequency"), (1, "margin")):
        lean = {key: sum(slopes.get(role, (0.0, 0.0))[output] for role in roles) for key, roles in groups.items()}
        if not any(np.isfinite(s) and s for s in lean.values()):
            continue
        for direction, word in ((-1, "low"), (1, "high")):
            pattern = {key: direction * (1 if s >= 0 else -1) for key, s in lean.items()}
            yield _pattern(declared, groups, pattern, f"one-sided lots, {name} {word}")


def _pattern(declared: Parameters, groups: Mapping[str, list[str]], pattern: Mapping[str, int], name: str) -> Rival:
    side = {role: pattern[key] for key, roles in groups.items() for role in roles}
    shown = ", ".join(f"{'/'.join(roles)} {'low' if pattern[key] < 0 else 'high'}" for key, roles in groups.items())
    parameters = tuple(half_tolerance(p, side[p.role]) if p.role in side else p for p in declared)
    return Rival(f"{name}: {shown}" if name == "one-sided lots" else name,
                 f"every tolerance squeezed into one half: {shown}", parameters)  # fmt: skip


def good_units(
    setup: Setup,
    sets: Sequence[Parameters],
    units: int,
    *,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> list[NDArray[np.bool_]]:
    """Per set: which of units 0 … units − 1 are good at every corner (units,)."""
    setups = tuple(replace(setup, population=setup.population.with_parameters(p)) for p in sets)
    size = 2 * QUANTUM
    pieces = tuple(
        (rival, first, min(size, units - first)) for rival in range(len(sets)) for first in range(0, units, size)
    )
    parts: list[list[NDArray[np.bool_]]] = [[] for _ in sets]
    with (workers or Workers()).in_order(_Job(setups, pieces), len(pieces)) as answers:
        for rival, good in answers:
            parts[rival].append(good)
            if meter is not None:
                meter.done(len(good))
    return [np.concatenate(part) for part in parts]


def rivals(
    setup: Setup,
    slopes: Slopes,
    *,
    units: int = RIVAL_UNITS,
    confidence: float = 0.95,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> tuple[tuple[RivalResult, ...], NDArray[np.bool_]]:
    """The declared set first, then every rival on the same units; and which of them the declared set calls good.

    More than eight sign patterns are first screened on one quantum of units; the lowest and the highest are run whole.
    """
    declared = setup.population.parameters
    single, patterns = rival_sets(declared, slopes)
    if len(patterns) > SCREENED_ABOVE:
        patterns = _screened(setup, patterns, min(units, QUANTUM), workers, meter)
    chosen = (*single, *patterns)
    sets = [declared, *(r.parameters for r in chosen)]
    good = good_units(setup, sets, units, workers=workers, meter=meter)
    first = RivalResult(
        name="declared", meaning="the study as given", yield_=_yield(good[0], confidence), difference=None
    )
    others = tuple(
        RivalResult(
            name=rival.name,
            meaning=rival.meaning,
            yield_=_yield(flags, confidence),
            difference=paired_difference(flags, good[0], confidence),
        )
        for rival, flags in zip(chosen, good[1:], strict=True)
    )
    return (first, *others), good[0]


def paired_difference(changed: NDArray[np.bool_], declared: NDArray[np.bool_], confidence: float) -> Estimate:
    """Yield of `changed` minus yield of `declared` on the same units: Tango's score interval."""
    gained = int(np.count_nonzero(changed & ~declared))
    lost = int(np.count_nonzero(declared & ~changed))
    return tango(gained, lost, len(declared), confidence)


def _yield(good: NDArray[np.bool_], confidence: float) -> Estimate:
    return yield_estimate(len(good) - int(np.count_nonzero(good)), len(good), confidence)


def _screened(
    setup: Setup, patterns: tuple[Rival, ...], units: int, workers: Workers | None, meter: Meter | None
) -> tuple[Rival, ...]:
    """The lowest few and the highest of many patterns."""
    flags = good_units(setup, [p.parameters for p in patterns], units, workers=workers, meter=meter)
    order = np.argsort([int(np.count_nonzero(f)) for f in flags], kind="stable")
    chosen = dict.fromkeys([*order[:KEPT].tolist(), int(order[-1])])
    return tuple(patterns[i] for i in chosen)
