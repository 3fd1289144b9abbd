"""What each kind of branch contributes to the nodal determinant.

A branch puts admittance symbols into the matrix: (symbol, current edge, voltage edge). A term of the determinant
either holds a symbol or does not; multiplied by the branch's own denominator, either case is a polynomial in s
of part values. So every term stays a product of part values (Kirchhoff 1847; two-graph form: Mayeda & Seshu 1957).
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from yieldosc.circuits.circuit import Branch

# A polynomial: (power of s, sorted symbol names) → integer coefficient.
Term = tuple[int, tuple[str, ...]]
Poly = dict[Term, int]
Edge = tuple[str, str]

ONE: Poly = {(0, ()): 1}


def multiply(left: Poly, right: Poly) -> Poly:
    """Product of two polynomials."""
    out: Poly = {}
    for (power_a, names_a), a in left.items():
        for (power_b, names_b), b in right.items():
            term = (power_a + power_b, tuple(sorted(names_a + names_b)))
            value = out.get(term, 0) + a * b
            if value:
                out[term] = value
            else:
                out.pop(term, None)
    return out


@dataclass(frozen=True, slots=True)
class Stamp:
    """Admittance symbol of a branch: current flows along `current` in proportion to the voltage along `voltage`."""

    current: Edge
    voltage: Edge


@dataclass(frozen=True, slots=True)
class Contribution:
    """Stamps of one branch, and the polynomial for every set of stamps that a term may hold."""

    stamps: tuple[Stamp, ...]
    choices: dict[frozenset[int], Poly]


def _two_terminal(branch: Branch, inside: Poly, outside: Poly) -> Contribution:
    edge = (branch.nodes[0], branch.nodes[1])
    return Contribution((Stamp(edge, edge),), {frozenset({0}): inside, frozenset(): outside})


def _coil(symbol: str, series: str | None) -> Poly:
    poly: Poly = {(1, (symbol,)): 1}
    if series is not None:
        poly[(0, (series,))] = 1
    return poly


def _coupled(branch: Branch) -> Contribution:
    """Y = [[z2, −sM], [−sM, z1]]/Δ with Δ = z1 z2 − s²M², and det Y = 1/Δ: minors stay polynomial."""
    a, b, c, d = branch.nodes
    first, second, _ = branch.symbols[:3]
    series = branch.symbols[3:] if len(branch.symbols) == 5 else (None, None)
    mutual, leakage = mutual_symbol(branch), leakage_symbol(branch)
    z1, z2 = _coil(first, series[0]), _coil(second, series[1])
    delta = multiply(z1, z2)
    del delta[(2, tuple(sorted((first, second))))]
    delta[(2, (leakage,))] = 1  # L1 L2 (1 − k²), kept as one positive symbol
    minus_sm: Poly = {(1, (mutual,)): -1}
    one, two = (a, b), (c, d)
    stamps = (Stamp(one, one), Stamp(two, two), Stamp(one, two), Stamp(two, one))
    choices: dict[frozenset[int], Poly] = {
        frozenset(): delta,
        frozenset({0}): z2,
        frozenset({1}): z1,
        frozenset({2}): minus_sm,
        frozenset({3}): minus_sm,
        frozenset({0, 1}): dict(ONE),
        frozenset({2, 3}): {},  # y11 y22 − y12 y21 = 1/Δ is already counted under {0, 1}
    }
    return Contribution(stamps, choices)


def mutual_symbol(branch: Branch) -> str:
    """Name of M = k √(L1 L2) of a coupled pair."""
    return f"{branch.name} mutual"


def leakage_symbol(branch: Branch) -> str:
    """Name of L1 L2 (1 − k²) of a coupled pair."""
    return f"{branch.name} leakage"


def contribution(branch: Branch) -> Contribution:  # noqa: PLR0911 -- one return per kind of branch reads best
    """Stamps and polynomials of a branch; op-amp and gain rows have their own rule in `network`."""
    names = branch.symbols
    match branch.kind:
        case "R":
            return _two_terminal(branch, ONE, {(0, (names[0],)): 1})
        case "conductance":
            return _two_terminal(branch, {(0, (names[0],)): 1}, ONE)
        case "C":
            return _two_terminal(branch, {(1, (names[0],)): 1}, ONE)
        case "L":
            return _two_terminal(branch, ONE, _coil(names[0], names[1] if len(names) > 1 else None))
        case "crystal":
            inductance, capacitance, resistance = names
            lossy: Poly = {
                (0, ()): 1,
                (1, tuple(sorted((resistance, capacitance)))): 1,
                (2, tuple(sorted((inductance, capacitance)))): 1,
            }
            return _two_terminal(branch, {(1, (capacitance,)): 1}, lossy)
        case "transconductance":
            stamp = Stamp((branch.nodes[0], branch.nodes[1]), (branch.nodes[2], branch.nodes[3]))
            return Contribution((stamp,), {frozenset({0}): {(0, (names[0],)): 1}, frozenset(): ONE})
        case "coupled":
            return _coupled(branch)
    raise ValueError(f"no admittance for a {branch.kind} row")


# Exponents of (reference resistance, reference angular frequency) that make a symbol a pure number:
# number = value · R0^-r · ω0^t.
DIMENSIONS: dict[str, tuple[tuple[int, int], ...]] = {
    "R": ((1, 0),),
    "conductance": ((-1, 0),),
    "C": ((-1, 1),),
    "L": ((1, 1), (1, 0)),
    "crystal": ((1, 1), (-1, 1), (1, 0)),
    "transconductance": ((-1, 0),),
    "coupled": ((1, 1), (1, 1), (0, 0), (1, 0), (1, 0)),
    "opamp": ((0, 1),),
    "gain": ((0, 0), (0, 1)),
}


def dimensions(branches: Iterable[Branch]) -> dict[str, tuple[int, int]]:
    """Symbol → exponents of R0 and ω0."""
    table: dict[str, tuple[int, int]] = {}
    for branch in branches:
        table.update(zip(branch.symbols, DIMENSIONS[branch.kind], strict=False))
        if branch.kind == "coupled":
            table[mutual_symbol(branch)] = (1, 1)
            table[leakage_symbol(branch)] = (2, 2)
    return table
