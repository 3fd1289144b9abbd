"""Trim and select-on-test: one role of each board is set at the test until the reading comes nearest to the target.

Four kinds: a trimmer or potentiometer (continuous), one that moves in steps, a bank of switched steps that each have
their own tolerance, and a fitted part that is replaced by the nearest value of an E series, which brings its own draw.
The reading has the instrument's noise and bias, so the target is reached within them and no better.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri

from yieldosc.parts.codes import series_between
from yieldosc.parts.parameter import Parameter
from yieldosc.population import Bench, Block
from yieldosc.solver.solution import Status
from yieldosc.studies.declared import factory_corner
from yieldosc.studies.trim.wanted import Wanted, wanted_settings
from yieldosc.study import Corner, Study

Array = NDArray[np.float64]
Draw = Callable[[str], Array]
SETTINGS = 5
MOST_STEPS = 512  # of a bank whose steps are drawn one by one


@dataclass(frozen=True)
class Trim:
    """How boards are trimmed; an `Adjustment` of the population. Settings in the role's SI unit."""

    parameter: Parameter
    corner: Corner
    target_hz: float
    low: float
    high: float
    step: float | None = None
    step_tolerance: float = 0.0
    series: tuple[float, ...] = ()  # the values that may be fitted
    sd_hz: float = 0.0
    bias_hz: float = 0.0

    @classmethod
    def of(cls, study: Study, *, bias_hz: float = 0.0) -> Trim | None:
        """The trim that a study declares; None where it declares none. ValueError for a role without a value."""
        design = study.design
        if design.trim_role is None or design.trim_low is None or design.trim_high is None:
            return None
        series = () if design.trim_series is None else series_between(
            int(design.trim_series[1:]), design.trim_low, design.trim_high
        )  # fmt: skip
        return cls(
            parameter=study.parameter(design.trim_role),
            corner=factory_corner(study),
            target_hz=design.target_frequency_hz,
            low=design.trim_low,
            high=design.trim_high,
            step=design.trim_step,
            step_tolerance=design.trim_step_tolerance,
            series=series,
            sd_hz=design.measurement_sd_hz or 0.0,
            bias_hz=bias_hz,
        )

    def factors(self, block: Block, bench: Bench, draw: Draw) -> tuple[str, Array]:
        """Each unit's factor (n,) on the trimmed role; 1 for a unit that cannot be read at the test."""
        wanted = self.wanted(block, bench, draw)
        value = self._set(wanted, block, bench, draw) / self.parameter.typical
        return self.parameter.role, np.where(wanted.unsolved, 1.0, value)

    def wanted(self, block: Block, bench: Bench, draw: Draw, *, beyond: float = 1.0) -> Wanted:
        """The continuous setting that would bring each unit's reading to the target. beyond: how far outside the range
        it is looked for, as a factor."""
        inner = np.geomspace(self.low, self.high, SETTINGS)
        if beyond > 1:
            lower, upper = np.geomspace(self.low / beyond, self.low, SETTINGS), np.geomspace(
                self.high, self.high * beyond, SETTINGS
            )  # fmt: skip
            inner = np.concatenate([lower[:-1], inner, upper[1:]])
        goal = self.target_hz - self._reading_error(draw)
        return wanted_settings(lambda settings: self._frequency_hz(block, bench, settings), goal, inner)

    def _reading_error(self, draw: Draw) -> Array:
        return np.asarray(self.bias_hz + self.sd_hz * ndtri(draw("reading")))

    def _frequency_hz(self, block: Block, bench: Bench, settings: Array) -> Array:
        values = block.values(self.corner)
        values[self.parameter.role] = values[self.parameter.role] * (settings / self.parameter.typical)
        solution = bench.solve_values(values, self.corner, block.population.own_law)
        return np.where(solution.status == Status.STARTS, solution.limit_frequency_hz, np.nan)

    def _set(self, wanted: Wanted, block: Block, bench: Bench, draw: Draw) -> Array:
        """The setting that is left on the board."""
        setting = np.where(wanted.unsolved, self.parameter.typical, wanted.setting)
        if self.series:
            return self._fitted(setting, block, draw)
        if self.step is None:
            return setting
        lower, upper = self._neighbours(setting, draw)
        goal = self.target_hz - self._reading_error(draw)
        away = [np.abs(self._frequency_hz(block, bench, s) - goal) for s in (lower, upper)]
        return np.where(~(away[1] < away[0]), lower, upper)

    def _neighbours(self, setting: Array, draw: Draw) -> tuple[Array, Array]:
        """The steps below and above the wanted setting."""
        assert self.step is not None
        count = int(np.floor((self.high - self.low) / self.step + 1e-9))
        if not self.step_tolerance:
            k = np.clip(np.floor((setting - self.low) / self.step + 1e-9), 0, count)
            return self.low + k * self.step, self.low + np.minimum(k + 1, count) * self.step
        deviations = [1 + self.step_tolerance * (2 * draw(f"step {i}") - 1) for i in range(min(count, MOST_STEPS))]
        bank = self.low + self.step * np.cumsum([np.zeros(len(setting)), *deviations], axis=0)
        k = np.clip((bank <= setting).sum(axis=0) - 1, 0, len(bank) - 1)
        rows = np.arange(len(setting))
        return bank[k, rows], bank[np.minimum(k + 1, len(bank) - 1), rows]

    def _fitted(self, setting: Array, block: Block, draw: Draw) -> Array:
        """The nearest series value in ratio, as a new part of the same tolerance in place of the one that was read."""
        ladder = np.asarray(self.series)
        middles = np.sqrt(ladder[1:] * ladder[:-1])
        chosen = ladder[np.searchsorted(middles, setting)]
        p = self.parameter
        if p.high <= p.low or p.shape.text == "fixed":
            return chosen
        fresh = p.shape.initial(p.low, p.typical, p.high, draw("fitted part"))
        return np.asarray(chosen * fresh / block.initial(p.role))
