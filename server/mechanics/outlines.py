"""Whether an outline can be a piece: one closed ring that nowhere crosses or touches itself, holes well inside it.

Units: mm. Every side is held against every other, so that what is refused is named by its corners.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.polygon import Array, Indices

APART = 1e-3  # mm between sides of one ring that do not follow each other: closer is touching
WALL = 0.05  # mm between a hole and the outline, or two holes
MOST_CORNERS = 1000  # of one piece


def sound(rings: Sequence[Array]) -> None:
    """Refuse rings that are no outline with holes.

    Parameters
    ----------
    rings : sequence of numpy.ndarray
        The outline, then the holes, each (n, 2) corners across and up [mm]; a ring may end on its first corner.

    Raises
    ------
    InputError
        With the field "points" or "holes[k]": too few or too many corners, a ring without area, one that crosses or
        touches itself, a hole that touches or crosses the outline or another hole, or lies outside.

    References
    ----------
    .. [1] Plane geometry: sides cross where the ends of either lie on both sides of the other.
    """
    total = sum(len(ring) for ring in rings)
    if total > MOST_CORNERS:
        raise InputError("points", f"the piece has {total} corners; at most {MOST_CORNERS} are read. Leave some out.")
    cleaned = [_distinct(ring, _field(k)) for k, ring in enumerate(rings)]
    for k, ring in enumerate(cleaned):
        _refuse_crossings(ring, _field(k))
        _refuse_flat(ring, _field(k))
    for k in range(1, len(cleaned)):
        for before in range(k):
            _refuse_near(cleaned[k], cleaned[before], k, before)


def _field(place: int) -> str:
    return "points" if place == 0 else f"holes[{place - 1}]"


def _distinct(ring: Array, field: str) -> Array:
    """The ring without corners typed twice running."""
    if len(ring):
        ring = ring[(ring != np.roll(ring, 1, axis=0)).any(axis=1)] if len(ring) > 1 else ring
    if len(ring) < 3:
        raise InputError(field, f"{len(ring)} distinct corners make no area; give three or more.")
    return ring


def _refuse_flat(ring: Array, field: str) -> None:
    a = ring - ring[0]
    b = np.roll(a, -1, axis=0)
    area = abs(float((a[:, 0] * b[:, 1] - b[:, 0] * a[:, 1]).sum())) / 2
    round_about = float(np.hypot(*(b - a).T).sum())
    if 2 * area < WALL * round_about:
        raise InputError(
            field,
            f"the corners enclose {area:.3g} mm2, a sliver {2 * area / round_about:.2g} mm thick on average; contacts "
            f"are found to {WALL:g} mm, so let it be thicker than that.",
        )


def _refuse_crossings(ring: Array, field: str) -> None:
    n = len(ring)
    ends = np.roll(ring, -1, axis=0)
    i, j = np.triu_indices(n, 2)
    follows = (i == 0) & (j == n - 1)
    i, j = i[~follows], j[~follows]
    gap = _gaps(ring[i], ends[i], ring[j], ends[j])
    if gap.size and gap.min() < APART:
        k = int(gap.argmin())
        raise InputError(
            field,
            f"the ring crosses or touches itself: the side from {_at(ring[i[k]])} to {_at(ends[i[k]])} meets the side "
            f"from {_at(ring[j[k]])} to {_at(ends[j[k]])}. Give the corners in their order round the outline, and "
            "hollows as holes.",
        )


def _refuse_near(hole: Array, other: Array, place: int, before: int) -> None:
    """A hole keeps clear of the outline and of other holes, and lies inside the one and outside the others."""
    i, j = (index.ravel() for index in np.indices((len(hole), len(other))))
    gap = _gaps(hole[i], np.roll(hole, -1, axis=0)[i], other[j], np.roll(other, -1, axis=0)[j])
    what = "the outline" if before == 0 else f"hole {before}"
    field = _field(place)
    if gap.min() == 0:
        raise InputError(field, f"hole {place} crosses or touches {what} near {_at(hole[i[int(gap.argmin())]])}.")
    if gap.min() < WALL:
        raise InputError(
            field, f"hole {place} leaves a wall of only {gap.min():.2g} mm to {what}; leave at least {WALL:g} mm."
        )
    within = bool(_inside(hole[:1], other)[0])
    if before == 0 and not within:
        raise InputError(field, f"hole {place} lies outside the outline; holes are cut out of the piece itself.")
    if before and (within or _inside(other[:1], hole)[0]):
        raise InputError(field, f"hole {place} and hole {before} lie one in the other; give only the larger one.")


def _inside(points: Array, ring: Array) -> NDArray[np.bool_]:
    """Which points lie inside a ring: a level line from the point crosses it an odd number of times."""
    a, b = ring, np.roll(ring, -1, axis=0)
    up = points[:, 1, None]
    spans = (a[:, 1] > up) != (b[:, 1] > up)
    rise = np.where(spans, b[:, 1] - a[:, 1], 1.0)
    across = a[:, 0] + (up - a[:, 1]) * (b[:, 0] - a[:, 0]) / rise
    result: NDArray[np.bool_] = (spans & (across > points[:, 0, None])).sum(axis=1) % 2 == 1
    return result


def _gaps(a: Array, b: Array, c: Array, d: Array) -> Array:
    """Distance of the segments a-b and c-d, row by row; 0 where they cross."""
    crossing = (_side(a, b, c) * _side(a, b, d) < 0) & (_side(c, d, a) * _side(c, d, b) < 0)
    ends = np.stack([_to(a, c, d), _to(b, c, d), _to(c, a, b), _to(d, a, b)])
    result: Array = np.where(crossing, 0.0, ends.min(axis=0))
    return result


def _side(a: Array, b: Array, p: Array) -> Array:
    result: Array = np.sign((b[:, 0] - a[:, 0]) * (p[:, 1] - a[:, 1]) - (b[:, 1] - a[:, 1]) * (p[:, 0] - a[:, 0]))
    return result


def _to(p: Array, a: Array, b: Array) -> Array:
    """Distance of points from segments; one without length, such as a closing corner typed again, is a point."""
    along = b - a
    squared = (along * along).sum(axis=1)
    share = np.clip(((p - a) * along).sum(axis=1) / np.where(squared > 0, squared, 1.0), 0.0, 1.0)
    off = p - a - share[:, None] * along
    result: Array = np.hypot(off[:, 0], off[:, 1])
    return result


def nearest(one: Sequence[Array], other: Sequence[Array]) -> float:
    """Distance between the rings of two pieces [mm]; 0 where they cross."""
    least = np.inf
    for a in one:
        for b in other:
            i, j = (index.ravel() for index in np.indices((len(a), len(b))))
            gap = _gaps(a[i], np.roll(a, -1, axis=0)[i], b[j], np.roll(b, -1, axis=0)[j])
            least = min(least, float(gap.min()))
    return least


def _at(point: Indices | Array) -> str:
    return f"({float(point[0]):.6g}, {float(point[1]):.6g})"
