"""Factory test limits: chosen on one sample of units, reported on another, with the floor where no limits suffice."""

from __future__ import annotations

import time
from collections import Counter
from dataclasses import replace
from datetime import UTC, datetime

import numpy as np

from yieldosc.errors import Finding
from yieldosc.solver.evaluator import Evaluator
from yieldosc.studies.declared import declared_setup, factory_corner
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.judge import outcome_name
from yieldosc.studies.limits.acceptance import Instrument, LimitRates, limit_rates
from yieldosc.studies.limits.resistance_test import has_crystal, resistance_test
from yieldosc.studies.limits.results import Floor, LimitsResult, TradeLine
from yieldosc.studies.limits.sample import FactorySample, factory_sample
from yieldosc.studies.limits.search import LESS_CAUTIOUS, Pair, Search, closing_floor
from yieldosc.studies.parallel import Workers, default_workers
from yieldosc.studies.progress import Callback, Meter
from yieldosc.studies.provenance import provenance
from yieldosc.studies.trim.report import trim_result
from yieldosc.studies.trim.trim import Trim
from yieldosc.study import Study

LEAST_UNITS, MOST_UNITS = 65_536, 524_288  # of each of the two samples
NEEDED = 60.0  # units · level that leaves room for a choice: no escape at all proves 3.7, and that times four chooses
TRIM_UNITS = 16_384
RESISTANCE_UNITS = 16_384
LEVELS = (1e-2, 3e-3, 1e-3, 3e-4, 1e-4, 3e-5, 1e-5)


def limits(
    study: Study,
    *,
    units: int | None = None,
    seed: int = 1,
    workers: int | None = None,
    progress: Callback | None = None,
    evaluator: Evaluator | None = None,
) -> LimitsResult:
    """Test limits at the test temperature, their escapes and false rejects, the trade between them, and the trim.

    units: of each of the two samples (default: enough for the escape limit, 65,536 to 524,288). Same seed, same answer.
    """
    started, clock = datetime.now(UTC), time.perf_counter()
    design = study.design
    bare = declared_setup(study, seed=seed, evaluator=evaluator)
    trims = _trims(study)
    setup = bare.with_adjustment(trims[0]) if trims else bare
    n = units or _enough(design.escape_limit)
    meter = Meter(progress)
    crystal = has_crystal(setup)
    meter.expect(2 * n + (2 * TRIM_UNITS * len(trims) if trims else 0) + (RESISTANCE_UNITS if crystal else 0))
    corner = factory_corner(study)
    instrument = Instrument(design.measurement_sd_hz or 0.0, design.measurement_bias_hz)
    with Workers(workers or default_workers()) as crew:
        choosing = factory_sample(setup, corner, 0, n, workers=crew, meter=meter)
        fresh = factory_sample(setup, corner, n, 2 * n, workers=crew, meter=meter)
        tested_start = None
        if crystal:
            tested_start = resistance_test(
                setup, corner, min(n, RESISTANCE_UNITS), design.escape_limit, confidence=design.confidence,
                workers=crew, meter=meter,
            )  # fmt: skip
        trimmed = None
        if trims:
            trimmed = trim_result(
                bare, trims, min(n, TRIM_UNITS), confidence=design.confidence, workers=crew, meter=meter
            )
    chosen = _Choice(study, instrument, choosing, fresh)
    return LimitsResult(
        study=study,
        test_corner=corner,
        sd_hz=instrument.sd_hz,
        bias_hz=instrument.bias_hz,
        escape_limit=design.escape_limit,
        chosen=chosen.rates,
        chosen_by_level=chosen.by_level,
        confirmed=chosen.confirmed,
        trade=chosen.trade,
        floor=chosen.floor,
        bad=clopper_pearson(int(np.count_nonzero(~fresh.good)), n, design.confidence),
        bad_by=_bad_by(fresh),
        units=n,
        resistance_test=tested_start,
        trim=trimmed,
        findings=(*study.findings, *_findings(study)),
        provenance=provenance(study, seed, started, clock, crew.count),
    )


