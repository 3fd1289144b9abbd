"""Crystal in a common-base stage with a coil at the collector: it grounds the base, or couples the tap to the emitter.

f ≈ fs: the crystal is used near series resonance. The coil makes a second mode, so that a loop gain above one at zero
phase is not enough: the gain must lie inside the crystal mode's window.
"""

from __future__ import annotations

from collections.abc import Mapping

from yieldosc.circuits.circuit import Branch, Circuit, CircuitError, Family, Option, Role, Values
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
    series_frequency_hz,
)
from yieldosc.circuits.limits import with_limiter
from yieldosc.circuits.roles import capacitor, coil_resistance, inductor
from yieldosc.circuits.stages import (
    FEED_ROLES,
    Resistance,
    bjt,
    emitter_branches,
    emitter_problems,
    emitter_roles,
    load_branches,
    outside_range,
    stage_branches,
    stage_derive,
    total_ohm,
)

STAGE = bjt("divider")
OPTIONS = (
    Option("crystal", ("base", "feedback"), "where the crystal stands: base to ground, or tap to emitter"),
)
TANK_ROLES = (
    inductor("L", "collector coil to the supply"),
    coil_resistance("L_dcr", "L"),
    capacitor("C1", "collector to emitter (crystal = base) or to the tap (feedback)"),
    capacitor("C2", "emitter (crystal = base) or tap (feedback) to ground"),
)
LOADS = tuple(r for r in FEED_ROLES if r.name in ("RL", "CST"))

SCHEMATICS = {
    "base": """
      VCC ── L ──┬─ c      b ── crystal ∥ C0 ── gnd
                 C1
                 ├─ e ──RE──[RE2]── gnd
                 C2
                 │
                gnd
""",
    "feedback": """
      VCC ── L ──┬─ c      b ──CB── gnd
                 C1
                 ├─ t ── crystal ∥ C0 ── e ──RE──[RE2]── gnd
                 C2
                 │
                gnd
""",
}


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    bypass = (capacitor("CB", "base by-pass to ground"),) if options["crystal"] == "feedback" else ()
    return (*CRYSTAL_ROLES, *OVERTONE_ROLES, *TANK_ROLES, *bypass, *LOADS, *emitter_roles(STAGE), *STAGE.roles)


def _problems(present: frozenset[str]) -> list[str]:
    problems = crystal_problems(present)
    if "RE" not in present:
        problems.append("the common-base stage needs RE: it carries the emitter's DC current")
    return problems + emitter_problems(STAGE, present, bypass=False)


def _table(options: Mapping[str, str], present: frozenset[str]) -> tuple[Branch, ...]:
    e, emitter = emitter_branches(present, bypass=False)
    tap = e if options["crystal"] == "base" else "t"
    rows = [
        Branch("L", "L", ("c", "gnd"), ("L", "L_dcr") if "L_dcr" in present else ("L",)),
        Branch("C1", "C", ("c", tap), ("C1",)),
        Branch("C2", "C", (tap, "gnd"), ("C2",)),
        *load_branches(present),
    ]
    if options["crystal"] == "base":
        rows += crystal_branches("b", "gnd", present)
    else:
        rows += [*crystal_branches("t", e, present), Branch("CB", "C", ("b", "gnd"), ("CB",))]
    return (*rows, *emitter, *stage_branches(STAGE, "b", "c", e))


def _rfeed(values: Values) -> Resistance:
    return total_ohm(values, "L_dcr")


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The branch table for the roles that are present."""
    problems = _problems(present)
    if problems:
        raise CircuitError(problems)
    branches = _table(options, present)
    place = options["crystal"]
    return Circuit(
        name="crystal_common_base",
        title="Common base, crystal " + ("from base to ground" if place == "base" else "from the tap to the emitter"),
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=branches,
        gain_symbol="gm",
        derive=stage_derive(STAGE, branches, rfeed=_rfeed, computed=crystal_symbols),
        design_frequency=series_frequency_hz,
        closed_form="f ≈ fs = FL/√(1 + Cm/(C0 + CL)); the coil's own mode lies near 1/(2π√(L·C1·C2/(C1+C2)))",
        band=crystal_band,
        crystal_arm=ARM,
        not_assessable=lambda values, frequency_hz: outside_range(STAGE, values, frequency_hz),
        range_text=f"{STAGE.range_text}; {RANGE_TEXT}",
        schematic=SCHEMATICS[place],
        assumptions=(
            *STAGE.assumptions,
            *crystal_assumptions(present),
            "above the gain window a slow supply ramp may start the crystal mode all the same",
        ),
        supply_role=STAGE.supply_role,
        recipe=("crystal_common_base", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = with_limiter(
    Family(
        name="crystal_common_base", title="Crystal in a common-base stage", options=OPTIONS, roles=roles, build=build
    ),
    "agc",
    "tanh",
    "exp",
)
