"""The shapes a piece may have, as outlines ready for the section: drawn at the origin, turned, then placed.

Units: mm. Every shape is drawn with its bounding box's lower left corner at the origin; ``placed`` turns it about its
own centroid and puts the box's lower left corner where it belongs. Arcs are drawn with 16 sides a quarter turn: their
corners lie on the arc at its ends and a little outside it between, so that area and first moment of a quarter disc are
exact, its second moment right to 7e-7, and a flat ends where its arc begins. ``curved`` marks the sides of arcs, to
which nothing flat can be glued.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.polygon import Array, edges_of, moments

SIDES = 16  # of a quarter turn
_FIRST, _BETWEEN = 1.0013104162827651, 1.0007876865544871
_QUARTER_TURNS = {0: (1.0, 0.0), 1: (0.0, 1.0), 2: (-1.0, 0.0), 3: (0.0, -1.0)}
_DUST = 1e-9  # of the shape's size


def _quarter() -> Array:
    """Corners of a quarter of the unit circle, from (1, 0) to (0, 1); its radii do what the module says."""
    angle = np.linspace(0.0, math.pi / 2, SIDES + 1)
    radius = np.full(SIDES + 1, _BETWEEN)
    radius[[1, -2]] = _FIRST
    points: Array = radius[:, None] * np.stack((np.cos(angle), np.sin(angle)), axis=1)
    points[0], points[-1] = (1.0, 0.0), (0.0, 1.0)
    return points


_QUARTER = _quarter()


@dataclass(frozen=True, eq=False)
class Arcs:
    """Convex quarter arcs of an outline: ``centre`` (k, 2), ``radius`` (k,), unit vectors to both ends (k, 2)."""

    centre: Array
    radius: Array
    first: Array
    last: Array

    def turned(self, turn: Array, about: Array) -> Arcs:
        """The same arcs turned by the matrix ``turn`` about a point."""
        return Arcs(about + (self.centre - about) @ turn, self.radius, self.first @ turn, self.last @ turn)

    def moved(self, by: Array) -> Arcs:
        """The same arcs elsewhere."""
        return replace(self, centre=self.centre + by)

    def crests(self) -> Array:
        """The points of the arcs where they reach furthest across or up."""
        found = [np.empty((0, 2))]
        for direction in np.array(list(_QUARTER_TURNS.values())):
            reaches = (self.first @ direction > 0) & (self.last @ direction > 0)
            found.append(self.centre[reaches] + self.radius[reaches, None] * direction)
        return np.concatenate(found)


@dataclass(frozen=True, eq=False)
class Shape:
    """One piece's outline.

    ``outline`` (n, 2) corners across and up, anticlockwise [mm]; ``holes`` rings cut out of it; ``curved`` for each
    ring, the outline first, which sides (from a corner to the next) belong to an arc; ``facets`` corners of the outline
    strictly inside an arc; ``arcs`` those of the outline that bulge.
    """

    outline: Array
    holes: tuple[Array, ...]
    curved: tuple[NDArray[np.bool_], ...]
    facets: NDArray[np.bool_]
    arcs: Arcs

    @property
    def rings(self) -> tuple[Array, ...]:
        """The outline, then the holes."""
        return (self.outline, *self.holes)

    def box(self) -> tuple[Array, Array]:
        """Lower left and upper right corner of the bounding box, arcs taken as true arcs [mm]."""
        points = self.outline
        if len(self.arcs.radius):
            points = np.concatenate((points[~self.facets], self.arcs.crests()))
        return points.min(axis=0), points.max(axis=0)


def placed(shape: Shape, at: Sequence[float] | None, turn: float = 0.0) -> Shape:
    """Turn a shape about its own centroid, then put its bounding box's lower left corner at ``at``.

    Parameters
    ----------
    shape : Shape
        As drawn [mm].
    at : sequence of float or None
        Across, up [mm]; None leaves the shape where its points are.
    turn : float
        Anticlockwise [degrees]; quarter turns are exact.

    Returns
    -------
    Shape
        The shape in its place [mm].

    Raises
    ------
    InputError
        If ``at`` or ``turn`` is not finite, or the shape has no area.

    References
    ----------
    .. [1] Plane rotation; the rule for ``at`` and ``turn`` is the check file's own.

    Examples
    --------
    >>> placed(drawn_rectangle(90.0, 70.0), (12.5, 0.0), turn=90.0).box()[1].tolist()
    [82.5, 90.0]
    """
    if not math.isfinite(turn):
        raise InputError("turn", f"turn is {turn:g}; enter an angle in degrees.")
    if at is not None and not (len(at) == 2 and math.isfinite(at[0]) and math.isfinite(at[1])):
        raise InputError("at", f"at is {list(at)}; enter two numbers, across and up, in mm.")
    if turn % 360.0:
        quarter, rest = divmod(turn % 360.0, 90.0)
        angle = math.radians(turn)
        cos, sin = (math.cos(angle), math.sin(angle)) if rest else _QUARTER_TURNS[int(quarter) % 4]
        matrix = np.array([[cos, sin], [-sin, cos]])
        about = moments(edges_of([shape.rings]))[1][0]
        outline, *holes = (about + (ring - about) @ matrix for ring in shape.rings)
        shape = replace(shape, outline=outline, holes=tuple(holes), arcs=shape.arcs.turned(matrix, about))
    if at is None:
        return shape
    by = np.array(at, dtype=float) - shape.box()[0]
    outline, *holes = (ring + by for ring in shape.rings)
    return replace(shape, outline=outline, holes=tuple(holes), arcs=shape.arcs.moved(by))


_NO_ARCS = Arcs(np.empty((0, 2)), np.empty(0), np.empty((0, 2)), np.empty((0, 2)))


def polygon(points: Sequence[Sequence[float]] | Array, holes: Sequence[Sequence[Sequence[float]]] = ()) -> Shape:
    """A shape from its corners, in either sense of turning; ``holes`` likewise [mm]."""
    rings = [_sharp(points), *(_sharp(hole) for hole in holes)]
    return _shape(rings[0], rings[1:])


def drawn_rectangle(width: float, depth: float, *, corner_radius: float = 0.0, chamfer: float = 0.0) -> Shape:
    """A rectangle, all four corners rounded or cut off at 45 degrees by ``chamfer`` along either side [mm]."""
    _least(width=width, depth=depth)
    if corner_radius and chamfer:
        raise InputError("chamfer", "a corner is either rounded or cut off; leave corner_radius or chamfer out.")
    if 2 * max(corner_radius, chamfer) > min(width, depth) * (1 + _DUST):
        name, value = ("corner_radius", corner_radius) if corner_radius else ("chamfer", chamfer)
        raise InputError(name, f"{value:g} mm is more than half of the shorter side, {min(width, depth):g} mm.")
    if chamfer:
        c, w, d = chamfer, width, depth
        return polygon([(c, 0), (w - c, 0), (w, c), (w, d - c), (w - c, d), (c, d), (0, d - c), (0, c)])
    return _shape(_rounded([(0, 0), (width, 0), (width, depth), (0, depth)], [corner_radius] * 4))


def drawn_round(diameter: float, wall: float = 0.0) -> Shape:
    """A round bar, or with ``wall`` a round tube [mm]."""
    _least(diameter=diameter)
    _hollow("wall", wall, diameter)
    square = np.array([(0, 0), (diameter, 0), (diameter, diameter), (0, diameter)], dtype=float)
    outer = _rounded(square, [diameter / 2] * 4)
    if not wall:
        return _shape(outer)
    inner = diameter - 2 * wall
    return _shape(outer, [_rounded(square * (inner / diameter) + wall, [inner / 2] * 4)])


def drawn_tube(width: float, depth: float, wall: float, corner_radius: float = 0.0) -> Shape:
    """A rectangular tube; ``corner_radius`` is that of the outside, the inside's is smaller by the wall [mm]."""
    _least(width=width, depth=depth, wall=wall)
    _hollow("wall", wall, min(width, depth))
    if 2 * corner_radius > min(width, depth) * (1 + _DUST):
        raise InputError(
            "corner_radius", f"{corner_radius:g} mm is more than half of the shorter side, {min(width, depth):g} mm."
        )
    outer = _rounded([(0, 0), (width, 0), (width, depth), (0, depth)], [corner_radius] * 4)
    w, d = width - wall, depth - wall
    inner = _rounded([(wall, wall), (w, wall), (w, d), (wall, d)], [max(corner_radius - wall, 0.0)] * 4)
    return _shape(outer, [inner])


