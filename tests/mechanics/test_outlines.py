"""What is no outline: crossings, folds, slivers, holes in the wrong place; and what just is one."""

from __future__ import annotations

import math
import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.outlines import MOST_CORNERS, nearest, sound

SQUARE = [(0, 0), (100, 0), (100, 100), (0, 100)]


def rings(*given_rings):
    return [np.array(ring, dtype=float) for ring in given_rings]


def box(x, u, w, d):
    return [(x, u), (x + w, u), (x + w, u + d), (x, u + d)]


@pytest.mark.parametrize(
    ("given_rings", "field", "says"),
    [
        ([[(0, 0), (100, 100), (100, 0), (0, 100)]], "points", "crosses or touches itself"),
        (
            [[(0, 0), (50, 0), (50, 50), (100, 50), (100, 100), (50, 100), (50, 50), (0, 50)]],
            "points",
            "touches itself",
        ),
        ([[(0, 0), (100, 0), (100, 100), (50, 0), (0, 100)]], "points", "touches itself"),
        ([[(0, 0), (100, 0), (50, 0), (50, 50)]], "points", "touches itself"),
        ([[(0, 0), (100, 0), (50, 0)]], "points", "sliver"),
        ([[(0, 0), (100, 0), (100, 1e-3)]], "points", "sliver"),
        ([[(0, 0), (100, 0), (100, 0.02), (0, 0.02)]], "points", "sliver"),
        ([[(0, 0), (100, 0)]], "points", "2 distinct corners"),
        ([[(5, 5), (5, 5), (5, 5), (5, 5)]], "points", "0 distinct corners"),
        ([[]], "points", "0 distinct corners"),
        ([SQUARE, box(200, 200, 10, 10)], "holes[0]", "lies outside"),
        ([SQUARE, box(90, 40, 20, 10)], "holes[0]", "crosses or touches the outline"),
        ([SQUARE, box(0, 40, 20, 10)], "holes[0]", "crosses or touches the outline"),
        ([SQUARE, box(0.001, 40, 20, 10)], "holes[0]", "wall of only"),
        ([SQUARE, box(-10, -10, 200, 200)], "holes[0]", "lies outside"),
        ([SQUARE, box(10, 10, 20, 20), box(20, 20, 20, 20)], "holes[1]", "crosses or touches hole 1"),
        ([SQUARE, box(10, 10, 40, 40), box(20, 20, 5, 5)], "holes[1]", "one in the other"),
        ([SQUARE, box(20, 20, 5, 5), box(10, 10, 40, 40)], "holes[1]", "one in the other"),
        ([SQUARE, [(10, 10), (20, 20), (20, 10), (10, 20)]], "holes[0]", "crosses or touches itself"),
    ],
)
def test_what_is_no_outline_is_refused_by_name(given_rings, field, says):
    with pytest.raises(InputError, match=says) as error:
        sound(rings(*given_rings))
    assert error.value.field == field


def test_a_slit_tube_drawn_as_one_ring_with_a_seam_is_told_to_use_holes():
    seam = [*SQUARE, (0, 0), (10, 10), (10, 90), (90, 90), (90, 10), (10, 10)]
    with pytest.raises(InputError, match="hollows as holes"):
        sound(rings(seam))


def test_outlines_in_either_sense_closed_or_open_are_sound():
    for ring in (SQUARE, SQUARE[::-1], [*SQUARE, SQUARE[0]], [*SQUARE[:2], SQUARE[1], *SQUARE[2:]]):
        sound(rings(ring, box(10, 10, 20, 20), box(40, 10, 20, 20)))


def test_too_many_corners_are_refused_and_as_many_as_allowed_are_quick():
    angle = np.linspace(0, 2 * math.pi, MOST_CORNERS, endpoint=False)
    ring = 500 * np.stack((np.cos(angle), np.sin(angle)), axis=1)
    start = time.perf_counter()
    sound([ring])
    assert time.perf_counter() - start < 2.0
    with pytest.raises(InputError, match=str(MOST_CORNERS)):
        sound([np.vstack((ring, [[600.0, 0.0]]))])


@settings(max_examples=40, deadline=None)
@given(
    st.lists(st.floats(0.3, 1.0), min_size=3, max_size=12),
    st.floats(0, 360),
    st.floats(0.5, 1e3),
    st.data(),
)
def test_a_star_is_sound_however_it_lies_and_not_once_two_corners_are_swapped(radii, turn, size, data):
    angle = np.linspace(0, 2 * math.pi, len(radii), endpoint=False) + math.radians(turn)
    ring = 10 * size * np.array(radii)[:, None] * np.stack((np.cos(angle), np.sin(angle)), axis=1)
    sound([ring])
    if len(radii) > 3:
        k = data.draw(st.integers(0, len(radii) - 2))
        ring[[k, k + 1]] = ring[[k + 1, k]]
        crossed = _shapely_like_crossing(ring)
        if crossed:
            with pytest.raises(InputError):
                sound([ring])


def _shapely_like_crossing(ring):
    """Whether two sides cross, by solving for the crossing of every two: slow, and nothing in common with the test."""
    n = len(ring)
    for i in range(n):
        for j in range(i + 2, n - (i == 0)):
            a, b, c, d = ring[i], ring[(i + 1) % n], ring[j], ring[(j + 1) % n]
            matrix = np.array([b - a, c - d]).T
            if abs(np.linalg.det(matrix)) < 1e-9:
                continue
            s, t = np.linalg.solve(matrix, c - a)
            if 0 < s < 1 and 0 < t < 1:
                return True
    return False


def test_nearest_is_the_distance_between_two_outlines():
    one, other = rings(SQUARE), rings(box(130, 140, 10, 10))
    assert nearest(one, other) == pytest.approx(50.0)
    assert nearest(one, rings(box(50, 50, 100, 10))) == 0.0
    closed = rings([*SQUARE, SQUARE[0]])  # the closing corner typed again is a side without length
    assert nearest(closed, other) == pytest.approx(50.0)
