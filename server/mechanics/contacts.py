"""Where pieces touch, and where they would lie inside each other.

Units: mm. A contact is a pair of edges of two pieces that face each other, run parallel, and are no further apart than
the bond line allows.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.polygon import Array, Edges, Indices, Outline, edges_of, moments
from server.mechanics.sweep import common_region

TOUCH = 0.05  # mm: closer than this is touching, and no deeper than this is not yet overlapping
PARALLEL = 1e-3  # sine of the angle up to which edges count as parallel; facets of a round are further apart
DUST = 1e-6  # mm: a gap typed as 0.05 must not fail by its last binary digit
_MANY = 200_000  # pairs of edges looked at in one go


@dataclass(frozen=True, eq=False)
class Contact:
    """One stretch along which two pieces face each other.

    ``first`` < ``second`` places of the two pieces; ``start``, ``end`` (2,) of the line midway in the gap, from the
    lower end (the left one where level) [mm]; ``length`` of the facing overlap [mm]; ``gap`` the widest distance [mm];
    ``line`` (k, 2) the points of a contact that is not straight, such as the closed ring between round tubes.
    """

    first: int
    second: int
    start: NDArray[np.float64]
    end: NDArray[np.float64]
    length: float
    gap: float
    line: NDArray[np.float64] | None = None

    @property
    def middle(self) -> NDArray[np.float64]:
        """Midway between its ends; the centre of a ring."""
        ends = np.stack((self.start, self.end)) if self.line is None else self.line[:-1]
        result: NDArray[np.float64] = ends.mean(axis=0)
        return result


def contacts(outlines: Sequence[Outline] | Edges, reach: Array) -> list[Contact]:
    """Find every stretch along which two pieces face each other.

    Parameters
    ----------
    outlines : sequence or Edges
        Of n pieces, each an (m, 2) array or such rings, the outer one first [mm]; or their edges, as in
        ``SectionProperties.edges``.
    reach : numpy.ndarray
        (n, n) widest gap that still counts as a contact of that pair [mm].

    Returns
    -------
    list of Contact
        By pair, then lowest, then leftmost.

    Raises
    ------
    InputError
        If there is no outline, one has fewer than three points, or ``reach`` has the wrong shape.

    Notes
    -----
    Collinear stretches that follow each other are one contact. A stretch no longer than 0.05 mm is touching at a point,
    no contact. Part of a gap that a third face stands in is left out. Edges at more than 1 : 1000, or whose gap opens
    by more than 0.05 mm, are not parallel. Pieces that dip into each other by up to 0.05 mm still touch. Sides of arcs
    (``Edges.curved``) touch nothing: the flat that can be glued is what counts. Rounds in rounds: ``round_contacts``.

    References
    ----------
    .. [1] Own derivation; the 0.05 mm are the check file's rule.

    Examples
    --------
    >>> from server.mechanics.section import rectangle
    >>> flange, web = rectangle(90.0, 70.0, (12.5, 0.0)), rectangle(12.5, 400.0, (0.0, 0.0))
    >>> [(c.first, c.second, c.length) for c in contacts([flange, web], np.full((2, 2), 0.05))]
    [(0, 1, 70.0)]
    """
    edges = edges_of(outlines)
    reach = np.asarray(reach, dtype=float)
    if reach.shape != (len(edges.first), len(edges.first)):
        raise InputError("reach", f"reach has the shape {reach.shape}; give one number for every pair of pieces.")
    reach = np.maximum(reach, reach.T)
    one, other = _near_edges(edges, reach)
    if not one.size:
        return []
    faces = _facing(edges, one, other)
    allowed = reach[edges.owner[faces.one], edges.owner[faces.other]]
    kept = faces.high_gap <= allowed + DUST
    found: list[Contact] = []
    for index in np.flatnonzero(kept).tolist():
        found.extend(_stretches(edges, faces, index))
    return in_order(_merged(found))


def segments(found: Sequence[Contact]) -> dict[tuple[int, int], tuple[Contact, ...]]:
    """Contacts by pair of pieces, each pair's in the order that "#2", "#3" count."""
    pairs: dict[tuple[int, int], list[Contact]] = {}
    for contact in found:
        pairs.setdefault((contact.first, contact.second), []).append(contact)
    return {pair: tuple(contacts) for pair, contacts in pairs.items()}


