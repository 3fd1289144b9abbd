"""The reference unit of a corner: its crossings, and how they move with every symbol to first order."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Circuit, Derived
from yieldosc.circuits.network import Network
from yieldosc.solver.crossings import Split
from yieldosc.solver.exact import modes
from yieldosc.solver.scaled import Scale, scaled

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Tracked:
    """One pair crossing of the reference unit: x = ω² (scaled), direction, and d ln x / d ln symbol."""

    x: float
    direction: int
    exponents: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class Reference:
    """`simple` is False where the fast path would have to guess which crossings belong to which pair."""

    scale: Scale
    symbols: Mapping[str, Array]
    design: float
    tracked: tuple[Tracked, ...]
    intended: int
    leaves: int | None
    simple: bool

    def prediction(self, k: int, symbols: Mapping[str, Array]) -> Array:
        """First-order ratio x/x_reference of crossing k for units with these symbols."""
        total: Array = np.zeros(1)
        for name, exponent in self.tracked[k].exponents.items():
            total = total + exponent * np.log(symbols[name] / self.symbols[name])
        return np.exp(np.clip(total, -3, 3))


def make_reference(
    circuit: Circuit, network: Network, unit: Mapping[str, Array], temperature_c: float, own_law: frozenset[str]
) -> Reference:
    """Solve one unit exactly and note what the fast path may follow. unit: role → array (1,)."""
    derived = circuit.derive(unit, temperature_c, own_law)
    design_hz = float(np.ravel(circuit.design_frequency(unit))[0])
    symbols = {name: np.broadcast_to(np.asarray(v, dtype=np.float64), (1,)) for name, v in derived.symbols.items()}
    scale = Scale.of(design_hz, symbols, network.dimensions)
    if derived.no_bias is not None and bool(np.any(derived.no_bias)):
        symbols = {k: np.where(np.isfinite(v) & (v != 0), v, 1.0) for k, v in symbols.items()}
    part = scaled(network, scale, Derived(symbols), 1)
    design = np.array([design_hz * 2 * np.pi / scale.omega])
    centre, half = design, np.array([np.log(2.0)])
    if circuit.band is not None:
        middle, width = circuit.band(unit)
        centre = np.reshape(middle, (1,)) * 2 * np.pi / scale.omega
        half = np.reshape(width, (1,))
    found = modes(part.a, part.b, part.g, design, centre, half)
    extended = network.extended(symbols)
    empty = Reference(scale, extended, float(design[0]), (), 0, None, False)
    if not found.found[0]:
        return empty
    pairs = np.flatnonzero(np.isfinite(found.crossings.gain[0]) & (found.crossings.poles[0] == 2))
    x = found.crossings.omega[0, pairs] ** 2
    direction = found.crossings.direction[0, pairs]
    member = found.members[0, pairs]
    with np.errstate(divide="ignore"):
        inside = np.abs(np.log(found.crossings.omega[0, pairs] / centre[0])) <= half[0]
    entering = np.flatnonzero(member & (direction == 1))
    leaving = np.flatnonzero(member & (direction == -1))
    simple = (
        np.count_nonzero(inside & (direction == 1)) == 1
        and entering.size == 1
        and bool(inside[entering[0]])
        and leaving.size <= 1
        and (leaving.size == 0 or leaving[0] > entering[0])
        and _countable(direction, member)
    )
    if not simple:
        return empty
    exponents = _exponents(network, scale, symbols, x)
    tracked = tuple(
        Tracked(float(x[k]), int(direction[k]), exponents[k] if k != entering[0] else {}) for k in range(len(x))
    )
    leaves = int(leaving[0]) if leaving.size else None
    return Reference(scale, extended, float(design[0]), tracked, int(entering[0]), leaves, True)


def _countable(direction: NDArray[np.int64], member: NDArray[np.bool_]) -> bool:
    """True when every leaving crossing happens with one pair in the right half plane: no pair can be mistaken."""
    count = 0
    for step in direction:
        if step < 0 and count != 1:
            return False
        count += int(step)
    # a pair that left could be taken for another that enters later, unless all crossings are the intended pair's
    return bool(np.count_nonzero(direction < 0) <= 1 or member.all())


def _exponents(network: Network, scale: Scale, symbols: Mapping[str, Array], x: Array) -> list[dict[str, float]]:
    """d ln x / d ln symbol of every crossing, from one Newton step after a relative change of 1e-6."""
    names = [name for name, v in symbols.items() if v[0] > 0]
    rise = 1e-6
    n = len(names)
    table = {name: np.full(n, symbols[name][0]) for name in symbols}
    for i, name in enumerate(names):
        table[name][i] *= 1 + rise
    split = Split.of(*_ab(network, scale, table, n))
    base = Split.of(*_ab(network, scale, {k: np.full(n, v[0]) for k, v in symbols.items()}, n))
    out = []
    for root in x:
        at = np.full(n, root)
        moved, slope = split.condition(at)
        still, _ = base.condition(at)
        change = -(moved - still) / slope / root / rise
        out.append({name: float(c) for name, c in zip(names, change, strict=True) if np.isfinite(c)})
    return out


def _ab(network: Network, scale: Scale, symbols: dict[str, Array], n: int) -> tuple[list[Array], list[Array]]:
    part = scaled(network, scale, Derived(symbols), n)
    return part.a, part.b
