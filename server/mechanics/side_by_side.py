"""Beams side by side, tied upright by fasteners that give: what each carries, and what the ties hand over.

Units: N, mm; deflection and loads downward positive, sagging moments positive. Every beam bends by itself about its own
centroid; shear deformation and torsion are left out.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.beam_model import Couple, LineLoad, Load, PointLoad, Support

Array = NDArray[np.float64]
CELLS = 60  # elements of equal length laid over the member, beside the places where something stands
SAME = 1e-7  # of the length: places that are one


@dataclass(frozen=True, slots=True)
class Tie:
    """Fasteners at one place that hold two beams to one another.

    Parameters
    ----------
    first, second : int
        The beams, counted from 0 [-].
    at : float
        Where they stand [mm].
    stiffness : float
        Force per movement of the second against the first [N/mm].
    """

    first: int
    second: int
    at: float
    stiffness: float


@dataclass(frozen=True)
class SideBySide:
    """What the beams and ties do in each case.

    Parameters
    ----------
    places : numpy.ndarray
        Nodes, (k,) [mm].
    deflection : numpy.ndarray
        Of every beam at the nodes, (n, k, c) [mm].
    moment : numpy.ndarray
        Of every beam left and right of each node, (n, 2, k, c) [N*mm].
    tie : numpy.ndarray
        Force by which the first beam presses down on the second, (t, c) [N].
    """

    places: Array
    deflection: Array
    moment: Array
    tie: Array


def solve_side_by_side(
    length: float,
    EI: Sequence[float],
    bears: Sequence[bool],
    supports: Sequence[Support],
    ties: Sequence[Tie],
    cases: Sequence[Sequence[Load]],
) -> SideBySide:
    r"""Solve beams of which some alone rest on the supports and take the loads, the others hanging on the ties.

    .. math:: EI_i y_i'''' = p_i + \sum_t \pm F_t \delta(x - x_t), \qquad F_t = k_t (y_{first} - y_{second})

    Parameters
    ----------
    length : float
        Length of all beams [mm].
    EI : sequence of float
        Bending stiffness of each beam [N*mm2].
    bears : sequence of bool
        Whether a beam rests on the supports and takes the loads, shared by EI among those that do.
    supports : sequence of Support
        As the beam solver has them [mm, N/mm].
    ties : sequence of Tie
        Fasteners between the beams [mm, N/mm].
    cases : sequence of sequence of Load
        Loads of each case [N, N/mm, N*mm, mm].

    Returns
    -------
    SideBySide
        Exact at the nodes up to rounding; between them the moment of a line load bends by no more than its load on one
        element does.

    Raises
    ------
    InputError
        If nothing bears, or a beam can move: it needs two ties at least.

    Notes
    -----
    Cubic elements with consistent loads are exact at their ends for straight-line loads.

    References
    ----------
    .. [1] O. C. Zienkiewicz and R. L. Taylor, "The Finite Element Method", vol. 1 (2000), 1 and 10; from memory.
    """
    from scipy.linalg import LinAlgError, solveh_banded

    stiffness = np.asarray(EI, dtype=float)
    borne = np.asarray(bears, dtype=bool)
    if not borne.any():
        raise InputError("bears", "no beam bears; name one at least.")
    places = _nodes(length, supports, ties, cases)
    n, k = len(stiffness), len(places)
    band = np.zeros((4 * n, 2 * n * k))  # lower form: band[i - j, j]
    h = np.diff(places)
    for beam, own in enumerate(stiffness):
        _add_beam(band, beam, n, own, h)
    for tie in ties:
        _add_tie(band, tie, n, int(np.abs(places - tie.at).argmin()))
    part = np.where(borne, stiffness, 0.0) / stiffness[borne].sum()
    load = np.stack([_loads(each, places) for each in cases], axis=-1)  # (k, 2, c)
    rhs = (load[:, None] * part[None, :, None, None]).reshape(2 * n * k, -1)
    for support in supports:
        _hold(band, rhs, support, int(np.abs(places - support.at).argmin()), part, n)
    try:
        u = solveh_banded(band, rhs, lower=True)
    except LinAlgError as error:
        raise InputError("ties", "a beam can move freely; every beam needs supports, or two ties at least.") from error
    moved = u.reshape(k, n, 2, -1)
    moment = np.stack([_moments(moved[:, i], part[i], cases, places, own) for i, own in enumerate(stiffness)])
    force = np.array(
        [
            tie.stiffness * (moved[place, tie.first, 0] - moved[place, tie.second, 0])
            for tie in ties
            for place in [int(np.abs(places - tie.at).argmin())]
        ]
    ).reshape(len(ties), len(cases))
    return SideBySide(places, moved[:, :, 0].transpose(1, 0, 2), moment, force)


def _nodes(length: float, supports: Sequence[Support], ties: Sequence[Tie], cases: Sequence[Sequence[Load]]) -> Array:
    at = [*np.linspace(0, length, CELLS + 1).tolist()]
    special = [0.0, length, *(s.at for s in supports), *(t.at for t in ties)]
    for case in cases:
        for load in case:
            special += [load.start, load.end] if isinstance(load, LineLoad) else [load.at]
    kept = np.unique(np.clip(special, 0, length))
    kept = kept[np.append(True, np.diff(kept) > SAME * length)]
    gap = length / CELLS / 4  # an even node that stands close to a special one is left out
    even = [x for x in at if np.abs(kept - x).min() > gap]
    return np.sort(np.concatenate([kept, even]))


def _add_beam(band: Array, beam: int, n: int, EI: float, h: Array) -> None:
    """Add the elements of one beam; unknowns of a node are y and slope of every beam in turn."""
    one = np.ones_like(h)
    full = (
        EI
        / h**3
        * np.array(
            [
                [12 * one, 6 * h, -12 * one, 6 * h],
                [6 * h, 4 * h * h, -6 * h, 2 * h * h],
                [-12 * one, -6 * h, 12 * one, -6 * h],
                [6 * h, 2 * h * h, -6 * h, 4 * h * h],
            ]
        )
    )
    first = 2 * n * np.arange(len(h)) + 2 * beam
    dofs = [first, first + 1, first + 2 * n, first + 2 * n + 1]
    for r in range(4):
        for c in range(r + 1):
            np.add.at(band, (dofs[r] - dofs[c], dofs[c]), full[r, c])


def _add_tie(band: Array, tie: Tie, n: int, node: int) -> None:
    a, b = sorted((2 * n * node + 2 * tie.first, 2 * n * node + 2 * tie.second))
    band[0, a] += tie.stiffness
    band[0, b] += tie.stiffness
    band[b - a, a] -= tie.stiffness


def _hold(band: Array, rhs: Array, support: Support, node: int, part: Array, n: int) -> None:
    """Hold the beams that bear: a spring is shared among them as the load is."""
    for beam in np.flatnonzero(part > 0):
        y = 2 * n * node + 2 * int(beam)
        if support.kind == "spring":
            band[0, y] += support.stiffness * part[beam]
            continue
        for dof in (y, y + 1) if support.kind == "fixed" else (y,):
            scale = band[0, dof]
            reach = min(band.shape[0], band.shape[1] - dof)
            band[:reach, dof] = 0.0
            for before in range(1, min(band.shape[0], dof + 1)):
                band[before, dof - before] = 0.0
            band[0, dof], rhs[dof] = scale, 0.0


def _loads(case: Sequence[Load], places: Array) -> Array:
    """Force and turning moment (by slope, clockwise) at every node, (k, 2)."""
    found = np.zeros((len(places), 2))
    for load in case:
        if isinstance(load, PointLoad):
            found[np.abs(places - load.at).argmin(), 0] += load.value
        elif isinstance(load, Couple):
            found[np.abs(places - load.at).argmin(), 1] -= load.value
    w, v = _spread(case, places)
    h = np.diff(places)
    found[:-1, 0] += h * (7 * w + 3 * v) / 20
    found[:-1, 1] += h**2 * (3 * w + 2 * v) / 60
    found[1:, 0] += h * (3 * w + 7 * v) / 20
    found[1:, 1] -= h**2 * (2 * w + 3 * v) / 60
    return found


def _spread(case: Sequence[Load], places: Array) -> tuple[Array, Array]:
    """Line load at both ends of every element."""
    w, v = np.zeros(len(places) - 1), np.zeros(len(places) - 1)
    middle = 0.5 * (places[1:] + places[:-1])
    for load in case:
        if isinstance(load, LineLoad) and load.end > load.start:
            inside = (middle > load.start) & (middle < load.end)
            slope = (load.value_end - load.value_start) / (load.end - load.start)
            w += inside * (load.value_start + slope * (places[:-1] - load.start))
            v += inside * (load.value_start + slope * (places[1:] - load.start))
    return w, v


def _moments(u: Array, part: float, cases: Sequence[Sequence[Load]], places: Array, EI: float) -> Array:
    """Moment of one beam left and right of every node, (2, k, c): -EI y'' of the elements, less what is fixed."""
    h = np.diff(places)[:, None]
    y1, s1, y2, s2 = u[:-1, 0], u[:-1, 1], u[1:, 0], u[1:, 1]
    spread = [_spread(case, places) for case in cases]
    w, v = (np.stack([each[i] for each in spread], axis=-1) * part for i in (0, 1))
    start = EI / h**2 * (6 * y1 + 4 * h * s1 - 6 * y2 + 2 * h * s2) - h**2 * (3 * w + 2 * v) / 60
    stop = EI / h**2 * (6 * y1 + 2 * h * s1 - 6 * y2 + 4 * h * s2) + h**2 * (2 * w + 3 * v) / 60
    found = np.zeros((2, len(places), u.shape[-1]))
    found[1, :-1], found[0, 1:] = start, -stop
    return found
