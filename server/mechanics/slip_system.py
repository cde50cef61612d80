"""The equations of a layered member: one block of unknowns at every break, joined by exact solutions in between.

At each break stand the displacement of one layer and the slips of the others, and, just right of it, deflection y,
rotation psi of the section, moment M and shear V. Displacements and forces stand side by side as in
`server.mechanics.beam_system`; a hinge is two breaks at one place, for it cuts every layer. Units: N, mm.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.beam_loads import Grid
from server.mechanics.beam_system import AFTER, BEFORE, FIXED, HINGE, LOADED, SPRINGS
from server.mechanics.graph import components
from server.mechanics.slip_model import LayeredMember
from server.mechanics.slip_modes import CONSTANT, LEFT, RIGHT, Waves, shapes
from server.mechanics.slip_stacks import Indices, Stacks, Tree

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Chain:
    """Intervals and breaks in a row; every hinge stands twice.

    Parameters
    ----------
    width : numpy.ndarray
        Length of each interval, (m,) [mm].
    left : numpy.ndarray
        Break at the left end of each interval, (m,) [-].
    kind : numpy.ndarray
        What holds at each break, (K,) [-], as `beam_system` numbers it.
    load : numpy.ndarray
        Line load at the start of each interval and its slope, (2, c, m) [N/mm, N/mm2].
    force, couple : numpy.ndarray
        At each break, (c, K) [N, N*mm].
    spring : numpy.ndarray
        Stiffness at each break, (K,) [N/mm].
    softness : numpy.ndarray
        1/GA of each interval, (m,) [1/N].
    support : numpy.ndarray
        Break of each support, in the member's order [-].
    waves : Waves
        Shapes of every mode over every interval, (5, m, n).
    ends : tuple of numpy.ndarray
        Their slopes by t at both ends, and their areas, each (5, m, n).
    """

    width: Array
    left: Indices
    kind: Indices
    load: Array
    force: Array
    couple: Array
    spring: Array
    softness: Array
    support: Indices
    waves: Waves
    ends: tuple[Array, Array, Array]


def link(grid: Grid, stacks: Stacks) -> Chain:
    """Put intervals and breaks in a row.

    Parameters
    ----------
    grid : Grid
        The member cut at every place where something changes [N, mm].
    stacks : Stacks
        Its sections in modes.

    Returns
    -------
    Chain
        As the equations need them.

    References
    ----------
    .. [1] None needed: bookkeeping.
    """
    m = len(grid.width)
    kind = np.zeros(m + 1, dtype=np.intp)
    kind[grid.key] = grid.kind
    spring = np.zeros(m + 1)
    for place, stiffness in grid.springs:
        spring[grid.key[place]] = stiffness
    hinged = kind >= HINGE
    moved = np.arange(m + 1) + np.cumsum(hinged)  # a hinge's loads and support belong to its right-hand break
    K = m + 1 + int(hinged.sum())
    cases = grid.load.shape[1]
    wide: list[Array] = []
    for values in (grid.force, grid.couple):
        spread = np.zeros((cases, K))
        spread[:, moved] = values
        wide.append(spread)
    kinds, springs = np.zeros(K, dtype=np.intp), np.zeros(K)
    kinds[moved], springs[moved] = kind, spring
    waves = shapes(stacks.rate[stacks.of] * grid.width[:, None])
    return Chain(
        width=grid.width,
        left=moved[:-1],
        kind=kinds,
        load=grid.load,
        force=wide[0],
        couple=wide[1],
        spring=springs,
        softness=grid.shear[0],
        support=moved[grid.key[grid.support]],
        waves=waves,
        ends=waves.ends(),
    )


@dataclass(frozen=True)
class Loaded:
    """Moments of the line loads over every interval, (c, m): what they take from V, M, psi EI_r and y EI_r."""

    V: Array
    M: Array
    psi: Array
    y: Array


def spread_loads(chain: Chain) -> Loaded:
    """Integrate the line loads one to four times over each interval.

    Parameters
    ----------
    chain : Chain
        Intervals and loads [N, mm].

    Returns
    -------
    Loaded
        In [N, N*mm, N*mm2, N*mm3].

    References
    ----------
    .. [1] Repeated integrals of a straight line.
    """
    d, (w, slope) = chain.width, chain.load
    return Loaded(
        w * d + slope * d**2 / 2,
        w * d**2 / 2 + slope * d**3 / 6,
        w * d**3 / 6 + slope * d**4 / 24,
        w * d**4 / 24 + slope * d**5 / 120,
    )


def mode_load(chain: Chain, stacks: Stacks, which: Array) -> Array:
    """Return what the line loads alone do to each mode, (c, m, n).

    Parameters
    ----------
    chain, stacks : Chain, Stacks
        The member [N, mm].
    which : numpy.ndarray
        For the three loaded shapes: value, slope by t or area over t at one place, (3, m, n).
    """
    w, slope = chain.load
    d = chain.width[:, None]
    p = stacks.drive[stacks.of]
    constant, linear = p * which[1] * d**3, p * which[2] * d**4
    return np.asarray(-(w[..., None] * constant + slope[..., None] * linear))


@dataclass(frozen=True)
class System:
    """Block rows of the equations and their right-hand sides.

    Parameters
    ----------
    rows : numpy.ndarray
        Entries of each block row in the blocks of the break before, of its own and of the next, (K, b, 3 b).
    rhs : numpy.ndarray
        (K, b, c).
    scale : numpy.ndarray
        Unit of each unknown in a block, (b,).
    """

    rows: Array
    rhs: Array
    scale: Array


def assemble(member: LayeredMember, tree: Tree, stacks: Stacks, chain: Chain) -> System:
    """Write the equations: every layer's axial force passes each break, and the beam's own conditions.

    Parameters
    ----------
    member, tree, stacks, chain : LayeredMember, Tree, Stacks, Chain
        The member, its unknowns, sections and breaks [N, mm].

    Returns
    -------
    System
        Rows scaled to a largest entry of 1.

    Notes
    -----
    A fixed support lets no layer slide: its slip rows say so. A part that nothing holds along the member (the whole,
    or a layer lying loose) is held at one break, which asks for no force.

    References
    ----------
    .. [1] S. P. Timoshenko, "Strength of Materials", part II, 3rd ed. (1956), chapter 1 (initial parameters).
    """
    n, K, cases = len(member.layers), len(chain.kind), len(chain.force)
    b = n + 4
    rows, rhs = np.zeros((K, b, 3 * b)), np.zeros((K, b, cases))
    _axial(tree, stacks, chain, rows, rhs)
    _hold(member, tree, stacks, chain, rows, rhs)
    _bending(tree, stacks, chain, rows, rhs)
    reach = member.length / len(chain.width)
    softness = float((chain.width / stacks.tied[stacks.of]).sum()) / member.length
    heights = np.array([layer.height for layer in member.layers])
    depth = max(float(np.ptp(heights)), float(np.sqrt(stacks.loose[0] / sum(layer.EA for layer in member.layers))))
    scale = np.full(b, reach**2 * softness * depth)
    scale[n:] = reach**3 * softness, reach**2 * softness, reach, 1.0
    rows *= np.tile(scale, 3)
    size = np.maximum(rows.max(2, keepdims=True), -rows.min(2, keepdims=True))
    size[size == 0] = 1.0
    rows /= size
    rhs /= size
    return System(rows, rhs, scale)


def _axial(tree: Tree, stacks: Stacks, chain: Chain, rows: Array, rhs: Array) -> None:
    n = stacks.rate.shape[1]
    b, d, of = n + 4, chain.width, stacks.of
    Y, p = stacks.force[of], stacks.drive[of]
    lever = stacks.lever[of] @ tree.to_layers  # c in terms of the unknowns
    own, after = slice(b, b + n), slice(2 * b, 2 * b + n)
    M, V = b + n + 2, b + n + 3
    w = chain.load
    Yt = Y.transpose(0, 2, 1)
    start, stop, _ = chain.ends
    own_end, far_end = ((Y * (start[shape] / d[:, None])[:, None]) @ Yt for shape in (LEFT, RIGHT))  # alike from both
    for slope, at, sign in ((start, chain.left, 1.0), (stop, chain.left + 1, -1.0)):
        shift = 0 if slope is start else -b  # seen from the right-hand break, the interval's left one stands before
        for block, place in zip(
            (own_end, far_end) if slope is start else (far_end, own_end), (own, after), strict=True
        ):
            rows[at, :n, place.start + shift : place.stop + shift] += block
        by_shear = (Y @ (p * slope[CONSTANT] * d[:, None])[:, :, None])[:, :, 0]
        by_load = mode_load(chain, stacks, slope[CONSTANT:]) / d[:, None]
        force = Y @ by_load.transpose(1, 2, 0)
        rows[at, :n, M + shift] -= sign * lever
        if slope is stop:
            by_shear = by_shear - lever * d[:, None]
            taken = w[0] * d**2 / 2 + w[1] * d**3 / 6
            force = force + lever[:, :, None] * taken.T[:, None]
        rows[at, :n, V + shift] += sign * by_shear
        rhs[at, :n] -= sign * force


def _hold(member: LayeredMember, tree: Tree, stacks: Stacks, chain: Chain, rows: Array, rhs: Array) -> None:
    """Hold every part that is free along the member at one break, and clamp the layers at fixed supports."""
    n = len(member.layers)
    b = n + 4
    there = np.zeros((len(chain.kind), n), dtype=bool)
    there[chain.left] = stacks.present[stacks.of]
    there[chain.left + 1] |= stacks.present[stacks.of]
    fixed = np.flatnonzero(chain.kind == FIXED)
    free = ~there  # a layer that is not there has an unknown all the same
    free[fixed] = False
    node, layer = (
        np.append(own, more) for own, more in zip(np.nonzero(free), _bodies(tree, stacks, chain, there), strict=True)
    )
    hands = tree.to_layers[layer]
    grip = max(each.EA for each in member.layers) / member.length
    for unknown in range(n):
        np.add.at(rows[:, :n, b + unknown], node, grip * hands * hands[:, unknown, None])
    slips = np.flatnonzero(np.arange(n) != tree.root)
    for place in fixed:
        rows[place, slips] = 0
        rows[place, slips, b + slips] = 1
        rhs[place, slips] = 0


def _bodies(tree: Tree, stacks: Stacks, chain: Chain, there: NDArray[np.bool_]) -> tuple[Indices, Indices]:
    """Return a break and a layer of every body that hangs together along the member: hinges part all layers."""
    n = there.shape[1]
    part = np.cumsum(chain.kind >= HINGE)
    joined = np.zeros((int(part[-1]) + 1, len(tree.edges)), dtype=bool)
    np.logical_or.at(joined, part[chain.left], stacks.stiffness[stacks.of] > 0)
    ends = [(int(p * n + a), int(p * n + b)) for p, e in np.argwhere(joined) for a, b in [tree.edges[e]]]
    for place in np.flatnonzero(chain.kind == FIXED):
        clamped = (part[place] * n + np.flatnonzero(there[place])).tolist()
        ends += [(clamped[0], other) for other in clamped[1:]]
    nodes, layers = [], []
    for body in components(len(joined) * n, ends):
        p, layer = divmod(body[0], n)
        first = np.flatnonzero((part == p) & there[:, layer])
        if first.size:  # else the layer is nowhere in this part, and held as such already
            nodes.append(first[0])
            layers.append(layer)
    return np.array(nodes, dtype=np.intp), np.array(layers, dtype=np.intp)


def _bending(tree: Tree, stacks: Stacks, chain: Chain, rows: Array, rhs: Array) -> None:
    n, K = stacks.rate.shape[1], len(chain.kind)
    b, d, of, m = n + 4, chain.width, stacks.of, len(chain.width)
    f, g, p, Y = 1 / stacks.tied[of], chain.softness, stacks.drive[of], stacks.force[of]
    lever = stacks.lever[of] @ tree.to_layers
    _, _, area = chain.ends
    T = np.tile(np.eye(4), (K - 1, 1, 1))  # a hinge's two breaks: y, psi, M, V pass unchanged
    near, far = np.zeros((K - 1, 4, n)), np.zeros((K - 1, 4, n))
    load = np.zeros((K - 1, 4, len(chain.force)))
    at, taken = chain.left, spread_loads(chain)
    T[at, 0, 1] = T[at, 2, 3] = d
    T[at, 0, 2], T[at, 0, 3] = -(d**2) / 2 * f, -(d**3) / 6 * f + d * g
    T[at, 1, 2], T[at, 1, 3] = -d * f, -(d**2) / 2 * f
    T[at, 0, 3] -= (p * p * area[CONSTANT]).sum(1) * d**3
    by_load = mode_load(chain, stacks, area[CONSTANT:])
    for shape, side in ((LEFT, near), (RIGHT, far)):
        side[at, 0] = -(Y @ (p * area[shape] * d[:, None])[:, :, None])[:, :, 0]
    near[at, 0] += lever * d[:, None]
    near[at, 1], far[at, 1] = lever, -lever
    load[at, 3], load[at, 2] = -taken.V.T, -taken.M.T
    load[at, 1] = (taken.psi * f).T
    load[at, 0] = (taken.y * f - taken.M * g - (by_load * p).sum(2) * d).T
    before, after = BEFORE[chain.kind], AFTER[chain.kind].copy()
    sprung = np.isin(chain.kind, SPRINGS)
    after[sprung, 3, 0] = -chain.spring[sprung]
    outer = np.zeros((K, 4, len(chain.force)))
    outer[:, 2], outer[:, 3] = -chain.couple.T, -chain.force.T
    outer *= LOADED[chain.kind]
    outer[1:] -= before[1:] @ load
    carried, ahead, behind = before[1:] @ T, before[1:] @ near, before[1:] @ far
    # Rows M and V of a break stand in its own block, rows y and psi in the block of the break before.
    rows[:, n : n + 2, b + n : 2 * b] = after[:, 2:]
    rows[1:, n : n + 2, n:b] = carried[:, 2:]
    rows[1:, n : n + 2, :n] = ahead[:, 2:]
    rows[1:, n : n + 2, b : b + n] = behind[:, 2:]
    rhs[:, n : n + 2] = outer[:, 2:]
    rows[:-1, n + 2 :, b + n : 2 * b] = carried[:, :2]
    rows[:-1, n + 2 :, b : b + n] = ahead[:, :2]
    rows[:-1, n + 2 :, 2 * b : 2 * b + n] = behind[:, :2]
    rows[:-1, n + 2 :, 2 * b + n :] = after[1:, :2]
    rhs[:-1, n + 2 :] = outer[1:, :2]
    rows[-1, n + 2, b + n + 2] = rows[-1, n + 3, b + n + 3] = 1  # no moment and no shear beyond the right end
    assert m  # a member has at least one interval


def solve_system(system: System) -> Array:
    """Return the unknowns at every break, (K, b, c), refined once.

    Parameters
    ----------
    system : System
        Scaled block rows.

    Returns
    -------
    numpy.ndarray
        In N and mm, as `assemble` orders them.

    Raises
    ------
    InputError
        If the equations cannot be solved in floating point.

    References
    ----------
    .. [1] R. D. Skeel, "Iterative refinement implies numerical stability for Gaussian elimination",
       Math. Comp. 35 (1980), 817-832.
    """
    from scipy.linalg import get_lapack_funcs

    K, b, cases = system.rhs.shape
    N, width = K * b, 2 * b - 1
    band = banded(system)
    factor, apply = get_lapack_funcs(("gbtrf", "gbtrs"), (band, system.rhs))
    lu, pivots, info = factor(band, width, width, overwrite_ab=True)
    if info == 0:
        x, _ = apply(lu, width, width, system.rhs.reshape(N, cases), pivots)
        left, _ = apply(lu, width, width, _residual(system, x), pivots)
        x = (x + left).reshape(K, b, cases)
        if np.isfinite(x).all():
            return np.asarray(x * system.scale[:, None])
    raise InputError(
        "supports",
        "the member's equations cannot be solved: its stiffnesses, joints, springs or loads differ too much in size; "
        "bring them closer together.",
    )


def banded(system: System) -> Array:
    """Return the equations as LAPACK wants a band, with room for pivoting: (3 w + 1, N), w = 2 b - 1.

    Parameters
    ----------
    system : System
        Scaled block rows.

    References
    ----------
    .. [1] E. Anderson et al., "LAPACK Users' Guide", 3rd ed. (1999), band storage.
    """
    K, b, _ = system.rhs.shape
    width = 2 * b - 1
    wide = np.zeros(((K + 2) * b, 3 * width + 1))  # one column of the matrix a row, so that LAPACK's order is free
    r, column = np.arange(b)[:, None], np.arange(3 * b)
    for place in range(3):  # the three blocks of every block row, each written without overlap
        inside = slice(place * b, (place + 1) * b)
        target = wide[place * b : place * b + K * b].reshape(K, b, -1)
        target[:, np.arange(b), 2 * width + b + r - column[inside]] = system.rows[:, :, inside]
    return wide[b:-b].T


def _residual(system: System, x: Array) -> Array:
    K, b, cases = system.rhs.shape
    around = np.zeros((K, 3 * b, cases))
    blocks = x.reshape(K, b, cases)
    around[:, b : 2 * b] = blocks
    around[1:, :b] = blocks[:-1]
    around[:-1, 2 * b :] = blocks[1:]
    return np.asarray((system.rhs - system.rows @ around).reshape(K * b, cases))
