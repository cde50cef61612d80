"""The largest normed residual against published critical values, and how often it is wrong by chance."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.statistics_outliers import grubbs_critical, largest_normed_residual, outliers

# From memory: two-sided 5 % (MIL-HDBK-17-1F / CMH-17-1G Volume 1, 8.5, critical values of the maximum normed residual)
TWO_SIDED = {
    3: "1.154", 4: "1.481", 5: "1.715", 6: "1.887", 7: "2.020", 8: "2.127", 9: "2.215", 10: "2.290",
    11: "2.355", 12: "2.412", 13: "2.462", 14: "2.507", 15: "2.548", 20: "2.708", 30: "2.908",
}  # fmt: skip
# From memory: one-sided 5 % (F. E. Grubbs and G. Beck, Technometrics 14 (1972) 847; ASTM E178)
ONE_SIDED = {
    3: "1.153", 4: "1.463", 5: "1.672", 6: "1.822", 7: "1.938", 8: "2.032", 9: "2.110", 10: "2.176",
    12: "2.285", 15: "2.409", 20: "2.557", 30: "2.745",
}  # fmt: skip


@pytest.mark.parametrize(("n", "printed"), TWO_SIDED.items())
def test_two_sided_critical_values_are_the_published_ones(n, printed):
    # 8, 13, 15 and 20 are printed one unit of the last digit off in one edition or another: 0.0011 covers that
    assert grubbs_critical(n) == pytest.approx(float(printed), abs=0.0011)


@pytest.mark.parametrize(("n", "printed"), ONE_SIDED.items())
def test_one_sided_critical_values_are_the_published_ones(n, printed):
    assert grubbs_critical(n, two_sided=False) == pytest.approx(float(printed), abs=0.0011)


@pytest.mark.parametrize("n", [5, 12])
def test_a_good_sample_is_suspected_as_often_as_the_level_says(n):
    rng = np.random.default_rng(20257)
    draws = 8000
    seen = sum(bool(outliers(rng.normal(0, 1, n))) for _ in range(draws))
    assert seen / draws == pytest.approx(0.05, abs=4 * np.sqrt(0.05 * 0.95 / draws))


def test_two_low_ones_are_found_one_after_the_other():
    x = [10.0, 10.2, 9.9, 10.1, 10.05, 9.95, 10.15, 9.85, 5.0, 10.0, 7.5]
    found = outliers(x)
    assert [each.index for each in found] == [8, 10]
    assert found[1].critical == grubbs_critical(10)


def test_results_all_alike_have_no_outlier():
    assert outliers([3.0] * 6) == []
    assert outliers([3.0, 4.0]) == []
    assert largest_normed_residual([3.0, 3.0, 3.0]) == (0, 0.0)


@settings(max_examples=80, deadline=None)
@given(st.lists(st.integers(1, 9999), min_size=3, max_size=30), st.floats(1e-6, 1e6))
def test_scaling_changes_nothing(x, by):
    one, other = outliers(x), outliers([by * each for each in x])
    assert [each.statistic for each in one] == pytest.approx([each.statistic for each in other], rel=1e-6)
    assert all(each.statistic > each.critical for each in one)


def test_what_cannot_be_tested_is_refused():
    with pytest.raises(InputError, match="at least 3"):
        grubbs_critical(2)
    with pytest.raises(InputError, match="between 0 and 1"):
        grubbs_critical(5, level=0.0)
    with pytest.raises(InputError, match="at least 3"):
        largest_normed_residual([1.0, 2.0])
