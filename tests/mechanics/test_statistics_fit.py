"""Tests of fit against scipy and statsmodels, published examples, and how often they are wrong by chance."""

from __future__ import annotations

import math
import warnings

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from server.errors import InputError
from server.mechanics.statistics_fit import _p_normal, anderson_darling_normal, anderson_darling_weibull, shapiro_wilk
from server.mechanics.statistics_weibull import fit_weibull

SIZES = [3, 4, 5, 6, 7, 8, 11, 12, 20, 50, 300, 2000]
samples = st.lists(st.integers(100, 9999), min_size=3, max_size=40).filter(lambda x: len(set(x)) > 2)
# Weights of eleven men in pounds: S. S. Shapiro and M. B. Wilk, Biometrika 52 (1965) 591, W = 0.79
MEN = [148, 154, 158, 160, 161, 162, 166, 170, 182, 195, 236]


def test_the_men_of_shapiro_and_wilk():
    found = shapiro_wilk(MEN)
    assert found.statistic == pytest.approx(0.79, abs=0.005)
    assert found.p_value < 0.01  # in the paper beyond its 1 % point, 0.792


@pytest.mark.parametrize("n", SIZES)
@pytest.mark.parametrize("seed", range(4))
def test_shapiro_wilk_agrees_with_scipy(n, seed):
    rng = np.random.default_rng(seed)
    x = rng.normal(10, 1, n) if seed % 2 else rng.exponential(1.0, n)
    other, found = stats.shapiro(x), shapiro_wilk(x)
    assert found.statistic == pytest.approx(other.statistic, abs=1e-8)
    assert found.p_value == pytest.approx(other.pvalue, rel=1e-6, abs=1e-7)


@pytest.mark.parametrize("n", SIZES)
@pytest.mark.parametrize("seed", range(3))
def test_anderson_darling_agrees_with_scipy(n, seed):
    x = np.random.default_rng(seed).gumbel(10, 1, n)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        other = stats.anderson(x).statistic
    assert anderson_darling_normal(x).statistic == pytest.approx(other, abs=1e-10)


@pytest.mark.parametrize("n", [8, 12, 50, 300])
@pytest.mark.parametrize("seed", range(4))
def test_anderson_darling_and_its_p_value_agree_with_statsmodels(n, seed):
    diagnostic = pytest.importorskip("statsmodels.stats.diagnostic")
    x = np.random.default_rng(seed).gumbel(10, 1, n)
    statistic, p = diagnostic.normal_ad(x)
    found = anderson_darling_normal(x)
    assert found.statistic == pytest.approx(statistic, abs=1e-10)
    assert found.p_value == pytest.approx(p, rel=1e-9)


def test_anderson_darling_of_a_weibull_sample_agrees_with_scipy():
    x = stats.weibull_min.rvs(4.0, scale=30.0, size=20, random_state=1)
    fit = fit_weibull(x)
    other = stats.goodness_of_fit(
        stats.weibull_min,
        x,
        known_params={"c": fit.shape, "loc": 0, "scale": fit.scale},
        statistic="ad",
        n_mc_samples=2,
        rng=np.random.default_rng(0),
    )
    found = anderson_darling_weibull(x, fit)
    assert found.statistic == pytest.approx(other.statistic, rel=1e-9)
    assert found.adjusted == pytest.approx(found.statistic * (1 + 0.2 / math.sqrt(20)), rel=1e-12)


# Points of the statistic adjusted for size, both parameters estimated, from memory of D'Agostino and Stephens (1986):
# normal, Table 4.7: 10 % 0.631, 5 % 0.752, 2.5 % 0.873, 1 % 1.035; Weibull, Table 4.17: 0.637, 0.757, 0.877, 1.038
@pytest.mark.parametrize(("level", "normal", "weibull"), [
    (0.10, 0.631, 0.637), (0.05, 0.752, 0.757), (0.025, 0.873, 0.877), (0.01, 1.035, 1.038),
])  # fmt: skip
def test_the_p_values_are_the_published_points(level, normal, weibull):
    assert _p_normal(normal) == pytest.approx(level, rel=0.02)
    # the Weibull curve is a fit to these points, worst near 1 %
    p = 1 / (1 + math.exp(-0.10 + 1.24 * math.log(weibull) + 4.48 * weibull))
    assert p == pytest.approx(level, rel=0.05, abs=0.0006)


@pytest.mark.parametrize("n", [8, 15])
def test_true_samples_are_refused_as_often_as_the_level_says(n):
    rng = np.random.default_rng(20256)
    draws = 3000
    normal = np.array([anderson_darling_normal(rng.normal(0, 1, n)).p_value for _ in range(draws)])
    shapiro = np.array([shapiro_wilk(rng.normal(0, 1, n)).p_value for _ in range(draws)])
    assert np.mean(normal < 0.05) == pytest.approx(0.05, abs=0.013)
    assert np.mean(shapiro < 0.05) == pytest.approx(0.05, abs=0.013)
    weibull = []
    for _ in range(1500):
        x = rng.weibull(3.0, n)
        weibull.append(anderson_darling_weibull(x, fit_weibull(x)).p_value < 0.05)
    assert np.mean(weibull) == pytest.approx(0.05, abs=0.02)


@settings(max_examples=80, deadline=None)
@given(samples, st.floats(1e-6, 1e6), st.floats(-1e3, 1e3))
def test_neither_unit_nor_offset_nor_order_matters(x, by, offset):
    first = np.array(x, dtype=float)
    for test in (anderson_darling_normal, shapiro_wilk):
        found = test(first)
        assert 0 <= found.p_value <= 1
        for other in (by * first, first + offset, first[::-1]):
            assert test(other).statistic == pytest.approx(found.statistic, rel=1e-6, abs=1e-8)


def test_an_exponential_sample_is_not_taken_for_a_normal_one():
    x = np.random.default_rng(5).exponential(1.0, 100)
    assert anderson_darling_normal(x).p_value < 0.001
    assert shapiro_wilk(x).p_value < 0.001


@pytest.mark.parametrize("test", [anderson_darling_normal, shapiro_wilk])
@pytest.mark.parametrize("values", [[1.0, 2.0], [3.0, 3.0, 3.0], [1.0, 2.0, float("inf")]])
def test_what_cannot_be_tested_is_refused(test, values):
    with pytest.raises(InputError) as caught:
        test(values)
    assert caught.value.field == "values"


def test_shapiro_wilk_takes_no_more_than_5000():
    with pytest.raises(InputError, match="5000"):
        shapiro_wilk(np.arange(5001.0))
