r"""The layered section over each interval: what its layers and joints do, sorted into modes that do not mix.

With a the layers' axial displacement carried to one reference height, EA, EI and heights z above it,

.. math:: C a'' - K a = c V, \qquad N = C a' - c M, \qquad \psi' = -M / EI_r - c^T a'

where EI_r belongs to layers that do not slide, :math:`c = EA\,z / EI_r`, :math:`C = EA - EA\,z\,z^T EA / EI_r`, and K
holds the stiffness of the joints. Units: N, mm.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.mechanics.graph import components
from server.mechanics.slip_model import LayeredMember

Array = NDArray[np.float64]
Indices = NDArray[np.intp]
UNEQUAL = 1e4  # ratio of stiffnesses up to which squares of singular values are precise enough


@dataclass(frozen=True)
class Tree:
    """The unknowns: displacement of one layer, and the slip of every other against the one it hangs on.

    Parameters
    ----------
    edges : numpy.ndarray
        Pairs of layers that any joint joins, (e, 2) [-].
    of_joint, sign : numpy.ndarray
        The pair of each joint, and whether it names it in the same order (1) or the other (-1), (j,) [-].
    to_layers : numpy.ndarray
        T in a = T sigma, (n, n) [-].
    to_slips : numpy.ndarray
        Slip of each pair from sigma, (e, n): its column ``root`` is exactly zero [-].
    to_sigma : numpy.ndarray
        Inverse of T, (n, n) [-].
    root : int
        The layer whose displacement is an unknown itself [-].
    """

    edges: Indices
    of_joint: Indices
    sign: Array
    to_layers: Array
    to_slips: Array
    to_sigma: Array
    root: int


@dataclass(frozen=True)
class Stacks:
    """Every different section of the member, r of them, in modes, and which one each interval has.

    Parameters
    ----------
    of : numpy.ndarray
        Section of each interval, (m,) [-].
    present : numpy.ndarray
        Whether a layer is there, (r, n) [-].
    loose, tied : numpy.ndarray
        EI of the layers by themselves, and EI_r [N*mm2], (r,).
    stiffness : numpy.ndarray
        Of each pair of layers, (r, e) [N/mm2].
    own : numpy.ndarray
        Stiffness of each joint over each interval, (m, j) [N/mm2].
    rate : numpy.ndarray
        lambda of each mode, exactly zero where nothing holds it, (r, n) [1/mm].
    force : numpy.ndarray
        Y = T^T C Phi, (r, n, n) [N^0.5]: axial force from a mode, and a mode from sigma.
    slide : numpy.ndarray
        Slip of each pair from a mode, (r, e, n) [1/N^0.5].
    hold : numpy.ndarray
        Root of the stiffness times direction, (r, e, n): flow of each pair = hold @ (lambda g) [N^0.5/mm].
    drive : numpy.ndarray
        p = Phi^T c, (r, n) [1/(N^0.5 mm)].
    lever : numpy.ndarray
        c, by layer, (r, n) [1/mm].
    """

    of: Indices
    present: NDArray[np.bool_]
    loose: Array
    tied: Array
    stiffness: Array
    own: Array
    rate: Array
    force: Array
    slide: Array
    hold: Array
    drive: Array
    lever: Array


def plant(member: LayeredMember) -> Tree:
    """Choose the unknowns so that stiff joints stand alone: a tree over the layers along the stiffest joints.

    Parameters
    ----------
    member : LayeredMember
        The member [N, mm].

    Returns
    -------
    Tree
        Pairs of layers, and the change of unknowns.

    Notes
    -----
    Slips as unknowns keep their digits however small a stiff joint makes them, as a difference of displacements would
    not. Layers that no joint ties hang on the root by a pair without stiffness.

    References
    ----------
    .. [1] J. B. Kruskal, "On the shortest spanning subtree of a graph", Proc. AMS 7 (1956), 48-50.
    """
    n = len(member.layers)
    number: dict[tuple[int, int], int] = {}
    of_joint: list[int] = []
    sign: list[float] = []
    weight: list[float] = []
    for joint, table in zip(member.joints, member.tables, strict=True):
        pair = (min(joint.first, joint.second), max(joint.first, joint.second))
        place = number.setdefault(pair, len(number))
        if place == len(weight):
            weight.append(0.0)
        weight[place] += float(table[:, 2] @ (table[:, 1] - table[:, 0]))
        of_joint.append(place)
        sign.append(1.0 if joint.first == pair[0] else -1.0)
    edges = np.array(list(number), dtype=np.intp).reshape(-1, 2)
    body = list(range(n))
    near: list[list[int]] = [[] for _ in range(n)]

    def find(layer: int) -> int:
        while body[layer] != layer:
            body[layer] = body[body[layer]]
            layer = body[layer]
        return layer

    for place in sorted(range(len(edges)), key=lambda place: -weight[place]):
        a, b = (int(layer) for layer in edges[place])
        if find(a) != find(b):
            body[find(a)] = find(b)
            near[a].append(b)
            near[b].append(a)
    parent = {0: 0}
    order = [0]
    for layer in order:  # grows while it is walked
        for other in near[layer]:
            if other not in parent:
                parent[other] = layer
                order.append(other)
        if len(order) < n and layer == order[-1]:
            loose = next(other for other in range(n) if other not in parent)
            parent[loose] = 0
            order.append(loose)
    to_layers, to_sigma = np.zeros((n, n)), np.eye(n)
    to_layers[0, 0] = 1
    for layer in order[1:]:
        to_layers[layer] = to_layers[parent[layer]]
        to_layers[layer, layer] = 1
        to_sigma[layer, parent[layer]] = -1
    to_slips = to_layers[edges[:, 1]] - to_layers[edges[:, 0]]
    return Tree(edges, np.array(of_joint, dtype=np.intp), np.array(sign), to_layers, to_slips, to_sigma, 0)


def stack(member: LayeredMember, tree: Tree, breaks: Array) -> Stacks:
    r"""Sort every different section into modes.

    .. math:: \Phi^T C \Phi = 1, \quad \Phi^T K \Phi = \lambda^2

    Parameters
    ----------
    member : LayeredMember
        The member [N, mm].
    tree : Tree
        Its unknowns.
    breaks : numpy.ndarray
        Ends of the intervals, (m + 1,) [mm].

    Returns
    -------
    Stacks
        The different sections in modes.

    Notes
    -----
    The modes are singular vectors of :math:`\sqrt k\,G\,C^{-1/2}`, not eigenvectors of K: the joints' stiffness enters
    by its root, so joints that differ by 1e12 leave ten digits. The number of modes that nothing holds is counted on
    the graph of the joints, never guessed from a small number.

    References
    ----------
    .. [1] G. H. Golub and C. F. Van Loan, "Matrix Computations", 3rd ed. (1996), 8.7 (generalized singular values).
    .. [2] U. A. Girhammar and D. H. Pan, "Exact static analysis of partially composite beams and beam-columns",
       Int. J. Mech. Sci. 49 (2007), 239-255 (the equations, for two layers); from memory.
    """
    middle = 0.5 * (breaks[1:] + breaks[:-1])
    starts = np.array([layer.start for layer in member.layers])
    ends = np.array([layer.end for layer in member.layers])
    present = (starts < middle[:, None]) & (middle[:, None] < ends)
    counts = present.astype(float)  # the share of every layer that counts, 0 where it is not
    for number, layer in enumerate(member.layers):
        for part in layer.shares:
            counts[:, number] *= np.where((part.start < middle) & (middle < part.end), part.share, 1.0)
    own = np.zeros((len(middle), len(member.joints)))
    for number, (joint, table) in enumerate(zip(member.joints, member.tables, strict=True)):
        if len(table):
            begin, stop, k = table.T
            place = np.maximum(np.searchsorted(begin, middle) - 1, 0)
            inside = (begin[place] < middle) & (middle < stop[place])
            own[:, number] = k[place] * (inside & present[:, joint.first] & present[:, joint.second])
    edge = np.zeros((len(middle), len(tree.edges)))
    np.add.at(edge.T, tree.of_joint, own.T)
    rows, of = distinct(np.hstack([counts, edge]))
    n = len(member.layers)
    return _modes(member, tree, rows[:, :n], rows[:, n:], own, of)


def distinct(rows: Array | NDArray[np.bool_]) -> tuple[Array, Indices]:
    """Return the different rows in the order they first come in, and which one each row is."""
    number: dict[bytes, int] = {}
    of = np.array([number.setdefault(row.tobytes(), len(number)) for row in np.ascontiguousarray(rows)], dtype=np.intp)
    first = np.full(len(number), len(rows))
    np.minimum.at(first, of, np.arange(len(rows)))
    return np.asarray(rows[first]), of


def _modes(member: LayeredMember, tree: Tree, counts: Array, k: Array, own: Array, of: Indices) -> Stacks:
    present = counts > 0
    n, (r, e) = len(member.layers), k.shape
    EA = np.array([layer.EA for layer in member.layers])
    EI = np.array([layer.EI for layer in member.layers])
    z = np.array([layer.height for layer in member.layers])
    z = z - EA @ z / EA.sum()
    loose = counts @ EI
    tied = loose + counts @ (EA * z * z)
    rate, drive = np.zeros((r, n)), np.zeros((r, n))
    force, slide, hold = np.zeros((r, n, n)), np.zeros((r, e, n)), np.zeros((r, e, n))
    kinds, kind_of = distinct(counts)
    for number, shares in enumerate(kinds):
        alike = np.flatnonzero(kind_of == number)
        mask = shares > 0
        here = np.flatnonzero(mask)
        own_EA = shares[here] * EA[here]
        s = own_EA * z[here]
        C = np.diag(own_EA) - np.outer(s, s) / tied[alike[0]]
        root = np.linalg.cholesky(C)  # C = root root^T
        ends = np.zeros((e, n))
        ends[np.arange(e), tree.edges[:, 1]], ends[np.arange(e), tree.edges[:, 0]] = 1, -1
        both = mask[tree.edges].all(1)
        G = ends[:, here] * both[:, None]
        inverse = np.linalg.inv(root)
        bare = G @ inverse.T  # G root^-T
        size = len(here)
        weight = np.sqrt(k[alike])
        left, single, right = _split(weight[:, :, None] * bare, _free(k[alike] > 0, tree.edges, here))
        direction = inverse.T @ right  # Phi, (kinds, size, size)
        holding = weight[:, :, None] * left
        rate[alike, :size] = single
        slide[alike, :, :size] = G @ direction
        hold[alike, :, :size] = holding
        straight = tree.to_layers[here].T @ (C @ direction)
        straight[:, tree.root] *= single == 0  # a mode that something holds has no net force
        stiff = single * member.length > 1e3  # there the joints' own forces keep more digits than C Phi
        if stiff.any():
            safe = np.where(single > 0, single, 1.0)
            through = tree.to_slips.T @ (holding / safe[:, None])
            straight = np.where(stiff[:, None], through, straight)
        force[alike, :, :size] = straight
        arms = tree.to_sigma[:, here] @ z[here]  # N = to_sigma^T Y, for the layers that are there
        drive[alike, :size] = (arms @ straight) / loose[alike, None]
    lever = counts * (EA * z) / tied[:, None]
    return Stacks(of, present, loose, tied, k, own, rate, force, slide, hold, drive, lever)


def _split(scaled: Array, free: Indices) -> tuple[Array, Array, Array]:
    """Return singular vectors, left and right as columns, and values of each matrix, the last ``free`` exactly zero."""
    kinds, e, size = scaled.shape
    left, single = np.zeros((kinds, e, size)), np.zeros((kinds, size))
    if not e:
        return left, single, np.tile(np.eye(size), (kinds, 1, 1))
    rows = np.square(scaled).sum(2)
    if np.where(rows > 0, rows, np.inf).min() * UNEQUAL > rows.max():  # squared, they keep their digits
        values, vectors = np.linalg.eigh(scaled.transpose(0, 2, 1) @ scaled)
        right = np.ascontiguousarray(vectors[:, :, ::-1])  # a product with steps backwards would go the slow way
        single = np.sqrt(np.maximum(values[:, ::-1], 0.0))
    else:
        _, found, rows = np.linalg.svd(scaled)
        right = rows.transpose(0, 2, 1)
        single[:, : found.shape[1]] = found
    single[np.arange(size) >= size - free[:, None]] = 0
    held = single > 0
    left = scaled @ right * (held / np.where(held, single, 1.0))[:, None]
    return left, single, right


def _free(joined: NDArray[np.bool_], edges: Indices, here: Indices) -> Indices:
    """Return how many bodies the layers ``here`` fall into, for each row of joined pairs."""
    position = {int(layer): place for place, layer in enumerate(here)}
    patterns, of = distinct(joined)
    counts = [
        len(components(len(here), [(position[int(a)], position[int(b)]) for a, b in edges[pattern]]))
        for pattern in patterns
    ]
    return np.array(counts, dtype=np.intp)[of]
