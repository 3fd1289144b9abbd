"""What double precision keeps of a crystal: 1e-15 in frequency, 1e-12 in critical gain, against 80 digits."""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.independent import Unit, from_branches
from tests.samples import CHOICES
from tests.solver.test_agreement import draw
from yieldosc.circuits import registry
from yieldosc.solver import make_evaluator


# 1e-15 is four roundings in ω². The critical gain divides polynomials that cancel to about Cm/C0 of their terms near
# resonance: 1.1e-16/2e-4 = 6e-13 at 8 MHz, and a few times more with a watch crystal's losses.
@pytest.mark.parametrize(
    ("number", "hz", "ohm", "gain"), [(0, 8e6, 1e3, 1e-12), (13, 8e6, 1e3, 1e-12), (16, 32768.0, 1e6, 1e-11)]
)
def test_a_crystal_keeps_its_digits(number, hz, ohm, gain):
    options, values = list(CHOICES["pierce"]())[number]
    n = 12
    drawn = draw(values, n, 0.15, seed=number)
    circuit = registry.build("pierce", options, values)
    full = {r.name: drawn[r.name] if r.name in drawn else np.full(n, r.default) for r in circuit.roles}
    evaluator = make_evaluator(circuit, {r.name: values.get(r.name, r.default) for r in circuit.roles})
    solution = evaluator.solve(full, 25.0, growth=True)
    symbols = circuit.derive(full, 25.0, frozenset()).symbols
    for row in range(n):
        one = {k: float(np.broadcast_to(v, (n,))[row]) for k, v in symbols.items()}
        unit = Unit(from_branches(circuit.branches, one, "gm"), w0=2 * math.pi * hz, r0=ohm)
        (entering,) = (c for c in unit.crossings if c.enters)
        assert abs(float(solution.frequency_hz[row] * 2 * math.pi / entering.omega - 1)) <= 1e-15
        assert abs(float(solution.critical_gain[row] / entering.gain - 1)) <= gain
        pair = [p for p in unit.growing() if p.imag > 0]
        assert len(pair) == 1
        assert solution.growth_per_s[row] == pytest.approx(float(pair[0].real), rel=1e-10)
