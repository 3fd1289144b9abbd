"""The op-amp stage: row (s/2πGBW) v_q = v_p − v_m, feedback RF from q to m; RF is the gain element.

Level control moves RF, and noise gain and load follow; the determinant is linear in RF, the margin is |K/K_c|.
"""

from __future__ import annotations

import numpy as np

from yieldosc.circuits.circuit import Branch, Values
from yieldosc.circuits.roles import device, resistor
from yieldosc.circuits.stages import Array

OPAMP_ROLES = (
    device("GBW", "Hz", "gain–bandwidth product; absent: an ideal op-amp", optional=True, kind="ic"),
    device("RO", "Ω", "output resistance outside the feedback loop", optional=True, kind="ic"),
)


def opamp_branches(present: frozenset[str], *, plus: str, minus: str) -> tuple[Branch, ...]:
    """Amplifier from (plus, minus) to q, and RO from q to the circuit's node o (absent: o is q)."""
    q = output_node(present)
    rows = [Branch("op-amp", "opamp", (q, plus, minus), ("tau",) if "GBW" in present else ())]
    if "RO" in present:
        rows.append(Branch("RO", "R", (q, "o"), ("RO",)))
    return tuple(rows)


def output_node(present: frozenset[str]) -> str:
    """q where an output resistance separates it from o, else o itself."""
    return "q" if "RO" in present else "o"


def opamp_symbols(values: Values) -> dict[str, Array]:
    """tau = 1/(2π GBW)."""
    return {"tau": 1 / (2 * np.pi * values["GBW"])} if "GBW" in values else {}


def noise_gain(symbols: dict[str, Array], rf: Array) -> Array:
    """K = 1 + RF/RG."""
    return 1 + rf / symbols["RG"]


GAIN_ROLES = (
    resistor("RF", "feedback resistor, output to inverting input"),
    resistor("RG", "inverting input to ground"),
)