def _enough(level: float | None) -> int:
    if level is None:
        return 2 * LEAST_UNITS
    wanted = NEEDED / level
    return int(min(max(LEAST_UNITS, 2 ** np.ceil(np.log2(wanted))), MOST_UNITS))


def _trims(study: Study) -> tuple[Trim, ...]:
    """The declared trim at each bias that the instrument may have; empty without one."""
    biases = Instrument(0.0, study.design.measurement_bias_hz).biases_hz
    made = (Trim.of(study, bias_hz=b) for b in sorted(biases, key=abs))
    return tuple(trim for trim in made if trim is not None)


class _Choice:
    """Limits chosen on one sample, with their rates on the other."""

    def __init__(self, study: Study, instrument: Instrument, choosing: FactorySample, fresh: FactorySample) -> None:
        design = study.design
        self._fresh, self._instrument, self._confidence = fresh.tested, instrument, design.confidence
        own = (design.frequency_low_hz, design.frequency_high_hz)
        level = design.escape_limit
        levels = sorted({*LEVELS, *(() if level is None else (level,))}, reverse=True)
        search = Search(choosing.tested, instrument, own, design.confidence)
        pairs, _ = search.chosen(levels)
        found = dict(zip(levels, pairs, strict=True))
        for share in LESS_CAUTIOUS:
            left = [at for at in levels if found[at] is None]
            if not left and share != LESS_CAUTIOUS[-1]:
                continue
            others, lowest = replace(search, information=share).chosen(left)
            found |= {at: pair for at, pair in zip(left, others, strict=True) if found[at] is None}
        unguarded = self.rates_of(Pair(*own, np.nan))
        self.trade = (
            TradeLine(level=None, rates=unguarded, chosen_bound=None),
            *(self._line(at, pair) for at, pair in found.items()),
        )
        closing, at_hz = closing_floor(fresh.tested, instrument, design.confidence)
        noisy = instrument.sd_hz > 0
        self.floor = Floor(
            rates=self.rates_of(lowest), closing=closing if noisy else None, closing_hz=at_hz if noisy else None
        )
        pair = None if level is None else found[level]
        self.by_level = pair is not None
        self.rates = unguarded if pair is None else self.rates_of(pair)
        self.confirmed = None if level is None else pair is not None and self.rates.escapes_shipped.high <= level

    def rates_of(self, pair: Pair) -> LimitRates:
        return limit_rates(self._fresh, self._instrument, pair.low_hz, pair.high_hz, self._confidence)

    def _line(self, level: float, pair: Pair | None) -> TradeLine:
        if pair is None:
            return TradeLine(level=level, rates=None, chosen_bound=None)
        return TradeLine(level=level, rates=self.rates_of(pair), chosen_bound=pair.bound)


def _bad_by(sample: FactorySample) -> dict[str, int]:
    """Outcome → failing units."""
    counted = Counter(outcome_name(int(code)) for code in sample.codes[~sample.good])
    return dict(counted.most_common())


def _findings(study: Study) -> list[Finding]:
    """What the test was taken to be where the study does not say."""
    design = study.design
    made = []
    corner = factory_corner(study)
    if design.test_temperature_c is None:
        made.append(
            Finding(
                "note",
                "test-temperature-assumed",
                f"no test temperature in Design: {corner.temperature_c:g} °C taken",
            )
        )
    if design.measurement_sd_hz is None:
        made.append(
            Finding(
                "warning", "no-measurement-sd",
                "no measurement sd in Design: the instrument is taken as free of noise; give it, in Hz or ppm",
            )
        )  # fmt: skip
    if design.escape_limit is None:
        made.append(
            Finding(
                "warning", "no-escape-limit",
                "no escape limit in Design: the test limits are the frequency limits themselves; give the ppm that may "
                "be shipped, and limits are chosen for it",
            )
        )  # fmt: skip
    return made
