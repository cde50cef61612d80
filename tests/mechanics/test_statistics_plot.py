"""Places on probability paper against scipy, closed forms and printed median ranks."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from server.errors import InputError
from server.mechanics.statistics_plot import median_ranks, normal_place, weibull_place


# Table of median ranks in per cent for n = 10, as printed in handbooks of life testing (from memory); two decimals.
def test_printed_median_ranks_of_ten() -> None:
    printed = [6.70, 16.23, 25.86, 35.51, 45.17, 54.83, 64.49, 74.14, 83.77, 93.30]
    assert 100 * median_ranks(10) == pytest.approx(printed, abs=0.006)


@pytest.mark.parametrize("n", [1, 2, 5, 37])
def test_each_rank_is_the_middle_of_its_order_statistic(n: int) -> None:
    ranks = median_ranks(n)
    middles = [stats.beta(i, n - i + 1).median() for i in range(1, n + 1)]
    assert ranks == pytest.approx(middles, rel=1e-9)
    assert ranks + ranks[::-1] == pytest.approx(np.ones(n))


def test_the_first_rank_in_closed_form() -> None:
    assert median_ranks(28)[0] == pytest.approx(1 - 0.5 ** (1 / 28), rel=1e-12)


def test_places_are_the_inverse_distribution_functions() -> None:
    p = np.array([0.001, 0.05, 0.5, 0.95, 0.999])
    assert normal_place(p) == pytest.approx(stats.norm.ppf(p))
    assert weibull_place(p) == pytest.approx(np.log(stats.weibull_min(1).ppf(p)))


def test_no_result_is_no_plot() -> None:
    with pytest.raises(InputError, match="at least one"):
        median_ranks(0)
