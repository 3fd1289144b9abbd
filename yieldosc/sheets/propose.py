"""Which part of a BOM may stand behind each role, with the reason and the doubt. Proposals, never decisions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from yieldosc.circuits.circuit import Role
from yieldosc.quantities import format_quantity
from yieldosc.sheets.bomline import BomLine

LARGEST_LOAD_F = 100e-12  # a crystal's load capacitors are picofarads
LEAST_FEEDBACK_OHM = 100e3


@dataclass(frozen=True, slots=True)
class Proposal:
    """A part for a role, or none; the reason says why, the doubt what a person must check."""

    role: str
    part: str | None
    reason: str
    doubt: str = ""


def propose(roles: Sequence[Role], lines: Sequence[BomLine], circuit: str) -> list[Proposal]:
    """One proposal per role that a part of the board can stand behind, in the order of the roles."""
    fitted = [line for line in lines if line.fitted]
    used: dict[str, str] = {}  # designator → role that took it
    made = []
    for role in roles:
        if role.condition:
            continue
        proposal = _for_role(role, fitted, used, circuit)
        if proposal.part is not None and role.main:
            used[proposal.part] = role.name
        made.append(proposal)
    return made


def _for_role(  # noqa: PLR0911 -- one return per sort of role reads best
    role: Role, lines: Sequence[BomLine], used: dict[str, str], circuit: str
) -> Proposal:
    if role.kind == "crystal":
        return _crystal(role, lines)
    if role.kind in ("transistor", "ic"):
        return _active(role, lines)
    candidates = [line for line in lines if line.kind == role.kind and line.designator not in used]
    if not role.main:
        owner = next((line for line in lines if used.get(line.designator) == role.name.split("_")[0]), None)
        if owner is not None:
            return Proposal(role.name, owner.designator, f"belongs to {owner.designator}")
        return Proposal(role.name, None, "a property of the board, of no part")
    if circuit == "pierce" and role.kind == "capacitor":
        return _load_capacitor(role, candidates)
    if circuit == "pierce" and role.name == "RF":
        return _feedback(role, candidates)
    return _by_name_or_value(role, candidates)


def _crystal(role: Role, lines: Sequence[BomLine]) -> Proposal:
    crystals = [line for line in lines if line.kind == "crystal"]
    if not crystals:
        return Proposal(role.name, None, "no crystal was found in the BOM")
    first = crystals[0]
    value = "frequency not stated" if first.value is None else format_quantity(first.value, "Hz", 8)
    others = ", ".join(line.designator for line in crystals[1:])
    doubt = f"the BOM also has {others}" if others else ""
    reason = f"the crystal of the BOM ({value})" if not others else f"the first of {len(crystals)} crystals ({value})"
    return Proposal(role.name, first.designator, reason, doubt)


def _active(role: Role, lines: Sequence[BomLine]) -> Proposal:
    active = [line for line in lines if line.kind == role.kind]
    if len(active) == 1:
        return Proposal(
            role.name, active[0].designator, f"the only {role.kind} of the BOM; figures from its data sheet"
        )
    if active:
        listed = ", ".join(line.designator for line in active[:6])
        return Proposal(role.name, active[0].designator, f"the first of several ({listed})", "check which one it is")
    return Proposal(role.name, None, "no such part was found in the BOM")


def _load_capacitor(role: Role, candidates: Sequence[BomLine]) -> Proposal:
    small = [line for line in candidates if line.value is not None and line.value <= LARGEST_LOAD_F]
    if not small:
        return Proposal(role.name, None, "no capacitor of up to 100 pF is left in the BOM")
    twins = [line for line in small if sum(other.value == line.value for other in small) >= 2]
    chosen = (twins or small)[0]
    value = format_quantity(chosen.value or 0.0, "F")
    if len(small) > 2 or (len(small) == 2 and not twins):
        listed = ", ".join(line.designator for line in small)
        return Proposal(
            role.name, chosen.designator, f"{value}, small enough for a load capacitor", f"others fit: {listed}"
        )
    return Proposal(role.name, chosen.designator, f"{value}, small enough for a load capacitor")


def _feedback(role: Role, candidates: Sequence[BomLine]) -> Proposal:
    large = [line for line in candidates if line.value is not None and line.value >= LEAST_FEEDBACK_OHM]
    if not large:
        return Proposal(
            role.name, None, "no resistor of 100 kΩ or more: the controller may hold it inside; its data sheet gives it"
        )
    chosen = max(large, key=lambda line: line.value or 0.0)
    value = format_quantity(chosen.value or 0.0, "Ω")
    doubt = "" if len(large) == 1 else f"others fit: {', '.join(line.designator for line in large)}"
    return Proposal(role.name, chosen.designator, f"{value}, large enough to lie across an inverter", doubt)


def _by_name_or_value(role: Role, candidates: Sequence[BomLine]) -> Proposal:
    same = [line for line in candidates if line.designator.upper() == role.name.upper()]
    if same:
        return Proposal(
            role.name, same[0].designator, "bears the role's name", "a name alone is no proof: check the schematic"
        )
    if len(candidates) == 1:
        return Proposal(
            role.name, candidates[0].designator, f"the only {role.kind} left in the BOM", "check the schematic"
        )
    if not candidates:
        return Proposal(role.name, None, f"no {role.kind} is left in the BOM")
    listed = ", ".join(line.designator for line in candidates[:8])
    return Proposal(
        role.name, None, f"{len(candidates)} parts are possible: {listed}{' …' if len(candidates) > 8 else ''}"
    )
