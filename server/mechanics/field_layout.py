"""The outlines of a section's pieces as sides that are free or bonded: what the mesh of its field is built on.

Units: mm, MPa. Each piece is meshed on its own; two pieces share the nodes of a bond, and of nothing else. So the ends
of a bond must be points of both outlines: here every outline is cut there.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from server.mechanics.contacts import TOUCH
from server.mechanics.polygon import Array, Bools, Edges, Indices, straightened

_SLOPE = 2e-3  # sine of the angle between a bond and the sides it runs along; contacts allow 1e-3
_FLUSH = 1e-3  # of a side's length: a bond that ends closer to a corner than this ends at the corner
_DUST = 1e-9  # of a side's length


@dataclass(frozen=True, eq=False)
class Bond:
    """One joint as the field sees it.

    ``first``, ``second`` places of its two pieces; ``start``, ``end`` (2,) of the contact's line [mm]; ``gap`` between
    the two faces [mm]; ``width`` that is bonded, in the middle of the contact [mm], None for all of it; ``stiffness``
    shear modulus x coverage / thickness [N/mm3], None for a rigid bond; ``ring`` (k, 2) points of a contact that runs
    round in a circle, anticlockwise from its lowest point.
    """

    first: int
    second: int
    start: Array
    end: Array
    gap: float = 0.0
    width: float | None = None
    stiffness: float | None = None
    ring: Array | None = None

    @property
    def length(self) -> float:
        """Of the contact [mm]."""
        if self.ring is None:
            return float(np.hypot(*(self.end - self.start)))
        return 2 * np.pi * self.circle[1]

    @property
    def bonded(self) -> float:
        """Width that is bonded [mm]."""
        return self.length if self.width is None else min(self.width, self.length)

    @property
    def circle(self) -> tuple[Array, float]:
        """Centre and radius of a contact that runs round [mm]."""
        assert self.ring is not None
        points = self.ring[:-1]
        centre: Array = points.mean(axis=0)
        return centre, float(np.hypot(*(points - centre).T).mean())


@dataclass(frozen=True, eq=False)
class Layout:
    """Sides of all outlines, material on the left, and the runs they belong to.

    Of each side: ``piece``; ``edge`` of ``edges`` that it is a part of; ``start``, ``end`` (s, 2); ``next`` in the same
    ring; ``run``; ``back`` whether it passes its run from the end to the start. Of each run: ``bond`` or -1 where it is
    free; ``ahead`` the side that passes it forwards; ``behind`` the one of the second piece that passes it backwards,
    or -1; ``from_``, ``to`` places along the bond where it starts and ends [mm], from the bond's middle.
    """

    edges: Edges
    piece: Indices
    edge: Indices
    start: Array
    end: Array
    next: Indices
    run: Indices
    back: Bools
    bond: Indices
    ahead: Indices
    behind: Indices
    from_: Array
    to: Array

    @property
    def length(self) -> Array:
        """Of each side [mm]."""
        along: Array = self.end - self.start
        result: Array = np.hypot(along[:, 0], along[:, 1])
        return result

    @property
    def previous(self) -> Indices:
        """The side before each in its ring."""
        result = np.empty_like(self.next)
        result[self.next] = np.arange(len(self.next))
        return result

    @property
    def angle(self) -> Array:
        """Inside each piece, at the start of each side [radian]."""
        along: Array = self.end - self.start
        before = along[self.previous]
        cross = before[:, 0] * along[:, 1] - before[:, 1] * along[:, 0]
        result: Array = np.pi - np.arctan2(cross, (before * along).sum(axis=1))
        return result


@dataclass(frozen=True)
class _Run:
    """A stretch over which one edge of the first piece and one of the second are bonded; shares of either edge.

    It runs as the first piece's edge does, ``from_`` and ``to`` places along the bond.
    """

    bond: int
    edges: tuple[int, int]
    shares: tuple[tuple[float, float], tuple[float, float]]
    from_: float
    to: float


def lay_out(edges: Edges, bonds: Sequence[Bond]) -> Layout:
    """Cut all outlines at the ends of the bonds.

    Parameters
    ----------
    edges : Edges
        Edges of the n pieces [mm].
    bonds : sequence of Bond
        The joints; lengths in [mm].

    Returns
    -------
    Layout
        Sides and runs; lengths in [mm].

    Notes
    -----
    A bond that ends within a thousandth of a side's length, at most 0.05 mm, from a corner ends at that corner.

    References
    ----------
    .. [1] Own derivation.
    """
    edges = straightened(edges)
    return _sides(edges, [run for run in _runs(edges, bonds) if all(b - a > _DUST for a, b in run.shares)])


@dataclass(frozen=True, eq=False)
class _Along:
    """Edges of pieces that run along bonds: the bond, the edge, where it starts and ends along the bond, how far left.

    Ordered by bond.
    """

    bond: Indices
    edge: Indices
    from_: Array
    to: Array
    off: Array

    def rows(self) -> dict[int, list[tuple[int, float, float, float]]]:
        """Edge, start, end and distance by bond."""
        found: dict[int, list[tuple[int, float, float, float]]] = {}
        columns = (self.edge.tolist(), self.from_.tolist(), self.to.tolist(), self.off.tolist())
        for bond, *row in zip(self.bond.tolist(), *columns, strict=True):
            found.setdefault(bond, []).append((row[0], row[1], row[2], row[3]))
        return found


def _runs(edges: Edges, bonds: Sequence[Bond]) -> list[_Run]:
    straight = [place for place, bond in enumerate(bonds) if bond.ring is None]
    found = [run for place, bond in enumerate(bonds) if bond.ring is not None for run in _around(edges, place, bond)]
    if not straight:
        return found
    chosen = [bonds[place] for place in straight]
    start, end = (np.array([getattr(bond, name) for bond in chosen], dtype=float) for name in ("start", "end"))
    half, gap = (np.array([getattr(bond, name) for bond in chosen]) for name in ("bonded", "gap"))
    half = half / 2
    along = (end - start) / np.hypot(*(end - start).T)[:, None]
    line = (start + end) / 2, along, half, gap / 2 + 2 * TOUCH
    firsts = _along(edges, np.array([bond.first for bond in chosen]), *line).rows()
    seconds = _along(edges, np.array([bond.second for bond in chosen]), *line).rows()
    for number, (place, reach, wide) in enumerate(zip(straight, half.tolist(), gap.tolist(), strict=True)):
        for one in firsts.get(number, ()):
            for other in seconds.get(number, ()):
                found += _meeting(place, one, other, reach, wide)
    return found


def _around(edges: Edges, place: int, bond: Bond) -> list[_Run]:
    """The runs of a bond that goes round: wherever a side of either round begins, another run."""
    centre, radius = bond.circle
    half, reach = bond.bonded / 2, bond.gap / 2 + 2 * TOUCH
    first, second = (_facets(edges, piece, centre, radius, reach) for piece in (bond.first, bond.second))
    found: list[_Run] = []
    for a, a_from, a_to in first:
        for b, b_from, b_to in second:
            if (a_to > a_from) != (b_to > b_from):
                low = max(min(a_from, a_to), min(b_from, b_to), -half)
                high = min(max(a_from, a_to), max(b_from, b_to), half)
                if high - low > 1e-9 * radius:
                    shares = _share(low, high, a_from, a_to), _share(low, high, b_from, b_to)
                    found.append(_Run(place, (a, b), shares, *((low, high) if a_to > a_from else (high, low))))
    return found


def _facets(edges: Edges, piece: int, centre: Array, radius: float, reach: float) -> list[tuple[int, float, float]]:
    """Sides of a round's face on a circle: place, start and end along the circle from its highest point.

    One that passes the lowest point comes twice, a turn apart.
    """
    own = np.flatnonzero(edges.owner == piece)
    a, b = edges.start[own] - centre, edges.end[own] - centre
    long = np.hypot(*(b - a).T)
    away = np.hypot(*((a + b) / 2).T)
    angle = np.arctan2(-a[:, 0], a[:, 1])  # from the highest point, anticlockwise
    turn = np.arctan2(a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0], (a * b).sum(axis=1))
    on = (np.abs(away - radius) <= reach + long**2 / (4 * radius)) & (np.abs(turn) * radius >= 0.9 * long)
    found = []
    for edge, from_, by in zip(own[on].tolist(), angle[on].tolist(), turn[on].tolist(), strict=True):
        for shift in (0.0, 2 * np.pi, -2 * np.pi):
            ends = (from_ + shift) * radius, (from_ + by + shift) * radius
            if max(ends) > -np.pi * radius and min(ends) < np.pi * radius:
                found.append((edge, *ends))
    return found


def _meeting(
    place: int, one: tuple[int, float, float, float], other: tuple[int, float, float, float], half: float, gap: float
) -> list[_Run]:
    """The run of a bond over an edge of either piece, if they face each other there."""
    a, a_from, a_to, a_off = one
    b, b_from, b_to, b_off = other
    # opposite ways along the bond, and each on the side to which the other's face looks
    apart = (a_off - b_off) if a_to > a_from else (b_off - a_off)
    if (a_to > a_from) == (b_to > b_from) or not -2 * TOUCH <= apart <= gap + 2 * TOUCH:
        return []
    low = max(min(a_from, a_to), min(b_from, b_to), -half)
    high = min(max(a_from, a_to), max(b_from, b_to), half)
    if high - low <= 1e-6 * half:
        return []
    shares = _share(low, high, a_from, a_to), _share(low, high, b_from, b_to)
    return [_Run(place, (a, b), shares, *((low, high) if a_to > a_from else (high, low)))]


def _along(edges: Edges, piece: Indices, middle: Array, along: Array, half: Array, reach: Array) -> _Along:
    """Edges of one piece of each bond that run along the bond's line."""
    many = edges.count[piece]
    begin = many.cumsum() - many
    bond = np.repeat(np.arange(len(piece)), many)
    edge = edges.first[piece][bond] + np.arange(len(bond)) - begin[bond]
    a, b, way = edges.start[edge] - middle[bond], edges.end[edge] - middle[bond], along[bond]
    from_, to = (a * way).sum(axis=1), (b * way).sum(axis=1)
    off_from, off_to = a[:, 1] * way[:, 0] - a[:, 0] * way[:, 1], b[:, 1] * way[:, 0] - b[:, 0] * way[:, 1]
    low = np.maximum(np.minimum(from_, to), -half[bond])
    high = np.minimum(np.maximum(from_, to), half[bond])
    span = np.where(to == from_, 1.0, to - from_)
    off = off_from + (off_to - off_from) * ((low + high) / 2 - from_) / span
    on = (np.abs(off_to - off_from) <= _SLOPE * np.abs(to - from_)) & (high > low) & (np.abs(off) <= reach[bond])
    return _Along(bond[on], edge[on], from_[on], to[on], off[on])


