"""Where pieces touch and overlap: flat, turned, apart, stepped, hidden, split; and what must hold for any of them."""

from __future__ import annotations

import math
import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.contacts import contacts, overlap, segments
from server.mechanics.polygon import edges_of
from server.mechanics.section import rectangle


def reach(count, gap=0.05):
    return np.full((count, count), gap)


def found(outlines, gap=0.05):
    return [
        (c.first, c.second, c.start.round(6).tolist(), c.end.round(6).tolist())
        for c in contacts(outlines, reach(len(outlines), gap))
    ]


FLANGE, WEB = rectangle(90, 70, (12.5, 0)), rectangle(12.5, 400, (0, 0))


def test_two_faces_meet_over_their_common_length():
    contact = contacts([FLANGE, WEB], reach(2))[0]
    assert (contact.first, contact.second, contact.length, contact.gap) == (0, 1, 70.0, 0.0)
    assert contact.start.tolist() == [12.5, 0.0]
    assert contact.end.tolist() == [12.5, 70.0]


@pytest.mark.parametrize(("gap", "touches"), [(0.0, True), (0.05, True), (0.051, False), (1.0, False)])
def test_a_gap_up_to_the_tolerance_is_a_contact(gap, touches):
    assert bool(contacts([FLANGE, WEB - [gap, 0]], reach(2))) is touches


def test_reach_is_that_of_the_pair_and_may_be_given_one_way_round():
    apart = [WEB, rectangle(20, 20, (13.5, 0)), rectangle(20, 20, (13.5, 50))]
    allowed = reach(3)
    allowed[2, 0] = 1.05
    only = contacts(apart, allowed)
    assert [(c.first, c.second) for c in only] == [(0, 2)]
    assert only[0].gap == pytest.approx(1.0)
    assert only[0].start == pytest.approx([13.0, 50.0])  # midway in the gap


def test_a_hair_of_overlap_is_still_a_contact():
    contact = contacts([FLANGE, WEB - [-0.04, 0]], reach(2))[0]
    assert contact.length == pytest.approx(70.0)
    assert contact.gap == 0.0
    assert not contacts([FLANGE, WEB - [-0.06, 0]], reach(2))


def test_corners_that_meet_are_no_contact():
    assert not contacts([rectangle(10, 10, (0, 0)), rectangle(10, 10, (10, 10))], reach(2))
    diamond = rectangle(10, 10, (0, 10), turn=45)
    assert not contacts([rectangle(40, 10, (-10, 0)), diamond], reach(2))


def test_edges_that_look_the_same_way_are_no_contact():
    assert not contacts([rectangle(10, 10, (0, 0)), rectangle(10, 10, (0.01, 20))], reach(2))
    assert [(c[0], c[1]) for c in found([rectangle(10, 10, (0, 0)), rectangle(10, 10, (10, 0))])] == [(0, 1)]


def test_a_wedge_is_not_parallel():
    lid = np.array([(0, 10), (100, 10.2), (100, 30), (0, 30.0)])
    assert not contacts([rectangle(100, 10, (0, 0)), lid], reach(2, 1.0))


def test_a_turned_pair_touches_as_the_straight_one_does():
    pieces = [rectangle(40, 20, (0, 0)), rectangle(30, 15, (5, 20))]
    for angle in np.radians([10, 37, 90, 135, 200, 271]):
        turn = np.array([[math.cos(angle), math.sin(angle)], [-math.sin(angle), math.cos(angle)]])
        contact = contacts([piece @ turn for piece in pieces], reach(2))[0]
        assert contact.length == pytest.approx(30.0)
        ends = np.array([(5, 20), (35, 20.0)]) @ turn
        low = min(ends.tolist(), key=lambda p: (round(p[1], 6), p[0]))
        assert contact.start == pytest.approx(low)


