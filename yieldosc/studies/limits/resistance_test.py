"""A series-resistance test: a resistor in series with the crystal unit, with which a board must still start.

It sees what a reading cannot: how far the negative resistance of a board is from its crystal's. The resistor is a
branch of the circuit's own table, in series with the motional arms and C0 together: near the threshold it is no small
change, and its effect on the arm alone (R/(1 + C0/C)², first order) is off by a factor of two and more.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Branch, Circuit, Derived, Values
from yieldosc.population import Block
from yieldosc.solver import make_evaluator
from yieldosc.solver.solution import Status
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.judge import GOOD, Codes
from yieldosc.studies.limits.results import AddedResistance, ResistanceTest
from yieldosc.studies.limits.sample import NO_START_CODES
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.run import INNER, Setup
from yieldosc.study import Corner

Array = NDArray[np.float64]
ROLE = "ESR"
ADDED, NODE = "added resistance", "added node"  # blanks keep them apart from every symbol and node
HALVINGS = 12  # of the logarithmic range: the threshold is known to 0.3 %
LEAST, MOST = 0.02, 500.0  # the range, in multiples of the unit's own series resistance
LINES = 9


@dataclass(frozen=True)
class _Job:
    setup: Setup
    corner: Corner
    end: int

    @property
    def pieces(self) -> int:
        return -(-self.end // INNER)

    def __call__(self, piece: int) -> tuple[Array, Codes]:
        first = piece * INNER
        block = self.setup.block(first, min(INNER, self.end - first))
        return thresholds_ohm(self.setup, block, self.corner), self.setup.block_codes(block)


def thresholds_ohm(setup: Setup, block: Block, corner: Corner) -> Array:
    """The largest added series resistance [Ω] with which each unit still starts (n,); 0 where it does not start at all,
    the largest tried where it starts beyond."""
    values = dict(block.values(corner))
    esr = np.broadcast_to(values[ROLE], block.count)
    own_law = block.population.own_law
    circuit = with_series_resistance(setup.bench.evaluator.circuit)  # type: ignore[attr-defined]
    nominal = {name: float(np.median(v)) for name, v in values.items()} | {ADDED: float(np.median(esr))}
    solver = make_evaluator(circuit, nominal)

    def starts(added: Array) -> NDArray[np.bool_]:
        solution = solver.solve(values | {ADDED: added}, corner.temperature_c, own_law=own_law)
        return np.asarray(solution.status == Status.STARTS)

    plain = setup.bench.solve_values(values, corner, own_law).status == Status.STARTS
    low, high = np.log(LEAST * esr), np.log(MOST * esr)
    least, most = starts(np.exp(low)), starts(np.exp(high))
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        still = starts(np.exp(middle))
        low, high = np.where(still, middle, low), np.where(still, high, middle)
    return np.where(plain & least, np.exp(np.where(most, np.log(MOST * esr), low)), 0.0)


def with_series_resistance(circuit: Circuit) -> Circuit:
    """The circuit with a resistor between its crystal unit (motional arms and C0) and the node that it stood at."""
    arm = next(row for row in circuit.branches if row.symbols == circuit.crystal_arm)
    plus, minus = arm.nodes

    def moved(row: Branch) -> Branch:
        unit = row.kind == "crystal" or (row.kind == "C" and row.name.endswith("C0"))
        if not unit or set(row.nodes) != {plus, minus}:
            return row
        return replace(row, nodes=tuple(NODE if node == minus else node for node in row.nodes))

    def derive(values: Values, temperature_c: float, own_law: frozenset[str]) -> Derived:
        found = circuit.derive(values, temperature_c, own_law)
        return replace(found, symbols={**found.symbols, ADDED: np.asarray(values[ADDED], dtype=float)})

    rows = (*(moved(row) for row in circuit.branches), Branch("added", "R", (NODE, minus), (ADDED,)))
    return replace(circuit, branches=rows, derive=derive)


def has_crystal(setup: Setup) -> bool:
    """True where the circuit runs on a crystal's motional arm."""
    circuit = getattr(setup.bench.evaluator, "circuit", None)
    named = any(p.role == ROLE and p.kind == "crystal" for p in setup.population.parameters)
    return named and circuit is not None and circuit.crystal_arm is not None


def resistance_test(
    setup: Setup,
    corner: Corner,
    units: int,
    level: float | None,
    *,
    confidence: float = 0.95,
    workers: Workers | None = None,
    meter: Meter | None = None,
) -> ResistanceTest:
    """Units 0 … units − 1. level: share of built units whose start may fail although they pass."""
    job = _Job(setup, corner, units)
    found = []
    with (workers or Workers()).in_order(job, job.pieces) as answers:
        for answer in answers:
            found.append(answer)
            if meter is not None:
                meter.done(len(answer[0]))
    limit = np.concatenate([f[0] for f in found])
    codes = np.concatenate([f[1] for f in found])
    dead, good = np.isin(codes, NO_START_CODES), codes == GOOD
    lines = tuple(_line(added, limit, dead, good, confidence) for added in _candidates(limit))
    share = clopper_pearson(int(dead.sum()), units, confidence)
    chosen = None
    if level is not None and share.high > level:
        chosen = next((i for i, line in enumerate(lines) if line.start_escapes.high <= level), None)
    return ResistanceTest(lines=lines, chosen=chosen, start_failures=share, units=units)


def _line(
    added: float, limit: Array, dead: NDArray[np.bool_], good: NDArray[np.bool_], confidence: float
) -> AddedResistance:
    passes = limit >= added
    n = len(limit)
    return AddedResistance(
        added_ohm=added,
        start_escapes=clopper_pearson(int(np.count_nonzero(passes & dead)), n, confidence),
        false_rejects=clopper_pearson(int(np.count_nonzero(~passes & good)), n, confidence),
    )


def _candidates(limit: Array) -> Sequence[float]:
    """Round resistances (two digits) from the weakest starting units to where one unit in five is rejected."""
    known = limit[np.isfinite(limit) & (limit > 0)]
    if not len(known):
        return ()
    low, high = float(np.quantile(known, 0.0005)), float(np.quantile(known, 0.2))
    return tuple(dict.fromkeys(float(f"{r:.1e}") for r in np.geomspace(low / 2, high, LINES)))
