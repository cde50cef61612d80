"""What a solution says about each bond: its flow, and the run of its flow over parts of its width.

Units: N, mm, MPa. The flow is the sum of the nodal forces that the two pieces exchange: it is in equilibrium with the
loads on each piece to the last digit, whatever the mesh. Where bonds meet in a point, its force is divided among them
by the stress beside it, as equilibrium of each piece allows.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from server.mechanics.field_elements import Elements, Unknowns, along_part, on_edge
from server.mechanics.field_layout import Bond
from server.mechanics.field_mesh import Mesh
from server.mechanics.field_system import Parts, Solved, trace, yielding
from server.mechanics.polygon import Array, Indices

PARTS = 9  # of a bond's width, over each of which its stress is averaged
_GAUSS_X, _GAUSS_W = np.polynomial.legendre.leggauss(4)


@dataclass(frozen=True, eq=False)
class Knots:
    """Points at which bonds exchange nodal forces: ``bond``, point of the first piece and of the second.

    ``start``, ``end`` the knots at both ends of every bonded part.
    """

    bond: Indices
    first: Indices
    second: Indices
    start: Indices
    end: Indices


def knots(mesh: Mesh, parts: Parts) -> Knots:
    """Every pair of answering points of every bond, once."""
    rim, count = mesh.rim, len(mesh.points)
    first = np.concatenate((rim.start[parts.one], rim.end[parts.one]))
    second = np.concatenate((rim.end[parts.other], rim.start[parts.other]))
    bond = np.tile(parts.bond, 2)
    _, where, number = np.unique((bond * count + first) * count + second, return_index=True, return_inverse=True)
    half = len(parts.one)
    return Knots(bond[where], first[where], second[where], number[:half], number[half:])


def flows(
    mesh: Mesh, elements: Elements, unknowns: Unknowns, parts: Parts, bonds: Sequence[Bond], solved: Solved, G: Array
) -> tuple[Array, Array]:
    """Flow of each bond on its first piece (b, m), and the force at each knot (k, m), for the m problems solved."""
    at = knots(mesh, parts)
    m = solved.pull.shape[2]
    held: Array = np.stack(
        [np.bincount(mesh.triangles.ravel(), solved.pull[:, :3, k].ravel(), len(mesh.points)) for k in range(m)], axis=1
    )
    on_first = np.bincount(at.first, minlength=len(held))[at.first] == 1
    on_second = np.bincount(at.second, minlength=len(held))[at.second] == 1
    force = np.where(on_first[:, None], held[at.first], -held[at.second])
    shared = ~(on_first | on_second)
    if shared.any():
        meets = _meets(at, len(held))
        at_shared = np.zeros(len(held), dtype=bool)
        at_shared[meets[shared]] = True
        doubtful = at_shared[meets]
        near = np.flatnonzero(doubtful[at.start] | doubtful[at.end])
        guess = _beside(mesh, elements, unknowns, parts.some(near), bonds, solved, G)
        push = np.zeros((len(at.bond), m))
        np.add.at(push, at.start[near], guess[:, 0])
        np.add.at(push, at.end[near], guess[:, 1])
        _divide(at, meets, np.flatnonzero(doubtful), held, push, force)
    total: Array = np.stack([np.bincount(at.bond, force[:, k], len(bonds)) for k in range(m)], axis=1)
    return total, force


def _meets(at: Knots, count: int) -> Indices:
    """Of each knot the place in the section at which its points meet others."""
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    graph = coo_array((np.ones(len(at.first)), (at.first, at.second)), shape=(count, count))
    point: Indices = connected_components(graph, directed=False)[1]
    return point[at.first]


def _beside(
    mesh: Mesh, elements: Elements, unknowns: Unknowns, parts: Parts, bonds: Sequence[Bond], solved: Solved, G: Array
) -> Array:
    """Force at both ends of parts (p, 2, m) from the stress in the triangles beside, or from the bond's own springs."""
    first = _push(mesh, elements, unknowns, solved, G, parts.one)
    second = _push(mesh, elements, unknowns, solved, G, parts.other)[:, ::-1]
    push: Array = (first - second) / 2
    stiffness = yielding(parts, bonds)
    soft = np.flatnonzero(stiffness)
    if soft.size:
        jump = np.zeros((len(soft), 4, push.shape[2]))
        for part, is_second, way in ((parts.one[soft], False, 1.0), (parts.other[soft], True, -1.0)):
            triangle, local, sign = trace(unknowns, part, second=is_second)
            jump -= way * solved.values[triangle[:, None], local] * sign[:, :, None]
        push[soft] = along_part(stiffness[soft] * parts.length[soft])[:, :2] @ jump
    return push


