"""The added resistance against poles of a descriptor pencil written down by hand, which shares no code with the package."""

from pathlib import Path

import numpy as np
import pytest
import scipy.linalg

import yieldosc
from tests.independent import from_branches
from yieldosc.studies.declared import declared_setup, factory_corner
from yieldosc.studies.limits.resistance_test import thresholds_ohm

EXAMPLES = Path(__file__).parents[3] / "bom_examples"


def grows(elements, added_ohm, hz):
    """True where a pole near `hz` lies in the right half plane with a resistor in series with arm and C0."""
    w0 = 2 * np.pi * hz
    r0 = 1 / (w0 * 10e-12)  # keeps the numbers of a watch crystal and of a megahertz one near 1
    arm = next(e for e in elements if e.kind == "arm")
    rows = [
        (e.kind, tuple("new" if n == arm.nodes[1] else n for n in e.nodes), e.values)
        if e is arm or (e.kind == "C" and set(e.nodes) == set(arm.nodes) and e.values[0] == pytest.approx(grows.c0, rel=1e-9, abs=0))
        else (e.kind, e.nodes, e.values)
        for e in elements
    ]
    rows.append(("R", ("new", arm.nodes[1]), (added_ohm,)))
    names = sorted({n for _, nodes, _ in rows for n in nodes if n != "gnd"})
    size = len(names) + 2
    a, e = np.zeros((size, size)), np.zeros((size, size))

    def stamp(matrix, p, q, value):
        for x, y, sign in ((p, p, 1), (q, q, 1), (p, q, -1), (q, p, -1)):
            if "gnd" not in (x, y):
                matrix[names.index(x), names.index(y)] += sign * value

    for kind, nodes, v in rows:
        if kind in ("R", "G"):
            stamp(a, *nodes, -r0 * (1 / v[0] if kind == "R" else v[0]))
        elif kind == "C":
            stamp(e, *nodes, v[0] * w0 * r0)
        elif kind == "gm":
            for p, sp in zip(nodes[:2], (1, -1), strict=True):
                for q, sq in zip(nodes[2:], (1, -1), strict=True):
                    if "gnd" not in (p, q):
                        a[names.index(p), names.index(q)] -= sp * sq * v[0] * r0
        else:
            i, j = size - 2, size - 1
            for p, sign in zip(nodes, (1, -1), strict=True):
                if p != "gnd":
                    a[names.index(p), i] -= sign
                    a[i, names.index(p)] += sign
            e[i, i], a[i, i], a[i, j] = v[0] * w0 / r0, -v[2] / r0, -1
            e[j, j], a[j, i] = v[1] * w0 * r0, 1
    poles = scipy.linalg.eigvals(a, e)
    near = poles[np.isfinite(poles) & (np.abs(poles.imag - 1) < 2e-3)]
    return bool(near.real.max(initial=-1) > 0)


@pytest.mark.parametrize("name", ["logger_clock_8mhz", "tide_clock_32k768"])
def test_thresholds_are_where_the_poles_cross(name):
    study = yieldosc.load(EXAMPLES / f"{name}.xlsx")
    setup, corner = declared_setup(study, seed=1), factory_corner(study)
    block = setup.block(0, 4)
    found = thresholds_ohm(setup, block, corner)
    values = {k: np.broadcast_to(v, (4,)) for k, v in block.values(corner).items()}
    derived = study.circuit.derive(values, corner.temperature_c, block.population.own_law).symbols
    for i, threshold in enumerate(found):
        symbols = {k: float(np.broadcast_to(v, (4,))[i]) for k, v in derived.items()}
        grows.c0 = symbols["C0"]
        elements = from_branches(study.circuit.branches, symbols, study.circuit.gain_symbol)
        hz = study.design.target_frequency_hz
        assert grows(elements, threshold * 0.995, hz)
        assert not grows(elements, threshold * 1.005, hz)  # the search itself stops at 0.3 %
