"""Polygons as flat arrays of edges, so that every integral over a section is one vectorised sum.

Units: mm throughout. Coordinates are ``[across, up]``. An outline is an ``(n, 2)`` array; an item with holes is a
sequence of such rings, the outer one first. Edges run with the material on their left: outer rings
anticlockwise, holes clockwise, whichever way they were given.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError

Array = NDArray[np.float64]
Indices = NDArray[np.intp]
Bools = NDArray[np.bool_]
Outline = Array | Sequence[Array]


@dataclass(frozen=True, eq=False)
class Edges:
    """Every edge of several polygons, material on the left.

    ``start`` and ``end`` (e, 2); ``owner`` (e,) the polygon an edge belongs to; ``first`` (n,) the first edge of
    each polygon; ``next`` (e,) the edge that follows in the same ring; ``curved`` (e,) which edges stand for a part of
    an arc, None where none does.
    """

    start: Array
    end: Array
    owner: Indices
    first: Indices
    next: Indices
    curved: NDArray[np.bool_] | None = None

    @property
    def count(self) -> Indices:
        """Edges of each polygon, (n,)."""
        return np.bincount(self.owner, minlength=len(self.first))

    @property
    def size(self) -> float:
        """Diagonal of the box around everything [mm]."""
        spread: Array = self.start.max(axis=0) - self.start.min(axis=0)
        return float(np.hypot(spread[0], spread[1]))

    def boxes(self) -> tuple[Array, Array]:
        """Lower left and upper right corners of the box around each polygon, both (n, 2)."""
        return np.minimum.reduceat(self.start, self.first), np.maximum.reduceat(self.start, self.first)

    def pairs(self, i: Indices, j: Indices) -> tuple[Indices, Indices, Indices]:
        """Every edge of polygon ``i[k]`` with every edge of ``j[k]``: both edges, and k."""
        count = self.count
        many = count[i] * count[j]
        pair = np.repeat(np.arange(len(i)), many)
        within = np.arange(len(pair)) - (many.cumsum() - many)[pair]
        a, b = np.divmod(within, count[j][pair])
        return self.first[i][pair] + a, self.first[j][pair] + b, pair


def _rings(outlines: Sequence[Outline]) -> tuple[list[Array], list[int], list[int]]:
    """All rings in one list, the polygon each belongs to, and the places of the outer ones."""
    rings: list[Array] = []
    owners: list[int] = []
    outer: list[int] = []
    for index, outline in enumerate(outlines):
        outer.append(len(rings))
        parts = [outline] if isinstance(outline, np.ndarray) else outline
        for ring in parts:
            rings.append(ring)
            owners.append(index)
    return rings, owners, outer


def edges_of(outlines: Sequence[Outline] | Edges, curved: Sequence[Sequence[NDArray[np.bool_]]] | None = None) -> Edges:
    """Flatten outlines into edges, turning every ring so that its material lies on the left.

    A corner that is typed twice running, such as a closing one, counts once. Edges that are ready pass through.
    ``curved`` says for every ring of every outline which sides, each from a corner to the next, are parts of an arc.

    Raises
    ------
    InputError
        If there is no outline, or a ring has fewer than three distinct corners.
    """
    if isinstance(outlines, Edges):
        return outlines
    if not outlines:
        raise InputError("pieces", "The section has no pieces; add at least one.")
    rings, owners, outer = _rings(outlines)
    counts = np.array([len(ring) for ring in rings])
    if counts.min() < 3:
        bad = owners[int(counts.argmin())]
        raise InputError("pieces", f"Piece {bad + 1} has an outline of {counts.min()} points; give three or more.")
    start = np.concatenate(rings)
    last = counts.cumsum() - 1
    first = last - counts + 1
    following = np.arange(1, len(start) + 1)
    following[last] = first
    end = start[following]
    areas = np.add.reduceat(_doubled_areas(start, end, np.repeat(start[first], counts, axis=0)), first)
    wanted = -np.ones(len(rings))
    wanted[outer] = 1.0
    wrong = areas * wanted < 0
    arcs = None if curved is None else [ring for piece in curved for ring in piece]
    if wrong.any():  # reverse those rings and flatten again
        turned = [ring[::-1] if flip else ring for ring, flip in zip(rings, wrong, strict=True)]
        start = np.concatenate(turned)
        end = start[following]
        if arcs is not None:
            arcs = [np.roll(ring[::-1], -1) if flip else ring for ring, flip in zip(arcs, wrong, strict=True)]
    owner = np.repeat(np.array(owners), counts)
    edges = Edges(start, end, owner, first[outer], following, None if arcs is None else np.concatenate(arcs))
    repeated = ((start == end).sum(axis=1)) == 2
    return _without(edges, following[repeated]) if repeated.any() else edges


def _without(edges: Edges, corners: Indices) -> Edges:
    """The same polygons less some corners, each named by the edge that starts there."""
    keep = np.ones(len(edges.start), dtype=bool)
    keep[corners] = False
    ends_ring = edges.next != np.arange(1, len(keep) + 1)
    ring = np.concatenate(([0], ends_ring[:-1].cumsum()))
    counts = np.bincount(ring[keep], minlength=int(ring[-1]) + 1)
    if counts.min() < 3:
        bad = int(edges.owner[ring == counts.argmin()][0])
        raise InputError("pieces", f"Piece {bad + 1} has no area: its outline has fewer than three distinct corners.")
    last = counts.cumsum() - 1
    following = np.arange(1, int(keep.sum()) + 1)
    following[last] = last - counts + 1
    start, owner = edges.start[keep], edges.owner[keep]
    first = np.searchsorted(owner, np.arange(len(edges.first)))
    curved = None if edges.curved is None else edges.curved[keep]
    return Edges(start, start[following], owner, first, following, curved)


def _doubled_areas(start: Array, end: Array, origin: Array) -> Array:
    """Twice the signed area of the triangles from ``origin`` over each edge."""
    a, b = start - origin, end - origin
    return a[:, 0] * b[:, 1] - b[:, 0] * a[:, 1]


def moments(edges: Edges) -> tuple[Array, Array, Array]:
    r"""Area, centroid and own second moments of every polygon, exact.

    .. math:: A = \tfrac12\sum c_k,\quad A\,x_c = \tfrac16\sum c_k (x_k + x_{k+1}),\quad
              \int y^2 dA = \tfrac1{12}\sum c_k (y_k^2 + y_k y_{k+1} + y_{k+1}^2)

    with :math:`c_k = x_k y_{k+1} - x_{k+1} y_k`, each polygon about its own first corner so that a far-away
    origin costs no digits.

    Parameters
    ----------
    edges : Edges
        Edges of n polygons [mm].

    Returns
    -------
    area : numpy.ndarray
        (n,) [mm2], holes taken off.
    centroid : numpy.ndarray
        (n, 2) across and up [mm].
    inertia : numpy.ndarray
        (n, 3) about the polygon's own centroid [mm4]: of up squared, of across squared, of across times up.

    Raises
    ------
    InputError
        If a polygon has no area.

    References
    ----------
    .. [1] Green's theorem; C. Steger, "On the calculation of arbitrary moments of polygons", TU Munich
       FGBV-96-05, 1996 (the same sums; from memory).
    """
    first = edges.first
    origin = edges.start[first]
    base = origin[edges.owner]
    a, b = edges.start - base, edges.end - base
    x0, y0, x1, y1 = a[:, 0], a[:, 1], b[:, 0], b[:, 1]
    c = x0 * y1 - x1 * y0
    xs, ys = x0 + x1, y0 + y1
    terms = np.array(
        (
            c / 2,
            c * xs / 6,
            c * ys / 6,
            c * (ys * ys - y0 * y1) / 12,
            c * (xs * xs - x0 * x1) / 12,
            c * (xs * ys + x0 * y0 + x1 * y1) / 24,
        )
    )
    area, sx, sy, iyy, ixx, ixy = np.add.reduceat(terms, first, axis=1)
    low, high = edges.boxes()
    spread = high - low
    empty = ~(area > 1e-12 * (spread[:, 0] ** 2 + spread[:, 1] ** 2))
    if empty.any():
        bad = int(np.flatnonzero(empty)[0])
        raise InputError("pieces", f"Piece {bad + 1} has no area; give it a width and a depth greater than 0 mm.")
    cx, cy = sx / area, sy / area
    inertia = np.array((iyy - cy * sy, ixx - cx * sx, ixy - cx * sy)).T
    return area, origin + np.array((cx, cy)).T, inertia


def straightened(edges: Edges) -> Edges:
    """The same polygons without corners in the middle of a straight side."""
    along = edges.end - edges.start
    after = along[edges.next]
    length = np.sqrt(along[:, 0] ** 2 + along[:, 1] ** 2)
    turn = np.abs(along[:, 0] * after[:, 1] - along[:, 1] * after[:, 0])
    ahead = along[:, 0] * after[:, 0] + along[:, 1] * after[:, 1] > 0
    flat = ahead & (turn <= 1e-9 * length * length[edges.next])
    return _without(edges, edges.next[flat]) if flat.any() else edges
