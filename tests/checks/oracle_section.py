"""Sections of upright rectangles: the oracle's own sums and cuts. N, mm, MPa; across and up as in the check file."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise

import numpy as np


@dataclass(frozen=True)
class Box:
    """One piece as an upright rectangle."""

    name: str
    left: float
    bottom: float
    right: float
    top: float
    E: float
    G: float | None = None
    density: float | None = None

    @property
    def area(self) -> float:
        return (self.right - self.left) * (self.top - self.bottom)

    @property
    def middle(self) -> tuple[float, float]:
        return (self.left + self.right) / 2, (self.bottom + self.top) / 2


@dataclass(frozen=True)
class Touch:
    """A joint of the document on its contact: ``length`` of the facing overlap, ``middle`` of it."""

    first: str
    second: str
    length: float
    middle: tuple[float, float]


def touch(one: Box, two: Box) -> Touch:
    """Where two rectangles face each other: one above the other, or side by side."""
    across = min(one.right, two.right) - max(one.left, two.left)
    up = min(one.top, two.top) - max(one.bottom, two.bottom)
    if across > up:
        level = (max(one.bottom, two.bottom) + min(one.top, two.top)) / 2
        return Touch(one.name, two.name, across, (max(one.left, two.left) + across / 2, level))
    wall = (max(one.left, two.left) + min(one.right, two.right)) / 2
    return Touch(one.name, two.name, up, (wall, max(one.bottom, two.bottom) + up / 2))


@dataclass(frozen=True)
class Section:
    """Rectangles that bend as one body, and the joints between them."""

    boxes: tuple[Box, ...]
    touches: tuple[Touch, ...]

    @cached_property
    def area(self) -> float:
        return sum(b.area for b in self.boxes)

    @cached_property
    def mass(self) -> float | None:
        """kg/m."""
        if any(b.density is None for b in self.boxes):
            return None
        return sum((b.density or 0.0) * b.area for b in self.boxes) * 1e-6

    @cached_property
    def EA(self) -> float:
        return sum(b.E * b.area for b in self.boxes)

    @cached_property
    def axis(self) -> tuple[float, float]:
        return (
            sum(b.E * b.area * b.middle[0] for b in self.boxes) / self.EA,
            sum(b.E * b.area * b.middle[1] for b in self.boxes) / self.EA,
        )

    @cached_property
    def EI(self) -> float:
        return sum(b.E * _second(b.right - b.left, b.bottom - self.axis[1], b.top - self.axis[1]) for b in self.boxes)

    @cached_property
    def EI_lateral(self) -> float:
        return sum(b.E * _second(b.top - b.bottom, b.left - self.axis[0], b.right - self.axis[0]) for b in self.boxes)

    @cached_property
    def EI_product(self) -> float:
        a, u = self.axis
        return sum(b.E * b.area * (b.middle[0] - a) * (b.middle[1] - u) for b in self.boxes)

    def first_moment(self, names: Iterable[str]) -> float:
        """E-weighted first moment of some pieces about the neutral axis, without sign."""
        chosen = set(names)
        return abs(sum(b.E * b.area * (b.middle[1] - self.axis[1]) for b in self.boxes if b.name in chosen))

    def _levels(self) -> list[float]:
        return sorted({self.axis[1], *(b.bottom for b in self.boxes), *(b.top for b in self.boxes)})

    def _above(self, up: float) -> float:
        """E-weighted first moment of all that lies above a level."""
        total = 0.0
        for b in self.boxes:
            low, width = max(b.bottom, up), b.right - b.left
            if low < b.top:
                total += b.E * width * ((b.top - self.axis[1]) ** 2 - (low - self.axis[1]) ** 2) / 2
        return total

    def _cut(self, low: float, high: float) -> list[Box]:
        """The rectangles between two neighbouring levels."""
        return [b for b in self.boxes if b.bottom < (low + high) / 2 < b.top]

    def intensity(self, name: str) -> float:
        """Largest ES / (EI b) on level cuts through one piece; between two levels it is largest at an end."""
        found = 0.0
        levels = self._levels()
        for low, high in pairwise(levels):
            cut = self._cut(low, high)
            if any(b.name == name for b in cut):
                width = sum(b.right - b.left for b in cut)
                found = max(found, *(abs(self._above(up)) / width for up in (low, high)))
        return found / self.EI

    @cached_property
    def GA(self) -> float | None:
        """V^2 over the integral of tau^2 / G, by Gauss's rule between the levels."""
        if any(b.G is None for b in self.boxes):
            return None
        nodes, weights = np.polynomial.legendre.leggauss(5)
        total = 0.0
        levels = self._levels()
        for low, high in pairwise(levels):
            cut = self._cut(low, high)
            if not cut:
                continue
            width = sum(b.right - b.left for b in cut)
            soft = sum((b.right - b.left) / (b.G or 1.0) for b in cut)
            ups = low + (nodes + 1) / 2 * (high - low)
            squares = np.array([(self._above(float(up)) / (self.EI * width)) ** 2 for up in ups])
            total += float(weights @ squares) * (high - low) / 2 * soft
        return 1 / total

    def share_of(self, between: tuple[str, ...]) -> tuple[str, float, float]:
        """How a joint's flow is known ("cut" or "symmetry"), S of the cut-off part, and the joint's share of it."""
        joint = [(t.first, t.second) for t in self.touches].index((between[0], between[1]))
        off = self._cut_off({joint})
        if off:
            return "cut", self.first_moment(off), 1.0
        twin = self._mirrored(joint)
        off = self._cut_off({joint, twin}) if twin is not None else set()
        assert off, "the oracle knows clean cuts and mirrored pairs only"
        return "symmetry", self.first_moment(off), 0.5

    def _mirrored(self, joint: int) -> int | None:
        assert all(self._twin(box) for box in self.boxes), "the oracle knows mirrored sections only"
        across, up = self.touches[joint].middle
        for other, each in enumerate(self.touches):
            there = abs(each.middle[0] + across - 2 * self.axis[0]) < 1e-6 and abs(each.middle[1] - up) < 1e-6
            if other != joint and there:
                return other
        return None

    def _twin(self, box: Box) -> bool:
        """Whether the same rectangle stands on the other side of the neutral axis."""
        mirrored = (2 * self.axis[0] - box.right, 2 * self.axis[0] - box.left, box.bottom, box.top, box.E)
        return any(
            np.allclose(mirrored, (b.left, b.right, b.bottom, b.top, b.E), rtol=1e-9, atol=1e-6) for b in self.boxes
        )

    def _cut_off(self, broken: set[int]) -> set[str]:
        """The pieces that no longer hang together with the first piece of the joint once joints are broken."""
        names = [b.name for b in self.boxes]
        start = self.touches[min(broken)].first
        reached = {start}
        while True:
            more = {
                name
                for i, t in enumerate(self.touches)
                if i not in broken and {t.first, t.second} & reached
                for name in (t.first, t.second)
            }
            if more <= reached:
                return set(names) - reached
            reached |= more


