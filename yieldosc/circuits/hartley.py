"""Hartley: a tapped coil, two windings L1 and L2 in series aiding with coupling k, and one capacitor.

f = 1/(2π√((L1 + L2 + 2M) C)), M = k √(L1 L2).
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Array, Branch, Circuit, CircuitError, Family, Option, Role, Values
from yieldosc.circuits.hartley_drawings import SCHEMATICS
from yieldosc.circuits.limits import with_limiter
from yieldosc.circuits.roles import capacitor, coil_resistance, inductor
from yieldosc.circuits.stages import (
    BIAS_OPTION,
    FEED_ROLES,
    Resistance,
    Stage,
    bias_problems,
    chosen_stage,
    collector_bias_problems,
    emitter_branches,
    emitter_problems,
    emitter_roles,
    feed_branches,
    feed_problems,
    feed_resistance_ohm,
    load_branches,
    outside_range,
    stage_branches,
    stage_derive,
    stage_option,
    total_ohm,
)

OPTIONS = (
    Option("ground", ("emitter", "base", "collector"), "which terminal (source, gate, drain) is at signal ground"),
    Option("feed", ("series", "shunt"), "ground = emitter: c fed through the coil, or through RC and LCH beside it"),
    stage_option("bjt", "jfet", "mosfet"),
    BIAS_OPTION,
)
TANK_ROLES = (
    inductor("L1", "winding at the output end (collector ground: at the input end)"),
    inductor("L2", "winding at the other end, in series aiding with L1"),
    coil_resistance("L1_dcr", "L1"),
    coil_resistance("L2_dcr", "L2"),
    Role("k", "k", "1", "inductor", "coupling of L1 and L2, 0 to below 1", 0.0, main=False),
    capacitor("C", "tank capacitor"),
)
COUPLING = capacitor("CC", "coupling from the tank to b")
CHOSEN = {
    "emitter": (COUPLING,),
    "base": (capacitor("CT", "coupling from the tap to e"), capacitor("CB", "base (gate) by-pass to ground")),
    "collector": (COUPLING,),
}
SHUNT = capacitor("CS", "coupling from c to the tank (feed = shunt)")


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    stage = chosen_stage(options)
    ground = options["ground"]
    shunt = ground == "emitter" and options["feed"] == "shunt"
    wanted = {"RL"} if ground == "collector" else {"RL", "CST"}
    loads = FEED_ROLES if shunt else tuple(r for r in FEED_ROLES if r.name in wanted)
    emitter = emitter_roles(stage)
    if ground == "collector":
        emitter = tuple(r for r in emitter if r.name != stage.emitter[1])
    return (*TANK_ROLES, *CHOSEN[ground], *((SHUNT,) if shunt else ()), *loads, *emitter, *stage.roles)


def option_problems(options: Mapping[str, str]) -> list[str]:
    """Choices that exclude each other."""
    problems = bias_problems(options)
    if options["feed"] == "shunt" and options["ground"] != "emitter":
        ground = options["ground"]
        problems.append(f"feed = shunt is for ground = emitter; with ground = {ground} leave the option out")
    return problems + collector_bias_problems(options)


def _problems(options: Mapping[str, str], present: frozenset[str], stage: Stage) -> list[str]:
    ground, first = options["ground"], stage.emitter[0]
    problems = []
    if options["feed"] == "shunt" and not {"RC", "LCH"} & present:
        problems.append(f"the {stage.terminals[2]} has no DC path: give RC, LCH or both")
    if ground == "base" and first not in present:
        problems.append(f"ground = base needs {first}: it carries the {stage.terminals[0]}'s DC current")
    return problems + feed_problems(present) + emitter_problems(stage, present, bypass=ground != "base")


def _windings(top: str, tap: str, bottom: str, present: frozenset[str]) -> tuple[Branch, ...]:
    lossy = {"L1_dcr", "L2_dcr"} & present
    symbols = ("L1", "L2", "k", "r1", "r2") if lossy else ("L1", "L2", "k")
    return (
        Branch("coil", "coupled", (top, tap, tap, bottom), symbols),
        Branch("C", "C", (top, bottom), ("C",)),
    )


def _table(options: Mapping[str, str], present: frozenset[str], stage: Stage) -> tuple[Branch, ...]:
    ground = options["ground"]
    if ground == "collector":
        return _collector_table(present, stage)
    e, emitter = emitter_branches(present, bypass=ground == "emitter", stage=stage)
    if ground == "base":
        rows = [
            *_windings("c", "t", "gnd", present),
            Branch("CT", "C", ("t", e), ("CT",)),
            Branch("CB", "C", ("b", "gnd"), ("CB",)),
            *load_branches(present),
        ]
    elif options["feed"] == "shunt":
        rows = [
            *_windings("c2", "gnd", "g", present),
            Branch("CS", "C", ("c", "c2"), ("CS",)),
            *feed_branches(present),
            Branch("CC", "C", ("g", "b"), ("CC",)),
        ]
    else:
        rows = [
            *_windings("c", "gnd", "g", present),
            *load_branches(present),
            Branch("CC", "C", ("g", "b"), ("CC",)),
        ]
    return (*rows, *emitter, *stage_branches(stage, "b", "c", e))


def _collector_table(present: frozenset[str], stage: Stage) -> tuple[Branch, ...]:
    """The emitter's DC current flows through L2: RE with CE beside it stands between e and the tap."""
    first = stage.emitter[0]
    e = "e" if first in present else "t"
    rows = [*_windings("g", "t", "gnd", present), Branch("CC", "C", ("g", "b"), ("CC",))]
    if first in present:
        rows.append(Branch(first, "R", ("e", "t"), (first,)))
    if "CE" in present:
        rows.append(Branch("CE", "C", ("e", "t"), ("CE",)))
    if "RL" in present:
        rows.append(Branch("RL", "R", ("t", "gnd"), ("RL",)))
    return (*rows, *stage_branches(stage, "b", "gnd", e))


