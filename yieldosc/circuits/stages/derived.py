"""Role values of a transistor circuit → its branch symbols: parts as they are, the stage from its bias."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np

from yieldosc.circuits.circuit import Branch, Derived, Values
from yieldosc.circuits.stages.stage import Array, Resistance, Stage
from yieldosc.circuits.stages.surroundings import emitter_resistance_ohm, feed_resistance_ohm

Derive = Callable[[Values, float, frozenset[str]], Derived]


def _nothing(values: Values) -> dict[str, Array]:
    return {}


def stage_derive(
    stage: Stage,
    branches: Sequence[Branch],
    *,
    rfeed: Callable[[Values], Resistance] = feed_resistance_ohm,
    computed: Callable[[Values], dict[str, Array]] = _nothing,
) -> Derive:
    """`derive` of a circuit. rfeed: DC resistance in c; computed: symbols that are not the value of one role."""
    used = {name for row in branches for name in row.symbols}
    parts = used - set(stage.symbols)

    def derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
        bias = stage.solve(values, temperature_c, own_law, rfeed(values), emitter_resistance_ohm(values))
        symbols = {name: values[name] for name in parts if name in values}
        if "feed_series" in used:
            symbols["feed_series"] = np.asarray(feed_resistance_ohm(values))
        return Derived(symbols | computed(values) | bias.symbols, bias.no_bias)

    return derive
