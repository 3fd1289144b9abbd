"""Rankings of a real circuit against an independent library: scipy.stats.sobol_indices on the same function."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from yieldosc.parts.shapes import Split
from yieldosc.population import Block
from yieldosc.studies.declared import declared_setup
from yieldosc.studies.nominal import nominal_points
from yieldosc.studies.ranking import LEAST_MARGIN, rankings


@pytest.fixture(scope="module")
def of_library():
    """First-order and total indices of ln frequency and ln margin, by the library's own sampler and estimators."""

    def indices(setup):
        roles = [(v.role, v.cause) for v in setup.population.variables]
        corner = setup.corners[0]

        def outputs(u):
            draws = {}
            for (role, cause), row in zip(roles, np.clip(u, 1e-12, 1 - 1e-12), strict=True):
                draws.setdefault(role, {})[cause] = row
            solution = setup.bench.solve(Block(setup.population, draws, u.shape[1]), corner)
            return np.stack([np.log(solution.frequency_hz), np.log(np.maximum(solution.startup_margin, LEAST_MARGIN))])

        flat = stats.uniform()
        found = stats.sobol_indices(func=outputs, n=2**13, dists=[flat] * len(roles), rng=np.random.default_rng(5))
        return [role for role, _ in roles], found.first_order, found.total_order

    return indices


def test_a_bridge_with_a_real_amplifier(make_study, make_part, of_library):
    amplifier = make_part("GBW", 60e3, 0.4, kind="ic", shape=Split())
    study = make_study(gain=3.3, rf=0.01, r=0.02, c=0.02, window=0.2, extra=(amplifier,),
                       change=lambda p: replace(p, reel=None))  # fmt: skip
    setup = declared_setup(study, seed=1)
    nominal = [p.frequency_hz for p in nominal_points(setup.population, setup.bench, setup.corners)]
    ours = rankings(setup, nominal, {}, base=2048)
    roles, first, total = of_library(setup)
    for k, output in enumerate(("frequency", "margin")):
        lines = {line.part: line for line in ours[output].parts}
        assert max(total[k]) > 0.1
        for j, role in enumerate(roles):
            assert lines[role].first_order.estimate == pytest.approx(first[k, j], abs=0.012)
            assert lines[role].total.estimate == pytest.approx(total[k, j], abs=0.012)
    assert lines["GBW"].total.estimate < 0.5  # a negative control: not everything is one part's
