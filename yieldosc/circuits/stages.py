"""Three-terminal gain stages: b controls, current flows from c to e. Bias, transconductance, parasitics.

Temperature laws are device physics recalled from memory; a law given for a role replaces them. gm scales with the
gain, everything else stays: rin and rout are those of the actual bias point.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Branch, CircuitError, Role, Values
from yieldosc.circuits.roles import capacitor, coil_resistance, device, inductor, resistor, supply

Array = NDArray[np.float64]
BOLTZMANN_J_PER_K = 1.380649e-23  # SI, exact since 2019
ELEMENTARY_CHARGE_C = 1.602176634e-19  # SI, exact since 2019
ZERO_C_IN_K = 273.15
ROOM_C = 25.0
LEAST_VCE_V = 0.2
MOST_RIN = 1e12  # Ω; a field-effect gate's input


def thermal_voltage_v(temperature_c: float) -> float:
    """kT/q."""
    return BOLTZMANN_J_PER_K * (temperature_c + ZERO_C_IN_K) / ELEMENTARY_CHARGE_C


@dataclass(frozen=True, slots=True)
class Bias:
    """Stage symbols of n units (rb only where bias branches exist) and which units have no bias."""

    symbols: dict[str, Array]
    no_bias: NDArray[np.bool_] | None


@dataclass(frozen=True, kw_only=True)
class Stage:
    """A gain stage as the circuits use it.

    solve(values, temperature_c, own_law, rfeed, rdc) → Bias; rfeed, rdc: DC resistances [Ω] in c and in e.
    """

    roles: tuple[Role, ...]
    symbols: tuple[str, ...]
    solve: Callable[[Values, float, frozenset[str], Array | float, Array | float], Bias]
    supply_role: str | None
    assumptions: tuple[str, ...]
    bias: str = ""
    symbols_extra: tuple[str, ...] = field(default=())


# -- bipolar ------------------------------------------------------------------------------------------------------

_BJT_ROLES = (
    supply("VCC"),
    resistor("RB1", "base bias from VCC (bias = divider) or from the collector (bias = collector)"),
    resistor("RB2", "base bias to ground", optional=True),
    device("hFE", "1", "current gain at 25 °C", law="0.5 %/K"),
    device("VBE", "V", "base–emitter voltage at 25 °C", default=0.65, law="-2 mV/K"),
    device("VA", "V", "Early voltage", default=100.0),
    device("fT", "Hz", "transition frequency", default=300e6),
    device("Cob", "F", "collector–base capacitance", default=2e-12),
)


def _bjt(
    values: Values,
    temperature_c: float,
    own_law: frozenset[str],
    rfeed: Array | float,
    rdc: Array | float,
    *,
    bias: str,
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
    ic = np.where(ic > 0, ic, 1e-12)  # keeps the arrays finite; these units are no_bias whatever follows
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


def bjt(bias: str) -> Stage:
    """Bipolar stage; bias = divider (RB1, RB2 from VCC) or collector (RB1 from c to b)."""

    def solve(
        values: Values, temperature_c: float, own_law: frozenset[str], rfeed: Array | float, rdc: Array | float
    ) -> Bias:
        return _bjt(values, temperature_c, own_law, rfeed, rdc, bias=bias)

    roles = tuple(r for r in _BJT_ROLES if not (bias == "collector" and r.name == "RB2"))
    return Stage(
        roles=roles,
        symbols=("gm", "rin", "rout", "cin", "cfb", "rb"),
        solve=solve,
        supply_role="VCC",
        bias=bias,
        assumptions=(
            "hFE rises 0.5 %/K and VBE falls 2 mV/K unless the Roles sheet gives a law (from memory of device physics)",
            "gm = Ic/(kT/q), rin = hFE/gm, rout = VA/Ic, cin = gm/(2π fT) − Cob; supplies are AC ground",
        ),
    )


# -- unbuffered inverter ------------------------------------------------------------------------------------------


def _inverter(
    values: Values, temperature_c: float, own_law: frozenset[str], rfeed: Array | float, rdc: Array | float
) -> Bias:
    law = 1.0 if "gm" in own_law else ((temperature_c + ZERO_C_IN_K) / (ROOM_C + ZERO_C_IN_K)) ** -1.5
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
    roles=(
        device("gm", "S", "transconductance at the switching point, at the supply analysed", law="T^-1.5", kind="ic"),
        device("Rout", "Ω", "output resistance", default=20e3, kind="ic"),
        device("Cin", "F", "input capacitance", default=5e-12, kind="ic"),
        device("Cout", "F", "output capacitance", default=5e-12, kind="ic"),
        device("Cfb", "F", "capacitance from output to input", default=0.5e-12, kind="ic"),
    ),
    symbols=("gm", "rin", "rout", "cin", "cout", "cfb"),
    solve=_inverter,
    supply_role=None,
    assumptions=(
        "gm falls as (T/298.15 K)^-1.5 unless the Roles sheet gives a law (from memory of device physics)",
        "single-stage unbuffered inverter, small signal; a buffered gate is not this model",
    ),
)


# -- branches that come with a stage ------------------------------------------------------------------------------


def stage_branches(stage: Stage, b: str, c: str, e: str) -> tuple[Branch, ...]:
    """gm, rin, rout, cin, cfb and the bias resistance between nodes b, c, e; those between equal nodes vanish."""
    rows = [Branch("gm", "transconductance", (c, e, b, e), ("gm",), True)]
    if "rin" in stage.symbols:
        rows.append(Branch("rin", "R", (b, e), ("rin",)))
    rows += [
        Branch("rout", "R", (c, e), ("rout",)),
        Branch("cin", "C", (b, e), ("cin",)),
        Branch("cfb", "C", (b, c), ("cfb",)),
    ]
    if "cout" in stage.symbols:
        rows.append(Branch("cout", "C", (c, "gnd"), ("cout",)))
    if "rb" in stage.symbols:
        rows.append(Branch("rb", "R", (b, c if stage.bias == "collector" else "gnd"), ("rb",)))
    return tuple(row for row in rows if row.nodes[0] != row.nodes[1])


EMITTER_ROLES = (
    resistor("RE", "emitter resistor", optional=True),
    resistor("RE2", "second emitter resistor, in series with RE", optional=True),
    capacitor("CE", "emitter by-pass capacitor", optional=True),
)


def emitter_branches(present: frozenset[str], *, bypass: bool = True) -> tuple[str, tuple[Branch, ...]]:
    """Node of e and the branches from it: RE e–e2 and RE2 ∥ CE e2–gnd; CE refused where it would short the signal."""
    problems = []
    if "CE" in present and not bypass:
        problems.append("CE would short the signal at the emitter; remove the CE role")
    if "RE" not in present and ("RE2" in present or "CE" in present):
        problems.append("RE2 and CE stand behind RE: give RE, or remove RE2 and CE")
    if problems:
        raise CircuitError(problems)
    if "RE" not in present:
        return "gnd", ()
    lower = "e2" if "RE2" in present else "gnd"
    rows = [Branch("RE", "R", ("e", lower), ("RE",))]
    if "RE2" in present:
        rows.append(Branch("RE2", "R", ("e2", "gnd"), ("RE2",)))
    if "CE" in present:
        rows.append(Branch("CE", "C", ("e2" if "RE2" in present else "e", "gnd"), ("CE",)))
    return "e", tuple(rows)


FEED_ROLES = (
    resistor("RC", "feed resistor of c", optional=True),
    inductor("LCH", "feed choke of c", optional=True),
    coil_resistance("LCH_dcr", "LCH"),
    resistor("RL", "AC-coupled load from c to ground", optional=True),
    capacitor("CST", "stray capacitance from c to ground", optional=True, main=False),
)


def feed_branches(present: frozenset[str]) -> tuple[Branch, ...]:
    """RC and LCH in series from c to the supply; RL and CST from c to ground."""
    rows = []
    if "LCH" in present:
        rows.append(Branch("LCH", "L", ("c", "gnd"), ("LCH", "feed_series")))
    elif "RC" in present:
        rows.append(Branch("RC", "R", ("c", "gnd"), ("RC",)))
    if "RL" in present:
        rows.append(Branch("RL", "R", ("c", "gnd"), ("RL",)))
    if "CST" in present:
        rows.append(Branch("CST", "C", ("c", "gnd"), ("CST",)))
    return tuple(rows)


def feed_resistance_ohm(values: Values) -> Array | float:
    """DC resistance of the feed: RC + LCH_dcr; 0 where neither is given."""
    return values.get("RC", np.float64(0.0)) + values.get("LCH_dcr", np.float64(0.0))


def emitter_resistance_ohm(values: Values) -> Array | float:
    """DC resistance in e: RE + RE2."""
    return values.get("RE", np.float64(0.0)) + values.get("RE2", np.float64(0.0))
