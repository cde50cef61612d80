"""Horizontal cuts through a section: the largest shear stress by V ES / (EI b), and the shear stiffness GA.

Units: N, mm, MPa. Between two neighbouring corner heights every piece's width is linear in height, so the first moment
of what lies above is a cubic. All results follow from these bands without sampling.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from server.mechanics.polygon import Array, Edges

if TYPE_CHECKING:
    from server.mechanics.section import Piece, SectionProperties

_SAME_HEIGHT = 1e-9  # of the section's size: corners closer in height than this are level
_GAUSS_X, _GAUSS_W = np.polynomial.legendre.leggauss(16)
_GAUSS_X, _GAUSS_W = (_GAUSS_X + 1) / 2, _GAUSS_W / 2
_STEEP = 3.0  # a band whose width grows by more than this is integrated in graded parts
_GRADES = np.concatenate(([0.0], 3.0 ** -np.arange(20, -1, -1.0)))


@dataclass(frozen=True)
class HorizontalCut:
    """The horizontal cut through a piece where the shear stress is greatest.

    ``up`` its height [mm]; ``first_moment`` E-weighted, of all that lies above, about the neutral axis [N mm];
    ``width`` of all pieces cut [mm]; ``intensity`` ES / (EI b) [1/mm2]: stress for a unit shear force.
    """

    up: float
    first_moment: float
    width: float
    intensity: float


@dataclass(frozen=True, eq=False)
class Bands:
    """The section between neighbouring corner heights: n pieces, k bands, from the lowest up.

    ``low``, ``high`` (k,) heights [mm]; ``width_low``, ``width_high`` (n, k) width of each piece just inside [mm].
    """

    low: Array
    high: Array
    width_low: Array
    width_high: Array


def bands(edges: Edges) -> Bands:
    """Cut the section into bands between corner heights.

    Parameters
    ----------
    edges : Edges
        Edges of the n pieces [mm].

    Returns
    -------
    Bands
        Heights and widths [mm].

    References
    ----------
    .. [1] Own derivation: along a level line a polygon's width is the sum over rising edges less the sum over falling
       edges of where they cross it.
    """
    start = edges.start
    up = start[:, 1]
    order = np.argsort(up, kind="stable")
    heights = up[order]
    new = np.empty(len(up), dtype=bool)
    new[0] = True
    np.greater(heights[1:] - heights[:-1], _SAME_HEIGHT * edges.size, out=new[1:])
    levels = heights[new]
    rank = np.empty(len(up), dtype=np.intp)
    rank[order] = new.cumsum() - 1
    rank_end = rank[edges.next]
    spans = np.abs(rank_end - rank)
    edge = np.repeat(np.arange(len(up)), spans)
    before = spans.cumsum() - spans
    band = np.arange(len(edge)) - (before - np.minimum(rank, rank_end))[edge]
    sign = np.where(rank_end > rank, 1.0, -1.0)[edge]
    origin = start[edges.first, 0][edges.owner]
    x0, u0 = (start[:, 0] - origin)[edge], up[edge]
    slope = ((edges.end[:, 0] - start[:, 0])[edge]) / (edges.end[:, 1][edge] - u0)
    n, k = len(edges.first), len(levels) - 1
    place = edges.owner[edge] * k + band
    at_low, at_high = (sign * (x0 + slope * (levels[band + top] - u0)) for top in (0, 1))
    low: Array = np.bincount(place, at_low, n * k).astype(float).reshape(n, k)
    high: Array = np.bincount(place, at_high, n * k).astype(float).reshape(n, k)
    dust = 1e-12 * edges.size
    low[low < dust] = 0.0
    high[high < dust] = 0.0
    return Bands(levels[:-1], levels[1:], low, high)


def _first_moment(cut: Bands, E: Array, neutral_axis: float) -> Array:
    """Coefficients (4, k), rising powers of s in [0, 1], of the E-weighted first moment of all above a cut."""
    H = cut.high - cut.low
    d = cut.low - neutral_axis
    e0 = E @ cut.width_low
    e1 = E @ cut.width_high - e0
    c1, c2, c3 = H * e0 * d, H * (e0 * H + e1 * d) / 2, H * H * e1 / 3
    above = (c1 + c2 + c3)[::-1].cumsum()[::-1]
    return np.stack((above, -c1, -c2, -c3))


def _value(c: Array, s: Array) -> Array:
    """Evaluate the cubics ``c`` (4, k) at ``s`` (..., k)."""
    result: Array = c[0] + s * (c[1] + s * (c[2] + s * c[3]))
    return result


def _unit_roots(g: Array) -> Array:
    """Real roots within (0, 1) of the cubics ``g`` (4, k), rising powers; (3, k), 0 where there is none."""
    k = g.shape[1]
    roots = np.zeros((3, k))
    scale = np.abs(g).max(axis=0)
    scale[scale == 0] = 1.0
    g = g / scale
    degree = np.where(np.abs(g) > 1e-13, np.arange(4)[:, None], 0).max(axis=0)
    for order in (1, 2, 3):
        which = np.flatnonzero(degree == order)
        if not which.size:
            continue
        companion = np.zeros((which.size, order, order))
        companion[:, np.arange(1, order), np.arange(order - 1)] = 1.0
        companion[:, :, -1] = -(g[:order, which] / g[order, which]).T
        found = np.linalg.eigvals(companion).T
        real = np.abs(found.imag) < 1e-6  # a double root comes back as a close pair
        inside = real & (found.real > 0) & (found.real < 1)
        roots[:order, which] = np.where(inside, found.real, 0.0)
    return roots


def largest_cuts(pieces: Sequence[Piece], properties: SectionProperties) -> list[HorizontalCut]:
    r"""For each piece the horizontal cut through it where V ES / (EI b) is greatest.

    .. math:: \tau = \frac{V\,ES(u)}{EI\,b(u)}, \qquad ES(u) = \int_{above\ u} E\,(v - u_0)\,dA

    Between corner heights b is linear and ES cubic: the extremes of their ratio are the ends of the band, taken from
    inside, and the roots of ES' b - ES b' = 0.

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; lengths in [mm], E in [MPa].
    properties : SectionProperties
        Of the same pieces; EI in [N mm2].

    Returns
    -------
    list of HorizontalCut
        One for each piece; of equal cuts the lowest.

    Notes
    -----
    b counts all pieces that the cut meets: the stress is taken as uniform over the cut. For rectangles the cut lies at
    the neutral axis, or at the piece's edge nearest to it.

    References
    ----------
    .. [1] D. J. Jourawski, "Sur la resistance d'un corps prismatique...", Annales des Ponts et Chaussees 12 (1856);
       any mechanics of materials text; from memory.

    Examples
    --------
    >>> from server.mechanics.section import Piece, properties, rectangle
    >>> plank = [Piece("plank", rectangle(100.0, 200.0, (0.0, 0.0)), E=10_000.0)]
    >>> cut = largest_cuts(plank, properties(plank))[0]
    >>> round(cut.intensity * 100.0 * 200.0, 9)  # 3/2 of the mean
    1.5
    """
    cut = properties.bands
    E = np.array([piece.E for piece in pieces], dtype=float)
    neutral_axis = float(properties.neutral_axis[1])
    ES = _first_moment(cut, E, neutral_axis)
    b0, b_high = cut.width_low.sum(axis=0), cut.width_high.sum(axis=0)
    b1 = b_high - b0
    H = cut.high - cut.low
    middle = np.clip((neutral_axis - cut.low) / H, 0.0, 1.0)
    stations = [np.zeros_like(H), middle, np.ones_like(H)]
    tapered = np.abs(b1) > 1e-12 * (b0 + b_high)
    if tapered.any():
        g = np.stack(
            (
                ES[1] * b0 - ES[0] * b1,
                2 * ES[2] * b0,
                3 * ES[3] * b0 + ES[2] * b1,
                2 * ES[3] * b1,
            )
        )[:, tapered]
        roots = np.zeros((3, len(H)))
        roots[:, tapered] = _unit_roots(g)
        stations.extend(roots)
    s = np.stack(stations)
    moment = _value(ES, s)
    width = b0 + b1 * s
    thin = width <= 1e-9 * max(float(b0.max()), float(b_high.max()))  # a tip: the stress there tends to nothing
    ratio = np.where(thin, 0.0, np.abs(moment) / np.where(thin, 1.0, width))
    best = _first_largest(ratio.T)
    columns = np.arange(len(H))
    peak = ratio[best, columns]
    through = (cut.width_low + cut.width_high) > 0
    chosen = _first_largest(np.where(through, peak, -1.0))
    found = []
    for band in chosen.tolist():
        row = int(best[band])
        ES_cut, b = float(moment[row, band]), float(width[row, band])
        u = float(cut.low[band] + s[row, band] * H[band])
        found.append(HorizontalCut(u, ES_cut, b, float(peak[band]) / properties.EI))
    return found


def _first_largest(rows: Array) -> np.ndarray[tuple[int], np.dtype[np.intp]]:
    """In each row the first place that is as large as the largest, to rounding."""
    top = rows.max(axis=1, keepdims=True)
    result: np.ndarray[tuple[int], np.dtype[np.intp]] = (rows >= top - 1e-9 * np.abs(top)).argmax(axis=1)
    return result


def shear_stiffness(pieces: Sequence[Piece], properties: SectionProperties) -> float | None:
    r"""Shear stiffness GA from the strain energy of tau = V ES / (EI b).

    .. math:: GA = \frac{V^2}{\int \tau^2 / G \, dA}
              = \left[\int \left(\frac{ES}{EI\,b}\right)^2 \sum_i \frac{b_i}{G_i}\, du \right]^{-1}

    5/6 G A for one rectangle.

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; lengths in [mm], E and G in [MPa].
    properties : SectionProperties
        Of the same pieces; EI in [N mm2].

    Returns
    -------
    float or None
        GA [N]; None where a piece has no G.

    Notes
    -----
    The stress is uniform over each horizontal cut, so the sideways flow in flanges, which is larger in thin-walled
    sections with wide flanges, is left out: GA is an upper estimate there. Bond lines take no part. The integrand is
    a polynomial of degree 7 where the width is constant, and 16 Gauss points are exact; tapered bands are cut into
    parts whose width grows at most threefold, which leaves an error below 1e-12.

    References
    ----------
    .. [1] S. P. Timoshenko and J. M. Gere, Mechanics of Materials, "Shear strain energy, form factor for shear"; from
       memory.

    Examples
    --------
    >>> from server.mechanics.section import Piece, properties, rectangle
    >>> plank = [Piece("plank", rectangle(100.0, 200.0, (0.0, 0.0)), E=10_000.0, G=600.0)]
    >>> round(shear_stiffness(plank, properties(plank)))  # 5/6 x 600 x 20 000
    10000000
    """
    moduli = [piece.G for piece in pieces]
    if None in moduli:
        return None
    cut = properties.bands
    E = np.array([piece.E for piece in pieces], dtype=float)
    softness = 1.0 / np.array(moduli, dtype=float)
    ES = _first_moment(cut, E, float(properties.neutral_axis[1])) / properties.EI
    b0, b_high = cut.width_low.sum(axis=0), cut.width_high.sum(axis=0)
    f0, f_high = softness @ cut.width_low, softness @ cut.width_high
    H = cut.high - cut.low

    def integral(which: Array, s: Array, weight: Array) -> float:
        """Sum of weight x integrand at s (p, k) over the bands in ``which``."""
        k = which.astype(bool)
        b = b0[k] + (b_high[k] - b0[k]) * s
        f = f0[k] + (f_high[k] - f0[k]) * s
        safe = np.where(b > 0, b, 1.0)
        return float((weight * np.where(b > 0, (_value(ES[:, k], s) / safe) ** 2 * f, 0.0)).sum(axis=0) @ H[k])

    solid = (b0 + b_high) > 0  # a bond line between two layers is a band with nothing in it
    wide, narrow = np.maximum(b0, b_high), np.minimum(b0, b_high)
    steep = solid & (wide > _STEEP * narrow)
    plain = solid & ~steep
    total = integral(plain, _GAUSS_X[:, None], _GAUSS_W[:, None])
    if steep.any():
        parts = _GRADES[:-1, None] + np.diff(_GRADES)[:, None] * _GAUSS_X  # graded towards s = 0
        weights = (np.diff(_GRADES)[:, None] * _GAUSS_W).ravel()[:, None]
        s = np.where((b0 <= b_high)[steep], parts.ravel()[:, None], 1.0 - parts.ravel()[:, None])
        total += integral(steep, s, weights)
    return 1.0 / total
