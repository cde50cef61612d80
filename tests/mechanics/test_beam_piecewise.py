"""Extremes and values of piecewise polynomials."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.polynomial import polynomial

from server.errors import InputError
from server.mechanics.piecewise import both_sides, candidates, evaluate, extremes, restrict


def from_slope_roots(roots, width=10.0):
    """Return one curve on 0..width whose slope has the given roots (shares of the width)."""
    return np.array([0.0, width]), polynomial.polyint(polynomial.polyfromroots(np.array(roots) * width))[None, None, :]


def by_companion_matrix(breaks, coefficients):
    """Return max and min of one curve by numpy's general root finder."""
    values = []
    for start, end, c in zip(breaks[:-1], breaks[1:], coefficients, strict=True):
        roots = (
            polynomial.polyroots(np.trim_zeros(polynomial.polyder(c), "b"))
            if np.any(polynomial.polyder(c))
            else np.array([])
        )
        s = [0.0, end - start, *(r.real for r in roots if abs(r.imag) < 1e-7 and 0 < r.real < end - start)]
        values.extend(polynomial.polyval(np.array(s), c))
    return max(values), min(values)


@settings(max_examples=200, deadline=None)
@given(st.data())
def test_extremes_agree_with_a_general_root_finder(data):
    degree = data.draw(st.integers(0, 5))
    pieces = data.draw(st.integers(1, 4))
    breaks = np.concatenate(
        [[0.0], np.cumsum(data.draw(st.lists(st.integers(1, 9), min_size=pieces, max_size=pieces)))]
    )
    number = st.integers(-30, 30)
    c = np.array(
        data.draw(st.lists(number, min_size=pieces * (degree + 1), max_size=pieces * (degree + 1))), dtype=float
    )
    c = c.reshape(pieces, degree + 1)
    found = extremes(breaks, c[None])
    top, bottom = by_companion_matrix(breaks, c)
    size = max(abs(top), abs(bottom), 1e-300)
    assert found.max[0] == pytest.approx(top, abs=2e-9 * size)
    assert found.min[0] == pytest.approx(bottom, abs=2e-9 * size)
    for value, at in ((found.max[0], found.at_max[0]), (found.min[0], found.at_min[0])):
        reached = [evaluate(breaks, c[None], at, side)[0] for side in ("left", "right")]
        assert min(abs(r - value) for r in reached) <= 1e-12 * size


@pytest.mark.parametrize(
    "roots",
    [
        [0.2, 0.4, 0.6, 0.8],
        [0.5],
        [0.25, 0.5],
        [0.1, 0.5, 0.9],
        [0.3, 0.3001, 0.7],
        [1e-4, 0.5, 1 - 1e-4],
        [0.0, 0.6],
        [0.4, 1.0],
        [0.5, 0.5, 0.5],
    ],
)
def test_every_turning_point_of_a_quintic_is_found(roots):
    breaks, c = from_slope_roots(roots)
    found = candidates(breaks, c)
    for root in roots:
        assert np.abs(found.at - 10 * root).min() < (1e-4 if roots.count(root) > 1 else 1e-9)
    dense = evaluate(breaks, c, np.linspace(0, 10, 20001))[0]
    extreme = extremes(breaks, c)
    size = np.abs(dense).max()
    assert dense.max() <= extreme.max[0] + 1e-12 * size
    assert dense.min() >= extreme.min[0] - 1e-12 * size
    assert extreme.max[0] == pytest.approx(dense.max(), abs=1e-6 * size)
    assert extreme.min[0] == pytest.approx(dense.min(), abs=1e-6 * size)


def test_a_double_root_of_the_slope_is_no_extreme():
    found = extremes(*from_slope_roots([0.3, 0.3]))
    assert (found.at_min[0], found.at_max[0]) == (0.0, 10.0)


def test_vanishing_leading_coefficients_change_nothing():
    breaks = np.array([0.0, 4.0])
    short = extremes(breaks, np.array([[[1.0, 6.0, -2.0]]]))
    long = extremes(breaks, np.array([[[1.0, 6.0, -2.0, 0.0, 0.0, 1e-30]]]))
    assert short.max[0] == long.max[0] == pytest.approx(5.5)
    assert short.at_max[0] == long.at_max[0] == pytest.approx(1.5)


def test_leftmost_place_wins_a_tie():
    breaks = np.array([0.0, 2.0, 5.0, 7.0])
    level = np.array([[[0.0, 2.0], [4.0, 0.0], [4.0, -2.0]]])  # up to 4, level, down to 0
    found = extremes(breaks, level)
    assert (found.at_max[0], found.at_min[0]) == (2.0, 0.0)
    nearly = level.copy()
    nearly[0, 2, 0] += 1e-10  # rounding, not a greater value
    assert extremes(breaks, nearly).at_max[0] == 2.0
    more = level.copy()
    more[0, 2, 0] += 1e-6
    assert extremes(breaks, more).at_max[0] == 5.0


def test_both_sides_of_a_jump_count():
    breaks = np.array([0.0, 3.0, 6.0])
    step = np.array([[[1.0, 0.0], [-5.0, 0.0]]])
    found = extremes(breaks, step)
    assert (found.max[0], found.at_max[0], found.min[0], found.at_min[0]) == (1.0, 0.0, -5.0, 3.0)
    assert evaluate(breaks, step, [0.0, 3.0, 6.0], "left")[0].tolist() == [1.0, 1.0, -5.0]
    assert evaluate(breaks, step, [0.0, 3.0, 6.0], "right")[0].tolist() == [1.0, -5.0, -5.0]
    assert both_sides(breaks, step, [0.0, 3.0, 6.0])[0].tolist() == [[1.0, 1.0, -5.0], [1.0, -5.0, -5.0]]


