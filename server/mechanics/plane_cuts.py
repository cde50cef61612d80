"""Level and upright cuts through single pieces of a section that bends about both axes.

Units: N, mm, MPa. What passes a cut through a piece balances what lies beyond it, as in ``field_cuts``, here for
curvature that changes up and down and sideways at once, so that every cut has two first moments.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from server.mechanics.field import Field
from server.mechanics.field_layout import Bond
from server.mechanics.polygon import Array, Bools
from server.mechanics.section import Piece, SectionProperties

_BETWEEN = 6  # places looked at between neighbouring corners and ends of bonds
_TIP = 1e-6  # of a piece's widest cut: nothing is looked for in narrower ones
_WAYS = 720  # ratios of the two rates that are looked at; between them 1e-5 of the stress at most is missed


@dataclass(frozen=True, eq=False)
class PlaneCuts:
    """The cuts through one piece of which each is the worst for some ratio of the two rates of curvature.

    ``level`` (k,) whether it runs across, else upright; ``at`` where, up or across [mm]; ``width`` [mm]; ``first``,
    ``aside`` E-weighted first moments of what lies above or to the right, up and down and sideways, less the flows of
    the joints there [N mm]: the stress is (c first - c_l aside) / width.
    """

    level: Bools
    at: Array
    width: Array
    first: Array
    aside: Array


def plane_cuts(
    pieces: Sequence[Piece], properties: SectionProperties, bonds: Sequence[Bond], field: Field | None
) -> list[PlaneCuts]:
    r"""The level and upright cuts through every piece that may be the worst.

    .. math:: \tau = \frac{c\,S - c_l\,S_l}{b}, \quad S = \int_{p,\,beyond} E (u - u_0)\,dA - \sum_{joints} S_j

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; lengths in [mm], E in [MPa].
    properties : SectionProperties
        Of the same pieces [mm].
    bonds : sequence of Bond
        The joints that the field was solved with [mm].
    field : Field or None
        Its solution; None: each cut goes through all pieces that it meets.

    Returns
    -------
    list of PlaneCuts
        One for each piece.

    Notes
    -----
    The stress is the mean over the cut. Along a bond the flow is even over each part for which the field gives its
    mean.

    References
    ----------
    .. [1] Equilibrium of the part beyond the cut; own derivation.
    """
    return [_worst(_cuts(pieces, properties, bonds, field, place)) for place in range(len(pieces))]


def _cuts(
    pieces: Sequence[Piece], properties: SectionProperties, bonds: Sequence[Bond], field: Field | None, place: int
) -> PlaneCuts:
    edges = properties.edges
    own = edges.owner == place
    inside = own if field is not None else np.ones(len(own), dtype=bool)
    E = np.array([piece.E for piece in pieces])[edges.owner[inside]]
    ends = np.stack((edges.start[inside], edges.end[inside]), axis=1) - properties.neutral_axis
    box = edges.start[own] - properties.neutral_axis
    low, high = box.min(axis=0), box.max(axis=0)
    joined = [] if field is None else _joined(properties, bonds, field, place)
    sides = []
    for level in (True, False):
        axis = 1 if level else 0
        # an upright cut is a level one of the section turned by a quarter: (a, u) becomes (-u, a)
        turned = ends if level else np.stack((-ends[..., 1], ends[..., 0]), axis=2)
        spans = [np.sort(np.clip(each[:, :, axis], low[axis], high[axis]), axis=1) for each, _ in joined]
        known = np.concatenate((turned[..., 1].ravel(), *(span.ravel() for span in spans), [0.0]))
        at = _places(known, float(low[axis]), float(high[axis]))
        width, along, up = _beyond(turned, E, at)
        first, aside = (up, along) if level else (-along, up)
        for span, (_, flow) in zip(spans, joined, strict=True):
            wide = np.maximum(span[:, 1] - span[:, 0], 1e-12 * (high - low)[axis])
            share = np.clip((span[:, 1] - at[:, None]) / wide, 0.0, 1.0) @ flow
            first, aside = first - share[:, 0], aside - share[:, 1]
        keep = width > _TIP * width.max()
        origin = float(properties.neutral_axis[axis])
        sides.append([each[keep] for each in (np.full(len(at), level), at + origin, width, first, aside)])
    return PlaneCuts(*(np.concatenate(pair) for pair in zip(*sides, strict=True)))


def _places(known: Array, low: float, high: float) -> Array:
    step = 1e-7 * (high - low)
    known = np.unique(np.concatenate((known[(known >= low) & (known <= high)], [low, high])))
    share = np.linspace(0.0, 1.0, _BETWEEN + 1)[:-1]
    between = (known[:-1, None] + np.diff(known)[:, None] * share).ravel()
    at = np.unique(np.concatenate((between, known - step, known + step)))
    result: Array = at[(at > low) & (at < high)]
    return result


def _beyond(ends: Array, E: Array, at: Array) -> tuple[Array, Array, Array]:
    """Width of level cuts, and E-weighted first moments across and up of what lies above them, by Green's theorem.

    The cut itself runs level, so that it adds nothing to integrals over du.
    """
    (a1, u1), (a2, u2) = ends[:, 0].T, ends[:, 1].T
    rise = u2 - u1
    slope = (a2 - a1) / np.where(rise == 0, np.inf, rise)
    low, high = (np.maximum(u, at[:, None]) for u in (u1, u2))
    start, end = a1 + slope * (low - u1), a1 + slope * (high - u1)
    du = high - low
    across = (du * (start * start + start * end + end * end) / 6) @ E
    up = (du * (2 * start * low + start * high + end * low + 2 * end * high) / 6) @ E
    crossed = (u1 > at[:, None]) != (u2 > at[:, None])
    width = np.where(crossed, np.sign(rise) * (a1 + slope * (at[:, None] - u1)), 0.0).sum(axis=1)
    return width, across, up


def _joined(
    properties: SectionProperties, bonds: Sequence[Bond], field: Field, place: int
) -> list[tuple[Array, Array]]:
    """Of each bond of a piece: ends of its parts (k, 2, 2) from the neutral axis, and their flows on it (k, 2)."""
    found = []
    for number, bond in enumerate(bonds):
        if place not in (bond.first, bond.second):
            continue
        count = field.parts.shape[1]
        line = _line(bond, count) - properties.neutral_axis
        both = np.stack((field.parts[number], field.parts_across[number]), axis=1) * (bond.bonded / count)
        found.append((np.stack((line[:-1], line[1:]), axis=1), both if place == bond.first else -both))
    return found


def _line(bond: Bond, parts: int) -> Array:
    """Ends of the parts of a bond's width, (parts + 1, 2)."""
    along = np.linspace(-0.5, 0.5, parts + 1) * bond.bonded
    if bond.ring is None:
        way = (bond.end - bond.start) / bond.length
        result: Array = (bond.start + bond.end) / 2 + along[:, None] * way
        return result
    centre, radius = bond.circle  # anticlockwise from the lowest point, so the middle is at the top
    around: Array = centre + radius * np.stack((-np.sin(along / radius), np.cos(along / radius)), axis=1)
    return around


def _worst(cuts: PlaneCuts) -> PlaneCuts:
    """Only those that some ratio of the two rates makes the worst."""
    rate = np.stack((cuts.first, -cuts.aside), axis=1) / cuts.width[:, None]
    size = np.maximum(np.abs(rate).max(axis=0), 1e-300)
    angle = np.linspace(0.0, np.pi, _WAYS, endpoint=False)
    stress = np.abs((rate / size) @ np.stack((np.cos(angle), np.sin(angle))))
    kept = np.unique((stress >= stress.max(axis=0) * (1 - 1e-12)).argmax(axis=0))
    return PlaneCuts(*(getattr(cuts, name)[kept] for name in ("level", "at", "width", "first", "aside")))
