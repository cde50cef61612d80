"""The field of shear in a built-up section: flow in joints of any arrangement, shear centre, GA, GJ, EIw.

Units: N, mm, MPa. Bending along the member stresses every piece by ``E (up - neutral axis)``; where the moment changes,
shear must pass from piece to piece so that each is in equilibrium. That shear is the gradient of a warping function in
every piece, found by finite elements; joints are rigid or springs. The same matrix gives Saint-Venant torsion.
"""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import astuple, dataclass, field

import numpy as np

from server.errors import InputError, positive
from server.mechanics.field_bonds import PARTS, flows, knots, runs
from server.mechanics.field_elements import elements, reference, unknowns
from server.mechanics.field_layout import Bond, lay_out
from server.mechanics.field_mesh import Mesh, mesh
from server.mechanics.field_sizes import Fineness
from server.mechanics.field_system import Parts, Solved, bonded_parts, put_together, yielding
from server.mechanics.polygon import Array, Edges
from server.mechanics.section import Piece, SectionProperties
from server.remembered import Remembered

__all__ = ["PARTS", "Bond", "Field", "remembered_field", "shear_field"]

TARGET = 0.005  # estimated error of every flow, of itself
_CAUTION = 2.0  # the difference between two solutions may flatter the better one
_LITTLE = 0.05  # of the largest flow, or of the sum of all sizes along a joint: what is less is held to this
MOST_UNKNOWNS = 100_000  # of a solution after which no finer one is tried: a few seconds
STEPS = (Fineness(0.7, 0.2), Fineness(0.5, 0.05), Fineness(0.35, 0.01), Fineness(0.25, 0.002))


@dataclass(frozen=True, eq=False)
class Field:
    """Solution of the field of one section.

    Of b joints: ``share`` (b,) flow on the joint's first piece is ``V share / EI`` where the member bends up and down
    only [N mm]; ``share_across`` (b,) likewise ``V_across share_across / EI_lateral`` where it bends sideways only;
    ``twist`` (b,) flow per torque [1/mm], torque anticlockwise on the face that is looked at. ``parts``,
    ``parts_across``, ``parts_twist`` (b, PARTS) the same per width, averaged over equal parts of the bonded width, from
    the start of the contact's line.
    ``shear_centre`` (2,) across and up [mm]; ``GJ`` [N mm2]; ``EIw`` [N mm4]; ``energy`` (2, 2) of shear: with rates of
    curvature c (up, across) the integral of tau^2 / G is c energy c.
    ``error`` (b, 3) estimated, of the flows of the three problems, relative; ``error_GJ``; ``balance`` largest
    difference between the flows on a piece and V x first moment / EI, of the largest first moment; ``triangles``,
    ``unknowns``, ``smallest``, ``largest`` edge of the mesh [mm]; ``converged`` whether every error is within 0.5 %.
    """

    share: Array
    share_across: Array
    twist: Array
    parts: Array
    parts_across: Array
    parts_twist: Array
    shear_centre: Array
    GJ: float
    EIw: float
    energy: Array
    error: Array
    error_GJ: float
    balance: float
    triangles: int
    unknowns: int
    smallest: float
    largest: float
    converged: bool
    mesh: Mesh = field(repr=False)
    solved: Solved = field(repr=False)


