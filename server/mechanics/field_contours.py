"""Where a stress in a section lies above a level: closed lines, piece by piece, for drawing.

Units: mm; the stress in any unit. Values stand at the points of triangles and run evenly between them.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from server.mechanics.field import Field
from server.mechanics.field_stress import stress_at
from server.mechanics.polygon import Array, Indices
from server.mechanics.section import Piece, SectionProperties

Loop = list[tuple[float, float]]
Key = int | tuple[int, int]  # a point, or where the level crosses between two
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
    following: dict[Key, list[Key]] = {}
    at: dict[Key, tuple[float, float]] = {}
    edges: set[tuple[Key, Key]] = set()

    def add(a: Key, b: Key) -> None:
        if (b, a) in edges:
            edges.discard((b, a))
        else:
            edges.add((a, b))

    for corner in triangles[count > 0].tolist():
        ring: list[Key] = []
        for i, j in zip(corner, corner[1:] + corner[:1], strict=True):
            if over[i]:
                ring.append(i)
            if over[i] != over[j]:
                key = (min(i, j), max(i, j))
                if key not in at:
                    t = (level - values[key[0]]) / (values[key[1]] - values[key[0]])
                    x, u = points[key[0]] + t * (points[key[1]] - points[key[0]])
                    at[key] = (float(x), float(u))
                ring.append(key)
        for one, other in zip(ring, ring[1:] + ring[:1], strict=True):
            add(one, other)
    for one, other in edges:
        following.setdefault(one, []).append(other)
    corners = points.tolist()
    return [
        [at[each] if isinstance(each, tuple) else (corners[each][0], corners[each][1]) for each in loop]
        for loop in _chained(following)
    ]


def _chained(following: dict[Key, list[Key]]) -> list[list[Key]]:
    """Follow directed edges until each is used."""
    loops = []
    while following:
        start = next(iter(following))
        loop: list[Key] = []
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
