"""A fitted shift: the settled frequency, amplitudes and distortion of a unit from its excess gain and its features.

One polynomial per cell of the excess gain and level of spread, trained on units around the nominal one, so that it
depends on nothing but the circuit and its nominal values: corners, rival sets and upgrades share it. A fit whose own
held-out units miss the tolerance is not used, nor is any fit outside the box that it was trained on.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Circuit, Role
from yieldosc.settle.features import features
from yieldosc.settle.prepared import Prepared
from yieldosc.settle.refine import TOLERANCE, refine
from yieldosc.settle.regression import Polynomial, column_count, fit
from yieldosc.settle.settled import Figures, figures, waves

Array = NDArray[np.float64]
SPREADS = (0.06, 0.2)  # half-width in ln of a role's values in training; a unit takes the first box that holds it
LOOSER = 4.0
UNITS_PER_COLUMN = 2.5
HELD_OUT = 48
FAST_TOLERANCE = 50e-6
DISTORTION_TOLERANCE = 1e-3  # absolute, for the fitted distortion of held-out units
SEED = 20_240_229  # of the training units only: no draw of a study comes from it


class Trainer(Protocol):
    """Makes `count` live units whose role values spread by ± spread in ln around the nominal ones."""

    def __call__(self, spread: float, count: int, rng: np.random.Generator) -> Prepared: ...


@dataclass(frozen=True, slots=True)
class Prediction:
    """Figures of m units and which of them a fit was good for."""

    figures: Figures
    known: NDArray[np.bool_]


class FittedShift:
    """Fits of one circuit around its nominal values, made when first needed; none depends on what asked for it."""

    def __init__(self, trainer: Trainer, *, tolerance: float = FAST_TOLERANCE) -> None:
        self._trainer = trainer
        self._tolerance = tolerance
        self.made: dict[tuple[int, int], Polynomial | None] = {}

    def predict(self, live: Prepared) -> Prediction:
        """Figures of live units; unknown ones hold nan."""
        edges = np.array(live.limiter.cell_edges)
        cell = np.searchsorted(edges, live.excess - 1, side="left") - 1
        seen = features(live)
        table = np.full((len(live.rows), 5), np.nan)
        for c in np.unique(cell[(cell >= 0) & (cell < len(edges) - 1)]):
            rows = np.flatnonzero(cell == c)
            for level in range(len(SPREADS)):
                made = self._fit(int(c), level, live)
                if made is None or not rows.size:
                    continue
                inside = made.holds(seen[rows])
                chosen = rows[inside]
                table[chosen] = made.value(_position(live, chosen, edges[c], edges[c + 1]), seen[chosen])
                rows = rows[~inside]
        return Prediction(_figures(live, table), np.isfinite(table[:, 0]))

    def _fit(self, cell: int, level: int, like: Prepared) -> Polynomial | None:
        key = (cell, level)
        if key not in self.made:
            self.made[key] = self._trained(cell, level, like)
        return self.made[key]

    def _trained(self, cell: int, level: int, like: Prepared) -> Polynomial | None:
        rng = np.random.default_rng([SEED, cell, level])
        probe = features(like.take(np.arange(1))).shape[1]
        count = int(UNITS_PER_COLUMN * column_count(probe)) + HELD_OUT
        units = self._trainer(SPREADS[level], count, rng)
        if len(units.rows) < 0.8 * count:
            return None
        low, high = like.limiter.cell_edges[cell : cell + 2]
        units = _with_excess(units, low, high, rng)
        found = refine(
            units.limiter, units.network, units.excess, units.skew, even=units.even, tolerance=TOLERANCE / 4
        )
        good = np.flatnonzero(found.converged)  # a cap that is reached at this tolerance may do for the fit's own
        if len(good) < 0.8 * count:
            return None
        units, table = units.take(good), _table(units, figures(found.shift, *waves(units, found)))[good]
        seen, position = features(units), _position(units, np.arange(len(good)), low, high)
        made = fit(position[HELD_OUT:], seen[HELD_OUT:], table[HELD_OUT:])
        error = np.abs(made.value(position[:HELD_OUT], seen[:HELD_OUT]) - table[:HELD_OUT])
        error = error[made.holds(seen[:HELD_OUT])]
        if not len(error) or np.max(error[:, 0]) > self._tolerance or np.max(error[:, 3:]) > DISTORTION_TOLERANCE:
            return None
        return made


def training_values(
    circuit: Circuit, nominal: Mapping[str, float], spread: float, count: int, rng: np.random.Generator
) -> dict[str, Array]:
    """Role values of training units, each drawn by itself; zeros stay."""
    out = {}
    for name, value in sorted(nominal.items()):
        width = spread * (LOOSER if _loose(circuit.role(name)) else 1.0)
        out[name] = value * np.exp(rng.uniform(-width, width, count))
    return out


def _loose(role: Role) -> bool:
    """Data-sheet figures (bandwidth, current gain, stray capacitance) spread far more than parts and voltages do."""
    return not role.main and not role.condition and role.unit != "V" and role.trait != "k"


def _with_excess(units: Prepared, low: float, high: float, rng: np.random.Generator) -> Prepared:
    """The same loops with gains that fill a cell evenly in the limiter's own measure of level."""
    power = units.limiter.onset_power
    level = rng.uniform(low**power, high**power, len(units.rows))
    excess = 1 + np.maximum(level, 1e-4) ** (1 / power)
    return replace(units, network=units.network.with_gain(excess / units.excess), excess=excess)


def _position(units: Prepared, rows: NDArray[np.intp], low: float, high: float) -> Array:
    """−1 … 1 across the cell."""
    power = units.limiter.onset_power
    level = (units.excess[rows] - 1) ** power
    return np.asarray((2 * level - low**power - high**power) / (high**power - low**power))


def _first(units: Prepared) -> tuple[Array, Array]:
    """Fundamentals at the input and at the output if the wave were a sinusoid."""
    amplitude = units.limiter.first_amplitude(units.excess)
    through = units.network.output_at(np.full((len(units.rows), 1), 1j))[:, 0]
    return amplitude, np.abs(through) * amplitude / units.excess


def _table(units: Prepared, found: Figures) -> Array:
    x_in, x_out = _first(units)
    rises = (np.log(found.x_in / x_in), np.log(found.x_out / x_out))
    return np.stack([found.shift, *rises, found.distortion_in, found.distortion_out], axis=1)


def _figures(units: Prepared, table: Array) -> Figures:
    x_in, x_out = _first(units)
    return Figures(
        table[:, 0],
        x_in * np.exp(table[:, 1]),
        x_out * np.exp(table[:, 2]),
        np.maximum(table[:, 3], 0.0),
        np.maximum(table[:, 4], 0.0),
    )
