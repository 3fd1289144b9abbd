"""What junction and insulated-gate stages share: a gate resistor, two resistors in the source, terminal names."""

from __future__ import annotations

import numpy as np

from yieldosc.circuits.circuit import Role, Values
from yieldosc.circuits.roles import device, resistor
from yieldosc.circuits.stages.stage import MOST_RIN, Array

SOURCE = ("RS", "RS2")
TERMINALS = ("source", "gate", "drain")
SYMBOLS = ("gm", "rin", "rout", "cin", "cfb", "rb")


def gate_resistor() -> Role:
    return resistor("RG", "gate to ground", default=1e6)


def capacitances(*, input_f: float | None, reverse_f: float | None, output_s: float) -> tuple[Role, ...]:
    """Ciss, Crss and gos; None: required."""
    return (
        device("Ciss", "F", "input capacitance, drain shorted to source", default=input_f),
        device("Crss", "F", "reverse transfer capacitance (gate–drain)", default=reverse_f),
        device("gos", "S", "output conductance", default=output_s),
    )


def symbols(values: Values, gm: Array) -> dict[str, Array]:
    """Stage symbols beside gm; a Ciss below Crss leaves no gate–source capacitance."""
    return {
        "gm": gm,
        "rin": np.asarray(MOST_RIN),
        "rout": 1 / values["gos"],
        "cin": np.maximum(values["Ciss"] - values["Crss"], 0.0),
        "cfb": values["Crss"],
        "rb": values["RG"],
    }
