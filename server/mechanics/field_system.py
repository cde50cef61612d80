"""The equations of the field: put together, and solved with all functions and without the finest ones.

Units: N, mm, MPa. The function inside each triangle is eliminated before, so that the matrix is smaller.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Any

import numpy as np

from server.mechanics.field_elements import Elements, Unknowns, along_part
from server.mechanics.field_layout import Bond, Layout
from server.mechanics.field_mesh import Mesh
from server.mechanics.polygon import Array, Indices

_STEPS, _SMALL = 12, 1e-4  # of conjugate gradients; of the first size, in energy


@dataclass(frozen=True, eq=False)
class Parts:
    """Parts of the outlines that are bonded: ``one`` on the first piece, ``other`` on the second, pair by pair.

    They run as the first piece's outline does; ``bond`` of each pair; ``from_``, ``to`` along the bond from its middle
    [mm]; ``length`` [mm].
    """

    one: Indices
    other: Indices
    bond: Indices
    from_: Array
    to: Array
    length: Array

    def some(self, which: Indices) -> Parts:
        """Only those parts."""
        return Parts(*(getattr(self, each.name)[which] for each in fields(self)))


def bonded_parts(layout: Layout, mesh: Mesh) -> Parts:
    """Pair the parts of outlines that are bonded to each other."""
    rim = mesh.rim
    back = layout.back[rim.side]
    ahead, behind = np.full((2, len(rim.cut_run)), -1, dtype=np.intp)
    ahead[rim.cut[~back]] = np.flatnonzero(~back)
    behind[rim.cut[back]] = np.flatnonzero(back)
    cut = np.flatnonzero(behind >= 0)
    run = rim.cut_run[cut]
    at, low, span = rim.at[cut], layout.from_[run], (layout.to - layout.from_)[run]
    length = layout.length[layout.ahead[run]] * (at[:, 1] - at[:, 0])
    return Parts(ahead[cut], behind[cut], layout.bond[run], low + at[:, 0] * span, low + at[:, 1] * span, length)


@dataclass(frozen=True, eq=False)
class Solved:
    """Solution with the functions of one space.

    ``values`` (t, 10, 3) factors of each triangle's functions; ``pull`` (t, 10, 3) loads less stiffness x values: what
    holds the triangle from outside, nothing in sum at places where nothing is bonded.
    """

    values: Array
    pull: Array


@dataclass(frozen=True, eq=False)
class System:
    """The matrix [N/mm2 x mm2], loads of the three problems, and how to get from its unknowns to the triangles."""

    matrix: Any
    loads: Array
    elements: Elements
    unknowns: Unknowns

    def solved(self) -> tuple[Solved, Solved]:
        """Solve with all functions, and without the cubic ones of the edges."""
        from scipy.sparse.linalg import splu

        # a constant is free: the first unknown is held at nothing
        matrix, loads = self.matrix[1:, 1:], self.loads[1:]
        factors = splu(matrix, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options={"SymmetricMode": True})
        fine = factors.solve(loads)
        n = self.unknowns.coarse - 1
        few = np.zeros_like(fine)
        few[:n] = fine[:n] + _correction(matrix[:n, :n], matrix[:n, n:] @ fine[n:], factors)
        return self._spread(fine), self._spread(few)

    def _spread(self, found: Array) -> Solved:
        """From the unknowns to the triangles, with the function inside each."""
        known, K, f = self.unknowns, self.elements.stiffness, self.elements.loads
        whole = np.concatenate((np.zeros((1, 3)), found))
        values = np.empty_like(f)
        values[:, :9] = whole[known.place] * known.sign[:, :, None]
        inside = f[:, 9] - np.einsum("tj,tjk->tk", K[:, 9, :9], values[:, :9])
        values[:, 9] = inside / K[:, 9, 9, None]
        return Solved(values, f - K @ values)


def _correction(matrix: Any, push: Array, factors: Any) -> Array:
    """Solve with the corner of a matrix whose whole has been factored: conjugate gradients, the whole as the guide.

    What the whole makes of a push on the corner is near to what the corner does, so a few steps are enough.
    """
    n, size = push.shape[0], factors.shape[0]

    def guided(rest: Array) -> Array:
        padded = np.zeros((size, rest.shape[1]))
        padded[:n] = rest
        result: Array = factors.solve(padded)[:n]
        return result

    rest, found = push.copy(), np.zeros_like(push)
    step = near = guided(rest)
    size_now = first = (rest * near).sum(axis=0)
    for _ in range(_STEPS):
        if (size_now <= _SMALL * first).all():
            break
        ahead = matrix @ step
        length = size_now / np.maximum((step * ahead).sum(axis=0), 1e-300)
        found += length * step
        rest -= length * ahead
        near = guided(rest)
        size_next = (rest * near).sum(axis=0)
        step = near + size_next / np.maximum(size_now, 1e-300) * step
        size_now = size_next
    return found


def put_together(elements: Elements, unknowns: Unknowns, parts: Parts, bonds: Sequence[Bond]) -> System:
    """Sum the triangles, less the function inside each, and the springs of bonds that give way."""
    from scipy.sparse import coo_array

    K, f, sign = elements.stiffness, elements.loads, unknowns.sign
    arm, hub = K[:, :9, 9], K[:, 9, 9]
    outer = K[:, :9, :9] - arm[:, :, None] * (arm / hub[:, None])[:, None, :]
    outer = outer * sign[:, :, None] * sign[:, None, :]
    pushed = (f[:, :9] - arm[:, :, None] * (f[:, 9] / hub[:, None])[:, None, :]) * sign[:, :, None]
    n, place = unknowns.count, unknowns.place
    rows, columns = np.repeat(place, 9, axis=1).ravel(), np.tile(place, (1, 9)).ravel()
    values = outer.ravel()
    soft = _springs(unknowns, parts, bonds)
    if soft is not None:
        rows, columns, values = (np.concatenate(both) for both in zip((rows, columns, values), soft, strict=True))
    matrix = coo_array((values, (rows, columns)), shape=(n, n)).tocsc()
    loads: Array = np.stack([np.bincount(place.ravel(), pushed[:, :, k].ravel(), n) for k in range(3)], axis=1)
    return System(matrix, loads, elements, unknowns)


def yielding(parts: Parts, bonds: Sequence[Bond]) -> Array:
    """Stiffness of the bond of each part [N/mm3]; 0 where it is rigid."""
    stiffness = np.array([bond.stiffness or 0.0 for bond in bonds], dtype=float)
    return stiffness[parts.bond]


def trace(unknowns: Unknowns, part: Indices, *, second: bool) -> tuple[Indices, Indices, Array]:
    """The four functions of an edge along parts: triangle, place among its ten, and sign, seen in the run's direction.

    Parts of the second piece run against it, so their ends change places and their odd function its sign.
    """
    triangle, edge = unknowns.part_triangle[part], unknowns.part_edge[part]
    start, end = (((edge + 1) % 3), edge) if second else (edge, (edge + 1) % 3)
    local = np.stack((start, end, 3 + edge, 6 + edge), axis=1)
    odd = -1.0 if second else 1.0
    return triangle, local, np.tile((1.0, 1.0, 1.0, odd), (len(part), 1))


def _springs(unknowns: Unknowns, parts: Parts, bonds: Sequence[Bond]) -> tuple[Indices, Indices, Array] | None:
    stiffness = yielding(parts, bonds)
    soft = np.flatnonzero(stiffness)
    if not soft.size:
        return None
    sides = []
    for part, second, way in ((parts.one[soft], False, 1.0), (parts.other[soft], True, -1.0)):
        triangle, local, sign = trace(unknowns, part, second=second)
        row = triangle[:, None]
        sides.append((unknowns.place[row, local], way * sign * unknowns.sign[row, local]))
    place = np.concatenate([side[0] for side in sides], axis=1)
    sign = np.concatenate([side[1] for side in sides], axis=1)
    mass = np.tile(along_part(stiffness[soft] * parts.length[soft]), (1, 2, 2))
    values = mass * sign[:, :, None] * sign[:, None, :]
    return np.repeat(place, 8, axis=1).ravel(), np.tile(place, (1, 8)).ravel(), values.ravel()
