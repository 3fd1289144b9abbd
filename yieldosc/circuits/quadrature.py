"""Quadrature oscillator: an inverting integrator, a low-pass and a non-inverting integrator in a loop.

Loop: −1/(sR1C1) · 1/(1 + sR2C2) · (1 + sR3C3)/(sR3C3). The low-pass R2C2 takes back what the non-inverting integrator
leads: with R2C2 = R3C3 the poles lie on the axis at ω = 1/√(R1C1R3C3), with a longer R2C2 they grow. R2 is the gain
element, its critical value R3C3/C2 with ideal op-amps (Routh's condition of the loop's cubic).
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from yieldosc.circuits.circuit import Array, Branch, Circuit, Derived, Family, Option, Role, Values
from yieldosc.circuits.limits import with_limiter
from yieldosc.circuits.opamp import GBW_ROLE, RANGE_TEXT, opamp_symbols, outside_gbw
from yieldosc.circuits.roles import capacitor, resistor

OPTIONS: tuple[Option, ...] = ()
ROLES = (
    resistor("R1", "into the inverting integrator"),
    capacitor("C1", "of the inverting integrator"),
    resistor("R2", "of the low-pass: the gain element"),
    capacitor("C2", "of the low-pass"),
    resistor("R3", "of the non-inverting integrator, inverting input to ground"),
    capacitor("C3", "of the non-inverting integrator, output to inverting input"),
    GBW_ROLE,
)
SCHEMATIC = """
            ┌───── C1 ─────┐                          ┌───── C3 ─────┐
      ┌─R1──┴ m1 ─▷− A ── o1 ──R2──┬── p ─▷+ B ───────┴─ o2          │
      │        + at gnd            C2         − ── m2 ───────────────┘
      │                            │               └──R3── gnd
      │                           gnd                   │
      └──────────────────────────────────────────── o2 ─┘
"""


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    return ROLES


def _derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
    return Derived({name: values[name] for name in ("R1", "C1", "R2", "C2", "R3", "C3")} | opamp_symbols(values))


def design_frequency(values: Values) -> Array:
    """1/(2π√(R1 C1 R3 C3)) [Hz]."""
    return np.asarray(1 / (2 * np.pi * np.sqrt(values["R1"] * values["C1"] * values["R3"] * values["C3"])))


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    pole = ("tau",) if "GBW" in present else ()
    branches = (
        Branch("R1", "R", ("o2", "m1"), ("R1",)),
        Branch("C1", "C", ("o1", "m1"), ("C1",)),
        Branch("A", "opamp", ("o1", "gnd", "m1"), pole),
        Branch("R2", "R", ("o1", "p"), ("R2",), True),
        Branch("C2", "C", ("p", "gnd"), ("C2",)),
        Branch("B", "opamp", ("o2", "p", "m2"), pole),
        Branch("R3", "R", ("m2", "gnd"), ("R3",)),
        Branch("C3", "C", ("o2", "m2"), ("C3",)),
    )
    return Circuit(
        name="quadrature",
        title="Quadrature, two integrators",
        options=dict(options),
        roles=tuple(r for r in ROLES if r.name in present),
        branches=branches,
        gain_symbol="R2",
        derive=_derive,
        design_frequency=design_frequency,
        closed_form="f = 1/(2π·√(R1·C1·R3·C3)); starts when R2·C2 exceeds R3·C3",
        not_assessable=outside_gbw,
        range_text=RANGE_TEXT,
        schematic=SCHEMATIC,
        assumptions=(
            "two op-amps of one package: one pole at the same GBW, input currents and offset left out",
            "R2 is the gain element: startup_margin is R2 over its critical value",
            "no stabiliser: the level is limited by clipping",
        ),
        recipe=("quadrature", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = with_limiter(
    Family(name="quadrature", title="Quadrature", options=OPTIONS, roles=roles, build=build),
    "agc",
)
