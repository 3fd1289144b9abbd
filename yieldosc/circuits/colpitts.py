"""Colpitts and Clapp: tank L, C1, C2 around one stage.

f = 1/(2π√(L C)), C = CP + C1C2/(C1+C2); with C3 in series: 1/(C − CP) = 1/C1 + 1/C2 + 1/C3.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits import opamp
from yieldosc.circuits.circuit import Array, Branch, Circuit, CircuitError, Derived, Family, Option, Role, Values
from yieldosc.circuits.colpitts_drawings import SCHEMATICS
from yieldosc.circuits.limits import with_limiter
from yieldosc.circuits.roles import capacitor, coil_resistance, device, inductor, resistor
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
    outside_range,
    stage_branches,
    stage_derive,
    stage_option,
    total_ohm,
)

OPTIONS = (
    Option("ground", ("emitter", "base", "collector"), "which terminal (source, gate, drain) is at signal ground"),
    stage_option("bjt", "jfet", "mosfet", "opamp"),
    BIAS_OPTION,
)
TANK_ROLES = (
    inductor("L", "tank coil"),
    coil_resistance("L_dcr", "L"),
    capacitor("CP", "across L", optional=True),
    capacitor("C3", "in series with L (Clapp)", optional=True),
    capacitor("C1", "tap, output side (emitter ground: c–gnd; base: c–e; collector: b–e; opamp: o–gnd)"),
    capacitor("C2", "tap, input side (emitter ground: m–gnd; base: e–gnd; collector: e–gnd; opamp: g–gnd)"),
)
COUPLING = capacitor("CC", "coupling from the tank to b; absent with C3", optional=True)
BASE_BYPASS = capacitor("CB", "base by-pass to ground")
AMPLIFIER_ROLES = (
    device("RO", "Ω", "output resistance of the op-amp, with any resistor outside its feedback loop", kind="ic"),
    resistor("RIN", "tank to inverting input"),
    opamp.FEEDBACK_ROLE,
    opamp.GBW_ROLE,
)


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    if options["stage"] == "opamp":
        return (*TANK_ROLES, *AMPLIFIER_ROLES)
    stage = chosen_stage(options)
    ground = options["ground"]
    extra = {"emitter": (COUPLING,), "base": (BASE_BYPASS,), "collector": (COUPLING,)}[ground]
    load = tuple(r for r in FEED_ROLES if ground != "collector" or r.name == "RL")
    return (*TANK_ROLES, *extra, *emitter_roles(stage), *load, *stage.roles)


def option_problems(options: Mapping[str, str]) -> list[str]:
    """Choices that exclude each other."""
    problems = bias_problems(options)
    if options["stage"] == "opamp" and options["ground"] != "emitter":
        problems.append(f"ground = {options['ground']} is a transistor's; stage = opamp inverts: leave the option out")
    return problems + collector_bias_problems(options)


def _problems(options: Mapping[str, str], present: frozenset[str], stage: Stage) -> list[str]:
    ground = options["ground"]
    first = stage.emitter[0]
    common, _, output = stage.terminals
    problems = []
    feed = {"RC", "LCH"} & present
    if ground == "emitter" and not feed:
        problems.append(f"the {output} has no DC path: give RC, LCH or both")
    if ground == "base" and "C3" in present and not feed:
        problems.append("with C3 the coil carries no DC: give RC, LCH or both as the feed of c")
    if ground in ("base", "collector") and first not in present:
        problems.append(f"ground = {ground} needs {first}: it carries the {common}'s DC current")
    # a field-effect gate may rest on the coil at DC ground; a base would lose its bias, a drain's supply would reach it
    grounded_gate = ground == "collector" and stage.name != "bjt"
    if ground != "base" and "C3" not in present and "CC" not in present and not grounded_gate:
        problems.append(f"without C3 the coil would short the {stage.terminals[1]} bias: give CC")
    if ground != "base" and "C3" in present and "CC" in present:
        problems.append("with C3 the tank needs no coupling capacitor: remove CC")
    return problems + feed_problems(present) + emitter_problems(stage, present, bypass=ground == "emitter")


def _tank(top: str, bottom: str, present: frozenset[str]) -> tuple[Branch, ...]:
    coil = ("L", "L_dcr") if "L_dcr" in present else ("L",)
    foot = "l" if "C3" in present else bottom
    rows = [Branch("L", "L", (top, foot), coil)]
    if "CP" in present:
        rows.append(Branch("CP", "C", (top, foot), ("CP",)))
    if "C3" in present:
        rows.append(Branch("C3", "C", ("l", bottom), ("C3",)))
    return tuple(rows)


def _table(options: Mapping[str, str], present: frozenset[str], stage: Stage) -> tuple[Branch, ...]:
    ground = options["ground"]
    b = "b" if "CC" in present or ground == "base" else "m"
    e, emitter = emitter_branches(present, bypass=ground == "emitter", stage=stage)
    c = "gnd" if ground == "collector" else "c"
    if ground == "emitter":
        rows = (
            *_tank("c", "m", present),
            Branch("C1", "C", ("c", "gnd"), ("C1",)),
            Branch("C2", "C", ("m", "gnd"), ("C2",)),
            *feed_branches(present),
        )
    elif ground == "base":
        rows = (
            *_tank("c", "gnd", present),
            Branch("C1", "C", ("c", e), ("C1",)),
            Branch("C2", "C", (e, "gnd"), ("C2",)),
            Branch("CB", "C", ("b", "gnd"), ("CB",)),
            *feed_branches(present),
        )
    else:
        rows = (
            *_tank("m", "gnd", present),
            Branch("C1", "C", (b, e), ("C1",)),
            Branch("C2", "C", (e, "gnd"), ("C2",)),
            *((Branch("RL", "R", (e, "gnd"), ("RL",)),) if "RL" in present else ()),
        )
    coupling = (Branch("CC", "C", ("m", "b"), ("CC",)),) if "CC" in present else ()
    return (*rows, *coupling, *emitter, *stage_branches(stage, b, c, e))


def design_frequency(values: Values) -> Array:
    """1/(2π√(L C)), C the capacitance that the coil sees [Hz]."""
    inverse = 1 / values["C1"] + 1 / values["C2"]
    if "C3" in values:
        inverse = inverse + 1 / values["C3"]
    seen = 1 / inverse + values["CP"] if "CP" in values else 1 / inverse
    return np.asarray(1 / (2 * np.pi * np.sqrt(values["L"] * seen)))


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    if options["stage"] == "opamp":
        return _build_opamp(options, present)
    stage = chosen_stage(options)
    problems = _problems(options, present, stage)
    if problems:
        raise CircuitError(problems)
    branches = _table(options, present, stage)
    coil_feeds = options["ground"] == "base" and "C3" not in present

    def rfeed(values: Values) -> Resistance:
        return total_ohm(values, "L_dcr") if coil_feeds else feed_resistance_ohm(values)

    def outside(values: Values, frequency_hz: Array) -> NDArray[np.bool_]:
        return outside_range(stage, values, frequency_hz)

    kind = "Clapp" if "C3" in present else "Colpitts"
    return Circuit(
        name="colpitts",
        title=f"{kind}, {_terminal(options['ground'], stage)} at signal ground",
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=branches,
        gain_symbol="gm",
        derive=stage_derive(stage, branches, rfeed=rfeed),
        design_frequency=design_frequency,
        closed_form=CLOSED_FORM,
        not_assessable=outside,
        range_text=stage.range_text,
        assumptions=stage.assumptions,
        supply_role=stage.supply_role,
        schematic=SCHEMATICS[options["ground"]],
        recipe=("colpitts", tuple(sorted(options.items())), tuple(sorted(present))),
    )


def _terminal(ground: str, stage: Stage) -> str:
    return stage.terminals[("emitter", "base", "collector").index(ground)]


def _build_opamp(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """Inverting amplifier: RO q–o, C1 o–gnd, L o–g, C2 g–gnd, RIN g–m, RF q–m."""
    branches = (
        *_tank("o", "g", present),
        Branch("C1", "C", ("o", "gnd"), ("C1",)),
        Branch("C2", "C", ("g", "gnd"), ("C2",)),
        Branch("RIN", "R", ("g", "m"), ("RIN",)),
        *opamp.inverting_branches(present),
    )
    parts = {name for row in branches for name in row.symbols} - {"tau"}

    def derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
        return Derived({name: values[name] for name in parts} | opamp.opamp_symbols(values))

    return Circuit(
        name="colpitts",
        title=f"{'Clapp' if 'C3' in present else 'Colpitts'} around an inverting op-amp",
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=branches,
        gain_symbol="RF",
        derive=derive,
        design_frequency=design_frequency,
        closed_form=CLOSED_FORM,
        not_assessable=opamp.outside_gbw,
        range_text=opamp.RANGE_TEXT,
        assumptions=(opamp.ASSUMPTION, "no stabiliser: the level is limited by clipping"),
        schematic=SCHEMATICS["opamp"],
        recipe=("colpitts", tuple(sorted(options.items())), tuple(sorted(present))),
    )


CLOSED_FORM = "f = 1/(2π√(L·C)), C = CP + Cs, 1/Cs = 1/C1 + 1/C2 (+ 1/C3)"
FAMILY = with_limiter(
    Family(
        name="colpitts",
        title="Colpitts and Clapp",
        options=OPTIONS,
        roles=roles,
        build=build,
        option_problems=option_problems,
    ),
    "agc",
    "clip",
    "tanh",
    "exp",
)
