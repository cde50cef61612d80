"""Shear stress inside the pieces, from the solution of the section's field.

Units: N, mm, MPa. On the face that is looked at, across and up; of three causes: a rate of curvature of 1 up and down,
one sideways, and a twist of 1 per length.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from server.mechanics.field import Field
from server.mechanics.field_elements import basis
from server.mechanics.polygon import Array
from server.mechanics.section import Piece, SectionProperties

MIDDLES = np.array(((0.5, 0.0), (0.5, 0.5), (0.0, 0.5), (1 / 3, 1 / 3)))
_QUANTILE = 0.98  # of a piece's area: what is left out lies at inward corners, where stress has no limit


def stress_at(pieces: Sequence[Piece], properties: SectionProperties, field: Field, places: Array) -> Array:
    r"""Shear stress at the same places of every triangle.

    .. math:: \tau = -G\,\nabla\psi, \qquad \tau = G\,(\nabla\omega + (-u, a))

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; G in [MPa].
    properties : SectionProperties
        Of the same pieces.
    field : Field
        Its solution.
    places : numpy.ndarray
        (k, 2) places in the unit triangle [-].

    Returns
    -------
    numpy.ndarray
        (t, k, 2, 3): across and up, of the three causes [MPa per unit of the cause].

    References
    ----------
    .. [1] As ``shear_field``.
    """
    mesh, origin = field.mesh, properties.neutral_axis
    corner = mesh.points[mesh.triangles] - origin
    p, q = corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0]
    doubled = p[:, 0] * q[:, 1] - p[:, 1] * q[:, 0]
    slope = np.stack((np.stack((q[:, 1], -q[:, 0]), 1), np.stack((-p[:, 1], p[:, 0]), 1)), axis=1)
    slope = slope / doubled[:, None, None]
    gradients = basis(places[:, 0], places[:, 1])[1]
    local = np.tensordot(field.solved.values, gradients, axes=([1], [1]))  # t, cause, coordinate, place
    found = np.einsum("tckn,tkd->tndc", local, slope)
    at = corner[:, None, 0] + places[None, :, :1] * p[:, None] + places[None, :, 1:] * q[:, None]
    found[..., :2] *= -1
    found[:, :, 0, 2] -= at[..., 1]
    found[:, :, 1, 2] += at[..., 0]
    G = np.array([piece.G for piece in pieces], dtype=float)[mesh.piece]
    result: Array = G[:, None, None, None] * found
    return result


def torsion_stress(pieces: Sequence[Piece], properties: SectionProperties, field: Field) -> Array:
    """The shear stress in each piece that a torque of 1 makes, short of the peaks at inward corners.

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
    numpy.ndarray
        (n,) the stress that 98 % of the piece's area does not exceed [MPa per N mm].

    References
    ----------
    .. [1] As ``shear_field``; the share of the area is a choice: at inward corners elastic stress has no limit.
    """
    stress = stress_at(pieces, properties, field, MIDDLES)[..., 2] / field.GJ
    size = np.hypot(stress[..., 0], stress[..., 1])
    corner = field.mesh.points[field.mesh.triangles]
    p, q = corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0]
    area = np.abs(p[:, 0] * q[:, 1] - p[:, 1] * q[:, 0])
    found = np.zeros(len(pieces))
    for place in range(len(pieces)):
        own = field.mesh.piece == place
        sizes, weights = size[own].ravel(), np.repeat(area[own], size.shape[1])
        order = np.argsort(sizes)
        share = weights[order].cumsum() / weights.sum()
        found[place] = sizes[order][min(int(np.searchsorted(share, _QUANTILE)), len(order) - 1)]
    return found
