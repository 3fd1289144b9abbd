"""Crystal Colpitts, collector at signal ground: the crystal stands where the coil would.

f = fs √(1 + Cm/(C0 + CL)), CL = C1C2/(C1+C2) in series with CT where one is given, beside the stage's own capacitance.
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
from yieldosc.circuits.roles import capacitor, resistor
from yieldosc.circuits.stages import (
    Stage,
    chosen_stage,
    emitter_branches,
    emitter_problems,
    emitter_roles,
    outside_range,
    stage_branches,
    stage_derive,
    stage_option,
)

OPTIONS = (stage_option("bjt", "jfet", "mosfet"),)
LOAD_ROLES = (
    capacitor("C1", "b to e"),
    capacitor("C2", "e to ground"),
    capacitor("CT", "trimmer in series with the crystal", optional=True),
    resistor("RL", "AC-coupled load from e to ground", optional=True),
)
SCHEMATIC = """
      c at the supply      gnd ── crystal ∥ C0 ──[CT]──┬─ b
                                                       C1
                                                       ├─ e ──RE──[RE2]── gnd
                                                       C2
                                                       │
                                                      gnd
"""


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    stage = chosen_stage(options)
    return (*CRYSTAL_ROLES, *OVERTONE_ROLES, *LOAD_ROLES, *emitter_roles(stage), *stage.roles)


def _problems(present: frozenset[str], stage: Stage) -> list[str]:
    problems = crystal_problems(present)
    first, common = stage.emitter[0], stage.terminals[0]
    if first not in present:
        problems.append(f"the {common} follower needs {first}: it carries the {common}'s DC current")
    return problems + emitter_problems(stage, present, bypass=False)


def _design_frequency(values: Values, stage: Stage) -> Array:
    c1 = values["C1"]
    reverse = values["Cob"] if stage.name == "bjt" else values["Crss"]
    if stage.name != "bjt":
        c1 = c1 + np.maximum(values["Ciss"] - values["Crss"], 0.0)
    load = c1 * values["C2"] / (c1 + values["C2"]) + reverse
    if "CT" in values:
        load = load * values["CT"] / (load + values["CT"])
    return loaded_frequency_hz(values, load)


def _table(present: frozenset[str], stage: Stage) -> tuple[Branch, ...]:
    e, emitter = emitter_branches(present, bypass=False, stage=stage)
    top = "x" if "CT" in present else "b"
    rows = [
        *crystal_branches(top, "gnd", present),
        Branch("C1", "C", ("b", e), ("C1",)),
        Branch("C2", "C", (e, "gnd"), ("C2",)),
    ]
    if "CT" in present:
        rows.append(Branch("CT", "C", ("x", "b"), ("CT",)))
    if "RL" in present:
        rows.append(Branch("RL", "R", (e, "gnd"), ("RL",)))
    return (*rows, *emitter, *stage_branches(stage, "b", "gnd", e))


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    stage = chosen_stage(options)
    problems = _problems(present, stage)
    if problems:
        raise CircuitError(problems)
    branches = _table(present, stage)

    def design_frequency(values: Values) -> Array:
        return _design_frequency(values, stage)

    def outside(values: Values, frequency_hz: Array) -> NDArray[np.bool_]:
        return outside_range(stage, values, frequency_hz)

    def rfeed(values: Values) -> float:
        return 0.0  # c is at the supply

    return Circuit(
        name="crystal_colpitts",
        title=f"Crystal Colpitts, {stage.terminals[2]} at signal ground",
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=branches,
        gain_symbol="gm",
        derive=stage_derive(stage, branches, rfeed=rfeed, computed=crystal_symbols),
        design_frequency=design_frequency,
        closed_form="f = fs·√(1 + Cm/(C0 + CL)), CL = C1·C2/(C1+C2) with the stage's capacitances, in series with CT",
        band=crystal_band,
        crystal_arm=ARM,
        not_assessable=outside,
        range_text=f"{stage.range_text}; {RANGE_TEXT}",
        schematic=SCHEMATIC,
        assumptions=(*stage.assumptions, *crystal_assumptions(present)),
        supply_role=stage.supply_role,
        recipe=("crystal_colpitts", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = with_limiter(
    Family(name="crystal_colpitts", title="Crystal Colpitts", options=OPTIONS, roles=roles, build=build),
    "agc",
    "tanh",
    "exp",
)
