"""Branch table → D(s) = A(s) + g B(s), expanded symbolically once, evaluated for n units as arrays.

The determinant is expanded row by row over sets of columns; a product that would hold one symbol twice is dropped
at once, since the determinant is linear in every admittance (a branch is a matrix of rank one). What is left are the
spanning-tree products, all of one sign where no coil pair is coupled, so nothing cancels when they are evaluated.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Branch
from yieldosc.circuits.compiled import Coefficients, compile_terms
from yieldosc.circuits.weights import (
    Contribution,
    Poly,
    contribution,
    dimensions,
    leakage_symbol,
    multiply,
    mutual_symbol,
)

Array = NDArray[np.float64]
GROUND = "gnd"
MOST_NODES = 12
MOST_TERMS = 20_000
Entry = dict[int, int]  # bit mask of symbols → integer coefficient


class NetworkError(ValueError):
    """A branch table that has no usable determinant; the text says why."""


@dataclass(frozen=True)
class Network:
    """A compiled branch table. `coefficients(symbols)` gives A and B, lowest power first, arrays or numbers."""

    symbols: tuple[str, ...]
    gain_symbol: str
    dimensions: Mapping[str, tuple[int, int]]
    branches: tuple[Branch, ...]
    terms_a: tuple[tuple[tuple[int, tuple[str, ...]], ...], ...]  # power → ((coefficient, symbol names), …)
    terms_b: tuple[tuple[tuple[int, tuple[str, ...]], ...], ...]
    coefficients: Coefficients

    def extended(self, symbols: Mapping[str, Array]) -> dict[str, Array]:
        """The symbols with M = k√(L1 L2) and L1 L2 (1 − k²) of every coupled pair added."""
        out = dict(symbols)
        for branch in self.branches:
            if branch.kind == "coupled":
                first, second, k = (symbols[name] for name in branch.symbols[:3])
                out[mutual_symbol(branch)] = k * np.sqrt(first * second)
                out[leakage_symbol(branch)] = first * second * (1 - k) * (1 + k)
        return out


def nodes_of(branches: Sequence[Branch]) -> tuple[str, ...]:
    """Nodes other than ground, in order of appearance."""
    seen = dict.fromkeys(node for branch in branches for node in branch.nodes)
    seen.pop(GROUND, None)
    return tuple(seen)


def _rows(branches: Sequence[Branch]) -> tuple[list[list[Entry]], list[tuple[int, int, Contribution]]]:
    """The nodal matrix in symbol bits, and (branch index, first bit, contribution) of every admittance branch."""
    nodes = nodes_of(branches)
    index = {node: i for i, node in enumerate(nodes)}
    matrix: list[list[Entry]] = [[{} for _ in nodes] for _ in nodes]
    driven = {branch.nodes[0] for branch in branches if branch.kind in ("opamp", "gain")}
    placed: list[tuple[int, int, Contribution]] = []
    bit = 0
    for number, branch in enumerate(branches):
        if branch.kind in ("opamp", "gain"):
            continue
        part = contribution(branch)
        placed.append((number, bit, part))
        for stamp in part.stamps:
            _stamp(matrix, index, driven, stamp.current, stamp.voltage, bit)
            bit += 1
    for number, branch in enumerate(branches):
        if branch.kind in ("opamp", "gain"):
            placed.append((number, bit, _controlled_row(matrix, index, branch, bit)))
            bit += 2
    return matrix, placed


def _stamp(
    matrix: list[list[Entry]],
    index: Mapping[str, int],
    driven: set[str],
    current: tuple[str, str],
    voltage: tuple[str, str],
    bit: int,
) -> None:
    for row_node, row_sign in ((current[0], 1), (current[1], -1)):
        if row_node == GROUND or row_node in driven:
            continue  # a driven node's current is whatever its source supplies
        for column_node, column_sign in ((voltage[0], 1), (voltage[1], -1)):
            if column_node != GROUND:
                entry = matrix[index[row_node]][index[column_node]]
                value = entry.get(1 << bit, 0) + row_sign * column_sign
                entry[1 << bit] = value
                if not value:
                    del entry[1 << bit]


def _controlled_row(
    matrix: list[list[Entry]], index: Mapping[str, int], branch: Branch, bit: int
) -> Contribution:
    """opamp: s τ v_q = v_p − v_m; gain: (1 + s τ) v_q = K (v_p − v_m). Bit 0: the left side, bit 1: the right."""
    out, plus, minus = branch.nodes
    row = matrix[index[out]]
    row[index[out]][1 << bit] = 1
    for node, sign in ((plus, -1), (minus, 1)):
        if node != GROUND:
            row[index[node]][1 << (bit + 1)] = row[index[node]].get(1 << (bit + 1), 0) + sign
    names = branch.symbols
    if branch.kind == "opamp":
        left: Poly = {(1, (names[0],)): 1} if names else {}
        right: Poly = {(0, ()): 1}
    else:
        left = {(0, ()): 1}
        if len(names) > 1:
            left[(1, (names[1],))] = 1
        right = {(0, (names[0],)): 1}
    choices = {frozenset({0}): left, frozenset({1}): right, frozenset({0, 1}): {}, frozenset(): {}}
    return Contribution((), choices)


def _determinant(matrix: list[list[Entry]]) -> Entry:
    """Determinant by rows over sets of columns; terms with a repeated symbol are dropped (they cancel)."""
    size = len(matrix)
    states: dict[int, Entry] = {0: {0: 1}}
    for row in matrix:
        following: dict[int, Entry] = {}
        for columns, poly in states.items():
            for column in range(size):
                if columns >> column & 1 or not row[column]:
                    continue
                sign = -1 if (columns >> (column + 1)).bit_count() % 2 else 1
                target = following.setdefault(columns | 1 << column, {})
                for mask_a, a in poly.items():
                    for mask_b, b in row[column].items():
                        if not mask_a & mask_b:
                            mask = mask_a | mask_b
                            target[mask] = target.get(mask, 0) + sign * a * b
        states = {c: {m: v for m, v in p.items() if v} for c, p in following.items()}
        if sum(len(p) for p in states.values()) > 40 * MOST_TERMS:
            raise NetworkError(too_large())
    return states.get((1 << size) - 1, {})


def too_large() -> str:
    """Why a table of more than MOST_TERMS terms is refused, and what helps."""
    return (
        f"the branch table expands to more than {MOST_TERMS:,} terms; leave out branches that do not matter "
        "at the oscillation frequency, or merge series and parallel parts"
    )


def _expand(determinant: Entry, placed: list[tuple[int, int, Contribution]]) -> Poly:
    total: Poly = {}
    for mask, coefficient in determinant.items():
        poly: Poly = {(0, ()): coefficient}
        for _, bit, part in placed:
            width = max(len(part.stamps), 2 if not part.stamps else 0)
            held = frozenset(i for i in range(width) if mask >> (bit + i) & 1)
            choice = part.choices.get(held, {})
            poly = multiply(poly, choice)
            if not poly:
                break
        for term, value in poly.items():
            total[term] = total.get(term, 0) + value
        if len(total) > MOST_TERMS:
            raise NetworkError(too_large())
    return {term: value for term, value in total.items() if value}


def expand(branches: Sequence[Branch], gain_symbol: str) -> tuple[Poly, Poly]:
    """A and B of the table, common powers of s removed; NetworkError where there is no oscillator to analyse."""
    nodes = nodes_of(branches)
    if len(nodes) > MOST_NODES:
        raise NetworkError(f"the branch table has {len(nodes)} nodes beside ground; at most {MOST_NODES} are accepted")
    matrix, placed = _rows(branches)
    total = _expand(_determinant(matrix), placed)
    if not total:
        raise NetworkError("the branch table has no determinant: a node is not connected, or a loop has no impedance")
    lowest = min(power for power, _ in total)
    a: Poly = {}
    b: Poly = {}
    for (power, names), value in total.items():
        held = names.count(gain_symbol)
        if held > 1:
            raise NetworkError(f"the determinant is not linear in the gain element {gain_symbol}")
        rest = tuple(name for name in names if name != gain_symbol)
        (b if held else a)[(power - lowest, rest)] = value
    if not b:
        raise NetworkError(f"the gain element {gain_symbol} has no effect: no loop goes through it")
    if sum(a.values()) < 0:
        a, b = ({t: -v for t, v in p.items()} for p in (a, b))
    return a, b


def _by_power(poly: Poly) -> tuple[tuple[tuple[int, tuple[str, ...]], ...], ...]:
    top = max((power for power, _ in poly), default=0)
    rows: list[list[tuple[int, tuple[str, ...]]]] = [[] for _ in range(top + 1)]
    for (power, names), value in sorted(poly.items()):
        rows[power].append((value, names))
    return tuple(tuple(row) for row in rows)


@lru_cache(maxsize=256)
def network(branches: tuple[Branch, ...], gain_symbol: str) -> Network:
    """Compile a branch table; cached, since one table serves every unit, corner and study."""
    a, b = expand(branches, gain_symbol)
    terms_a, terms_b = _by_power(a), _by_power(b)
    used = sorted({name for terms in (terms_a, terms_b) for row in terms for _, names in row for name in names})
    return Network(
        symbols=tuple(used),
        gain_symbol=gain_symbol,
        dimensions=dimensions(branches),
        branches=branches,
        terms_a=terms_a,
        terms_b=terms_b,
        coefficients=compile_terms(terms_a, terms_b, tuple(used)),
    )
