"""The region two polygons share, found by sweeping level lines over both.

Units: mm. Between neighbouring heights at which a corner lies or two edges cross, both polygons are trapezoids with
straight sides in a fixed order, so their common part is exact.
"""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np

from server.mechanics.polygon import Array, Edges

Spans = list[tuple[float, float]]
MOST_HEIGHTS = 4000  # outlines that cross more often than this are not worth the exact area


def common_region(edges: Edges, one: int, other: int) -> tuple[float, float]:
    """Area and perimeter of the region that two of the polygons share.

    Parameters
    ----------
    edges : Edges
        Edges of n polygons [mm].
    one, other : int
        Places of the two polygons.

    Returns
    -------
    area, perimeter : float
        Of the common region [mm2], [mm]; holes count as outside. Both are NaN where the outlines have so many corners
        and crossings that the sweep would take long.

    Raises
    ------
    IndexError
        If there is no such polygon.

    References
    ----------
    .. [1] Own derivation: a scan-line decomposition into trapezoids.
    """
    a, b = _own_edges(edges, one), _own_edges(edges, other)
    heights = np.unique(np.concatenate((a[:, 1], b[:, 1], _crossing_heights(a, b))))
    low, high = max(a[:, 1].min(), b[:, 1].min()), min(a[:, 1].max(), b[:, 1].max())
    heights = heights[(heights >= low) & (heights <= high)]
    if len(heights) > MOST_HEIGHTS:
        return math.nan, math.nan
    dust = 1e-9 * edges.size
    area = perimeter = 0.0
    below: Spans = []
    for bottom, top in pairwise(heights.tolist()):
        H = top - bottom
        if dust > H:
            continue
        ends = _common_sides(_sides(a, bottom, top), _sides(b, bottom, top))
        for (left_0, left_1), (right_0, right_1) in ends:
            area += H * ((right_0 - left_0) + (right_1 - left_1)) / 2
            perimeter += float(np.hypot(H, left_1 - left_0) + np.hypot(H, right_1 - right_0))
        perimeter += _difference(below, [(left[0], right[0]) for left, right in ends])
        below = [(left[1], right[1]) for left, right in ends]
    return area, perimeter + _difference(below, [])


def _own_edges(edges: Edges, place: int) -> Array:
    """The edges of one polygon as rows x0, u0, x1, u1."""
    own = edges.owner == place
    return np.hstack((edges.start[own], edges.end[own]))


def _crossing_heights(a: Array, b: Array) -> Array:
    """Heights at which an edge of ``a`` crosses one of ``b``."""
    d, e = (a[:, 2:] - a[:, :2])[:, None], (b[:, 2:] - b[:, :2])[None]
    apart = b[None, :, :2] - a[:, None, :2]
    cross = d[..., 0] * e[..., 1] - d[..., 1] * e[..., 0]
    safe = np.where(cross == 0, np.inf, cross)
    s = (apart[..., 0] * e[..., 1] - apart[..., 1] * e[..., 0]) / safe
    t = (apart[..., 0] * d[..., 1] - apart[..., 1] * d[..., 0]) / safe
    meets = (cross != 0) & (s >= 0) & (s <= 1) & (t >= 0) & (t <= 1)
    heights: Array = (a[:, None, 1] + s * d[..., 1])[meets]
    return heights


def _sides(a: Array, bottom: float, top: float) -> list[tuple[float, float]]:
    """Where the edges that pass a band cross its bottom and its top, from left to right."""
    low, high = np.minimum(a[:, 1], a[:, 3]), np.maximum(a[:, 1], a[:, 3])
    middle = (bottom + top) / 2
    row = a[(low < middle) & (high > middle)]
    slope = (row[:, 2] - row[:, 0]) / (row[:, 3] - row[:, 1])
    ends = zip(
        (row[:, 0] + slope * (bottom - row[:, 1])).tolist(),
        (row[:, 0] + slope * (top - row[:, 1])).tolist(),
        strict=True,
    )
    return sorted(ends, key=sum)


def _common_sides(
    a: list[tuple[float, float]], b: list[tuple[float, float]]
) -> list[tuple[tuple[float, float], tuple[float, float]]]:
    """Left and right sides of the trapezoids within both."""
    found = []
    for left_a, right_a in zip(a[::2], a[1::2], strict=True):
        for left_b, right_b in zip(b[::2], b[1::2], strict=True):
            left, right = max(left_a, left_b, key=sum), min(right_a, right_b, key=sum)
            if sum(right) > sum(left):
                found.append((left, right))
    return found


def _difference(one: Spans, other: Spans) -> float:
    """Length that lies in one set of spans but not in the other."""
    shared = sum(max(0.0, min(b, d) - max(a, c)) for a, b in one for c, d in other)
    return sum(b - a for a, b in one) + sum(b - a for a, b in other) - 2 * shared
