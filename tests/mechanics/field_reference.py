"""A second way to the field of shear: quadratic triangles on a fine regular grid, by scikit-fem.

A general library, with its own elements, assembly and mesh; pieces are told apart by where a triangle's middle lies.
The flow at a joint is the sum of the nodal forces that its two pieces exchange along it; where two joints of a piece
meet in a point, each has half of the nodal force there, which the grid lines crowded around such points make small.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from skfem import Basis, BilinearForm, ElementTriP2, LinearForm, MeshQuad, condense, solve
from skfem.helpers import dot, grad

from server.mechanics.contacts import contacts
from server.mechanics.field import Bond
from server.mechanics.section import properties


def lines(corners, step, crowd=3, near=0.25):
    """Grid lines through all given places, no further apart than ``step``, and crowded near each place."""
    places = np.unique(np.round(corners, 9))
    found = [places[0]]
    for a, b in pairwise(places):
        n = int(np.ceil((b - a) / step))
        inner = np.linspace(a, b, n + 1)
        first = inner[1] - a
        inside = [a + first * near**k for k in range(crowd, 0, -1)] + list(inner[1:-1])
        inside += [b - first * near**k for k in range(1, crowd + 1)]
        found += [*sorted(inside), b]
    return np.unique(np.round(found, 12))


def inside(place, ring):
    """Whether places (n, 2) lie in a polygon, by counting crossings."""
    a, b = ring, np.roll(ring, -1, axis=0)
    x, y = place[:, :1], place[:, 1:]
    spans = (a[:, 1] > y) != (b[:, 1] > y)
    with np.errstate(divide="ignore", invalid="ignore"):
        at = a[:, 0] + (b[:, 0] - a[:, 0]) * (y - a[:, 1]) / (b[:, 1] - a[:, 1])
    return (spans & (at > x)).sum(axis=1) % 2 == 1


@BilinearForm
def _stiffness(u, v, _):
    return dot(grad(u), grad(v))


class Reference:
    """Flows (times EI / V), torsion and shear centre of pieces that are joined wherever they touch."""

    def __init__(self, pieces, across, up):
        self.pieces = pieces
        section = properties(pieces)
        a0, u0 = section.neutral_axis
        whole = MeshQuad.init_tensor(across, up).to_meshtri(style="x")
        middle = whole.p[:, whole.t].mean(axis=1).T
        owner = np.full(len(middle), -1)
        for k, piece in enumerate(pieces):
            within = inside(middle, piece.outline)
            for hole in piece.holes:
                within &= ~inside(middle, hole)
            owner[within] = k
        mesh = whole.restrict(np.flatnonzero(owner >= 0))
        owner = owner[owner >= 0]
        basis = Basis(mesh, ElementTriP2())

        @LinearForm
        def bend_up(v, w):
            return (w.x[1] - u0) * v

        @LinearForm
        def bend_across(v, w):
            return (w.x[0] - a0) * v

        @LinearForm
        def turn(v, w):
            return (w.x[1] - u0) * grad(v)[0] - (w.x[0] - a0) * grad(v)[1]

        parts = [basis.with_elements(np.flatnonzero(owner == k)) for k in range(len(pieces))]
        self.K = [p.G * _stiffness.assemble(part) for p, part in zip(pieces, parts, strict=True)]
        self.f = [
            np.stack(
                [p.E * bend_up.assemble(part), p.E * bend_across.assemble(part), p.G * turn.assemble(part)], axis=1
            )
            for p, part in zip(pieces, parts, strict=True)
        ]
        K, f = sum(self.K), sum(self.f)
        self.psi = np.stack([solve(*condense(K, f[:, k], D=np.array([0]))) for k in range(3)], axis=1)
        corner = mesh.p[:, mesh.t] - np.array([[[a0]], [[u0]]])
        p, q = corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0]
        area = np.abs(p[0] * q[1] - p[1] * q[0]) / 2
        mid = (corner + corner[:, [1, 2, 0]]) / 2
        G = np.array([piece.G for piece in pieces])[owner]
        self.GJ = (G * area / 3 * (mid**2).sum(axis=(0, 1))).sum() - f[:, 2] @ self.psi[:, 2]
        inertia = np.array([[section.EI, section.EI_product], [section.EI_product, section.EI_lateral]])
        moment = np.linalg.solve(inertia, f[:, :2].T @ self.psi[:, 2])
        self.shear_centre = np.array([a0 - moment[0], u0 + moment[1]])
        self.energy = f[:, :2].T @ self.psi[:, :2]
        self.place = basis.doflocs.T

    def flows(self, bonds):
        """On the first piece of every joint, for bending up, bending across, and unit twist; (b, 3)."""
        on = np.array([_on_line(self.place, bond) for bond in bonds])
        found = []
        for bond, here in zip(bonds, on, strict=True):
            k = bond.first
            sharing = sum(on[j].astype(int) for j, other in enumerate(bonds) if k in (other.first, other.second))
            force = self.f[k] - self.K[k] @ self.psi
            found.append((force[here] / sharing[here, None]).sum(axis=0))
        return np.array(found)


def _on_line(place, bond):
    along = bond.end - bond.start
    off = np.abs((place - bond.start) @ np.array([along[1], -along[0]])) / np.linalg.norm(along)
    at = (place - bond.start) @ along / (along @ along)
    return (off < 1e-6) & (at > -1e-9) & (at < 1 + 1e-9)


def bonds_of(pieces, gap=0.05, **given):
    """Every contact a rigid bond, or one of the given width and stiffness."""
    found = contacts([piece.rings for piece in pieces], np.full((len(pieces),) * 2, gap))
    return [Bond(c.first, c.second, c.start, c.end, c.gap, **given) for c in found]
