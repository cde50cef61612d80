"""A section built of pieces, each with its own modulus: shapes, and E-weighted properties.

Units: N, mm, MPa. Coordinates are ``[across, up]``, looking at the right-hand face of a cut; any origin will do.
A piece is a polygon, with holes where it has any. Stress follows ``E (up - neutral axis)``: plane sections stay plane.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.cuts import Bands, HorizontalCut, bands, largest_cuts, shear_stiffness
from server.mechanics.polygon import Array, Edges, edges_of, moments

__all__ = [
    "HorizontalCut",
    "Piece",
    "PieceProperties",
    "SectionProperties",
    "largest_cuts",
    "piece_properties",
    "properties",
    "rectangle",
    "reweighted",
    "shear_stiffness",
]


@dataclass(frozen=True, eq=False)
class Piece:
    """One piece of a section.

    ``outline`` (n, 2) corners across and up [mm], anticlockwise; ``E``, ``G`` [MPa]; ``density`` [kg/m3];
    ``holes`` further rings cut out of it.
    """

    name: str
    outline: Array
    E: float
    G: float | None = None
    density: float | None = None
    holes: tuple[Array, ...] = ()

    @property
    def rings(self) -> Array | tuple[Array, ...]:
        """The outline alone, or outline and holes: what ``contacts`` and ``overlap`` take."""
        return (self.outline, *self.holes) if self.holes else self.outline


@dataclass(frozen=True, eq=False)
class PieceProperties:
    """Of each of n pieces, plain (not E-weighted).

    ``area`` (n,) [mm2]; ``centroid`` (n, 2) across and up [mm]; ``inertia`` (n, 3) about the own centroid [mm4]:
    for bending up and down, for lateral bending, product.
    """

    area: NDArray[np.float64]
    centroid: NDArray[np.float64]
    inertia: NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class SectionProperties:
    """Of the whole section, E-weighted.

    ``area`` plain [mm2]; ``mass_per_length`` [kg/m], None where a density is missing; ``EA`` [N]; ``EI`` for bending up
    and down, ``EI_lateral``, ``EI_product`` [N mm2], about the neutral axis; ``neutral_axis`` (2,) across and up [mm];
    ``pieces`` the properties of each piece; ``first_moments`` (n,) E x area x height above the neutral axis [N mm];
    ``edges`` the outlines as arrays; ``like`` properties of the same outlines with other moduli, where there are any.
    """

    area: float
    mass_per_length: float | None
    EA: float
    EI: float
    EI_lateral: float
    EI_product: float
    neutral_axis: NDArray[np.float64]
    pieces: PieceProperties
    first_moments: NDArray[np.float64]
    edges: Edges = field(repr=False)
    like: SectionProperties | None = field(default=None, repr=False)

    @cached_property
    def bands(self) -> Bands:
        """The section between corner heights, cut once for all that needs it."""
        return bands(self.edges) if self.like is None else self.like.bands


_QUARTER_TURNS = {0: (1.0, 0.0), 1: (0.0, 1.0), 2: (-1.0, 0.0), 3: (0.0, -1.0)}


def rectangle(width: float, depth: float, at: Sequence[float], turn: float = 0.0) -> Array:
    """Corners of a rectangle, turned about its own centroid and then placed by its bounding box.

    Parameters
    ----------
    width, depth : float
        Across and up before turning [mm].
    at : sequence of float
        Lower left corner of the bounding box after turning: across, up [mm].
    turn : float
        Anticlockwise [degrees]; quarter turns are exact.

    Returns
    -------
    numpy.ndarray
        (4, 2) corners, anticlockwise [mm].

    Raises
    ------
    InputError
        If width or depth is not a finite number above zero, or ``at`` or ``turn`` is not finite.

    References
    ----------
    .. [1] Plane rotation; the rule for ``at`` and ``turn`` is the check file's own.

    Examples
    --------
    >>> rectangle(90.0, 70.0, (12.5, 0.0), turn=90.0).tolist()
    [[82.5, 0.0], [82.5, 90.0], [12.5, 90.0], [12.5, 0.0]]
    """
    for name, value in (("width", width), ("depth", depth)):
        if not (math.isfinite(value) and value > 0):
            raise InputError(name, f"{name} is {value:g} mm; enter a number greater than 0 mm.")
    if not (len(at) == 2 and math.isfinite(at[0]) and math.isfinite(at[1])):
        raise InputError("at", f"at is {list(at)}; enter two numbers, across and up, in mm.")
    if not math.isfinite(turn):
        raise InputError("turn", f"turn is {turn:g}; enter an angle in degrees.")
    x0, y0 = float(at[0]), float(at[1])
    if turn == 0:
        x1, y1 = x0 + width, y0 + depth
        return np.array(((x0, y0), (x1, y0), (x1, y1), (x0, y1)))
    quarter, rest = divmod(turn % 360.0, 90.0)
    if rest == 0:
        cos, sin = _QUARTER_TURNS[int(quarter) % 4]
    else:
        cos, sin = math.cos(math.radians(turn)), math.sin(math.radians(turn))
    w, d = width / 2, depth / 2
    turned = [(x * cos - y * sin, x * sin + y * cos) for x, y in ((-w, -d), (w, -d), (w, d), (-w, d))]
    half_across, half_up = w * abs(cos) + d * abs(sin), w * abs(sin) + d * abs(cos)
    return np.array([(x0 + (half_across + x), y0 + (half_up + y)) for x, y in turned])


def _edges(pieces: Sequence[Piece]) -> Edges:
    return edges_of([piece.rings for piece in pieces])


def piece_properties(pieces: Sequence[Piece]) -> PieceProperties:
    r"""Area, centroid and own second moments of every piece, exact for polygons.

    .. math:: A = \int dA,\quad c = \frac1A \int r\,dA,\quad I = \int (u - u_c)^2 dA

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; lengths in [mm].

    Returns
    -------
    PieceProperties
        Area [mm2], centroid [mm], second moments [mm4].

    Raises
    ------
    InputError
        If there is no piece, or a piece has no area.

    References
    ----------
    .. [1] J. M. Gere and B. J. Goodno, Mechanics of Materials, chapter on areas (centroids, second moments, products
       of composite areas); from memory.
    """
    return PieceProperties(*moments(_edges(pieces)))


def properties(pieces: Sequence[Piece]) -> SectionProperties:
    r"""E-weighted properties of a built-up section, all pieces bending as one body.

    .. math:: EA = \sum E_i A_i,\quad u_0 = \frac{\sum E_i A_i u_i}{EA},\quad
              EI = \sum E_i \left(I_i + A_i (u_i - u_0)^2\right)

    and likewise for lateral bending and the product moment.

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; lengths in [mm], E in [MPa], density in [kg/m3].

    Returns
    -------
    SectionProperties
        See there; mass in [kg/m].

    Raises
    ------
    InputError
        If there is no piece, a piece has no area, or an E is not a finite number above zero.

    Notes
    -----
    Perfect bond, linear elastic, no shear lag, bond lines without area. Slip between pieces is another module.

    References
    ----------
    .. [1] J. M. Gere and B. J. Goodno, Mechanics of Materials, "Composite beams"; from memory.

    Examples
    --------
    >>> section = properties([Piece("plank", rectangle(100.0, 200.0, (0.0, 0.0)), E=10_000.0)])
    >>> round(section.EI / 1e9, 3)  # 10 000 x 100 x 200^3 / 12
    666.667
    """
    edges = _edges(pieces)
    return _weighted(pieces, PieceProperties(*moments(edges)), edges)


def reweighted(pieces: Sequence[Piece], like: SectionProperties) -> SectionProperties:
    """Properties of pieces that have the outlines of ``like`` but other moduli (softened by creep, say).

    Parameters
    ----------
    pieces : sequence of Piece
        The same pieces in the same order; E in [MPa], density in [kg/m3].
    like : SectionProperties
        Properties of pieces with these outlines; their geometry is taken over.

    Returns
    -------
    SectionProperties
        As ``properties(pieces)``.

    Raises
    ------
    InputError
        If an E is not a finite number above zero.

    References
    ----------
    .. [1] As ``properties``.
    """
    return _weighted(pieces, like.pieces, like.edges, like)


def _weighted(
    pieces: Sequence[Piece], parts: PieceProperties, edges: Edges, like: SectionProperties | None = None
) -> SectionProperties:
    E = np.array([piece.E for piece in pieces], dtype=float)
    bad = ~(np.isfinite(E) & (E > 0))
    if bad.any():
        piece = pieces[int(bad.argmax())]
        raise InputError("E", f"E of {piece.name} is {piece.E:g} MPa; enter a number greater than 0 MPa.")
    weight = E * parts.area
    EA = float(weight.sum())
    near = parts.centroid[0]  # sums about a point in the section: a far-away origin costs no digits
    neutral_axis = near + weight @ (parts.centroid - near) / EA
    arm = parts.centroid - neutral_axis
    across, up = arm[:, 0], arm[:, 1]
    first_moments = weight * up
    own = E @ parts.inertia
    densities = [piece.density for piece in pieces]
    mass = None
    if None not in densities:
        mass = float(np.array(densities, dtype=float) @ parts.area) * 1e-6
    return SectionProperties(
        area=float(parts.area.sum()),
        mass_per_length=mass,
        EA=EA,
        EI=float(own[0] + first_moments @ up),
        EI_lateral=float(own[1] + weight @ (across * across)),
        EI_product=float(own[2] + first_moments @ across),
        neutral_axis=neutral_axis,
        pieces=parts,
        first_moments=first_moments,
        edges=edges,
        like=like,
    )
