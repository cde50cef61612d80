"""Rounds in rounds touch all round; anything else that is round touches nothing."""

from __future__ import annotations

import math

import numpy as np
import pytest

from server.mechanics.contacts import contacts
from server.mechanics.polygon import edges_of
from server.mechanics.round_contacts import Round, round_contacts
from server.mechanics.section import rectangle
from server.mechanics.shapes import drawn_round, drawn_tube, placed, polygon

REACH = np.full((2, 2), 0.05)


@pytest.mark.parametrize(
    ("gap", "off", "touches"),
    [
        *((0, 0, True), (0.05, 0, True), (0.051, 0, False), (0.02, 0.02, True)),
        *((0.03, 0.03, False), (-0.05, 0, True), (-0.06, 0, False)),
    ],
)
def test_a_gap_up_to_the_tolerance_is_a_contact_all_round(gap, off, touches):
    inner = 25.0 - gap
    found = round_contacts([Round(0, (off, 0.0), inner, 0.0), Round(1, (0.0, 0.0), 30.0, 25.0)], REACH)
    assert bool(found) is touches
    if found:
        assert found[0].length == pytest.approx(math.pi * (25.0 + inner))
        assert found[0].start.tolist() == found[0].end.tolist()
        assert found[0].start[1] == pytest.approx(-(25.0 + inner) / 2)
        assert found[0].middle == pytest.approx([off / 2, 0.0], abs=1e-9)


def test_solid_rounds_side_by_side_touch_only_at_a_point():
    assert not round_contacts([Round(0, (0, 0), 10, 0), Round(1, (20, 0), 10, 0)], REACH)
    assert not round_contacts([Round(0, (0, 0), 10, 0), Round(1, (0, 0), 20, 0)], REACH)


def of(*shapes):
    return edges_of([shape.rings for shape in shapes], [shape.curved for shape in shapes])


def test_only_flats_of_rounded_shapes_touch():
    tube = placed(drawn_tube(100, 60, 4, corner_radius=8), (0, 0))
    plate = polygon(rectangle(200, 10, (-50, 60)))
    found = contacts(of(tube, plate), REACH)
    assert [c.length for c in found] == [pytest.approx(100 - 2 * 8)]
    assert found[0].start.tolist() == [8.0, 60.0]
    bar = placed(drawn_round(60), (0, 0))
    for turn in np.linspace(0, 90, 40):  # whichever side of the drawn arc lies along the plate
        c, s = math.cos(math.radians(turn)), math.sin(math.radians(turn))
        turned = polygon((rectangle(200, 10, (-100, 30)) @ [[c, s], [-s, c]]) + [30, 30])
        assert not contacts(of(bar, turned), REACH)


def test_the_flats_of_a_tube_in_a_tube_touch_and_its_corners_do_not():
    outer = placed(drawn_tube(108, 68, 4, corner_radius=12), (-4, -4))
    inner = placed(drawn_tube(100, 60, 4, corner_radius=8), (0, 0))
    lengths = sorted(c.length for c in contacts(of(outer, inner), REACH))
    assert lengths == pytest.approx([44, 44, 84, 84])
