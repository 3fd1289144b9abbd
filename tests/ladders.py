"""Ladder and tank tables for published examples, written as branch tables, and the two numbers that books print."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np

from tests.handmade import circuit, solve
from yieldosc.circuits.circuit import Branch
from yieldosc.circuits.network import network


def ladder(kind: str, sections: int, *, buffered: bool = False) -> tuple[Branch, ...]:
    """Equal sections of R and C from o to an ideal amplifier v_o = K v_end; lag: R in series, lead: C in series."""
    rows: list[Branch] = []
    node = "o"
    for k in range(1, sections + 1):
        series, shunt = ("R", "C") if kind == "lag" else ("C", "R")
        rows.append(Branch(f"series {k}", series, (node, f"n{k}"), (series,)))
        rows.append(Branch(f"shunt {k}", shunt, (f"n{k}", "gnd"), (shunt,)))
        node = f"n{k}"
        if buffered and k < sections:
            rows.append(Branch(f"buffer {k}", "gain", (f"b{k}", node, "gnd"), ("one",)))
            node = f"b{k}"
    return (*rows, Branch("K", "gain", ("o", node, "gnd"), ("K",), True))


def crossing(table: Sequence[Branch], symbols: Mapping[str, float], gain: str, near_hz: float) -> tuple[float, float]:
    """(frequency [Hz], critical gain) of the mode near a frequency."""
    s = solve(circuit(table, gain, near_hz), symbols)
    return float(s.frequency_hz[0]), float(s.critical_gain[0])


def phase_shift(kind: str, sections: int, r: float, c: float, *, buffered: bool = False) -> tuple[float, float]:
    """(frequency [Hz], critical voltage gain) of an unloaded ladder around an inverting amplifier."""
    factor = {3: math.sqrt(6), 4: math.sqrt(10 / 7), 5: 0.74, 6: 0.51}[sections]
    if buffered:
        factor = math.sqrt(3)
    near = (factor if kind == "lag" else 1 / factor) / (2 * math.pi * r * c)
    symbols = {"R": r, "C": c, "K": -100.0, **({"one": 1.0} if buffered else {})}
    return crossing(ladder(kind, sections, buffered=buffered), symbols, "K", near)


def transfer(table: Sequence[Branch], symbols: Mapping[str, float], omega: float) -> complex:
    """v_end/v_o of a table closed by v_o = K v_end: D = A + K B vanishes where K H = 1, so H = −B/A."""
    made = network(tuple(table), "K")
    a, b = made.coefficients([symbols[name] for name in made.symbols])
    s = 1j * omega
    return complex(-np.polyval(b[::-1], s) / np.polyval(a[::-1], s))


def common_emitter_ladder(k: float, r: float, c: float, hie: float = 1e3) -> tuple[float, float]:
    """(frequency [Hz], critical hFE) of three lead sections from a collector with RC = k R; R3 + hie = R, hoe = 0."""
    table = (
        Branch("RC", "R", ("c", "gnd"), ("RC",)),
        Branch("C1", "C", ("c", "1"), ("C",)),
        Branch("R1", "R", ("1", "gnd"), ("R",)),
        Branch("C2", "C", ("1", "2"), ("C",)),
        Branch("R2", "R", ("2", "gnd"), ("R",)),
        Branch("C3", "C", ("2", "3"), ("C",)),
        Branch("R3", "R", ("3", "b"), ("R3",)),
        Branch("hie", "R", ("b", "gnd"), ("hie",)),
        Branch("gm", "transconductance", ("c", "gnd", "b", "gnd"), ("gm",), True),
    )
    near = 1 / (2 * math.pi * r * c * math.sqrt(6 + 4 * k))
    symbols = {"RC": k * r, "C": c, "R": r, "R3": r - hie, "hie": hie, "gm": 1.0}
    frequency, gm = crossing(table, symbols, "gm", near)
    return frequency, gm * hie


def fet_colpitts(inductance: float, c1: float, c2: float, r: float, c3: float | None = None) -> tuple[float, float]:
    """(frequency [Hz], critical gm·R): L (C3) from drain to gate, C1 at the drain, C2 at the gate, R at the drain."""
    coil = (Branch("L", "L", ("d", "y"), ("L",)), Branch("C3", "C", ("y", "g"), ("C3",)))
    table = (
        *(coil if c3 else (Branch("L", "L", ("d", "g"), ("L",)),)),
        Branch("C1", "C", ("d", "gnd"), ("C1",)),
        Branch("C2", "C", ("g", "gnd"), ("C2",)),
        Branch("R", "R", ("d", "gnd"), ("R",)),
        Branch("gm", "transconductance", ("d", "gnd", "g", "gnd"), ("gm",), True),
    )
    total = 1 / (1 / c1 + 1 / c2 + (1 / c3 if c3 else 0))
    symbols = {"L": inductance, "C1": c1, "C2": c2, "R": r, "gm": 1.0, **({"C3": c3} if c3 else {})}
    frequency, gm = crossing(table, symbols, "gm", 1 / (2 * math.pi * math.sqrt(inductance * total)))
    return frequency, gm * r


def fet_hartley(l1: float, l2: float, mutual: float, c: float, r: float) -> tuple[float, float]:
    """(frequency [Hz], critical gm·R): L1 at the drain, L2 at the gate, in series aiding; C drain to gate."""
    coils = (Branch("T", "coupled", ("d", "gnd", "gnd", "g"), ("L1", "L2", "k")),)
    if mutual == 0:
        coils = (Branch("L1", "L", ("d", "gnd"), ("L1",)), Branch("L2", "L", ("gnd", "g"), ("L2",)))
    table = (
        *coils,
        Branch("C", "C", ("d", "g"), ("C",)),
        Branch("R", "R", ("d", "gnd"), ("R",)),
        Branch("gm", "transconductance", ("d", "gnd", "g", "gnd"), ("gm",), True),
    )
    near = 1 / (2 * math.pi * math.sqrt((l1 + l2 + 2 * mutual) * c))
    symbols = {"L1": l1, "L2": l2, "C": c, "R": r, "gm": 1.0}
    if mutual:
        symbols["k"] = mutual / math.sqrt(l1 * l2)
    frequency, gm = crossing(table, symbols, "gm", near)
    return frequency, gm * r
