"""A circuit value from a table written in the test: its roles are the table's own symbols."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence

import numpy as np

from tests.independent import Unit, from_branches
from yieldosc.circuits.circuit import Branch, Circuit, Derived, Role
from yieldosc.solver import make_evaluator
from yieldosc.solver.solution import Solution


def circuit(
    branches: Sequence[Branch],
    gain_symbol: str,
    design_hz: float,
    *,
    band: tuple[float, float] | None = None,
    gain_of: Callable | None = None,
) -> Circuit:
    names = dict.fromkeys(name for row in branches for name in row.symbols)

    def derive(values: Mapping, temperature_c: float, own_law: frozenset[str]) -> Derived:
        return Derived({name: values[name] for name in names})

    return Circuit(
        name="handmade",
        title="made in a test",
        options={},
        roles=tuple(Role(name, name, "SI", "any", name) for name in names),
        branches=tuple(branches),
        gain_symbol=gain_symbol,
        derive=derive,
        design_frequency=lambda values: np.asarray(design_hz),
        closed_form="",
        band=None if band is None else lambda values: (np.asarray(band[0]), np.asarray(band[1])),
        gain_of=gain_of,
    )


def solve(
    made: Circuit, symbols: Mapping[str, float], gains: Sequence[float] | None = None, **keywords: object
) -> Solution:
    """The circuit at its symbols, or at several values of its gain element (one unit each)."""
    gains = [symbols[made.gain_symbol]] if gains is None else list(gains)
    values = {k: np.full(len(gains), float(v)) for k, v in symbols.items()} | {
        made.gain_symbol: np.array(gains, dtype=float)
    }
    return make_evaluator(made, symbols).solve(values, 25.0, growth=True, **keywords)


def others(made: Circuit, symbols: Mapping[str, float], gain: float) -> tuple[float, ...]:
    """Other growing modes [Hz] at one gain."""
    values = {k: np.array([float(v)]) for k, v in {**symbols, made.gain_symbol: gain}.items()}
    return make_evaluator(made, symbols).other_modes(values, 25.0)[0]


def independent(made: Circuit, symbols: Mapping[str, float], *, r0: float = 1e3) -> Unit:
    design = float(made.design_frequency({}))
    return Unit(from_branches(made.branches, symbols, made.gain_symbol), w0=2 * np.pi * design, r0=r0)
