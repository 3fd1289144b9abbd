"""Other nominal values: the neighbours in a series of preferred numbers, re-simulated on the same draws."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.codes import nearest_e, neighbours_e
from yieldosc.parts.grades import half_width
from yieldosc.parts.parameter import Parameter
from yieldosc.studies.estimates import yield_estimate
from yieldosc.studies.judge import GOOD
from yieldosc.studies.nominal import nominal_points
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Estimate
from yieldosc.studies.rivals import paired_difference
from yieldosc.studies.run import Setup, inner_pieces
from yieldosc.studies.upgrade.moved import best_known
from yieldosc.studies.upgrade.results import Recentre
from yieldosc.study import Study

Flags = NDArray[np.bool_]
KINDS = ("resistor", "capacitor", "inductor")
MAIN = ("R", "C", "L")
FINE, COARSE = 0.021, 0.11  # tolerances up to which parts come in E96 and E24 values; looser ones in E12
MOST_STEP = math.log(1.15)  # a value further away is another design, not another nominal
SCREEN = 2048  # units on which values are first compared
MOST_PROMISING = 12
STEPS = (1, 2, 4)  # series values to either side


@dataclass(frozen=True)
class Nominal:
    """One part, or all parts that are bought as one, with another nominal value."""

    roles: tuple[str, ...]
    part: str
    from_value: float
    to_value: float
    unit: str
    series: int


def candidates(study: Study, setup: Setup, slopes: Mapping[str, tuple[float, float]]) -> tuple[Nominal, ...]:
    """Series values next to each nominal, and next to the one that would centre the frequency."""
    off, bought = _off_centre(study, setup), _bought(study)
    made: dict[tuple[tuple[str, ...], float], Nominal] = {}
    for p in study.parameters:
        if p.kind not in KINDS or p.trait not in MAIN or p.typical <= 0 or not bought(p):
            continue
        lean = slopes.get(p.role, (0.0, 0.0))[0]
        for value, series in _values(p, off, lean):
            made[((p.role,), value)] = Nominal((p.role,), p.part, p.typical, value, p.unit, series)
    return tuple(made.values())


def _bought(study: Study) -> Callable[[Parameter], bool]:
    """True for what stands in the BOM: nobody chooses the nominal value of a stray capacitance."""
    listed = {getattr(line, "designator", None) for line in study.bom}
    return lambda p: not listed or p.part in listed


def _values(p: Parameter, off: float, lean: float) -> list[tuple[float, int]]:
    width = half_width(p)
    series = 96 if width <= FINE else 24 if width <= COARSE else 12
    if p.kind != "resistor":
        series = min(series, 24)
    wanted = {*neighbours_e(p.typical, series), *_further(p.typical, series)}
    if math.isfinite(lean) and abs(lean) > 1e-3 and abs(off / lean) < MOST_STEP:
        centre = p.typical * math.exp(-off / lean)
        wanted |= {nearest_e(centre, series), *neighbours_e(centre, series)}
    return [(v, series) for v in sorted(wanted) if not math.isclose(v, p.typical, rel_tol=1e-6)]


def _further(value: float, series: int) -> list[float]:
    """Some steps of the series to either side, as far as they are no other design."""
    found = []
    for side in (0, 1):
        at = value
        for step in range(1, max(STEPS) + 1):
            at = neighbours_e(at, series)[side]
            if step in STEPS and abs(math.log(at / value)) <= MOST_STEP:
                found.append(at)
    return found


def _off_centre(study: Study, setup: Setup) -> float:
    """ln of the nominal unit's frequency, middle over the corners, over the middle of the limits."""
    points = nominal_points(setup.population, setup.bench, setup.corners)
    known = [f for p in points if math.isfinite(f := p.settled_hz or p.frequency_hz) and f > 0]
    if not known:
        return 0.0
    design = study.design
    middle = (design.frequency_low_hz + design.frequency_high_hz) / 2
    return math.log((min(known) + max(known)) / 2 / middle)


@dataclass(frozen=True)
class _Job:
    setup: Setup
    nominals: tuple[Nominal, ...]
    units: int

    def __call__(self, number: int) -> Flags:
        nominal = self.nominals[number]
        population = self.setup.population
        parameters = tuple(_moved(p, nominal) for p in population.parameters)
        setup = replace(self.setup, population=population.with_parameters(parameters))
        return np.concatenate([setup.codes(first, size) == GOOD for first, size in inner_pieces(0, self.units)])


def _moved(p: Parameter, nominal: Nominal) -> Parameter:
    if p.role not in nominal.roles:
        return p
    ratio = nominal.to_value / nominal.from_value
    return replace(
        p, nominal=p.nominal * ratio, low=p.low * ratio, typical=p.typical * ratio, high=p.high * ratio, reel=None
    )


def _promising(
    setup: Setup, nominals: Sequence[Nominal], declared_good: Flags, workers: Workers, meter: Meter | None
) -> tuple[Nominal, ...]:
    """Those that gain most on the first units."""
    units = len(declared_good)
    gains = []
    with workers.in_order(_Job(setup, tuple(nominals), units), len(nominals)) as answers:
        for good in answers:
            gains.append(int(np.count_nonzero(good)) - int(np.count_nonzero(declared_good)))
            if meter is not None:
                meter.done(units)
    best = sorted((i for i, gain in enumerate(gains) if gain > 0), key=lambda i: -gains[i])[:MOST_PROMISING]
    return tuple(nominals[i] for i in sorted(best))


def recentred(
    setup: Setup,
    nominals: Sequence[Nominal],
    declared_good: Flags,
    current: Estimate,
    *,
    confidence: float,
    workers: Workers,
    meter: Meter | None = None,
) -> tuple[Recentre, ...]:
    """Those that help on the draws (the difference's lower bound above zero), best first."""
    units = len(declared_good)
    found = []
    promising = _promising(setup, nominals, declared_good[:SCREEN], workers, meter)
    with workers.in_order(_Job(setup, promising, units), len(promising)) as answers:
        for nominal, good in zip(promising, answers, strict=True):
            if meter is not None:
                meter.done(units)
            counted = yield_estimate(units - int(np.count_nonzero(good)), units, confidence)
            difference = paired_difference(good, declared_good, confidence)
            if difference.low > 0:
                found.append(
                    Recentre(
                        part=nominal.part, from_value=nominal.from_value, to_value=nominal.to_value,
                        unit=nominal.unit, series=nominal.series, difference=difference,
                        yield_=best_known(current, difference, counted),
                    )
                )  # fmt: skip
    return tuple(sorted(found, key=lambda r: -r.yield_.estimate))
