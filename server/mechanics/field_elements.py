"""Triangles with cubic functions: stiffness, loads, and how functions of neighbours are one unknown.

Units: N, mm, MPa. Functions of a triangle, in this order: 1 at each corner; quadratic on each edge; cubic on each edge
(odd: its sign follows the edge's direction); one inside. Without the cubic ones of the edges they are a space of their
own, which serves to estimate the error.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from server.mechanics.field_mesh import Mesh
from server.mechanics.polygon import Array, Indices

EDGES = np.array(((0, 1), (1, 2), (2, 0)))
_CORNERS = np.array(((0.0, 0.0), (1.0, 0.0), (0.0, 1.0)))


@dataclass(frozen=True, eq=False)
class Reference:
    """Integrals over the unit triangle, divided by its area.

    ``stiffness`` (3, 100): of products of gradients, for the three entries of the metric; ``linear`` (3, 10): of a
    corner's function with every function; ``twist`` (6, 10): of a corner's function with every gradient; ``mass``
    (10, 10): of every two functions.
    """

    stiffness: Array
    mass: Array
    linear: Array
    twist: Array


def basis(x: Array, y: Array) -> tuple[Array, Array]:
    """The ten functions (10, n) and their gradients (2, 10, n) at places of the unit triangle."""
    corner = np.stack((1 - x - y, x, y))
    slope = np.array(((-1.0, 1.0, 0.0), (-1.0, 0.0, 1.0)))
    a, b = corner[EDGES[:, 0]], corner[EDGES[:, 1]]
    da, db = slope[:, EDGES[:, 0], None], slope[:, EDGES[:, 1], None]
    product, d_product = a * b, da * b + a * db
    values = np.concatenate((corner, 4 * product, 8 * product * (b - a), 27 * corner.prod(axis=0, keepdims=True)))
    d_corner = np.broadcast_to(slope[:, :, None], (2, 3, len(x)))
    d_odd = d_product * (b - a) + product * (db - da)
    d_inside = 27 * (
        slope[:, [0], None] * corner[1] * corner[2]
        + slope[:, [1], None] * corner[0] * corner[2]
        + slope[:, [2], None] * corner[0] * corner[1]
    )
    return values, np.concatenate((d_corner, 4 * d_product, 8 * d_odd, d_inside), axis=1)


@lru_cache(maxsize=1)
def reference() -> Reference:
    """The integrals, by a product of Gauss rules that is exact for them."""
    g, w = np.polynomial.legendre.leggauss(6)
    g, w = (g + 1) / 2, w / 2
    x = np.repeat(g, 6)
    y = np.tile(g, 6) * (1 - x)
    weight = np.repeat(w, 6) * np.tile(w, 6) * (1 - x) * 2
    value, slope = basis(x, y)
    products = np.einsum("ain,bjn,n->abij", slope, slope, weight)
    stiffness = np.stack((products[0, 0], products[0, 1] + products[1, 0], products[1, 1])).reshape(3, 100)
    mass = np.einsum("in,jn,n->ij", value, value, weight)
    linear = np.einsum("an,in,n->ai", value[:3], value, weight)
    twist = np.einsum("an,kin,n->kai", value[:3], slope, weight).reshape(6, 10)
    return Reference(stiffness, mass, linear, twist)


@dataclass(frozen=True, eq=False)
class Elements:
    """All triangles: ``stiffness`` (t, 10, 10) and ``loads`` (t, 10, 3) of the three problems.

    Bending up and down, bending sideways, and twist, each for a unit of its cause. ``slope`` (t, 2, 2) gradients of
    the two coordinates of the unit triangle; ``origin`` (2,) about which loads are taken.
    """

    stiffness: Array
    loads: Array
    slope: Array
    origin: Array


def elements(mesh: Mesh, E: Array, G: Array, origin: Array) -> Elements:
    r"""Stiffness and loads of every triangle.

    .. math:: k_{ij} = \int G\,\nabla\phi_i\cdot\nabla\phi_j\,dA,\quad f_i = \int E\,u\,\phi_i\,dA,\quad
              f_i = \int E\,a\,\phi_i\,dA,\quad f_i = -\int G\,(-u, a)\cdot\nabla\phi_i\,dA

    with across a and up u from ``origin``.

    Parameters
    ----------
    mesh : Mesh
        Triangles; lengths in [mm].
    E, G : numpy.ndarray
        Moduli of each piece [MPa].
    origin : numpy.ndarray
        The neutral axis, across and up [mm].

    Returns
    -------
    Elements
        Forces per unit of the cause.

    References
    ----------
    .. [1] O. C. Zienkiewicz and R. L. Taylor, The Finite Element Method, hierarchical functions; from memory.
    """
    table = reference()
    corner = mesh.points[mesh.triangles] - origin
    p, q = corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0]
    doubled = p[:, 0] * q[:, 1] - p[:, 1] * q[:, 0]
    # gradients of the two coordinates of the unit triangle
    turned = np.stack((np.stack((q[:, 1], -q[:, 0]), 1), np.stack((-p[:, 1], p[:, 0]), 1)), axis=1)
    slope = turned / doubled[:, None, None]
    first, second = slope[:, 0], slope[:, 1]
    metric = np.stack(((first**2).sum(1), (first * second).sum(1), (second**2).sum(1)), axis=1)
    weight = G[mesh.piece] * doubled / 2
    stiffness = ((metric * weight[:, None]) @ table.stiffness).reshape(-1, 10, 10)
    heavy = (E[mesh.piece] * doubled / 2)[:, None]
    around = np.stack((-corner[:, :, 1], corner[:, :, 0]), axis=2)
    turning = -weight[:, None] * np.einsum("tad,tkd->tka", around, slope).reshape(-1, 6)
    loads = np.stack(
        (heavy * (corner[:, :, 1] @ table.linear), heavy * (corner[:, :, 0] @ table.linear), turning @ table.twist),
        axis=2,
    )
    return Elements(stiffness, loads, slope, origin)


@dataclass(frozen=True, eq=False)
class Unknowns:
    """Which unknown every function of every triangle is.

    ``place`` (t, 9), the function inside left out; ``sign`` (t, 9); ``count`` of all; ``coarse`` of those without the
    cubic ones, which come last. ``part_triangle``, ``part_edge`` (p,) the triangle and its edge at every part of the
    outlines.
    """

    place: Indices
    sign: Array
    count: int
    coarse: int
    part_triangle: Indices
    part_edge: Indices


def unknowns(mesh: Mesh, one: Indices, other: Indices) -> Unknowns:
    """Number the unknowns; the parts ``one`` and ``other`` of the outlines are bonded rigidly, pair by pair."""
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    rim, count = mesh.rim, len(mesh.points)
    ends_1 = np.concatenate((rim.start[one], rim.end[one]))
    ends_2 = np.concatenate((rim.end[other], rim.start[other]))
    graph = coo_array((np.ones(len(ends_1)), (ends_1, ends_2)), shape=(count, count))
    corners, corner = connected_components(graph, directed=False)
    corner = corner.astype(np.intp)
    ends = mesh.triangles[:, EDGES].reshape(-1, 2)
    low, high = ends.min(axis=1), ends.max(axis=1)
    known, where, edge = np.unique(low * count + high, return_index=True, return_inverse=True)
    parts = np.searchsorted(known, np.minimum(rim.start, rim.end) * count + np.maximum(rim.start, rim.end))
    same = np.arange(len(known))
    same[parts[other]] = parts[one]
    _, number = np.unique(same, return_inverse=True)
    edges = int(number.max()) + 1
    by_triangle = number[edge].reshape(-1, 3)
    place = np.concatenate((corner[mesh.triangles], corners + by_triangle, corners + edges + by_triangle), axis=1)
    ahead = corner[mesh.triangles[:, EDGES[:, 0]]] < corner[mesh.triangles[:, EDGES[:, 1]]]
    sign = np.concatenate((np.ones((len(place), 6)), np.where(ahead, 1.0, -1.0)), axis=1)
    triangle, local = np.divmod(where[parts], 3)
    return Unknowns(place, sign, corners + 2 * edges, corners + edges, triangle, local)


def on_edge(edge: int, share: Array) -> Array:
    """Gradients of the ten functions (2, 10, n) at shares of an edge of the unit triangle."""
    a, b = _CORNERS[EDGES[edge]]
    place = a + np.multiply.outer(share, b - a)
    return basis(place[:, 0], place[:, 1])[1]


def along_part(length: float | NDArray[np.float64]) -> Array:
    """Products of the four functions on an edge (start, end, quadratic, cubic), integrated over its length."""
    table = _edge_mass()
    result: Array = np.multiply.outer(np.asarray(length, dtype=float), table)
    return result


@lru_cache(maxsize=1)
def _edge_mass() -> Array:
    g, w = np.polynomial.legendre.leggauss(6)
    value = edge_basis((g + 1) / 2)
    result: Array = (value * (w / 2)) @ value.T
    return result


def edge_basis(t: Array) -> Array:
    """The four functions on an edge at shares of its length."""
    return np.stack((1 - t, t, 4 * t * (1 - t), 8 * t * (1 - t) * (2 * t - 1)))
