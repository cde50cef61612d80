"""The equations of the member: what each part between two key places does, and what holds at those places.

Key places are the member's ends, its supports, its hinges and steep changes of stiffness. The unknowns are the
deflection y, the rotation psi of the section, the moment M and the shear V just right of each key place.
Displacements and forces stand side by side, so stiffness enters only as flexibility 1/EI and 1/GA: a very stiff
part, a very soft one or a stiff spring loses no digits to its neighbours, as it would in a matrix of stiffnesses.
Units: N, mm.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.beam_loads import Grid

Array = NDArray[np.float64]
BANDED_FROM = 48  # unknowns from which a banded solution pays for its import
BAND = 5
_FACTORIALS = np.arange(1.0, 6.0)[:, None]

# What holds at a key place: factors on the state just left of it and just right of it, rows y, psi, M, V.
_FREE, _PIN, FIXED, _SPRING, HINGE, _HINGED_PIN, _HINGED_SPRING = range(7)
SPRINGS = (_SPRING, _HINGED_SPRING)
BEFORE, AFTER = np.zeros((7, 4, 4)), np.zeros((7, 4, 4))
BEFORE[:], AFTER[:] = -np.eye(4), np.eye(4)  # nothing there: the state passes through
for _kind in (HINGE, _HINGED_PIN, _HINGED_SPRING):  # psi may jump; M is zero on both sides
    BEFORE[_kind, 1], AFTER[_kind, 1] = [0, 0, 1, 0], 0
    BEFORE[_kind, 2], AFTER[_kind, 2] = 0, [0, 0, 1, 0]
BEFORE[FIXED, 1], AFTER[FIXED, 1] = [0, 1, 0, 0], 0  # psi is zero on both sides; M may jump
BEFORE[FIXED, 2], AFTER[FIXED, 2] = 0, [0, 1, 0, 0]
for _kind in (_PIN, FIXED, _HINGED_PIN):  # y is zero; V may jump
    BEFORE[_kind, 3], AFTER[_kind, 3] = 0, [1, 0, 0, 0]
LOADED = np.ones((7, 4, 1))  # a load on a support or a couple on a fixed one goes straight into the reaction
LOADED[[_PIN, FIXED, _HINGED_PIN], 3] = LOADED[FIXED, 2] = 0


@dataclass(frozen=True)
class Sweep:
    """Running integrals of the loads from each key place on, with unit M and unit V as two further rows.

    Parameters
    ----------
    start : numpy.ndarray
        V, M, psi, y just right of each break, counted from the key place before it, for each of k sets of stiffnesses,
        shape (4, k, c + 2, m) [N, N*mm, -, mm]; row c belongs to M = 1 at the key place, row c + 1 to V = 1.
    end : numpy.ndarray
        The same just left of the next key place, shape (4, k, c + 2, parts).
    """

    start: Array
    end: Array


def sweep(grid: Grid) -> Sweep:
    """Integrate load to shear, moment, rotation and deflection over every part between key places.

    Parameters
    ----------
    grid : Grid
        Breaks, stiffnesses and loads [N, mm].

    Returns
    -------
    Sweep
        Running integrals.

    Notes
    -----
    dV/dx = -w, dM/dx = V, dpsi/dx = -M/EI, dy/dx = psi + V/GA.

    References
    ----------
    .. [1] S. P. Timoshenko, "Strength of Materials", part I, 3rd ed. (1955), articles 32 and 39.
    """
    f, g = grid.bending[:, None], grid.shear[:, None]  # (k, 1, m)
    _, cases, m = grid.load.shape
    start, change = np.zeros((2, 4, len(f), cases + 2, m))
    V, M, psi, y = start
    dV, dM, dpsi, dy = change
    parts = [(low, high) for low, high in zip(grid.first, grid.stop, strict=True) if high - low > 1]

    def add_up(level: Array, steps: Array) -> None:
        rows, sums = steps.reshape(-1, m), level.reshape(-1, m)  # views: both lie in one piece
        for low, high in parts:
            rows[:, low : high - 1].cumsum(1, out=sums[:, low + 1 : high])

    powers = np.multiply.accumulate(grid.width / _FACTORIALS)  # d, d^2/2, d^3/6, ...
    d, d2, d3 = powers[:3]
    # Integrals of the line load alone over each interval, one for each of V, M, psi, y: (4, c, m).
    spread = grid.load[0] * powers[:4, None] + grid.load[1] * powers[1:, None]
    dV[:, :cases] = -spread[0]
    steps = dV.copy()
    steps[:, :cases, :-1] -= grid.force[:, 1:-1]
    add_up(V, steps)
    V[:, -1] += 1
    np.multiply(V, d, out=dM)
    dM[:, :cases] -= spread[1]
    steps = dM.copy()
    steps[:, :cases, :-1] -= grid.couple[:, 1:-1]
    add_up(M, steps)
    M[:, -2] += 1
    np.multiply(M, -d, out=dpsi)
    dpsi -= V * d2
    dpsi[:, :cases] += spread[2]
    dpsi *= f
    add_up(psi, dpsi)
    np.multiply(M, -d2, out=dy)
    dy -= V * d3
    dy[:, :cases] += spread[3]
    dy *= f
    dy += psi * d
    dy += dM * g
    add_up(y, dy)
    last = np.subtract(grid.stop, 1)
    return Sweep(start, start.take(last, 3) + change.take(last, 3))


def assemble(grid: Grid, swept: Sweep) -> tuple[Array, Array, Array]:
    """Return the matrices, the right-hand sides and the scales of the unknowns, for each of k sets of stiffnesses.

    Parameters
    ----------
    grid : Grid
        Breaks, stiffnesses, supports and loads [N, mm].
    swept : Sweep
        Running integrals of the loads.

    Returns
    -------
    tuple of numpy.ndarray
        Matrices (k, 4 K, 4 K), right-hand sides (k, 4 K, c), and the units of y, psi, M, V per newton, (k, 4).

    References
    ----------
    .. [1] S. P. Timoshenko, "Strength of Materials", part II, 3rd ed. (1956), chapter 1 (initial parameters).
    """
    K, cases, sets = len(grid.key), grid.load.shape[1], len(grid.bending)
    length = float(grid.breaks[-1])
    reach = length / (K - 1)
    softness = (grid.bending @ grid.width / length).tolist()
    scale = np.array([(reach**3 * soft, reach**2 * soft, reach, 1.0) for soft in softness])
    end = swept.end[::-1].transpose(1, 3, 0, 2) / scale[:, None, :, None]  # (k, parts, y psi M V, rows)
    T = np.zeros((sets, K - 1, 4, 4))
    np.multiply(end[:, :, :, cases:], scale[0, 2:], out=T[:, :, :, 2:])
    T[:, :, 0, 0] = T[:, :, 1, 1] = 1
    T[:, :, 0, 1] = T[:, :, 2, 3]  # the length of the part
    left, right = BEFORE[grid.kind[1:]], np.empty((sets, K, 4, 4))
    right[:] = AFTER[grid.kind]
    loads = np.zeros((sets, K, 4, cases))
    loads[:, :, 2] = grid.couple[:, grid.key].T / -reach
    loads[:, :, 3] = -grid.force[:, grid.key].T
    loads *= LOADED[grid.kind]
    carried = left @ T
    loads[:, 1:] -= left @ end[:, :, :, :cases]
    for place, stiffness in grid.springs:  # V jumps by k y; divided so that neither a soft nor a stiff spring swamps
        k = stiffness * scale[:, :1]
        right[:, place, 3, :1] = -k
        right[:, place, 3] /= 1 + k
        loads[:, place, 3] /= 1 + k
        if place:
            carried[:, place - 1, 3] /= 1 + k
    A = np.zeros((sets, 4 * K, 4 * K))
    A[:, :2, :4] = right[:, 0, 2:]
    # Every further key place has 4 rows, from 2 above its own unknowns on, over the unknowns before it and its own.
    whole, row, column = A.strides
    blocks = np.ndarray((sets, K - 1, 4, 8), A.dtype, A, 2 * row, (whole, 4 * (row + column), row, column))
    blocks[..., :4], blocks[..., 4:] = carried, right[:, 1:]
    A[:, -2, -2] = A[:, -1, -1] = 1  # no moment and no shear beyond the right end
    rhs = np.zeros((sets, 4 * K, cases))
    rhs[:, :-2] = loads.reshape(sets, 4 * K, cases)[:, 2:]
    rows = np.abs(A).max(-1)[..., None]
    A /= rows
    rhs /= rows
    return A, rhs, scale


def solve_system(A: Array, rhs: Array, *, banded: bool = True) -> Array:
    """Return the solution of the member's equations, refined once.

    Parameters
    ----------
    A : numpy.ndarray
        Matrices, shape (..., n, n), entries only within 5 places of the diagonal where they are ``banded`` [-].
    rhs : numpy.ndarray
        Right-hand sides, one a column, shape (..., n, c) [N].
    banded : bool
        Whether a large system may be solved by its band [-].

    Returns
    -------
    numpy.ndarray
        Solution, one column a right-hand side, shape (..., n, c) [N].

    Raises
    ------
    InputError
        If the equations cannot be solved in floating point.

    Notes
    -----
    One step of refinement in working precision makes the result as good as the rounding of each single entry
    allows, whatever the scale of its row or column.

    References
    ----------
    .. [1] R. D. Skeel, "Iterative refinement implies numerical stability for Gaussian elimination",
       Math. Comp. 35 (1980), 817-832.
    """
    try:
        if not banded or A.shape[-1] < BANDED_FROM:
            x = np.linalg.solve(A, rhs)
            x += np.linalg.solve(A, rhs - A @ x)
        else:
            x = np.array([_solve_banded(*each) for each in zip(A, rhs, strict=True)])
    except np.linalg.LinAlgError:
        x = np.full_like(rhs, np.nan)
    if not np.isfinite(x).all():
        raise InputError(
            "supports",
            "the member's equations cannot be solved: its stiffnesses, springs or loads differ too much in size; bring"
            " them closer together.",
        )
    return np.asarray(x, dtype=np.float64)


def _solve_banded(A: Array, rhs: Array) -> Array:
    from scipy.linalg import LinAlgError, get_lapack_funcs

    n = len(A)
    band = np.zeros((3 * BAND + 1, n))
    for offset in range(-BAND, BAND + 1):
        diagonal = np.diagonal(A, offset)
        band[2 * BAND - offset, max(offset, 0) : max(offset, 0) + len(diagonal)] = diagonal
    factor, apply = get_lapack_funcs(("gbtrf", "gbtrs"), (A, rhs))
    lu, pivots, info = factor(band, BAND, BAND)
    if info:
        raise LinAlgError
    x, _ = apply(lu, BAND, BAND, rhs, pivots)
    correction, _ = apply(lu, BAND, BAND, rhs - A @ x, pivots)
    result: Array = x + correction
    return result
