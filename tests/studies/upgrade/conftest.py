"""A linear circuit of independent normal parts: f = target · (1 + Σ aᵢ xᵢ), whose yield is a normal probability."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np
import pytest

from yieldosc.parts.shapes import Normal
from yieldosc.solver.solution import Solution, Status
from yieldosc.study import GradeRow

WINDOW = 0.01
NAMES = ("R1", "R2", "C1", "C2")


@dataclass(frozen=True)
class Linear:
    """x: relative deviations from the nominal values. off: deviation of the nominal frequency.

    margin: 2 + Σ over `margin_weights` of bᵢ xᵢ; a unit below 1 does not start.
    """

    target_hz: float
    typical: dict[str, float]
    weights: dict[str, float]
    margin_weights: dict[str, float] = field(default_factory=dict)
    off: float = 0.0
    hot_weights: dict[str, float] | None = None  # in place of `weights` above 30 °C

    def _at(self, temperature_c):
        return self.hot_weights if self.hot_weights is not None and temperature_c > 30 else self.weights

    def solve(self, values, temperature_c, *, own_law=frozenset(), growth=False, audit=None):
        n = max(np.size(v) for v in values.values())
        x = {role: np.broadcast_to(values[role], n) / typical - 1 for role, typical in self.typical.items()}
        frequency = self.target_hz * (1 + self.off + sum(a * x[role] for role, a in self._at(temperature_c).items()))
        margin = 2 + sum((b * x[role] for role, b in self.margin_weights.items()), np.zeros(n))
        status = np.where(margin >= 1, Status.STARTS, Status.NO_START).astype(np.int8)
        return Solution(frequency_hz=frequency, startup_margin=margin, status=status, growth_per_s=None)


@pytest.fixture
def linear(make_study):
    """linear(tolerances={"R1": 0.05, …}, weights=…, grades=…, prices=…, **design) → study, evaluator.

    Four parts, each bought alone, normal with three standard deviations at the tolerance, limits ±1 % of the target.
    """

    def made(*, tolerances, weights, grades=(), prices=None, shape=None, off=0.0, margin_weights=None, hot_weights=None, window=WINDOW, **design):
        def change(p):
            half = tolerances.get(p.role, 0.0) * p.typical
            spread = half > 0
            return replace(
                p, low=p.typical - half, high=p.typical + half, reel=None,
                shape=(shape or Normal(cut=False)) if spread else p.shape,
            )  # fmt: skip

        study = make_study(r=0.01, c=0.01, window=window, change=change, **design)
        study = replace(study, grades=tuple(grades), prices=prices or {})
        typical = {role: study.parameter(role).typical for role in NAMES}
        return study, Linear(
            study.design.target_frequency_hz, typical, dict(weights), margin_weights or {}, off, hot_weights
        )  # fmt: skip

    return made


@pytest.fixture
def grade():
    """grade("R1", 0.01, price=…) → a row of the user's Grades."""

    def made(part, tolerance, *, price=None, factor=None):
        sides = tolerance if isinstance(tolerance, tuple) else (-tolerance, tolerance)
        return GradeRow(
            target=part, by_part=True, tolerance=sides, law=None, law_text=None, price=price, price_factor=factor,
            place="Grades!A2",
        )  # fmt: skip

    return made
