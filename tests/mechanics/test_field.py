"""The field of shear against a second finite-element solution, hand cuts, and networks of springs."""

from __future__ import annotations

import numpy as np
import pytest

from server.errors import InputError
from server.mechanics.field import PARTS, Bond, shear_field
from server.mechanics.flow import JointLine, joint_flows
from server.mechanics.section import Piece, properties, rectangle
from tests.mechanics.field_reference import Reference, bonds_of, lines


def piece(name, width, depth, at, E=1.0, G=1.0):
    return Piece(name, rectangle(width, depth, at), E, G)


def polygon(name, points, E=1.0, G=1.0):
    return Piece(name, np.array(points, dtype=float), E, G)


RING = [  # four joints; sides of unlike stiffness leave no symmetry
    piece("bottom", 90, 70, (12.5, 0), 11000.0, 690.0),
    piece("top", 90, 45, (12.5, 355), 13000.0, 750.0),
    piece("left", 12.5, 400, (0, 0), 6500.0, 600.0),
    piece("right", 12.5, 400, (102.5, 0), 6500.0, 240.0),
]
THREE_WEBS = [
    piece("bottom", 160, 40, (0, 0), 11000.0, 690.0),
    piece("top", 160, 40, (0, 240), 11000.0, 690.0),
    piece("left", 20, 200, (0, 40), 9000.0, 600.0),
    piece("middle", 20, 200, (70, 40), 9000.0, 60.0),
    piece("right", 20, 200, (140, 40), 9000.0, 600.0),
]
TWO_CELLS = [
    piece("bottom", 220, 10, (0, 0), 70.0, 26.0),
    piece("top", 220, 10, (0, 110), 70.0, 26.0),
    piece("left", 10, 100, (0, 10), 70.0, 26.0),
    piece("web", 8, 100, (90, 10), 70.0, 26.0),
    piece("right", 14, 100, (206, 10), 200.0, 77.0),
]
MITRED = [
    polygon("bottom", [(0, 0), (200, 0), (160, 40), (40, 40)], 10.0, 1.0),
    polygon("right", [(200, 0), (200, 160), (160, 120), (160, 40)], 10.0, 2.0),
    polygon("top", [(200, 160), (0, 160), (40, 120), (160, 120)], 12.0, 1.0),
    polygon("left", [(0, 160), (0, 0), (40, 40), (40, 120)], 10.0, 0.5),
]
SLOPING = [  # two parts of a web, glued along a slope, under one flange
    polygon("left", [(0, 0), (20, 0), (80, 60), (0, 60)], 10.0, 1.0),
    polygon("right", [(20, 0), (120, 0), (120, 60), (80, 60)], 12.0, 3.0),
    piece("flange", 160, 20, (-20, 60), 10.0, 1.0),
]


def compare(pieces, across, up, tolerance=0.01):
    """Flows of all three problems within 1 % of the other solution, or of a tenth of the largest flow."""
    bonds = bonds_of(pieces)
    found = shear_field(pieces, properties(pieces), bonds)
    other = Reference(pieces, across, up)
    wanted = other.flows(bonds)
    wanted[:, 2] *= -1 / other.GJ
    mine = np.stack([found.share, found.share_across, found.twist], axis=1)
    assert found.converged
    assert found.error.max() <= 0.005
    assert found.balance < 1e-9
    assert pytest.approx(other.GJ, rel=0.005) == found.GJ
    size = np.hypot(*np.ptp(np.concatenate([p.outline for p in pieces]), axis=0))
    np.testing.assert_allclose(found.shear_centre, other.shear_centre, atol=0.002 * size)
    np.testing.assert_allclose(found.energy, other.energy, rtol=0.01, atol=1e-3 * np.abs(other.energy).max())
    scale = np.maximum(np.abs(wanted), 0.1 * np.abs(wanted).max(axis=0))
    scale[:, 2] = np.maximum(scale[:, 2], 1e-2 / size**2)  # an open section's joints carry no flow in torsion
    assert (np.abs(mine - wanted) / scale).max() < tolerance, (mine, wanted)
    return found


def grid(pieces, step):
    corners = np.concatenate([p.outline for p in pieces])
    return lines(corners[:, 0], step), lines(corners[:, 1], step)


def even(low, high, step):
    return np.linspace(low, high, round((high - low) / step) + 1)


def test_four_joint_ring():
    found = compare(RING, *grid(RING, 12.0))
    left, right = abs(found.share[0]), abs(found.share[1])
    assert left > 1.5 * right  # the stiffer web takes more


