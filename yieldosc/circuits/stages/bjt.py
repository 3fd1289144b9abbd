"""Bipolar stage: bias, transconductance, parasitics. Temperature laws are device physics recalled from memory."""

from __future__ import annotations

import numpy as np

from yieldosc.circuits.circuit import Values
from yieldosc.circuits.roles import device, resistor, supply
from yieldosc.circuits.stages.stage import (
    LEAST_CURRENT_A,
    ROOM_C,
    Array,
    Bias,
    Resistance,
    Stage,
    thermal_voltage_v,
)

LEAST_VCE_V = 0.2
MOST_F_OVER_FT = 1 / 10

ROLES = (
    supply("VCC"),
    resistor("RB1", "base bias from VCC (bias = divider) or from the collector (bias = collector)"),
    resistor("RB2", "base bias to ground", optional=True),
    device("hFE", "1", "current gain at 25 °C", law="0.5 %/K"),
    device("VBE", "V", "base–emitter voltage at 25 °C", default=0.65, law="-2 mV/K"),
    device("VA", "V", "Early voltage", default=100.0),
    device("fT", "Hz", "transition frequency", default=300e6),
    device("Cob", "F", "collector–base capacitance", default=2e-12),
)


def _point(
    values: Values, temperature_c: float, own_law: frozenset[str], rfeed: Resistance, rdc: Resistance, bias: str
) -> Bias:
    rise = temperature_c - ROOM_C
    hfe = values["hFE"] if "hFE" in own_law else values["hFE"] * (1 + 0.005 * rise)
    vbe = values["VBE"] if "VBE" in own_law else values["VBE"] - 2.0e-3 * rise
    vcc, rb1 = values["VCC"], values["RB1"]
    if bias == "divider":
        rb2 = values.get("RB2")
        if rb2 is None:
            vth, rth = vcc, rb1
        else:
            vth, rth = vcc * rb2 / (rb1 + rb2), rb1 * rb2 / (rb1 + rb2)
        ic = hfe * (vth - vbe) / (rth + (hfe + 1) * rdc)
        rb = rth
    else:
        ic = hfe * (vcc - vbe) / (rb1 + (hfe + 1) * (rfeed + rdc))
        rb = rb1
    ib = ic / hfe
    vce = vcc - ic * rfeed - (ib * rfeed if bias == "collector" else 0.0) - (ic + ib) * rdc
    no_bias = ~((ic > 0) & (vce > LEAST_VCE_V))
    ic = np.where(ic > 0, ic, LEAST_CURRENT_A)
    gm = ic / thermal_voltage_v(temperature_c)
    symbols = {
        "gm": gm,
        "rin": hfe / gm,
        "rout": values["VA"] / ic,
        "cin": np.maximum(gm / (2 * np.pi * values["fT"]) - values["Cob"], 0.0),
        "cfb": values["Cob"],
        "rb": rb,
    }
    return Bias(symbols, no_bias)


def _most_frequency_hz(values: Values) -> Array:
    return values["fT"] * MOST_F_OVER_FT


def bjt(bias: str) -> Stage:
    """Bipolar stage; bias = divider (RB1, RB2 from VCC) or collector (RB1 from c to b)."""

    def solve(
        values: Values, temperature_c: float, own_law: frozenset[str], rfeed: Resistance, rdc: Resistance
    ) -> Bias:
        return _point(values, temperature_c, own_law, rfeed, rdc, bias)

    return Stage(
        name="bjt",
        roles=tuple(r for r in ROLES if not (bias == "collector" and r.name == "RB2")),
        symbols=("gm", "rin", "rout", "cin", "cfb", "rb"),
        solve=solve,
        supply_role="VCC",
        bias=bias,
        most_frequency_hz=_most_frequency_hz,
        range_text="f below fT/10 (the stage's input is one capacitance)",
        assumptions=(
            "hFE rises 0.5 %/K and VBE falls 2 mV/K unless the Roles sheet gives a law (from memory of device physics)",
            "gm = Ic/(kT/q), rin = hFE/gm, rout = VA/Ic, cin = gm/(2π fT) − Cob; supplies are AC ground",
        ),
    )
