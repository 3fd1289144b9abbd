"""Roles of a user's own circuit: what each value of a row is, in which SI unit, and what part it may belong to."""

from __future__ import annotations

from collections.abc import Sequence

from yieldosc.circuits.circuit import Role
from yieldosc.circuits.own_rows import Row
from yieldosc.circuits.roles import capacitor, coil_resistance, resistor


def own_roles(rows: Sequence[Row]) -> tuple[Role, ...]:
    """One role per named value, in order of appearance; a value that several rows share is one role."""
    found: dict[str, Role] = {}
    for row in rows:
        for role in _of_row(row):
            found.setdefault(role.name, role)
    return tuple(found.values())


def _of_row(row: Row) -> tuple[Role, ...]:
    names, where = row.values, f"of branch {row.name}"
    match row.kind:
        case "R":
            roles = [resistor(names[0], f"resistance {where}")]
        case "C":
            roles = [capacitor(names[0], f"capacitance {where}")]
        case "L":
            roles = [_coil(names[0], where), *(_series(name, row.name) for name in names[1:])]
        case "coupled":
            coupling = Role(names[2], "k", "1", "inductor", f"coupling {where}, 0 to below 1", main=False)
            roles = [*(_coil(n, where) for n in names[:2]), coupling, *(_series(n, row.name) for n in names[3:])]
        case "crystal":
            roles = _crystal(names, where)
        case "transconductance":
            roles = [Role(names[0], "gm", "S", "any", f"transconductance {where}", main=False)]
        case "gain":
            roles = [Role(names[0], "K", "1", "any", f"voltage gain {where}", main=False)]
            roles += [Role(name, "td", "s", "any", f"lag {where}", main=False) for name in names[1:]]
        case _:
            roles = [Role(n, "GBW", "Hz", "ic", f"gain–bandwidth product {where}", main=False) for n in names]
    return tuple(roles)


def _coil(name: str, where: str) -> Role:
    return Role(name, "L", "H", "inductor", f"inductance {where}")


def _series(name: str, branch: str) -> Role:
    role = coil_resistance(name, branch)
    return Role(role.name, role.trait, role.unit, role.kind, role.meaning, main=False)


def _crystal(names: tuple[str, ...], where: str) -> list[Role]:
    table = {
        "FS": ("Hz", f"series frequency {where}"),
        "FL": ("Hz", f"frequency {where} at its load"),
        "CL": ("F", f"load capacitance {where}"),
        "Cm": ("F", f"motional capacitance {where}"),
        "C0": ("F", f"shunt capacitance {where}"),
        "ESR": ("Ω", f"series resistance {where}"),
    }
    traits = {3: ("FS", "Cm", "ESR"), 4: ("FS", "Cm", "C0", "ESR"), 5: ("FL", "CL", "Cm", "C0", "ESR")}[len(names)]
    return [
        Role(
            name,
            trait,
            table[trait][0],
            "any" if trait == "CL" else "crystal",
            table[trait][1],
            condition=trait == "CL",
            main=trait in ("FL", "FS"),
        )
        for name, trait in zip(names, traits, strict=True)
    ]
