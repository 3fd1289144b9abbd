"""What a circuit is: roles, a branch table, one gain element, a bias check, a closed form, a range.

A circuit is a *value* built by a family for chosen options and present roles; a user's own branch table
builds the same value. Nothing here knows how it is solved.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Values = Mapping[str, Array]
BranchKind = Literal["R", "C", "L", "crystal", "coupled", "transconductance", "conductance", "opamp", "gain"]


class CircuitError(ValueError):
    """Options or roles that make no circuit; `problems` holds every reason, each with what to do."""

    def __init__(self, problems: Iterable[str]) -> None:
        self.problems = tuple(problems)
        super().__init__("; ".join(self.problems))


@dataclass(frozen=True, slots=True)
class Role:
    """One value that a circuit needs.

    kind: what sort of part it may be ("resistor", "capacitor", "inductor", "crystal", "transistor", "ic", "any");
    default: the value where the user gives none (None: required unless `optional`); builtin_law: the text of the
    temperature law that the stage applies itself, which a law of the user's own replaces.
    condition: an operating condition (CL of a crystal) that needs no tolerance.
    """

    name: str
    trait: str
    unit: str
    kind: str
    meaning: str
    default: float | None = None
    optional: bool = False
    builtin_law: str | None = None
    condition: bool = False
    main: bool = True  # the value that a BOM line carries (R, C, L, FL); False for traits such as ESR or hFE

    @property
    def may_be_zero(self) -> bool:
        """Resistances of coils, couplings and delays may be zero; a part's main value may not."""
        return self.trait in ("dcr", "k", "td", "Rd", "vl")

    @property
    def required(self) -> bool:
        return self.default is None and not self.optional


@dataclass(frozen=True, slots=True)
class Option:
    """A choice that changes the circuit; the first of `choices` is the default."""

    name: str
    choices: tuple[str, ...]
    meaning: str


@dataclass(frozen=True, slots=True)
class Branch:
    """A row of the branch table.

    nodes: (from, to) for R, C, L, conductance, crystal; (1+, 1−, 2+, 2−) for a coupled coil pair, windings aiding;
    (from, to, control+, control−) for transconductance, current flowing from → to inside the element;
    (out, control+, control−) for opamp and gain. symbols: R (r,), C (c,), L (l,) or (l, series r),
    crystal (Lm, Cm, Rm), coupled (L1, L2, k) or (L1, L2, k, r1, r2), transconductance (gm,), conductance (g,),
    opamp (tau = 1/(2π GBW),) or () for an ideal one, gain (K,) or (K, tau).
    """

    name: str
    kind: BranchKind
    nodes: tuple[str, ...]
    symbols: tuple[str, ...]
    gain_element: bool = False


@dataclass(frozen=True, slots=True)
class Derived:
    """Symbol values of n units at one temperature, and which of them have no bias."""

    symbols: dict[str, Array]
    no_bias: NDArray[np.bool_] | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Direct:
    """What a circuit without a network says of n units: arrays (n,), None where it does not apply.

    latches: never switches back, so that there is no oscillation; duty: share of a period at the high level;
    distortion: harmonics over the fundamental; amplitude_v: peak fundamental; phase_deg: of the fundamental, against
    the square wave's.
    """

    frequency_hz: Array
    latches: NDArray[np.bool_]
    duty: Array | None = None
    amplitude_v: Array | None = None
    distortion: Array | None = None
    phase_deg: Array | None = None


@dataclass(frozen=True, kw_only=True)
class Circuit:
    """A built circuit. `derive(values, temperature_c, own_law)` turns role values (n,) into branch symbols (n,);
    roles in `own_law` arrive with the user's temperature law applied and must not get the built-in one."""

    name: str
    title: str
    options: Mapping[str, str]
    roles: tuple[Role, ...]  # those that are present, defaults included
    branches: tuple[Branch, ...]
    gain_symbol: str  # empty where `direct` answers: such a circuit has no branches and no start-up question
    derive: Callable[[Values, float, frozenset[str]], Derived]
    design_frequency: Callable[[Values], Array]  # the closed form at the unit's own values [Hz]
    closed_form: str
    band: Callable[[Values], tuple[Array, Array]] | None = None  # centre [Hz] and half-width in |ln f|; None: ln 2
    gain_of: Callable[[Mapping[str, Array], Array], Array] | None = None  # (symbols, g) → gain; its ratio is the margin
    control_reach: Callable[[Mapping[str, Array], Values, Array], Array] | None = None  # (symbols, values, g_c) → reach
    direct: Callable[[Values, float], Direct] | None = None  # (values, temperature_c): formulas in place of a network
    crystal_arm: tuple[str, str, str] | None = None  # symbols (Lm, Cm, Rm) of the arm that it is meant to run on
    fixed_gain: bool = False  # other active rows beside the gain element: poles may grow before it does anything
    not_assessable: Callable[[Values, Array], NDArray[np.bool_]] | None = None  # (values, frequency_hz) → outside range
    range_text: str = ""
    schematic: str = ""
    assumptions: tuple[str, ...] = ()
    supply_role: str | None = None
    recipe: tuple[object, ...] = ()  # (family name, options, present roles): how another process builds it again

    def __reduce__(self) -> tuple[object, ...]:
        from yieldosc.circuits.registry import rebuild  # noqa: PLC0415 -- the registry imports this module

        return rebuild, self.recipe

    def role(self, name: str) -> Role:
        """The role of that name; KeyError where the circuit has none."""
        for role in self.roles:
            if role.name == name:
                return role
        raise KeyError(name)


def _none(options: Mapping[str, str]) -> list[str]:
    return []


@dataclass(frozen=True, kw_only=True)
class Family:
    """One file of `circuits`: what it may be built from. `roles(options)` lists every role that can be given.

    option_problems(options): choices that exclude each other whatever the roles, each with its reason.
    """

    name: str
    title: str
    options: tuple[Option, ...]
    roles: Callable[[Mapping[str, str]], tuple[Role, ...]]
    build: Callable[[Mapping[str, str], frozenset[str]], Circuit]
    option_problems: Callable[[Mapping[str, str]], list[str]] = _none