def overlap(outlines: Sequence[Outline] | Edges) -> list[tuple[int, int, float]]:
    """Pairs of pieces that lie inside each other by more than 0.05 mm, and the area they share.

    Parameters
    ----------
    outlines : sequence or Edges
        Of n pieces, each an (m, 2) array or such rings, the outer one first [mm]; or their edges, as in
        ``SectionProperties.edges``.

    Returns
    -------
    list of (int, int, float)
        Places of the two pieces and their common area [mm2], by pair; NaN where outlines cross too often to say.

    Raises
    ------
    InputError
        If there is no outline, or one has no area.

    Notes
    -----
    The depth of an overlap is the narrow side of the rectangle of the same area and perimeter: exact for a strip, and
    for a piece that is oversize all round.

    References
    ----------
    .. [1] Own derivation.
    """
    edges = edges_of(outlines)
    low, high = edges.boxes()
    common = np.minimum(high[:, None], high) - np.maximum(low[:, None], low)
    near = _pairs(common > TOUCH)
    if not near[0].size:
        return []
    area = moments(edges)[0]
    box = (high - low).prod(axis=1)
    fills = box - area <= 1e-9 * box  # a rectangle that stands square
    found = []
    for i, j in zip(*(each.tolist() for each in near), strict=True):
        if fills[i] and fills[j]:
            shared = float(common[i, j].prod())
        else:
            shared, round_about = common_region(edges, i, j)
            half = round_about / 2
            depth = (half - np.sqrt(max(half * half - 4 * shared, 0.0))) / 2
            if depth <= TOUCH:  # not so where both are NaN
                continue
        found.append((i, j, shared))
    return found


def _pairs(table: NDArray[np.bool_]) -> tuple[Indices, Indices]:
    """Where a symmetric table (n, n, 2) holds across and up, every pair once: the lower place and the higher one."""
    i, j = np.nonzero(table.all(axis=2))
    once = i < j
    return i[once], j[once]


def _near_edges(edges: Edges, reach: Array) -> tuple[Indices, Indices]:
    """Pairs of flat edges, the first of the lower piece, whose pieces' boxes come within reach."""
    low, high = edges.boxes()
    near = low[:, None] - high[None] <= np.maximum(reach, TOUCH)[:, :, None] + DUST
    i, j = _pairs(near & near.swapaxes(0, 1))
    count = edges.count
    if int((count[i] * count[j]).sum()) > _MANY:
        return _one_by_one(edges, i, j, reach)
    one, other, _ = edges.pairs(i, j)
    if edges.curved is not None:
        flat = ~(edges.curved[one] | edges.curved[other])
        one, other = one[flat], other[flat]
    return one, other


def _one_by_one(edges: Edges, i: Indices, j: Indices, reach: Array) -> tuple[Indices, Indices]:
    """The same for many edges: pair by pair, and of each pair only edges near the other piece's box."""
    low, high = edges.boxes()
    edge_low, edge_high = np.minimum(edges.start, edges.end), np.maximum(edges.start, edges.end)
    flat = np.ones(len(edges.start), dtype=bool) if edges.curved is None else ~edges.curved
    own = [edges.first[k] + np.flatnonzero(flat[edges.first[k] :][:n]) for k, n in enumerate(edges.count.tolist())]
    found: list[tuple[Indices, Indices]] = []
    for a, b in zip(i.tolist(), j.tolist(), strict=True):
        margin = max(float(reach[a, b]), TOUCH) + DUST
        one, other = own[a], own[b]
        one = one[((edge_low[one] <= high[b] + margin) & (edge_high[one] >= low[b] - margin)).all(axis=1)]
        other = other[((edge_low[other] <= high[a] + margin) & (edge_high[other] >= low[a] - margin)).all(axis=1)]
        found.append((np.repeat(one, len(other)), np.tile(other, len(one))))
    return np.concatenate([one for one, _ in found]), np.concatenate([other for _, other in found])


@dataclass(frozen=True, eq=False)
class _Faces:
    """Facing edges: ``one``, ``other`` edges; ``from_``, ``to`` overlap along the first; gaps over it."""

    one: Indices
    other: Indices
    from_: Array
    to: Array
    low_gap: Array
    high_gap: Array


