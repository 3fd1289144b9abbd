"""Colpitts, and Clapp with C3: one coil, a capacitive tap, a three-terminal stage in one of three grounds.

f = 1/(2π√(L C1C2/(C1+C2))), with C3 in series: 1/C = 1/C1 + 1/C2 + 1/C3.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Array, Branch, Circuit, CircuitError, Derived, Family, Option, Role, Values
from yieldosc.circuits.roles import capacitor, coil_resistance, inductor
from yieldosc.circuits.stages import (
    EMITTER_ROLES,
    FEED_ROLES,
    Stage,
    bjt,
    emitter_branches,
    emitter_resistance_ohm,
    feed_branches,
    feed_resistance_ohm,
    stage_branches,
)

OPTIONS = (
    Option("ground", ("emitter", "base", "collector"), "which terminal is at signal ground"),
    Option("stage", ("bjt",), "the active part"),
    Option("bias", ("divider", "collector"), "RB1 and RB2 from VCC, or RB1 from the collector"),
)
TANK_ROLES = (
    inductor("L", "tank coil"),
    coil_resistance("L_dcr", "L"),
    capacitor("C3", "in series with L (Clapp)", optional=True),
    capacitor("C1", "tap, output side (emitter ground: c–gnd; base: c–e; collector: b–e)"),
    capacitor("C2", "tap, input side (emitter ground: m–gnd; base: e–gnd; collector: e–gnd)"),
)
COUPLING = capacitor("CC", "coupling from the tank to b; absent with C3", optional=True)
BASE_BYPASS = capacitor("CB", "base by-pass to ground")
MOST_F_OVER_FT = 1 / 10


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    stage = bjt(options["bias"])
    ground = options["ground"]
    extra = {"emitter": (COUPLING,), "base": (BASE_BYPASS,), "collector": (COUPLING,)}[ground]
    load = tuple(r for r in FEED_ROLES if ground != "collector" or r.name == "RL")
    return (*TANK_ROLES, *extra, *EMITTER_ROLES, *load, *stage.roles)


def _problems(options: Mapping[str, str], present: frozenset[str]) -> list[str]:
    ground = options["ground"]
    problems = []
    feed = {"RC", "LCH"} & present
    if ground == "emitter" and not feed:
        problems.append("the collector has no DC path: give RC, LCH or both")
    if ground == "base" and "C3" in present and not feed:
        problems.append("with C3 the coil carries no DC: give RC, LCH or both as the feed of c")
    if ground in ("base", "collector") and "RE" not in present:
        problems.append(f"ground = {ground} needs RE: it carries the emitter's DC current")
    if ground != "base" and "C3" not in present and "CC" not in present:
        problems.append("without C3 the coil would short the base bias: give CC")
    if ground != "base" and "C3" in present and "CC" in present:
        problems.append("with C3 the tank needs no coupling capacitor: remove CC")
    if ground == "collector" and options["bias"] == "collector":
        problems.append(
            "bias = collector with the collector at the supply is the same as RB1 from VCC: use bias = divider"
        )
    if "LCH_dcr" in present and "LCH" not in present:
        problems.append("LCH_dcr without LCH: give the choke, or remove its resistance")
    return problems


def _tank(top: str, bottom: str, present: frozenset[str]) -> tuple[Branch, ...]:
    coil = ("L", "L_dcr") if "L_dcr" in present else ("L",)
    if "C3" not in present:
        return (Branch("L", "L", (top, bottom), coil),)
    return (Branch("L", "L", (top, "l"), coil), Branch("C3", "C", ("l", bottom), ("C3",)))


def _table(options: Mapping[str, str], present: frozenset[str], stage: Stage) -> tuple[Branch, ...]:
    ground = options["ground"]
    b = "b" if "CC" in present or ground == "base" else "m"
    e, emitter = emitter_branches(present, bypass=ground == "emitter")
    if ground == "emitter":
        rows = (
            *_tank("c", "m", present),
            Branch("C1", "C", ("c", "gnd"), ("C1",)),
            Branch("C2", "C", ("m", "gnd"), ("C2",)),
            *feed_branches(present),
        )
        c = "c"
    elif ground == "base":
        rows = (
            *_tank("c", "gnd", present),
            Branch("C1", "C", ("c", e), ("C1",)),
            Branch("C2", "C", (e, "gnd"), ("C2",)),
            Branch("CB", "C", ("b", "gnd"), ("CB",)),
            *feed_branches(present),
        )
        c = "c"
    else:
        rows = (
            *_tank("m", "gnd", present),
            Branch("C1", "C", (b, e), ("C1",)),
            Branch("C2", "C", (e, "gnd"), ("C2",)),
            *((Branch("RL", "R", (e, "gnd"), ("RL",)),) if "RL" in present else ()),
        )
        c = "gnd"
    coupling = (Branch("CC", "C", ("m", "b"), ("CC",)),) if "CC" in present else ()
    return (*rows, *coupling, *emitter, *stage_branches(stage, b, c, e))


def design_frequency(values: Values) -> Array:
    """1/(2π√(L C)), C the series connection of C1, C2 and C3 [Hz]."""
    inverse = 1 / values["C1"] + 1 / values["C2"]
    if "C3" in values:
        inverse = inverse + 1 / values["C3"]
    return np.asarray(np.sqrt(inverse / values["L"]) / (2 * np.pi))


def _not_assessable(values: Values, frequency_hz: Array) -> NDArray[np.bool_]:
    with np.errstate(invalid="ignore"):
        return np.asarray(frequency_hz > values["fT"] * MOST_F_OVER_FT)


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    problems = _problems(options, present)
    if problems:
        raise CircuitError(problems)
    stage = bjt(options["bias"])
    branches = _table(options, present, stage)
    coil_feeds = options["ground"] == "base" and "C3" not in present
    part_names = {name for row in branches for name in row.symbols} - set(stage.symbols) - {"feed_series"}

    def derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
        rfeed = values.get("L_dcr", np.float64(0.0)) if coil_feeds else feed_resistance_ohm(values)
        bias = stage.solve(values, temperature_c, own_law, rfeed, emitter_resistance_ohm(values))
        symbols = {name: values[name] for name in part_names}
        if "LCH" in values:
            symbols["feed_series"] = np.asarray(feed_resistance_ohm(values))
        return Derived(symbols | bias.symbols, bias.no_bias)

    name = "Clapp" if "C3" in present else "Colpitts"
    return Circuit(
        name="colpitts",
        title=f"{name}, {options['ground']} at signal ground",
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=branches,
        gain_symbol="gm",
        derive=derive,
        design_frequency=design_frequency,
        closed_form="f = 1/(2π√(L·C)), 1/C = 1/C1 + 1/C2 (+ 1/C3)",
        not_assessable=_not_assessable,
        range_text="f below fT/10 (the stage's input is one capacitance)",
        assumptions=stage.assumptions,
        supply_role=stage.supply_role,
        schematic=SCHEMATICS[options["ground"]],
        recipe=("colpitts", tuple(sorted(options.items())), tuple(sorted(present))),
    )


SCHEMATICS = {
    "emitter": """
      VCC ─[RC]─[LCH]─┬─ c ──── L ──[C3]── m ──[CC]── b
                      │                    │
                      C1                   C2          e ──RE──[RE2 ∥ CE]── gnd
                      │                    │
                     gnd                  gnd
""",
    "base": """
      c ──┬── L ──[C3]── gnd      b ──CB── gnd
          C1
          ├── e ──RE──[RE2]── gnd
          C2
          │
         gnd
""",
    "collector": """
      c at the supply      m ── L ──[C3]── gnd      m ──[CC]── b
      b ──C1──┬── e ──RE── gnd
              C2
              │
             gnd
""",
}
FAMILY = Family(name="colpitts", title="Colpitts and Clapp", options=OPTIONS, roles=roles, build=build)
