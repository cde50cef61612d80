"""Torque and warping along members against closed forms and a finite-difference solution."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.mechanics.torsion import TorqueLoad, torque, warping_part


def at(breaks, found, x):
    piece = np.clip(np.searchsorted(breaks, x, "right") - 1, 0, len(found) - 1)
    s = x - np.asarray(breaks)[piece]
    return found[piece, 0] + s * (found[piece, 1] + s * found[piece, 2])


def test_a_torque_between_two_held_ends():
    """T b / L and T a / L (Gere & Goodno, statically indeterminate torsional members)."""
    found = torque(np.array([0.0, 1000.0, 4000.0]), [0.0, 4000.0], np.ones(2), [TorqueLoad(1000, 1000, 8.0, 0)])
    np.testing.assert_allclose(found[:, 0], [-6.0, 2.0])


def test_unlike_stiffness_takes_unlike_shares():
    """A bar of two parts: the torque at their meeting goes as GJ / length."""
    found = torque(
        np.array([0.0, 1000.0, 3000.0]), [0.0, 3000.0], np.array([1.0, 4.0]), [TorqueLoad(1000, 1000, 9.0, 0)]
    )
    assert -found[0, 0] / found[1, 0] == pytest.approx((1 / 1000) / (4 / 2000))


def test_overhanging_ends_are_free():
    breaks = np.array([0.0, 500.0, 3000.0, 4000.0])
    loads = [TorqueLoad(0, 500, 2.0, 2.0), TorqueLoad(3000, 4000, 0.0, 4.0)]
    found = torque(breaks, [500.0, 3000.0], np.ones(3), loads)
    assert at(breaks, found, np.array([0.0, 499.999999])) == pytest.approx([0.0, 1000.0], abs=1e-4)
    assert at(breaks, found, np.array([1000.0, 2000.0])) == pytest.approx([0.0, 0.0], abs=1e-9)
    assert at(breaks, found, np.array([3000.0, 3999.999999])) == pytest.approx([-2000.0, 0.0], abs=1e-2)


@settings(max_examples=30, deadline=None)
@given(st.lists(st.floats(1.0, 9.0), min_size=4, max_size=4), st.lists(st.floats(-5, 5), min_size=4, max_size=4))
def test_no_twist_at_any_support(stiffness, values):
    breaks = np.array([0.0, 700.0, 1500.0, 2600.0, 4000.0])
    GJ = np.array(stiffness)
    loads = [TorqueLoad(a, b, v, -v / 2) for a, b, v in zip(breaks[:-1], breaks[1:], values, strict=True)]
    loads.append(TorqueLoad(700.0, 700.0, 300.0, 0.0))
    found = torque(breaks, [0.0, 1500.0, 4000.0], GJ, loads)
    width = np.diff(breaks)
    turned = (found * width[:, None] ** np.arange(1, 4) / np.arange(1, 4)).sum(axis=1) / GJ
    scale = np.abs(turned).max() + 1e-12
    assert abs(turned[0] + turned[1]) < 1e-9 * scale
    assert abs(turned[2] + turned[3]) < 1e-9 * scale


@pytest.mark.parametrize("EIw", [1e14, 1e16, 1e18])
def test_warping_under_a_uniform_torque_is_the_closed_form(EIw):
    """Ends that may warp: T_w = (t / k) tanh(k L / 2) at the ends, of T = t L / 2 (Vlasov; k^2 = GJ / EIw)."""
    breaks, GJ, L = np.array([0.0, 2000.0, 6000.0]), 5e10, 6000.0
    found = torque(breaks, [0.0, L], np.full(2, GJ), [TorqueLoad(0, L, 3.0, 3.0)])
    k = np.sqrt(GJ / EIw)
    ((start, end, share),) = warping_part(breaks, [0.0, L], np.full(2, GJ), np.full(2, EIw), found, np.full(2, 300.0))
    assert (start, end) == (0.0, L)
    assert share == pytest.approx(np.tanh(k * L / 2) / (k * L / 2), rel=1e-6)


def test_warping_of_two_sections_by_finite_differences():
    breaks = np.array([0.0, 1800.0, 4000.0])
    GJ, EIw = np.array([2e10, 6e10]), np.array([8e15, 2e16])
    found = torque(breaks, [0.0, 4000.0], GJ, [TorqueLoad(0, 4000, 1.0, 4.0)])
    ((_, _, share),) = warping_part(breaks, [0.0, 4000.0], GJ, EIw, found, np.full(2, 100.0))
    n = 8000
    h = 4000.0 / n
    x = (np.arange(n) + 0.5) * h
    section = (x > 1800).astype(int)
    T = at(breaks, found, x)
    between = np.where(x[:-1] + h / 2 < 1800, EIw[0], EIw[1]) / h**2
    matrix = np.zeros((3, n))
    matrix[1] = GJ[section]
    matrix[1, :-1] += between
    matrix[1, 1:] += between
    matrix[0, 1:] = matrix[2, :-1] = -between
    from scipy.linalg import solve_banded

    phi = solve_banded((1, 1), matrix, T)
    assert share == pytest.approx(np.abs(T - GJ[section] * phi).max() / np.abs(T).max(), rel=0.01)


def test_warping_near_a_single_torque_is_left_out():
    """A closed section: warping takes the jump at the place itself, and next to nothing a section's size away."""
    breaks = np.array([0.0, 3000.0, 6000.0])
    found = torque(breaks, [0.0, 6000.0], np.full(2, 5e10), [TorqueLoad(3000, 3000, 1e6, 0)])
    given = breaks, [0.0, 6000.0], np.full(2, 5e10), np.full(2, 2.5e14), found
    assert warping_part(*given, np.zeros(2))[0][2] > 0.9
    assert warping_part(*given, np.full(2, 400.0))[0][2] < 0.01
