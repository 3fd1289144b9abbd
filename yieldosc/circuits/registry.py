"""The circuits that can be named: every file of this folder that holds a FAMILY. A new circuit is a new file."""

from __future__ import annotations

import pkgutil
from collections.abc import Iterable, Mapping
from importlib import import_module
from typing import Any

from yieldosc.circuits import own_circuit
from yieldosc.circuits.circuit import Circuit, CircuitError, Family

READING_ORDER = (
    "wien_bridge", "phase_shift", "twin_t", "quadrature", "colpitts", "hartley", "pierce", "crystal_colpitts",
    "crystal_common_base", "timer_astable", "schmitt_rc", "square_to_sine",
)  # fmt: skip


def _found() -> dict[str, Family]:
    """Name → family, in reading order; those that it does not name come after, by name."""
    folder, own = __name__.rpartition(".")[0], __name__.rpartition(".")[2]
    files = sorted(m.name for m in pkgutil.iter_modules(import_module(folder).__path__) if m.name != own)
    families = [getattr(import_module(f"{folder}.{file}"), "FAMILY", None) for file in files]
    made = {family.name: family for family in families if isinstance(family, Family)}
    return {name: made[name] for name in (*READING_ORDER, *sorted(set(made) - set(READING_ORDER)))}


FAMILIES: dict[str, Family] = _found()


def names() -> tuple[str, ...]:
    """Every circuit name, in the order in which they are listed."""
    return tuple(FAMILIES)


def family(name: str) -> Family:
    """The family of that name; CircuitError with the list where there is none."""
    wanted = name.strip().lower().replace("-", "_").replace(" ", "_")
    if wanted not in FAMILIES:
        raise CircuitError([f"there is no circuit named {name!r}; the circuits are {', '.join(FAMILIES)}"])
    return FAMILIES[wanted]


def complete_options(name: str, options: Mapping[str, str]) -> dict[str, str]:
    """Options with defaults filled in; CircuitError naming every unknown option or choice, or what excludes what."""
    known = {option.name: option for option in family(name).options}
    problems = []
    for key, choice in options.items():
        if key not in known:
            listed = ", ".join(known) or "none"
            problems.append(f"{name} has no option {key!r}; its options are: {listed}")
        elif choice not in known[key].choices:
            listed = ", ".join(known[key].choices)
            problems.append(f"option {key} of {name} is {choice!r}; choose one of {listed}")
    if problems:
        raise CircuitError(problems)
    complete = {key: options.get(key, option.choices[0]) for key, option in known.items()}
    problems = family(name).option_problems(complete)
    if problems:
        raise CircuitError(problems)
    return complete


def build(name: str, options: Mapping[str, str] | None = None, present: Iterable[str] = ()) -> Circuit:
    """The circuit for these options and roles; roles with a default are added, missing or unknown ones refused."""
    chosen = complete_options(name, options or {})
    made = family(name)
    known = {role.name: role for role in made.roles(chosen)}
    given = set(present)
    problems = [f"{made.name} has no role {role!r} with these options" for role in sorted(given - set(known))]
    missing = [role for role in known.values() if role.required and role.name not in given]
    problems += [f"role {role.name} is missing: {role.meaning}" for role in missing]
    given |= {role.name for role in known.values() if role.default is not None}
    try:
        circuit = made.build(chosen, frozenset(given & set(known)))
    except CircuitError as error:
        problems += error.problems
    if problems:
        raise CircuitError(problems)
    return circuit


def rebuild(name: str, *recipe: Any) -> Circuit:
    """A circuit from its recipe: options and present roles of a family, or rows and design frequency of an own one."""
    if name == own_circuit.NAME:
        return own_circuit.build_own(*recipe)
    options, present = recipe
    return build(name, dict(options), present)
