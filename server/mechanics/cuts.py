"""Horizontal cuts through a section: the largest shear stress by V ES / (EI b), and the shear stiffness GA.

Units: N, mm, MPa. Between two neighbouring corner heights every piece's width is linear in height, so the first moment
of what lies above is a cubic. All results follow from these bands without sampling.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import positive
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


def above(cut: Bands, up: ArrayLike) -> tuple[Array, Array]:
    r"""Area above horizontal cuts and the height of its centroid, of every piece.

    .. math:: A_i = \int_{up}^{top} b_i\,du, \qquad u_i = \frac{1}{A_i} \int_{up}^{top} b_i u\,du

    Parameters
    ----------
    cut : Bands
        Bands of the n pieces [mm].
    up : array_like
        Heights of the cuts, shape (...) [mm].

    Returns
    -------
    tuple of numpy.ndarray
        Areas [mm2] and heights [mm], shape (..., n); height 0 where nothing of a piece lies above.

    References
    ----------
    .. [1] Trapezoids; any table of areas.

    Examples
    --------
    >>> from server.mechanics.section import Piece, properties, rectangle
    >>> plank = [Piece("plank", rectangle(100.0, 200.0, (0.0, 0.0)), E=10_000.0)]
    >>> [float(each[0]) for each in above(properties(plank).bands, 150.0)]
    [5000.0, 175.0]
    """
    low = np.minimum(np.maximum(np.asarray(up)[..., None, None], cut.low), cut.high)  # (..., 1, k)
    height = cut.high - low
    slope = (cut.width_high - cut.width_low) / (cut.high - cut.low)
    bottom = cut.width_low + slope * (low - cut.low)
    area = height * (bottom + cut.width_high) / 2
    moment = area * low + height**2 * (bottom + 2 * cut.width_high) / 6
    total = area.sum(axis=-1)
    return total, moment.sum(axis=-1) / np.where(total > 0, total, np.inf)


@dataclass(frozen=True, eq=False)
class _Inward:
    """The bands as seen from outside in: ``s`` runs from 0 at the end away from the neutral axis to 1.

    So a first moment is a sum of terms of one sign, and keeps its digits towards a tip. ``outer`` height where s = 0
    [mm]; ``step`` signed height of the band; ``ES`` (4, k) E-weighted first moment beyond s, rising powers; ``width``,
    ``softness`` (2, k) sums of b and of b / G at both ends.
    """

    outer: Array
    step: Array
    ES: Array
    width: Array
    softness: Array


def _inward(cut: Bands, pieces: Sequence[Piece], neutral_axis: float) -> _Inward:
    H = cut.high - cut.low
    above = cut.low + cut.high > 2 * neutral_axis
    G = np.array([np.inf if piece.G is None else piece.G for piece in pieces], dtype=float)
    weights = np.array(([piece.E for piece in pieces], np.ones(len(G)), 1 / G))
    low, high = weights @ cut.width_low, weights @ cut.width_high
    outer, inner = np.where(above, high, low), np.where(above, low, high)
    e0, e1 = outer[0], inner[0] - outer[0]
    place = np.where(above, cut.high, cut.low)
    D = np.abs(place - neutral_axis)
    c1, c2, c3 = H * e0 * D, H * (e1 * D - e0 * H) / 2, -H * H * e1 / 3
    own = c1 + c2 + c3
    split = len(H) - int(above.sum())  # bands from here on lie above
    beyond = np.zeros(len(H))
    beyond[1:split] = own[:split][:-1].cumsum()
    beyond[split:-1] = own[split + 1 :][::-1].cumsum()[::-1]
    ES = np.array((beyond, c1, c2, c3))
    width, softness = np.array((outer[1:], inner[1:])).transpose(1, 0, 2)
    return _Inward(place, np.where(above, -H, H), ES, width, softness)


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
    neutral_axis = float(properties.neutral_axis[1])
    section = _inward(cut, pieces, neutral_axis)
    ES, (b0, b_in) = section.ES, section.width
    b1 = b_in - b0
    k = len(b0)
    middle = np.minimum(np.maximum((neutral_axis - section.outer) / section.step, 0.0), 1.0)
    stations = [np.zeros(k), middle, np.ones(k)]
    tapered = np.abs(b1) > 1e-12 * (b0 + b_in)
    if tapered.any():
        g = np.array((ES[1] * b0 - ES[0] * b1, 2 * ES[2] * b0, 3 * ES[3] * b0 + ES[2] * b1, 2 * ES[3] * b1))
        roots = np.zeros((3, k))
        roots[:, tapered] = _unit_roots(g[:, tapered])
        stations.extend(roots)
    s = np.array(stations)
    moment = _value(ES, s)
    width = b0 * (1 - s) + b_in * s
    thin = width <= 1e-9 * max(float(b0.max()), float(b_in.max()))  # a tip: the stress there tends to nothing
    ratio = np.where(thin, 0.0, moment / np.where(thin, 1.0, width))
    best = _first_largest(ratio.T)
    peak = ratio[best, np.arange(k)]
    through = (cut.width_low + cut.width_high) > 0
    chosen = _first_largest(np.where(through, peak, -1.0))
    found = []
    for band in chosen.tolist():
        row = int(best[band])
        u = float(section.outer[band] + s[row, band] * section.step[band])
        ES_cut, b = float(moment[row, band]), float(width[row, band])
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

    Raises
    ------
    InputError
        If a G is not a finite number above zero.

    Notes
    -----
    The stress is uniform over each horizontal cut, and its sideways part is left out: GA is an upper estimate for thin
    walls that run sideways (G A / 1.5 for a thin round tube, where G A / 2 is right). Bond lines take no part.
    The integrand is a polynomial of degree 7 where the width is constant, and 16 Gauss points are exact; tapered bands
    are cut into parts whose width grows at most threefold, which leaves an error below 1e-12.

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
    if any(piece.G is None for piece in pieces):
        return None
    for piece in pieces:
        positive(f"G of {piece.name}", piece.G or 0.0, "MPa")
    section = _inward(properties.bands, pieces, float(properties.neutral_axis[1]))
    b, f, H = section.width, section.softness, np.abs(section.step)

    def integral(which: NDArray[np.bool_], s: Array, rest: Array, weight: Array) -> float:
        """Sum of weight x integrand over the bands in ``which``, at s and rest = 1 - s."""
        width = b[0, which] * rest + b[1, which] * s
        soft = f[0, which] * rest + f[1, which] * s
        ratio = _value(section.ES[:, which], s) / np.where(width > 0, width, np.inf)
        return float((weight * (ratio * ratio * soft)).sum(axis=0) @ H[which])

    solid = b.sum(axis=0) > 0  # a bond line between two layers is a band with nothing in it
    steep = solid & (b.max(axis=0) > _STEEP * b.min(axis=0))
    total = integral(solid & ~steep, _GAUSS_X[:, None], 1 - _GAUSS_X[:, None], _GAUSS_W[:, None])
    if steep.any():  # graded towards the narrow end
        near = (_GRADES[:-1, None] + np.diff(_GRADES)[:, None] * _GAUSS_X).ravel()[:, None]
        weight = (np.diff(_GRADES)[:, None] * _GAUSS_W).ravel()[:, None]
        from_outside = (b[0] <= b[1])[steep]
        total += integral(steep, np.where(from_outside, near, 1 - near), np.where(from_outside, 1 - near, near), weight)
    return properties.EI**2 / total