def _share(low: float, high: float, from_: float, to: float) -> tuple[float, float]:
    """Where a stretch of the line starts and ends on an edge, as shares of the edge, in the edge's own direction."""
    flush = min(_FLUSH, TOUCH / abs(to - from_))
    a, b = sorted(((low - from_) / (to - from_), (high - from_) / (to - from_)))
    return (0.0 if a < flush else a), (1.0 if b > 1 - flush else b)


def _sides(edges: Edges, runs: list[_Run]) -> Layout:
    """Every edge as a row of sides, with free ones where no bond is."""
    on_edge: dict[int, list[tuple[float, float, int, bool]]] = {}
    for number, each in enumerate(runs):
        for is_second, (edge, (a, b)) in enumerate(zip(each.edges, each.shares, strict=True)):
            on_edge.setdefault(edge, []).append((a, b, number, bool(is_second)))
    places, from_, numbers, backs, count = _cut(len(edges.start), on_edge, len(runs))
    place, run, back = np.array(places, dtype=np.intp), np.array(numbers, dtype=np.intp), np.array(backs, dtype=bool)
    first_of = np.searchsorted(place, np.arange(len(edges.start)))
    last = np.append(place[1:] != place[:-1], True)
    following = np.arange(1, len(place) + 1)
    following[last] = first_of[edges.next[place[last]]]
    start = edges.start[place] + (edges.end - edges.start)[place] * np.array(from_)[:, None]
    bond, ahead, behind = np.full((3, count), -1, dtype=np.intp)
    bond[: len(runs)] = [each.bond for each in runs]
    ahead[run[~back]] = np.flatnonzero(~back)
    behind[run[back]] = np.flatnonzero(back)
    begins, ends = np.zeros((2, count))
    begins[: len(runs)], ends[: len(runs)] = [each.from_ for each in runs], [each.to for each in runs]
    owner, end = edges.owner[place], start[following]
    return Layout(edges, owner, place, start, end, following, run, back, bond, ahead, behind, begins, ends)


def _cut(
    edges: int, on_edge: dict[int, list[tuple[float, float, int, bool]]], bonded: int
) -> tuple[list[int], list[float], list[int], list[bool], int]:
    """Of every side its edge, where it starts on it, its run, and whether it passes it backwards; and how many runs."""
    places: list[int] = []
    from_: list[float] = []
    runs: list[int] = []
    backs: list[bool] = []
    free = bonded

    def add(edge: int, at: float, run: int, back: bool) -> None:
        places.append(edge)
        from_.append(at)
        runs.append(run)
        backs.append(back)

    for edge in range(edges):
        at = 0.0
        for a, b, number, second in sorted(on_edge.get(edge, ())):
            if a - at > _DUST:
                add(edge, at, free, False)
                free += 1
                at = a
            add(edge, at, number, second)
            at = b
        if 1.0 - at > _DUST:
            add(edge, at, free, False)
            free += 1
    return places, from_, runs, backs, free
