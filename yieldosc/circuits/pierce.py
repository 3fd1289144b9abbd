"""Pierce: crystal from input to output of an inverting stage, a capacitor at each end.

fL = fs √(1 + Cm/(C0 + CX + C1C2/(C1+C2))); lossless, C1 = C2: gm_crit = 4 ESR ω² (C0 + CL)² (Vittoz, Degrauwe & Bitz,
IEEE JSSC 23 (1988) 774, low-loss limit; from memory).
"""

from __future__ import annotations

from collections.abc import Mapping

from yieldosc.circuits.circuit import Array, Branch, Circuit, CircuitError, Derived, Family, Option, Role, Values
from yieldosc.circuits.crystal import (
    CRYSTAL_ROLES,
    crystal_band,
    crystal_branches,
    crystal_problems,
    crystal_symbols,
    loaded_frequency_hz,
)
from yieldosc.circuits.roles import capacitor, resistor
from yieldosc.circuits.stages import INVERTER, stage_branches

OPTIONS = (Option("stage", ("inverter",), "the active part"),)
LOAD_ROLES = (
    capacitor("C1", "from the stage's input to ground"),
    capacitor("C2", "from the crystal's output side to ground"),
    capacitor("CS1", "stray capacitance beside C1", optional=True, main=False),
    capacitor("CS2", "stray capacitance beside C2", optional=True, main=False),
    capacitor("CX", "stray capacitance across the crystal", optional=True, main=False),
    resistor("RS_series", "from the stage's output to the crystal", optional=True),
    resistor("RF", "feedback resistor that biases the inverter"),
)

SCHEMATIC = """
            ┌────── RF ──────┐
      g ────┤▷ inverter o────┴─ d ──[RS_series]── x
      │                                           │
      ├────────────── crystal ∥ C0 ∥ CX ──────────┤
   C1+CS1                                      C2+CS2
      │                                           │
     gnd                                         gnd
"""


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    return (*CRYSTAL_ROLES, *LOAD_ROLES, *INVERTER.roles)


def _sum(values: Values, *names: str) -> Array:
    total = values[names[0]]
    for name in names[1:]:
        if name in values:
            total = total + values[name]
    return total


def design_frequency(values: Values) -> Array:
    """The crystal with the load that the board and the stage present [Hz]."""
    c1 = _sum(values, "C1", "CS1", "Cin")
    c2 = _sum(values, "C2", "CS2") + (0.0 if "RS_series" in values else values["Cout"])
    load = c1 * c2 / (c1 + c2) + values["Cfb"] + values.get("CX", 0.0)
    return loaded_frequency_hz(values, load)


def _table(present: frozenset[str]) -> tuple[Branch, ...]:
    x = "x" if "RS_series" in present else "d"
    rows = [
        *crystal_branches("g", x),
        Branch("C1", "C", ("g", "gnd"), ("C1",)),
        Branch("C2", "C", (x, "gnd"), ("C2",)),
        Branch("RF", "R", ("g", "d"), ("RF",)),
    ]
    if "RS_series" in present:
        rows.append(Branch("RS_series", "R", ("d", x), ("RS_series",)))
    return (*rows, *stage_branches(INVERTER, "g", "d", "gnd"))


def _derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
    bias = INVERTER.solve(values, temperature_c, own_law, 0.0, 0.0)
    symbols = crystal_symbols(values) | bias.symbols
    symbols["C1"] = _sum(values, "C1", "CS1")
    symbols["C2"] = _sum(values, "C2", "CS2")
    symbols["C0"] = _sum(values, "C0", "CX")
    symbols["RF"] = values["RF"]
    if "RS_series" in values:
        symbols["RS_series"] = values["RS_series"]
    return Derived(symbols, bias.no_bias)


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    problems = crystal_problems(present)
    if problems:
        raise CircuitError(problems)
    return Circuit(
        name="pierce",
        title="Pierce, unbuffered inverter",
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=_table(present),
        gain_symbol="gm",
        derive=_derive,
        design_frequency=design_frequency,
        closed_form="f = fs·√(1 + Cm/(C0 + CX + C1·C2/(C1+C2))); gm_crit = 4·ESR·ω²·(C0 + CL)² for C1 = C2, lossless",
        band=crystal_band,
        range_text="small-signal start-up; crystal modes other than the motional arm given are not in the model",
        schematic=SCHEMATIC,
        assumptions=(
            *INVERTER.assumptions,
            "ESR is the series resistance; a data sheet's resistance at load is ESR·(1 + C0/CL)²",
        ),
        recipe=("pierce", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = Family(name="pierce", title="Pierce", options=OPTIONS, roles=roles, build=build)
