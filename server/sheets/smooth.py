"""Rounds between samples: a curve through few points drawn as it runs, not as a polygon."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
BETWEEN = 4
"""Parts into which each stretch between two samples is divided."""
AGREE = 0.35
"""How far the parabolas of the left and the right may differ, as a share of what they bow; beyond it is a kink."""


def rounded(x: Array, y: Array) -> tuple[Array, Array]:
    """Return the curve with points between the samples, on the parabolas through each three in a row.

    The samples stay. Where the parabolas of the left and of the right disagree, as at a kink of an envelope, and at
    jumps (two samples at one place) the line stays straight.

    >>> rounded(np.array([0.0, 1.0, 2.0, 3.0]), np.array([0.0, 1.0, 4.0, 9.0]))[1][:5].tolist()
    [0.0, 0.0625, 0.25, 0.5625, 1.0]
    """
    if len(x) < 4:
        return x, y
    wide, rise = np.diff(x), np.diff(y)
    whole = wide > 0
    slope = np.divide(rise, wide, out=np.zeros_like(rise), where=whole)
    bow = np.full((2, len(wide)), np.nan)  # second divided difference of the three points from the left and the right
    pair = whole[1:] & whole[:-1]
    second = np.full(len(pair), np.nan)
    second[pair] = (np.diff(slope)[pair]) / (wide[1:] + wide[:-1])[pair]
    bow[0, 1:], bow[1, :-1] = second, second
    one = np.where(np.isnan(bow[0]), bow[1], bow[0])
    other = np.where(np.isnan(bow[1]), bow[0], bow[1])
    most = np.maximum(np.abs(one), np.abs(other))
    bend = np.where(np.abs(one - other) <= AGREE * most, 0.5 * (one + other), 0.0)
    bend = np.where(whole & np.isfinite(bend), bend, 0.0)
    share = np.arange(BETWEEN) / BETWEEN
    xs = x[:-1, None] + wide[:, None] * share
    ys = y[:-1, None] + rise[:, None] * share - bend[:, None] * wide[:, None] ** 2 * (share * (1 - share))
    return np.append(xs.ravel(), x[-1]), np.append(ys.ravel(), y[-1])