def drawn_angle(width: float, depth: float, wall: float, root_radius: float = 0.0, toe_radius: float = 0.0) -> Shape:
    """An angle, its corner at the lower left; ``toe_radius`` rounds the inner edge of either leg's end [mm]."""
    _least(width=width, depth=depth, wall=wall)
    _thinner("wall", wall, min(width, depth), "the shorter leg")
    corners = [(0, 0), (width, 0), (width, wall), (wall, wall), (wall, depth), (0, depth)]
    return _shape(_rounded(corners, [0, 0, toe_radius, root_radius, toe_radius, 0]))


def drawn_channel(
    width: float, depth: float, web: float, flange: float, root_radius: float = 0.0, toe_radius: float = 0.0
) -> Shape:
    """A channel, its web at the left, open to the right; flanges of even thickness [mm]."""
    _least(width=width, depth=depth, web=web, flange=flange)
    _thinner("web", web, width, "the width")
    _hollow("flange", flange, depth)
    low, high = flange, depth - flange
    corners = [
        *((0, 0), (width, 0), (width, low), (web, low)),
        *((web, high), (width, high), (width, depth), (0, depth)),
    ]
    return _shape(_rounded(corners, [0, 0, toe_radius, root_radius, root_radius, toe_radius, 0, 0]))


