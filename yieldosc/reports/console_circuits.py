"""The list of circuits, and one circuit's options, roles, branch table, range and closed form."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import combinations

from rich.console import Console
from rich.text import Text

from yieldosc.circuits import registry
from yieldosc.circuits.circuit import Branch, Circuit, CircuitError, Family, Role
from yieldosc.quantities import format_quantity
from yieldosc.reports.terminal import hanging, heading, line, plain_table


def print_circuits(families: Sequence[Family], console: Console) -> None:
    """Name, title and options of each; what to type next."""
    table = plain_table(("name", ""), ("circuit", ""), ("options (the first choice is the default)", ""))
    for family in families:
        options = "; ".join(f"{o.name} = {' | '.join(o.choices)}" for o in family.options)
        table.add_row(family.name, family.title, options or "none")
    console.print(table)
    console.print()
    console.print(line("One circuit's roles, options and branch table: yieldosc circuits NAME", "dim"))


def print_circuit(family: Family, options: Mapping[str, str], console: Console) -> None:
    """Everything about one circuit with these options."""
    circuit = example(family, options)
    console.print(Text(f"{family.name}: {circuit.title}", "bold"))
    for row in circuit.schematic.strip("\n").splitlines():
        console.print(line_of_drawing(row), soft_wrap=True)
    hanging(console, "closed form:", circuit.closed_form, indent=0)
    hanging(console, "model range:", circuit.range_text or "no limit stated", indent=0)
    for assumption in circuit.assumptions:
        hanging(console, "assumed:    ", assumption, indent=0)
    _options(family, options, console)
    _roles(family.roles(options), console)
    _branches(circuit, console)


def line_of_drawing(row: str) -> Text:
    """A row of a schematic: its blanks count."""
    return Text(f"  {row}", "cyan", no_wrap=True)


def example(family: Family, options: Mapping[str, str]) -> Circuit:
    """The circuit with its required roles and as many of the others, in their order, as go together."""
    roles = family.roles(options)
    present = _least(family, options, roles)
    for role in roles:
        if role.name not in present and _buildable(family, options, present | {role.name}):
            present.add(role.name)
    return registry.build(family.name, options, present)


def _least(family: Family, options: Mapping[str, str], roles: Sequence[Role]) -> set[str]:
    """The required roles with the fewest optional ones that a circuit needs beside them ("RC, LCH or both")."""
    required = {r.name for r in roles if r.required}
    others = [r.name for r in roles if not r.required]
    for count in range(len(others) + 1):
        for chosen in combinations(others, count):
            if _buildable(family, options, required | set(chosen)):
                return required | set(chosen)
    return required


def _buildable(family: Family, options: Mapping[str, str], present: set[str]) -> bool:
    try:
        registry.build(family.name, options, present)
    except CircuitError:
        return False
    return True


def _options(family: Family, options: Mapping[str, str], console: Console) -> None:
    if not family.options:
        return
    heading(console, "Options", "--option KEY=VALUE; shown for the marked choices")
    table = plain_table(("option", ""), ("choices", ""), ("meaning", ""))
    for option in family.options:
        choices = ", ".join(f"[{c}]" if c == options.get(option.name, option.choices[0]) else c for c in option.choices)
        table.add_row(option.name, line(choices), option.meaning)
    console.print(table)


def _roles(roles: Sequence[Role], console: Console) -> None:
    heading(console, "Roles", "values the circuit needs; one unit: yieldosc unit NAME ROLE=VALUE …")
    table = plain_table(("role", ""), ("SI unit", ""), ("needed", ""), ("built-in law", ""), ("meaning", ""))
    for role in roles:
        unit = "—" if role.unit == "1" else role.unit
        table.add_row(role.name, unit, _needed(role), role.builtin_law or "", role.meaning)
    console.print(table)


def _needed(role: Role) -> str:
    if role.required:
        return "required"
    return "optional" if role.default is None else f"={format_quantity(role.default, role.unit)}"


def _branches(circuit: Circuit, console: Console) -> None:
    if not circuit.branches:
        return  # formulas in place of a network
    heading(console, "Branches", "with the roles that go together; the gain element is marked g")
    table = plain_table(("branch", ""), ("kind", ""), ("nodes", ""), ("values", ""), ("", ""))
    for b in circuit.branches:
        table.add_row(b.name, b.kind, nodes_text(b), ", ".join(b.symbols), "g" if b.gain_element else "")
    console.print(table)


def nodes_text(branch: Branch) -> str:
    """ "c → e", "c → e by b, e" where another pair of nodes controls it, "o by p, m" for an op-amp."""
    ends = 1 if branch.kind in ("opamp", "gain") else 2
    own, controls = " → ".join(branch.nodes[:ends]), ", ".join(branch.nodes[ends:])
    return f"{own} by {controls}" if controls else own


def circuit_dict(family: Family, options: Mapping[str, str]) -> dict[str, object]:
    """The same as data, for --json."""
    circuit = example(family, options)
    return {
        "name": family.name,
        "title": circuit.title,
        "options": [
            {"name": o.name, "choices": list(o.choices), "meaning": o.meaning,
             "chosen": options.get(o.name, o.choices[0])}
            for o in family.options
        ],
        "roles": [
            {"name": r.name, "si_unit": r.unit, "kind": r.kind, "meaning": r.meaning, "required": r.required,
             "default": r.default, "law": r.builtin_law}
            for r in family.roles(options)
        ],
        "branches": [
            {"name": b.name, "kind": b.kind, "nodes": list(b.nodes), "values": list(b.symbols), "gain": b.gain_element}
            for b in circuit.branches
        ],
        "range": circuit.range_text,
        "closed_form": circuit.closed_form,
        "assumptions": list(circuit.assumptions),
    }  # fmt: skip
