"""A layered member by a general finite-element library, for comparison: cubic deflection, quadratic displacements.

Nothing here is shared with the solver under test: weak form and elements are scikit-fem's own.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import block_array
from scipy.sparse.linalg import spsolve
from skfem import Basis, BilinearForm, ElementLineHermite, ElementLineP2, LinearForm, MeshLine, asm
from skfem.helpers import dd, ddot, dot, grad

from server.mechanics.slip_model import LayeredMember

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Solved:
    """Deflection and rotation at the mesh's points, slip and flow of every joint and axial forces at cell middles."""

    points: Array
    deflection: Array
    middles: Array
    flow: Array
    axial: Array


def solve_by_elements(
    member: LayeredMember,
    breaks: Sequence[float],
    *,
    line: Callable[[Array], Array],
    points: Sequence[tuple[float, float]] = (),
    cells: int = 40,
) -> Solved:
    """Solve for one line load w(x) and point loads; supports must stand at ``breaks``. No hinges, no shear."""
    mesh = MeshLine(np.unique(np.concatenate([_graded(a, b, cells) for a, b in pairwise(breaks)])))
    bend, pull = Basis(mesh, ElementLineHermite(), intorder=6), Basis(mesh, ElementLineP2(), intorder=6)
    middle = mesh.p[0, mesh.t].mean(0)
    n = len(member.layers)
    there = [(layer.start < middle) & (middle < layer.end) for layer in member.layers]
    parts = [np.ones_like(middle) for _ in member.layers]
    for part, layer in zip(parts, member.layers, strict=True):
        for s in layer.shares:
            part[(s.start < middle) & (middle < s.end)] *= s.share
    joints = [_stiffness(member, j, middle) * there[j.first] * there[j.second] for j in member.joints]
    nothing = np.zeros_like(middle)
    D = sum((p * t * layer.EI for p, t, layer in zip(parts, there, member.layers, strict=True)), nothing)
    rotated = sum(
        (k * (member.layers[j.second].height - member.layers[j.first].height) ** 2
         for k, j in zip(joints, member.joints, strict=True)), nothing,
    )  # fmt: skip
    blocks: list[list[object]] = [[None] * (n + 1) for _ in range(n + 1)]
    blocks[0][0] = asm(BilinearForm(lambda u, v, w: w.D * ddot(dd(u), dd(v))), bend, D=_field(D, bend)) + asm(
        BilinearForm(lambda u, v, w: w.k * dot(grad(u), grad(v))), bend, k=_field(rotated, bend)
    )
    mass = BilinearForm(lambda u, v, w: w.k * u * v)
    for i, layer in enumerate(member.layers):
        own = sum((k for k, j in zip(joints, member.joints, strict=True) if i in (j.first, j.second)), nothing)
        blocks[i + 1][i + 1] = asm(
            BilinearForm(lambda u, v, w: w.A * dot(grad(u), grad(v))),
            pull,
            A=_field(parts[i] * there[i] * layer.EA, pull),
        ) + asm(mass, pull, k=_field(own, pull))
        arm = nothing.copy()
        for k, j in zip(joints, member.joints, strict=True):
            rise = member.layers[j.second].height - member.layers[j.first].height
            arm += k * rise * ((i == j.first) * 1.0 - (i == j.second) * 1.0)
        turn = asm(BilinearForm(lambda u, v, w: w.k * grad(u)[0] * v), bend, pull, k=_field(arm, pull))
        blocks[i + 1][0], blocks[0][i + 1] = turn, turn.T
    for k, j in zip(joints, member.joints, strict=True):
        shared = asm(mass, pull, k=_field(k, pull))
        a, b = j.first + 1, j.second + 1
        for row, column in ((a, b), (b, a)):
            blocks[row][column] = -shared if blocks[row][column] is None else blocks[row][column] - shared
    K = block_array(blocks).tolil()
    f = np.zeros(K.shape[0])
    f[: bend.N] = asm(LinearForm(lambda v, w: line(w.x[0]) * v), bend)
    for at, value in points:
        f[_node(bend, mesh, at)[0]] += value
    held: list[int] = []
    starts = [bend.N + i * pull.N for i in range(n)]
    for support in member.supports:
        value, slope = _node(bend, mesh, support.at)
        if support.kind == "spring":
            K[value, value] += support.stiffness
        else:
            held.append(value)
        if support.kind == "fixed":
            held.append(slope)
            place = int(pull.nodal_dofs[0, np.argmin(np.abs(mesh.p[0] - support.at))])
            held += [start + place for start in starts]
    free_along = not any(support.kind == "fixed" for support in member.supports)
    for i, start in enumerate(starts):
        touched = np.unique(pull.element_dofs[:, there[i]])
        held += [start + int(dof) for dof in np.setdiff1d(np.arange(pull.N), touched)]
        if free_along and i == 0:
            held.append(start + int(touched[0]))
    keep = np.setdiff1d(np.arange(K.shape[0]), held)
    x = np.zeros(K.shape[0])
    K = K.tocsr()
    x[keep] = spsolve(K[keep][:, keep].tocsc(), f[keep])
    return _read(member, mesh, bend, pull, x, [p * t for p, t in zip(parts, there, strict=True)], joints)


def _read(member, mesh, bend, pull, x, there, joints) -> Solved:  # type: ignore[no-untyped-def]
    order = np.argsort(mesh.p[0])
    y = x[bend.nodal_dofs[0, order]]
    fine_bend, fine_pull = (Basis(mesh, b.elem, quadrature=(np.array([[0.5]]), np.array([1.0]))) for b in (bend, pull))
    turn = fine_bend.interpolate(x[: bend.N]).grad[0][:, 0]
    moves = [fine_pull.interpolate(x[bend.N + i * pull.N : bend.N + (i + 1) * pull.N]) for i in range(len(there))]
    axial = np.array([t * layer.EA * u.grad[0][:, 0] for t, layer, u in zip(there, member.layers, moves, strict=True)])
    flow = []
    for k, j in zip(joints, member.joints, strict=True):
        rise = member.layers[j.second].height - member.layers[j.first].height
        flow.append(k * (np.asarray(moves[j.second])[:, 0] - np.asarray(moves[j.first])[:, 0] - rise * turn))
    cells = np.argsort(mesh.p[0, mesh.t].mean(0))
    middles = mesh.p[0, mesh.t].mean(0)[cells]
    return Solved(mesh.p[0, order], y, middles, np.array(flow)[:, cells], axial[:, cells])


def _graded(a: float, b: float, cells: int) -> Array:
    """Points from a to b, closer at both ends."""
    s = np.linspace(0, 1, cells + 1)
    return a + (b - a) * (s - 0.9 * np.sin(2 * np.pi * s) / (2 * np.pi))


def _stiffness(member: LayeredMember, joint: object, middle: Array) -> Array:
    k = np.zeros_like(middle)
    for zone in joint.zones:  # type: ignore[attr-defined]
        k[(zone.start < middle) & (middle < zone.end)] += zone.stiffness
    return k


def _field(values: Array, basis: Basis) -> Array:
    return np.repeat(np.asarray(values, dtype=float)[:, None], len(basis.W), axis=1)


def _node(bend: Basis, mesh: MeshLine, at: float) -> tuple[int, int]:
    """Deflection and slope unknown at a place."""
    place = int(np.argmin(np.abs(mesh.p[0] - at)))
    return int(bend.nodal_dofs[0, place]), int(bend.nodal_dofs[1, place])