def drawn_i(
    width: float, depth: float, web: float, flange: float, root_radius: float = 0.0, toe_radius: float = 0.0
) -> Shape:
    """An I or H profile of two like flanges [mm]."""
    _least(width=width, depth=depth, web=web, flange=flange)
    _thinner("web", web, width, "the width")
    _hollow("flange", flange, depth)
    left, right, low, high = (width - web) / 2, (width + web) / 2, flange, depth - flange
    corners = [
        *((0, 0), (width, 0), (width, low), (right, low), (right, high), (width, high)),
        *((width, depth), (0, depth), (0, high), (left, high), (left, low), (0, low)),
    ]
    toe, root = toe_radius, root_radius
    return _shape(_rounded(corners, [0, 0, toe, root, root, toe, 0, 0, toe, root, root, toe]))


def drawn_tee(
    width: float, depth: float, web: float, flange: float, root_radius: float = 0.0, toe_radius: float = 0.0
) -> Shape:
    """A tee, its flange on top; ``toe_radius`` rounds the lower edges of the flange's ends [mm]."""
    _least(width=width, depth=depth, web=web, flange=flange)
    _thinner("web", web, width, "the width")
    _thinner("flange", flange, depth, "the depth")
    left, right, high = (width - web) / 2, (width + web) / 2, depth - flange
    corners = [
        *((left, 0), (right, 0), (right, high), (width, high)),
        *((width, depth), (0, depth), (0, high), (left, high)),
    ]
    return _shape(_rounded(corners, [0, 0, root_radius, toe_radius, 0, 0, toe_radius, root_radius]))


@dataclass(frozen=True, eq=False)
class _Ring:
    points: Array
    curved: NDArray[np.bool_]
    facets: NDArray[np.bool_]
    arcs: Arcs


def _shape(outer: _Ring, holes: Sequence[_Ring] = ()) -> Shape:
    curved = (outer.curved, *(hole.curved for hole in holes))
    return Shape(outer.points, tuple(hole.points for hole in holes), curved, outer.facets, outer.arcs)


def _sharp(points: Sequence[Sequence[float]] | Array) -> _Ring:
    corners = np.array(points, dtype=float).reshape(-1, 2)
    none = np.zeros(len(corners), dtype=bool)
    return _Ring(corners, none, none, _NO_ARCS)


def _rounded(corners: Sequence[Sequence[float]] | Array, radii: Sequence[float]) -> _Ring:
    """A ring of right-angled corners, some rounded: cut off where they jut out, filled where they go in."""
    ring = np.array(corners, dtype=float)
    if not any(radii):
        return _sharp(ring)
    into = ring - np.roll(ring, 1, axis=0)
    length = np.hypot(into[:, 0], into[:, 1])
    into /= length[:, None]
    out = np.roll(into, -1, axis=0)
    _fits(radii, length)
    points: list[Array] = []
    curved: list[bool] = []
    facets: list[bool] = []
    bulging: list[int] = []
    for k, radius in enumerate(radii):
        if not radius:
            points.append(ring[k])
            curved.append(False)
            facets.append(False)
            continue
        centre = ring[k] + radius * (out[k] - into[k])
        points.extend(centre + radius * (-c * out[k] + s * into[k]) for c, s in _QUARTER)
        curved += [True] * SIDES + [False]
        facets += [False] + [True] * (SIDES - 1) + [False]
        if into[k, 0] * out[k, 1] - into[k, 1] * out[k, 0] > 0:
            bulging.append(k)
    bulge, radius_of = np.array(bulging, dtype=np.intp), np.array(radii, dtype=float)
    centres = ring[bulge] + radius_of[bulge, None] * (out - into)[bulge]
    arcs = Arcs(centres, radius_of[bulge], -out[bulge], into[bulge])
    return _without_twins(_Ring(np.array(points), np.array(curved), np.array(facets), arcs), float(length.max()))


def _without_twins(ring: _Ring, size: float) -> _Ring:
    """One corner where an arc ends just where the next begins."""
    step = np.roll(ring.points, -1, axis=0) - ring.points
    keep = np.hypot(step[:, 0], step[:, 1]) > _DUST * size
    return replace(ring, points=ring.points[keep], curved=ring.curved[keep], facets=ring.facets[keep])


def _fits(radii: Sequence[float], length: Array) -> None:
    """The arcs at both ends of every side must fit on it."""
    for k, radius in enumerate(radii):
        room, both = float(length[k]), radii[k - 1] + radius
        if both > room * (1 + _DUST):
            raise InputError("radius", f"the corner radii need {both:g} mm of a side that is {room:g} mm long.")


def _least(**sizes: float) -> None:
    for name, value in sizes.items():
        if not (math.isfinite(value) and value > 0):
            raise InputError(name, f"{name} is {value:g} mm; enter a number greater than 0 mm.")


def _thinner(name: str, value: float, bound: float, what: str) -> None:
    if value >= bound:
        raise InputError(name, f"{value:g} mm leaves nothing of {what}, {bound:g} mm; enter a smaller thickness.")


def _hollow(name: str, value: float, size: float) -> None:
    if 2 * value >= size:
        raise InputError(
            name,
            f"{value:g} mm twice leaves no hollow in {size:g} mm; enter less than half, or a solid shape.",
        )
