"""What a declared limiter does to the yield: the same units with it and without, and how their settling was found."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from yieldosc.settle.evaluator import SettlingEvaluator
from yieldosc.solver.solution import Settling
from yieldosc.studies.estimates import yield_estimate
from yieldosc.studies.extra_results import LimiterEffect
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.rivals import good_units, paired_difference
from yieldosc.studies.run import QUANTUM, Setup

UNITS = 2 * QUANTUM


def limiter_effect(
    setup: Setup,
    account: Settling | None,
    *,
    confidence: float = 0.95,
    units: int = UNITS,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> LimiterEffect | None:
    """None without a declared limiter. Without it, limits apply to the crossing and distortion is not judged."""
    evaluator = setup.bench.evaluator
    if account is None or not isinstance(evaluator, SettlingEvaluator):
        return None
    levelled = replace(setup, bench=replace(setup.bench, evaluator=evaluator.crossing))
    parameters = setup.population.parameters
    (with_it,) = good_units(setup, [parameters], units, workers=workers, meter=meter)
    (without,) = good_units(levelled, [parameters], units, workers=workers, meter=meter)
    return LimiterEffect(
        limiter=account.limiter,
        account=account,
        yield_with=yield_estimate(units - int(np.count_nonzero(with_it)), units, confidence),
        yield_without=yield_estimate(units - int(np.count_nonzero(without)), units, confidence),
        difference=paired_difference(with_it, without, confidence),
    )
