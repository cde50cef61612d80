"""Beams that bend in two planes at once: against one plane at a time, turned axes, and finite elements."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.beam import Beam, Couple, LineLoad, PointLoad, Stretch, Support, evaluate, solve
from server.mechanics.beam_two_planes import bending_flexibility, shear_flexibility, solve_two_planes

L = 6000.0
PLACES = np.linspace(0, L, 61)
NAMES = ("shear", "moment", "deflection")


def beam(supports, hinges=(), EI=(4e11, 8e11), GA=3e6):
    return Beam(L, supports, hinges, [Stretch(0, 3000, EI[0], GA), Stretch(3000, L, EI[1], GA)])


def same(one, two, rel=1e-9):
    for name in NAMES:
        for side in ("left", "right"):
            a, b = (evaluate(each.breaks, getattr(each, name), PLACES, side) for each in (one, two))
            np.testing.assert_allclose(b, a, rtol=rel, atol=rel * np.abs(a).max())


DOWN = [[PointLoad(1000, 500.0), LineLoad(200, 5000, 1, 2)], [Couple(4000, 1e6)]]
RIGHT = [[LineLoad(2000, 6000, 0.5, 0.1)], [PointLoad(2500, 77.0), PointLoad(5700, 100.0)]]


@pytest.mark.parametrize("first", ["pin", "fixed", "spring"])
@pytest.mark.parametrize("hinges", [(), (3500.0,)])
def test_without_a_product_each_plane_stands_alone(first, hinges):
    """A spring gives way downward only: sideways it is a pin."""
    supports = [Support(0, first, 500.0), Support(2500, "pin"), Support(5300, "fixed")]
    aside = [Support(s.at, "pin" if s.kind == "spring" else s.kind) for s in supports]
    f = np.array([np.diag([1 / 4e11, 1 / 1.3e11]), np.diag([1 / 8e11, 1 / 2e11])])
    g = np.array([np.diag([1 / 3e6, 1 / 1e6])] * 2)
    found = solve_two_planes(beam(supports, hinges), f, g, DOWN, RIGHT)
    alone = (
        solve(beam(supports, hinges), DOWN),
        solve(beam(aside, hinges, EI=(1.3e11, 2e11), GA=1e6), RIGHT),
    )
    for one, two in zip(alone, found, strict=True):
        same(one, two)
        np.testing.assert_allclose(two.reaction_force, one.reaction_force, rtol=1e-8, atol=1e-7)
        np.testing.assert_allclose(two.reaction_couple, one.reaction_couple, rtol=1e-8, atol=1e-2)


def turned(angle):
    c, s = np.cos(angle), np.sin(angle)
    return np.array([[c, -s], [s, c]])


@given(angle=st.floats(-3, 3), ratio=st.floats(1.1, 20), load=st.tuples(*[st.floats(-2, 2)] * 2))
@settings(max_examples=25, deadline=None)
def test_turning_the_axes_turns_everything_and_changes_nothing(angle, ratio, load):
    """Stretches whose axes lie differently, loads in both planes: seen from turned axes the same member."""
    R = turned(angle)
    f = np.array([np.diag([1 / 4e11, ratio / 4e11]), turned(0.4) @ np.diag([1 / 8e11, ratio / 8e11]) @ turned(-0.4)])
    g = np.array([[[3e-7, 1e-7], [1e-7, 9e-7]]] * 2)
    member = beam([Support(0, "fixed"), Support(2500, "pin"), Support(5300, "pin")], (4000.0,))
    w = np.array([[1.0 + load[0], load[1]], [0.3, 1.5]])

    def response(f, g, w):
        loads = [[[LineLoad(500, 5800, a, a), PointLoad(2800, 900 * b)]] for a, b in w.T]
        return solve_two_planes(member, f, g, loads[0], loads[1])

    plain, other = response(f, g, w), response(R @ f @ R.T, R @ g @ R.T, w @ R.T)
    for name in NAMES:
        a, b = (np.array([evaluate(r.breaks, getattr(r, name)[0], PLACES) for r in each]) for each in (plain, other))
        np.testing.assert_allclose(b, R @ a, atol=1e-8 * np.abs(a).max())


def hermite(f, at, springs, loads, fixed):
    """Cubic elements of a beam with coupled planes, no shear strain: exact at nodes under loads at nodes."""
    n = len(at)
    K, p = np.zeros((4 * n, 4 * n)), np.zeros(4 * n)
    for k in range(n - 1):
        h = at[k + 1] - at[k]
        own = np.array(
            [[12, 6 * h, -12, 6 * h], [6 * h, 4 * h**2, -6 * h, 2 * h**2],
             [-12, -6 * h, 12, -6 * h], [6 * h, 2 * h**2, -6 * h, 4 * h**2]]
        ) / h**3  # fmt: skip
        D = np.linalg.inv(f[0] if at[k] < 3000 else f[1])
        for i in (0, 1):
            for j in (0, 1):
                rows = [2 * n * i + 2 * k + m for m in range(4)]
                columns = [2 * n * j + 2 * k + m for m in range(4)]
                K[np.ix_(rows, columns)] += D[i, j] * own
    for place, stiffness in springs.items():
        K[2 * place, 2 * place] += stiffness
    for (plane, place), force in loads.items():
        p[2 * n * plane + 2 * place] += force
    free = [d for d in range(4 * n) if d not in fixed]
    u = np.zeros(4 * n)
    u[free] = np.linalg.solve(K[np.ix_(free, free)], p[free])
    return u[0 : 2 * n : 2], u[2 * n :: 2]


def test_coupled_planes_against_finite_elements():
    """A redundant member whose stretches couple the planes differently, a spring that gives way downward only."""
    f = np.array([bending_flexibility(4e11, 1e11, 1.5e11), bending_flexibility(9e11, 3e11, -2e11)])
    at = np.array([0, 800, 1700, 3000, 4200, 5200, 6000.0])
    member = beam([Support(0, "fixed"), Support(3000, "spring", 400.0), Support(5200, "pin")])
    down, right = solve_two_planes(
        member, f, np.zeros((2, 2, 2)), [[PointLoad(1700, 3000)]], [[PointLoad(800, 500), PointLoad(6000, -400)]]
    )
    n = len(at)
    fixed = {0, 1, 2 * n, 2 * n + 1, 2 * 5, 2 * n + 2 * 5, 2 * n + 2 * 3}
    loads = {(0, 2): 3000.0, (1, 1): 500.0, (1, 6): -400.0}
    for found, wanted in zip((down, right), hermite(f, at, {3: 400.0}, loads, fixed), strict=True):
        got = evaluate(found.breaks, found.deflection[0], at)
        np.testing.assert_allclose(got, wanted, atol=1e-9 * np.abs(wanted).max())


def test_shear_strains_turn_the_sign_of_their_product():
    """The field's axes run up, the beam's downward; alone, 1/g is EI^2 over the energy."""
    f, energy = np.diag([0.5, 0.25]), np.array([[8.0, 1.0], [1.0, 4.0]])
    np.testing.assert_allclose(shear_flexibility(f, energy), [[2.0, -0.125], [-0.125, 0.25]])


def test_a_member_that_can_move_is_refused():
    with pytest.raises(InputError, match="support"):
        solve_two_planes(beam([Support(0, "pin")]), np.array([np.eye(2)] * 2), np.zeros((2, 2, 2)), DOWN, RIGHT)