def test_both_sides_are_those_of_numpys_polynomials():
    rng = np.random.default_rng(4)
    breaks, c = np.array([0.0, 1.0, 2.5, 4.0]), rng.normal(size=(2, 3, 4))
    places = np.array([0.0, 0.3, 1.0, 2.2, 2.5, 4.0])
    found = both_sides(breaks, c, places)
    for side, pieces in enumerate([(0, 0, 0, 1, 1, 2), (0, 0, 1, 1, 2, 2)]):
        for n, (place, piece) in enumerate(zip(places, pieces, strict=True)):
            assert found[:, side, n] == pytest.approx(polynomial.polyval(place - breaks[piece], c[:, piece].T))
    assert both_sides(breaks, c, 1.0).shape == (2, 2)


def test_a_range_takes_the_values_inside_it_at_its_ends():
    breaks = np.array([0.0, 3.0, 6.0])
    step = np.array([[[1.0, 0.0], [-5.0, 0.0]]])
    left, right = extremes(breaks, step, 0.0, 3.0), extremes(breaks, step, 3.0, 6.0)
    assert (left.max[0], left.min[0]) == (1.0, 1.0)
    assert (right.max[0], right.min[0], right.at_max[0]) == (-5.0, -5.0, 3.0)


@settings(max_examples=100, deadline=None)
@given(st.floats(0, 0.99), st.floats(0.005, 1), st.lists(st.integers(-9, 9), min_size=12, max_size=12))
def test_a_restricted_curve_is_the_same_curve(start, share, numbers):
    breaks, c = np.array([0.0, 4.0, 7.0]), np.array(numbers, dtype=float).reshape(1, 2, 6)
    low = 7 * start
    high = low + (7 - low) * share
    part = restrict(breaks, c, low, high)
    x = np.linspace(low, high, 17)[1:-1]
    size = 1 + np.abs(evaluate(breaks, c, np.linspace(0, 7, 50))).max()
    np.testing.assert_allclose(evaluate(*part, x), evaluate(breaks, c, x), rtol=0, atol=1e-12 * size)
    assert (part[0][0], part[0][-1]) == pytest.approx((low, high))


@pytest.mark.parametrize(("start", "end"), [(3.0, 3.0), (4.0, 2.0), (-1.0, 2.0), (2.0, 11.0), (float("nan"), 2.0)])
def test_an_impossible_range_is_refused(start, end):
    with pytest.raises(InputError, match="it must run to the right between 0 and 10 mm"):
        extremes([0.0, 10.0], [[[0.0, 1.0]]], start, end)


def test_extremes_of_each_interval_and_of_the_absolute_value():
    breaks = np.array([0.0, 10.0, 20.0])
    c = np.array([[[0.0, 10.0, -1.0], [0.0, -10.0, 1.0]], [[1.0, 0.0, 0.0], [2.0, 0.0, 0.0]]])
    each = candidates(breaks, c).each()
    assert each.max.tolist() == [[25.0, 0.0], [1.0, 2.0]]
    assert each.min.tolist() == [[0.0, -25.0], [1.0, 2.0]]
    assert each.at_min.tolist() == [[0.0, 15.0], [0.0, 10.0]]
    size, at = extremes(breaks, c).absolute()
    assert (size.tolist(), at.tolist()) == ([25.0, 2.0], [5.0, 10.0])
    assert candidates(breaks, c).over(1, 2).max.tolist() == [0.0, 2.0]


@settings(max_examples=40, deadline=None)
@given(
    st.lists(st.integers(-9, 9), min_size=32, max_size=32),
    st.lists(st.tuples(st.integers(0, 3), st.integers(1, 4)).filter(lambda part: part[0] < part[1]), min_size=1),
)
def test_extremes_over_several_parts_at_once_are_those_of_each(numbers, parts):
    breaks, c = np.array([0.0, 4.0, 7.0, 8.0, 11.0]), np.array(numbers, dtype=float).reshape(2, 4, 4)
    found = candidates(breaks, c)
    together = found.over_each(parts)
    for number, part in enumerate(parts):
        own, alone = together.of(slice(None), number), found.over(*part)
        assert (own.value == alone.value).all()
        assert (own.at == alone.at).all()
        assert own.absolute()[0].tolist() == pytest.approx(np.maximum(alone.max, -alone.min))


def test_curves_of_any_leading_shape():
    breaks = np.array([0.0, 1.0])
    c = np.arange(24.0).reshape(2, 3, 1, 4)
    assert extremes(breaks, c).max.shape == (2, 3)
    assert candidates(breaks, c).each().max.shape == (2, 3, 1)
    assert evaluate(breaks, c, 0.5).shape == (2, 3)
    assert extremes(breaks, np.zeros((0, 1, 4))).max.shape == (0,)


def test_a_curve_of_zeros_has_its_extremes_at_the_left_end():
    found = extremes([0.0, 5.0, 9.0], np.zeros((1, 2, 6)))
    assert (found.max[0], found.at_max[0], found.min[0], found.at_min[0]) == (0, 0, 0, 0)