def _facing(edges: Edges, one: Indices, other: Indices) -> _Faces:
    """Of the given edge pairs those that face each other: opposite, parallel, overlapping, not behind each other."""
    along = edges.end - edges.start
    along /= np.sqrt(along[:, 0] ** 2 + along[:, 1] ** 2)[:, None]
    t, v = along[one], along[other]
    tx, ty = t[:, 0], t[:, 1]
    opposite = (np.abs(tx * v[:, 1] - ty * v[:, 0]) <= PARALLEL) & (tx * v[:, 0] + ty * v[:, 1] < 0)
    one, other, tx, ty = one[opposite], other[opposite], tx[opposite], ty[opposite]
    base = edges.start[one]
    p, q, r = edges.end[one] - base, edges.end[other] - base, edges.start[other] - base
    q_along, r_along = q[:, 0] * tx + q[:, 1] * ty, r[:, 0] * tx + r[:, 1] * ty
    q_gap, r_gap = q[:, 0] * ty - q[:, 1] * tx, r[:, 0] * ty - r[:, 1] * tx
    from_, to = np.maximum(q_along, 0.0), np.minimum(r_along, p[:, 0] * tx + p[:, 1] * ty)
    slope = (r_gap - q_gap) / (r_along - q_along)
    gap_1, gap_2 = q_gap + slope * (from_ - q_along), q_gap + slope * (to - q_along)
    low_gap, high_gap = np.minimum(gap_1, gap_2), np.maximum(gap_1, gap_2)
    facing = (to - from_ > TOUCH) & (low_gap >= -TOUCH) & (high_gap - low_gap <= TOUCH)
    return _Faces(one[facing], other[facing], from_[facing], to[facing], low_gap[facing], high_gap[facing])


def _stretches(edges: Edges, faces: _Faces, index: int) -> list[Contact]:
    """The facing overlap as contacts, less what a third face hides."""
    one, other = int(faces.one[index]), int(faces.other[index])
    free = [(float(faces.from_[index]), float(faces.to[index]))]
    gap, low = float(faces.high_gap[index]), float(faces.low_gap[index])
    if gap > 2 * TOUCH:
        for from_, to in _hidden(edges, one, other, low):
            free = [
                part for a, b in free for part in ((a, min(b, from_)), (max(a, to), b)) if part[1] - part[0] > TOUCH
            ]
    (x, u), (x_end, u_end) = edges.start[one].tolist(), edges.end[one].tolist()
    length = float(np.hypot(x_end - x, u_end - u))
    tx, tu = (x_end - x) / length, (u_end - u) / length
    middle = (gap + low) / 4
    x, u = x + tu * middle, u - tx * middle
    backwards = tu < -PARALLEL or (abs(tu) <= PARALLEL and tx < 0)
    result = []
    for a, b in free:
        ends = [(x + tx * s, u + tu * s) for s in ((b, a) if backwards else (a, b))]
        pair = int(edges.owner[one]), int(edges.owner[other])
        result.append(Contact(*pair, np.array(ends[0]), np.array(ends[1]), b - a, max(gap, 0.0)))
    return result


def _hidden(edges: Edges, one: int, other: int, gap: float) -> list[tuple[float, float]]:
    """Stretches of an edge in front of which a third piece has a face nearer than ``gap``."""
    owners = edges.owner[one], edges.owner[other]
    third = np.flatnonzero((edges.owner != owners[0]) & (edges.owner != owners[1]))
    faces = _facing(edges, np.full(len(third), one, dtype=np.intp), third)
    nearer = faces.high_gap < gap - TOUCH
    return list(zip(faces.from_[nearer].tolist(), faces.to[nearer].tolist(), strict=True))


def _merged(found: list[Contact]) -> list[Contact]:
    """Join collinear stretches of a pair that follow each other."""
    result: list[Contact] = []
    for pair in segments(in_order(found)).values():
        kept: list[Contact] = []
        for contact in pair:
            place = next((k for k, before in enumerate(kept) if _continues(before, contact)), None)
            if place is None:
                kept.append(contact)
            else:
                kept[place] = _joined(kept[place], contact)
        result.extend(kept)
    return result


def _continues(before: Contact, contact: Contact) -> bool:
    """Whether a stretch starts where another ends, in the same direction."""
    if np.abs(before.end - contact.start).max() > TOUCH:
        return False
    a, b = before.end - before.start, contact.end - contact.start
    return bool(abs(a[0] * b[1] - a[1] * b[0]) <= PARALLEL * before.length * contact.length)


def _joined(before: Contact, contact: Contact) -> Contact:
    """Two stretches that follow each other as one."""
    length, gap = before.length + contact.length, max(before.gap, contact.gap)
    return Contact(before.first, before.second, before.start, contact.end, length, gap)


def in_order(found: list[Contact]) -> list[Contact]:
    """By pair, then lowest, then leftmost; level to a millionth of a millimetre."""
    return sorted(found, key=lambda c: (c.first, c.second, round(float(c.start[1]), 6), float(c.start[0])))