def test_segments_of_a_pair_count_from_the_lowest_then_the_leftmost():
    fork = np.array(
        [
            (0, 0),
            (50, 0),
            (50, 40),
            (40, 40),
            (40, 10),
            (30, 10),
            (30, 40),
            (20, 40),
            (20, 10),
            (10, 10),
            (10, 40),
            (0, 40.0),
        ]
    )
    lid = rectangle(50, 10, (0, 40))
    assert found([lid, fork]) == [
        (0, 1, [0.0, 40.0], [10.0, 40.0]),
        (0, 1, [20.0, 40.0], [30.0, 40.0]),
        (0, 1, [40.0, 40.0], [50.0, 40.0]),
    ]
    ends = [rectangle(5, 30, (50, 0)), np.array([(50, 0), (0, 0), (0, -9), (60, -9), (60, 30), (55, 30), (55, 0.0)])]
    by_pair = segments(contacts([fork, *ends], reach(3)))
    assert [c.start.tolist() for c in by_pair[1, 2]] == [[50.0, 0.0], [55.0, 0.0]]


def test_collinear_stretches_that_follow_each_other_are_one():
    stepped = np.array([(0, 10), (30, 10), (55, 10), (100, 10), (100, 30), (0, 30.0)])
    assert found([rectangle(100, 10, (0, 0)), stepped]) == [(0, 1, [0.0, 10.0], [100.0, 10.0])]


def test_a_corner_parts_two_contacts():
    corner = np.array([(0, 0), (50, 0), (50, 10), (10, 10), (10, 50), (0, 50.0)])
    block = rectangle(30, 30, (10, 10))
    assert [c.length for c in contacts([corner, block], reach(2))] == [30.0, 30.0]


def test_the_inside_of_a_tube_touches_its_core():
    tube = [rectangle(60, 80, (0, 0)), rectangle(54, 74, (3, 3))[::-1]]
    core = rectangle(54, 40, (3, 3))
    lengths = sorted(c.length for c in contacts([tube, core], reach(2)))
    assert lengths == [40.0, 40.0, 54.0]
    assert overlap([tube, core]) == []
    assert overlap([tube, core - [0, 1]])[0][2] == pytest.approx(54.0)


def test_a_third_piece_in_the_gap_hides_what_lies_behind():
    strip = rectangle(40, 2, (0, 10))
    pieces = [rectangle(100, 10, (0, 0)), strip, rectangle(100, 10, (0, 12))]
    through = [
        (c.start.tolist(), c.end.tolist()) for c in contacts(pieces, reach(3, 3.05)) if (c.first, c.second) == (0, 2)
    ]
    assert through == [([40.0, 11.0], [100.0, 11.0])]


def test_order_of_pieces_only_swaps_the_names():
    pieces = [FLANGE, WEB, rectangle(90, 70, (12.5, 330)), rectangle(12.5, 400, (102.5, 0))]
    there = found(pieces)
    back = found(pieces[::-1])
    assert {(a, b, *map(tuple, ends)) for a, b, *ends in there} == {
        (3 - b, 3 - a, *map(tuple, ends)) for a, b, *ends in back
    }


@given(
    st.floats(1, 300),
    st.floats(1, 300),
    st.floats(-200, 200),
    st.floats(0, 0.04),
    st.floats(0, 360),
    st.tuples(st.floats(-5000, 5000), st.floats(-5000, 5000)),
)
@settings(max_examples=60)
def test_contact_length_is_the_overlap_wherever_the_pair_stands(first, second, slide, gap, angle, shift):
    pieces = [rectangle(first, 20, (0, 0)), rectangle(second, 30, (slide, 20 + gap))]
    expected = min(first, slide + second) - max(0.0, slide)
    turn = np.array([[math.cos(angle), math.sin(angle)], [-math.sin(angle), math.cos(angle)]])
    lengths = [c.length for c in contacts([piece @ turn + shift for piece in pieces], reach(2))]
    if expected > 0.0501:
        assert lengths == [pytest.approx(expected, abs=1e-6)]
    elif expected < 0.0499:
        assert lengths == []


def test_overlapping_rectangles_share_their_common_area():
    assert overlap([rectangle(10, 10, (0, 0)), rectangle(10, 10, (7, 6))]) == [(0, 1, 12.0)]
    assert overlap([rectangle(10, 10, (0, 0)), rectangle(10, 10, (9.96, 0))]) == []
    assert overlap([rectangle(10, 10, (0, 0)), rectangle(10, 10, (9.94, 0))]) == [(0, 1, pytest.approx(0.6))]
    assert overlap([rectangle(10, 10, (0, 0)), rectangle(2, 2, (4, 4))]) == [(0, 1, 4.0)]


