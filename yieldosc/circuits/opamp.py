"""The op-amp stage: row (s/2πGBW) v_q = v_p − v_m, feedback RF from q to m; RF is the gain element.

Level control moves RF, and noise gain and load follow; the determinant is linear in RF, the margin is |K/K_c|.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Branch, Values
from yieldosc.circuits.roles import device, resistor
from yieldosc.circuits.stages import Array

GBW_ROLE = device("GBW", "Hz", "gain–bandwidth product; absent: an ideal op-amp", optional=True, kind="ic")
OPAMP_ROLES = (
    GBW_ROLE,
    device("RO", "Ω", "output resistance outside the feedback loop", optional=True, kind="ic"),
)
FEEDBACK_ROLE = resistor("RF", "feedback, output to inverting input: the gain element")
MOST_F_OVER_GBW = 1 / 20
RANGE_TEXT = "f below GBW/20 (single-pole op-amp model)"
ASSUMPTION = "op-amp: one pole at GBW, input currents and offset left out"


def opamp_branches(present: frozenset[str], *, plus: str, minus: str) -> tuple[Branch, ...]:
    """Amplifier from (plus, minus) to q, and RO from q to the circuit's node o (absent: o is q)."""
    q = output_node(present)
    rows = [Branch("op-amp", "opamp", (q, plus, minus), ("tau",) if "GBW" in present else ())]
    if "RO" in present:
        rows.append(Branch("RO", "R", (q, "o"), ("RO",)))
    return tuple(rows)


def inverting_branches(present: frozenset[str]) -> tuple[Branch, ...]:
    """Amplifier with its + input at ground, RF from q to m (the gain element), RO from q to o."""
    return (
        Branch("RF", "R", (output_node(present), "m"), ("RF",), True),
        *opamp_branches(present, plus="gnd", minus="m"),
    )


def output_node(present: frozenset[str]) -> str:
    """q where an output resistance separates it from o, else o itself."""
    return "q" if "RO" in present else "o"


def opamp_symbols(values: Values) -> dict[str, Array]:
    """tau = 1/(2π GBW)."""
    return {"tau": 1 / (2 * np.pi * values["GBW"])} if "GBW" in values else {}


def outside_gbw(values: Values, frequency_hz: Array) -> NDArray[np.bool_]:
    """Units above GBW/20; none where the op-amp is ideal."""
    if "GBW" not in values:
        return np.zeros(np.shape(frequency_hz), dtype=bool)
    with np.errstate(invalid="ignore"):
        return np.asarray(frequency_hz > values["GBW"] * MOST_F_OVER_GBW)
