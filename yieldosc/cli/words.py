"""Words of the command line → options, values, numbers; every bad word is named at once."""

from __future__ import annotations

from collections.abc import Sequence

from yieldosc.circuits import registry
from yieldosc.circuits.circuit import CircuitError
from yieldosc.errors import Finding, InputError, refusal
from yieldosc.quantities import QuantityError, parse_quantity
from yieldosc.unit import NamedCircuit

MOST_UNITS = 10_000_000_000


def options_of(circuit: NamedCircuit, words: Sequence[str]) -> dict[str, str]:
    """KEY=VALUE words → complete options of the circuit."""
    given: dict[str, str] = {}
    problems = []
    for word in words:
        key, separator, value = word.partition("=")
        if not separator or not key or not value:
            problems.append(Finding("error", "option-form", f"--option {word}: write it as KEY=VALUE"))
        elif key in given:
            problems.append(Finding("error", "option-twice", f"--option {key} is given twice; keep one"))
        given[key] = value
    if problems:
        raise InputError(problems)
    try:
        return registry.complete_options(circuit.name, given)
    except CircuitError as error:
        raise InputError(Finding("error", "unknown-option", text) for text in error.problems) from None


def unit_values(circuit: NamedCircuit, options: dict[str, str], words: Sequence[str]) -> dict[str, float]:
    """ROLE=VALUE words → role → SI value; role names match regardless of case where that is unambiguous."""
    roles = {role.name: role for role in circuit.roles(options)}
    folded: dict[str, list[str]] = {}
    for name in roles:
        folded.setdefault(name.casefold(), []).append(name)
    values: dict[str, float] = {}
    problems = []
    for word in words:
        key, separator, text = word.partition("=")
        if not separator or not key or not text:
            problems.append(Finding("error", "value-form", f"{word}: write it as ROLE=VALUE, for example R1=4k7"))
            continue
        matches = [key] if key in roles else folded.get(key.casefold(), [])
        if len(matches) != 1:
            listed = ", ".join(roles)
            problems.append(
                Finding("error", "unknown-role", f"{circuit.name} has no role {key!r}; its roles are {listed}")
            )
        elif matches[0] in values:
            problems.append(Finding("error", "role-twice", f"{matches[0]} is given twice; keep one value"))
        else:
            try:
                values[matches[0]] = parse_quantity(text, roles[matches[0]].unit).value
            except QuantityError as error:
                problems.append(Finding("error", "unreadable-value", f"{word}: {error}"))
    if problems:
        raise InputError(problems)
    return values


def whole_number(option: str, text: str, *, least: int, most: int) -> int:
    """A whole number in its range, or an InputError that states the range."""
    try:
        number = int(text.replace("_", "").replace(",", ""))
    except ValueError:
        number = least - 1
    if not least <= number <= most:
        raise refusal("number", f"{option} {text}: write a whole number from {least} to {most}")
    return number
