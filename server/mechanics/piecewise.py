"""Curves along the member as polynomials between breaks: values, and extremes exact by roots.

A set of curves is an array of shape (..., m, d): for each of the m intervals between the m + 1 breaks the d ascending
coefficients in s = x - breaks[i]. Curves may jump at breaks; an extreme is taken on both sides of every jump, inside
the member. Positions in mm; values in whatever unit the curve has (N, N*mm, mm).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import comb
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError

Array = NDArray[np.float64]
TIE = 1e-9  # share of the greatest absolute value within which two places tie
NOISE = 1e-14  # share of the greatest absolute value below which a slope is rounding
EDGE = 1e-9  # a turning point this near an interval's end (share of the interval) is the end itself


@dataclass(frozen=True)
class Extremes:
    """Greatest and least values and their places.

    Parameters
    ----------
    max, min : numpy.ndarray
        Greatest and least value, one a curve [unit of the curve].
    at_max, at_min : numpy.ndarray
        Where [mm]; the leftmost place where several tie.
    """

    max: Array
    at_max: Array
    min: Array
    at_min: Array

    def absolute(self) -> tuple[Array, Array]:
        """Return the greatest absolute value and its place; the leftmost place wins a tie."""
        high, low = np.abs(self.max), np.abs(self.min)
        slack = TIE * np.maximum(high, low)
        low_wins = (low > high + slack) | ((low >= high - slack) & (self.at_min < self.at_max))
        return np.maximum(high, low), np.where(low_wins, self.at_min, self.at_max)


@dataclass(frozen=True)
class Candidates:
    """Every place that can be an extreme: both ends of each interval and the turning points inside it.

    Parameters
    ----------
    values, at : numpy.ndarray
        Value [unit of the curve] and place [mm], shape (..., m, q); unused places repeat the interval's start.
    """

    values: Array
    at: Array

    def each(self) -> Extremes:
        """Return the extremes of every interval by itself, shape (..., m)."""
        return _pick(self.values, self.at)

    def over(self, first: int = 0, stop: int | None = None) -> Extremes:
        """Return the extremes over the intervals first, ..., stop - 1 (all when left out), shape (...)."""
        values, at = self.values[..., first:stop, :], self.at[..., first:stop, :]
        flat = (*values.shape[:-2], values.shape[-2] * values.shape[-1])
        return _pick(values.reshape(flat), at.reshape(flat))


def _pick(values: Array, at: Array) -> Extremes:
    high, low = values.max(-1, keepdims=True), values.min(-1, keepdims=True)
    slack = TIE * np.maximum(np.abs(high), np.abs(low))
    top = np.where(values >= high - slack, at, np.inf).argmin(-1)[..., None]
    bottom = np.where(values <= low + slack, at, np.inf).argmin(-1)[..., None]
    return Extremes(*(np.take_along_axis(a, k, -1)[..., 0] for k in (top, bottom) for a in (values, at)))


def candidates(breaks: ArrayLike, coefficients: ArrayLike) -> Candidates:
    """Return every place where a piecewise polynomial can have an extreme.

    Parameters
    ----------
    breaks : array_like
        Ends of the intervals, ascending, shape (m + 1,) [mm].
    coefficients : array_like
        Ascending coefficients in x - breaks[i], shape (..., m, d) [unit/mm^k].

    Returns
    -------
    Candidates
        Ends and turning points with their values.

    Notes
    -----
    The slope of each piece is written in Bernstein form on its interval: no change of sign among its coefficients, no
    root; one change, one root, which Newton's method finds inside its bracket; more, the interval is halved and asked
    again. Vanishing leading coefficients need no special care.

    References
    ----------
    .. [1] G. Farin, "Curves and Surfaces for CAGD", 5th ed. (2002), chapters 5 and 6 (Bernstein form, variation
       diminishing property, subdivision).
    """
    x, c = np.asarray(breaks, dtype=float), np.asarray(coefficients, dtype=float)
    m, d = c.shape[-2:]
    lead = c.shape[:-2]
    width = x[1:] - x[:-1]
    pieces = (c * width[:, None] ** np.arange(d)).reshape(-1, m, d)  # in t = s / width, 0 to 1
    ends = np.empty((*pieces.shape[:2], 2))
    ends[..., 0] = pieces[..., 0]
    pieces.sum(-1, out=ends[..., 1])
    at = np.empty_like(ends)
    at[..., 0], at[..., 1] = x[:-1], x[1:]
    if d > 2 and ends.size:
        slope = pieces[..., 1:] * np.arange(1, d)
        hull = slope @ _bernstein(d - 1)
        noise = NOISE * np.abs(pieces).max((1, 2))[:, None]
        turning = (hull.min(-1) < -noise) & (hull.max(-1) > noise)
        item = turning.ravel().nonzero()[0]
        if item.size:
            item, t = _roots(item, slope.reshape(-1, d - 1)[item], hull.reshape(-1, d - 1)[item])
            slot = np.arange(item.size) - np.searchsorted(item, item)
            extra = int(slot.max(initial=-1)) + 1
            value = _powers_dot(pieces.reshape(-1, d)[item], t)
            ends = _with_slots(ends, extra, item, slot, value)
            at = _with_slots(at, extra, item, slot, x[item % m] + t * width[item % m])
    return Candidates(ends.reshape(*lead, m, -1), at.reshape(*lead, m, -1))


def _with_slots(ends: Array, extra: int, item: NDArray[np.intp], slot: NDArray[np.intp], value: Array) -> Array:
    """Widen the last axis by ``extra`` columns that repeat the first, and put ``value`` where it belongs."""
    rows, m, _ = ends.shape
    wide = np.empty((rows, m, 2 + extra))
    wide[..., :2] = ends
    wide[..., 2:] = ends[..., :1]
    wide.reshape(rows * m, 2 + extra)[item, 2 + slot] = value
    return wide


def extremes(
    breaks: ArrayLike, coefficients: ArrayLike, start: float | None = None, end: float | None = None
) -> Extremes:
    """Return the extremes of piecewise polynomials, exact by roots of the slope.

    Parameters
    ----------
    breaks : array_like
        Ends of the intervals, ascending, shape (m + 1,) [mm].
    coefficients : array_like
        Ascending coefficients in x - breaks[i], shape (..., m, d) [unit/mm^k].
    start, end : float, optional
        Only from here to there [mm]; at both the value inside counts (right limit at start, left limit at end).

    Returns
    -------
    Extremes
        Arrays of shape (...); the leftmost place wins a tie (1e-9 of the greatest absolute value).

    Raises
    ------
    InputError
        If start is not less than end, or the range is not on the member.

    References
    ----------
    .. [1] G. Farin, "Curves and Surfaces for CAGD", 5th ed. (2002), chapters 5 and 6.

    Examples
    --------
    >>> parabola = extremes([0.0, 10.0], [[[0.0, 10.0, -1.0]]])
    >>> parabola.max, parabola.at_max, parabola.min, parabola.at_min
    (array([25.]), array([5.]), array([0.]), array([0.]))
    """
    if start is not None or end is not None:
        breaks, coefficients = restrict(breaks, coefficients, start, end)
    return candidates(breaks, coefficients).over()


def restrict(
    breaks: ArrayLike, coefficients: ArrayLike, start: float | None = None, end: float | None = None
) -> tuple[Array, Array]:
    """Return the breaks and coefficients of the part from start to end.

    Parameters
    ----------
    breaks : array_like
        Ends of the intervals, ascending, shape (m + 1,) [mm].
    coefficients : array_like
        Ascending coefficients in x - breaks[i], shape (..., m, d) [unit/mm^k].
    start, end : float, optional
        Where the part begins and ends [mm]; left out: with the member.

    Returns
    -------
    tuple of numpy.ndarray
        Breaks [mm] and coefficients of the part.

    Raises
    ------
    InputError
        If start is not less than end, or the range is not on the member.

    References
    ----------
    .. [1] D. E. Knuth, "The Art of Computer Programming", vol. 2, 3rd ed. (1997), 4.6.4 (Taylor shift).
    """
    x, c = np.asarray(breaks, dtype=float), np.asarray(coefficients, dtype=float)
    low = float(x[0]) if start is None else float(start)
    high = float(x[-1]) if end is None else float(end)
    slack = 1e-9 * float(x[-1] - x[0])
    if not (low < high and x[0] - slack <= low and high <= x[-1] + slack):
        raise InputError(
            "start", f"the range {low:g} to {high:g} mm; it must run to the right between {x[0]:g} and {x[-1]:g} mm."
        )
    first = min(max(int(np.searchsorted(x, low + slack, "right")) - 1, 0), len(x) - 2)
    last = min(max(int(np.searchsorted(x, high - slack, "left")), first + 1), len(x) - 1)
    part, pieces = x[first : last + 1].copy(), c[..., first:last, :]
    shift = low - part[0]
    if shift > slack:
        pieces = pieces.copy()
        d = pieces.shape[-1]
        move = np.array([[comb(k, j) * shift ** (k - j) if j <= k else 0.0 for j in range(d)] for k in range(d)])
        pieces[..., 0, :] = pieces[..., 0, :] @ move
    part[0], part[-1] = max(low, part[0]), min(high, part[-1])
    return part, pieces


def evaluate(
    breaks: ArrayLike, coefficients: ArrayLike, x: ArrayLike, side: Literal["left", "right"] = "right"
) -> Array:
    """Return the values of piecewise polynomials at given places.

    Parameters
    ----------
    breaks : array_like
        Ends of the intervals, ascending, shape (m + 1,) [mm].
    coefficients : array_like
        Ascending coefficients in x - breaks[i], shape (..., m, d) [unit/mm^k].
    x : array_like
        Places, shape (n,) or a number [mm]; at the member's ends the value inside it is meant.
    side : str
        Which side of a jump: "right" (just right of x) or "left" [-].

    Returns
    -------
    numpy.ndarray
        Values, shape (..., n), or (...) for a single place.

    References
    ----------
    .. [1] W. G. Horner, "A new method of solving numerical equations", Phil. Trans. 109 (1819), 308-335.

    Examples
    --------
    >>> step = [[[1.0], [3.0]]]
    >>> evaluate([0.0, 1.0, 2.0], step, 1.0), evaluate([0.0, 1.0, 2.0], step, 1.0, "left")
    (array([3.]), array([1.]))
    """
    places, c, at = np.asarray(breaks, dtype=float), np.asarray(coefficients, dtype=float), np.asarray(x, dtype=float)
    piece = np.searchsorted(places, at, side) - 1
    piece = np.minimum(np.maximum(piece, 0), len(places) - 2)
    s = at - places[piece]
    chosen = c[..., piece, :]
    value = chosen[..., -1].copy()
    for power in range(c.shape[-1] - 2, -1, -1):
        value = value * s + chosen[..., power]
    return value


def _powers_dot(c: Array, t: Array) -> Array:
    """Return the value of each polynomial (ascending coefficients in a row) at its own t."""
    value = c[:, -1]
    for power in range(c.shape[1] - 2, -1, -1):
        value = value * t + c[:, power]
    return value


@lru_cache
def _bernstein(n: int) -> Array:
    """Return the matrix that turns n ascending coefficients on 0..1 into Bernstein coefficients."""
    q = n - 1
    return np.array([[comb(j, i) / comb(q, i) if i <= j else 0.0 for j in range(n)] for i in range(n)])


@lru_cache
def _halves(n: int) -> tuple[Array, Array]:
    """Return the matrices that give the Bernstein coefficients of the left and the right half."""
    left = np.array([[comb(j, i) / 2.0**j if i <= j else 0.0 for j in range(n)] for i in range(n)])
    return left, left[::-1, ::-1].copy()


def _roots(item: NDArray[np.intp], slope: Array, hull: Array) -> tuple[NDArray[np.intp], Array]:
    """Return the sign changes of each slope inside 0..1: the owner's number (ascending) and t."""
    low, high = np.zeros(item.size), np.ones(item.size)
    rising = hull[:, -1] > 0
    changes = _changes(hull)
    if changes.max() > 1:
        item, slope, low, high, rising = _isolate(item, slope, hull, changes)
    t = _polish(slope, low, high, rising)
    inside = (t > EDGE) & (t < 1 - EDGE)
    return (item, t) if inside.all() else (item[inside], t[inside])


