"""Where a stress in a section lies above a level: closed lines, piece by piece, for drawing.

Units: mm; the stress in any unit. Values stand at the points of triangles and run evenly between them.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from server.mechanics.field import Field
from server.mechanics.field_stress import stress_at
from server.mechanics.polygon import Array, Bools, Indices
from server.mechanics.section import Piece, SectionProperties

Loop = list[tuple[float, float]]
_SIX = np.array(((0.0, 0.0), (1.0, 0.0), (0.0, 1.0), (0.5, 0.0), (0.5, 0.5), (0.0, 0.5)))
_FOUR = np.array(((0, 3, 5), (3, 1, 4), (5, 4, 2), (3, 4, 5)))


def stress_grid(
    pieces: Sequence[Piece], properties: SectionProperties, field: Field
) -> tuple[Array, Indices, Array, Array]:
    """Points, triangles and shear stresses to draw by: every triangle of the mesh cut into four.

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; G in [MPa].
    properties : SectionProperties
        Of the same pieces.
    field : Field
        Its solution.

    Returns
    -------
    points : numpy.ndarray
        (p, 2) across and up [mm]; those of different pieces are different points.
    triangles : numpy.ndarray
        (t, 3), anticlockwise.
    stress : numpy.ndarray
        (p, 2, 3) across and up, of the three causes, the mean of the triangles that meet there [MPa per unit].
    area : numpy.ndarray
        (p,) of the triangles around each point [mm2].

    References
    ----------
    .. [1] As ``shear_field``.
    """
    mesh = field.mesh
    count = len(mesh.points)
    found = stress_at(pieces, properties, field, _SIX)
    ends = mesh.triangles[:, [[0, 1], [1, 2], [2, 0]]].reshape(-1, 2)
    known, number = np.unique(ends.min(axis=1) * count + ends.max(axis=1), return_inverse=True)
    place = np.concatenate((mesh.triangles, count + number.reshape(-1, 3)), axis=1)
    low, high = np.divmod(known, count)
    points = np.concatenate((mesh.points, (mesh.points[low] + mesh.points[high]) / 2))
    corner = mesh.points[mesh.triangles]
    p, q = corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0]
    share = np.repeat((p[:, 0] * q[:, 1] - p[:, 1] * q[:, 0]) / 2, 6)
    area: Array = np.bincount(place.ravel(), share, len(points)).astype(float)
    summed = np.zeros((len(points), 2, 3))
    np.add.at(summed, place.ravel(), found.reshape(-1, 2, 3) * share[:, None, None])
    return points, place[:, _FOUR].reshape(-1, 3), summed / area[:, None, None], area


def above(points: Array, triangles: Indices, values: Array, level: float) -> list[Loop]:
    """Closed lines around all that lies above a level, what is above on the left.

    Parameters
    ----------
    points : numpy.ndarray
        (p, 2) [mm].
    triangles : numpy.ndarray
        (t, 3), anticlockwise.
    values : numpy.ndarray
        (p,) at the points.
    level : float
        In the unit of the values.

    Returns
    -------
    list of list of (float, float)
        Across and up of each corner of each line [mm].

    References
    ----------
    .. [1] Linear interpolation in triangles; edges that two triangles share cancel.
    """
    over = values > level
    count = over[triangles].sum(axis=1)
    whole, one, two = (triangles[count == many] for many in (3, 1, 2))
    one, two = _turned(one, over[one]), _turned(two, ~over[two])  # the odd corner first
    low, high = _crossed(one, two)
    crossing = np.unique(low * len(points) + high)

    def cross(i: Indices, j: Indices) -> Indices:
        wanted = np.minimum(i, j) * len(points) + np.maximum(i, j)
        return len(points) + np.searchsorted(crossing, wanted)

    rings = [whole.T]
    if len(one):
        rings.append(np.stack((one[:, 0], cross(one[:, 0], one[:, 1]), cross(one[:, 2], one[:, 0]))))
    if len(two):
        k, i, j = two.T
        rings.append(np.stack((i, j, cross(j, k), cross(k, i))))
    first = np.concatenate([ring.ravel() for ring in rings])
    second = np.concatenate([np.roll(ring, -1, axis=0).ravel() for ring in rings])
    low, high = np.divmod(crossing, len(points))
    t = (level - values[low]) / (values[high] - values[low])
    corners = np.concatenate((points, points[low] + t[:, None] * (points[high] - points[low]))).tolist()
    following: dict[int, list[int]] = {}
    for start, end in _uncancelled(first, second, len(corners)):
        following.setdefault(start, []).append(end)
    return [[(corners[each][0], corners[each][1]) for each in loop] for loop in _chained(following)]


def _turned(triangles: Indices, odd: Bools) -> Indices:
    """Triangles whose one marked corner comes first."""
    place = (odd.argmax(axis=1)[:, None] + np.arange(3)) % 3
    found: Indices = np.take_along_axis(triangles, place, axis=1)
    return found


def _crossed(one: Indices, two: Indices) -> tuple[Indices, Indices]:
    """Ends of the edges that the level crosses, the lower number first."""
    pairs = np.concatenate([each[:, [0, 1]] for each in (one, two)] + [each[:, [0, 2]] for each in (one, two)])
    return pairs.min(axis=1), pairs.max(axis=1)


def _uncancelled(first: Indices, second: Indices, count: int) -> list[tuple[int, int]]:
    """Directed edges that no triangle beside passes the other way."""
    ahead = first < second
    key = np.where(ahead, first, second) * count + np.where(ahead, second, first)
    known, number = np.unique(key, return_inverse=True)
    net = np.bincount(number, np.where(ahead, 1.0, -1.0), len(known))
    kept = np.flatnonzero(net)
    low, high = np.divmod(known[kept], count)
    forward = net[kept] > 0
    return list(zip(np.where(forward, low, high).tolist(), np.where(forward, high, low).tolist(), strict=True))


def _chained(following: dict[int, list[int]]) -> list[list[int]]:
    """Follow directed edges until each is used."""
    loops = []
    while following:
        start = next(iter(following))
        loop: list[int] = []
        here = start
        while here in following:
            loop.append(here)
            onward = following[here]
            there = onward.pop()
            if not onward:
                del following[here]
            here = there
        if len(loop) > 2:
            loops.append(loop)
    return loops
