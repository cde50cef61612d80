"""Torque along a member that every support holds against twist, and the part of it that warping takes.

Units: N, mm; positions from the left end. Torque is that on the face of the left part, anticlockwise as one looks at
the right-hand face of a cut; overhanging ends are free.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from server.mechanics.polygon import Array

_PLACES = np.linspace(0.0, 1.0, 17)  # looked at in every interval


@dataclass(frozen=True)
class TorqueLoad:
    """A torque at a place (``start`` = ``end``) [N mm], or spread from its value at the start to that at the end [N].

    Load x distance to the right of the shear centre: clockwise on the member where the load is downward.
    """

    start: float
    end: float
    value_start: float
    value_end: float


def torque(breaks: Array, supports: Sequence[float], GJ: Array, loads: Sequence[TorqueLoad]) -> Array:
    r"""Torque by Saint-Venant: between supports the twist of both ends is nil.

    .. math:: T(x) = \sum_{left} t + c_k, \qquad \int_k \frac{T}{GJ}\,dx = 0 \text{ in every span } k

    Parameters
    ----------
    breaks : numpy.ndarray
        Places where loads, supports or sections change, (m + 1,) [mm].
    supports : sequence of float
        Places that hold against twist [mm].
    GJ : numpy.ndarray
        Torsional stiffness of each interval, (m,) [N mm2].
    loads : sequence of TorqueLoad
        Torques [N mm], [N].

    Returns
    -------
    numpy.ndarray
        (m, 3) rising coefficients in x - breaks[i] [N mm / mm^k].

    References
    ----------
    .. [1] S. P. Timoshenko and J. M. Gere, Mechanics of Materials, "Statically indeterminate torsional members"; from
       memory.
    """
    x, length = np.asarray(breaks, dtype=float), float(breaks[-1])
    near = 1e-9 * length
    width, middle = np.diff(x), (x[1:] + x[:-1]) / 2
    found = np.zeros((len(width), 3))
    for load in loads:
        if load.end - load.start <= near:
            found[:, 0] += np.where(middle > load.start, load.value_start, 0.0)
            continue
        slope = (load.value_end - load.value_start) / (load.end - load.start)
        inside = (middle > load.start) & (middle < load.end)
        s = np.clip(x[:-1], load.start, load.end) - load.start
        found[:, 0] += load.value_start * s + slope * s * s / 2
        found[:, 1] += np.where(inside, load.value_start + slope * s, 0.0)
        found[:, 2] += np.where(inside, slope / 2, 0.0)
    total = sum(_whole(load, near) for load in loads)
    places = sorted(supports)
    area = (found * width[:, None] ** np.arange(1, 4) / np.arange(1, 4)).sum(axis=1)
    for left, right in pairwise(places):
        span = (middle > left) & (middle < right)
        found[span, 0] -= (area / GJ)[span].sum() / (width / GJ)[span].sum()
    found[middle > places[-1], 0] -= total
    return found


def _whole(load: TorqueLoad, near: float) -> float:
    if load.end - load.start <= near:
        return load.value_start
    return (load.value_start + load.value_end) / 2 * (load.end - load.start)


def warping_part(
    breaks: Array, supports: Sequence[float], GJ: Array, EIw: Array, found: Array, near: Array
) -> list[tuple[float, float, float]]:
    r"""The largest part of the torque that warping takes in every span and overhang.

    .. math:: GJ\,\vartheta' - EI_w\,\vartheta''' = T, \qquad T_w = -EI_w\,\vartheta'''

    Parameters
    ----------
    breaks : numpy.ndarray
        As in ``torque`` [mm].
    supports : sequence of float
        Places that hold against twist [mm].
    GJ, EIw : numpy.ndarray
        Stiffness against twist [N mm2] and against warping [N mm4] of each interval, (m,).
    found : numpy.ndarray
        (m, 3) torque, as ``torque`` gives it.
    near : numpy.ndarray
        (m,) distance from a torque at one place over which its own introduction is no beam torsion [mm].

    Returns
    -------
    list of (float, float, float)
        From, to [mm] and largest |T_w| over largest |T| [-] of every part in which there is torque.

    Notes
    -----
    Warping is free at supports and ends, and each span stands alone. At a torque that acts at one place warping takes
    the whole jump whatever the section, so a distance ``near`` on either side of it is left out.

    References
    ----------
    .. [1] V. Z. Vlasov, Thin-Walled Elastic Beams; EN 1993-1-1:2005 6.2.7 (the two parts of a torque); from memory.
    """
    x = np.asarray(breaks, dtype=float)
    middle = (x[1:] + x[:-1]) / 2
    edges = sorted({float(x[0]), float(x[-1]), *supports})
    result = []
    for left, right in pairwise(edges):
        own = np.flatnonzero((middle > left) & (middle < right))
        if own.size:
            share = _largest(x[own], np.diff(x)[own], GJ[own], EIw[own], found[own], near[own])
            if share is not None:
                result.append((left, right, share))
    return result


def _largest(start: Array, width: Array, GJ: Array, EIw: Array, found: Array, near: Array) -> float | None:
    """|T_w| over |T|: in every interval a particular solution and two exponentials, joined at the breaks."""
    length = np.sqrt(np.maximum(EIw, 1e-12 * GJ * width.max() ** 2) / GJ)  # over which warping dies away
    m = len(width)
    fade = np.exp(-width / length)
    ends = np.array((np.zeros(m), width))
    T = found[:, 0] + ends * (found[:, 1] + ends * found[:, 2])
    slope = found[:, 1] + 2 * ends * found[:, 2]
    particular, tilt = (T + 2 * length**2 * found[:, 2]) / GJ, slope / GJ
    A, b = np.zeros((2 * m, 2 * m)), np.zeros(2 * m)
    weight = EIw
    A[0, :2], b[0] = (-1.0, fade[0]), -length[0] * tilt[0, 0]
    A[-1, -2:], b[-1] = (-fade[-1], 1.0), -length[-1] * tilt[1, -1]
    for k in range(m - 1):
        row, here, there = 1 + 2 * k, slice(2 * k, 2 * k + 2), slice(2 * k + 2, 2 * k + 4)
        A[row, here], A[row, there] = (fade[k], 1.0), (-1.0, -fade[k + 1])
        b[row] = particular[0, k + 1] - particular[1, k]
        size = max(weight[k] / length[k], weight[k + 1] / length[k + 1], 1e-300)
        A[row + 1, here] = np.array((-fade[k], 1.0)) * weight[k] / length[k] / size
        A[row + 1, there] = np.array((1.0, -fade[k + 1])) * weight[k + 1] / length[k + 1] / size
        b[row + 1] = (weight[k + 1] * tilt[0, k + 1] - weight[k] * tilt[1, k]) / size
    p, q = np.linalg.solve(A, b).reshape(-1, 2).T
    jumps = np.abs(T[0, 1:] - T[1, :-1]) > 1e-9 * np.abs(T).max() if m > 1 else np.zeros(0, dtype=bool)
    places = start[1:][jumps]
    s = width[:, None] * _PLACES
    at = start[:, None] + s
    far = np.ones(at.shape, dtype=bool)
    if places.size:
        far = np.abs(at[:, :, None] - places).min(axis=2) >= near[:, None]
    whole = found[:, [0]] + s * (found[:, [1]] + s * found[:, [2]])
    rest = p[:, None] * np.exp(-s / length[:, None]) + q[:, None] * np.exp(-(width[:, None] - s) / length[:, None])
    warping = np.abs(2 * (length**2 * found[:, 2])[:, None] + GJ[:, None] * rest)
    top = float(np.abs(whole).max())
    if top <= 0 or not far.any():
        return None if top <= 0 else 1.0
    return float(warping[far].max()) / top
