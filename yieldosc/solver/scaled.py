"""Role values of n units at one temperature → scaled coefficients of A and B.

Symbols are divided by powers of two near the design frequency and the impedance level: exact in binary, and no
product of picofarads comes near the smallest number a computer holds.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Circuit, Derived
from yieldosc.circuits.network import Network

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Scale:
    """ω0 [rad/s] and R0 [Ω], both powers of two."""

    omega: float
    ohm: float

    @classmethod
    def of(cls, design_hz: float, symbols: Mapping[str, Array], dims: Mapping[str, tuple[int, int]]) -> Scale:
        """ω0 at the design frequency; R0 at the geometric mean reactance of the capacitors and coils."""
        omega = 2.0 ** np.round(np.log2(2 * np.pi * design_hz))
        logs = []
        for name, dimension in dims.items():
            if name in symbols and dimension in ((-1, 1), (1, 1)):
                size = float(np.median(symbols[name]))
                if size > 0:
                    logs.append(dimension[0] * np.log2(size * omega))
        ohm = 2.0 ** np.round(np.mean(logs)) if logs else 1.0
        return cls(float(omega), float(ohm))

    def factor(self, dimension: tuple[int, int]) -> float:
        """What a symbol of this dimension is multiplied by."""
        return float(self.ohm ** -dimension[0] * self.omega ** dimension[1])


@dataclass(frozen=True, slots=True)
class Scaled:
    """A and B (lists of arrays (n,)), the actual gain g (n,) in scaled variables, and the unscaled symbols."""

    a: list[Array]
    b: list[Array]
    g: Array
    symbols: dict[str, Array]

    def take(self, rows: NDArray[np.intp]) -> tuple[list[Array], list[Array], Array]:
        """Coefficients and gain of some units."""
        return [c[rows] for c in self.a], [c[rows] for c in self.b], self.g[rows]


def scaled(network: Network, scale: Scale, derived: Derived, n: int) -> Scaled:
    """Coefficients of n units; constants are broadcast."""
    symbols = network.extended(derived.symbols)
    table = [symbols[name] * scale.factor(network.dimensions[name]) for name in network.symbols]
    a, b = network.coefficients(table)
    gain = symbols[network.gain_symbol] * scale.factor(network.dimensions[network.gain_symbol])
    return Scaled([_full(c, n) for c in a], [_full(c, n) for c in b], _full(gain, n), symbols)


def _full(value: Array | float, n: int) -> Array:
    array = np.asarray(value, dtype=np.float64)
    return array if array.shape == (n,) else np.broadcast_to(array, (n,)).copy()


def bias_substitute(circuit: Circuit, derived: Derived, reference: Mapping[str, Array], n: int) -> Derived:
    """Units without bias get the reference's symbols, so that arrays stay finite; their status says no_bias."""
    if derived.no_bias is None:
        return derived
    no_bias = np.broadcast_to(derived.no_bias, (n,))
    if not no_bias.any():
        return derived
    symbols = {
        name: np.where(no_bias, np.ravel(reference[name])[0], value) for name, value in derived.symbols.items()
    }
    return Derived(symbols, no_bias)
