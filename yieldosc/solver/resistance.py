"""The negative resistance that a crystal's motional arm sees, over its own series resistance.

D(s) = Q (1 + s Rm Cm + s² Lm Cm) + s Cm P, with Q and P the determinants without the arm, open and shorted: the rest of
the circuit (shunt capacitance included) has the impedance Z = P/Q at the arm's terminals, and D = 0 is Z + Z_arm = 0.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.network import Network
from yieldosc.solver.polynomials import ComplexArray, value
from yieldosc.solver.scaled import Scale

Array = NDArray[np.float64]
SHORT = 2.0**40  # capacitance of the arm that makes Q negligible beside s C P, in units of 1/ω: no digits are lost


def impedance_ohm(
    network: Network,
    scale: Scale,
    symbols: Mapping[str, Array],
    arm: tuple[str, str, str],
    omega: Array,
    g: Array,
) -> ComplexArray:
    """Z [Ω] (n,) at ω (n,) and gain g (n,), both in scaled variables; symbols unscaled, coupled pairs extended."""

    def determinant(capacitance: Array) -> ComplexArray:
        changed = {arm[0]: np.zeros(1), arm[1]: capacitance, arm[2]: np.zeros(1)}
        table = [
            changed[name] if name in changed else symbols[name] * scale.factor(network.dimensions[name])
            for name in network.symbols
        ]
        a, b = network.coefficients(table)
        s: ComplexArray = np.asarray(1j * omega, dtype=np.complex128)
        return np.asarray(value(a, s) + g * value(b, s), dtype=np.complex128)

    with np.errstate(divide="ignore", invalid="ignore"):
        open_circuit = determinant(np.zeros(1))
        loaded = determinant(SHORT / omega)
        return np.asarray((loaded / open_circuit - 1) / (1j * SHORT) * scale.ohm, dtype=np.complex128)


def resistance_ratio(
    network: Network,
    scale: Scale,
    symbols: Mapping[str, Array],
    arm: tuple[str, str, str],
    omega: Array,
    g: Array,
) -> Array:
    """−Re Z/ESR (n,): above 1 where the circuit feeds the arm more than it loses; nan where ω is."""
    z = impedance_ohm(network, scale, symbols, arm, omega, g)
    return np.asarray(-z.real / symbols[arm[2]])