def shear_field(
    pieces: Sequence[Piece], properties: SectionProperties, bonds: Sequence[Bond], *, steps: Sequence[Fineness] = STEPS
) -> Field:
    r"""Solve the field of a section.

    .. math:: \nabla\cdot(G\,\nabla\psi) = -E\,(u - u_0), \qquad q_j = \frac{V}{EI}\int_j G\,\partial_n\psi\,ds

    no shear through free edges; across a bond of stiffness k the function jumps by stress / k. Twist likewise with
    :math:`\tau = G\,\vartheta' (\nabla\omega + (-u, a))`.

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; lengths in [mm], E and G in [MPa].
    properties : SectionProperties
        Of the same pieces.
    bonds : sequence of Bond
        The joints; contacts without one carry nothing. Lengths in [mm], stiffness in [N/mm3].
    steps : sequence of Fineness
        Meshes to try, one after the other, until the estimated error is at most 0.5 % [-].

    Returns
    -------
    Field
        See there.

    Raises
    ------
    InputError
        If a piece has no G, a G or a stiffness is not above zero, or the shapes cannot be meshed.

    Notes
    -----
    Plane sections, linear elastic, constant shear along the member; Poisson's ratio is left out, so that the stress
    over the width of a solid rectangle is uniform. At inward corners the stress has no limit: only flows and means are
    given. The error is taken as twice the difference from the solution without the cubic functions of the edges.

    References
    ----------
    .. [1] S. P. Timoshenko and J. N. Goodier, Theory of Elasticity, chapters on torsion and on bending of bars; from
       memory.
    .. [2] E. Trefftz, "Ueber den Schubmittelpunkt in einem durch eine Einzellast gebogenen Balken", ZAMM 15 (1935)
       220-225: the shear centre from the warping function; from memory.

    Examples
    --------
    >>> from server.mechanics.section import properties, rectangle
    >>> tee = [Piece("web", rectangle(20, 100, (40, 0)), 1.0, 1.0),
    ...        Piece("flange", rectangle(100, 20, (0, 100)), 1.0, 1.0)]
    >>> bond = Bond(0, 1, np.array([40.0, 100.0]), np.array([60.0, 100.0]))
    >>> round(float(shear_field(tee, properties(tee), [bond]).share[0]), 6)
    -60000.0
    """
    E = np.array([piece.E for piece in pieces], dtype=float)
    G = np.array([_shear_modulus(piece) for piece in pieces])
    for bond in bonds:
        if bond.stiffness is not None:
            positive("stiffness", bond.stiffness, "N/mm3")
    found = _attempt(E, G, properties, bonds, steps[0])
    for fineness in steps[1:]:
        if found.converged or found.unknowns > MOST_UNKNOWNS:
            break
        found = _attempt(E, G, properties, bonds, fineness)
    return found


_fields: Remembered[Field] = Remembered(24)  # a shop's people look at a few sections at a time
_meshes: Remembered[tuple[Mesh, Parts]] = Remembered(12)  # by shapes and joints: new moduli need no new mesh


def remembered_field(pieces: Sequence[Piece], properties: SectionProperties, bonds: Sequence[Bond]) -> Field:
    """As ``shear_field``, from a small store where the same section was solved before: shapes, moduli and joints count.

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; lengths in [mm], E and G in [MPa].
    properties : SectionProperties
        Of the same pieces.
    bonds : sequence of Bond
        The joints [mm], [N/mm3].

    Returns
    -------
    Field
        See there.

    Raises
    ------
    InputError
        As ``shear_field``.

    References
    ----------
    .. [1] As ``shear_field``.
    """
    key = (
        tuple((p.outline.tobytes(), *(hole.tobytes() for hole in p.holes), p.E, p.G) for p in pieces),
        tuple((*_line_key(b), b.stiffness) for b in bonds),
    )
    return _fields.of(key, lambda: shear_field(pieces, properties, bonds))


def _line_key(bond: Bond) -> tuple[Hashable, ...]:
    """Where a bond lies."""
    ring = None if bond.ring is None else bond.ring.tobytes()
    return (bond.first, bond.second, bond.start.tobytes(), bond.end.tobytes(), bond.gap, bond.width, ring)


def _meshed(edges: Edges, bonds: Sequence[Bond], fineness: Fineness) -> tuple[Mesh, Parts]:
    """The mesh of these shapes and joints, from the store where they were meshed before."""

    def make() -> tuple[Mesh, Parts]:
        layout = lay_out(edges, bonds)
        grid = mesh(layout, fineness)
        return grid, bonded_parts(layout, grid)

    curved = None if edges.curved is None else edges.curved.tobytes()
    outlines = (edges.start.tobytes(), edges.next.tobytes(), edges.owner.tobytes(), curved)
    return _meshes.of((outlines, tuple(map(_line_key, bonds)), fineness), make)


def _shear_modulus(piece: Piece) -> float:
    if piece.G is None:
        raise InputError("G", f"{piece.name} has no shear modulus G; the field of shear needs one for every piece.")
    return float(positive(f"G of {piece.name}", piece.G, "MPa"))


