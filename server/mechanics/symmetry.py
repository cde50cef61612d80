"""Mirror symmetry of a built-up section: which piece and which joint is the image of which, and what follows for flow.

Units: N, mm, MPa. Vertical bending strains a section by ``up - neutral axis``. About the vertical axis that field is
its own mirror image, so flows are; about the horizontal axis, and under half a turn, it changes sign, so flows do.
"""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.mechanics.polygon import Array, Edges, Indices, straightened
from server.mechanics.section import Piece, SectionProperties

_SAME_PLACE = 1e-6  # of the section's size
_SAME_VALUE = 1e-9


@dataclass(frozen=True, eq=False)
class JointLine:
    """One joint in the section, along one contact.

    ``first``, ``second`` places of its two pieces; ``start``, ``end`` (2,) of its line [mm]; ``key`` whatever else
    makes two joints alike (bonded width, coverage, adhesive, fasteners): equal keys, like joints.
    """

    first: int
    second: int
    start: NDArray[np.float64]
    end: NDArray[np.float64]
    key: Hashable = None


@dataclass(frozen=True)
class Symmetry:
    """A movement that maps the section on itself.

    ``about`` its name in words; ``pieces`` the image of each piece; ``joints`` that of each joint; ``signs`` +1 or -1:
    flow at the image, taken on the image's first piece, over the flow at the joint, taken on its first piece.
    """

    about: str
    pieces: tuple[int, ...]
    joints: tuple[int, ...]
    signs: tuple[int, ...]


@dataclass(frozen=True)
class Failure:
    """Why a movement does not map the section on itself: pieces and joints without an image."""

    about: str
    pieces: tuple[int, ...]
    joints: tuple[int, ...] = ()


_MOVEMENTS = {
    "the vertical axis": (np.array([-1.0, 1.0]), 1),
    "the horizontal axis": (np.array([1.0, -1.0]), -1),
    "half a turn": (np.array([-1.0, -1.0]), -1),
}


class SymmetryFinder:
    """Tests the three movements about the neutral axis, keeping what they share."""

    def __init__(self, pieces: Sequence[Piece], properties: SectionProperties, joints: Sequence[JointLine]) -> None:
        self.edges: Edges = straightened(properties.edges)
        self.boxes = np.hstack(self.edges.boxes())
        self.tolerance = _SAME_PLACE * self.edges.size
        self.properties = properties
        E = np.array([piece.E for piece in pieces], dtype=float)
        G = np.array([-1.0 if piece.G is None else piece.G for piece in pieces], dtype=float)
        count = self.edges.count
        self.alike = _close(E) & _close(G) & (count[:, None] == count)
        self.ends = np.array([(joint.first, joint.second) for joint in joints])
        self.lines = np.array([(joint.start, joint.end) for joint in joints], dtype=float)
        numbers: dict[Hashable, int] = {}
        self.keys = np.array([numbers.setdefault(joint.key, len(numbers)) for joint in joints])

    def look(self, about: str) -> Symmetry | Failure:
        """Try one movement: "the vertical axis", "the horizontal axis" or "half a turn"."""
        flip, load = _MOVEMENTS[about]
        middle: Array = self.properties.neutral_axis
        image = self._piece_images(flip, middle)
        if (image < 0).any():
            best = self._piece_images(flip, self._likely_middle(flip, middle))
            return Failure(about, tuple(np.flatnonzero(best < 0).tolist()))
        joints, signs = self._joint_images(flip, middle, image)
        if (joints < 0).any():
            return Failure(about, (), tuple(np.flatnonzero(joints < 0).tolist()))
        return Symmetry(about, tuple(image.tolist()), tuple(joints.tolist()), tuple((load * signs).tolist()))

    def _piece_images(self, flip: Array, middle: Array) -> Indices:
        """Image of each piece, -1 where it has none: every edge must fall on an edge of the image."""
        edges, boxes = self.edges, self.boxes
        one, other = _moved(boxes[:, :2], flip, middle), _moved(boxes[:, 2:], flip, middle)
        moved = np.hstack((np.minimum(one, other), np.maximum(one, other)))
        i, j = np.nonzero(self.alike & _matches(moved, boxes, self.tolerance))
        a, b, pair = edges.pairs(i, j)
        start, end = _moved(edges.start, flip, middle), _moved(edges.end, flip, middle)
        if flip[0] * flip[1] < 0:  # a mirror turns the sense of a ring
            start, end = end, start
        off = np.maximum(np.abs(start[a] - edges.start[b]), np.abs(end[a] - edges.end[b])).max(axis=1)
        fits = np.bincount(pair[off <= self.tolerance], minlength=len(i)) == edges.count[i]
        image = np.full(len(boxes), -1, dtype=np.intp)
        image[i[fits]] = j[fits]
        return image

    def _joint_images(self, flip: Array, middle: Array, image: Indices) -> tuple[Indices, Indices]:
        """Image of each joint, -1 where it has none, and whether the pieces keep their order (1) or swap (-1)."""
        first, second = self.ends.T
        image_first, image_second = image[first][:, None], image[second][:, None]
        straight = (image_first == first) & (image_second == second)
        swapped = (image_first == second) & (image_second == first)
        here = self.lines.reshape(-1, 4)
        moved = _moved(self.lines, flip, middle)
        same_line = _matches(moved.reshape(-1, 4), here, self.tolerance)
        same_line |= _matches(moved[:, ::-1].reshape(-1, 4), here, self.tolerance)
        fits = same_line & (straight | swapped) & (self.keys[:, None] == self.keys)
        joint = np.where(fits.any(axis=1), fits.argmax(axis=1), -1)
        return joint, np.where(straight[np.arange(len(joint)), joint], 1, -1)

    def _likely_middle(self, flip: Array, neutral_axis: Array) -> Array:
        """Where the axis would be that most pieces agree on, to name those that do not.

        One piece of another modulus moves the neutral axis off the middle, and then no piece has an image there.
        """
        centroid, area = self.properties.pieces.centroid, self.properties.pieces.area
        middles = (centroid[:, None] + centroid) / 2
        off = np.where(flip < 0, 0.0, np.abs(centroid[:, None] - centroid)).max(axis=2)
        i, j = np.nonzero((off <= self.tolerance) & (np.abs(area[:, None] - area) <= 1e-6 * area))
        found = np.where(flip < 0, middles[i, j], neutral_axis)
        agree = (np.abs(found[:, None] - found).max(axis=2) <= self.tolerance).sum(axis=1)
        best: Array = found[int(agree.argmax())]
        return best


def _moved(points: Array, flip: Array, middle: Array) -> Array:
    result: Array = middle + flip * (points - middle)
    return result


def _close(values: Array) -> NDArray[np.bool_]:
    result: NDArray[np.bool_] = np.abs(values[:, None] - values) <= _SAME_VALUE * np.abs(values)
    return result


def _matches(moved: Array, here: Array, tolerance: float) -> NDArray[np.bool_]:
    """Which of the rows ``moved`` (e, 4) fall on which of the rows ``here`` (f, 4)."""
    result: NDArray[np.bool_] = np.abs(moved[:, None] - here).max(axis=2) <= tolerance
    return result
