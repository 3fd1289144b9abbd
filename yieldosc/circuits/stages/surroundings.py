"""Branches that come with a transistor stage: emitter (source) network and the feed of c."""

from __future__ import annotations

import numpy as np

from yieldosc.circuits.circuit import Branch, CircuitError, Role, Values
from yieldosc.circuits.roles import capacitor, coil_resistance, inductor, resistor
from yieldosc.circuits.stages.bjt import bjt
from yieldosc.circuits.stages.stage import Resistance, Stage

BIPOLAR = bjt("divider")

FEED_ROLES = (
    resistor("RC", "feed resistor of c", optional=True),
    inductor("LCH", "feed choke of c", optional=True),
    coil_resistance("LCH_dcr", "LCH"),
    resistor("RL", "AC-coupled load from c to ground", optional=True),
    capacitor("CST", "stray capacitance from c to ground", optional=True, main=False),
)


def emitter_roles(stage: Stage) -> tuple[Role, ...]:
    """RE, RE2 (RS, RS2 of a field-effect stage) and CE."""
    first, second = stage.emitter
    word = stage.terminals[0]
    return (
        resistor(first, f"{word} resistor", optional=True),
        resistor(second, f"second {word} resistor, in series with {first}", optional=True),
        capacitor("CE", f"{word} by-pass capacitor", optional=True),
    )


def emitter_problems(stage: Stage, present: frozenset[str], *, bypass: bool = True) -> list[str]:
    """What is wrong with the parts in e."""
    first, second = stage.emitter
    problems = []
    if "CE" in present and not bypass:
        problems.append(f"CE would short the signal at the {stage.terminals[0]}; remove the CE role")
    if first not in present and (second in present or "CE" in present):
        problems.append(f"{second} and CE stand behind {first}: give {first}, or remove {second} and CE")
    return problems


def emitter_branches(
    present: frozenset[str], *, bypass: bool = True, stage: Stage = BIPOLAR
) -> tuple[str, tuple[Branch, ...]]:
    """Node of e and the branches from it: RE e–e2 and RE2 ∥ CE e2–gnd; CE refused where it would short the signal."""
    problems = emitter_problems(stage, present, bypass=bypass)
    if problems:
        raise CircuitError(problems)
    first, second = stage.emitter
    if first not in present:
        return "gnd", ()
    lower = "e2" if second in present else "gnd"
    rows = [Branch(first, "R", ("e", lower), (first,))]
    if second in present:
        rows.append(Branch(second, "R", ("e2", "gnd"), (second,)))
    if "CE" in present:
        rows.append(Branch("CE", "C", ("e2" if second in present else "e", "gnd"), ("CE",)))
    return "e", tuple(rows)


def feed_problems(present: frozenset[str]) -> list[str]:
    """A choke's resistance without the choke."""
    if "LCH_dcr" in present and "LCH" not in present:
        return ["LCH_dcr without LCH: give the choke, or remove its resistance"]
    return []


def feed_branches(present: frozenset[str], c: str = "c") -> tuple[Branch, ...]:
    """RC and LCH in series from c to the supply; RL and CST from c to ground."""
    rows = []
    if "LCH" in present:
        rows.append(Branch("LCH", "L", (c, "gnd"), ("LCH", "feed_series")))
    elif "RC" in present:
        rows.append(Branch("RC", "R", (c, "gnd"), ("RC",)))
    return (*rows, *load_branches(present, c))


def load_branches(present: frozenset[str], c: str = "c") -> tuple[Branch, ...]:
    """RL and CST from c to ground."""
    rows = []
    if "RL" in present:
        rows.append(Branch("RL", "R", (c, "gnd"), ("RL",)))
    if "CST" in present:
        rows.append(Branch("CST", "C", (c, "gnd"), ("CST",)))
    return tuple(rows)


def total_ohm(values: Values, *names: str) -> Resistance:
    """Sum of those of the named resistances that are present; 0 where none is."""
    total: Resistance = np.float64(0.0)
    for name in names:
        if name in values:
            total = total + values[name]
    return total


def feed_resistance_ohm(values: Values) -> Resistance:
    """DC resistance of the feed: RC + LCH_dcr; 0 where neither is given."""
    return total_ohm(values, "RC", "LCH_dcr")


def emitter_resistance_ohm(values: Values) -> Resistance:
    """DC resistance in e: RE + RE2, or RS + RS2 of a field-effect stage."""
    return total_ohm(values, "RE", "RE2", "RS", "RS2")
