r"""How much an overlap holds, how that grows with its length, and from which length on it hardly does.

Units: N, mm, MPa. Strength is the axial load at which the first of the limits is reached, with whatever else acts
(moment, shear, torque, free strain) unchanged.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from server.errors import InputError, positive
from server.mechanics.overlap_laps import (
    DOUBLE,
    Action,
    Lap,
    Response,
    axial_system,
    check,
    plate_fields,
    respond,
    single_shares,
)
from server.mechanics.overlap_load import Shares, greatest_load
from server.mechanics.overlap_scarf import scarf_limits, scarf_system
from server.mechanics.overlap_solver import Array, Loads, Solver
from server.mechanics.overlap_tube import torque_system, tube_system
from server.mechanics.overlap_yield import Yielded, at_limit, under

GROWTH = 0.01  # growth of strength ...
LONGER = 1.1  # ... for an overlap this much longer, below which length is no use
FINE = 1.12  # growth of the mesh where the yielded length must be found ...
SHORTEST = 1e-4  # of the overlap to begin with; where even that does not grow, none does
REACH = 1e5  # times the longest overlap that is looked at first: beyond it there is no useful length
CLOSER = 6  # overlaps tried in each narrowing
FAIR = 1.2  # ... and where only its strength among many is wanted


@dataclass(frozen=True)
class Limits:
    """What each demand may reach [MPa]; infinite where nothing limits it."""

    shear: float = np.inf
    peel: float = np.inf
    inner: float = np.inf
    outer: float = np.inf

    def of(self, name: str) -> float:
        """The limit of one demand."""
        return float(getattr(self, name))


def strengths(response: Response, limits: Limits, *, sign: float = 1.0) -> dict[str, Array]:
    r"""The axial load at which each demand reaches its limit.

    Parameters
    ----------
    response : Response
        A batch of overlaps.
    limits : Limits
        What shear, peel and adherends resist [MPa].
    sign : float
        1 for tension, -1 for compression.

    Returns
    -------
    dict of numpy.ndarray
        By demand, loads without sign [N]: infinite where no load does, 0 where what else acts is too much already.

    Raises
    ------
    InputError
        If a limit is not above zero.

    Notes
    -----
    Newton's method on the load with the edge moments that go with it; without edge moments the first step is exact.

    References
    ----------
    .. [1] Own derivation.
    """
    return {
        name: _least_load(response, name, float(positive(name, limit, "MPa")), sign)
        for name in ("shear", "peel", "inner", "outer")
        if np.isfinite(limit := limits.of(name))
    }


def strength(response: Response, limits: Limits, *, sign: float = 1.0) -> Array:
    """The axial load at which the first of the limits is reached [N], as ``strengths``: all of them in one go."""
    names = [name for name in ("shear", "peel", "inner", "outer") if np.isfinite(limits.of(name))]
    if not names:
        return np.full(len(response.at), np.inf)
    bounds = [_bounds(response, name, float(positive(name, limits.of(name), "MPa"))) for name in names]
    fields = np.concatenate([response.fields[name] for name in names], axis=1)
    low, high = (np.concatenate(each, axis=1) for each in zip(*bounds, strict=True))
    return _load(response, fields, low, high, sign)


def _least_load(response: Response, name: str, limit: float, sign: float) -> Array:
    return _load(response, response.fields[name], *_bounds(response, name, limit), sign)


def _bounds(response: Response, name: str, limit: float) -> tuple[Array, Array]:
    """What a demand may be at every place: an upper bound below zero where nothing is left for the axial load."""
    bound = np.full(response.fields[name].shape[:2], limit)
    if name == "shear" and "shear_around" in response.fields:
        # what turns is there already, whatever the axial load
        turned = np.einsum("bxc,bc->bx", response.fields["shear_around"], response.shares(np.zeros(len(bound))))
        rest = bound**2 - turned**2
        bound = np.where((rest < 0).any(axis=1, keepdims=True), -1.0, np.sqrt(np.maximum(rest, 0.0)))
    return (np.full_like(bound, -np.inf) if name == "peel" else -bound), bound


def _load(response: Response, field: Array, low: Array, high: Array, sign: float) -> Array:
    none_left = np.asarray((high < 0).any(axis=1))
    above, below = np.where(none_left[:, None], 1.0, high), np.where(none_left[:, None], -1.0, low)
    load, _ = greatest_load(field, lambda P: response.shares(sign * P), below, above, np.zeros(len(field)))
    return np.where(none_left, 0.0, load)


def yielding(lap: Lap, lengths: Array, action: Action, growth: float = FINE) -> tuple[Solver, Loads, Shares]:
    """The solver, columns and shares of a lap whose bond may yield; axial load, or torque where ``action`` has one.

    Raises
    ------
    InputError
        For what has no method: moment or shear on double laps, scarfs and tubes, torque together with free strain.
    """
    check(lap)
    ones = np.ones(len(lengths))
    if lap.layout in ("single-lap", "strap"):
        solver, loads = axial_system(lap, lengths, action.strain, growth)
        return solver, loads, single_shares(lap, lengths, action)
    if action.moment or action.shear:
        raise InputError(
            "moment" if action.moment else "shear",
            f"a {lap.layout} that bends has no elastic-plastic method here; choose the elastic response.",
        )
    if lap.layout == "tube-lap" and action.torque:
        if action.strain:
            raise InputError("torque", "torque with a free strain has no elastic-plastic method here.")
        solver, loads = torque_system(lap, lengths, growth)
    elif lap.layout == "tube-lap":
        solver, loads = tube_system(lap, lengths, action.strain, growth)
    elif lap.layout == "scarf":
        solver, loads = scarf_system(lap, lengths, action.strain, growth)
    else:
        solver, loads = axial_system(lap, lengths, action.strain, growth)
    return solver, loads, lambda load: np.stack((load, ones), 1)


def _yield_limits(lap: Lap, lengths: Array, shear_yield: float, strain_limit: float) -> tuple[ArrayLike, ArrayLike]:
    if lap.layout == "scarf":
        return scarf_limits(lap, lengths, shear_yield, strain_limit)
    return shear_yield * lap.bond_width, strain_limit * lap.bond.thickness


def yield_strength(
    lap: Lap,
    overlap: ArrayLike,
    action: Action | None = None,
    *,
    shear_yield: float,
    strain_limit: float,
    whole: bool = True,
) -> Yielded:
    r"""The axial load (or torque over bond radius) at which the bond's shear strain reaches its limit, bond yielding.

    Parameters
    ----------
    lap : Lap
        The overlap's make [mm, MPa].
    overlap : array_like
        Overlap lengths [mm].
    action : Action, optional
        What else acts [N mm, N, -].
    shear_yield : float
        Shear stress at which the adhesive yields [MPa].
    strain_limit : float
        Total shear strain, elastic and plastic, at which it breaks [-].
    whole : bool
        Whether forces and opening are wanted too, not only load and slip.

    Returns
    -------
    Yielded
        Loads [N] with their courses.

    Raises
    ------
    InputError
        If the strain limit lies below the strain at yield, or there is no method for what acts.

    References
    ----------
    .. [1] L. J. Hart-Smith, "Adhesive-bonded single-lap joints", NASA CR-112236 (1973), and CR-112235 for double laps.
    """
    lengths = np.atleast_1d(positive("overlap", overlap, "mm"))
    solver, loads, shares = yielding(lap, lengths, action or Action(), FINE if whole else FAIR)
    flow, slip = _yield_limits(lap, lengths, shear_yield, strain_limit)
    return at_limit(solver, loads, shares, yield_flow=flow, slip_limit=slip, whole=whole)


def yielded_response(
    lap: Lap, overlap: float, load: float, action: Action, *, shear_yield: float
) -> tuple[Array, dict[str, Array]] | None:
    """Places [mm] and stresses [MPa] of a lap whose bond yields under a load [N]; None where it cannot carry it."""
    lengths = np.atleast_1d(positive("overlap", overlap, "mm"))
    solver, loads, shares = yielding(lap, lengths, action)
    found = under(solver, loads, shares, load, yield_flow=_yield_limits(lap, lengths, shear_yield, 1.0)[0])
    if not found.settled[0] or float(np.abs(found.course.slip).max()) > 1e3 * lap.bond.thickness:
        return None
    act = shares(found.load)
    summed = Loads(
        left=loads.left,
        right=loads.right,
        axial=np.einsum("bc,bc->b", loads.axial, act)[:, None],
        moment=lambda x: np.einsum("bepc,bc->bep", loads.moment(x), act)[..., None],
        mismatch=loads.mismatch,
    )
    stress = found.flow[..., None] / lap.bond_width
    if lap.layout in ("scarf", "tube-lap"):
        return found.course.at[0], {"shear": stress[0, :, 0]}
    fields = plate_fields(lap, found.course, summed, lengths)
    fields["shear"] = stress
    return found.course.at[0], {name: field[0, :, 0] for name, field in fields.items()}


@dataclass(frozen=True, eq=False)
class Curve:
    """Strength [N] against overlap [mm], and the overlap beyond which it hardly grows (None: none in reach)."""

    overlap: Array
    strength: Array
    useful: float | None


def curve(strength: Callable[[Array], Array], *, low: float, high: float, step: float = LONGER**2) -> Curve:
    r"""The run of strength over length, and the useful length.

    .. math:: \ell_u = \max\{\ell : P(1.1\,\ell) \ge 1.01\,P(\ell)\}

    Parameters
    ----------
    strength : callable
        Overlaps [mm] -> strengths [N].
    low, high : float
        Overlaps to begin with [mm]; the range is widened where it does not hold the useful length.
    step : float
        Ratio of neighbouring overlaps [-].

    Returns
    -------
    Curve
        The overlaps tried, strengths, useful length.

    Raises
    ------
    InputError
        If the range is empty.

    References
    ----------
    .. [1] The definition is the program's own: growth under 1 % for 10 % more overlap.
    """
    low, high = float(positive("low", low, "mm")), float(positive("high", high, "mm"))
    if not high > low:
        raise InputError("high", "the range of overlaps is empty.")
    count = int(np.ceil(np.log(high / low) / np.log(step))) + 2
    overlap = np.asarray(low * step ** np.arange(count), dtype=float)
    found = strength(overlap)
    for widening in range(6):
        grows = _growing(overlap, found)
        steps = np.arange(1.0, 9 * 2**widening)
        if not grows.any() and overlap[0] > SHORTEST * low:
            more = np.asarray(overlap[0] * step ** -steps[::-1], dtype=float)
            overlap, found = np.concatenate((more, overlap)), np.concatenate((strength(more), found))
        elif grows[-1]:
            more = np.asarray(overlap[-1] * step**steps, dtype=float)
            overlap, found = np.concatenate((overlap, more)), np.concatenate((found, strength(more)))
        elif grows.any():
            last = int(np.flatnonzero(grows)[-1])
            if overlap[last] > REACH * high:  # where strength grows with length for ever, only rounding ends it
                break
            return Curve(overlap, found, _crossing(strength, overlap[last] / step**0.5, overlap[last + 1] * step**0.5))
    return Curve(overlap, found, None)


def _growing(overlap: Array, found: Array) -> Array:
    """Whether the strength still grows by the bound, at every overlap but the last; from the logarithmic slope."""
    safe = np.log(np.maximum(found, 1e-300))
    slope = np.diff(safe) / np.diff(np.log(overlap))
    return np.asarray((slope * np.log(LONGER) >= np.log1p(GROWTH)) & (found[1:] > 0))


def _crossing(strength: Callable[[Array], Array], low: float, high: float) -> float:
    """The last overlap in the range from which 10 % more still gains the bound; narrowed twice."""
    for _ in range(2):
        tried = np.geomspace(low, high, CLOSER)
        found = strength(np.concatenate((tried, LONGER * tried)))
        now, then = found[:CLOSER], found[CLOSER:]
        gain = np.where(now > 0, then / np.where(now > 0, now, 1.0) - 1, -1.0) - GROWTH
        over = np.flatnonzero(gain >= 0)
        if not over.size or over[-1] == CLOSER - 1:
            return high if over.size else low
        k = int(over[-1])
        part = float(gain[k] / (gain[k] - gain[k + 1]))
        low, high = float(tried[k]), float(tried[k + 1])
    return float(low * (high / low) ** part)


__all__ = [
    "DOUBLE",
    "Curve",
    "Limits",
    "curve",
    "respond",
    "strength",
    "strengths",
    "yield_strength",
    "yielded_response",
]
