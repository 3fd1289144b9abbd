"""Single-stage unbuffered inverter; e is ground."""

from __future__ import annotations

import numpy as np

from yieldosc.circuits.circuit import Values
from yieldosc.circuits.roles import device
from yieldosc.circuits.stages.stage import MOST_RIN, Bias, Resistance, Stage, relative_temperature


def _point(
    values: Values, temperature_c: float, own_law: frozenset[str], rfeed: Resistance, rdc: Resistance
) -> Bias:
    law = 1.0 if "gm" in own_law else relative_temperature(temperature_c) ** -1.5
    symbols = {
        "gm": values["gm"] * law,
        "rin": np.asarray(MOST_RIN),
        "rout": values["Rout"],
        "cin": values["Cin"],
        "cout": values["Cout"],
        "cfb": values["Cfb"],
    }
    return Bias(symbols, None)


INVERTER = Stage(
    name="inverter",
    roles=(
        device("gm", "S", "transconductance at the switching point, at the supply analysed", law="T^-1.5", kind="ic"),
        device("Rout", "Ω", "output resistance", default=20e3, kind="ic"),
        device("Cin", "F", "input capacitance", default=5e-12, kind="ic"),
        device("Cout", "F", "output capacitance", default=5e-12, kind="ic"),
        device("Cfb", "F", "capacitance from output to input", default=0.5e-12, kind="ic"),
    ),
    symbols=("gm", "rin", "rout", "cin", "cout", "cfb"),
    solve=_point,
    supply_role=None,
    assumptions=(
        "gm falls as (T/298.15 K)^-1.5 unless the Roles sheet gives a law (from memory of device physics)",
        "single-stage unbuffered inverter, small signal; a buffered gate is not this model",
    ),
)
