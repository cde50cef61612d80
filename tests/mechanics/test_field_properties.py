"""What must change nothing in the field, or change it in a known way."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.mechanics.field import Bond, shear_field
from server.mechanics.section import Piece, properties, rectangle
from tests.mechanics.field_reference import bonds_of

size = st.floats(8.0, 60.0)
modulus = st.floats(1.0, 10.0)


@st.composite
def rings(draw):
    """Four pieces round a cell, of any sizes and moduli; E and G not bound to each other."""
    w, h = draw(st.floats(40.0, 200.0)), draw(st.floats(60.0, 300.0))
    low, high, left, right = (draw(size) for _ in range(4))
    low, high = min(low, 0.4 * h), min(high, 0.4 * h)
    boxes = {
        "low": (w, low, (0.0, 0.0)),
        "high": (w, high, (0.0, h - high)),
        "left": (left, h, (-left, 0.0)),
        "right": (right, h, (w, 0.0)),
    }
    return [Piece(name, rectangle(*box), draw(modulus), draw(modulus)) for name, box in boxes.items()]


def solve(pieces, bonds=None):
    return shear_field(pieces, properties(pieces), bonds_of(pieces) if bonds is None else bonds)


def moved(pieces, bonds, move, E=1.0):
    changed = [Piece(p.name, move(p.outline), E * p.E, p.G) for p in pieces]
    return changed, [Bond(b.first, b.second, move(b.start), move(b.end), b.gap, b.width, b.stiffness) for b in bonds]


def close(found, wanted, tolerance=0.006):
    np.testing.assert_allclose(found, wanted, rtol=tolerance, atol=0.3 * tolerance * np.abs(wanted).max())


@settings(max_examples=8, deadline=None)
@given(rings(), st.floats(-180.0, 180.0), st.floats(-2000.0, 2000.0), st.floats(-2000.0, 2000.0))
def test_turning_and_moving(pieces, degrees, across, up):
    """Loads turn with the section: bending about the new axes is a mixture of bending about the old ones."""
    bonds, angle = bonds_of(pieces), np.radians(degrees)
    c, s = np.cos(angle), np.sin(angle)
    turn = np.array([[c, -s], [s, c]])
    before = solve(pieces, bonds)
    after = solve(*moved(pieces, bonds, lambda at: at @ turn.T + (across, up)))
    close(after.share, c * before.share + s * before.share_across)
    close(after.share_across, c * before.share_across - s * before.share)
    close(after.twist, before.twist)
    assert pytest.approx(before.GJ, rel=0.005) == after.GJ
    box = np.ptp(np.concatenate([p.outline for p in pieces]), axis=0).max()
    np.testing.assert_allclose(after.shear_centre, turn @ before.shear_centre + (across, up), atol=2e-3 * box)


@settings(max_examples=6, deadline=None)
@given(rings(), st.floats(0.01, 100.0), st.floats(0.01, 100.0))
def test_scaling(pieces, length, weight):
    """Sizes scaled by anything but powers of two round anew, and a row of elements may come or go: to 1e-4 then."""
    bonds = bonds_of(pieces)
    before = solve(pieces, bonds)
    after = solve(*moved(pieces, bonds, lambda at: length * at, weight))
    close(after.share, weight * length**3 * before.share, 1e-4)
    close(after.twist, before.twist / length**2, 1e-4)
    assert pytest.approx(length**4 * before.GJ, rel=1e-4) == after.GJ
    assert after.EIw == pytest.approx(weight * length**6 * before.EIw, rel=1e-4)
    np.testing.assert_allclose(after.shear_centre, length * before.shear_centre, rtol=1e-4, atol=1e-4 * length)


@settings(max_examples=6, deadline=None)
@given(rings(), st.floats(0.3, 1.0))
def test_swapping_sides_turns_signs(pieces, share):
    bonds = bonds_of(pieces, width=share * 8.0)
    before = solve(pieces, bonds)
    after = solve(pieces, [Bond(b.second, b.first, b.end, b.start, b.gap, b.width) for b in bonds])
    close(after.share, -before.share)
    close(after.twist, -before.twist)
    close(after.parts, -before.parts[:, ::-1], 0.02)


@settings(max_examples=6, deadline=None)
@given(rings(), st.floats(0.2, 0.8))
def test_splitting_a_piece_changes_no_other_joint(pieces, at):
    """A web sawn through and glued again rigidly, along or across."""
    before = solve(pieces)
    for axis in (0, 1):
        web = pieces[2].outline
        low, high = web.min(axis=0), web.max(axis=0)
        cut = low + (high - low) * at
        first, second = (low, high.copy()), (low.copy(), high)
        first[1][axis] = second[0][axis] = cut[axis]
        halves = [rectangle(*(b - a), a) for a, b in (first, second)]
        parts = [*pieces[:2], *(Piece(f"{k}", h, pieces[2].E, pieces[2].G) for k, h in enumerate(halves)), pieces[3]]
        bonds = bonds_of(parts)
        after = solve(parts, bonds)
        right = [q for b, q in zip(bonds, after.share, strict=True) if b.second == 4]
        close(np.array(right), before.share[[1, 3]])
        assert pytest.approx(before.GJ, rel=0.005) == after.GJ


@settings(max_examples=10, deadline=None)
@given(rings())
def test_reciprocity_and_equilibrium(pieces):
    """The work of one shear on the other's strains is the same both ways; flows balance each piece in both."""
    section, bonds = properties(pieces), bonds_of(pieces)
    found = solve(pieces, bonds)
    scale = np.sqrt(found.energy[0, 0] * found.energy[1, 1])
    assert found.energy[0, 1] == pytest.approx(found.energy[1, 0], abs=1e-9 * scale)
    assert found.balance < 1e-9
    weights = section.pieces.area * np.array([p.E for p in pieces])
    sideways = weights * (section.pieces.centroid - section.neutral_axis)[:, 0]
    held = np.zeros(4)
    for bond, across, twist in zip(bonds, found.share_across, found.twist, strict=True):
        held[[bond.first, bond.second]] += np.array((across, -across))
        assert np.isfinite(twist)
    np.testing.assert_allclose(held, sideways, atol=1e-8 * np.abs(sideways).max())
    assert found.converged
    assert found.GJ > 0
    assert found.EIw > 0


@settings(max_examples=8, deadline=None)
@given(rings(), st.floats(0.2, 5.0))
def test_softer_bonds_twist_and_give_more(pieces, k):
    """Castigliano: what gives way can only add to the work of a shear, and take from the stiffness of torsion."""
    bonds = bonds_of(pieces)

    def of(stiffness):
        return solve(pieces, [Bond(b.first, b.second, b.start, b.end, b.gap, None, stiffness) for b in bonds])

    rigid, soft, softer = of(None), of(0.05 * k), of(0.01 * k)
    assert rigid.GJ * (1 + 1e-3) >= soft.GJ >= softer.GJ
    assert rigid.energy[0, 0] <= soft.energy[0, 0] * (1 + 1e-3)
    assert soft.energy[0, 0] <= softer.energy[0, 0]
