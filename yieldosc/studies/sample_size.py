"""How many samples a statement needs. Each function is one published formula."""

from __future__ import annotations

import math

from scipy import stats

MOST_SAMPLES = 10_000_000


def wilks_one_sided(coverage: float, confidence: float) -> int:
    """Smallest n whose extreme value on one side bounds `coverage` of the population: 1 − pⁿ ≥ C
    (Wilks, Ann. Math. Statist. 12 (1941) 91). No distribution is supposed."""
    return _up(math.log(1 - confidence) / math.log(coverage))


def wilks_two_sided(coverage: float, confidence: float) -> int:
    """Smallest n whose least and greatest value enclose `coverage` of the population:
    1 − n·pⁿ⁻¹ + (n − 1)·pⁿ ≥ C (Wilks, as above)."""
    n = 2
    while 1 - n * coverage ** (n - 1) + (n - 1) * coverage**n < confidence:
        n += 1
    return n


def mean_within(reach: float, sd: float, confidence: float) -> int:
    """Smallest n ≥ 2 with t·sd/√n ≤ reach: Student's interval of a mean. reach and sd in the same SI unit."""
    n = 2
    while stats.t.ppf(0.5 + confidence / 2, n - 1) * sd / math.sqrt(n) > reach and n < MOST_SAMPLES:
        n += 1
    return n


def clean_boards(rate: float, confidence: float) -> int:
    """Boards without one failure that show a failing share below `rate`: n ≥ ln(1 − C)/ln(1 − p), from
    (1 − p)ⁿ ≤ 1 − C."""
    return _up(math.log(1 - confidence) / math.log1p(-rate))


def _up(count: float) -> int:
    """The next whole number; a count that is whole but for rounding stays."""
    return math.ceil(count - 1e-9)
