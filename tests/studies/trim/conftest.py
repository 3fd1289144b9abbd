"""Boards of the ideal Wien bridge before a trim of R1: f ∝ 1/√R1, so the setting that each needs is a formula."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pytest
from scipy.stats import norm

from yieldosc.parts.shapes import Fixed
from yieldosc.studies.declared import declared_setup
from yieldosc.studies.trim.trim import Trim

UNITS = 20_000


@dataclass(frozen=True)
class Bench:
    """Boards, the trim, and what each board needs."""

    study: object
    setup: object
    trim: Trim
    evaluator: object

    def boards(self, units=UNITS, start=0):
        return self.setup.with_adjustment(None).block(start, units)

    @property
    def corner(self):
        return self.trim.corner

    def values(self, units=UNITS):
        return {role: np.broadcast_to(v, units) for role, v in self.boards(units).values(self.corner).items()}

    def goal_hz(self, units=UNITS):
        """What the frequency must be for the reading to be the target."""
        return self.trim.target_hz - self.trim.bias_hz - self.trim.sd_hz * norm.ppf(self.setup.draw(0, units)("reading"))

    def needed_ohm(self, units=UNITS):
        """R1 = 1/((2π f)² C1 R2 C2), divided by the board's own deviation of R1."""
        v = self.values(units)
        exact = 1 / ((2 * np.pi * self.goal_hz(units)) ** 2 * v["C1"] * v["R2"] * v["C2"])
        return exact / (v["R1"] / self.study.parameter("R1").typical)

    def trimmed(self, units=UNITS):
        """Frequency and setting factor after the trim."""
        block = self.boards(units)
        role, factors = self.trim.factors(block, self.setup.bench, self.setup.draw(0, units))
        assert role == "R1"
        block.adjust(role, factors)
        return self.setup.bench.solve(block, self.corner).frequency_hz, factors * self.study.parameter("R1").typical


@pytest.fixture
def bench(make_study, ideal_wien):
    """bench(low=…, high=…, own=tolerance of R1, sd=… of the target, step=…, …) → Bench. Limits ±3 %, R2 ±1 %, C ±5 %."""

    def made(*, low=7e3, high=14e3, own=0.0, sd=0.0, bias=0.0, gain=5.0, c=0.05, evaluator=None, **design):
        def change(p):
            if p.role != "R1":
                return p
            if not own:
                return replace(p, low=p.typical, high=p.typical, shape=Fixed(), reel=None)
            return replace(p, low=p.typical * (1 - own), high=p.typical * (1 + own), reel=None)

        target = make_study().design.target_frequency_hz
        study = make_study(
            gain=gain, c=c, change=change, trim_role="R1", trim_low=low, trim_high=high, measurement_sd_hz=sd * target,
            measurement_bias_hz=bias * target, **design,
        )  # fmt: skip
        solver = evaluator or ideal_wien()
        trim = Trim.of(study, bias_hz=bias * target)
        return Bench(study, declared_setup(study, seed=3, evaluator=solver), trim, solver)

    return made
