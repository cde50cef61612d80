"""Section numbers of the demo members, reckoned again from their pieces and set against the hand checks.

The hand checks are the project's own (invented members), typed as printed there; half of the last printed digit is
allowed.
"""

from __future__ import annotations

from decimal import Decimal

import numpy as np
import pytest

from server.mechanics.contacts import contacts
from server.mechanics.flow import JointLine, joint_flows
from server.mechanics.section import Piece, largest_cuts, properties, rectangle, shear_stiffness


def agrees(found: float, text: str) -> None:
    """Within half of the last printed digit."""
    exponent = int(Decimal(text).as_tuple().exponent)
    assert found == pytest.approx(float(text), abs=float(Decimal(5).scaleb(exponent - 1)))


def settle(pieces, gap=0.05):
    found = contacts([p.rings for p in pieces], np.full((len(pieces),) * 2, gap))
    section = properties(pieces)
    return section, found, joint_flows(pieces, section, [JointLine(c.first, c.second, c.start, c.end) for c in found])


def piece(name, width, depth, at, E, G=None):
    return Piece(name, rectangle(width, depth, at), E, G)


def tube(name, width, depth, wall, at, E, G=None):
    hole = rectangle(width - 2 * wall, depth - 2 * wall, (at[0] + wall, at[1] + wall))
    return Piece(name, rectangle(width, depth, at), E, G, holes=(hole,))


def test_roof_box_beam():
    pieces = [
        piece("bottom flange", 90, 70, (12.5, 0), 11_000.0, 600.0),
        piece("top flange", 90, 70, (12.5, 330), 11_000.0, 600.0),
        piece("web L", 12.5, 400, (0, 0), 6_500.0, 600.0),
        piece("web R", 12.5, 400, (102.5, 0), 6_500.0, 600.0),
    ]
    section, found, flows = settle(pieces)
    agrees(section.EI * 1e-9, "4697")
    assert [c.length for c in found] == pytest.approx([70.0] * 4)
    # R = 4.2 x 3 + 3.0 x 4/6 = 14.6 kN at the left support
    for flow, contact in zip(flows, found, strict=True):
        agrees(14_600 * abs(flow.first_moment) / section.EI, "35.5")
        agrees(14_600 * abs(flow.share) / section.EI / contact.length, "0.254")
    agrees(14_600 * largest_cuts(pieces, section)[2].intensity, "1.83")
    # 22.0 kNm at 2.76 m: stress at the flange's middle, its edge, the web's edge
    M = 14_600 * 2762 - 4.2 * 2762**2 / 2 - 3_000 * 762
    agrees(M * 1e-6, "22.0")
    agrees(M * 11_000 * 165 / section.EI, "8.5")
    agrees(M * 11_000 * 200 / section.EI, "10.3")
    agrees(M * 6_500 * 200 / section.EI, "6.1")
    # The wrong cut, all above mid-depth: 0.326
    above = section.first_moments[1] + 2 * 6_500 * 12.5 * 200 * 100
    agrees(14_600 * above / section.EI / 140, "0.326")
    GA = shear_stiffness(pieces, section)
    assert 5 / 6 * 600 * 25 * 400 < GA < 600 * section.area  # between the webs alone and all at one stress


def test_stage_deck_panel():
    inch, psi, pound = 25.4, 0.006894757, 4.4482216
    ribs = [piece(f"rib {k}", 1.5 * inch, 3.5 * inch, (11.625 * k * inch, 0), 1.3e6 * psi) for k in range(5)]
    skin = piece("skin", 48 * inch, 0.703 * inch, (0, 3.5 * inch), 1.2e6 * psi)
    section, found, flows = settle([skin, *ribs])
    agrees(section.EI / (pound * inch**2) / 1e6, "118.3")
    agrees(section.neutral_axis[1] / inch, "2.89")
    assert len(found) == 5
    assert [c.length / inch for c in found] == pytest.approx([1.5] * 5)
    assert {flow.split for flow in flows} == {"cut"}
    # each rib is cut off alone; an inner rib's own tributary quarter of the skin carries 175 lb/in at 2128 lb
    fifth = [2128 * abs(flow.share) / section.EI * inch for flow in flows]
    assert fifth == pytest.approx([fifth[0]] * 5)
    whole_skin = 2128 * section.first_moments[0] / section.EI * inch
    assert whole_skin == pytest.approx(sum(fifth), rel=1e-12)
    agrees(whole_skin / 4, "175")
    agrees(whole_skin / 4 / 1.5, "117")


