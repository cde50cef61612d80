"""Curves of shear, moment and deflection along the member, their turning points and their extremes."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from server.mechanics.piecewise import Candidates, Extremes, both_sides, candidates, candidates_together, extremes

TIE = 1e-9  # relative difference under which two extremes are the same


@dataclass(frozen=True, eq=False)
class Curve:
    """One quantity along the member, a row a combination; its turning points are found once."""

    breaks: NDArray[np.float64]
    coefficients: NDArray[np.float64]
    names: tuple[str, ...]
    asked: list[tuple[float, float]] | None = None
    """Where axles move: collects the parts of the member that were asked for and not foreseen."""
    among: Among | None = None
    """Where it is one of several curves whose turning points and extremes are found together."""

    @cached_property
    def _candidates(self) -> Candidates:
        return candidates(self.breaks, self.coefficients) if self.among is None else self.among.candidates()

    @cached_property
    def _found(self) -> dict[tuple[float, float], Extremes]:
        return {}

    @cached_property
    def _index(self) -> dict[float, int]:
        return {place: i for i, place in enumerate(self.breaks.tolist())}

    @property
    def whole(self) -> Extremes:
        """Extremes of every row over the whole member."""
        return self._extremes(float(self.breaks[0]), float(self.breaks[-1]))

    def over(self, start: float, end: float) -> Extremes:
        """Extremes of every row between two places, inside them on both sides of every jump."""
        if self.asked is not None and (start, end) not in self.asked:
            self.asked.append((start, end))
        return self._extremes(start, end)

    def _extremes(self, start: float, end: float) -> Extremes:
        found = self._found.get((start, end))
        if found is None:
            found = self._found[start, end] = self._look(start, end)
        return found

    def _look(self, start: float, end: float) -> Extremes:
        if self.among is not None and (start, end) in self.among.all.number:
            return self.among.over(start, end)
        first, last = self._index.get(start), self._index.get(end)
        if first is None or last is None:
            return extremes(self.breaks, self.coefficients, start, end)
        return self._candidates.over(first, last)

    def sizes(
        self, start: float, end: float, places: NDArray[np.float64]
    ) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Places between two others, breaks and turning points among them, and the largest size there of every row."""
        known = np.concatenate([places, self.breaks, self._candidates.at.ravel(), [start, end]])
        at = np.unique(known[(known >= start) & (known <= end)])
        left, right = np.abs(both_sides(self.breaks, self.coefficients, at)).swapaxes(0, 1)
        left[:, 0], right[:, -1] = right[:, 0], left[:, -1]  # inside the part, not beyond its ends
        return at, np.maximum(left, right)


class Together:
    """Curves whose turning points are found at once, and so are their extremes over foreseen parts of the member.

    ``curves`` (rows, m, d) each, with its own d; ``parts`` from where to where, always with the whole member.
    """

    def __init__(
        self,
        breaks: NDArray[np.float64],
        curves: Sequence[NDArray[np.float64]],
        parts: Iterable[tuple[float, float]],
    ) -> None:
        self.breaks, self.curves = breaks, curves
        places = breaks.tolist()
        index = {place: i for i, place in enumerate(places)}
        known = dict.fromkeys([(places[0], places[-1]), *parts])
        self.parts = {part: (index[part[0]], index[part[1]]) for part in known if {*part} <= index.keys()}
        self.number = {part: number for number, part in enumerate(self.parts)}

    @cached_property
    def candidates(self) -> Candidates:
        """Of every curve, shape (curves, rows, m, q)."""
        return candidates_together(self.breaks, self.curves)

    @cached_property
    def extremes(self) -> Extremes:
        """Of every curve over every part, shape (curves, rows, parts)."""
        return self.candidates.over_each(list(self.parts.values()))


@dataclass(frozen=True, eq=False)
class Among:
    """One of several curves: its place among ``all``, and which of their rows are its own."""

    all: Together
    place: int
    rows: slice | list[int]

    def candidates(self) -> Candidates:
        found = self.all.candidates
        return Candidates(found.values[self.place, self.rows], found.at[self.place, self.rows])

    def over(self, start: float, end: float) -> Extremes:
        """The extremes over a foreseen part."""
        return self.all.extremes.of(self.place, self.rows, self.all.number[start, end])


class Peak(NamedTuple):
    """The value of largest size with its place and the row of its combination."""

    value: float
    at: float
    row: int


def largest(values: NDArray[np.float64], places: NDArray[np.float64]) -> Peak:
    """The greatest of one value a combination; the leftmost place wins a tie, then the first combination."""
    each, at = values.tolist(), places.tolist()  # a handful: numpy would take longer to start than to run
    top = max(each)
    least = top - TIE * max(abs(top), 1e-300)
    row = min([i for i, value in enumerate(each) if value >= least], key=at.__getitem__)
    return Peak(each[row], at[row], row)


def envelope(curve: Curve | None) -> dict[str, object] | None:
    """The contract's extremes block of a curve."""
    if curve is None:
        return None
    found, names = curve.whole, curve.names
    high, low = largest(found.max, found.at_max), largest(-found.min, found.at_min)
    return {
        "max": high.value,
        "min": 0.0 - low.value,
        "at_max": high.at,
        "at_min": low.at,
        "combination_max": names[high.row],
        "combination_min": names[low.row],
    }
