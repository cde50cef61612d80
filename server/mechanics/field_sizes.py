"""How fine the mesh of a section's field has to be, and where.

Units: mm. Shear peaks without limit where a bond ends at an inward corner; elements shrink towards such points, and
are about as large as the piece is thick elsewhere.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from server.errors import InputError
from server.mechanics.field_layout import Layout
from server.mechanics.polygon import Array, Bools, Indices

INWARD = np.radians(207.0)  # opening from which a point counts as singular: facets of a round do not
GROWTH = 1.0  # size of an element per distance from a singular point
MOST_PAIRS = 10_000_000  # of places on sides with edges of the same piece: a limit on time and memory
_SAMPLES = np.concatenate(([0.0], 0.5 ** np.arange(9, 0, -1.0), 1 - 0.5 ** np.arange(2, 10.0), [1.0]))

# clearance changes no faster than the place, so it is found at few places and interpolated
_SPARSE = np.linspace(0.0, 1.0, 5)
_BETWEEN = np.maximum(0.0, 1 - np.abs(_SPARSE[:, None] - _SAMPLES) * (len(_SPARSE) - 1))


@dataclass(frozen=True)
class Fineness:
    """``share`` size of elements over the piece's thickness; ``shrink`` size at a singular point over that."""

    share: float
    shrink: float


@dataclass(frozen=True, eq=False)
class Sizes:
    """Sizes of elements that are wanted.

    ``at`` samples along every run, as shares of it, (k,); ``parts`` (r, k) into how many parts the run up to each
    sample is to be cut; of each singular point inside each piece: ``side`` that starts there, ``small`` size at it,
    ``reach`` distance to the nearest other side, both in mm.
    """

    at: Array
    parts: Array
    side: Indices
    small: Array
    reach: Array


def sizes(layout: Layout, fineness: Fineness) -> Sizes:
    """Sizes along all outlines, from the distance to the sides opposite and to singular points.

    Parameters
    ----------
    layout : Layout
        Sides and runs; lengths in [mm].
    fineness : Fineness
        Both shares [-].

    Returns
    -------
    Sizes
        Lengths in [mm].

    Raises
    ------
    InputError
        If there are too many sides.

    References
    ----------
    .. [1] Own derivation; grading towards corners: I. Babuska, R. B. Kellogg and J. Pitkaranta, "Direct and inverse
       error estimates for finite elements with mesh refinements", Numer. Math. 33 (1979); from memory.
    """
    if int((layout.edges.count[layout.piece] * len(_SPARSE)).sum()) > MOST_PAIRS:
        raise InputError("pieces", "The section's shapes have too many sides to mesh; simplify the finest shapes.")
    singular = _singular(layout)
    s = len(layout.piece)
    sides = np.arange(s)
    reach = np.minimum(_clearance(layout, layout.start, sides, at_start=True), layout.length)
    reach = np.minimum(reach, layout.length[layout.previous])
    small = np.where(singular, fineness.share * fineness.shrink, fineness.share) * reach
    side = np.repeat(sides, len(_SPARSE))
    place = layout.start[side] + (layout.end - layout.start)[side] * np.tile(_SPARSE, s)[:, None]
    clear = np.minimum(_clearance(layout, place, side), layout.length[side]).reshape(s, len(_SPARSE))
    size = fineness.share * (clear @ _BETWEEN)
    away = layout.length[:, None] * _SAMPLES
    size = np.minimum(size, small[:, None] + GROWTH * away)
    size = np.minimum(size, small[layout.next, None] + GROWTH * away[:, ::-1])
    density = layout.length[:, None] / size
    on_run = density[layout.ahead]
    bonded = layout.behind >= 0
    on_run[bonded] = np.maximum(on_run[bonded], density[layout.behind[bonded], ::-1])
    steps = (on_run[:, 1:] + on_run[:, :-1]) / 2 * np.diff(_SAMPLES)
    parts = np.concatenate((np.zeros((len(steps), 1)), steps.cumsum(axis=1)), axis=1)
    found = np.flatnonzero(singular)
    return Sizes(_SAMPLES, parts, found, small[found], reach[found])


def _singular(layout: Layout) -> Bools:
    """Whether the pieces that meet where a side starts leave a stress there that has no limit."""
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    s = len(layout.piece)
    bonded = layout.behind >= 0
    a, b = layout.ahead[bonded], layout.behind[bonded]
    one, other = np.concatenate((a, layout.next[a])), np.concatenate((layout.next[b], b))
    graph = coo_array((np.ones(len(one)), (one, other)), shape=(s, s))
    count, point = connected_components(graph, directed=False)
    opening = np.bincount(point, layout.angle, count)
    many = np.bincount(point, minlength=count)
    free_side = layout.bond[layout.run] < 0
    free = np.bincount(point, free_side | free_side[layout.previous], count) > 0
    singular = np.where(free, opening > INWARD, many > 2)
    found: Bools = singular[point]
    return found


def _clearance(layout: Layout, place: Array, side: Indices, *, at_start: bool = False) -> Array:
    """Distance from places on sides to the nearest edge of the same piece that does not meet their own.

    With ``at_start`` the places are the starts of the sides, and the edges that meet there do not count. Where a piece
    has no other edge, infinite.
    """
    edges = layout.edges
    count = edges.count
    own, before = layout.edge[side], np.empty_like(edges.next)
    before[edges.next] = np.arange(len(before))
    many = count[layout.piece[side]]
    begin = many.cumsum() - many
    which = np.repeat(np.arange(len(side)), many)
    other = edges.first[layout.piece[side]][which] + np.arange(len(which)) - begin[which]
    if at_start:
        meets = (other == own[which]) | (other == layout.edge[layout.previous[side]][which])
    else:
        meets = (other == own[which]) | (other == before[own][which]) | (other == edges.next[own][which])
    along = (edges.end - edges.start)[other]
    away = place[which] - edges.start[other]
    t = np.clip((away * along).sum(axis=1) / (along * along).sum(axis=1), 0.0, 1.0)
    rest = away - along * t[:, None]
    distance = np.where(meets, np.inf, np.hypot(rest[:, 0], rest[:, 1]))
    result: Array = np.minimum.reduceat(distance, begin)
    return result
