"""Wien bridge: series R1 C1, shunt R2 C2 to the non-inverting input, gain 1 + RF/(RG + RS_start).

f = 1/(2π√(R1 C1 R2 C2)), critical gain 1 + R1/R2 + C2/C1; Δf/f ≈ −4.5 f/GBW for equal arms.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from yieldosc.circuits.circuit import Array, Branch, Circuit, CircuitError, Derived, Family, Option, Role, Values
from yieldosc.circuits.limits import with_limiter
from yieldosc.circuits.opamp import (
    ASSUMPTION,
    OPAMP_ROLES,
    RANGE_TEXT,
    opamp_branches,
    opamp_symbols,
    output_node,
    outside_gbw,
)
from yieldosc.circuits.roles import capacitor, device, resistor

SCHEMATIC = """
      o ──R1──n──C1──┬── p ──▷+
      │              │        ╲
      │        R2 ∥ (C2+CIN)    op-amp ──[RO]── o
      │              │        ╱
      │             gnd  m ──▷−
      └───────RF─────────┴──RG──[RS_start]── gnd
"""

ROLES = (
    resistor("R1", "series arm"),
    capacitor("C1", "series arm"),
    resistor("R2", "shunt arm"),
    capacitor("C2", "shunt arm"),
    capacitor("CIN", "input capacitance at p", optional=True, main=False),
    resistor("RF", "feedback, output to inverting input"),
    resistor("RG", "inverting input to ground"),
    device("RS_start", "Ω", "stabiliser in series with RG before the amplitude builds up", optional=True, kind="any"),
    device("RS_full", "Ω", "the same at full control", optional=True, kind="any"),
    device("RF_full", "Ω", "RF at full control (diodes or thermistor across RF)", optional=True, kind="any"),
    *OPAMP_ROLES,
)


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    return ROLES


def _derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
    symbols = {name: values[name] for name in ("R1", "C1", "R2", "RF", "RO") if name in values}
    symbols["C2"] = values["C2"] + values["CIN"] if "CIN" in values else values["C2"]
    symbols["RG"] = values["RG"] + values["RS_start"] if "RS_start" in values else values["RG"]
    return Derived(symbols | opamp_symbols(values))


def design_frequency(values: Values) -> Array:
    """1/(2π√(R1 C1 R2 C2)) [Hz]."""
    c2 = values["C2"] + values["CIN"] if "CIN" in values else values["C2"]
    return np.asarray(1 / (2 * np.pi * np.sqrt(values["R1"] * values["C1"] * values["R2"] * c2)))


def _noise_gain(symbols: Mapping[str, Array], rf: Array) -> Array:
    return 1 + rf / symbols["RG"]


def _reach(symbols: Mapping[str, Array], values: Values, critical_rf: Array) -> Array:
    """Critical gain over gain at full control: 1 or more where the stabiliser can hold the level."""
    full = values.get("RF_full", values["RF"]) / (values["RG"] + values.get("RS_full", np.float64(0.0)))
    return _noise_gain(symbols, critical_rf) / (1 + full)


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    lamp = {"RS_start", "RS_full"} & present
    if len(lamp) == 1:
        raise CircuitError(["a stabiliser in series with RG needs both RS_start and RS_full; give the missing one"])
    if lamp and "RF_full" in present:
        raise CircuitError(["RS_start/RS_full and RF_full are two stabilisers; keep the one that the board has"])
    stabilised = bool(lamp) or "RF_full" in present
    q = output_node(present)
    branches = (
        Branch("R1", "R", ("o", "n"), ("R1",)),
        Branch("C1", "C", ("n", "p"), ("C1",)),
        Branch("R2", "R", ("p", "gnd"), ("R2",)),
        Branch("C2", "C", ("p", "gnd"), ("C2",)),
        Branch("RF", "R", (q, "m"), ("RF",), True),
        Branch("RG", "R", ("m", "gnd"), ("RG",)),
        *opamp_branches(present, plus="p", minus="m"),
    )
    return Circuit(
        name="wien_bridge",
        title="Wien bridge",
        options=dict(options),
        roles=tuple(r for r in ROLES if r.name in present),
        branches=branches,
        gain_symbol="RF",
        derive=_derive,
        design_frequency=design_frequency,
        closed_form="f = 1/(2π√(R1·C1·R2·C2)); starts when 1 + RF/(RG + RS_start) exceeds 1 + R1/R2 + C2/C1",
        gain_of=_noise_gain,
        control_reach=_reach if stabilised else None,
        not_assessable=outside_gbw,
        range_text=RANGE_TEXT,
        schematic=SCHEMATIC,
        assumptions=(
            ASSUMPTION,
            "a stabiliser holds the level" if stabilised else "no stabiliser: the level is limited by clipping",
        ),
        recipe=("wien_bridge", tuple(sorted(options.items())), tuple(sorted(present))),
    )


OPTIONS: tuple[Option, ...] = ()
FAMILY = with_limiter(
    Family(name="wien_bridge", title="Wien bridge", options=OPTIONS, roles=roles, build=build),
    "agc",
    "clip",
)
