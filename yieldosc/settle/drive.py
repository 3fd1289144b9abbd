"""Drive level of a crystal from the amplitude at the limiter's input.

Both are read from the same branch table: with the limiter as the only source, the voltage across the crystal over the
one at the limiter's input is the ratio of two numerators of the same network. Motional current Î = |V/Z|, Z the arm's
own impedance at the settled frequency, and P = ½ Î² ESR (IEC 60444-6 measures the same quantity; not read).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Branch, Circuit, Derived
from yieldosc.circuits.limits import swings
from yieldosc.circuits.network import GROUND, Network, network
from yieldosc.settle.transfer import limited_loop
from yieldosc.solver.polynomials import value
from yieldosc.solver.scaled import Scale, scaled

Array = NDArray[np.float64]


def drive_w(
    circuit: Circuit,
    values: Mapping[str, Array],
    temperature_c: float,
    settled_hz: Array,
    amplitude_in_v: Array,
    *,
    own_law: frozenset[str] = frozenset(),
) -> Array | None:
    """Power [W] in each unit's crystal (n,), nan where the amplitude is not known; None without a crystal.

    values: role → (n,) or 0-d; amplitude_in_v: peak fundamental at the limiter's input.
    """
    known = np.isfinite(amplitude_in_v) & np.isfinite(settled_hz)
    if circuit.crystal_arm is None or limited_loop(circuit).voltage or not known.any():
        return None
    near, across = _probes(circuit.branches, circuit.gain_symbol, circuit.crystal_arm)
    hz = settled_hz[known]
    ratio = _ratio(circuit, values, temperature_c, own_law, settled_hz, known, (near, across))
    symbols = _symbols(circuit, values, temperature_c, own_law, known)
    inductance, capacitance, esr = (symbols[name] for name in circuit.crystal_arm)
    omega = 2 * np.pi * hz
    current = amplitude_in_v[known] * ratio / np.abs(esr + 1j * (omega * inductance - 1 / (omega * capacitance)))
    power = np.full(len(settled_hz), np.nan)
    power[known] = 0.5 * current**2 * esr
    return power


def swing_amplitudes(
    circuit: Circuit,
    values: Mapping[str, Array],
    temperature_c: float,
    settled_hz: Array,
    *,
    own_law: frozenset[str] = frozenset(),
) -> tuple[Array, Array] | None:
    """Largest fundamentals at the limiter's input and at the output (n,) of an inverter that swings rail to rail.

    A square wave between ± VSAT has the fundamental 4 VSAT/π (Fourier series). None where no swing is given.
    """
    if circuit.crystal_arm is None or not swings(circuit.options) or "VSAT" not in values:
        return None
    n = len(settled_hz)
    out_v = np.broadcast_to(4 / np.pi * np.asarray(values["VSAT"], dtype=float), (n,)).copy()
    known = np.isfinite(settled_hz)
    in_v = np.full(n, np.nan)
    if known.any():
        nets = _swing_probes(circuit.branches, circuit.gain_symbol)
        ratio = _ratio(circuit, values, temperature_c, own_law, settled_hz, known, nets)
        in_v[known] = out_v[known] / ratio
    out_v[~known] = np.nan
    return in_v, out_v


def _ratio(
    circuit: Circuit,
    values: Mapping[str, Array],
    temperature_c: float,
    own_law: frozenset[str],
    settled_hz: Array,
    known: NDArray[np.bool_],
    nets: tuple[Network, Network],
) -> Array:
    """|second over first| of two probes at the settled frequency of the units that have one."""
    symbols = _symbols(circuit, values, temperature_c, own_law, known)
    hz = settled_hz[known]
    scale = Scale.of(float(np.median(hz)), symbols, nets[0].dimensions)
    s = np.asarray(1j * 2 * np.pi * hz / scale.omega, dtype=np.complex128)
    first, second = (value(scaled(net, scale, Derived(symbols), len(hz)).b, s) for net in nets)
    return np.asarray(np.abs(second / first))


def _symbols(
    circuit: Circuit, values: Mapping[str, Array], temperature_c: float, own_law: frozenset[str],
    known: NDArray[np.bool_],
) -> dict[str, Array]:  # fmt: skip
    derived = circuit.derive(values, temperature_c, own_law).symbols
    return {name: np.broadcast_to(np.asarray(v, dtype=float), known.shape)[known] for name, v in derived.items()}


@lru_cache(maxsize=32)
def _probes(branches: tuple[Branch, ...], gain_symbol: str, arm: tuple[str, ...]) -> tuple[Network, Network]:
    """The network seen from the limiter's input, and from the crystal's terminals."""
    crystal = next(row for row in branches if row.symbols == tuple(arm))
    return network(branches, gain_symbol), _seen_from(branches, gain_symbol, crystal.nodes[:2])


@lru_cache(maxsize=32)
def _swing_probes(branches: tuple[Branch, ...], gain_symbol: str) -> tuple[Network, Network]:
    """The network seen from the limiter's input, and from the output of the gain element."""
    source = next(row for row in branches if row.gain_element)
    return network(branches, gain_symbol), _seen_from(branches, gain_symbol, (source.nodes[0], GROUND))


def _seen_from(branches: tuple[Branch, ...], gain_symbol: str, nodes: tuple[str, ...]) -> Network:
    """The same table with the gain element controlled from other nodes."""
    seen = (replace(row, nodes=(*row.nodes[:2], *nodes)) if row.gain_element else row for row in branches)
    return network(tuple(seen), gain_symbol)