def test_three_webs_of_which_one_is_soft():
    found = compare(THREE_WEBS, *grid(THREE_WEBS, 10.0))
    of = {(b.first, b.second): abs(q) for b, q in zip(bonds_of(THREE_WEBS), found.share, strict=True)}
    assert of[1, 3] < 0.5 * of[1, 2]


def test_two_cells():
    compare(TWO_CELLS, *grid(TWO_CELLS, 5.0))


def test_mitred_frame():
    compare(MITRED, even(0, 200, 2.5), even(0, 160, 2.5))


def test_sloping_joint():
    """The grid's diagonals run along the slope; its lines crowd where the three joints meet."""
    down = np.concatenate(([0.0], 2.5 * 0.3 ** np.arange(6, 0, -1.0), np.arange(2.5, 61, 2.5)))
    across = np.concatenate((np.linspace(-20, 20, 9), 80 - down, 80 + down, np.linspace(120, 140, 5)[:-1], [140.0]))
    across = across[(across <= 140) & (across >= -20)]
    up = np.concatenate((60 - down, 60 + down[down <= 20]))
    compare(SLOPING, np.unique(across.round(9)), np.unique(up.round(9)))


def test_three_pieces_meeting_in_a_point():
    """Where the joints of three pieces meet, half a nodal force is another's guess, so 1 % of the largest is asked."""
    pieces = [
        piece("foot", 90, 30, (0, 0), 2.0, 2.0),
        piece("left", 20, 120, (25, 30)),
        piece("right", 25, 120, (45, 30), 3.0, 2.0),
        piece("cap", 70, 20, (10, 150), 3.0, 1.5),
    ]
    bonds = bonds_of(pieces)
    found = shear_field(pieces, properties(pieces), bonds)
    wanted = Reference(pieces, *[lines(c, 4.0, crowd=5) for c in grid_corners(pieces)]).flows(bonds)[:, 0]
    np.testing.assert_allclose(found.share, wanted, atol=0.01 * np.abs(wanted).max())


def grid_corners(pieces):
    return np.concatenate([p.outline for p in pieces]).T


def test_z_and_l_bend_about_both_axes():
    for pieces in (
        [piece("foot", 60, 10, (0, 0), 2.0), piece("stem", 10, 80, (50, 10)), piece("head", 60, 10, (50, 90))],
        [piece("foot", 80, 10, (0, 0)), piece("stem", 12, 110, (0, 10), 2.0, 2.0)],
    ):
        found = compare(pieces, *grid(pieces, 5.0))
        section = properties(pieces)
        # clean cuts: the flow is the first moment, about either axis
        moments = section.pieces.area * np.array([p.E for p in pieces])
        arm = section.pieces.centroid - section.neutral_axis
        for flow, axis in ((found.share, 1), (found.share_across, 0)):
            assert abs(flow[0]) == pytest.approx(abs(moments[0] * arm[0, axis]), rel=1e-6)


def test_hand_cuts_and_symmetry_give_the_same_flow():
    box = [*RING[:3], piece("right", 12.5, 400, (102.5, 0), 6500.0, 600.0)]
    section, bonds = properties(box), bonds_of(box)
    by_hand = joint_flows(box, section, [JointLine(b.first, b.second, b.start, b.end) for b in bonds])
    found = shear_field(box, section, bonds)
    assert [flow.split for flow in by_hand] == ["symmetry"] * 4
    np.testing.assert_allclose(found.share, [flow.share for flow in by_hand], rtol=1e-5)


@pytest.mark.parametrize("width", [None, 30.0])
def test_the_run_of_stress_along_a_bond(width):
    """Its mean is the flow; it is largest at the inner end, where the flange meets the web's free side."""
    bonds = bonds_of(RING, width=width)
    found = shear_field(RING, properties(RING), bonds)
    bonded = 70.0 if width is None else width
    assert found.parts.shape == (4, PARTS)
    assert found.parts[0].mean() * bonded == pytest.approx(found.share[0], rel=1e-9)
    sizes = np.abs(found.parts[0])
    assert sizes.argmax() == PARTS - 1
    if width is not None:
        assert sizes[0] > sizes[1]  # the end of the bond inside the contact is a crack


def test_a_narrower_bond_carries_the_same_flow_of_a_clean_cut():
    tee = [piece("web", 20, 100, (40, 0)), piece("flange", 100, 20, (0, 100))]
    whole, part = (shear_field(tee, properties(tee), bonds_of(tee, width=width)) for width in (None, 5.0))
    assert part.share[0] == pytest.approx(whole.share[0], rel=1e-9)
    assert part.energy[0, 0] > whole.energy[0, 0]


