"""Numbers of samples against published tables."""

from __future__ import annotations

import pytest
from scipy import stats

from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.sample_size import clean_boards, mean_within, wilks_one_sided, wilks_two_sided


@pytest.mark.parametrize(("coverage", "count"), [(0.95, 59), (0.90, 29), (0.99, 299)])
def test_one_sided_distribution_free(coverage, count):
    # Wilks, Ann. Math. Statist. 12 (1941) 91: 59, 29, 299 at 95 % confidence, seen restated on a web page
    assert wilks_one_sided(coverage, 0.95) == count


def test_two_sided_distribution_free():
    # 93 for 95 %/95 %: from memory, verified here by the exact distribution of the coverage, Beta(n − 1, 2)
    count = wilks_two_sided(0.95, 0.95)
    assert count == 93
    assert stats.beta.sf(0.95, count - 1, 2) >= 0.95 > stats.beta.sf(0.95, count - 2, 2)


def test_mean_of_a_sample_by_students_interval():
    count = mean_within(0.25, 3**-0.5, 0.95)
    half_widths = [stats.t.ppf(0.975, n - 1) * 3**-0.5 / n**0.5 for n in (count, count - 1)]
    assert half_widths[0] <= 0.25 < half_widths[1]
    # a negative control: with the normal quantile the number would be too small
    assert count > (1.96 * 3**-0.5 / 0.25) ** 2


def test_boards_without_a_failure():
    # 0 of 1000 has the one-sided 95 % upper bound 0.0029912 (standard; derived)
    assert clean_boards(0.0029913, 0.95) == 1000  # the printed bound, rounded up
    for ppm in (1, 10, 1000):
        n = clean_boards(ppm * 1e-6, 0.95)
        assert clopper_pearson(0, n, 0.90).high <= ppm * 1e-6 * (1 + 1e-9)
        assert clopper_pearson(0, n - 1, 0.90).high > ppm * 1e-6 * (1 - 1e-9)
    # the rule of three, 3/p, is a little too cautious
    assert clean_boards(1e-3, 0.95) == 2995
