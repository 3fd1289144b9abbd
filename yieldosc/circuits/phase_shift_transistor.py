"""The phase-shift ladder around a transistor: RC feeds c and drives the ladder, which ends at b."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Array, Branch, Circuit, Role, Values
from yieldosc.circuits.ladder import ladder_branches, turning_frequency_hz
from yieldosc.circuits.roles import capacitor, resistor
from yieldosc.circuits.stages import (
    FEED_ROLES,
    Stage,
    chosen_stage,
    emitter_branches,
    emitter_resistance_ohm,
    emitter_roles,
    feed_branches,
    outside_range,
    stage_branches,
    stage_derive,
)

LOADS = tuple(r for r in FEED_ROLES if r.name in ("RL", "CST"))
SCHEMATIC = """
      VCC ──RC──┬─ c      e ──[RE]──[RE2 ∥ CE]── gnd
      lag    c ──R1──┬──R2──┬──R3──┬──[…]──CC── b
                     C1     C2     C3
                    gnd    gnd    gnd
      lead   c ──C1──┬──C2──┬──C3──[…]──[R3]── b
                     R1     R2
                    gnd    gnd
"""


def transistor_roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    """Roles beside the sections'."""
    stage = chosen_stage(options)
    coupling = (capacitor("CC", "coupling from the last section to b"),) if options["ladder"] == "lag" else ()
    feed = resistor("RC", "feed resistor of c, which drives the ladder")
    return (*coupling, feed, *LOADS, *emitter_roles(stage), *stage.roles)


def transistor_problems(options: Mapping[str, str]) -> list[str]:
    """Choices that need an op-amp."""
    stage = chosen_stage(options)
    problems = []
    if options["buffered"] == "yes":
        problems.append("buffered = yes needs stage = opamp: the model has no buffers around a transistor")
    if options["ladder"] == "rl":
        problems.append(
            f"ladder = rl is for stage = opamp: with a transistor R1 and L1 would draw the {stage.terminals[2]}'s "
            "DC current to ground"
        )
    return problems


def _table(options: Mapping[str, str], present: frozenset[str], stage: Stage) -> tuple[Branch, ...]:
    ladder, n = options["ladder"], int(options["sections"])
    end = "b" if ladder == "lead" and f"R{n}" not in present else f"n{n}"
    nodes = [*(f"n{i}" for i in range(1, n)), end]
    rows = [*ladder_branches(ladder, "c", nodes, present, buffered=False)]
    if ladder == "lag":
        rows.append(Branch("CC", "C", (end, "b"), ("CC",)))
    elif f"R{n}" in present:
        rows.append(Branch(f"R{n}", "R", (end, "b"), (f"R{n}",)))
    e, emitter = emitter_branches(present, stage=stage)
    return (*rows, *feed_branches(present), *emitter, *stage_branches(stage, "b", "c", e))


def _input_ohm(values: Values, stage: Stage) -> Array:
    """Resistance at b to ground at 25 °C, with what of the emitter's resistance CE leaves in the signal's way."""
    bias = stage.solve(values, 25.0, frozenset(), values["RC"], emitter_resistance_ohm(values))
    first, second = stage.emitter
    unbypassed: Array | float = emitter_resistance_ohm(values)
    if "CE" in values:
        unbypassed = values[first] if second in values else 0.0
    base = bias.symbols["rin"] * (1 + bias.symbols["gm"] * unbypassed)
    if stage.bias == "collector":
        return np.asarray(base)
    return np.asarray(base * bias.symbols["rb"] / (base + bias.symbols["rb"]))


def design_frequency(options: Mapping[str, str], values: Values, stage: Stage) -> Array:
    """Where the ladder between RC and the stage's input resistance turns 180 degrees [Hz]."""
    ladder, n = options["ladder"], int(options["sections"])
    source = values["RC"] * values["RL"] / (values["RC"] + values["RL"]) if "RL" in values else values["RC"]
    series: list[tuple[Array | float, Array | float]] = []
    shunt: list[tuple[Array | float, Array | float]] = []
    load = _input_ohm(values, stage)
    for i in range(1, n + 1):
        first = source if i == 1 else np.float64(0.0)
        if ladder == "lead":
            end = load + values[f"R{n}"] if i == n and f"R{n}" in values else load
            series.append((first, 1 / values[f"C{i}"]))
            shunt.append((1 / (end if i == n else values[f"R{i}"]), 0.0))
        else:
            series.append((first + values[f"R{i}"], 0.0))
            shunt.append((1 / load if i == n else 0.0, values[f"C{i}"]))
    return turning_frequency_hz(ladder, series, shunt, buffered=False)


def build_transistor(options: Mapping[str, str], present: frozenset[str], roles: tuple[Role, ...]) -> Circuit:
    """The circuit around a bjt, jfet or mosfet; options and roles have been checked."""
    stage = chosen_stage(options)
    branches = _table(options, present, stage)

    def frequency(values: Values) -> Array:
        return design_frequency(options, values, stage)

    def outside(values: Values, frequency_hz: Array) -> NDArray[np.bool_]:
        return outside_range(stage, values, frequency_hz)

    sections = {"3": "three", "4": "four"}[options["sections"]]
    return Circuit(
        name="phase_shift",
        title=f"Phase shift, {sections} {options['ladder']} sections, {stage.name.upper()} stage",
        options=dict(options),
        roles=tuple(r for r in roles if r.name in present),
        branches=branches,
        gain_symbol="gm",
        derive=stage_derive(stage, branches),
        design_frequency=frequency,
        closed_form=(
            "where the ladder between RC and the stage's input resistance turns 180°; lead 3, equal sections, "
            "R3 + rin = R, k = RC/R: ω = 1/(R·C·√(6 + 4k)), hFE of at least 23 + 29/k + 4k"
        ),
        not_assessable=outside,
        range_text=stage.range_text,
        assumptions=stage.assumptions,
        supply_role=stage.supply_role,
        schematic=SCHEMATIC,
        recipe=("phase_shift", tuple(sorted(options.items())), tuple(sorted(present))),
    )
