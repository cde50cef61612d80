"""Joint flow by cuts and symmetry against the anti-plane field, solved with a general finite-element library.

div(G grad psi) = -E (up - neutral axis) V / EI over the pieces, joints rigid, no flow through free edges; the flow at a
joint is the sum of the nodal forces that its two pieces exchange along it.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from skfem import Basis, BilinearForm, ElementQuad2, LinearForm, MeshQuad, condense, solve
from skfem.helpers import dot, grad

from server.mechanics.contacts import contacts
from server.mechanics.flow import JointLine, joint_flows
from server.mechanics.section import Piece, properties, rectangle


def piece(name, width, depth, at, E=1.0, G=1.0):
    return Piece(name, rectangle(width, depth, at), E, G)


def _lines(pieces, axis, step):
    """Grid lines along one axis through every edge, no further apart than ``step``."""
    edges = np.unique(np.round(np.concatenate([p.outline[:, axis] for p in pieces]), 9))
    parts = [np.linspace(a, b, int(np.ceil((b - a) / step)) + 1)[:-1] for a, b in pairwise(edges)]
    return np.append(np.concatenate(parts), edges[-1])


@BilinearForm
def _stiffness(u, v, _):
    return dot(grad(u), grad(v))


def field_flows(pieces, joints, step):
    """Flow on the first piece of every joint, times EI / V."""
    section = properties(pieces)
    whole = MeshQuad.init_tensor(_lines(pieces, 0, step), _lines(pieces, 1, step))
    centre = whole.p[:, whole.t].mean(axis=1)
    owner = np.full(centre.shape[1], -1)
    for k, p in enumerate(pieces):
        middle, spread = p.outline.mean(axis=0), np.ptp(p.outline, axis=0)
        inside = np.abs(centre.T - middle) < spread / 2
        owner[inside.all(axis=1)] = k
    mesh = whole.restrict(np.flatnonzero(owner >= 0))
    owner = owner[owner >= 0]
    basis = Basis(mesh, ElementQuad2())

    @LinearForm
    def load(v, w):
        return (w.x[1] - section.neutral_axis[1]) * v

    parts = [basis.with_elements(np.flatnonzero(owner == k)) for k in range(len(pieces))]
    K = [p.G * _stiffness.assemble(part) for p, part in zip(pieces, parts, strict=True)]
    f = [p.E * load.assemble(part) for p, part in zip(pieces, parts, strict=True)]
    psi = solve(*condense(sum(K), sum(f), D=np.array([0])))
    on = np.array([_on_line(basis.doflocs.T, joint) for joint in joints])

    def force(k, here):
        """On piece k along one joint; where two of its joints meet in a point, each has half of the nodal force."""
        sharing = sum(on[j].astype(int) for j, joint in enumerate(joints) if k in (joint.first, joint.second))
        return ((f[k] - K[k] @ psi)[here] / sharing[here]).sum()

    return np.array([force(joint.first, here) for joint, here in zip(joints, on, strict=True)])


def _on_line(place, joint):
    along = joint.end - joint.start
    off = np.abs((place - joint.start) @ np.array([along[1], -along[0]])) / np.linalg.norm(along)
    at = (place - joint.start) @ along / (along @ along)
    return (off < 1e-6) & (at > -1e-9) & (at < 1 + 1e-9)


BOX = [
    piece("bottom", 90, 70, (12.5, 0), 11000.0, 690.0),
    piece("top", 90, 45, (12.5, 355), 13000.0, 750.0),
    piece("left", 12.5, 400, (0, 0), 6500.0, 600.0),
    piece("right", 12.5, 400, (102.5, 0), 6500.0, 600.0),
]
CAPPED = [
    piece("foot", 90, 30, (0, 0), 2.0, 2.0),
    piece("left", 20, 120, (25, 30)),
    piece("right", 20, 120, (45, 30)),
    piece("cap", 70, 20, (10, 150), 3.0, 1.5),
]
PINWHEEL = [
    piece("bottom", 90, 10, (10, 0)),
    piece("right", 10, 90, (90, 10)),
    piece("top", 90, 10, (0, 90)),
    piece("left", 10, 90, (0, 0)),
]
POSTS = [
    piece("post a", 30, 200, (0, 20), 2.0),
    piece("post b", 40, 200, (30, 20), 3.0, 2.0),
    piece("top", 70, 20, (0, 220)),
    piece("bottom", 70, 20, (0, 0)),
]
LAMELLAS = [*BOX, piece("outer left", 20, 300, (-20, 50), 9000.0, 500.0)]


def joints_of(pieces):
    found = contacts([p.outline for p in pieces], np.full((len(pieces),) * 2, 0.05))
    return [JointLine(c.first, c.second, c.start, c.end, "glue") for c in found]


@pytest.mark.parametrize(
    ("pieces", "step", "settled", "tolerance"),
    [
        (BOX, 6.0, 4, 1e-6),
        # three pieces meet in a point here: its nodal force cannot be told apart
        (CAPPED, 4.0, 5, 1e-2),
        (PINWHEEL, 2.5, 4, 1e-6),
        (POSTS, 5.0, 1, 1e-6),
        (LAMELLAS, 8.0, 1, 1e-6),
    ],
    ids=["box", "twin webs", "pinwheel", "unlike posts", "box with one lamella"],
)
def test_settled_flows_are_those_of_the_field(pieces, step, settled, tolerance):
    joints = joints_of(pieces)
    section = properties(pieces)
    flows = joint_flows(pieces, section, joints)
    field = field_flows(pieces, joints, step)
    scale = np.abs(section.first_moments).max()
    assert sum(flow.split is not None for flow in flows) == settled
    for flow, found in zip(flows, field, strict=True):
        if flow.split is not None:
            assert found == pytest.approx(flow.share, abs=tolerance * scale), flow.reason


def test_what_is_left_open_is_not_shared_equally():
    webs = [*BOX[:3], piece("right", 12.5, 400, (102.5, 0), 6500.0, 300.0)]
    joints = joints_of(webs)
    assert {flow.split for flow in joint_flows(webs, properties(webs), joints)} == {None}
    left, right = (abs(q) for q in field_flows(webs, joints, 6.0)[2:])
    assert left + right == pytest.approx(properties(webs).first_moments[1], rel=1e-6)
    assert left > 1.2 * right