def clipped_area(subject, window):
    """Area of a polygon within a convex one, by clipping edge after edge: the tests' own way."""
    points = [tuple(p) for p in subject]
    for (ax, ay), (bx, by) in zip(window, np.roll(window, -1, axis=0), strict=True):
        side = [(bx - ax) * (y - ay) - (by - ay) * (x - ax) for x, y in points]
        kept = []
        for k in range(len(points)):
            (x0, y0), (x1, y1), s0, s1 = points[k - 1], points[k], side[k - 1], side[k]
            if (s0 > 0) != (s1 > 0):
                t = s0 / (s0 - s1)
                kept.append((x0 + t * (x1 - x0), y0 + t * (y1 - y0)))
            if s1 > 0:
                kept.append((x1, y1))
        points = kept
    if not points:
        return 0.0
    x, y = np.array(points).T
    return abs(float(x @ np.roll(y, -1) - y @ np.roll(x, -1))) / 2


@given(st.floats(0, 90), st.floats(0, 90), st.floats(-60, 60), st.floats(-60, 60))
@settings(max_examples=60)
def test_turned_pieces_share_what_clipping_finds(turn_1, turn_2, across, up):
    tee = np.array([(-10, 0), (10, 0), (10, 40), (40, 40), (40, 60), (-40, 60), (-40, 40), (-10, 40.0)])
    angle = math.radians(turn_1)
    one = tee @ np.array([[math.cos(angle), math.sin(angle)], [-math.sin(angle), math.cos(angle)]])
    other = rectangle(50, 35, (across, up), turn=turn_2)
    # the tee is not convex, the rectangle is: clip the tee by it
    expected = clipped_area(one, other)
    area = sum(area for _, _, area in overlap([one, other]))
    if expected > 1.0:
        assert area == pytest.approx(expected, rel=1e-6)
    else:
        assert area == pytest.approx(0.0, abs=1.01)


def test_depth_counts_not_area():
    # 0.03 mm oversize all round in a tube: touching, though the shared area is large
    tube = [rectangle(60, 80, (0, 0)), rectangle(54, 74, (3, 3))]
    assert overlap([tube, rectangle(54.06, 74.06, (2.97, 2.97))]) == []
    assert overlap([tube, rectangle(54.2, 74.2, (2.9, 2.9))])[0][2] == pytest.approx(54.2 * 74.2 - 54 * 74)
    wide = [rectangle(200, 80, (0, 0)), rectangle(194, 74, (3, 3))]
    assert overlap([wide, rectangle(150, 74.09, (20, 2.955))]) == []  # 0.045 mm into the wall above and below
    assert overlap([wide, rectangle(150, 74.12, (20, 2.94))])[0][2] == pytest.approx(150 * 0.12)
    turned = [rectangle(200, 20, (0, 0), turn=30), None]
    down = np.array([math.sin(math.radians(30)), -math.cos(math.radians(30))])
    for depth, expected in ((0.04, 0), (0.06, 1)):
        turned[1] = turned[0] + down * (20 - depth)
        assert len(overlap(turned)) == expected


def test_edges_that_are_ready_do_as_well_as_outlines():
    edges = edges_of([FLANGE, WEB])
    assert contacts(edges, reach(2))[0].length == 70.0
    assert overlap(edges) == []


def test_a_closing_corner_does_no_harm():
    closed = np.vstack((FLANGE, FLANGE[:1]))
    assert found([closed, WEB]) == found([FLANGE, WEB])


def test_refuses_a_reach_that_does_not_fit():
    with pytest.raises(InputError, match="every pair"):
        contacts([FLANGE, WEB], reach(3))


def test_two_hundred_pieces_take_a_fraction_of_a_second():
    pieces = [rectangle(10, 10, (10 * (k % 20), 10 * (k // 20))) for k in range(200)]
    started = time.perf_counter()
    assert len(contacts(pieces, reach(200))) == 19 * 10 + 20 * 9
    assert overlap(pieces) == []
    assert time.perf_counter() - started < 0.5
