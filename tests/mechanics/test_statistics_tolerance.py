"""Tolerance factors against an independent noncentral t, and what must hold for any of them."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import integrate, special, stats

from server.errors import InputError
from server.mechanics import statistics_tolerance as tolerance

SHARES = [(0.95, 0.75), (0.90, 0.95), (0.99, 0.95), (0.95, 0.95), (0.5, 0.75), (0.999, 0.99)]


def confidence_of(k: float, n: int, coverage: float) -> float:
    """P[m - k s lies below the quantile], from the definition: no noncentral t is used."""
    nu, z = n - 1, special.ndtri(coverage)

    def density(u: float) -> float:  # of s/sigma
        log = (
            math.log(2) + nu / 2 * math.log(nu / 2) - special.gammaln(nu / 2) + (nu - 1) * math.log(u) - nu * u * u / 2
        )
        return math.exp(log) * special.ndtr(math.sqrt(n) * (k * u - z))

    points = sorted({min(z / k, 3.0), 0.5, 1.0, 1.5})
    return integrate.quad(density, 1e-300, 60 / math.sqrt(nu), points=points, epsabs=1e-13, epsrel=1e-12, limit=400)[0]


@pytest.mark.parametrize("n", [2, 3, 5, 8, 10, 20, 50, 200, 2000])
@pytest.mark.parametrize(("coverage", "confidence"), SHARES)
def test_the_factor_has_the_confidence_it_claims(n, coverage, confidence):
    k = tolerance.factor(n, coverage=coverage, confidence=confidence)
    assert confidence_of(k, n, coverage) == pytest.approx(confidence, abs=1e-9)


@pytest.mark.parametrize("n", [2, 3, 5, 8, 10, 20, 50, 200, 2000])
@pytest.mark.parametrize(("coverage", "confidence"), SHARES)
def test_the_factor_agrees_with_the_noncentral_t_of_scipy_stats(n, coverage, confidence):
    k = tolerance.factor(n, coverage=coverage, confidence=confidence)
    other = stats.nct.ppf(confidence, n - 1, stats.norm.ppf(coverage) * math.sqrt(n)) / math.sqrt(n)
    assert k == pytest.approx(other, rel=1e-8)


@pytest.mark.parametrize("n", [1, 2, 5, 100])
@pytest.mark.parametrize(("coverage", "confidence"), SHARES)
def test_the_known_factor_has_the_confidence_it_claims(n, coverage, confidence):
    """The mean of n alone varies, by sigma over the root of n."""
    k = tolerance.factor_known(n, coverage=coverage, confidence=confidence)
    assert stats.norm.cdf(math.sqrt(n) * (k - stats.norm.ppf(coverage))) == pytest.approx(confidence, rel=1e-12)


def test_the_factor_of_a_median_is_that_of_a_mean():
    for n in (2, 5, 30):
        k = tolerance.factor(n, coverage=0.5, confidence=0.75)
        assert k == pytest.approx(tolerance.mean_factor(n, confidence=0.75), rel=1e-9)


def test_large_samples_tend_to_the_normal_quantile():
    assert tolerance.factor(10**6, coverage=0.95, confidence=0.75) == pytest.approx(1.6449, abs=2e-3)
    assert tolerance.factor_known(10**8, coverage=0.95, confidence=0.75) == pytest.approx(1.6449, abs=1e-4)


@settings(max_examples=80, deadline=None)
@given(st.integers(2, 300), st.floats(0.5, 0.995), st.floats(0.5, 0.99), st.floats(1e-3, 4e-3))
def test_more_coverage_more_confidence_and_fewer_results_never_lower_the_factor(n, coverage, confidence, more):
    k = tolerance.factor(n, coverage=coverage, confidence=confidence)
    assert tolerance.factor(n, coverage=coverage + more, confidence=confidence) > k
    assert tolerance.factor(n, coverage=coverage, confidence=confidence + more) > k
    known = tolerance.factor_known(n, coverage=coverage, confidence=confidence)
    assert tolerance.factor_known(n, coverage=coverage, confidence=confidence + more) > known
    if confidence >= 0.75:
        assert tolerance.factor(n + 1, coverage=coverage, confidence=confidence) < k
        assert known < k


def test_limits_of_random_samples_hold_as_often_as_they_claim():
    rng = np.random.default_rng(20251)
    n, draws = 8, 40_000
    x = rng.normal(0.0, 1.0, (draws, n))
    k = tolerance.factor(n, coverage=0.95, confidence=0.75)
    held = np.mean(x.mean(axis=1) - k * x.std(axis=1, ddof=1) <= stats.norm.ppf(0.05))
    assert held == pytest.approx(0.75, abs=4 * math.sqrt(0.75 * 0.25 / draws))


@pytest.mark.parametrize(("n", "known"), [(2, False), (5, False), (30, False), (1, True), (10, True)])
def test_a_prediction_fails_as_often_as_it_claims(n, known):
    rng = np.random.default_rng(20252)
    draws = 60_000
    x = rng.normal(0.0, 1.0, (draws, n))
    scatter = 1.0 if known else x.std(axis=1, ddof=1)
    below = x.mean(axis=1) - tolerance.prediction_factor(n, probability=0.05, known=known) * scatter
    failed = np.mean(rng.normal(0.0, 1.0, draws) < below)
    assert failed == pytest.approx(0.05, abs=4 * math.sqrt(0.05 * 0.95 / draws))


@pytest.mark.parametrize(("coverage", "confidence"), [(0.95, 0.75), (0.9, 0.95), (0.6, 0.5), (0.99, 0.95)])
def test_ranks_agree_with_the_binomial_distribution(coverage, confidence):
    for n in [*range(1, 130), 500, 2000]:
        r = tolerance.rank(n, coverage=coverage, confidence=confidence)
        reached = stats.binom.sf(np.arange(1, n + 1) - 1, n, 1 - coverage) >= confidence  # P[at least r below]
        assert r == int(reached.sum())


def test_the_fewest_results_are_the_fewest():
    for r in (1, 2, 5):
        n = tolerance.fewest_for_rank(r, coverage=0.95, confidence=0.75)
        assert tolerance.rank(n, coverage=0.95, confidence=0.75) == r
        assert tolerance.rank(n - 1, coverage=0.95, confidence=0.75) == r - 1


@pytest.mark.parametrize(
    ("call", "field"),
    [
        (lambda: tolerance.factor(1, coverage=0.95, confidence=0.75), "n"),
        (lambda: tolerance.factor(5, coverage=1.0, confidence=0.75), "coverage"),
        (lambda: tolerance.factor(5, coverage=0.95, confidence=0.0), "confidence"),
        (lambda: tolerance.factor_known(0, coverage=0.95, confidence=0.75), "n"),
        (lambda: tolerance.prediction_factor(1, probability=0.05, known=False), "n"),
        (lambda: tolerance.prediction_factor(5, probability=1.5, known=True), "probability"),
        (lambda: tolerance.mean_factor(1, confidence=0.75), "n"),
        (lambda: tolerance.rank(0, coverage=0.95, confidence=0.75), "n"),
        (lambda: tolerance.rank(5, coverage=math.nan, confidence=0.75), "coverage"),
    ],
)
def test_what_has_no_factor_is_refused_by_name(call, field):
    with pytest.raises(InputError) as caught:
        call()
    assert caught.value.field == field
