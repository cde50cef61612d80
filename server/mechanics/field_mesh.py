"""Triangles over the pieces of a section, with points that answer each other along bonds.

Units: mm. Every piece is triangulated on its own (Delaunay), then refined until no triangle is badly shaped: points
go to the centres of circumscribed circles, or, where those lie too close to a side, into the middle of that side.
A side that is bonded is cut at the same places on both pieces.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import chain

import numpy as np

from server.errors import InputError
from server.mechanics.field_layout import Layout
from server.mechanics.field_rim import Rim, first_cuts, halved, rim_of, rings
from server.mechanics.field_sizes import Fineness, sizes
from server.mechanics.polygon import Array, Bools, Indices

MOST_POINTS = 40_000
_ROUNDS = 16
_SHAPE = 1.42  # largest circumradius over shortest edge: least angle 20.6 degrees
_LEAST = 0.35  # of the shortest part of a piece's outline: what is shorter is not cut again
_FLAT = 1e-12
_NUDGE = 1e-3  # of the shortest part of a piece's outline


@dataclass(frozen=True, eq=False)
class Mesh:
    """Triangles of all pieces; points of different pieces are different points.

    ``points`` (v, 2) [mm]; ``triangles`` (t, 3) anticlockwise; ``piece`` (t,) of each; ``rim`` the outlines.
    """

    points: Array
    triangles: Indices
    piece: Indices
    rim: Rim


def mesh(layout: Layout, fineness: Fineness) -> Mesh:
    """Triangulate all pieces.

    Parameters
    ----------
    layout : Layout
        Sides and runs; lengths in [mm].
    fineness : Fineness
        How large elements are [-].

    Returns
    -------
    Mesh
        In [mm].

    Raises
    ------
    InputError
        If the shapes need more points than the limit allows, or cannot be triangulated.

    References
    ----------
    .. [1] J. Ruppert, "A Delaunay refinement algorithm for quality 2-dimensional mesh generation", J. Algorithms 18
       (1995) 548-585; from memory.
    """
    work = _Work(layout, fineness)
    for _ in range(_ROUNDS):
        if not work.refine():
            break
    return work.finished()


class _Work:
    """A mesh while it is refined, round by round; pieces that need no more are left as they are."""

    def __init__(self, layout: Layout, fineness: Fineness) -> None:
        wanted = sizes(layout, fineness)
        self.layout, self.frame = layout, _frame(layout)
        self.run, self.at = first_cuts(wanted)
        self.inner, self.inner_piece = rings(layout, wanted)
        self.rim = rim_of(layout, self.run, self.at)
        self.least = _shortest(self.rim)
        self.open = np.ones(len(self.frame.scale), dtype=bool)
        # triangles of pieces that are done, their points counted within the piece: outline first
        self.done: Indices = np.zeros((0, 3), dtype=np.intp)
        self.done_piece: Indices = np.zeros(0, dtype=np.intp)

    def refine(self) -> bool:
        """Triangulate the open pieces and better them; whether any is still open."""
        points, piece, local = self._points()
        own = np.flatnonzero(self.open[piece])
        part = np.flatnonzero(self.open[self.rim.part_piece])
        place = np.cumsum(self.open[piece]) - 1
        start, end = place[self.rim.start[part]], place[self.rim.end[part]]
        triangles = _delaunay(points[own], piece[own], self.frame, self.least)
        filled, missing = _filled(start, end, triangles, len(own))
        triangles = own[triangles[filled]]
        owner = piece[triangles[:, 0]]
        split = np.zeros(len(self.rim.start), dtype=bool)
        split[part[missing]] = True
        torn = np.zeros(len(self.open), dtype=bool)
        torn[self.rim.part_piece[split]] = True
        fresh, fresh_piece = self._better(points, triangles[~torn[owner]], owner[~torn[owner]], split)
        still = np.zeros(len(self.open), dtype=bool)
        cuts = np.zeros(len(self.rim.cut_run), dtype=bool)
        cuts[self.rim.cut[split]] = True
        still[self.rim.part_piece[cuts[self.rim.cut]]] = True
        still[fresh_piece] = True
        keep = ~self.open[self.done_piece] & ~still[self.done_piece]
        ready = ~still[owner]
        self.done = np.concatenate((self.done[keep], local[triangles[ready]]))
        self.done_piece = np.concatenate((self.done_piece[keep], owner[ready]))
        self.open = still
        if split.any():
            self.run, self.at = halved(self.run, self.at, self.rim, split)
            self.rim = rim_of(self.layout, self.run, self.at)
        self.inner = np.concatenate((self.inner, fresh))
        self.inner_piece = np.concatenate((self.inner_piece, fresh_piece))
        return bool(still.any())

    def _points(self) -> tuple[Array, Indices, Indices]:
        """All points, on the outlines first, each group in the order of the pieces; their pieces; numbers within."""
        order = np.argsort(self.inner_piece, kind="stable")
        self.inner, self.inner_piece = self.inner[order], self.inner_piece[order]
        points = np.concatenate((self.rim.points, self.inner))
        piece = np.concatenate((self.rim.piece, self.inner_piece))
        if len(points) > MOST_POINTS:
            raise InputError(
                "pieces",
                f"The section's shapes need more than {MOST_POINTS} points to mesh; simplify the finest shapes.",
            )
        order = np.argsort(piece, kind="stable")
        count = np.bincount(piece, minlength=len(self.open))
        local = np.empty(len(piece), dtype=np.intp)
        local[order] = np.arange(len(piece)) - (count.cumsum() - count)[piece[order]]
        return points, piece, local

    def _better(self, points: Array, triangles: Indices, owner: Indices, split: Bools) -> tuple[Array, Indices]:
        """Points to add for badly shaped triangles, and their pieces; marks the parts of outlines to halve."""
        corner = points[triangles]
        edge = corner[:, [1, 2, 0]] - corner
        length = np.hypot(edge[..., 0], edge[..., 1])
        radius = length.prod(axis=1) / (2 * _doubled(points, triangles))
        bad = np.flatnonzero((radius > _SHAPE * length.min(axis=1)) & (radius > _LEAST * self.least[owner]))
        if not bad.size:
            return np.zeros((0, 2)), np.zeros(0, dtype=np.intp)
        centre, owner = _centres(corner[bad]), owner[bad]
        chosen = _apart(self.frame.placed(centre, owner), radius[bad] / self.frame.scale[owner])
        owner, centre = owner[chosen], centre[chosen]
        close, near = self._encroached(points, centre, owner)
        rim = self.rim
        parts = np.hypot(*(points[rim.end[near]] - points[rim.start[near]]).T)
        split[near[parts > 2 * _LEAST * self.least[rim.part_piece[near]]]] = True
        free = np.ones(len(centre), dtype=bool)
        free[close] = False
        centre, owner = centre[free], owner[free]
        inside = _inside(self.layout, centre, owner)
        return centre[inside], owner[inside]

    def _encroached(self, points: Array, centre: Array, owner: Indices) -> tuple[Indices, Indices]:
        """Centres that lie in the circle over a part of their piece's outline, and those parts."""
        from scipy.spatial import cKDTree

        rim, frame = self.rim, self.frame
        part = np.flatnonzero(self.open[rim.part_piece])
        own = rim.part_piece[part]
        a, b = points[rim.start[part]], points[rim.end[part]]
        reach = np.hypot(*(b - a).T) / 2 / frame.scale[own]
        tree = cKDTree(frame.placed(centre, owner))
        found = tree.query_ball_point(frame.placed((a + b) / 2, own), reach * (1 - 1e-9))
        some = np.flatnonzero(found.astype(bool))
        many = np.fromiter(map(len, found[some]), np.intp, len(some))
        close = np.fromiter(chain.from_iterable(found[some]), np.intp, int(many.sum()))
        return close, np.repeat(part[some], many)

    def finished(self) -> Mesh:
        """The mesh, if every piece is filled."""
        points, piece, _ = self._points()
        order = np.argsort(piece, kind="stable")
        first = np.searchsorted(piece[order], np.arange(len(self.open)))
        triangles = order[first[self.done_piece][:, None] + self.done]
        if self.open.any() or not _complete(self.layout, points, piece, triangles):
            raise InputError("pieces", "The section's shapes cannot be meshed; simplify the finest shapes.")
        return Mesh(points, triangles, self.done_piece, self.rim)


