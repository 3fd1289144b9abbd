"""Runs what stands beside the declared yield so that a sceptical reader can judge it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from yieldosc.studies.bench_list import bench_list
from yieldosc.studies.capability import capability, demonstrations, pilots
from yieldosc.studies.knowledge import is_single_value, knowledge
from yieldosc.studies.measured_lots import measured_lots, measured_uncertainty
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Ranking, RivalResult
from yieldosc.studies.run import Setup
from yieldosc.studies.scrutiny import Scrutiny
from yieldosc.studies.temperature_check import temperature_check
from yieldosc.studies.tighter import leading_parts
from yieldosc.studies.yields import YieldRun
from yieldosc.study import Study

IDLE_SHARE = 0.01  # of both variances: a device below it is not tried value by value


def scrutinise(
    study: Study,
    setup: Setup,
    run: YieldRun,
    tried: Sequence[RivalResult],
    declared_good: NDArray[np.bool_],
    rankings: Mapping[str, Ranking],
    *,
    confidence: float,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> Scrutiny:
    """tried: the assessment's sets; declared_good (n,): which of units 0 … n − 1 the declared set calls good."""
    declared = setup.population.parameters
    found = knowledge(
        setup, tried, declared_good, devices=moving_parts(setup, rankings), confidence=confidence, workers=workers,
        meter=meter,
    )  # fmt: skip
    gathered, estimate = run.gathered, run.estimate
    found_capability = capability(gathered, setup, confidence)
    return Scrutiny(
        knowledge=found,
        bench_list=bench_list(found, declared, leading_parts(rankings), confidence=confidence),
        temperatures=temperature_check(
            setup, gathered.near, gathered.units, gathered.flips, (estimate.high - estimate.low) / 2, confidence
        ),
        capability=found_capability,
        pilots=pilots(found_capability, confidence),
        demonstrations=demonstrations(study.design.yield_target, confidence),
        measured=measured_lots(declared, confidence),
        measured_uncertainty=measured_uncertainty(setup, estimate.estimate, workers=workers, meter=meter),
    )


def moving_parts(setup: Setup, rankings: Mapping[str, Ranking]) -> tuple[str, ...]:
    """Parts with single values that hold at least 1 % of some variance, their reel's share included; all where nothing
    is ranked."""
    devices = {p.part: p.reel for p in setup.population.parameters if is_single_value(p)}
    lines = [line for ranking in rankings.values() for line in ranking.parts]
    if not lines:
        return tuple(devices)
    moving = {line.part for line in lines if line.total.high >= IDLE_SHARE}
    return tuple(part for part, reel in devices.items() if part in moving or f"reel {reel}" in moving)