def _changes(hull: Array) -> NDArray[np.intp]:
    above = hull > 0
    return np.count_nonzero(above[:, 1:] != above[:, :-1], axis=1)


def _isolate(
    item: NDArray[np.intp], slope: Array, hull: Array, changes: NDArray[np.intp]
) -> tuple[NDArray[np.intp], Array, Array, Array, NDArray[np.bool_]]:
    """Halve intervals until each holds one change of sign.

    Twenty-four halvings separate all but double roots, where the curve has no extreme anyway.
    """
    left, right = _halves(hull.shape[1])
    which, low, size = np.arange(item.size), np.zeros(item.size), 1.0
    found: list[tuple[NDArray[np.intp], Array, Array, NDArray[np.bool_]]] = []
    for _ in range(24):
        single = changes == 1
        found.append((which[single], low[single], low[single] + size, hull[single, -1] > 0))
        many = changes > 1
        if not many.any():
            break
        size /= 2
        which = np.concatenate([which[many], which[many]])
        low = np.concatenate([low[many], low[many] + size])
        hull = np.concatenate([hull[many] @ left, hull[many] @ right])
        changes = _changes(hull)
    which, low, high, rising = (np.concatenate(parts) for parts in zip(*found, strict=True))
    order = np.argsort(which, kind="stable")
    which = which[order]
    return item[which], slope[which], low[order], high[order], rising[order]


def _polish(slope: Array, low: Array, high: Array, rising: NDArray[np.bool_]) -> Array:
    """Newton's method kept inside its bracket; plain halving should it not settle in 12 steps."""
    bend = slope[:, 1:] * np.arange(1, slope.shape[1])
    t = 0.5 * (low + high)
    with np.errstate(divide="ignore", invalid="ignore"):
        for count in range(70):
            value = _powers_dot(slope, t)
            past = (value > 0) == rising
            high, low = np.where(past, t, high), np.where(past, low, t)
            after = t - value / _powers_dot(bend, t)
            if count < 12:
                outside = ~((after >= low) & (after <= high))
                if outside.any():
                    after = np.where(outside, 0.5 * (low + high), after)
            else:
                after = 0.5 * (low + high)
            step = np.abs(after - t).max(initial=0.0)
            t = after
            if step < 1e-9:
                break
    return t