@dataclass(frozen=True, eq=False)
class _Frame:
    """Where each piece stands while it is triangulated: all of one size, side by side, none near another."""

    origin: Array
    scale: Array
    cell: Array

    def placed(self, points: Array, piece: Indices) -> Array:
        """Points of pieces where they stand."""
        result: Array = (points - self.origin[piece]) / self.scale[piece, None] + self.cell[piece]
        return result


def _frame(layout: Layout) -> _Frame:
    count = int(layout.piece.max()) + 1
    order = np.argsort(layout.piece, kind="stable")
    first = np.searchsorted(layout.piece[order], np.arange(count))
    low = np.minimum.reduceat(layout.start[order], first)
    high = np.maximum.reduceat(layout.start[order], first)
    row = int(np.ceil(np.sqrt(count)))
    place = np.arange(count)
    spread = high - low
    cell = 3.0 * np.stack((place % row, place // row), axis=1).astype(np.float64)
    return _Frame(low, np.maximum(spread[:, 0], spread[:, 1]), cell)


def _delaunay(points: Array, piece: Indices, frame: _Frame, least: Array) -> Indices:
    """Triangles whose three points belong to one piece, anticlockwise, none without area."""
    from scipy.spatial import Delaunay

    # points in rows and circles are slow to triangulate: each is moved by next to nothing
    placed = frame.placed(points, piece)
    shift = np.random.default_rng(0).uniform(-1, 1, placed.shape) * (_NUDGE * least / frame.scale)[piece, None]
    found = Delaunay(placed + shift).simplices.astype(np.intp)
    own = piece[found]
    found = found[(own[:, 0] == own[:, 1]) & (own[:, 0] == own[:, 2])]
    doubled = _doubled(placed, found)
    found[doubled < 0] = found[doubled < 0][:, ::-1]
    solid: Indices = found[np.abs(doubled) > _FLAT]
    return solid


def _doubled(points: Array, triangles: Indices) -> Array:
    """Twice the area of each triangle, anticlockwise positive."""
    a = points[triangles[:, 0]]
    p, q = points[triangles[:, 1]] - a, points[triangles[:, 2]] - a
    result: Array = p[:, 0] * q[:, 1] - p[:, 1] * q[:, 0]
    return result


def _filled(from_: Indices, to: Indices, triangles: Indices, count: int) -> tuple[Bools, Bools]:
    """Which triangles lie inside the outlines, and which parts of the outlines are no edge of a triangle yet.

    Triangles that share an edge which is no part of an outline lie on the same side; one that has a part of an outline
    as its edge, in the outline's direction, lies inside.
    """
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    start, end = triangles.ravel(), triangles[:, [1, 2, 0]].ravel()
    key = start * count + end
    order = np.argsort(key)
    ordered = key[order]

    def found(wanted: Indices) -> tuple[Indices, Bools]:
        place = np.minimum(np.searchsorted(ordered, wanted), len(ordered) - 1)
        return order[place] // 3, ordered[place] == wanted

    inside, present = found(from_ * count + to)
    across, shared = found(end * count + start)
    rims = np.sort(np.concatenate((from_ * count + to, to * count + from_)))
    shared &= rims[np.minimum(np.searchsorted(rims, key), len(rims) - 1)] != key
    own = np.arange(len(key))[shared] // 3
    graph = coo_array((np.ones(len(own)), (own, across[shared])), shape=(len(triangles),) * 2)
    parts, part = connected_components(graph, directed=False)
    kept = np.zeros(parts, dtype=bool)
    kept[part[inside[present]]] = True
    return kept[part], ~present


def _shortest(rim: Rim) -> Array:
    """The shortest part of the outline of each piece."""
    away = rim.points[rim.end] - rim.points[rim.start]
    first = np.searchsorted(rim.part_piece, np.arange(int(rim.part_piece[-1]) + 1))
    result: Array = np.minimum.reduceat(np.hypot(away[:, 0], away[:, 1]), first)
    return result


def _inside(layout: Layout, place: Array, piece: Indices) -> Array:
    """Whether places lie in their piece: a level line from there crosses its edges an odd number of times."""
    edges = layout.edges
    many = edges.count[piece]
    begin = many.cumsum() - many
    which = np.repeat(np.arange(len(place)), many)
    edge = edges.first[piece][which] + np.arange(len(which)) - begin[which]
    a, b, m = edges.start[edge], edges.end[edge], place[which]
    spans = (a[:, 1] > m[:, 1]) != (b[:, 1] > m[:, 1])
    rise = np.where(spans, b[:, 1] - a[:, 1], 1.0)
    right = spans & (a[:, 0] + (b[:, 0] - a[:, 0]) * (m[:, 1] - a[:, 1]) / rise > m[:, 0])
    result: Array = np.add.reduceat(right.astype(np.intp), begin) % 2 == 1
    return result


def _centres(corner: Array) -> Array:
    """Centres of the circles through three corners."""
    a = corner[:, 0]
    p, q = corner[:, 1] - a, corner[:, 2] - a
    doubled = 2 * (p[:, 0] * q[:, 1] - p[:, 1] * q[:, 0])
    pp, qq = (p * p).sum(axis=1), (q * q).sum(axis=1)
    x = (q[:, 1] * pp - p[:, 1] * qq) / doubled
    y = (p[:, 0] * qq - q[:, 0] * pp) / doubled
    result: Array = a + np.stack((x, y), axis=1)
    return result


def _apart(centre: Array, radius: Array) -> Indices:
    """Of circles, the largest first, those whose centres lie in no circle chosen before them."""
    from scipy.spatial import cKDTree

    reach = np.minimum(0.9 * radius, 1.0)
    order = np.argsort(-reach, kind="stable")
    near = cKDTree(centre).query_ball_point(centre[order], reach[order])
    taken = np.zeros(len(centre), dtype=bool)
    chosen = []
    for index, others in zip(order.tolist(), near, strict=True):
        if not taken[index]:
            chosen.append(index)
            taken[others] = True
    return np.array(chosen, dtype=np.intp)


def _complete(layout: Layout, points: Array, piece: Indices, triangles: Indices) -> bool:
    """Whether the triangles of every piece fill it."""
    filled = np.bincount(piece[triangles[:, 0]], _doubled(points, triangles), int(layout.piece.max()) + 1)
    a, b = layout.start, layout.end
    origin = a[np.searchsorted(layout.piece, np.arange(len(filled)))][layout.piece]
    a, b = a - origin, b - origin
    wanted = np.bincount(layout.piece, a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0])
    return bool((np.abs(filled - wanted) <= 1e-6 * wanted).all())
