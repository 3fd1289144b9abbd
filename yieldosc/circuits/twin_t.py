"""Twin-T oscillator: the twin-T from output to inverting input, a divider from output to non-inverting input.

At ω = 1/(RC) the balanced twin-T (R, R, 2C / C, C, R/2) passes nothing, negative feedback vanishes and the divider's
positive feedback wins. The op-amp sees v_p − v_m = v_o (1 − T) − v_o (1 − d), d = RG/(RF + RG): seen from the output,
the twin-T is a band-pass 1 − T in front of a non-inverting stage of gain K = 1/(1 − d) = 1 + RG/RF. K is the gain
element; its lag K/(2πGBW) is that of the actual gain.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from yieldosc.circuits.circuit import Array, Branch, Circuit, Derived, Family, Option, Role, Values
from yieldosc.circuits.limits import with_limiter
from yieldosc.circuits.opamp import ASSUMPTION, GBW_ROLE, RANGE_TEXT, outside_gbw
from yieldosc.circuits.roles import capacitor, resistor

OPTIONS: tuple[Option, ...] = ()
ROLES = (
    resistor("R1", "series arm, output side"),
    resistor("R2", "series arm, inverting input side"),
    capacitor("C3", "from between R1 and R2 to ground"),
    capacitor("C1", "series arm, output side"),
    capacitor("C2", "series arm, inverting input side"),
    resistor("R3", "from between C1 and C2 to ground"),
    resistor("RF", "divider, output to non-inverting input"),
    resistor("RG", "divider, non-inverting input to ground"),
    capacitor("CIN", "input capacitance at the inverting input", optional=True, main=False),
    GBW_ROLE,
)
SCHEMATIC = """
      o ──┬──R1── x ──R2──┬── m ─▷− op-amp ── o
          │       C3      │
          │       gnd     │
          └──C1── y ──C2──┘    p ─▷+ op-amp
                  R3
                  gnd          o ──RF── p ──RG── gnd
"""


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    return ROLES


def _derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
    symbols = {name: values[name] for name in ("R1", "R2", "R3", "C1", "C2", "C3", "CIN") if name in values}
    symbols["K"] = 1 + values["RG"] / values["RF"]
    if "GBW" in values:
        symbols["lag"] = symbols["K"] / (2 * np.pi * values["GBW"])
    return Derived(symbols)


def design_frequency(values: Values) -> Array:
    """Geometric mean of the two balance frequencies [Hz]; a twin-T that nulls has both equal to 1/(2πRC).

    Null of 1 + s R3(C1+C2) + s² C1C2R3 (R1 + R2 + s R1R2C3) at s = jω: real part ω² = 1/(C1C2R3(R1+R2)), imaginary
    part ω² = (C1+C2)/(C1C2C3R1R2).
    """
    both = values["C1"] * values["C2"]
    real = 1 / (both * values["R3"] * (values["R1"] + values["R2"]))
    imaginary = (values["C1"] + values["C2"]) / (both * values["C3"] * values["R1"] * values["R2"])
    return np.asarray((real * imaginary) ** 0.25 / (2 * np.pi))


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    stage = ("K", "lag") if "GBW" in present else ("K",)
    branches = [
        Branch("R1", "R", ("o", "x"), ("R1",)),
        Branch("R2", "R", ("x", "m"), ("R2",)),
        Branch("C3", "C", ("x", "gnd"), ("C3",)),
        Branch("C1", "C", ("o", "y"), ("C1",)),
        Branch("C2", "C", ("y", "m"), ("C2",)),
        Branch("R3", "R", ("y", "gnd"), ("R3",)),
        Branch("stage", "gain", ("o", "o", "m"), stage, True),
    ]
    if "CIN" in present:
        branches.append(Branch("CIN", "C", ("m", "gnd"), ("CIN",)))
    return Circuit(
        name="twin_t",
        title="Twin-T",
        options=dict(options),
        roles=tuple(r for r in ROLES if r.name in present),
        branches=tuple(branches),
        gain_symbol="K",
        derive=_derive,
        design_frequency=design_frequency,
        closed_form=(
            "f = 1/(2π·R·C) for R1 = R2 = 2·R3 = R, C1 = C2 = C3/2 = C; starts when K = 1 + RG/RF exceeds 1/(1 − T), "
            "T what the twin-T passes at f"
        ),
        not_assessable=outside_gbw,
        range_text=RANGE_TEXT,
        schematic=SCHEMATIC,
        assumptions=(
            ASSUMPTION,
            "the gain element is K = 1 + RG/RF, with the lag K/(2π·GBW) of the actual gain",
            "no stabiliser: the level is limited by clipping",
        ),
        recipe=("twin_t", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = with_limiter(
    Family(name="twin_t", title="Twin-T", options=OPTIONS, roles=roles, build=build),
    "agc",
    "clip",
)