def design_frequency(values: Values) -> Array:
    """1/(2π√((L1 + L2 + 2M) C)) [Hz]."""
    mutual = values["k"] * np.sqrt(values["L1"] * values["L2"])
    return np.asarray(1 / (2 * np.pi * np.sqrt((values["L1"] + values["L2"] + 2 * mutual) * values["C"])))


def _rfeed(options: Mapping[str, str], values: Values) -> Resistance:
    """DC resistance in c: through the coil, or through RC and LCH."""
    if options["ground"] == "collector":
        return 0.0
    if options["ground"] == "base":
        return total_ohm(values, "L1_dcr", "L2_dcr")
    return feed_resistance_ohm(values) if options["feed"] == "shunt" else total_ohm(values, "L1_dcr")


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    stage = chosen_stage(options)
    problems = _problems(options, present, stage)
    if problems:
        raise CircuitError(problems)
    branches = _table(options, present, stage)
    lossy = "r1" in {name for row in branches for name in row.symbols}

    def computed(values: Values) -> dict[str, Array]:
        if not lossy:
            return {}
        return {"r1": np.asarray(total_ohm(values, "L1_dcr")), "r2": np.asarray(total_ohm(values, "L2_dcr"))}

    def rfeed(values: Values) -> Resistance:
        return _rfeed(options, values)

    def outside(values: Values, frequency_hz: Array) -> NDArray[np.bool_]:
        return outside_range(stage, values, frequency_hz) | (values["k"] >= 1)

    ground = options["ground"]
    terminal = stage.terminals[("emitter", "base", "collector").index(ground)]
    drawing = "shunt" if ground == "emitter" and options["feed"] == "shunt" else ground
    return Circuit(
        name="hartley",
        title=f"Hartley, {terminal} at signal ground",
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=branches,
        gain_symbol="gm",
        derive=stage_derive(stage, branches, rfeed=rfeed, computed=computed),
        design_frequency=design_frequency,
        closed_form="f = 1/(2π√((L1 + L2 + 2M)·C)), M = k·√(L1·L2)",
        not_assessable=outside,
        range_text=f"{stage.range_text}; k below 1",
        assumptions=(*stage.assumptions, "windings in series aiding; their self-capacitance is left out"),
        supply_role=stage.supply_role,
        schematic=SCHEMATICS[drawing],
        recipe=("hartley", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = with_limiter(
    Family(name="hartley", title="Hartley", options=OPTIONS, roles=roles, build=build, option_problems=option_problems),
    "agc",
    "tanh",
    "exp",
)