def _attempt(E: Array, G: Array, properties: SectionProperties, bonds: Sequence[Bond], fineness: Fineness) -> Field:
    """Solve on one mesh, with all functions and without the finest."""
    grid, parts = _meshed(properties.edges, bonds, fineness)
    stiff = yielding(parts, bonds) == 0
    numbers = unknowns(grid, parts.one[stiff], parts.other[stiff])
    each = elements(grid, E, G, properties.neutral_axis)
    system = put_together(each, numbers, parts, bonds)
    fine, coarse = system.solved()
    both = Solved(*(np.concatenate(pair, axis=2) for pair in zip(astuple(fine), astuple(coarse), strict=True)))
    found, force = flows(grid, each, numbers, parts, bonds, both, G)
    flow, rough = found[:, :3], found[:, 3:]
    run = runs(grid, numbers, parts, bonds, fine, force[:, :3])
    gross: Array = np.stack(
        [np.bincount(knots(grid, parts).bond, np.abs(force[:, k]), len(bonds)) for k in range(3)], axis=1
    )
    error = _relative(flow - rough, flow, gross)
    around = _around(grid, G, properties.neutral_axis)
    GJ, GJ_rough = (around - float((each.loads[:, :, 2] * s.values[:, :, 2]).sum()) for s in (fine, coarse))
    work = np.einsum("tik,til->kl", each.loads, fine.values)
    error_GJ = _CAUTION * abs(GJ_rough - GJ) / GJ
    length = _edge_lengths(grid)
    return Field(
        share=flow[:, 0],
        share_across=flow[:, 1],
        twist=-flow[:, 2] / GJ,
        parts=run[:, :, 0],
        parts_across=run[:, :, 1],
        parts_twist=-run[:, :, 2] / GJ,
        shear_centre=_shear_centre(properties, work),
        GJ=GJ,
        EIw=_warping(grid, E, properties, fine, work),
        energy=work[:2, :2],
        error=error,
        error_GJ=error_GJ,
        balance=_balance(properties, bonds, flow[:, 0]),
        triangles=len(grid.triangles),
        unknowns=numbers.count,
        smallest=float(length.min()),
        largest=float(length.max()),
        converged=bool(error.max(initial=0.0) <= TARGET and error_GJ <= TARGET),
        mesh=grid,
        solved=fine,
    )


def _relative(difference: Array, flow: Array, gross: Array) -> Array:
    """Differences over the flows; a small flow counts as a share of the largest, or of what it is the balance of."""
    size = np.abs(flow)
    scale = np.maximum(size, _LITTLE * np.maximum(gross, size.max(axis=0, initial=1e-300)))
    result: Array = _CAUTION * np.abs(difference) / scale
    return result


def _edge_lengths(grid: Mesh) -> Array:
    corner = grid.points[grid.triangles]
    edge = corner[:, [1, 2, 0]] - corner
    result: Array = np.hypot(edge[..., 0], edge[..., 1])
    return result


def _areas(grid: Mesh) -> Array:
    corner = grid.points[grid.triangles]
    p, q = corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0]
    result: Array = (p[:, 0] * q[:, 1] - p[:, 1] * q[:, 0]) / 2
    return result


def _around(grid: Mesh, G: Array, origin: Array) -> float:
    """Integral of G r^2, from the middles of the edges of every triangle: exact for a quadratic."""
    corner = grid.points[grid.triangles] - origin
    middle = (corner + corner[:, [1, 2, 0]]) / 2
    return float((G[grid.piece] * _areas(grid) / 3) @ (middle**2).sum(axis=(1, 2)))


def _shear_centre(properties: SectionProperties, work: Array) -> Array:
    """Where a shear force makes no twist: the moment of its stresses is the product of its loads and the warping."""
    inertia = np.array(((properties.EI, properties.EI_product), (properties.EI_product, properties.EI_lateral)))
    up, across = np.linalg.solve(inertia, work[:2, 2])  # moments of unit shear
    result: Array = properties.neutral_axis + np.array((-up, across))
    return result


def _warping(grid: Mesh, E: Array, properties: SectionProperties, solved: Solved, work: Array) -> float:
    """EIw: the integral of E omega^2, less what stretching and bending would take of it."""
    own = solved.values[:, :, 2]
    heavy = E[grid.piece] * _areas(grid)
    table = reference()
    squares = heavy @ np.einsum("ti,ij,tj->t", own, table.mass, own)
    stretch = heavy @ (own @ table.linear.sum(axis=0))
    inertia = np.array(((properties.EI, properties.EI_product), (properties.EI_product, properties.EI_lateral)))
    bend = work[:2, 2]
    return float(squares - stretch**2 / properties.EA - bend @ np.linalg.solve(inertia, bend))


def _balance(properties: SectionProperties, bonds: Sequence[Bond], flow: Array) -> float:
    """Largest difference between the flows on a piece and its first moment, over the largest first moment."""
    count = len(properties.first_moments)
    ends = np.array([(bond.first, bond.second) for bond in bonds], dtype=np.intp).reshape(-1, 2)
    held = np.bincount(ends[:, 0], flow, count) - np.bincount(ends[:, 1], flow, count)
    scale = float(np.abs(properties.first_moments).max())
    return float(np.abs(held - properties.first_moments).max() / scale) if scale else 0.0