def test_two_bonds_on_one_contact_leave_the_middle_apart():
    """A box of two planks: bonds along both edges of the contact, nothing between them."""
    planks = [piece("low", 100, 20, (0, 0)), piece("high", 100, 20, (0, 20))]
    bonds = [
        Bond(0, 1, np.array([0.0, 20.0]), np.array([20.0, 20.0])),
        Bond(0, 1, np.array([60.0, 20.0]), np.array([100.0, 20.0])),
    ]
    found = shear_field(planks, properties(planks), bonds)
    assert found.share.sum() == pytest.approx(-100 * 20 * 10.0, rel=1e-9)
    assert abs(found.share[1]) > abs(found.share[0])


def test_soft_bonds_share_as_springs():
    """Bonds far softer than the pieces: every piece moves as one body, the flows are those of a network of springs."""
    bonds = bonds_of(RING)
    stiffness = [1e-6, 2e-6, 3e-6, 5e-6]
    soft = [Bond(b.first, b.second, b.start, b.end, b.gap, None, k) for b, k in zip(bonds, stiffness, strict=True)]
    section = properties(RING)
    found = shear_field(RING, section, soft)
    network, push = np.zeros((4, 4)), section.first_moments
    spring = [k * np.hypot(*(b.end - b.start)) for k, b in zip(stiffness, bonds, strict=True)]
    for k, b in zip(spring, bonds, strict=True):
        network[np.ix_([b.first, b.second], [b.first, b.second])] += k * np.array([[1, -1], [-1, 1]])
    moves = np.linalg.lstsq(network, push, rcond=None)[0]
    wanted = [k * (moves[b.first] - moves[b.second]) for k, b in zip(spring, bonds, strict=True)]
    np.testing.assert_allclose(found.share, wanted, rtol=1e-4)


def test_a_bond_line_that_gives_way_is_a_thin_layer():
    """Springs of G / t against the same bond lines meshed as pieces that carry no bending, by the other solution."""
    layer, modulus = 1.0, 4.0
    apart = [
        piece("bottom", 90, 70, (13.5, 0), 11000.0, 690.0),
        piece("top", 90, 45, (13.5, 355), 13000.0, 750.0),
        piece("left", 12.5, 400, (0, 0), 6500.0, 600.0),
        piece("right", 12.5, 400, (104.5, 0), 6500.0, 600.0),
        piece("glue 1", layer, 70, (12.5, 0), 1e-3, modulus),
        piece("glue 2", layer, 70, (103.5, 0), 1e-3, 3 * modulus),
        piece("glue 3", layer, 45, (12.5, 355), 1e-3, modulus),
        piece("glue 4", layer, 45, (103.5, 355), 1e-3, modulus),
    ]
    filled = bonds_of(apart)
    other = Reference(apart, *grid(apart, 14.0))
    wanted = other.flows(filled)[:, 0]
    through = {filled[j].second: abs(wanted[j]) for j in range(len(filled)) if filled[j].first < 2}
    pieces = apart[:4]
    bonds = bonds_of(pieces, gap=1.05)
    given = [modulus, 3 * modulus, modulus, modulus]
    soft = [Bond(b.first, b.second, b.start, b.end, b.gap, None, G / layer) for b, G in zip(bonds, given, strict=True)]
    found = shear_field(pieces, properties(pieces), soft)
    np.testing.assert_allclose(np.abs(found.share), [through[4], through[5], through[6], through[7]], rtol=0.01)


def test_stiff_bonds_are_rigid_ones():
    bonds = bonds_of(RING)
    stiff = [Bond(b.first, b.second, b.start, b.end, b.gap, None, 1e8) for b in bonds]
    one, other = (shear_field(RING, properties(RING), some) for some in (bonds, stiff))
    np.testing.assert_allclose(one.share, other.share, rtol=1e-4)
    assert pytest.approx(other.GJ, rel=1e-4) == one.GJ


def test_what_cannot_be_solved_is_named():
    bare = [Piece("rib", rectangle(20, 100, (40, 0)), 1.0), piece("flange", 100, 20, (0, 100))]
    with pytest.raises(InputError, match="rib has no shear modulus"):
        shear_field(bare, properties(bare), bonds_of(bare))
    with pytest.raises(InputError, match="stiffness"):
        shear_field(RING, properties(RING), bonds_of(RING, stiffness=0.0))
    angle = np.linspace(0, 2 * np.pi, 20_001)[:-1]
    disc = polygon("disc", np.stack((np.cos(angle), np.sin(angle)), axis=1))
    with pytest.raises(InputError, match="too many sides"):
        shear_field([disc], properties([disc]), [])
