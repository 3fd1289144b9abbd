"""How many terms a branch table's determinant can have, counted before it is expanded.

Every term is a set of branches that is a spanning tree of the current graph and of the voltage graph (Mayeda & Seshu
1957), times a choice among each branch's own terms. Either graph's trees are counted by a determinant (Kirchhoff
1847), so the smaller count is an upper bound; exact for tables without active rows.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Branch
from yieldosc.circuits.network import GROUND, nodes_of

# terms inside a tree, terms outside it
WEIGHTS: dict[str, tuple[float, float]] = {
    "R": (1, 1),
    "C": (1, 1),
    "conductance": (1, 1),
    "L": (1, 2),
    "crystal": (1, 3),
    "transconductance": (1, 1),
    "coupled": (1.5, 2),  # bounds the pair's 4, 3, 3 and 1 terms as products of one weight per winding
}


def most_terms(branches: Sequence[Branch]) -> float:
    """Upper bound of the number of terms."""
    return min(_trees(branches, controls=False), _trees(branches, controls=True))


def _trees(branches: Sequence[Branch], *, controls: bool) -> float:
    """Weighted spanning trees of the current graph, or of the voltage graph (controls)."""
    joined = {GROUND: GROUND}
    scale = 1.0
    edges: list[tuple[str, str, float]] = []
    for row in branches:
        if row.kind in ("opamp", "gain"):
            scale *= 1 + len(row.symbols)  # terms of both sides of its row
            if controls:
                edges += [(row.nodes[0], GROUND, 1.0), (row.nodes[1], row.nodes[2], 1.0)]
            else:
                joined[row.nodes[0]] = GROUND  # its source supplies whatever current flows
            continue
        inside, outside = WEIGHTS[row.kind]
        pairs = [row.nodes[:2], row.nodes[2:]] if row.kind == "coupled" else [row.nodes[:2]]
        if row.kind == "transconductance" and controls:
            pairs = [row.nodes[2:]]
        for first, second in pairs:
            scale *= outside
            edges.append((first, second, inside / outside))
    return scale * _determinant(branches, joined, edges)


def _determinant(
    branches: Sequence[Branch], joined: dict[str, str], edges: Sequence[tuple[str, str, float]]
) -> float:
    index = {node: i for i, node in enumerate(n for n in nodes_of(branches) if n not in joined)}
    matrix: NDArray[np.float64] = np.zeros((len(index), len(index)))
    for first, second, weight in edges:
        ends = [index[node] for node in (first, second) if joined.get(node, node) != GROUND]
        if first == second:
            continue
        for i in ends:
            matrix[i, i] += weight
        if len(ends) == 2:
            matrix[ends[0], ends[1]] -= weight
            matrix[ends[1], ends[0]] -= weight
    return float(np.linalg.det(matrix)) if index else 1.0
