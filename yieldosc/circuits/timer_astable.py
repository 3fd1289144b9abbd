"""Timer astable: C charges through RA + RB to vh, then discharges through RB into the switch to vl.

t_high = ln 2 (RA + RB) C, t_low = ln 2 RB C with thresholds 2/3 and 1/3, no delay and an ideal switch (LM555 data
sheet, Fairchild rev 1.1.0 eq. 9–11; seen).
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from yieldosc.circuits.circuit import Array, Circuit, Derived, Direct, Family, Option, Role, Values
from yieldosc.circuits.relaxation import NO_START_QUESTION, Swing, astable
from yieldosc.circuits.roles import capacitor, device, resistor

OPTIONS: tuple[Option, ...] = ()
ROLES = (
    resistor("RA", "supply to the discharge pin"),
    resistor("RB", "discharge pin to the capacitor"),
    capacitor("C", "timing capacitor"),
    device("vh", "1", "upper threshold over the supply", default=2 / 3, kind="ic"),
    device("vl", "1", "lower threshold over the supply", default=1 / 3, kind="ic"),
    device("Rd", "Ω", "resistance of the discharge switch", default=0.0, kind="ic"),
    device("td", "s", "delay at each edge", default=0.0, kind="ic"),
)
SCHEMATIC = """
      VCC ──RA──┬── discharge pin ──[Rd switch]── gnd
                RB
                ├── threshold, trigger
                C
                │
               gnd
"""


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    return ROLES


def solve(values: Values, temperature_c: float) -> Direct:
    """Frequency, duty and latching; v∞ = Rd/(RA + Rd), discharge through RB + RA∥Rd."""
    ra, rb, rd, c = (values[name] for name in ("RA", "RB", "Rd", "C"))
    up = Swing(1.0, (ra + rb) * c)
    down = Swing(rd / (ra + rd), (rb + ra * rd / (ra + rd)) * c)
    return astable(up, down, values["vh"], values["vl"], values["td"])


def design_frequency(values: Values) -> Array:
    """1/(ln 2 (RA + 2 RB) C) [Hz]."""
    return np.asarray(1 / (np.log(2) * (values["RA"] + 2 * values["RB"]) * values["C"]))


def no_network(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
    """A circuit of formulas has no branch symbols."""
    return Derived({})


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The circuit for the roles that are present."""
    return Circuit(
        name="timer_astable",
        title="Timer, astable",
        options=dict(options),
        roles=tuple(r for r in ROLES if r.name in present),
        branches=(),
        gain_symbol="",
        derive=no_network,
        design_frequency=design_frequency,
        direct=solve,
        closed_form="f = 1/(ln 2·(RA + 2·RB)·C), duty (RA + RB)/(RA + 2·RB) for thresholds 2/3 and 1/3, Rd = td = 0",
        range_text="thresholds as shares of the supply, one delay for both edges; latches where Rd/(RA+Rd) reaches vl",
        schematic=SCHEMATIC,
        assumptions=(
            NO_START_QUESTION,
            "comparators' input currents left out; thresholds and delay have no temperature law of their own",
        ),
        recipe=("timer_astable", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = Family(name="timer_astable", title="Timer, astable", options=OPTIONS, roles=roles, build=build)
