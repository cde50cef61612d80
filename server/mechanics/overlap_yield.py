r"""A bond that is elastic up to a yield stress in shear and then gives way without more: strength by strain limit.

Units: N, mm, MPa. The flow in the bond is :math:`q = \max(-q_y, \min(q_y, k_s s))`; the joint holds until the slip
somewhere reaches :math:`s_u = \gamma_u t_a`, the total shear strain limit times the bond line. Peel stays elastic.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError
from server.mechanics.overlap_load import Shares, greatest_load, summed
from server.mechanics.overlap_solver import Array, Course, Loads, Solver

MOST_ROUNDS = 60
SETTLED = 1e-7  # relative change of the load in one round
STRIDE = 4.0  # the slip aimed at grows by this from round to round, so that the yielded length grows steadily


@dataclass(frozen=True, eq=False)
class Yielded:
    """A batch of bonds at one load each: ``load`` [N]; courses of all fields as one column; where the bond yields.

    ``found`` is false for a bond without such a load (what else acts is too much already), ``settled`` for one whose
    yielded length was still moving in the last round.
    """

    load: Array
    course: Course
    flow: Array
    found: NDArray[np.bool_]
    settled: NDArray[np.bool_]


def at_limit(
    solver: Solver, loads: Loads, shares: Shares, *, yield_flow: ArrayLike, slip_limit: ArrayLike, whole: bool = True
) -> Yielded:
    r"""The least load under which the slip somewhere reaches its limit.

    Parameters
    ----------
    solver : Solver
        The bonds.
    loads : Loads
        Their load columns.
    shares : callable
        Load P of each bond [N] -> how much of each column acts, ``(bonds, columns)``.
    yield_flow : array_like
        Yield stress times width [N/mm].
    slip_limit : array_like
        Total shear strain limit times bond line [mm].
    whole : bool
        Whether forces and opening are wanted too, not only load and slip.

    Returns
    -------
    Yielded
        Load [N], courses, flow [N/mm].

    Raises
    ------
    InputError
        If the yield flow or slip limit is not above zero, or the limit lies below the slip at yield.

    Notes
    -----
    Newton's method on the load and on where the bond yields, at every collocation point: each round solves the linear
    bond with the yielded points of the round before, then takes the load from the slip limit. No unloading: the load
    grows once (deformation theory).

    References
    ----------
    .. [1] L. J. Hart-Smith, "Adhesive-bonded double-lap joints", NASA CR-112235 (1973).
    .. [2] L. J. Hart-Smith, "Adhesive-bonded single-lap joints", NASA CR-112236 (1973).
    """
    flow, limit = _batch(solver, yield_flow), _batch(solver, slip_limit)
    stiffness = np.broadcast_to(np.asarray(solver.pair.shear, dtype=float), (len(flow), 1, 1))[:, 0, 0]
    at_yield = flow / stiffness
    if not np.all((flow > 0) & (limit > 0)):
        raise InputError("shear_yield", "yield stress and strain limit must both be above zero.")
    if np.any(limit < at_yield * (1 - 1e-9)):
        raise InputError(
            "shear_strain_limit", "the strain limit lies below the strain at yield, shear_yield / shear_modulus."
        )
    course = solver.solve(loads, only_slip=True)
    target = np.minimum(limit, at_yield)
    load, found = _load_at(course, shares, target, np.zeros(len(flow)))
    first, could = load, found
    yielded = np.zeros(course.slip_inside.shape[:3], dtype=np.int8)
    settled = steady = np.zeros(len(flow), dtype=bool)
    for _ in range(MOST_ROUNDS):
        target = np.minimum(limit, STRIDE * target)
        course = solver.solve(loads, yielded, flow[:, None, None], only_slip=True)
        fresh, found = _load_at(course, shares, target, load)
        moved = _where(summed(course.slip_inside, shares(fresh)), at_yield)
        settled = (np.abs(fresh - load) <= SETTLED * np.abs(fresh)) & (target >= limit)
        steady = (moved == yielded).all(axis=(1, 2)) & (target >= limit)
        load, yielded = fresh, moved
        if np.all(settled | steady | ~found):
            break
    lost = could & (first > 0) & ~(found if not whole else settled | steady)
    if lost.any() and (whole or solver.pair.bending):
        load, yielded, held = _bracketed(solver, loads, shares, (load, yielded), lost, first, flow, at_yield, limit)
        found, settled = found | held, settled | held
        if not whole:
            course = solver.solve(loads, yielded, flow[:, None, None], only_slip=True)
    course = solver.solve(loads, yielded, flow[:, None, None]) if whole else course
    return _combined(course, load, shares, flow, stiffness, found, settled | steady)


def _bracketed(
    solver: Solver,
    loads: Loads,
    shares: Shares,
    known: tuple[Array, NDArray[np.int8]],
    lost: NDArray[np.bool_],
    first: Array,
    flow: Array,
    at_yield: Array,
    limit: Array,
) -> tuple[Array, NDArray[np.int8], NDArray[np.bool_]]:
    """For bonds on which Newton's method lost its way (very long ones, yielded almost throughout): the load between
    the one at first yield and one that is too great, by false position on the slip, the others left as they are."""
    load, yielded = known

    def beyond(tried: Array, start: NDArray[np.int8]) -> tuple[Array, NDArray[np.int8]]:
        """How far the greatest slip is beyond its limit, as a share of it, and where the bond yields."""
        act = shares(tried)
        for _ in range(FEWER_ROUNDS):
            course = solver.solve(loads, start, flow[:, None, None], only_slip=True)
            moved = _where(summed(course.slip_inside, act), at_yield)
            if (moved == start).all():
                break
            start = moved
        return np.abs(summed(course.slip, act)).max(axis=1) / limit - 1, start

    low, high = np.where(lost, first, load), np.where(lost, 2 * first, load)
    below, yielded = beyond(low, np.where(lost[:, None, None], 0, yielded).astype(np.int8))
    above, grown = beyond(high, yielded)
    for _ in range(WIDENINGS):
        short = lost & (above < 0)
        if not short.any():
            break
        low, below = np.where(short, high, low), np.where(short, above, below)
        high = np.where(short, 2 * high, high)
        above, grown = beyond(high, grown)
    held = lost & (below <= 0) & (above > 0)
    for _ in range(NARROWINGS):
        share = np.clip(np.where(held, below / np.where(held, below - above, 1.0), 0.0), 0.02, 0.98)
        middle = np.where(held, low + (high - low) * share, load)
        off, yielded = beyond(middle, yielded)
        under_it = off <= 0
        # the side that stays is halved, so that a bowed curve does not hold it for ever (Illinois)
        above = np.where(under_it, above / 2, off)
        below = np.where(under_it, off, below / 2)
        low, high = np.where(under_it, middle, low), np.where(under_it, high, middle)
        load = np.where(held, middle, load)
        near = (np.abs(off) < NARROW) | (high - low < NARROW * high)  # the slip may jump where the bond gives way
        if near[held].all():
            break
    return load, yielded, held


WIDENINGS, NARROWINGS, FEWER_ROUNDS = 12, 25, 12
NARROW = 1e-5  # of the load or slip limit


def under(solver: Solver, loads: Loads, shares: Shares, load: ArrayLike, *, yield_flow: ArrayLike) -> Yielded:
    """The same bonds under a given load [N]; ``settled`` is false where the bond cannot carry it."""
    flow = _batch(solver, yield_flow)
    stiffness = np.broadcast_to(np.asarray(solver.pair.shear, dtype=float), (len(flow), 1, 1))[:, 0, 0]
    given, at_yield = _batch(solver, load), flow / stiffness
    act = shares(given)
    course = solver.solve(loads, only_slip=True)
    yielded = _where(summed(course.slip_inside, act), at_yield)
    steady = np.zeros(len(flow), dtype=bool)
    for _ in range(MOST_ROUNDS):
        course = solver.solve(loads, yielded, flow[:, None, None], only_slip=True)
        moved = _where(summed(course.slip_inside, act), at_yield)
        steady = (moved == yielded).all(axis=(1, 2))
        yielded = moved
        if steady.all():
            break
    course = solver.solve(loads, yielded, flow[:, None, None])
    return _combined(course, given, shares, flow, stiffness, np.ones_like(steady), steady)


def _batch(solver: Solver, value: ArrayLike) -> Array:
    return np.array(np.broadcast_to(np.asarray(value, dtype=float), len(solver.mesh.nodes)))


def _where(slip: Array, at_yield: Array) -> NDArray[np.int8]:
    return (np.sign(slip) * (np.abs(slip) > at_yield[:, None, None])).astype(np.int8)


def _load_at(course: Course, shares: Shares, limit: Array, guess: Array) -> tuple[Array, NDArray[np.bool_]]:
    """The greatest load at which no slip is beyond ``limit``, and whether there is one above zero."""
    bound = np.broadcast_to(limit[:, None], course.slip.shape[:2])
    return greatest_load(course.slip, shares, -bound, bound, guess)


def _combined(
    course: Course,
    load: Array,
    shares: Shares,
    yield_flow: Array,
    stiffness: Array,
    found: NDArray[np.bool_],
    settled: NDArray[np.bool_],
) -> Yielded:
    act = shares(load)
    one = {
        name: summed(getattr(course, name), act)[..., None]
        for name in ("slip", "opening", "force", "shear", "moment", "slip_inside")
        if getattr(course, name).size
    }
    bound = yield_flow[:, None]
    flow = np.clip(stiffness[:, None] * one["slip"][..., 0], -bound, bound)
    return Yielded(load, replace(course, **one), flow, found, settled)
