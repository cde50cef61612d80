"""The member cut at every place where something changes, and the loads laid on these intervals.

Units: N, mm, N/mm, N*mm.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.beam_model import Beam, Couple, LineLoad, Load, PointLoad

Array = NDArray[np.float64]
Indices = NDArray[np.intp]
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
        1/EI [1/(N*mm2)] and 1/GA [1/N] of each interval.
    load, load_slope : numpy.ndarray
        Line load at each interval's start [N/mm] and its slope [N/mm2], shape (c, m).
    force, couple : numpy.ndarray
        Force [N] and couple [N*mm] at each break, shape (c, m + 1).
    key, kind : numpy.ndarray
        Breaks that are ends, supports or hinges, and what holds there [-].
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
    load_slope: Array
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


def lay_out(beam: Beam, cases: Sequence[Sequence[Load]]) -> Grid:
    """Cut the member at supports, hinges, stretch ends and loads, and lay the loads on the intervals.

    Parameters
    ----------
    beam : Beam
        The member [mm, N].
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
    loads = _gather(cases)
    points = np.array(loads.points + loads.couples, dtype=float).reshape(-1, 3)
    lines = np.array(loads.lines, dtype=float).reshape(-1, 5)
    stretches = beam.stretches
    places = np.array(
        [0.0, beam.length, *(s.at for s in beam.supports), *beam.hinges, *(s.start for s in stretches)]
        + [row[1] for row in loads.points]
        + [row[1] for row in loads.couples]
        + [row[1] for row in loads.lines]
        + [row[2] for row in loads.lines]
    )
    slack = beam.same_place
    order = places.argsort(kind="stable")
    ascending = places[order]
    new = np.empty(len(places), dtype=bool)
    new[0] = True
    np.greater(ascending[1:] - ascending[:-1], slack, out=new[1:])
    index = np.empty(len(places), dtype=np.intp)
    index[order] = new.cumsum() - 1
    breaks = ascending[new]
    breaks[0], breaks[-1] = 0.0, beam.length
    where = iter(np.split(index, np.cumsum([2, len(beam.supports), len(beam.hinges), len(stretches)])))
    _, support, hinge, stretch_first = next(where), next(where), next(where), next(where)
    rest = next(where)
    at, starts, ends = rest[: len(points)], rest[len(points) : len(points) + len(lines)], rest[len(points) + len(lines) :]
    m, c = len(breaks) - 1, len(cases)
    if not (
        np.isfinite(places).all()
        and ascending[0] >= -slack
        and ascending[-1] <= beam.length + slack
        and np.isfinite(points).all()
        and np.isfinite(lines).all()
        and (starts < ends).all()
        and not (beam.hinges and loads.couples and np.isin(at[len(loads.points) :], hinge).any())
    ):
        _check_loads(beam, cases)
    width = breaks[1:] - breaks[:-1]
    span = np.zeros(m + 1, dtype=np.intp)
    span[stretch_first[1:]] = 1
    of_stretch = span[:-1].cumsum()
    flexibility = np.array([(1 / s.EI, 1 / s.GA) for s in stretches])[of_stretch]
    forces = np.zeros((2, c, m + 1))
    if len(points):
        kind = np.zeros(len(points), dtype=np.intp)
        kind[len(loads.points) :] = 1
        flat = (kind * c + points[:, 0].astype(np.intp)) * (m + 1) + at
        forces = np.bincount(flat, points[:, 2], 2 * c * (m + 1)).reshape(2, c, m + 1)
    load, load_slope = _spread(lines, starts, ends, breaks, c)
    key, key_support, kinds, springs = _key_places(beam, support, hinge, m)
    bounds = key.tolist()
    return Grid(
        breaks,
        width,
        flexibility[:, 0],
        flexibility[:, 1],
        load,
        load_slope,
        forces[0],
        forces[1],
        key,
        kinds,
        springs,
        key_support,
        bounds[:-1],
        bounds[1:],
    )


def _spread(lines: Array, starts: Indices, ends: Indices, breaks: Array, c: int) -> tuple[Array, Array]:
    """Return the line load at each interval's start and its slope, for each case."""
    m = len(breaks) - 1
    if not len(lines):
        return np.zeros((c, m)), np.zeros((c, m))
    number = np.arange(m)
    inside = (number >= starts[:, None]) & (number < ends[:, None])
    low, high, first, last = lines[:, 1:].T[:, :, None]
    slope = (last - first) / (high - low)
    both = np.empty((len(lines), 2, m))
    np.multiply(first + slope * (breaks[:-1] - low), inside, out=both[:, 0])
    np.multiply(slope, inside, out=both[:, 1])
    owner = (lines[:, 0] == np.arange(c)[:, None]).astype(float)
    total = (owner @ both.reshape(len(lines), 2 * m)).reshape(c, 2, m)
    return total[:, 0], total[:, 1]


def _key_places(
    beam: Beam, support: Indices, hinge: Indices, m: int
) -> tuple[Indices, Indices, Indices, list[tuple[int, float]]]:
    """Return the key places' breaks, each support's key place, what holds at each, and the springs."""
    at_support, at_hinge = support.tolist(), hinge.tolist()
    ordered = sorted({0, m, *at_support, *at_hinge})
    number = {place: position for position, place in enumerate(ordered)}
    kinds = [0] * len(ordered)
    springs: list[tuple[int, float]] = []
    for held, place in zip(beam.supports, at_support, strict=True):
        kinds[number[place]] = _KIND[held.kind]
        if held.kind == "spring":
            springs.append((number[place], held.stiffness))
    for place in at_hinge:
        kinds[number[place]] = _HINGED[kinds[number[place]]]
    key_support = np.array([number[place] for place in at_support], dtype=np.intp)
    return np.array(ordered, dtype=np.intp), key_support, np.array(kinds, dtype=np.intp), springs
