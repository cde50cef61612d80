"""The k-sample Anderson-Darling test against its paper, scipy, and how often it is wrong by chance."""

from __future__ import annotations

import warnings

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from server.errors import InputError
from server.mechanics.statistics_batches import LEVELS, k_sample_anderson_darling

# Smoothness of paper in four laboratories: F. W. Scholz and M. A. Stephens, J. Amer. Statist. Assoc. 82 (1987) 918,
# section 8, after E. L. Lehmann (1975). Standardised statistic with ties counted half 4.480, points at 25, 10, 5, 2.5
# and 1 % 0.4985, 1.3237, 1.9158, 2.4930, 3.2459; sigma 1.2038 (the last from memory).
SMOOTHNESS = [
    [38.7, 41.5, 43.8, 44.5, 45.5, 46.0, 47.7, 58.0],
    [39.2, 39.3, 39.7, 41.4, 41.8, 42.9, 43.3, 45.8],
    [34.0, 35.0, 39.0, 40.0, 43.0, 43.0, 44.0, 45.0],
    [34.0, 34.8, 34.8, 35.4, 37.2, 37.8, 41.2, 42.8],
]
POINTS = {0.25: 0.4985, 0.10: 1.3237, 0.05: 1.9158, 0.025: 2.4930, 0.01: 3.2459}


@pytest.mark.parametrize("level", LEVELS)
def test_the_paper_of_four_laboratories(level):
    found = k_sample_anderson_darling(SMOOTHNESS, level=level)
    assert (found.statistic - 1) / found.deviation == pytest.approx(4.480, abs=0.0005)
    assert (found.critical - 1) / found.deviation == pytest.approx(POINTS[level], abs=0.00005)
    assert found.deviation * 3 == pytest.approx(1.2038, abs=0.00005)
    assert not found.pooled


@pytest.mark.parametrize("sizes", [(5, 6, 5), (10, 3), (1, 3), (8, 8, 8, 8), (40, 2, 7, 30, 11)])
@pytest.mark.parametrize("digits", [1, 6])
def test_ties_or_none_it_agrees_with_scipy(sizes, digits):
    rng = np.random.default_rng(len(sizes))
    groups = [np.round(rng.normal(10, 1, size), digits) for size in sizes]
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        other = stats.anderson_ksamp(groups)
    found = k_sample_anderson_darling(groups)
    assert (found.statistic - 1) / found.deviation == pytest.approx(other.statistic, rel=1e-9, abs=1e-9)
    assert (found.critical - 1) / found.deviation == pytest.approx(other.critical_values[2], rel=1e-9)


def test_batches_alike_are_told_apart_as_often_as_the_level_says():
    rng = np.random.default_rng(20258)
    draws = 3000
    for level in (0.05, 0.25):
        apart = sum(not k_sample_anderson_darling(rng.normal(0, 1, (3, 6)), level=level).pooled for _ in range(draws))
        assert apart / draws == pytest.approx(level, abs=0.02)


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.lists(st.integers(1, 99), min_size=1, max_size=8), min_size=2, max_size=5),
    st.floats(1e-3, 1e3),
)
def test_only_the_order_of_the_results_matters(batches, by):
    pooled = sorted(each for batch in batches for each in batch)
    if len(pooled) < 4 or pooled[0] == pooled[-1]:
        return
    found = k_sample_anderson_darling(batches)
    for other in (batches[::-1], [[by * x for x in batch] for batch in batches], [[x**3 for x in b] for b in batches]):
        assert k_sample_anderson_darling(other).statistic == pytest.approx(found.statistic, rel=1e-9)
    assert np.isfinite([found.statistic, found.critical]).all()


@pytest.mark.parametrize(
    ("batches", "level", "field"),
    [
        ([[1.0, 2.0, 3.0, 4.0]], 0.05, "batches"),
        ([[1.0, 2.0], []], 0.05, "batches"),
        ([[1.0], [2.0, 3.0]], 0.05, "batches"),
        ([[2.0, 2.0], [2.0, 2.0]], 0.05, "batches"),
        ([[1.0, 2.0], [3.0, 4.0]], 0.07, "level"),
    ],
)
def test_what_cannot_be_compared_is_refused(batches, level, field):
    with pytest.raises(InputError) as caught:
        k_sample_anderson_darling(batches, level=level)
    assert caught.value.field == field
