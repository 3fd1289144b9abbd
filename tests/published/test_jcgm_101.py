"""Digits against the adaptive procedure of JCGM 101:2008, 7.9 (second-hand: values from tests of other projects, as each
row says; the standard itself was not read).

7.9.2: a value u = c·10^l with as many digits in c as are significant has the numerical tolerance δ = ½·10^l. Our two
digits of a half-width are that rule; a Monte Carlo run that stops when twice the standard deviation of each of its results
is below δ must then agree with the printed values.
"""

from __future__ import annotations

import numpy as np
import pytest

from yieldosc.studies.digits import decimals_for, rounded
from yieldosc.studies.tally import Moments

TRIALS = 10_000  # per block: h·M trials are accumulated block by block
MOST_BLOCKS = 2000


def tolerance(u):
    """δ = ½·10^l from the number of decimals that the reports would show."""
    return 0.5 * 10.0 ** -decimals_for(u)


def adaptive(model, seed):
    """Mean, standard uncertainty and 95 % interval (probabilistically symmetric) of blocks until all four are stable."""
    rng = np.random.default_rng(seed)
    rows = []
    while len(rows) < MOST_BLOCKS:
        y = model(rng, TRIALS)
        moments = Moments.of(y)
        rows.append((moments.mean, moments.sd, *np.quantile(y, [0.025, 0.975])))
        if len(rows) < 2:
            continue
        mean = np.mean(rows, axis=0)
        spread = np.std(rows, axis=0, ddof=1) / len(rows) ** 0.5
        if (2 * spread < tolerance(mean[1])).all():
            return mean, tolerance(mean[1]), len(rows)
    raise AssertionError("not stable")


@pytest.mark.parametrize(
    ("u", "decimals", "delta"),
    [
        (0.35, 2, 0.005), (2.0, 1, 0.05), (0.00035, 5, 5e-6), (0.0754, 3, 5e-4), (0.481, 2, 0.005), (35.82, 0, 0.5),
    ],
)  # fmt: skip
def test_the_tolerance_of_two_digits(u, decimals, delta):
    assert decimals_for(u) == decimals
    assert tolerance(u) == pytest.approx(delta)


def mass_calibration(rng, n):
    """δm = (m_Rc + δm_Rc)(1 + (ρ_a − 1.2)(1/ρ_W − 1/ρ_R)) − 100 000 [mg] (JCGM 101, 9.3, from memory)."""
    reference, added = rng.normal(1e5, 0.05, n), rng.normal(1.234, 0.02, n)
    air, weight, standard = rng.uniform(1.1, 1.3, n), rng.uniform(7000, 9000, n), rng.uniform(7950, 8050, n)
    return (reference + added) * (1 + (air - 1.2) * (1 / weight - 1 / standard)) - 1e5


# expected: mean, standard uncertainty, ends of the interval
ROWS = {
    # JCGM 101 table 2 (seen in a test of another project): four N(0, 1): 2.00 and [−3.92, 3.92]; exact 3.919928
    "four normal": (lambda r, n: r.standard_normal((4, n)).sum(axis=0), (0.0, 2.0, -3.919928, 3.919928)),
    # table 3 (seen likewise): four rectangular of u = 1: 2.00 and [−3.88, 3.88]; exact 2√3 (2 − (3/5)^¼) = 3.879406741
    "four rectangular": (
        lambda r, n: r.uniform(-(3**0.5), 3**0.5, (4, n)).sum(axis=0), (0.0, 2.0, -3.879406741, 3.879406741),
    ),
    # NPL report DEM-ES-011 sec. 9.2 (seen likewise): ln of R(0.1, 1.1): exact −0.664900, 0.606227; the symmetric
    # interval is ln(0.1 + p) at p = 0.025 and 0.975 (closed form)
    "logarithm of a rectangular": (
        lambda r, n: np.log(r.uniform(0.1, 1.1, n)), (-0.664900, 0.606227, np.log(0.125), np.log(1.075)),
    ),
    # table 5 (from memory, recomputed): mass calibration, 1.2340 and 0.0754 to 0.0755 mg
    "mass calibration": (
        mass_calibration, (1.2340, 0.07546, None, None),
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", ROWS)
def test_adaptive_runs_agree_with_printed_values_to_the_tolerance(name):
    model, expected = ROWS[name]
    for seed in (1, 2):
        found, delta, _ = adaptive(model, seed)
        for value, wanted in zip(found, expected, strict=True):
            if wanted is not None:
                # twice the standard deviation is below δ: δ is passed by chance once in twenty results; 1.5 δ is not
                assert value == pytest.approx(wanted, abs=1.5 * delta)


def test_the_rule_scales_with_the_result():
    coarse = adaptive(ROWS["four normal"][0], 1)[2]
    # u = 0.2 instead of 2: one decimal more, and the same work
    scaled = adaptive(lambda r, n: ROWS["four normal"][0](r, n) / 10, 1)[2]
    assert scaled == coarse
    assert tolerance(0.99) == pytest.approx(tolerance(1.01) / 10)


def test_results_are_shown_to_that_tolerance():
    # 1.2341 ± 0.0754: three decimals; gauge block 838 nm, u = 36 nm (table 11, seen): whole nanometres
    assert rounded(1.2341, 1.2341 - 0.0754, 1.2341 + 0.0754).estimate == "1.234"
    assert rounded(838.0, 838.0 - 35.82, 838.0 + 35.82).estimate == "838"
