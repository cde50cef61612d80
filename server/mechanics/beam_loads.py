"""The member cut at every place where something changes, and the loads laid on these intervals.

Units: N, mm, N/mm, N*mm.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.beam_model import Beam, Couple, LineLoad, Load, PointLoad

Array = NDArray[np.float64]
Indices = NDArray[np.intp]
STEEP = 1e4
_KIND = {"pin": 1, "fixed": 2, "spring": 3}  # as beam_system numbers what holds at a key place; a hinge adds 4
_HINGED = {0: 4, 1: 5, 3: 6}


@dataclass(frozen=True)
class Grid:
    """Breaks, stiffness and loads between them.

    Parameters
    ----------
    breaks, width : numpy.ndarray
        Places (m + 1,) and lengths (m,) of the intervals [mm].
    bending, shear : numpy.ndarray
        1/EI [1/(N*mm2)] and 1/GA [1/N] of each interval, one row for each of k sets of stiffnesses, shape (k, m).
    load : numpy.ndarray
        Line load at each interval's start [N/mm] and its slope [N/mm2], shape (2, c, m).
    force, couple : numpy.ndarray
        Force [N] and couple [N*mm] at each break, shape (c, m + 1).
    key, kind : numpy.ndarray
        Breaks that are ends, supports, hinges or steep changes of stiffness, and what holds there [-].
    springs : list of (int, float)
        Number of the key place and stiffness [N/mm].
    support : numpy.ndarray
        Number of the key place of each support, in the member's order [-].
    first, stop : list of int
        Intervals from one key place to the next [-].
    """

    breaks: Array
    width: Array
    bending: Array
    shear: Array
    load: Array
    force: Array
    couple: Array
    key: Indices
    kind: Indices
    springs: list[tuple[int, float]]
    support: Indices
    first: list[int]
    stop: list[int]


@dataclass(frozen=True)
class _Gathered:
    """Loads of all cases in rows, and whose they are."""

    points: list[tuple[int, float, float]]
    couples: list[tuple[int, float, float]]
    lines: list[tuple[int, float, float, float, float]]

    def usable(self) -> bool:
        """Return whether all numbers are finite (a sum is not, once one of its terms is not)."""
        return math.isfinite(sum(map(sum, self.points)) + sum(map(sum, self.couples)) + sum(map(sum, self.lines)))


def _gather(cases: Sequence[Sequence[Load]]) -> _Gathered:
    gathered = _Gathered([], [], [])
    for number, case in enumerate(cases):
        for load in case:
            if isinstance(load, LineLoad):
                gathered.lines.append((number, load.start, load.end, load.value_start, load.value_end))
            elif isinstance(load, PointLoad):
                gathered.points.append((number, load.at, load.value))
            else:
                gathered.couples.append((number, load.at, load.value))
    return gathered


def _check_load(beam: Beam, field: str, load: Load) -> None:
    """Raise for the first thing that is wrong with one load."""
    line = isinstance(load, LineLoad)
    names = ("start", "end", "value_start", "value_end") if line else ("at", "value")
    for name in names:
        number = getattr(load, name)
        if not np.isfinite(number):
            raise InputError(f"{field}.{name}", f"{name} is {number:g}; enter a number.")
        if name in ("start", "end", "at") and not -beam.same_place <= number <= beam.length + beam.same_place:
            raise InputError(
                f"{field}.{name}",
                f"the load is at {number:g} mm; enter a place on the member, 0 to {beam.length:g} mm.",
            )
    if isinstance(load, LineLoad) and not load.end - load.start > beam.same_place:
        raise InputError(
            f"{field}.end",
            f"the line load runs from {load.start:g} to {load.end:g} mm; its end must lie to the right of its start.",
        )
    if isinstance(load, Couple) and any(abs(load.at - hinge) <= beam.same_place for hinge in beam.hinges):
        raise InputError(
            f"{field}.at",
            f"the couple at {load.at:g} mm is on a hinge, which leaves open which side takes it; put it to the left or"
            " to the right of the hinge.",
        )


def _check_loads(beam: Beam, cases: Sequence[Sequence[Load]]) -> None:
    for number, case in enumerate(cases):
        for position, load in enumerate(case):
            _check_load(beam, f"cases[{number}][{position}]", load)


def lay_out(beams: Sequence[Beam], cases: Sequence[Sequence[Load]]) -> Grid:
    """Cut the member at supports, hinges, stretch ends and loads, and lay the loads on the intervals.

    Parameters
    ----------
    beams : sequence of Beam
        The same member with each of the k sets of stiffnesses of its stretches [mm, N].
    cases : sequence of sequence of Load
        Loads of each case [N, N/mm, N*mm, mm].

    Returns
    -------
    Grid
        Intervals with their stiffness and loads.

    Raises
    ------
    InputError
        If a load is not on the member, not finite, runs backwards, or is a couple on a hinge; the field is
        "cases[1][0].at" and the like.

    References
    ----------
    .. [1] None needed: bookkeeping.
    """
    beam = beams[0]
    loads = _gather(cases)
    if not loads.usable():
        _check_loads(beam, cases)
    places = {0.0, beam.length, *(s.at for s in beam.supports), *beam.hinges, *(s.start for s in beam.stretches)}
    for rows in (loads.points, loads.couples, loads.lines):
        places.update([row[1] for row in rows])
    places.update([row[2] for row in loads.lines])
    breaks, number = _cut(beam, places)
    hinges = {number[at] for at in beam.hinges}
    covered = [(number[row[1]], number[row[2]]) for row in loads.lines]
    if (
        min(places) < -beam.same_place
        or max(places) > beam.length + beam.same_place
        or not all(first < stop for first, stop in covered)
        or not hinges.isdisjoint([number[row[1]] for row in loads.couples])
    ):
        _check_loads(beam, cases)
    m = len(breaks) - 1
    bounds = [*(number[stretch.start] for stretch in beam.stretches), m]
    flexibility = _flexibility(beams, bounds)
    force, couple = np.zeros((2, len(cases), m + 1))
    for target, rows in ((force, loads.points), (couple, loads.couples)):
        for case, at, value in rows:
            target[case, number[at]] += value
    supports = [number[support.at] for support in beam.supports]
    key = sorted({0, m, *supports, *hinges, *_steep_changes(beams, bounds)})
    position = {place: order for order, place in enumerate(key)}
    kind, springs = _what_holds(beam, [position[at] for at in supports], [position[at] for at in hinges], len(key))
    return Grid(
        breaks=breaks,
        width=breaks[1:] - breaks[:-1],
        bending=flexibility[0],
        shear=flexibility[1],
        load=_spread(loads.lines, covered, breaks, len(cases)),
        force=force,
        couple=couple,
        key=np.array(key),
        kind=np.array(kind),
        springs=springs,
        support=np.array([position[at] for at in supports]),
        first=key[:-1],
        stop=key[1:],
    )


def _flexibility(beams: Sequence[Beam], bounds: list[int]) -> Array:
    """Return 1/EI and 1/GA of every interval for each set of stiffnesses, (2, k, m)."""
    return np.repeat(
        np.array([[[1 / s.EI for s in b.stretches] for b in beams], [[1 / s.GA for s in b.stretches] for b in beams]]),
        [right - left for left, right in pairwise(bounds)],
        axis=2,
    )


def _cut(beam: Beam, places: set[float]) -> tuple[Array, dict[float, int]]:
    """Return the breaks, and the number of the break at each place; places too close to tell apart share one."""
    breaks: list[float] = []
    number: dict[float, int] = {}
    last = -np.inf
    same = beam.same_place
    for place in sorted(places):
        if place - last > same:
            breaks.append(place)
        last = place
        number[place] = len(breaks) - 1
    breaks[0], breaks[-1] = 0.0, beam.length
    return np.array(breaks, dtype=float), number


def _spread(
    lines: list[tuple[int, float, float, float, float]], covered: list[tuple[int, int]], breaks: Array, cases: int
) -> Array:
    """Return the line load at each interval's start and its slope, (2, cases, m); ``covered`` by each: from, up to."""
    m = len(breaks) - 1
    if not lines:
        return np.zeros((2, cases, m))
    case, start, end, first, last = np.array(lines, dtype=float).T
    from_break, to_break = np.array(covered).T
    covers = to_break - from_break  # intervals under each load
    row = np.repeat(np.array([case, start, first, (last - first) / (end - start)]), covers, axis=1)
    interval = np.arange(row.shape[1]) + np.repeat(from_break - covers.cumsum() + covers, covers)
    values = row[2] + row[3] * (breaks[interval] - row[1])
    place = row[0].astype(np.intp) * m + interval
    return np.array([np.bincount(place, part, cases * m) for part in (values, row[3])]).reshape(2, cases, m)


def _steep_changes(beams: Sequence[Beam], bounds: list[int]) -> list[int]:
    """Return the breaks where a stiffness changes so much that the state there is an unknown of its own.

    A very soft stretch acts nearly as a hinge; its small moment would drown in the rounding of the large ones.
    """
    return [
        place
        for beam in beams
        for place, (left, right) in zip(bounds[1:], pairwise(beam.stretches), strict=False)
        if not 1 / STEEP < left.EI / right.EI < STEEP
    ]


def _what_holds(
    beam: Beam, supports: list[int], hinges: list[int], count: int
) -> tuple[list[int], list[tuple[int, float]]]:
    """Return what holds at each of the key places, and the springs."""
    kind = [0] * count
    springs: list[tuple[int, float]] = []
    for support, place in zip(beam.supports, supports, strict=True):
        kind[place] = _KIND[support.kind]
        if support.kind == "spring":
            springs.append((place, support.stiffness))
    for place in hinges:
        kind[place] = _HINGED[kind[place]]
    return kind, springs
