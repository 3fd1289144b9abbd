"""Among failing units: how far each variable's draw is shifted against all units."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.stats import kstest

from yieldosc.studies.ranking import cause_of
from yieldosc.studies.results import FailureShare
from yieldosc.studies.run import Setup

LEAST_FAILURES = 30
UNIFORM_SD = 12**-0.5


def failure_share(setup: Setup, failing: NDArray[np.int64]) -> tuple[FailureShare, ...]:
    """Kolmogorov–Smirnov distance, p-value and mean shift per variable; largest distance first.

    failing (m,): numbers of failing units. Over all units each draw u is uniform on (0, 1), which is the null
    distribution (scipy.stats.kstest, exact for small m). The shift is in standard deviations of u. Variables of a
    reel are shown through each part's own draw. Empty below 30 failing units.
    """
    if len(failing) < LEAST_FAILURES:
        return ()
    draws = setup.streams.at(setup.population.variables, failing)
    lines = []
    for variable in setup.population.variables:
        u = draws[variable.role][variable.cause]
        test = kstest(u, "uniform")
        lines.append(
            FailureShare(
                part=variable.part if variable.part == variable.role else f"{variable.part} {variable.role}",
                cause=f"{cause_of(variable)}" if variable.cause == "initial" else variable.cause,
                ks_distance=float(test.statistic),
                p_value=float(test.pvalue),
                mean_shift_sd=float((u.mean() - 0.5) / UNIFORM_SD),
            )
        )
    return tuple(sorted(lines, key=lambda line: -line.ks_distance))
