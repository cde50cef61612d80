r"""Axles that travel over a member: the worst positions of a train for one action, by candidates.

A train of axles at the datum u gives the sum of its forces times the influence line at u + offset: cubics in u, whose
extremes lie at the ends of their intervals (an axle over a key place, over the place looked at, or at the end of the
stretch that carries) or at roots of a quadratic. Units: N, mm, N*mm; signs as in `server.mechanics.beam_model`.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.mechanics.beam import PointLoad
from server.mechanics.influence import Influence, Lines, shifted

Array = NDArray[np.float64]
NUDGE = 1e-8  # share of the length by which a train is moved off a support that would swallow an axle
SAME = 1e-9  # share of the length within which two positions are one
AT_ONCE = 400_000  # numbers in one batch of the search


@dataclass(frozen=True)
class Train:
    """Axles in one direction of travel, and where on the member they carry.

    Parameters
    ----------
    offsets, forces : tuple of float
        Places right of the datum [mm] and forces, downward positive [N].
    start, end : float
        An axle carries on [start, end] alone [mm].
    """

    offsets: tuple[float, ...]
    forces: tuple[float, ...]
    start: float
    end: float

    @property
    def turned(self) -> Train:
        """The same train the other way round."""
        return Train(tuple(-offset for offset in self.offsets), self.forces, self.start, self.end)

    @property
    def reach(self) -> tuple[float, float]:
        """The least and the greatest datum that puts an axle on [start, end]."""
        return self.start - max(self.offsets), self.end - min(self.offsets)


@dataclass(frozen=True)
class Placing:
    """A train at one position: its datum, and the axles that carry there, places [mm] and forces [N]."""

    at: tuple[float, ...]
    forces: tuple[float, ...]
    datum: float
    turned: bool

    def loads(self) -> list[PointLoad]:
        """The axles as loads of the beam solver."""
        return [PointLoad(at, force) for at, force in zip(self.at, self.forces, strict=True)]


@dataclass(frozen=True)
class Travel:
    """The extremes of n actions over all positions of a train: values (n,) and the positions that give them.

    ``datum`` and ``inside`` (n, axles) say where the train is and which axles carry; ``way`` is which way off that
    place the value is reached (0: exactly there).
    """

    value: Array
    datum: Array
    inside: NDArray[np.bool_]
    way: Array
    turned: NDArray[np.bool_]


Both = tuple[Travel, Travel]


def travel(lines: Lines, knots: Array, train: Train) -> Both:
    r"""Greatest and least values of actions while one train runs over the member, in both directions.

    .. math:: \max_u, \min_u \sum_k F_k\, \eta(u + o_k)\,[start \le u + o_k \le end]

    Parameters
    ----------
    lines : Lines
        Influence lines [action per N].
    knots : numpy.ndarray
        Where their cubics begin and end [mm].
    train : Train
        Axles [mm, N].

    Returns
    -------
    tuple of Travel
        The greatest and the least value of every action, with their positions.

    References
    ----------
    .. [1] None needed: extremes of piecewise cubics at ends and at roots of their derivatives.
    """
    count = (len(knots) + 3) * len(train.offsets) ** 2
    step = max(1, AT_ONCE // count)
    parts = [
        Lines(lines.x[i : i + step], lines.left[i : i + step], lines.right[i : i + step])
        for i in range(0, len(lines.x), step)
    ]
    found = [_both_ways(part, knots, train) for part in parts]
    high, low = (_stacked([each[sense] for each in found]) for sense in (0, 1))
    return high, low


def _stacked(parts: Sequence[Travel]) -> Travel:
    if len(parts) == 1:
        return parts[0]
    return Travel(*(np.concatenate(columns) for columns in zip(*(vars(each).values() for each in parts), strict=True)))


def _both_ways(lines: Lines, knots: Array, train: Train) -> Both:
    one = _one_way(lines, knots, train, False)
    if train.turned.offsets == train.offsets:
        return one
    other = _one_way(lines, knots, train.turned, True)
    high, low = (_better(a, b, sense) for a, b, sense in zip(one, other, (1, -1), strict=True))
    return high, low


def _better(one: Travel, other: Travel, sense: int) -> Travel:
    """The further of two runs, action by action; the first keeps a tie."""
    slack = SAME * np.maximum(np.abs(one.value), np.abs(other.value))
    more = sense * (other.value - one.value) > slack
    return Travel(
        *(
            np.where(more if a.ndim == 1 else more[:, None], b, a)
            for a, b in zip(vars(one).values(), vars(other).values(), strict=True)
        )
    )


def _one_way(lines: Lines, knots: Array, train: Train, turned: bool) -> Both:
    offset, force = np.array(train.offsets), np.array(train.forces)
    low, high = train.reach
    n = len(lines.x)
    common = np.concatenate([(each - offset) for each in (*knots, train.start, train.end)])
    u = np.concatenate([np.broadcast_to(common, (n, len(common))), lines.x[:, None] - offset], axis=1)
    u = np.sort(np.clip(np.where(np.isfinite(u), u, low), low, high), axis=1)
    # Between two neighbours nothing changes: the same axles carry, on the same cubics, on the same side of x.
    a, width = u[:, :-1], np.diff(u, axis=1)
    at = (a + 0.5 * width)[..., None] + offset
    inside = (at >= train.start) & (at <= train.end)
    cubic = _sum(lines, knots, at, a[..., None] + offset, inside * force)
    s = np.concatenate([np.stack([np.zeros_like(width), width]), _turns(cubic, width)])
    values = cubic[..., 0] + s * (cubic[..., 1] + s * (cubic[..., 2] + s * cubic[..., 3]))
    values[:, (width <= SAME * float(knots[-1])) | ~inside.any(2)] = np.nan  # nothing lies there, or no axle is on
    flat = np.moveaxis(values, 0, -1).reshape(n, -1)
    # Exactly where two neighbours meet, axles on both ends of [start, end] carry.
    exact, exact_inside = _exactly(lines, knots, train, u)
    on = np.concatenate([exact_inside.any(2)] * 2, axis=1)
    row = np.arange(n)

    def furthest(sense: int) -> Travel:
        worth = np.where(np.isnan(flat), -np.inf, sense * flat)
        met = np.where(on, sense * exact, -np.inf)
        pick, spot = worth.argmax(1), met.argmax(1)
        best, here = worth[row, pick], met[row, spot]
        closed = here > best + 1e-12 * np.abs(here)
        interval, which, spot = pick // len(s), pick % len(s), spot % u.shape[1]
        datum = np.where(closed, u[row, spot], a[row, interval] + s[which, row, interval])
        way = np.where(closed | (which >= 2), 0.0, np.where(which == 0, 1.0, -1.0))
        carries = np.where(closed[:, None], exact_inside[row, spot], inside[row, interval])
        return Travel(sense * np.where(closed, here, best), datum, carries, way, np.full(n, turned))

    return furthest(1), furthest(-1)


def _sum(lines: Lines, knots: Array, at: Array, origin: Array, force: Array) -> Array:
    """Coefficients of the train's action over its datum, from ``origin`` on, (n, intervals, 4)."""
    piece = np.clip(np.searchsorted(knots, at, "right") - 1, 0, len(knots) - 2)
    row = np.arange(len(lines.x))[:, None, None]
    before = at < lines.x[:, None, None]
    chosen = np.where(before[..., None], lines.left[row, piece], lines.right[row, piece])
    moved = shifted(chosen, origin - knots[piece])
    return np.asarray((moved * force[..., None]).sum(2))


