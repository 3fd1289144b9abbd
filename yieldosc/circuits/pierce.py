"""Pierce: crystal from input to output of an inverting stage, a capacitor at each end.

fL = fs √(1 + Cm/(C0 + CX + C1C2/(C1+C2))); lossless, C1 = C2: gm_crit = 4 ESR ω² (C0 + CL)² (Vittoz, Degrauwe & Bitz,
IEEE JSSC 23 (1988) 774, low-loss limit; from memory).
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Array, Branch, Circuit, CircuitError, Family, Role, Values
from yieldosc.circuits.crystal import (
    ARM,
    CRYSTAL_ROLES,
    OVERTONE_ROLES,
    RANGE_TEXT,
    crystal_assumptions,
    crystal_band,
    crystal_branches,
    crystal_problems,
    crystal_symbols,
    loaded_frequency_hz,
)
from yieldosc.circuits.limits import with_limiter
from yieldosc.circuits.roles import capacitor, coil_resistance, inductor, resistor
from yieldosc.circuits.stages import (
    BIAS_OPTION,
    FEED_ROLES,
    Stage,
    bias_problems,
    chosen_stage,
    emitter_branches,
    emitter_problems,
    emitter_roles,
    feed_branches,
    feed_problems,
    outside_range,
    stage_branches,
    stage_derive,
    stage_option,
)

OPTIONS = (stage_option("inverter", "bjt", "jfet", "mosfet"), BIAS_OPTION)
LOAD_ROLES = (
    capacitor("C1", "from the stage's input to ground"),
    capacitor("C2", "from the crystal's output side to ground"),
    capacitor("CS1", "stray capacitance beside C1", optional=True, main=False),
    capacitor("CS2", "stray capacitance beside C2", optional=True, main=False),
    capacitor("CX", "stray capacitance across the crystal", optional=True, main=False),
    resistor("RS_series", "from the stage's output to the crystal", optional=True),
    inductor("LTRAP", "overtone trap, in series with CTRAP", optional=True),
    coil_resistance("LTRAP_dcr", "LTRAP"),
    capacitor("CTRAP", "overtone trap, in series with LTRAP", optional=True),
)
INVERTER_BIAS = resistor("RF", "feedback resistor that biases the inverter")

SCHEMATICS = {
    "inverter": """
            ┌────── RF ──────┐
      g ────┤▷ inverter o────┴─ d ──[RS_series]── x ──[LTRAP─CTRAP]── gnd
      │                                           │
      ├────────────── crystal ∥ C0 ∥ CX ──────────┤
   C1+CS1                                      C2+CS2
      │                                           │
     gnd                                         gnd
""",
    "transistor": """
                 VCC ─[RC]─[LCH]─┐
      g = b ────┤▷ stage o───────┴─ d ──[RS_series]── x ──[LTRAP─CTRAP]── gnd
      │              └ e ──[RE]──[RE2 ∥ CE]── gnd     │
      ├────────────── crystal ∥ C0 ∥ CX ──────────────┤
   C1+CS1                                          C2+CS2
      │                                               │
     gnd                                             gnd