def _push(mesh: Mesh, elements: Elements, unknowns: Unknowns, solved: Solved, G: Array, part: Indices) -> Array:
    """Force on a piece at both ends of parts of its outline (p, 2, m) by the stress inside, weighed as at nodes."""
    rim, result = mesh.rim, np.zeros((len(part), 2, solved.values.shape[2]))
    along = mesh.points[rim.end[part]] - mesh.points[rim.start[part]]
    outward = np.stack((along[:, 1], -along[:, 0]), axis=1)  # of the part's length
    triangle, edges = unknowns.part_triangle[part], unknowns.part_edge[part]
    share, weight = (_GAUSS_X + 1) / 2, _GAUSS_W / 2
    for edge in range(3):
        here = np.flatnonzero(edges == edge)
        if not here.size:
            continue
        own = triangle[here]
        gradients = on_edge(edge, share)
        slope = np.einsum("kin,tkd,tic->tndc", gradients, elements.slope[own], solved.values[own], optimize=True)
        place = mesh.points[rim.start[part[here]]][:, None] + along[here][:, None] * share[:, None] - elements.origin
        around = np.stack((-place[:, :, 1], place[:, :, 0]), axis=2)
        slope[:, :, :, 2::3] += around[:, :, :, None]
        through = np.einsum("tndc,td->tnc", slope, outward[here]) * -G[mesh.piece[own]][:, None, None]
        result[here, 0] = np.einsum("tnc,n->tc", through, weight * (1 - share))
        result[here, 1] = np.einsum("tnc,n->tc", through, weight * share)
    return result


def _divide(at: Knots, meets: Indices, doubtful: Indices, held: Array, guess: Array, force: Array) -> None:
    """Divide the forces at points where several bonds meet: nearest to the guess among all that balance each piece."""
    order = doubtful[np.argsort(meets[doubtful], kind="stable")]
    ends = np.flatnonzero(np.diff(meets[order])) + 1
    for own in np.split(order, ends):
        nodes, number = np.unique(np.concatenate((at.first[own], at.second[own])), return_inverse=True)
        balance = np.zeros((len(nodes), len(own)))
        columns = np.arange(len(own))
        balance[number[: len(own)], columns] = 1.0
        balance[number[len(own) :], columns] -= 1.0
        rest = held[nodes] - balance @ guess[own]
        force[own] = guess[own] + np.linalg.lstsq(balance, rest, rcond=None)[0]


def runs(mesh: Mesh, unknowns: Unknowns, parts: Parts, bonds: Sequence[Bond], solved: Solved, force: Array) -> Array:
    """Mean flow per width over equal parts of each bond's width (b, PARTS, 3) [N/mm2 per unit of the cause].

    The stress whose nodal forces, taken with the four functions of every part, are those of the solution.
    """
    from scipy.sparse import coo_array
    from scipy.sparse.linalg import splu

    if not len(parts.one):
        return np.zeros((len(bonds), PARTS, 3))
    at = knots(mesh, parts)
    triangle, local, sign = trace(unknowns, parts.one, second=False)
    inside = solved.pull[triangle[:, None], local[:, 2:]] * sign[:, 2:, None]
    k, p = len(at.bond), len(parts.one)
    own = np.arange(p)
    rows = np.stack((at.start, at.end, k + own, k + p + own), axis=1)
    mass = coo_array(
        (along_part(parts.length).ravel(), (np.repeat(rows, 4, axis=1).ravel(), np.tile(rows, (1, 4)).ravel())),
        shape=(k + 2 * p,) * 2,
    )
    push = np.concatenate((force, inside[:, 0], inside[:, 1]))
    stress = splu(mass.tocsc(), permc_spec="MMD_AT_PLUS_A", options={"SymmetricMode": True}).solve(push)
    return _means(parts, bonds, stress[rows])


def _means(parts: Parts, bonds: Sequence[Bond], stress: Array) -> Array:
    """Means over equal parts of each bond's width of what the four functions of each part (p, 4, 3) describe."""
    width = np.array([bond.bonded for bond in bonds])
    ends = np.multiply.outer(width, np.linspace(-0.5, 0.5, PARTS + 1))[parts.bond]
    span = (parts.to - parts.from_)[:, None]
    t = np.clip((ends - parts.from_[:, None]) / span, 0.0, 1.0)
    below = np.stack((t - t**2 / 2, t**2 / 2, 2 * t**2 - 4 * t**3 / 3, -4 * t**2 + 8 * t**3 - 4 * t**4))
    share = np.sign(span)[:, :, None] * parts.length[:, None, None] * np.diff(below.transpose(1, 2, 0), axis=1)
    result = np.zeros((len(bonds), PARTS, 3))
    np.add.at(result, parts.bond, share @ stress)
    result /= (width / PARTS)[:, None, None]
    return result
