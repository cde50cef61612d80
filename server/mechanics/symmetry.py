"""Mirror symmetry of a built-up section: which piece and which joint is the image of which, and what follows for flow.

Units: N, mm, MPa. Vertical bending strains a section by ``up - neutral axis``. About the vertical axis that field is its own
mirror image, so flows are; about the horizontal axis, and under half a turn, it changes sign, so flows do.
"""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.mechanics.polygon import Array, Edges, edges_of, straightened
from server.mechanics.section import Piece, SectionProperties

_SAME_PLACE = 1e-6  # of the section's size
_SAME_VALUE = 1e-9


@dataclass(frozen=True, eq=False)
class JointLine:
    """One joint in the section, along one contact.

    ``first``, ``second`` places of its two pieces; ``start``, ``end`` (2,) of its line [mm]; ``key`` whatever else makes two
    joints alike (bonded width, coverage, adhesive, fasteners): equal keys, like joints.
    """

    first: int
    second: int
    start: NDArray[np.float64]
    end: NDArray[np.float64]
    key: Hashable = None


@dataclass(frozen=True)
class Symmetry:
    """A movement that maps the section on itself.

    ``about`` its name in words; ``pieces`` the image of each piece; ``joints`` that of each joint; ``signs`` +1 or -1: flow at
    the image, taken on the image's first piece, over the flow at the joint, taken on its first piece.
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
        edges = straightened(edges_of([piece.rings for piece in pieces]))
        self.edges: Edges = edges
        self.tolerance = _SAME_PLACE * edges.size
        self.middle = properties.neutral_axis
        self.count = np.diff(edges.first, append=len(edges.start))
        E = np.array([piece.E for piece in pieces], dtype=float)
        G = np.array([-1.0 if piece.G is None else piece.G for piece in pieces], dtype=float)
        self.alike = _close(E) & _close(G) & (self.count[:, None] == self.count)
        self.ends = np.array([(joint.first, joint.second) for joint in joints])
        self.lines = np.array([(joint.start, joint.end) for joint in joints], dtype=float)
        numbers: dict[Hashable, int] = {}
        self.keys = np.array([numbers.setdefault(joint.key, len(numbers)) for joint in joints])

    def look(self, about: str) -> Symmetry | Failure:
        """Try one movement: "the vertical axis", "the horizontal axis" or "half a turn"."""
        flip, load = _MOVEMENTS[about]
        image = self._piece_images(flip)
        if (image < 0).any():
            return Failure(about, tuple(np.flatnonzero(image < 0).tolist()))
        joints, signs = self._joint_images(flip, image)
        if (joints < 0).any():
            return Failure(about, (), tuple(np.flatnonzero(joints < 0).tolist()))
        return Symmetry(about, tuple(image.tolist()), tuple(joints.tolist()), tuple((load * signs).tolist()))

    def _moved(self, points: Array, flip: Array) -> Array:
        result: Array = self.middle + flip * (points - self.middle)
        return result

    def _piece_images(self, flip: Array) -> NDArray[np.intp]:
        """Image of each piece, -1 where it has none: every edge must fall on an edge of the image."""
        edges = self.edges
        here = np.hstack((edges.start, edges.end))
        start, end = self._moved(edges.start, flip), self._moved(edges.end, flip)
        moved = np.hstack((end, start) if flip.prod() < 0 else (start, end))  # a mirror turns the sense of a ring
        hits = _matches(moved, here, self.tolerance)
        first = edges.first
        common = np.add.reduceat(np.add.reduceat(hits.astype(np.intp), first, axis=0), first, axis=1)
        fits = self.alike & (common == self.count[:, None])
        return np.where(fits.any(axis=1), fits.argmax(axis=1), -1)

    def _joint_images(self, flip: Array, image: NDArray[np.intp]) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
        """Image of each joint, -1 where it has none, and whether the pieces keep their order (1) or swap (-1)."""
        first, second = self.ends.T
        straight = (image[first][:, None] == first) & (image[second][:, None] == second)
        swapped = (image[first][:, None] == second) & (image[second][:, None] == first)
        here = self.lines.reshape(-1, 4)
        moved = self._moved(self.lines, flip)
        same_line = _matches(moved.reshape(-1, 4), here, self.tolerance)
        same_line |= _matches(moved[:, ::-1].reshape(-1, 4), here, self.tolerance)
        fits = same_line & (straight | swapped) & (self.keys[:, None] == self.keys)
        joint = np.where(fits.any(axis=1), fits.argmax(axis=1), -1)
        keeps = straight[np.arange(len(joint)), joint]
        return joint, np.where(keeps, 1, -1)


def _close(values: Array) -> NDArray[np.bool_]:
    result: NDArray[np.bool_] = np.abs(values[:, None] - values) <= _SAME_VALUE * np.abs(values)
    return result


def _matches(moved: Array, here: Array, tolerance: float) -> NDArray[np.bool_]:
    """Which of the rows ``moved`` (e, 4) fall on which of the rows ``here`` (f, 4)."""
    result = np.abs(moved[:, :1] - here[:, 0]) <= tolerance
    for column in (1, 2, 3):
        result &= np.abs(moved[:, column : column + 1] - here[:, column]) <= tolerance
    return result
