"""Beams that bend up and down and sideways at once, where the section couples the two.

Units: N, mm, N/mm, N*mm. The first plane is the vertical one, loads and deflection downward positive; the second is the
lateral one, loads and deflection positive to the right, and everything else likewise: a positive lateral moment puts
the right-hand side in tension. Supports and hinges act in both planes; a spring gives way vertically only.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from server.mechanics.beam import Response
from server.mechanics.beam_loads import Grid, lay_out
from server.mechanics.beam_model import Beam, Load
from server.mechanics.beam_stability import require_stable
from server.mechanics.beam_system import AFTER, BEFORE, FIXED, LOADED, SPRINGS, Array, Sweep, solve_system, sweep
from server.mechanics.polygon import Indices

_DIVISOR = np.array([1.0, 2.0, 3.0])  # shear's coefficients over these: moment's
_TWICE = np.array([-2.0, -6.0, -12.0, -20.0])  # moment's times flexibility over these: deflection's
_RIGID = {SPRINGS[0]: 1, SPRINGS[1]: 5}  # a spring holds sideways as a pin does


def bending_flexibility(EI: float, EI_lateral: float, EI_product: float) -> Array:
    r"""Curvatures per moment, down and to the right.

    .. math:: \begin{pmatrix}\kappa_v\\ \kappa_l\end{pmatrix} = \frac{1}{EI\,EI_l - EI_p^2}
              \begin{pmatrix}EI_l & EI_p\\ EI_p & EI\end{pmatrix}\begin{pmatrix}M_v\\ M_l\end{pmatrix}

    Parameters
    ----------
    EI, EI_lateral, EI_product : float
        About the neutral axis [N mm2].

    Returns
    -------
    numpy.ndarray
        (2, 2) [1/(N mm2)].

    References
    ----------
    .. [1] S. P. Timoshenko and J. M. Gere, Mechanics of Materials, "Unsymmetric beams", generalized flexure theory;
       from memory.

    Examples
    --------
    >>> (bending_flexibility(4.0, 1.0, 0.0) * 4).tolist()
    [[1.0, 0.0], [0.0, 4.0]]
    """
    return np.array([[EI_lateral, EI_product], [EI_product, EI]]) / (EI * EI_lateral - EI_product**2)


def shear_flexibility(bending: Array, energy: Array) -> Array:
    r"""Shear strains per shear force, down and to the right, from the energy of the section's field.

    .. math:: g = D^{-1} S\,U\,S\,D^{-1},\quad S = \mathrm{diag}(1, -1)

    Parameters
    ----------
    bending : numpy.ndarray
        (2, 2) curvatures per moment [1/(N mm2)].
    energy : numpy.ndarray
        (2, 2) integral of tau^2 / G per rates of curvature, up and across [N mm2 mm2].

    Returns
    -------
    numpy.ndarray
        (2, 2) [1/N].

    References
    ----------
    .. [1] Strain energy of shear, with both forces; the field's axes run up and across, those here down and right.
    """
    turned = energy * np.array([[1.0, -1.0], [-1.0, 1.0]])
    result: Array = bending @ turned @ bending
    return result


@dataclass(frozen=True, eq=False)
class _System:
    """What has been laid out: set ``i + j`` of ``swept`` is what plane i does under loads, moment and shear of plane j.

    The couplings of the two planes are alike, so three sets do: down by down, one by the other, right by right.
    """

    grid: Grid
    cases: int
    swept: Sweep
    kinds: tuple[Indices, Indices]
    bending: Array
    shear: Array


def solve_two_planes(
    beam: Beam, bending: Array, shear: Array, down: Sequence[Sequence[Load]], right: Sequence[Sequence[Load]]
) -> tuple[Response, Response]:
    r"""Solve a member in both planes together.

    .. math:: V' = -w,\quad M' = V,\quad \psi_i' = -\sum_j f_{ij} M_j,\quad y_i' = \psi_i + \sum_j g_{ij} V_j

    Parameters
    ----------
    beam : Beam
        The member: length, supports, hinges, stretches; their EI and GA are not used [mm, N/mm].
    bending : numpy.ndarray
        (n, 2, 2) curvature per moment of each stretch [1/(N mm2)].
    shear : numpy.ndarray
        (n, 2, 2) shear strain per shear force of each stretch [1/N]; zeros leave it out.
    down, right : sequence of sequence of Load
        Loads of each case in either plane [N, N/mm, N mm, mm].

    Returns
    -------
    tuple of Response
        In the vertical plane and in the lateral one, one row a case, on the same breaks.

    Raises
    ------
    InputError
        If the member can move without bending, or a load cannot be placed.

    Notes
    -----
    As ``beam.solve``: the equations are integrated exactly between key places. Small deflections; no twist; no lateral
    buckling.

    References
    ----------
    .. [1] S. P. Timoshenko, "Strength of Materials", part I, 3rd ed. (1955), chapter on bending in a plane that is not
       a plane of symmetry; from memory.
    """
    require_stable(beam)
    grid = lay_out([beam], [*down, *right])
    middles = (grid.breaks[1:] + grid.breaks[:-1]) / 2
    ends = np.array([stretch.end for stretch in beam.stretches])
    own = np.minimum(np.searchsorted(ends, middles), len(ends) - 1)
    f, g = bending[own], shear[own]
    coupled = ((0, 0, 1), (0, 1, 1))
    swept = sweep(replace(grid, bending=f[:, *coupled].T, shear=g[:, *coupled].T))
    sideways = np.array([_RIGID.get(int(kind), int(kind)) for kind in grid.kind], dtype=np.intp)
    system = _System(grid, len(down), swept, (grid.kind, sideways), f, g)
    states = _states(system)
    return _curves(system, states, 0), _curves(system, states, 1)


def _states(system: _System) -> Array:
    """Deflection, rotation, moment, shear in both planes just right of every key place: (K, 2, 4, c)."""
    grid, c = system.grid, system.cases
    K, length = len(grid.key), float(grid.breaks[-1])
    reach = length / (K - 1)
    softness = float(np.max(np.abs(system.bending)[:, (0, 1), (0, 1)] * grid.width[:, None], axis=1).sum()) / length
    scale = np.array([reach**3 * softness, reach**2 * softness, reach, 1.0])
    T, carried = np.zeros((K - 1, 2, 4, 2, 4)), np.zeros((K - 1, 2, 4, c))
    for i in (0, 1):
        T[:, i, 0, i, 0] = T[:, i, 1, i, 1] = 1
        for j in (0, 1):
            end = system.swept.end[::-1, i + j].transpose(2, 0, 1) / scale[:, None]
            rows = slice(0, 4) if i == j else slice(0, 2)
            T[:, i, rows, j, 2:] = end[:, rows, 2 * c :] * scale[2:]
            carried[:, i, rows] += end[:, rows, j * c : (j + 1) * c]
        T[:, i, 0, i, 1] = T[:, i, 2, i, 3]  # the length of the part
    left, right = np.zeros((2, K, 2, 4, 2, 4))
    loads = np.zeros((K, 2, 4, c))
    for i, kind in enumerate(system.kinds):
        left[:, i, :, i], right[:, i, :, i] = BEFORE[kind], AFTER[kind]
        mine = slice(i * c, (i + 1) * c)
        loads[:, i, 2] = grid.couple[mine, grid.key].T / -scale[2]
        loads[:, i, 3] = -grid.force[mine, grid.key].T
        loads[:, i] *= LOADED[kind]
    for place, stiffness in grid.springs:  # V jumps by k y; divided so that neither a soft nor a stiff one swamps
        k = stiffness * scale[0]
        right[place, 0, 3, 0, 0] = -k
        for each in (left, right, loads):
            each[place, 0, 3] /= 1 + k
    return _joined(left.reshape(K, 8, 8), right.reshape(K, 8, 8), T.reshape(K - 1, 8, 8), loads, carried, scale)


def _joined(left: Array, right: Array, T: Array, loads: Array, carried: Array, scale: Array) -> Array:
    """What holds at the key places put together and solved."""
    K, c = len(left), loads.shape[-1]
    side = loads.reshape(K, 8, c)
    side[1:] -= left[1:] @ carried.reshape(K - 1, 8, c)
    forces = [2, 3, 6, 7]  # moments and shears: nil beyond the ends
    A, rhs = np.zeros((8 * K, 8 * K)), np.zeros((8 * K, c))
    A[:4, :8], rhs[:4] = right[0, forces], side[0, forces]
    for n in range(1, K):
        at = slice(8 * n - 4, 8 * n + 4)
        A[at, 8 * n - 8 : 8 * n] = left[n] @ T[n - 1]
        A[at, 8 * n : 8 * n + 8] = right[n]
        rhs[at] = side[n]
    A[range(8 * K - 4, 8 * K), [8 * K - 8 + k for k in forces]] = 1
    rows = np.abs(A).max(axis=1)[:, None]
    found = solve_system(A / rows, rhs / rows, banded=False)
    result: Array = found.reshape(K, 2, 4, c) * scale[:, None]
    return result


def _curves(system: _System, states: Array, i: int) -> Response:
    """The polynomials and reactions of one plane."""
    grid, c = system.grid, system.cases
    own = np.repeat(np.arange(len(grid.first)), np.subtract(grid.stop, grid.first))
    here = states[own].transpose(1, 2, 3, 0)  # plane, y psi M V, case, interval
    moments, shears = [], []
    for j in (0, 1):
        start, mine = system.swept.start[:, 2 * j], slice(j * c, (j + 1) * c)
        V = start[0, mine] + here[j, 3] * start[0, -1]
        moments.append(start[1, mine] + here[j, 3] * start[1, -1] + here[j, 2] * start[1, -2])
        shears.append(np.stack((V, -grid.load[0, mine], grid.load[1, mine] / -2), axis=-1))
    moments = [np.concatenate((M[..., None], V / _DIVISOR), axis=-1) for M, V in zip(moments, shears, strict=True)]
    along = system.swept.start[1, 0, -1]  # distance from the key place
    deflection = np.zeros((*moments[i].shape[:2], 6))
    deflection[..., 0] = here[i, 0] + here[i, 1] * along
    deflection[..., 1] = here[i, 1]
    for j in (0, 1):
        start, mine = system.swept.start[:, i + j], slice(j * c, (j + 1) * c)
        turned = start[2:, mine] + here[j, 3] * start[2:, None, -1] + here[j, 2] * start[2:, None, -2]
        deflection[..., 0] += turned[1]
        deflection[..., 1] += turned[0]
        deflection[..., 2:] += moments[j] * (system.bending[:, i, j, None] / _TWICE)
        deflection[..., 1:4] += moments[j][..., 1:] * system.shear[:, i, j, None]
    return Response(grid.breaks, shears[i], moments[i], deflection, *_reactions(system, states[:, i], i))


def _reactions(system: _System, states: Array, i: int) -> tuple[Array, Array]:
    """Forces and couples at the supports: what the moments and shears jump by, less the loads there."""
    grid, c = system.grid, system.cases
    end, mine = system.swept.end[:, 2 * i], slice(i * c, (i + 1) * c)
    _, _, M, V = states.transpose(1, 2, 0)  # each (c, K)
    force, couple = grid.force[mine][:, grid.key] + V, -grid.couple[mine][:, grid.key] - M
    force[:, 1:] -= V[:, :-1] + end[0, mine]
    couple[:, 1:] += M[:, :-1] + V[:, :-1] * end[1, -1] + end[1, mine]
    at = grid.support
    return force[:, at], couple[:, at] * (system.kinds[i][at] == FIXED)
