"""Curves along the member as polynomials between breaks: values, and extremes exact by roots.

A set of curves is an array of shape (..., m, d): for each of the m intervals between the m + 1 breaks the d ascending
coefficients in s = x - breaks[i]. Curves may jump at breaks; an extreme is taken on both sides of every jump, inside
the member. Positions in mm; values in whatever unit the curve has (N, N*mm, mm).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import comb
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError

Array = NDArray[np.float64]
Indices = NDArray[np.intp]
TIE = 1e-9  # share of the greatest absolute value within which two places tie
NOISE = 1e-14  # share of the greatest absolute value below which a slope is rounding
SETTLED = 1e-8  # Newton's last step; the error after it is of the order of its square
EDGE = 1e-9  # a turning point this near an interval's end (share of the interval) is the end itself


@dataclass(frozen=True)
class Extremes:
    """Greatest, least and greatest absolute value of each curve, and their places.

    Parameters
    ----------
    value, at : numpy.ndarray
        The three values [unit of the curve] and where they are [mm], shape (3, ...); the leftmost place where several
        tie.
    """

    value: Array
    at: Array

    @property
    def max(self) -> Array:
        """Greatest value of each curve."""
        found: Array = self.value[0]
        return found

    @property
    def at_max(self) -> Array:
        """Where each curve is greatest."""
        found: Array = self.at[0]
        return found

    @property
    def min(self) -> Array:
        """Least value of each curve."""
        found: Array = self.value[1]
        return found

    @property
    def at_min(self) -> Array:
        """Where each curve is least."""
        found: Array = self.at[1]
        return found

    def absolute(self) -> tuple[Array, Array]:
        """Return the greatest absolute value and its place; the leftmost place wins a tie."""
        return self.value[2], self.at[2]

    def of(self, *index: int | slice | list[int]) -> Extremes:
        """Return the extremes of some of the curves: ``index`` as into an array of all of them."""
        return Extremes(self.value[:, *index], self.at[:, *index])


@dataclass(frozen=True)
class Candidates:
    """Every place that can be an extreme: both ends of each interval and the turning points inside it.

    Parameters
    ----------
    values, at : numpy.ndarray
        Value [unit of the curve] and place [mm], shape (..., m, q), places ascending; unused places repeat the
        interval's start.
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

    def over_each(self, parts: Sequence[tuple[int, int]]) -> Extremes:
        """Return the extremes over the intervals first, ..., stop - 1 of each of n parts at once, shape (..., n)."""
        *lead, m, q = self.values.shape
        first, stop = np.array(parts).T[..., None] * q
        slots = np.minimum(first + np.arange((stop - first).max()), stop - 1)  # a short part repeats its last place
        flat = (*lead, m * q)
        return _pick(self.values.reshape(flat)[..., slots], self.at.reshape(flat)[..., slots])


