"""RC and RL ladders: their branches, and the frequency at which an unequal ladder turns 180 degrees.

A ladder's open-circuit ratio V0/Vn is a polynomial a0 + a1 v + a2 v² + … in v = s (lag) or v = 1/s (lead, rl). Its
imaginary part vanishes where a1 = a3 ω² (lag) or a1 ω² = a3 (lead): with three or four sections the ratio is then
negative. Equal sections give √6 and √(10/7).
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np

from yieldosc.circuits.circuit import Array, Branch

Linear = tuple[Array | float, Array | float]  # z0 + z1 v
LADDERS = ("lag", "lead", "rl")


def ladder_branches(
    ladder: str, source: str, nodes: Sequence[str], present: frozenset[str], *, buffered: bool
) -> tuple[Branch, ...]:
    """Sections from `source` through `nodes`; the shunt arm of the last lead section is the caller's.

    buffered: an ideal buffer from each node but the caller's last stands before the next section.
    """
    rows = []
    for i, (before, node) in enumerate(pairwise((source, *nodes)), start=1):
        start = f"u{i - 1}" if buffered and i > 1 else before
        if ladder == "lead":
            rows.append(Branch(f"C{i}", "C", (start, node), (f"C{i}",)))
            if i < len(nodes):
                rows.append(Branch(f"R{i}", "R", (node, "gnd"), (f"R{i}",)))
        else:
            rows.append(Branch(f"R{i}", "R", (start, node), (f"R{i}",)))
            if ladder == "lag":
                rows.append(Branch(f"C{i}", "C", (node, "gnd"), (f"C{i}",)))
            else:
                coil = (f"L{i}", f"L{i}_dcr") if f"L{i}_dcr" in present else (f"L{i}",)
                rows.append(Branch(f"L{i}", "L", (node, "gnd"), coil))
        if buffered and i < len(nodes):
            rows.append(buffer(i, node))
    return tuple(rows)


def buffer(i: int, node: str) -> Branch:
    """An ideal buffer of gain one from a node to u_i."""
    return Branch(f"buffer {i}", "gain", (f"u{i}", node, "gnd"), ("unity",))


def turning_frequency_hz(ladder: str, series: Sequence[Linear], shunt: Sequence[Linear], *, buffered: bool) -> Array:
    """Frequency [Hz] of 180 degrees; series impedances and shunt admittances of each section, linear in v."""
    voltage: list[Array | float] = [1.0]
    current: list[Array | float] = [0.0]
    if buffered:
        for z, y in zip(series, shunt, strict=True):
            voltage = _times(voltage, _sum([1.0], _times(list(z), list(y))))
    else:
        for z, y in zip(reversed(series), reversed(shunt), strict=True):
            current = _sum(current, _times(list(y), voltage))
            voltage = _sum(voltage, _times(list(z), current))
    ratio = np.asarray(voltage[1]) / np.asarray(voltage[3])
    omega = np.sqrt(ratio) if ladder == "lag" else 1 / np.sqrt(ratio)
    return np.asarray(omega / (2 * np.pi))


def _sum(left: list[Array | float], right: list[Array | float]) -> list[Array | float]:
    size = max(len(left), len(right))
    return [(left[k] if k < len(left) else 0.0) + (right[k] if k < len(right) else 0.0) for k in range(size)]


def _times(left: list[Array | float], right: list[Array | float]) -> list[Array | float]:
    out: list[Array | float] = [0.0] * (len(left) + len(right) - 1)
    for i, a in enumerate(left):
        for j, b in enumerate(right):
            out[i + j] = out[i + j] + a * b
    return out