def _turns(cubic: Array, width: Array) -> Array:
    """Where a cubic turns inside its interval, two places each; 0 where it does not."""
    b, c, d = cubic[..., 1], 2 * cubic[..., 2], 3 * cubic[..., 3]
    with np.errstate(divide="ignore", invalid="ignore"):
        q = -0.5 * (c + np.where(c < 0, -1.0, 1.0) * np.sqrt(np.maximum(c * c - 4 * b * d, 0.0)))
        found = np.stack([q / d, b / q])
    real = (c * c - 4 * b * d >= 0) & np.isfinite(found) & (found > 0) & (found < width)
    return np.where(real, found, 0.0)


def _exactly(lines: Lines, knots: Array, train: Train, u: Array) -> tuple[Array, NDArray[np.bool_]]:
    """Values with the train exactly at the places u, both ends of its stretch counted; first with an axle at x left
    of it, then right of it: (n, 2 q)."""
    offset, force = np.array(train.offsets), np.array(train.forces)
    at = u[..., None] + offset
    tolerance = SAME * float(knots[-1])
    inside = (at >= train.start - tolerance) & (at <= train.end + tolerance)
    at = np.clip(at, 0.0, knots[-1])
    sides = [_sum(lines, knots, at + move, at, inside * force)[..., 0] for move in (-2 * tolerance, 2 * tolerance)]
    return np.concatenate(sides, axis=1), inside


def placing(
    train: Train,
    found: Travel,
    index: int,
    influence: Influence,
    ends: Sequence[float] = (),
    *,
    exact: bool = False,
) -> Placing:
    """The axles as they stand where one action is extreme.

    Parameters
    ----------
    train : Train
        The train that travelled [mm, N].
    found : Travel
        What came of it.
    index : int
        Which action [-].
    influence : Influence
        The member; an axle exactly over a support is moved off it by a hundred-millionth of the length, to the side
        on which the extreme lies.
    ends : sequence of float
        Other places that an axle is moved off likewise: the ends of the parts looked at [mm].
    exact : bool
        Whether the axles stay where they are: a reaction is greatest with one exactly over its support [-].

    Returns
    -------
    Placing
        Places and forces of the axles that carry.

    References
    ----------
    .. [1] None needed.
    """
    turned = bool(found.turned[index])
    offsets = train.turned.offsets if turned else train.offsets
    datum, length = float(found.datum[index]), influence.beam.length
    edges = np.append(influence.supports, ends)
    over = np.abs((datum + np.array(offsets))[:, None] - edges) <= 2 * influence.beam.same_place
    if found.way[index] and over.any() and not exact:
        datum += float(found.way[index]) * NUDGE * length
    carries = found.inside[index]
    places = tuple(float(p) for p in np.clip((datum + np.array(offsets))[carries], 0.0, length))
    return Placing(places, tuple(f for f, c in zip(train.forces, carries, strict=True) if c), datum, turned)
