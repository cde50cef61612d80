"""Cuts for bending about both axes: against cuts for one axis, a section turned by a quarter, and sums by hand."""

from __future__ import annotations

import numpy as np
import pytest

from server.mechanics.contacts import contacts
from server.mechanics.field import Bond, shear_field
from server.mechanics.field_cuts import field_cuts
from server.mechanics.plane_cuts import _cuts, plane_cuts
from server.mechanics.section import Piece, properties, rectangle

PLATES = [
    ("low", (100, 12, (0, 0)), 70000.0, 26000.0),
    ("high", (70, 12, (0, 112)), 60000.0, 20000.0),
    ("left", (8, 100, (0, 12)), 70000.0, 26000.0),
    ("right", (14, 100, (50, 12)), 30000.0, 9000.0),
]


def solved(turned=False):
    pieces = []
    for name, size, E, G in PLATES:
        outline = rectangle(*size)
        if turned:  # by a quarter: (a, u) becomes (-u, a)
            outline = np.stack((-outline[:, 1], outline[:, 0]), axis=1)
        pieces.append(Piece(name, outline, E, G))
    found = contacts([p.rings for p in pieces], np.full((4, 4), 0.05))
    bonds = [Bond(c.first, c.second, c.start, c.end, c.gap) for c in found]
    whole = properties(pieces)
    return pieces, whole, bonds, shear_field(pieces, whole, bonds)


@pytest.mark.parametrize("turned", [False, True])
def test_for_one_axis_level_cuts_are_those_of_that_axis_and_upright_ones_of_the_turned_section(turned):
    """With curvature changing up and down alone; then sideways alone, where the upright cuts are the level ones."""
    section, other = solved(), solved(turned)
    wanted = field_cuts(*other)
    for k in range(4):
        cuts = _cuts(section[0], section[1], section[2], section[3], k)
        moment = cuts.aside if turned else cuts.first
        own = cuts.level if not turned else ~cuts.level
        stress = np.abs(moment / cuts.width)[own].max()
        assert stress == pytest.approx(abs(wanted[k].first_moment) / wanted[k].width, rel=2e-4)


def test_the_worst_of_all_ratios_are_among_those_kept():
    pieces, whole, bonds, field = solved()
    every = [_cuts(pieces, whole, bonds, field, k) for k in range(4)]
    kept = plane_cuts(pieces, whole, bonds, field)
    for angle in np.random.default_rng(5).uniform(0, np.pi, 40):
        c = np.cos(angle) * 1e-9, np.sin(angle) * 2e-9
        for all_of, few in zip(every, kept, strict=True):
            full, found = ((np.abs(c[0] * each.first - c[1] * each.aside) / each.width).max() for each in (all_of, few))
            assert found == pytest.approx(full, rel=1e-4)


def test_without_a_field_a_cut_goes_through_all_that_it_meets():
    """An angle of two plates: at the foot's top the leg alone is cut; S of the leg above, by hand."""
    pieces = [Piece("leg", rectangle(8, 90, (0, 10)), 70000.0), Piece("foot", rectangle(60, 10, (0, 0)), 70000.0)]
    whole = properties(pieces)
    cuts = _cuts(pieces, whole, [], None, 0)
    a_0, u_0 = whole.neutral_axis
    at = np.flatnonzero(cuts.level)[np.abs(cuts.at[cuts.level] - 40.0).argmin()]
    up = cuts.at[at]
    assert cuts.width[at] == pytest.approx(8)
    assert cuts.first[at] == pytest.approx(70000 * 8 * (100 - up) * ((100 + up) / 2 - u_0))
    assert cuts.aside[at] == pytest.approx(70000 * 8 * (100 - up) * (4 - a_0))
    upright = np.flatnonzero(~cuts.level)
    place = upright[np.abs(cuts.at[upright] - 4.0).argmin()]
    across = cuts.at[place]
    assert cuts.width[place] == pytest.approx(100)
    right = 70000 * ((8 - across) * 90 * ((8 + across) / 2 - a_0) + (60 - across) * 10 * ((60 + across) / 2 - a_0))
    assert cuts.aside[place] == pytest.approx(right)