def test_steel_strip_under_a_lintel():
    pieces = [piece("strip", 80, 8, (30, 0), 205_000.0), piece("timber", 140, 240, (0, 8), 9_500.0)]
    section, found, flows = settle(pieces)
    agrees(section.EI * 1e-9, "2963")
    agrees(properties([pieces[1]]).EI * 1e-9, "1532")
    assert found[0].length == pytest.approx(80.0)
    V = 14_300 - 4.5 * 250
    agrees(V * 1e-3, "13.2")
    agrees(V * abs(flows[0].share) / section.EI / 80, "0.64")
    M = 4.5 * 4_800**2 / 8 + 7_000 * 4_800 / 4
    axis = section.neutral_axis[1]
    agrees(M * 205_000 * axis / section.EI, "136")
    agrees(M * 9_500 * (248 - axis) / section.EI, "10.7")
    agrees(M * 9_500 * (axis - 8) / section.EI, "5.7")


def test_trailer_cross_bearer():
    pieces = [
        tube("tube", 60, 80, 3, (15, 0), 70_000.0, 26_000.0),
        piece("plate", 90, 5, (0, 80.3), 70_000.0, 26_000.0),
    ]
    section, found, flows = settle(pieces, gap=0.35)
    agrees(section.EI / 70_000 * 1e-6, "1.266")
    agrees(properties(pieces[:1]).EI / 70_000 * 1e-6, "0.736")
    assert abs(flows[0].first_moment) / 70_000 == pytest.approx(12_350, abs=5)
    q = 10_000 * abs(flows[0].share) / section.EI
    agrees(q, "97.5")
    agrees(q / 54, "1.81")
    agrees(q / 60, "1.63")
    assert found[0].length == pytest.approx(60.0)  # sharp corners here
    assert found[0].gap == pytest.approx(0.3)


def test_stacked_tubes_for_a_walkway():
    pieces = [tube(f"tube {k}", 4, 4, 0.25, (0, 4.03 * k), 2.8e6, 0.45e6) for k in range(2)]
    big = [Piece(p.name, p.outline * 25.4, p.E, p.G, holes=tuple(h * 25.4 for h in p.holes)) for p in pieces]
    section, found, flows = settle(big, gap=0.05 + 0.03 * 25.4)
    EI = section.EI / 25.4**4
    agrees(EI / 2.8e6, "48.1")
    agrees(2 * properties(pieces[:1]).EI / 2.8e6, "17.7")
    q = 810 * abs(flows[0].share) / 25.4**3 / EI
    agrees(q, "127")
    agrees(q / 3.25, "39")
    assert found[0].length / 25.4 == pytest.approx(4.0)


def test_gangway_stringer():
    pieces = [
        piece("bottom strap", 45, 4, (0, 0), 69_000.0),
        piece("core", 45, 180, (0, 5), 10_500.0),
        piece("top strap", 45, 4, (0, 186), 69_000.0),
    ]
    section, _, flows = settle(pieces, gap=1.05)
    assert abs(section.EI * 1e-9 - 444) < 1  # 444.51: the hand check prints it rounded down
    agrees(properties(pieces[1:2]).EI * 1e-9, "230")
    assert [flow.split for flow in flows] == ["cut", "cut"]
    for flow in flows:
        agrees(3_840 * abs(flow.share) / section.EI, "10.0")
    agrees(4.03e6 * 69_000 * 95 / section.EI, "59")
    agrees(4.03e6 * 10_500 * 90 / section.EI, "8.6")
