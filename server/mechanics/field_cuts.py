"""Horizontal cuts through single pieces, from the field: each piece's own share of the shear that passes a height.

Units: N, mm, MPa. What passes a cut through one piece balances what lies above it: the change of its bending force, and
the flows of the joints above. So only the flows come from the field; the rest is exact.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from server.mechanics.cuts import HorizontalCut
from server.mechanics.field import Field
from server.mechanics.field_layout import Bond
from server.mechanics.polygon import Array
from server.mechanics.section import Piece, SectionProperties

_BETWEEN = 6  # places looked at between neighbouring heights at which something begins or ends
_TIP = 1e-6  # of a piece's widest cut: nothing is looked for in narrower ones


def field_cuts(
    pieces: Sequence[Piece], properties: SectionProperties, bonds: Sequence[Bond], field: Field
) -> list[HorizontalCut]:
    r"""For each piece the horizontal cut through it where its own mean shear stress is greatest.

    .. math:: \tau = \frac{V\,S_p(u)}{EI\,b_p(u)}, \qquad S_p(u) = \int_{p,\,above\ u} E\,(v - u_0)\,dA
              - \sum_{joints\ above} S_j

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; lengths in [mm], E in [MPa].
    properties : SectionProperties
        Of the same pieces; EI in [N mm2].
    bonds : sequence of Bond
        The joints that the field was solved with [mm].
    field : Field
        Its solution; shares in [N mm].

    Returns
    -------
    list of HorizontalCut
        One for each piece; ``first_moment`` is the piece's own share, ``width`` its own.

    Notes
    -----
    Along a bond the flow is taken as even over each of the parts over which the field gives its mean.

    References
    ----------
    .. [1] Equilibrium of the part above the cut; own derivation.
    """
    above = [_Joined(piece, properties, bonds, field, place) for place, piece in enumerate(pieces)]
    return [one.largest() for one in above]


class _Joined:
    """One piece, cut at any height."""

    def __init__(
        self, piece: Piece, properties: SectionProperties, bonds: Sequence[Bond], field: Field, place: int
    ) -> None:
        self.EI, self.E, self.u_0 = properties.EI, piece.E, float(properties.neutral_axis[1])
        bands = properties.bands
        self.low, self.high = bands.low, bands.high
        self.wide_low, self.wide_high = bands.width_low[place], bands.width_high[place]
        inside = (self.wide_low > 0) | (self.wide_high > 0)
        self.bottom, self.top = float(self.low[inside].min()), float(self.high[inside].max())
        heights, flows = [np.zeros((0, 2))], [np.zeros(0)]
        for number, bond in enumerate(bonds):
            if place in (bond.first, bond.second):
                way = 1.0 if place == bond.first else -1.0
                ends = np.clip(_heights(bond, field.parts.shape[1]), self.bottom, self.top)
                heights.append(np.stack((ends[:-1], ends[1:]), axis=1))
                flows.append(way * field.parts[number] * bond.bonded / field.parts.shape[1])
        self.from_, self.to = np.sort(np.concatenate(heights), axis=1).T
        self.flow = np.concatenate(flows)

    def largest(self) -> HorizontalCut:
        """The cut with the greatest mean stress; of equal ones the lowest."""
        size = self.top - self.bottom
        step = 1e-7 * size
        known = np.concatenate((self.low, self.high, self.from_, self.to, (self.u_0, self.bottom, self.top)))
        known = np.unique(known[(known >= self.bottom) & (known <= self.top)])
        share = np.linspace(0.0, 1.0, _BETWEEN + 1)[:-1]
        between = (known[:-1, None] + np.diff(known)[:, None] * share).ravel()
        at = np.unique(np.concatenate((between, known - step, known + step)))
        at = at[(at > self.bottom) & (at < self.top)]
        width, moment = self._width(at), self._moment(at) - self._joined(at)
        wide = width > _TIP * width.max()
        stress = np.where(wide, np.abs(moment) / np.where(wide, width, 1.0), 0.0)
        best = int((stress >= stress.max() * (1 - 1e-9)).argmax())
        return HorizontalCut(float(at[best]), float(moment[best]), float(width[best]), float(stress[best] / self.EI))

    def _width(self, at: Array) -> Array:
        band = np.clip(np.searchsorted(self.high, at), 0, len(self.low) - 1)
        share = np.clip((at - self.low[band]) / (self.high - self.low)[band], 0.0, 1.0)
        result: Array = self.wide_low[band] * (1 - share) + self.wide_high[band] * share
        return result

    def _moment(self, at: Array) -> Array:
        """E-weighted first moment of the piece above each height: linear widths, so Simpson's rule is exact."""
        from_ = np.maximum(self.low, at[:, None])
        depth = np.maximum(self.high - from_, 0.0)
        span = self.high - self.low
        share = np.clip((from_ - self.low) / span, 0.0, 1.0)
        ends = self.wide_low * (1 - share) + self.wide_high * share, self.wide_high
        arms = from_ - self.u_0, self.high - self.u_0
        middle = (ends[0] + ends[1]) / 2 * (arms[0] + arms[1]) / 2
        result: Array = self.E * (depth / 6 * (ends[0] * arms[0] + 4 * middle + ends[1] * arms[1])).sum(axis=1)
        return result

    def _joined(self, at: Array) -> Array:
        """Flow on the piece of the joints, or parts of joints, above each height."""
        span = np.maximum(self.to - self.from_, 1e-12 * (self.top - self.bottom))
        share = np.clip((self.to - at[:, None]) / span, 0.0, 1.0)
        result: Array = share @ self.flow
        return result


def _heights(bond: Bond, parts: int) -> Array:
    """Heights of the ends of the parts of a bond's width."""
    along = np.linspace(-0.5, 0.5, parts + 1) * bond.bonded
    if bond.ring is None:
        middle, way = (bond.start + bond.end) / 2, (bond.end - bond.start) / bond.length
        result: Array = middle[1] + along * way[1]
        return result
    centre, radius = bond.circle
    around: Array = centre[1] + radius * np.cos(along / radius)
    return around
