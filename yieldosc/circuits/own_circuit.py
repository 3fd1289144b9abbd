"""A circuit from the user's own branch table: same derivation, same solver as the built-in ones.

Order of nodes: R, C, L, crystal from–to; coupled from–to the first winding, control+–control- the second, aiding;
transconductance: current gm (v+ − v−) flows from → to inside the element; gain and opamp drive their from node.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from yieldosc.circuits.circuit import Array, Branch, BranchKind, Circuit, CircuitError, Derived, Role, Values
from yieldosc.circuits.crystal import motional_inductance_h, series_frequency_hz
from yieldosc.circuits.network import GROUND, MOST_NODES, MOST_TERMS, NetworkError, expand, nodes_of, too_large
from yieldosc.circuits.own_roles import own_roles
from yieldosc.circuits.own_rows import Row, parse_rows
from yieldosc.circuits.term_count import most_terms

__all__ = ["NAME", "Row", "build_own", "parse_rows"]
NAME = "own_circuit"
EXPANDABLE = 25 * MOST_TERMS  # a bound beyond this is refused without an expansion, which would take seconds
KIND_OF: dict[str, BranchKind] = {
    "R": "R",
    "C": "C",
    "L": "L",
    "coupled": "coupled",
    "transconductance": "transconductance",
    "gain": "gain",
    "opamp": "opamp",
}
NEAR_CRYSTAL = 0.02  # |ln f| between the design frequency and a crystal's below which it is a crystal oscillator


@dataclass(frozen=True, slots=True)
class _Quartz:
    """A crystal row: its value roles by trait, and the symbol of its motional inductance."""

    roles: Mapping[str, str]
    inductance: str

    def values(self, values: Values) -> dict[str, Array]:
        return {trait: values[role] for trait, role in self.roles.items()}


def build_own(rows: Sequence[Row], design_frequency_hz: float) -> Circuit:
    """The circuit of a branch table; CircuitError with every reason where there is none."""
    rows = tuple(rows)
    problems = _problems(rows, design_frequency_hz)
    if problems:
        raise CircuitError(problems)
    roles = own_roles(rows)
    crystals = tuple(_quartz(row) for row in rows if row.kind == "crystal")
    branches = tuple(branch for row in rows for branch in _branches(row))
    gain = next(row for row in rows if row.gain_element)
    _check_size(branches, gain.values[0])
    taus = {f"{row.name} tau": row.values[0] for row in rows if row.kind == "opamp" and row.values}
    parts = {name for row in branches for name in row.symbols} - set(taus) - {x.inductance for x in crystals}

    def derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
        symbols = {name: values[name] for name in parts}
        symbols |= {name: 1 / (2 * np.pi * values[role]) for name, role in taus.items()}
        for quartz in crystals:
            own = quartz.values(values)
            symbols[quartz.inductance] = motional_inductance_h(series_frequency_hz(own), own["Cm"])
        return Derived(symbols)

    def design_frequency(values: Values) -> Array:
        return np.asarray(float(design_frequency_hz))

    def band(values: Values) -> tuple[Array, Array]:
        return _band([quartz.values(values) for quartz in crystals], design_frequency_hz)

    def over(symbols: Mapping[str, Array], g: Array) -> Array:
        return 1 + g / sum((symbols[name] for name in gain.gain_over), start=np.float64(0.0))

    return Circuit(
        name=NAME,
        title="Own circuit",
        options={},
        roles=roles,
        branches=branches,
        gain_symbol=gain.values[0],
        derive=derive,
        design_frequency=design_frequency,
        closed_form=f"none: the design frequency of {design_frequency_hz:g} Hz tells which mode is meant",
        band=band if crystals else None,
        crystal_arm=(crystals[0].inductance, crystals[0].roles["Cm"], crystals[0].roles["ESR"]) if crystals else None,
        fixed_gain=sum(row.kind in ("transconductance", "gain", "opamp") for row in rows) > 1,
        gain_of=over if gain.gain_over else None,
        range_text="none stated: the branch table is taken as it is",
        schematic=_drawing(rows),
        assumptions=(
            "the branch table is the circuit: no bias, no temperature law and no parasitic that it does not hold",
            f"the gain element is {gain.name}; other active rows keep their gain",
        ),
        recipe=(NAME, rows, float(design_frequency_hz)),
    )


def _quartz(row: Row) -> _Quartz:
    traits = {3: ("FS", "Cm", "ESR"), 4: ("FS", "Cm", "C0", "ESR"), 5: ("FL", "CL", "Cm", "C0", "ESR")}
    return _Quartz(dict(zip(traits[len(row.values)], row.values, strict=True)), f"{row.name} Lm")


def _branches(row: Row) -> tuple[Branch, ...]:
    ends = (row.start, row.end)
    controls = (row.control_plus, row.control_minus)
    if row.kind == "crystal":
        quartz = _quartz(row)
        arm = Branch(row.name, "crystal", ends, (quartz.inductance, quartz.roles["Cm"], quartz.roles["ESR"]))
        shunt = quartz.roles.get("C0")
        return (arm, Branch(f"{row.name} C0", "C", ends, (shunt,))) if shunt else (arm,)
    kind: BranchKind = KIND_OF[row.kind]
    nodes = {"opamp": (row.start, *controls), "gain": (row.start, *controls)}.get(kind, (*ends, *controls))
    symbols = row.values
    if kind == "opamp" and row.values:
        symbols = (f"{row.name} tau",)
    return (Branch(row.name, kind, nodes if row.control_plus else ends, symbols, row.gain_element),)


def _band(crystals: Sequence[Values], design_hz: float) -> tuple[Array, Array]:
    """± Cm/C0 around the nearest crystal's series frequency where the design frequency is near one, else a factor 2."""
    centre, half = np.asarray(float(design_hz)), np.asarray(np.log(2.0))
    nearest = np.asarray(NEAR_CRYSTAL)
    for own in crystals:
        if "C0" not in own:
            continue
        fs = series_frequency_hz(own)
        distance = np.abs(np.log(fs / design_hz))
        closer = distance < nearest
        centre, half = np.where(closer, fs, centre), np.where(closer, own["Cm"] / own["C0"], half)
        nearest = np.where(closer, distance, nearest)
    return centre, half


