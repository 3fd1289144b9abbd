"""Short makers of roles, so that a circuit's file reads like its parts list."""

from __future__ import annotations

from yieldosc.circuits.circuit import Role


def resistor(
    name: str, meaning: str, *, default: float | None = None, optional: bool = False, main: bool = True
) -> Role:
    return Role(name, "R", "Ω", "resistor", meaning, default, optional, main=main)


def capacitor(
    name: str, meaning: str, *, default: float | None = None, optional: bool = False, main: bool = True
) -> Role:
    return Role(name, "C", "F", "capacitor", meaning, default, optional, main=main)


def inductor(name: str, meaning: str, *, optional: bool = False) -> Role:
    return Role(name, "L", "H", "inductor", meaning, None, optional)


def coil_resistance(name: str, coil: str) -> Role:
    return Role(name, "dcr", "Ω", "inductor", f"series resistance of {coil}", None, True, main=False)


def device(
    name: str,
    unit: str,
    meaning: str,
    *,
    default: float | None = None,
    optional: bool = False,
    law: str | None = None,
    kind: str = "transistor",
) -> Role:
    """A data-sheet figure of an active part, with the temperature law that the stage applies itself."""
    return Role(name, name, unit, kind, meaning, default, optional, builtin_law=law, main=False)


def supply(name: str) -> Role:
    meaning = "supply voltage; its corners come from the Design sheet"
    return Role(name, name, "V", "any", meaning, condition=True, main=False)