def rib_alone(section: Section) -> tuple[str, float, Section] | None:
    """The rib that bends most under the load on its own strip of the skin, the strip's part of it, rib with strip.

    One skin on single ribs, which stand further apart than the section is deep; else None.
    """
    for skin in section.boxes:
        ribs = sorted(
            (box for t in section.touches for box in section.boxes
             if {t.first, t.second} == {skin.name, box.name} and skin.right - skin.left > skin.top - skin.bottom
             and (box.top <= skin.bottom + 1 or box.bottom >= skin.top - 1)),
            key=lambda box: box.left,
        )  # fmt: skip
        deep = max(b.top for b in section.boxes) - min(b.bottom for b in section.boxes)
        if len(ribs) < 2 or min(b.left - a.right for a, b in pairwise(ribs)) <= deep:
            continue
        edges = [skin.left, *((a.right + b.left) / 2 for a, b in pairwise(ribs)), skin.right]
        found = []
        for rib, (left, right) in zip(ribs, pairwise(edges), strict=True):
            strip = Box(skin.name, left, skin.bottom, right, skin.top, skin.E)
            alone = Section((rib, strip), tuple(t for t in section.touches if rib.name in (t.first, t.second)))
            found.append((rib.name, (right - left) / (skin.right - skin.left), alone))
        most = max(found, key=lambda each: each[1] / each[2].EI)
        return most if most[1] / most[2].EI > (1 + 1e-6) / section.EI else None
    return None


def _second(width: float, low: float, high: float) -> float:
    return width * (high**3 - low**3) / 3
