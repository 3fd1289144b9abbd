"""The reference unit of a corner: its crossings, and how they move with every symbol to first order."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Circuit, Derived
from yieldosc.circuits.network import Network
from yieldosc.solver.crossings import Split, real_roots
from yieldosc.solver.exact import modes
from yieldosc.solver.scaled import Scale, scaled
from yieldosc.solver.sturm import positive_roots

Array = NDArray[np.float64]


NARROW = 0.05  # half-width in |ln f| of a band that only a crystal's pair can lie in
FAR = 4.0  # how far beyond limiting the margin an untold crossing of the reference must lie, as a ratio
WEAK = 1e-3  # d ln x / d ln symbol below which a symbol is left out of the prediction


@dataclass(frozen=True, slots=True)
class Tracked:
    """One pair crossing of the reference unit: x = ω² (scaled), direction, and d ln x / d ln symbol."""

    x: float
    direction: int
    exponents: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class Reference:
    """`simple` is False where the fast path would have to guess which crossings belong to which pair.

    idle: the positive roots of F that are no crossings, since their gain has the other sign; order: tracked and idle
    roots (numbered on from the tracked) by rising x. Roots of F cannot pass each other without meeting.
    """

    scale: Scale
    symbols: Mapping[str, Array]
    design: float
    tracked: tuple[Tracked, ...]
    intended: int
    leaves: int | None
    simple: bool
    idle: tuple[Tracked, ...] = ()
    far: int | None = None  # the first crossing whose pair counting cannot tell, too far away to limit the margin
    order: tuple[int, ...] = ()
    in_band: tuple[bool, ...] | None = None  # of the tracked: membership where a narrow band tells the pairs apart

    def prediction(self, root: Tracked, symbols: Mapping[str, Array]) -> Array:
        """First-order ratio x/x_reference of a root for units with these symbols."""
        total: Array = np.zeros(1)
        with np.errstate(divide="ignore", invalid="ignore"):  # a capacitance may be 0 in some units
            for name, exponent in root.exponents.items():
                if abs(exponent) < WEAK:
                    continue  # Newton corrects what a weak symbol moves
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
    found = modes(part.a, part.b, part.g, design, centre, half, fixed_gain=circuit.fixed_gain)
    extended = network.extended(symbols)
    empty = Reference(scale, extended, float(design[0]), (), 0, None, False)
    if not found.found[0] or np.isfinite(found.start[0]):
        return empty
    pairs = np.flatnonzero(np.isfinite(found.crossings.gain[0]) & (found.crossings.poles[0] == 2))
    x = found.crossings.omega[0, pairs] ** 2
    direction = found.crossings.direction[0, pairs]
    member = found.members[0, pairs]
    with np.errstate(divide="ignore"):
        inside = np.abs(np.log(found.crossings.omega[0, pairs] / centre[0])) <= half[0]
    entering = np.flatnonzero(member & (direction == 1))
    leaving = np.flatnonzero(member & (direction == -1))
    # a crystal's pair cannot leave its narrow band, and nothing else can enter it: the band tells whose crossing it is
    by_band = circuit.band is not None and bool(half[0] < NARROW) and bool(np.array_equal(inside, member))
    far = None if by_band else _first_uncountable(direction, member)
    gains = np.abs(found.crossings.gain[0, pairs])
    simple = (
        np.count_nonzero(inside & (direction == 1)) == 1
        and entering.size == 1
        and bool(inside[entering[0]])
        and leaving.size <= 1
        and (leaving.size == 0 or leaving[0] > entering[0])
        and (far is None or (far > entering[0] and gains[far] * gains[entering[0]] > FAR * part.g[0] ** 2))
    )
    if not simple:
        return empty
    every, complete = _positive_roots(Split.of(part.a, part.b), x)
    if not complete:
        return empty
    exponents = _exponents(network, scale, symbols, every)
    followed = [Tracked(float(root), 0, exponents[k]) for k, root in enumerate(every)]
    tracked = tuple(replace(f, direction=int(d)) for f, d in zip(followed, direction, strict=False))
    leaves = int(leaving[0]) if leaving.size else None
    order = tuple(int(k) for k in np.argsort(every))
    idle = tuple(followed[len(x) :])
    in_band = tuple(bool(m) for m in member) if by_band else None
    return Reference(
        scale, extended, float(design[0]), tracked, int(entering[0]), leaves, True, idle, far, order, in_band
    )


def _positive_roots(split: Split, crossings: Array) -> tuple[Array, bool]:
    """The crossings' x, then the other positive roots of F; and whether a Sturm chain counts as many."""
    found, _ = real_roots(split, split.all_roots())
    idle = [x for x in found[0] if np.isfinite(x) and not np.any(np.abs(crossings - x) <= 1e-9 * x)]
    every = np.concatenate([crossings, idle])
    return every, bool(positive_roots(split.polynomial())[0] == len(every))


def _first_uncountable(direction: NDArray[np.int64], member: NDArray[np.bool_]) -> int | None:
    """The first crossing whose pair counting cannot tell; None where every leaving crossing happens with one pair in
    the right half plane and nothing that left can be mistaken for what enters later."""
    count, left = 0, False
    for k, step in enumerate(direction):
        if (step < 0 and count != 1) or (left and not member.all()):
            return k
        left = left or step < 0
        count += int(step)
    return None


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