def _problems(rows: tuple[Row, ...], design_frequency_hz: float) -> list[str]:
    problems = []
    if not (np.isfinite(design_frequency_hz) and design_frequency_hz > 0):
        problems.append(f"the design frequency must be above 0 Hz; found {design_frequency_hz!r}")
    if not rows:
        return [*problems, "the branch table is empty: give one row per branch"]
    marked = [row.name for row in rows if row.gain_element]
    if not marked:
        problems.append("no branch is marked as the gain element: mark the one whose gain falls as the amplitude grows")
    if len(marked) > 1:
        problems.append(f"{len(marked)} branches are marked as the gain element ({', '.join(marked)}): mark one")
    known = {role for row in rows if row.kind == "R" for role in row.values}
    for row in rows:
        for role in row.gain_over:
            if role not in known:
                problems.append(f"branch {row.name}: {role} under g is not the value of an R branch")
    return problems + _node_problems(rows) + _role_problems(rows)


def _node_problems(rows: tuple[Row, ...]) -> list[str]:
    """Nodes that no branch joins to gnd, and nodes that one branch alone touches."""
    group: dict[str, str] = {GROUND: GROUND}
    touched: dict[str, list[str]] = {}

    def root(node: str) -> str:
        group.setdefault(node, node)
        while group[node] != node:
            node = group[node]
        return node

    for row in rows:
        joins = [(row.start, row.end)]
        if row.kind == "coupled":
            joins.append((row.control_plus, row.control_minus))
        elif row.kind == "transconductance":
            joins = []  # a current source holds no node
        for first, second in joins:
            group[root(first)] = root(second)
        for node in dict.fromkeys((row.start, row.end, row.control_plus, row.control_minus)):
            if node not in ("", GROUND):
                touched.setdefault(node, []).append(row.name)
    problems = [
        f"node {node} is touched by branch {names[0]} only: connect it, or remove the branch"
        for node, names in touched.items()
        if len(names) == 1
    ]
    loose = [node for node in touched if len(touched[node]) > 1 and root(node) != root(GROUND)]
    if loose:
        word = "node" if len(loose) == 1 else "nodes"
        problems.append(f"{word} {', '.join(loose)}: no R, L, C, crystal or amplifier leads to gnd; connect them")
    return problems


def _role_problems(rows: tuple[Row, ...]) -> list[str]:
    """A value that two rows use as different things."""
    seen: dict[str, Role] = {}
    problems = []
    for row in rows:
        for role in own_roles((row,)):
            other = seen.setdefault(role.name, role)
            if other.unit != role.unit:
                problems.append(
                    f"branch {row.name}: the value {role.name} is in {role.unit} here and in {other.unit} elsewhere; "
                    "give it another name"
                )
    return problems


def _check_size(branches: tuple[Branch, ...], gain_symbol: str) -> None:
    """Count before expanding; CircuitError where the table is too large or has no usable determinant."""
    count = len(nodes_of(branches))
    if count <= MOST_NODES and most_terms(branches) > EXPANDABLE:
        raise CircuitError([too_large()])
    try:
        a, b = expand(branches, gain_symbol)
    except NetworkError as error:
        raise CircuitError([str(error)]) from None
    powers = {power % 2 for power, _ in (*a, *b)}
    if len(powers) == 1:
        raise CircuitError(
            ["no frequency at which the gain element could start an oscillation: the table turns no phase; "
             "it needs capacitors or coils beside resistances"]
        )  # fmt: skip


def _drawing(rows: tuple[Row, ...]) -> str:
    """The table in text: there is no drawing of a user's own circuit."""
    lines = []
    for row in rows:
        controls = f" by {row.control_plus}, {row.control_minus}" if row.control_plus else ""
        mark = "  g" if row.gain_element else ""
        lines.append(f"      {row.name}: {row.kind}  {row.start} ── {row.end}{controls}{mark}")
    return "\n" + "\n".join(lines) + "\n"
