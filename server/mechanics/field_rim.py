"""The points on the outlines of a section's pieces, and the rings of points around singular corners.

Units: mm. A bonded run is cut at the same shares of its length on both pieces, so that their points answer each other.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from server.mechanics.field_layout import Layout
from server.mechanics.field_sizes import GROWTH, Sizes
from server.mechanics.polygon import Array, Bools, Indices

_SECTOR = np.radians(52.0)  # widest angle between neighbouring rays of points around a corner


@dataclass(frozen=True, eq=False)
class Rim:
    """Points on the outlines, and the parts of sides between them, material on the left, in the order of the pieces.

    ``points`` (n, 2) [mm]; ``piece`` of each; of each part: ``start``, ``end`` points; ``part_piece``; ``side``;
    ``run``; ``cut`` number of the part among all parts of runs: two parts with the same number are bonded, the first
    piece's passing it forwards; ``at`` (c, 2) shares of its run where each cut starts and ends; ``cut_run`` (c,).
    """

    points: Array
    piece: Indices
    start: Indices
    end: Indices
    part_piece: Indices
    side: Indices
    cut: Indices
    cut_run: Indices
    at: Array


def first_cuts(wanted: Sizes) -> tuple[Indices, Array]:
    """Cut every run into parts of the wanted sizes: of each cut its run and where on it, both ends among them."""
    total = wanted.parts[:, -1]
    many = np.maximum(np.ceil(total - 0.2).astype(np.intp), 1)
    run = np.repeat(np.arange(len(many)), many + 1)
    step = np.arange(len(run)) - ((many + 1).cumsum() - many - 1)[run]
    goal = total[run] * step / many[run]
    # one interpolation for all runs: their counts are laid end to end
    base = np.concatenate(([0.0], (total + 1.0).cumsum()[:-1]))
    known = (wanted.parts + base[:, None]).ravel()
    at = np.interp(goal + base[run], known, np.tile(wanted.at, len(many)))
    at[step == 0] = 0.0
    at[step == many[run]] = 1.0
    return run, at


def halved(run: Indices, at: Array, rim: Rim, split: Bools) -> tuple[Indices, Array]:
    """Add a cut in the middle of the parts that are to be split."""
    cut = np.unique(rim.cut[split])
    run = np.concatenate((run, rim.cut_run[cut]))
    at = np.concatenate((at, rim.at[cut].mean(axis=1)))
    order = np.lexsort((at, run))
    return run[order], at[order]


def rim_of(layout: Layout, run: Indices, at: Array) -> Rim:
    """Place the cuts of all runs on the sides of both pieces."""
    inside = run[1:] == run[:-1]
    first = np.flatnonzero(inside)
    cut_run, cut_at = run[first], np.stack((at[first], at[first + 1]), axis=1)
    count = np.bincount(cut_run, minlength=len(layout.ahead))
    begin = count.cumsum() - count
    many = count[layout.run]
    side = np.repeat(np.arange(len(layout.run)), many)
    step = np.arange(len(side)) - (many.cumsum() - many)[side]
    back = layout.back[side]
    cut = begin[layout.run[side]] + np.where(back, many[side] - 1 - step, step)
    share = np.where(back, 1 - cut_at[cut, 1], cut_at[cut, 0])
    points = layout.start[side] + (layout.end - layout.start)[side] * share[:, None]
    start = np.arange(len(side))
    last = many.cumsum() - 1
    end = start + 1
    end[last] = (many.cumsum() - many)[layout.next]
    return Rim(points, layout.piece[side], start, end, layout.piece[side], side, cut, cut_run, cut_at)


def rings(layout: Layout, wanted: Sizes) -> tuple[Array, Indices]:
    """Points inside the pieces on rings around singular corners, each ring as far out again as the one before it."""
    side, small = wanted.side, wanted.small
    if not side.size:
        return np.zeros((0, 2)), np.zeros(0, dtype=np.intp)
    angle, along = layout.angle[side], (layout.end - layout.start)[side]
    heading = np.arctan2(along[:, 1], along[:, 0])
    rays = np.maximum(np.ceil(angle / _SECTOR).astype(np.intp), 1)
    turns = np.maximum(np.floor(np.log(np.maximum(wanted.reach / small, 1.0)) / np.log(1 + GROWTH)).astype(np.intp), 0)
    many = (rays - 1) * turns
    which = np.repeat(np.arange(len(side)), many)
    step = np.arange(len(which)) - (many.cumsum() - many)[which]
    turn, ray = np.divmod(step, np.maximum(rays[which] - 1, 1))
    direction = heading[which] + angle[which] * (ray + 1) / rays[which]
    radius = small[which] * (1 + GROWTH) ** turn
    place = layout.start[side][which] + radius[:, None] * np.stack((np.cos(direction), np.sin(direction)), axis=1)
    return _uncrowded(layout, side, which, place, radius)


def _uncrowded(layout: Layout, side: Indices, which: Indices, place: Array, radius: Array) -> tuple[Array, Indices]:
    """Points that are nearer to their own corner than to any other singular corner of the piece."""
    piece = layout.piece[side]
    order = np.argsort(piece, kind="stable")
    count = np.bincount(piece, minlength=int(layout.piece.max()) + 1)
    first = count.cumsum() - count
    many = count[piece[which]]
    row = np.repeat(np.arange(len(which)), many)
    before = many.cumsum() - many
    other = order[first[piece[which]][row] + np.arange(len(row)) - before[row]]
    away = place[row] - layout.start[side][other]
    nearest = np.minimum.reduceat(np.hypot(away[:, 0], away[:, 1]), before) if len(row) else radius
    kept = nearest >= 0.999 * radius
    return place[kept], piece[which[kept]]