def _pick(values: Array, at: Array) -> Extremes:
    """Return the extremes along the last axis, where ``at`` ascends."""
    *lead, n = values.shape
    signed = np.empty((3, *values.shape))
    signed[0] = values
    np.negative(values, out=signed[1])
    np.abs(values, out=signed[2])
    greatest = signed.max(-1)
    least = greatest - TIE * greatest[2]
    first = (signed >= least[..., None]).argmax(-1)
    slot = first + np.arange(0, values.size, n).reshape(lead)
    value = values.take(slot)
    np.abs(value[2], out=value[2])
    return Extremes(value, at.take(slot))


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
    *lead, m, d = c.shape
    width = x[1:] - x[:-1]
    powers = np.empty((m, d))
    powers[:, 0], powers[:, 1:] = 1, width[:, None]
    pieces = np.ascontiguousarray((c * np.multiply.accumulate(powers, axis=1)).reshape(-1, d).T)  # in t = s / width
    count = pieces.shape[1]
    ends = np.empty((count, 2))
    ends[:, 0] = pieces[0]
    ends[:, 1] = pieces.sum(0)
    at = np.empty((count // m, m, 2))
    at[..., 0], at[..., 1] = x[:-1], x[1:]
    at = at.reshape(count, 2)
    if d > 2 and count:
        slope = pieces[1:] * np.arange(1.0, d)[:, None]
        hull = _bernstein(d - 1) @ slope
        noise = np.repeat(NOISE * np.abs(ends).reshape(-1, 2 * m).max(1), m)
        item = ((hull.min(0) < -noise) & (hull.max(0) > noise)).nonzero()[0]
        if item.size:
            item, t = _roots(item, slope[:, item], hull[:, item], noise[item])
        if item.size:
            back = np.searchsorted(item, item, "right") - np.arange(item.size)  # 1 for an interval's last root
            of = item % m
            ends = _with_slots(ends, item, back, _horner(pieces[:, item], t))
            at = _with_slots(at, item, back, x[of] + t * width[of])
    shape = (*lead, m, ends.shape[1])
    return Candidates(ends.reshape(shape), at.reshape(shape))


def candidates_together(breaks: ArrayLike, curves: Sequence[Array]) -> Candidates:
    """Return the candidates of several sets of curves at once, whatever their degrees; the first axis is the set.

    Parameters
    ----------
    breaks : array_like
        Ends of the intervals, ascending, shape (m + 1,) [mm].
    curves : sequence of numpy.ndarray
        Ascending coefficients of each set, all of shape (c, m, d) with its own d [unit/mm^k].

    Returns
    -------
    Candidates
        As `candidates` gives them, shape (sets, c, m, q).

    References
    ----------
    .. [1] As `candidates`; missing coefficients are zero.
    """
    rows, pieces, _ = curves[0].shape
    padded = np.zeros((len(curves), rows, pieces, max(curve.shape[-1] for curve in curves)))
    for place, curve in enumerate(curves):
        padded[place, ..., : curve.shape[-1]] = curve
    return candidates(breaks, padded)


def _with_slots(ends: Array, item: Indices, back: Indices, value: Array) -> Array:
    """Put columns between the two ends, the last ones holding ``value``, the others the left end."""
    wide = np.empty((len(ends), 2 + int(back.max())))
    wide[:, :-1] = ends[:, :1]
    wide[:, -1] = ends[:, 1]
    wide[item, -1 - back] = value
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
    if shift > 0:
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
    places, at = np.asarray(breaks, dtype=float), np.asarray(x, dtype=float)
    return _values(places, np.asarray(coefficients, dtype=float), at, np.searchsorted(places, at, side) - 1)


def both_sides(breaks: ArrayLike, coefficients: ArrayLike, x: ArrayLike) -> Array:
    """Return the values of piecewise polynomials just left and just right of given places.

    Parameters
    ----------
    breaks : array_like
        Ends of the intervals, ascending, shape (m + 1,) [mm].
    coefficients : array_like
        Ascending coefficients in x - breaks[i], shape (..., m, d) [unit/mm^k].
    x : array_like
        Places, shape (n,) or a number [mm]; at the member's ends the value inside it is meant on both sides.

    Returns
    -------
    numpy.ndarray
        Values, shape (..., 2, n), or (..., 2) for a single place: left, then right.

    References
    ----------
    .. [1] As `evaluate`.

    Examples
    --------
    >>> both_sides([0.0, 1.0, 2.0], [[[1.0], [3.0]]], 1.0)
    array([[1., 3.]])
    """
    places, at = np.asarray(breaks, dtype=float), np.asarray(x, dtype=float)
    piece = np.array([places.searchsorted(at, "left"), places.searchsorted(at, "right")]) - 1
    return _values(places, np.asarray(coefficients, dtype=float), at, piece)


def _values(breaks: Array, c: Array, at: Array, piece: Indices) -> Array:
    """Return the polynomials of the given intervals at some places; beyond the member, those of its ends."""
    piece = np.minimum(np.maximum(piece, 0), len(breaks) - 2)
    s = at - breaks[piece]
    chosen = c.take(piece, axis=-2)
    value = chosen[..., -1].copy()
    for power in range(c.shape[-1] - 2, -1, -1):
        value *= s
        value += chosen[..., power]
    return value


def _horner(c: Array, t: Array) -> Array:
    """Return polynomials at t; the first axis of ``c`` holds the ascending coefficients."""
    value = c[-1] * t
    for coefficient in c[-2:0:-1]:
        value += coefficient
        value *= t
    value += c[0]
    return np.asarray(value, dtype=np.float64)


@lru_cache
def _bernstein(n: int) -> Array:
    """Return the matrix that turns n ascending coefficients on 0..1 into Bernstein coefficients."""
    return np.array([[comb(j, i) / comb(n - 1, i) if i <= j else 0.0 for i in range(n)] for j in range(n)])


@lru_cache
def _halves(n: int) -> tuple[Array, Array]:
    """Return the matrices that give the Bernstein coefficients of the left and the right half."""
    left = np.array([[comb(j, i) / 2.0**j if i <= j else 0.0 for i in range(n)] for j in range(n)])
    return left, left[::-1, ::-1].copy()


def _roots(item: Indices, slope: Array, hull: Array, noise: Array) -> tuple[Indices, Array]:
    """Return the sign changes inside 0..1 of each slope (one a column): the owner's number (ascending) and t."""
    # A slope of nothing but rounding at an end takes its neighbour's sign: the end is a candidate in any case.
    for end, inner in ((0, 1), (-1, -2)):
        flat = np.abs(hull[end]) <= noise
        if flat.any():
            hull[end, flat] = hull[inner, flat]
    above = hull > 0
    turn = above[1:] != above[:-1]
    changes = turn.sum(0)
    if (changes == 1).all():
        rising = above[-1]
        low, high = np.zeros(item.size), np.ones(item.size)
        # Where the control polygon crosses zero: exact for a straight slope, near enough for Newton otherwise.
        left = turn.argmax(0)
        column = np.arange(item.size)
        before, after = hull[left, column], hull[left + 1, column]
        t = (left + before / (before - after)) / len(turn)
    else:
        item, slope, low, high, rising = _isolate(item, slope, hull, changes)
        t = 0.5 * (low + high)
    t = _polish(slope, t, low, high, rising)
    inside = (t > EDGE) & (t < 1 - EDGE)
    return (item, t) if inside.all() else (item[inside], t[inside])


def _isolate(
    item: Indices, slope: Array, hull: Array, changes: Indices
) -> tuple[Indices, Array, Array, Array, NDArray[np.bool_]]:
    """Halve intervals until each holds one change of sign.

    Twenty-four halvings separate all but double roots, where the curve has no extreme anyway.
    """
    to_left, to_right = _halves(len(hull))
    which, low, size = np.arange(item.size), np.zeros(item.size), 1.0
    found: list[tuple[Indices, Array, Array, NDArray[np.bool_]]] = []
    for _ in range(24):
        single, many = changes == 1, changes > 1
        found.append((which[single], low[single], low[single] + size, hull[-1, single] > 0))
        if not many.any():
            break
        size /= 2
        which = np.concatenate([which[many], which[many]])
        low = np.concatenate([low[many], low[many] + size])
        left, right = to_left @ hull[:, many], to_right @ hull[:, many]
        right[0] = left[-1]  # one value at the shared end, so that a root there is found once
        hull = np.concatenate([left, right], axis=1)
        above = hull > 0
        changes = (above[1:] != above[:-1]).sum(0)
    which, low, high, rising = (np.concatenate(parts) for parts in zip(*found, strict=True))
    order = np.lexsort((low, which))
    which = which[order]
    return item[which], slope[:, which], low[order], high[order], rising[order]


def _polish(slope: Array, t: Array, low: Array, high: Array, rising: NDArray[np.bool_]) -> Array:
    """Return the root in each bracket: Newton's method, and inside the brackets where that strays."""
    both = np.zeros((len(slope), 2, t.size))  # slope and its derivative, evaluated together
    both[:, 0] = slope
    np.multiply(slope[1:], np.arange(1.0, len(slope))[:, None], out=both[:-1, 1])
    first = t
    with np.errstate(divide="ignore", invalid="ignore"):
        for _ in range(8):
            value, bend = _horner(both, t)
            step = value / bend
            t = t - step
            if not np.abs(step).max(initial=0.0) >= SETTLED:
                break
        if not ((t >= low) & (t <= high) & (np.abs(step) < SETTLED)).all():
            t = _polish_inside(both, first, low, high, rising)
    return t


def _polish_inside(both: Array, t: Array, low: Array, high: Array, rising: NDArray[np.bool_]) -> Array:
    """Newton's method kept inside its bracket; halving where it has not settled in 10 steps."""
    step = high - low
    for count in range(70):
        value, bend = _horner(both, t)
        past = (value > 0) == rising
        high, low = np.where(past, t, high), np.where(past, low, t)
        after = t - value / bend
        stray = ~((after >= low) & (after <= high))
        if count >= 10:
            stray |= step > 1e-6
        after = np.where(stray, 0.5 * (low + high), after)
        step, t = np.abs(after - t), after
        if step.max(initial=0.0) < SETTLED:
            break
    return t