""",
}


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    stage = chosen_stage(options)
    crystal = (*CRYSTAL_ROLES, *OVERTONE_ROLES, *LOAD_ROLES)
    if stage.name == "inverter":
        return (*crystal, INVERTER_BIAS, *stage.roles)
    return (*crystal, *emitter_roles(stage), *FEED_ROLES, *stage.roles)


def _problems(present: frozenset[str], stage: Stage) -> list[str]:
    problems = crystal_problems(present)
    if len({"LTRAP", "CTRAP"} & present) == 1 or ("LTRAP_dcr" in present and "LTRAP" not in present):
        problems.append("the overtone trap is LTRAP in series with CTRAP: give both, or neither")
    if stage.name != "inverter":
        if not {"RC", "LCH"} & present:
            problems.append(f"the {stage.terminals[2]} has no DC path: give RC, LCH or both")
        problems += feed_problems(present) + emitter_problems(stage, present)
    return problems


def _sum(values: Values, *names: str) -> Array:
    total = values[names[0]]
    for name in names[1:]:
        if name in values:
            total = total + values[name]
    return total


def _design_frequency(values: Values, stage: Stage) -> Array:
    """The crystal with the load that the board and the stage present [Hz]."""
    c1, c2 = _sum(values, "C1", "CS1", "Cin"), _sum(values, "C2", "CS2")
    across = _sum(values, "CX") if "CX" in values else np.float64(0.0)
    if stage.name == "inverter":
        across = across + values["Cfb"]
        c2 = c2 if "RS_series" in values else c2 + values["Cout"]
    elif stage.name == "bjt":
        across = across + values["Cob"]
    else:
        c1 = c1 + np.maximum(values["Ciss"] - values["Crss"], 0.0)
        across = across + values["Crss"]
    return loaded_frequency_hz(values, c1 * c2 / (c1 + c2) + across)


def _table(present: frozenset[str], stage: Stage) -> tuple[Branch, ...]:
    x = "x" if "RS_series" in present else "d"
    rows = [
        *crystal_branches("g", x, present),
        Branch("C1", "C", ("g", "gnd"), ("C1",)),
        Branch("C2", "C", (x, "gnd"), ("C2",)),
    ]
    if "LTRAP" in present:
        coil = ("LTRAP", "LTRAP_dcr") if "LTRAP_dcr" in present else ("LTRAP",)
        rows += [Branch("LTRAP", "L", (x, "t"), coil), Branch("CTRAP", "C", ("t", "gnd"), ("CTRAP",))]
    if "RS_series" in present:
        rows.append(Branch("RS_series", "R", ("d", x), ("RS_series",)))
    if stage.name == "inverter":
        return (*rows, Branch("RF", "R", ("g", "d"), ("RF",)), *stage_branches(stage, "g", "d", "gnd"))
    e, emitter = emitter_branches(present, stage=stage)
    return (*rows, *feed_branches(present, "d"), *emitter, *stage_branches(stage, "g", "d", e))


def _computed(values: Values) -> dict[str, Array]:
    return crystal_symbols(values) | {
        "C1": _sum(values, "C1", "CS1"),
        "C2": _sum(values, "C2", "CS2"),
        "C0": _sum(values, "C0", "CX"),
    }


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    stage = chosen_stage(options)
    problems = _problems(present, stage)
    if problems:
        raise CircuitError(problems)
    branches = _table(present, stage)
    inverter = stage.name == "inverter"

    def design_frequency(values: Values) -> Array:
        return _design_frequency(values, stage)

    def outside(values: Values, frequency_hz: Array) -> NDArray[np.bool_]:
        return outside_range(stage, values, frequency_hz)

    return Circuit(
        name="pierce",
        title="Pierce, unbuffered inverter" if inverter else f"Pierce, {stage.name.upper()} stage",
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=branches,
        gain_symbol="gm",
        derive=stage_derive(stage, branches, computed=_computed),
        design_frequency=design_frequency,
        closed_form="f = fs·√(1 + Cm/(C0 + CX + C1·C2/(C1+C2))); gm_crit = 4·ESR·ω²·(C0 + CL)² for C1 = C2, lossless",
        band=crystal_band,
        crystal_arm=ARM,
        not_assessable=None if inverter else outside,
        range_text=RANGE_TEXT if inverter else f"{stage.range_text}; {RANGE_TEXT}",
        schematic=SCHEMATICS["inverter" if inverter else "transistor"],
        assumptions=(*stage.assumptions, *crystal_assumptions(present)),
        supply_role=stage.supply_role,
        recipe=("pierce", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = with_limiter(
    Family(name="pierce", title="Pierce", options=OPTIONS, roles=roles, build=build, option_problems=bias_problems),
    "agc",
    "tanh",
    "exp",
)
