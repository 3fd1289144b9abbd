"""Which part of a BOM may stand behind each role, with the reason and the doubt. Proposals, never decisions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from yieldosc.circuits.circuit import Role
from yieldosc.quantities import format_quantity
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.hints import lamp, named_so

LARGEST_LOAD_F = 100e-12  # a crystal's load capacitors are picofarads
LEAST_FEEDBACK_OHM = 100e3
BRIDGE_RATIO = (1.9, 3.5)  # RF/RG of a bridge that needs a gain of 3
CHECK = "check the schematic"
_EQUAL = {  # roles that a usual design makes equal
    "wien_bridge": (("R1", "R2"), ("C1", "C2")),
    "twin_t": (("R1", "R2"), ("C1", "C2")),
    "quadrature": (("R1", "R2", "R3"), ("C1", "C2", "C3")),
    "phase_shift": (("R1", "R2", "R3", "R4"), ("C1", "C2", "C3", "C4"), ("L1", "L2", "L3", "L4")),
}


@dataclass(frozen=True, slots=True)
class Proposal:
    """A part for a role, or none; the reason says why, the doubt what a person must check.

    wanted: the role has a default or is optional, and yet something speaks for it. own_value: the value of the BOM line
    is not the role's own (a winding of a tapped coil).
    """

    role: str
    part: str | None
    reason: str
    doubt: str = ""
    wanted: bool = False
    own_value: bool = False


def propose(roles: Sequence[Role], lines: Sequence[BomLine], circuit: str) -> list[Proposal]:
    """One proposal per role that a part of the board can stand behind, in the order of the roles."""
    return _Proposer(roles, [line for line in lines if line.fitted], circuit).all()


class _Proposer:
    """Goes through the roles; a part that one main role took is not offered to the next."""

    def __init__(self, roles: Sequence[Role], lines: list[BomLine], circuit: str) -> None:
        self.roles, self.lines, self.circuit = roles, lines, circuit
        self.used: dict[str, str] = {}  # designator → role that took it
        self.made: dict[str, Proposal] = {}

    def all(self) -> list[Proposal]:
        self._equal_parts()
        if self.circuit == "wien_bridge":
            self._gain_pair()
        if self.circuit == "hartley":
            self._tapped_coil()
        for role in self.roles:
            if not role.condition and role.name not in self.made:
                self._take(role, self._for_role(role))
        return [self.made[role.name] for role in self.roles if role.name in self.made]

    def _take(self, role: Role, proposal: Proposal) -> None:
        firm = role.required or proposal.wanted or not proposal.doubt
        if proposal.part is not None and role.main and firm:
            self.used[proposal.part] = role.name
        self.made[role.name] = proposal

    def _left(self, kind: str) -> list[BomLine]:
        return [line for line in self.lines if line.kind == kind and line.designator not in self.used]

    # -- whole groups ---------------------------------------------------------------------------------------------

    def _equal_parts(self) -> None:
        """Roles that are equal by design, where exactly one value of the BOM occurs that often."""
        by_name = {role.name: role for role in self.roles}
        for names in _EQUAL.get(self.circuit, ()):
            group = [by_name[name] for name in names if name in by_name]
            if not group:
                continue
            times: dict[float, list[BomLine]] = {}
            for line in self._left(group[0].kind):
                if line.value:
                    times.setdefault(line.value, []).append(line)
            fitting = [same for same in times.values() if len(same) == len(group)]
            if len(fitting) != 1:
                continue
            value = format_quantity(fitting[0][0].value or 0.0, fitting[0][0].si_unit)
            for role, line in zip(group, fitting[0], strict=True):
                reason = f"one of {len(group)} equal {role.kind}s ({value}), equal by design"
                self._take(role, Proposal(role.name, line.designator, reason, CHECK))

    def _gain_pair(self) -> None:
        """RF and RG, where one pair of the resistors that are left sets a gain of about 3."""
        left = [line for line in self._left("resistor") if line.value]
        low, high = BRIDGE_RATIO
        pairs = [(f, g) for f in left for g in left if f is not g and low <= (f.value or 0) / (g.value or 1) <= high]
        if len(pairs) != 1:
            return
        by_name = {role.name: role for role in self.roles}
        for name, line in zip(("RF", "RG"), pairs[0], strict=True):
            reason = f"{format_quantity(line.value or 0.0, 'Ω')}: with the other it sets a gain of about 3"
            self._take(by_name[name], Proposal(name, line.designator, reason, CHECK))

    def _tapped_coil(self) -> None:
        """Both windings of the only coil: what its line states is of both in series."""
        coils = self._left("inductor")
        if len(coils) != 1:
            return
        coil = coils[0].designator
        for role in self.roles:
            if role.name in ("L1", "L2"):
                reason, doubt = "a winding of the only coil of the BOM", "give the inductance of this winding alone"
                self._take(role, Proposal(role.name, coil, reason, doubt, own_value=True))
            elif role.name == "k":
                self.made["k"] = Proposal("k", coil, "coupling of the two windings", wanted=True)

    # -- single roles ---------------------------------------------------------------------------------------------

    def _for_role(self, role: Role) -> Proposal:  # noqa: PLR0911 -- one return per sort of role reads best
        if role.kind == "crystal":
            return _crystal(role, self.lines)
        if role.kind in ("transistor", "ic"):
            return _active(role, [line for line in self.lines if line.kind == role.kind])
        if role.name in ("RS_start", "RS_full"):
            return _lamp(role, self.lines)
        if not role.main or role.kind == "any":
            return self._belongs(role)
        if self.circuit == "pierce" and role.kind == "capacitor":
            return _load_capacitor(role, self._left(role.kind))
        if self.circuit == "pierce" and role.name == "RF":
            return _feedback(role, self._left(role.kind))
        return _by_name_or_value(role, self._left(role.kind))

    def _belongs(self, role: Role) -> Proposal:
        """A figure of a part that another role took (the resistance of a coil), or of no part."""
        owner = self.made.get(role.name.split("_")[0])
        if owner is None or owner.part is None or "_" not in role.name:
            return Proposal(role.name, None, "a property of the board, of no part")
        wanted = role.trait == "dcr" and owner.part in self.used
        return Proposal(role.name, owner.part, f"belongs to {owner.part}", wanted=wanted)


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


_SPOKEN_FOR = ("GBW", "fT", "vh", "vl")  # figures that matter, though the model would do without


def _active(role: Role, active: list[BomLine]) -> Proposal:
    wanted = role.trait in _SPOKEN_FOR
    if len(active) == 1:
        reason = f"the only {role.kind} of the BOM; figures from its data sheet"
        return Proposal(role.name, active[0].designator, reason, wanted=wanted)
    called = named_so(role.trait, active)
    if len(called) == 1:
        reason = f"the only {role.kind} whose line names such a part; figures from its data sheet"
        return Proposal(role.name, called[0].designator, reason, wanted=wanted)
    if active:
        first = (called or active)[0]
        listed = ", ".join(line.designator for line in (called or active)[:6])
        reason = f"the first of several ({listed})"
        return Proposal(role.name, first.designator, reason, "check which one it is", wanted=wanted and bool(called))
    return Proposal(role.name, None, "no such part was found in the BOM")


def _lamp(role: Role, lines: list[BomLine]) -> Proposal:
    found = lamp(lines)
    if found is None:
        return Proposal(role.name, None, "no lamp and no thermistor was found in the BOM")
    doubt = "delete the rows RS_start and RS_full where it stabilises nothing"
    return Proposal(role.name, found.designator, "its line names a lamp or a thermistor", doubt, wanted=True)


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
        spoken = not any(c.isdigit() for c in role.name)  # RE, CC: a name that nobody gives by counting
        return Proposal(
            role.name, same[0].designator, "bears the role's name", "a name alone is no proof: check the schematic",
            wanted=spoken,
        )  # fmt: skip
    if len(candidates) == 1:
        return Proposal(role.name, candidates[0].designator, f"the only {role.kind} left in the BOM", CHECK)
    if not candidates:
        return Proposal(role.name, None, f"no {role.kind} is left in the BOM")
    listed = ", ".join(_with_value(line) for line in candidates[:8])
    return Proposal(
        role.name, None, f"{len(candidates)} parts are possible: {listed}{' …' if len(candidates) > 8 else ''}"
    )


def _with_value(line: BomLine) -> str:
    return line.designator if line.value is None else f"{line.designator} {format_quantity(line.value, line.si_unit)}"
