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
from yieldosc.circuits.network import Network, network
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
    n = len(settled_hz)
    symbols = {
        name: np.broadcast_to(np.asarray(v, dtype=float), (n,))[known]
        for name, v in circuit.derive(values, temperature_c, own_law).symbols.items()
    }
    near, across = _probes(circuit.branches, circuit.gain_symbol, circuit.crystal_arm)
    hz = settled_hz[known]
    scale = Scale.of(float(np.median(hz)), symbols, near.dimensions)
    s = np.asarray(1j * 2 * np.pi * hz / scale.omega, dtype=np.complex128)
    parts = [scaled(net, scale, Derived(symbols), len(hz)).b for net in (near, across)]
    ratio = np.abs(value(parts[1], s) / value(parts[0], s))
    inductance, capacitance, esr = (symbols[name] for name in circuit.crystal_arm)
    omega = 2 * np.pi * hz
    current = amplitude_in_v[known] * ratio / np.abs(esr + 1j * (omega * inductance - 1 / (omega * capacitance)))
    power = np.full(n, np.nan)
    power[known] = 0.5 * current**2 * esr
    return power


@lru_cache(maxsize=32)
def _probes(branches: tuple[Branch, ...], gain_symbol: str, arm: tuple[str, ...]) -> tuple[Network, Network]:
    """The network seen from the limiter's input, and from the crystal's terminals."""
    source = next(row for row in branches if row.gain_element)
    crystal = next(row for row in branches if row.symbols == tuple(arm))
    probe = replace(source, nodes=(*source.nodes[:2], *crystal.nodes[:2]))
    seen = tuple(probe if row is source else row for row in branches)
    return network(branches, gain_symbol), network(seen, gain_symbol)
