"""Insulated-gate stage: gfs at the operating point, with its spread; the bias is not modelled."""

from __future__ import annotations

from yieldosc.circuits.circuit import Values
from yieldosc.circuits.roles import device
from yieldosc.circuits.stages import fet
from yieldosc.circuits.stages.stage import Bias, Resistance, Stage, relative_temperature

ROLES = (
    device("gfs", "S", "transconductance at the operating point, 25 °C", law="T^-1.5"),
    fet.gate_resistor(),
    *fet.capacitances(input_f=None, reverse_f=None, output_s=50e-6),
)


def _point(
    values: Values, temperature_c: float, own_law: frozenset[str], rfeed: Resistance, rdc: Resistance
) -> Bias:
    law = 1.0 if "gfs" in own_law else relative_temperature(temperature_c) ** -1.5
    return Bias(fet.symbols(values, values["gfs"] * law), None)


MOSFET = Stage(
    name="mosfet",
    roles=ROLES,
    symbols=fet.SYMBOLS,
    solve=_point,
    supply_role=None,
    emitter=fet.SOURCE,
    terminals=fet.TERMINALS,
    assumptions=(
        "gfs falls as (T/298.15 K)^-1.5 unless the Roles sheet gives a law (from memory of device physics)",
        "the MOSFET's bias is not modelled: gfs is that of the operating point, and its spread must hold the bias's",
    ),
)
