"""The beam solver against general solvers: a boundary value problem by collocation, and finite elements."""

from __future__ import annotations

import numpy as np
import pytest
import skfem
from scipy.integrate import solve_bvp
from skfem.helpers import dd, ddot

from server.mechanics.beam import Beam, Couple, LineLoad, PointLoad, Stretch, Support, evaluate, solve

# Four parts: fixed at 0, pin at 2000, change of stiffness at 3000 under a point load, hinge at 4200, spring at 6000.
ENDS = np.array([0.0, 2000.0, 3000.0, 4200.0, 6000.0])
EI = np.array([3e11, 3e11, 8e11, 8e11])
GA = np.array([4e6, 4e6, 9e6, 9e6])
SPRING, POINT, COUPLE = 400.0, 6000.0, 5e6
W_START, W_END = 1.0, 7.0


def load(x: np.ndarray) -> np.ndarray:
    return W_START + (W_END - W_START) * x / ENDS[-1]


def by_collocation():
    """Return y (mm), psi, M, V of each part on 0..1, in units that keep all of order one."""
    width = np.diff(ENDS)
    unit = np.array([1.0, 1e-3, 1e6, 1e3])  # mm, rad, N*mm, N

    def slopes(t, z):
        out = []
        for i, d in enumerate(width):
            _, psi, M, V = z[4 * i : 4 * i + 4] * unit[:, None]
            out.extend(
                np.array([psi + V / GA[i], -M / EI[i], V, -load(ENDS[i] + d * t)]) * d / unit[:, None],
            )
        return np.array(out)

    def conditions(left, right):
        z0, z1 = (np.asarray(z).reshape(4, 4) * unit for z in (left, right))  # one row a part
        at = {"y": 0, "psi": 1, "M": 2, "V": 3}
        y, psi, M, V = (at[name] for name in ("y", "psi", "M", "V"))
        return np.array(
            [
                z0[0, y] / unit[y],
                z0[0, psi] / unit[psi],
                z1[0, y] / unit[y],  # pin
                z0[1, y] / unit[y],
                (z0[1, psi] - z1[0, psi]) / unit[psi],
                (z0[1, M] - z1[0, M]) / unit[M],
                (z0[2, y] - z1[1, y]) / unit[y],  # point load and couple
                (z0[2, psi] - z1[1, psi]) / unit[psi],
                (z0[2, M] - z1[1, M] + COUPLE) / unit[M],
                (z0[2, V] - z1[1, V] + POINT) / unit[V],
                (z0[3, y] - z1[2, y]) / unit[y],  # hinge
                z1[2, M] / unit[M],
                z0[3, M] / unit[M],
                (z0[3, V] - z1[2, V]) / unit[V],
                z1[3, M] / unit[M],  # spring at the end
                (z1[3, V] + SPRING * z1[3, y]) / unit[V],
            ]
        )

    found = solve_bvp(slopes, conditions, np.linspace(0, 1, 41), np.zeros((16, 41)), tol=1e-9, max_nodes=20000)
    assert found.success
    return lambda part, t: found.sol(t)[4 * part : 4 * part + 4] * unit[:, None]


def test_continuous_member_with_hinge_and_spring_agrees_with_collocation():
    member = Beam(
        6000.0,
        [Support(0.0, "fixed"), Support(2000.0, "pin"), Support(6000.0, "spring", SPRING)],
        [4200.0],
        [Stretch(0.0, 3000.0, EI[0], GA[0]), Stretch(3000.0, 6000.0, EI[2], GA[2])],
    )
    loads = [LineLoad(0.0, 6000.0, W_START, W_END), PointLoad(3000.0, POINT), Couple(3000.0, COUPLE)]
    response, other = solve(member, [loads]), by_collocation()
    t = np.linspace(0, 1, 30)[1:-1]
    for part in range(4):
        x = ENDS[part] + t * (ENDS[part + 1] - ENDS[part])
        y, _, M, V = other(part, t)
        np.testing.assert_allclose(evaluate(response.breaks, response.deflection, x)[0], y, rtol=1e-7, atol=1e-7)
        np.testing.assert_allclose(evaluate(response.breaks, response.moment, x)[0], M, rtol=1e-7, atol=1.0)
        np.testing.assert_allclose(evaluate(response.breaks, response.shear, x)[0], V, rtol=1e-7, atol=1e-3)
    end = other(3, np.array([1.0]))[:, 0]
    assert response.reaction_force[0, 2] == pytest.approx(SPRING * end[0], rel=1e-7)
    start = other(0, np.array([0.0]))[:, 0]
    assert response.reaction_couple[0, 0] == pytest.approx(-start[2], rel=1e-7)


def test_three_spans_of_changing_stiffness_agree_with_finite_elements():
    """Hermite elements: exact at nodes for a uniform load, so deflections at all nodes agree."""
    length, w = 9.0, 3.0  # of order one for the finite elements
    mesh = skfem.MeshLine(np.linspace(0, length, 91))
    basis = skfem.Basis(mesh, skfem.ElementLineHermite())

    @skfem.BilinearForm
    def bending(u, v, at):
        return np.where(at.x[0] < 4.5, 1.0, 2.5) * ddot(dd(u), dd(v))

    @skfem.LinearForm
    def uniform(v, _):
        return w * v

    nodes = mesh.p[0]
    held = np.concatenate([basis.get_dofs(lambda x, at=at: np.isclose(x[0], at)).all(["u"]) for at in (0, 3, 6, 9)])
    u = skfem.solve(*skfem.condense(bending.assemble(basis), uniform.assemble(basis), D=held))
    deflection = u[basis.nodal_dofs[0]]
    member = Beam(
        9e3, [Support(3e3 * i, "pin") for i in range(4)], [], [Stretch(0, 4.5e3, 1e12), Stretch(4.5e3, 9e3, 2.5e12)]
    )
    response = solve(member, [[LineLoad(0, 9e3, w, w)]])
    # w L^4 / EI: 3 N/mm x (1e3 mm)^4 / 1e12 N*mm2 = 3 mm for the finite elements' w L^4 / EI of 3
    np.testing.assert_allclose(
        evaluate(response.breaks, response.deflection, nodes * 1e3)[0], deflection, rtol=1e-7, atol=1e-9
    )
