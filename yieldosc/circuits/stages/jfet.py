"""Junction field-effect stage with automatic bias: Id = B (Vp − Id Rdc)², gm = 2√(B Id).

Temperature laws are device physics recalled from memory: mobility as T^−2.1, pinch-off +2.2 mV/K.
"""

from __future__ import annotations

import numpy as np

from yieldosc.circuits.circuit import Values
from yieldosc.circuits.roles import device, supply
from yieldosc.circuits.stages import fet
from yieldosc.circuits.stages.stage import ROOM_C, Bias, Resistance, Stage, relative_temperature

LEAST_PINCH_OFF_V = 1e-6  # keeps the arrays of units without bias finite
ROLES = (
    supply("VDD"),
    device("IDSS", "A", "drain current at zero gate–source voltage, 25 °C", law="T^-2.1"),
    device("VGSoff", "V", "gate–source cut-off voltage as a magnitude, 25 °C", law="+2.2 mV/K"),
    fet.gate_resistor(),
    *fet.capacitances(input_f=6e-12, reverse_f=2e-12, output_s=20e-6),
)


def _point(
    values: Values, temperature_c: float, own_law: frozenset[str], rfeed: Resistance, rdc: Resistance
) -> Bias:
    pinch_off = values["VGSoff"] if "VGSoff" in own_law else values["VGSoff"] + 2.2e-3 * (temperature_c - ROOM_C)
    vp = np.maximum(pinch_off, LEAST_PINCH_OFF_V)
    if "IDSS" in own_law:
        b = values["IDSS"] / vp**2  # the user's law says what flows at zero gate–source voltage at this temperature
    else:
        b = values["IDSS"] / values["VGSoff"] ** 2 * relative_temperature(temperature_c) ** -2.1
    # B Rdc² Id² − (2 B Rdc Vp + 1) Id + B Vp² = 0, the smaller root (Id Rdc < Vp), in the form that keeps its digits
    load = 2 * b * rdc * vp + 1
    drain_a = 2 * b * vp**2 / (load + np.sqrt(2 * load - 1))
    gate_v = drain_a * rdc
    no_bias = ~((pinch_off > 0) & (values["VDD"] - drain_a * (rfeed + rdc) >= vp - gate_v))
    return Bias(fet.symbols(values, 2 * np.sqrt(b * drain_a)), no_bias)


JFET = Stage(
    name="jfet",
    roles=ROLES,
    symbols=fet.SYMBOLS,
    solve=_point,
    supply_role="VDD",
    emitter=fet.SOURCE,
    terminals=fet.TERMINALS,
    assumptions=(
        "IDSS/VGSoff² falls as (T/298.15 K)^-2.1 and VGSoff rises 2.2 mV/K unless the Roles sheet gives a law "
        "(from memory of device physics); a law for IDSS is taken as the current at zero gate–source voltage",
        "square law Id = IDSS (1 − |VGS|/VGSoff)², gate at DC ground through RG; supplies are AC ground",
    ),
)
