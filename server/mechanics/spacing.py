"""Zones of fastener spacing in workshop steps, and the places at which a bench hand sets fasteners out.

Units: mm. The first and the last fastener stand at the end distance; in between a zone has so many equal spaces, and
zones meet at a fastener, which stands where the wider spacing is allowed.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError

Array = NDArray[np.float64]
SAME = 1e-6  # of a spacing: what differs by less is the same
ZONE_COST = 4  # spaces a further zone must save: a change of spacing is a chance to go wrong
MOST_CELLS = 1200


@dataclass(frozen=True)
class SpacedZone:
    """A length over which fasteners keep one spacing.

    Parameters
    ----------
    start, end : float
        From where to where [mm].
    spacing : float
        Spacing along the member [mm].
    """

    start: float
    end: float
    spacing: float


def zones(start: float, end: float, places: ArrayLike, allowed: ArrayLike, *, step: float) -> list[SpacedZone]:
    """Cut a run into zones of constant spacing, none wider than is allowed anywhere in it.

    Parameters
    ----------
    start, end : float
        First and last fastener [mm].
    places, allowed : array_like
        Widest spacing allowed at places along the run, at least one, in any order; straight in between; places beyond
        an end count for it [mm].
    step : float
        Workshop step; every spacing is a multiple of it [mm].

    Returns
    -------
    list of SpacedZone
        From left to right, without gap. Of all ways to cut the run the one with the fewest spaces, where each zone
        counts as four spaces more; a run that asks for the same from both ends is cut alike from both.

    Raises
    ------
    InputError
        If the run is empty, or less than one step is allowed somewhere.

    Notes
    -----
    Best cuts by dynamic programming over cells of one step. Ends of zones then move so that tight zones hold whole
    spaces; the widest zone takes up what is left.

    References
    ----------
    .. [1] R. Bellman, "On the approximation of curves by line segments using dynamic programming", Comm. ACM 4 (1961),
       284.

    Examples
    --------
    >>> found = zones(0, 3000, [0, 690, 725, 3000], [60, 60, 130, 130], step=25)
    >>> [(zone.start, zone.end, zone.spacing) for zone in found]
    [(0.0, 700.0, 50.0), (700.0, 3000.0, 125.0)]
    """
    x, most = np.asarray(places, dtype=float), np.asarray(allowed, dtype=float)
    if not end > start:
        raise InputError("end", f"the run goes from {start:g} to {end:g} mm; its end must lie to the right.")
    if not (np.isfinite(step) and step > 0):
        raise InputError("step", f"step is {step:g} mm; enter a number greater than 0 mm.")
    cell = step * max(1, math.ceil((end - start) / step / MOST_CELLS))
    count = max(1, math.ceil((end - start) / cell - SAME))
    least = np.full(count, np.inf)
    for shift in (-SAME, SAME):  # a place on a cell's edge belongs to both
        number = np.clip(np.floor((x - start) / cell + shift), 0, count - 1).astype(int)
        np.minimum.at(least, number, most)
    least = np.where(np.isfinite(least), least, np.interp(np.arange(count), *_known(least)))
    steps = np.floor(np.minimum(least, end - start) / step + SAME)
    steps = np.where(steps < 1, np.floor(least / step + SAME), steps)
    if steps.min() < 1:
        at = start + cell * float(np.argmin(steps))
        raise InputError(
            "allowed",
            f"at {at:.6g} mm only {float(least.min()):.4g} mm are allowed, less than one step of {step:g} mm.",
        )
    cuts = _both_ways(steps)
    edges = [float(start + cell * cut) for cut in cuts[:-1]] + [float(end)]
    found = [
        SpacedZone(a, b, float(steps[i:j].min()) * step)
        for a, b, i, j in zip(edges, edges[1:], cuts, cuts[1:], strict=False)
    ]
    return _whole_spaces(found)


def _known(values: Array) -> tuple[Array, Array]:
    finite = np.isfinite(values)
    return np.flatnonzero(finite).astype(float), values[finite]


def _both_ways(steps: Array) -> list[int]:
    """Best cuts, alike from both ends where the run asks for the same from both."""
    n = len(steps)
    if n > 3 and np.abs(steps - steps[::-1]).max() <= 1:
        even = np.minimum(steps, steps[::-1])
        half = (n + 1) // 2
        left = _best(even[:half])
        right = [n - cut for cut in reversed(left)]
        joined = left[:-1] + right[1:] if n % 2 == 0 or left[-1] != right[0] else left + right[1:]
        return sorted(set(joined))
    return _best(steps)


def _best(steps: Array) -> list[int]:
    n = len(steps)
    cost = np.full(n + 1, np.inf)
    cost[0] = 0.0
    back = np.zeros(n + 1, dtype=int)
    for j in range(1, n + 1):
        least = np.minimum.accumulate(steps[:j][::-1])[::-1]
        total = cost[:j] + (j - np.arange(j)) / least + ZONE_COST
        back[j] = int(total.argmin())
        cost[j] = total[back[j]]
    cuts = [n]
    while cuts[-1] > 0:
        cuts.append(int(back[cuts[-1]]))
    return cuts[::-1]


def _whole_spaces(found: list[SpacedZone]) -> list[SpacedZone]:
    """Move the ends of zones into their wider neighbours until all but the widest hold whole spaces."""
    merged: list[SpacedZone] = []
    for zone in found:
        if merged and merged[-1].spacing == zone.spacing:
            merged[-1] = SpacedZone(merged[-1].start, zone.end, zone.spacing)
        else:
            merged.append(zone)
    widest = max(range(len(merged)), key=lambda i: (merged[i].spacing, -abs(2 * i + 1 - len(merged))))
    edges = [merged[0].start, *(zone.end for zone in merged)]
    for i in range(widest):
        edges[i + 1] = min(edges[i] + _fit(edges[i + 1] - edges[i], merged, i, i + 1), edges[-1])
    for i in range(len(merged) - 1, widest, -1):
        edges[i] = max(edges[i + 1] - _fit(edges[i + 1] - edges[i], merged, i, i - 1), edges[widest])
    return [
        SpacedZone(a, b, zone.spacing)
        for a, b, zone in zip(edges, edges[1:], merged, strict=False)
        if b - a > SAME * zone.spacing
    ]


def _fit(length: float, merged: Sequence[SpacedZone], own: int, neighbour: int) -> float:
    """A length of whole spaces: longer beside a wider spacing, shorter beside a tighter one."""
    spacing = merged[own].spacing
    whole = length / spacing
    tight = spacing < merged[neighbour].spacing
    return spacing * (math.ceil(whole - SAME) if tight else math.floor(whole + SAME))


def positions(start: float, end: float, given: Sequence[SpacedZone]) -> list[float]:
    """Return where the fasteners stand: the first at the start, the last at the end, no space wider than its zone's.

    Parameters
    ----------
    start, end : float
        First and last fastener [mm].
    given : sequence of SpacedZone
        Zones from left to right; where they leave something out, the nearest one goes on [mm].

    Returns
    -------
    list of float
        Places from left to right [mm].

    Raises
    ------
    InputError
        If there is no zone.

    References
    ----------
    .. [1] None needed: bookkeeping.

    Examples
    --------
    >>> positions(50, 400, [SpacedZone(0, 200, 50), SpacedZone(200, 400, 100)])
    [50.0, 100.0, 150.0, 200.0, 300.0, 400.0]
    """
    if not given:
        raise InputError("given", "no zone of spacing is given; give one.")
    found = [float(start)]
    while True:
        here = found[-1]
        zone = next((z for z in given if z.end > here + SAME * z.spacing), given[-1])
        ahead = here + zone.spacing
        after = next((z for z in given if z.start >= zone.end - SAME * zone.spacing), None)
        if after is not None and after.spacing < zone.spacing and here < zone.end < ahead:
            ahead = zone.end  # a tighter zone begins at its own edge
        if ahead >= end - SAME * zone.spacing or len(found) > 100_000:
            break
        found.append(float(ahead))
    if end - found[-1] > SAME * (end - start) or len(found) == 1:
        found.append(float(end))
    return found


def spaces(places: Sequence[float]) -> list[tuple[int, float]]:
    """Return runs of equal spaces, as a bench hand steps them off.

    Parameters
    ----------
    places : sequence of float
        Places from left to right [mm].

    Returns
    -------
    list of (int, float)
        How many spaces, and how wide [mm].

    References
    ----------
    .. [1] None needed: bookkeeping.

    Examples
    --------
    >>> spaces([50, 100, 150, 250, 310])
    [(2, 50.0), (1, 100.0), (1, 60.0)]
    """
    runs: list[tuple[int, float]] = []
    for a, b in pairwise(places):
        width = float(b - a)
        if runs and abs(runs[-1][1] - width) <= 1e-6 * max(width, 1.0):
            runs[-1] = (runs[-1][0] + 1, runs[-1][1])
        else:
            runs.append((1, width))
    return runs
