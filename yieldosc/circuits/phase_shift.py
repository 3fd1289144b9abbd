"""Phase-shift oscillator: three or four RC or RL sections around one inverting stage.

Equal sections, unloaded: ωRC = √6 (lag 3), 1/√6 (lead 3), √(10/7) (lag 4), √(7/10) (lead 4), critical gain 29 and
18.39; buffered: tan(π/n)^±1 and (1/cos(π/n))^n. A bjt stage, lead 3, R3 + rin = R: ω = 1/(RC √(6 + 4 RC/R))
(Schubert & Kim, Fundamentals of Electronics, Book 4 (2016), eq. 12.26; seen).
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits import opamp
from yieldosc.circuits.circuit import Array, Branch, Circuit, Derived, Family, Option, Role, Values
from yieldosc.circuits.ladder import LADDERS, buffer, ladder_branches, turning_frequency_hz
from yieldosc.circuits.limits import with_limiter
from yieldosc.circuits.phase_shift_transistor import (
    build_transistor,
    transistor_problems,
    transistor_roles,
)
from yieldosc.circuits.roles import capacitor, coil_resistance, inductor, resistor
from yieldosc.circuits.stages import BIAS_OPTION, bias_problems, stage_option

OPTIONS = (
    Option("ladder", LADDERS, "lag: series R, shunt C; lead: series C, shunt R; rl: series R, shunt L"),
    Option("sections", ("3", "4"), "number of sections"),
    stage_option("opamp", "bjt", "jfet", "mosfet"),
    Option("buffered", ("no", "yes"), "an ideal buffer after each section (stage = opamp)"),
    BIAS_OPTION,
)
SCHEMATIC = """
      lag    o ──R1──┬──R2──┬──R3──┬──[…]──RIN── m
                     C1     C2     C3
                    gnd    gnd    gnd
      lead   o ──C1──┬──C2──┬──C3──[…]──R3 (the input resistor)── m
                     R1     R2
                    gnd    gnd
      rl     as lag, with L1, L2, L3 in place of the capacitors

      m ─▷− op-amp (+ at gnd) ── q ──[RO]── o      RF from q to m
      buffered = yes: a buffer of gain one after each section
"""


def section_roles(ladder: str, n: int, *, last_r_optional: bool = False) -> tuple[Role, ...]:
    """R1 … Rn with C1 … Cn, or with L1 … Ln and their resistances."""
    rows: list[Role] = []
    for i in range(1, n + 1):
        place = {"lag": "series", "rl": "series", "lead": "shunt"}[ladder]
        last = ladder == "lead" and i == n
        meaning = f"into the amplifier's input, last section ({i})" if last else f"{place} resistor of section {i}"
        rows.append(resistor(f"R{i}", meaning, optional=last and last_r_optional))
        if ladder == "rl":
            rows += [inductor(f"L{i}", f"shunt coil of section {i}"), coil_resistance(f"L{i}_dcr", f"L{i}")]
        else:
            where = "series" if ladder == "lead" else "shunt"
            rows.append(capacitor(f"C{i}", f"{where} capacitor of section {i}"))
    return tuple(rows)


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    ladder, n = options["ladder"], int(options["sections"])
    if options["stage"] != "opamp":
        return (*section_roles(ladder, n, last_r_optional=True), *transistor_roles(options))
    sections = section_roles(ladder, n)
    if ladder != "lead":
        sections = (*sections, resistor("RIN", "last section to inverting input"))
    elif options["buffered"] == "yes":
        sections = (*sections, resistor("RIN", f"a buffer after R{n} to inverting input; absent: R{n}", optional=True))
    return (*sections, opamp.FEEDBACK_ROLE, *opamp.OPAMP_ROLES)


def _table(options: Mapping[str, str], present: frozenset[str]) -> tuple[Branch, ...]:
    ladder, n = options["ladder"], int(options["sections"])
    buffered = options["buffered"] == "yes"
    nodes = [f"n{i}" for i in range(1, n + 1)]
    rows = [*ladder_branches(ladder, "o", nodes, present, buffered=buffered)]
    last = nodes[-1]
    if ladder == "lead":
        own_input = "RIN" in present
        rows.append(Branch(f"R{n}", "R", (last, "gnd" if own_input else "m"), (f"R{n}",)))
    else:
        own_input = True
    if own_input:
        if buffered:
            rows.append(buffer(n, last))
        rows.append(Branch("RIN", "R", (f"u{n}" if buffered else last, "m"), ("RIN",)))
    return (*rows, *opamp.inverting_branches(present))


def design_frequency(options: Mapping[str, str], values: Values) -> Array:
    """Where the ladder with its load turns 180 degrees [Hz], the op-amp ideal."""
    ladder, n = options["ladder"], int(options["sections"])
    buffered = options["buffered"] == "yes"
    series: list[tuple[Array | float, Array | float]] = []
    shunt: list[tuple[Array | float, Array | float]] = []
    for i in range(1, n + 1):
        r = values[f"R{i}"]
        if ladder == "lead":
            series.append((0.0, 1 / values[f"C{i}"]))
            shunt.append((1 / r, 0.0))
        else:
            load = 1 / values["RIN"] if i == n and not buffered else 0.0
            series.append((r, 0.0))
            shunt.append((load, values[f"C{i}"] if ladder == "lag" else 1 / values[f"L{i}"]))
    return turning_frequency_hz(ladder, series, shunt, buffered=buffered)


def option_problems(options: Mapping[str, str]) -> list[str]:
    """Choices that exclude each other."""
    problems = bias_problems(options)
    return problems if options["stage"] == "opamp" else problems + transistor_problems(options)


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    if options["stage"] != "opamp":
        return build_transistor(options, present, roles(options))
    branches = _table(options, present)
    parts = {name for row in branches for name in row.symbols} - {"tau", "unity"}

    def derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
        symbols = {name: values[name] for name in parts} | opamp.opamp_symbols(values)
        return Derived(symbols | ({"unity": np.asarray(1.0)} if options["buffered"] == "yes" else {}))

    def frequency(values: Values) -> Array:
        return design_frequency(options, values)

    def outside(values: Values, frequency_hz: Array) -> NDArray[np.bool_]:
        return opamp.outside_gbw(values, frequency_hz)

    return Circuit(
        name="phase_shift",
        title=title(options),
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=branches,
        gain_symbol="RF",
        derive=derive,
        design_frequency=frequency,
        closed_form=CLOSED_FORM,
        not_assessable=outside,
        range_text=opamp.RANGE_TEXT,
        assumptions=(
            opamp.ASSUMPTION,
            *(("buffers are ideal",) if options["buffered"] == "yes" else ()),
            "no stabiliser: the level is limited by clipping",
        ),
        schematic=SCHEMATIC,
        recipe=("phase_shift", tuple(sorted(options.items())), tuple(sorted(present))),
    )


def title(options: Mapping[str, str]) -> str:
    """What the options make of it, in words."""
    sections = {"3": "three", "4": "four"}[options["sections"]]
    held = "buffered " if options["buffered"] == "yes" else ""
    return f"Phase shift, {sections} {held}{options['ladder']} sections"


CLOSED_FORM = (
    "equal sections, unloaded: ω = √6/(R·C), 1/(√6·R·C), √(10/7)/(R·C), √(7/10)/(R·C) for lag 3, lead 3, lag 4, lead 4 "
    "(rl: as lead, with L/R for R·C); gain 29 and 18.39; unequal or loaded sections: where the ladder turns 180°"
)
FAMILY = with_limiter(
    Family(
        name="phase_shift",
        title="Phase shift",
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
