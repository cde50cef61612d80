r"""Shewhart chart of individual values and moving ranges: whether a run of results has drifted.

The unit of the values is the caller's own (MPa here); limits come out in the same unit.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError

FEWEST = 2
D2, D4 = 1.128, 3.267
"""Factors of the range of two values, as printed: ISO 7870-2:2013, table 2; ASTM MNL 7, table 49."""
RUN = 7
"""Points on one side of the centre, or in one direction, that no longer look like chance: ISO 7870-2:2013, figure 3."""
ALIKE = 1e-9
"""Differences below this part of the values are their last digits and no news."""
Rule = Literal["beyond a limit", "range beyond its limit", "run on one side", "trend"]


@dataclass(frozen=True)
class Signal:
    """What speaks against chance: the rule, and the places of the points it concerns, from 0."""

    rule: Rule
    points: tuple[int, ...]


@dataclass(frozen=True)
class Chart:
    """Centre and limits of the values and of their moving ranges; ``ranges[i]`` lies between values i and i + 1."""

    centre: float
    lower: float
    upper: float
    ranges: NDArray[np.float64]
    mean_range: float
    range_upper: float
    signals: tuple[Signal, ...]


def control_chart(values: ArrayLike) -> Chart:
    r"""Centre, limits and signals of values in the order in which they were found.

    .. math:: \bar x \pm 3 \bar R/d_2, \quad \bar R = \frac{1}{n-1}\sum |x_{i+1} - x_i|, \quad R_{max} = D_4 \bar R

    with :math:`d_2 = 1.128` and :math:`D_4 = 3.267` for ranges of two.

    Parameters
    ----------
    values : array_like
        At least two results in the order of time [MPa].

    Returns
    -------
    Chart
        Centre, limits and moving ranges [MPa]; signals: values beyond a limit, ranges beyond theirs, seven or more in
        a row on one side of the centre, seven or more in a row rising or falling.

    Raises
    ------
    InputError
        If there are fewer than two values, or one is no finite number.

    Notes
    -----
    Limits from fewer than about 20 values are a first estimate. The values are taken as independent and about normal;
    a mean of many coupons is that rather than a single coupon. Nothing here compares with what a design needs: values
    may drift within their limits and still be too low.

    References
    ----------
    .. [1] ISO 7870-2:2013, Control charts - Part 2: Shewhart control charts, individuals and moving ranges.
    .. [2] NIST/SEMATECH, e-Handbook of Statistical Methods, 6.3.2.2.

    Examples
    --------
    >>> chart = control_chart([49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1])
    >>> round(chart.centre, 2), round(chart.mean_range, 4), round(chart.upper, 4), round(chart.lower, 4)
    (50.81, 1.8778, 55.8041, 45.8159)
    """
    x = np.asarray(values, dtype=float)
    if x.ndim != 1 or x.size < FEWEST:
        raise InputError("values", f"{x.size} results are too few for a control chart; it needs at least {FEWEST}.")
    if not np.isfinite(x).all():
        raise InputError("values", "a result is no finite number; enter numbers only.")
    ranges = np.abs(np.diff(x))
    centre, mean_range = float(x.mean()), float(ranges.mean())
    reach, range_upper = 3 * mean_range / D2, D4 * mean_range
    lower, upper = centre - reach, centre + reach
    slack = ALIKE * float(np.abs(x).max())
    beyond = _beyond(np.abs(x - centre) - reach > slack, ranges - range_upper > slack)
    return Chart(centre, lower, upper, ranges, mean_range, range_upper, (*beyond, *_runs(x, slack)))


def _beyond(values: NDArray[np.bool_], jumped: NDArray[np.bool_]) -> list[Signal]:
    outside, jumps = np.flatnonzero(values), np.flatnonzero(jumped)
    return [Signal("beyond a limit", (int(i),)) for i in outside] + [
        Signal("range beyond its limit", (int(i), int(i) + 1)) for i in jumps
    ]


def _runs(x: NDArray[np.float64], slack: float) -> list[Signal]:
    away, steps = x - x.mean(), np.diff(x)
    sides = np.sign(np.where(np.abs(away) > slack, away, 0.0))
    steps = np.sign(np.where(np.abs(steps) > slack, steps, 0.0))
    found = [
        Signal("run on one side", tuple(range(first, last))) for first, last in _stretches(sides) if last - first >= RUN
    ]
    # seven points in one direction are six steps
    return found + [
        Signal("trend", tuple(range(first, last + 1))) for first, last in _stretches(steps) if last + 1 - first >= RUN
    ]


def _stretches(signs: NDArray[np.float64]) -> list[tuple[int, int]]:
    """First place, and the one after the last, of every stretch of one sign other than 0."""
    edges = np.flatnonzero(np.diff(signs)) + 1
    bounds = np.concatenate(([0], edges, [signs.size])).astype(int)
    return [(int(a), int(b)) for a, b in pairwise(bounds) if b > a and signs[a] != 0]
