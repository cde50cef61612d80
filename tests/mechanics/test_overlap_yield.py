"""Bonds that yield in shear: strength by strain limit against independent solutions and against closed forms."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.overlap_laps import Action, BondLine, Lap, Plate, peaks, respond
from server.mechanics.overlap_strength import (
    Limits,
    curve,
    strengths,
    yield_strength,
    yielding,
)
from server.mechanics.overlap_yield import under
from tests.mechanics.overlap_oracles import two_bars
from tests.mechanics.test_overlap_laps import ALUMINIUM, EPOXY


def hart_smith_long(inner, outer, bond, tau, strain):
    """Strength of a long double lap of unit width, no bending (NASA CR-112235): energy balance at either end."""
    elastic = tau / bond.shear_modulus
    energy = 4 * bond.thickness * tau * (strain - elastic / 2)
    EA_i, EA_o = inner.plane_modulus * inner.thickness, 2 * outer.plane_modulus * outer.thickness
    return min(math.sqrt(energy * EA_i * (1 + EA_i / EA_o)), math.sqrt(energy * EA_o * (1 + EA_o / EA_i)))


@pytest.mark.parametrize(
    ("inner", "outer"), [(Plate(70e3, 3.2), Plate(70e3, 1.6)), (Plate(21e4, 2.0), Plate(7e4, 2.0))]
)
def test_a_long_double_lap_reaches_the_published_strength(inner, outer):
    bond = BondLine(800.0, 2200.0, 0.127)
    lap = Lap("double-lap", inner, outer, bond, width=1.0)
    found = yield_strength(lap, [100.0, 400.0], shear_yield=40.0, strain_limit=1.05)
    assert found.settled.all()
    # the peel that the closed form leaves out stores a little energy more
    assert found.load == pytest.approx(hart_smith_long(inner, outer, bond, 40.0, 1.05), rel=0.01)


@pytest.mark.parametrize(
    ("length", "strain"), [(15.0, 0.08), (25.0, 0.08), (60.0, 0.08), (40.0, 0.4), (100.0, 0.4), (100.0, 1.0)]
)
def test_a_balanced_lap_of_any_length_has_the_closed_form_of_hart_smith(length, strain):
    """Elastic trough of length L - 2 d between two plastic ends: NASA CR-112235 (double), CR-112236 (single lap).

    s'' = kappa q + g, with g from the shear force of a single lap, so that the trough is a cosh and the ends parabolas.
    Written out by own derivation in that form; the reports' own formulas from memory.
    """
    from scipy.optimize import fsolve

    b, tau, bond, plate = 25.0, 30.0, EPOXY, Plate(70e3, 1.6)
    EA, D, t = 70e3 * 1.6 * b, 70e3 * 1.6**3 / 12 * b, 1.6
    ks, s_y, s_u = 1000 / 0.2 * b, tau / 1000 * 0.2, strain * 0.2

    def load(kappa, bending, bonds):
        """Load of ``bonds`` bonds; ``bending``: load -> (g, what the edge moment adds to the slip's slope)."""
        rate = math.sqrt(kappa * ks)

        def off(z):
            P, d = z[0] * tau * b * length, z[1] * length
            g, turned = bending(P)
            trough = (s_y + g / rate**2) * rate * math.tanh(rate * (length / 2 - d))
            bowed = kappa * tau * b + g
            return (s_y + trough * d + bowed * d**2 / 2) / s_u - 1, (trough + bowed * d) / (P / EA + turned) - 1

        found, _, good, message = fsolve(off, [0.6, 0.2], full_output=True)
        assert good == 1, message
        return bonds * found[0] * tau * b * length

    def edge(P):
        M = P * t / 2 / (1 + (x := math.sqrt(P / D) * length / 2) + x**2 / 6)
        return t / 2 / D * (2 * M - P * t) / length, t / 2 / D * M

    single = yield_strength(
        Lap("single-lap", plate, plate, bond, width=b), length, shear_yield=tau, strain_limit=strain
    )
    double = Lap("double-lap", Plate(70e3, 3.2), plate, bond, width=b)
    found = yield_strength(double, length, shear_yield=tau, strain_limit=strain)
    straight = load(2 / EA, lambda P: (0.0, 0.0), 2)
    assert single.load[0] == pytest.approx(load(8 / EA, edge, 1), rel=1e-3)
    # the closed form leaves the bending of the outer plates out: where little yields, that is some 4 %
    assert found.load[0] == pytest.approx(straight, rel=0.01 if strain >= 0.4 else 0.05)
    tubes = Lap("tube-lap", plate, plate, bond, diameter=1e7)
    lag = yield_strength(tubes, length, shear_yield=tau, strain_limit=strain).load[0] / tubes.bond_width
    assert lag == pytest.approx(straight / 2 / b, rel=1e-3)


def test_a_short_overlap_yields_all_over():
    lap = Lap("double-lap", Plate(70e3, 3.2), Plate(70e3, 1.6), EPOXY, width=25.0)
    found = yield_strength(lap, 8.0, shear_yield=30.0, strain_limit=1.0)
    assert found.load[0] == pytest.approx(2 * 30 * 8 * 25, rel=1e-5)


def test_a_tube_that_yields_agrees_with_the_boundary_value_solution():
    lap = Lap("tube-lap", Plate(70e3, 2.0), Plate(40e3, 2.0), EPOXY, diameter=30.0)
    L, tau, strain = 60.0, 30.0, 0.3
    found = yield_strength(lap, L, Action(strain=3e-4), shear_yield=tau, strain_limit=strain)
    areas = math.pi * (15**2 - 13**2), math.pi * (17.2**2 - 15.2**2)
    around = 2 * math.pi * 15.1
    x, q = two_bars(
        L,
        lambda x: 1 / (40e3 * areas[1]),
        lambda x: 1 / (70e3 * areas[0]),
        1000 / 0.2 * around,
        float(found.load[0]),
        mismatch=3e-4,
        yield_flow=tau * around,
    )
    assert np.abs(np.interp(found.course.at[0], x, q) - found.flow[0]).max() < 0.01 * tau * around
    assert np.trapezoid(q, x) == pytest.approx(found.load[0], rel=1e-3)
    assert np.abs(found.course.slip).max() == pytest.approx(strain * 0.2, rel=1e-6)


@settings(max_examples=30, deadline=None)
@given(
    st.floats(3.0, 300.0),
    st.floats(0.05, 2.0),
    st.floats(0.5, 6.0),
    st.floats(5.0, 60.0),
    st.sampled_from(["single-lap", "double-lap", "double-strap", "tube-lap", "scarf"]),
)
def test_strength_never_falls_with_the_strain_limit_and_carries_its_own_load(length, strain, thickness, tau, layout):
    plate = Plate(70e3, thickness)
    lap = Lap(layout, plate, plate, EPOXY, width=25.0, diameter=60.0, slope=10)
    strain += tau / 1000
    less, more = (yield_strength(lap, length, shear_yield=tau, strain_limit=s) for s in (strain, 1.5 * strain))
    assert less.settled.all()
    assert 0 < less.load[0] <= more.load[0] * (1 + 1e-4)
    elastic = strengths(respond(lap, length), Limits(shear=tau))["shear"][0]
    assert less.load[0] >= elastic * (1 - 1e-6)
    bound = lap.bonds * lap.bond_width * length * tau * (1 + (thickness / length) ** 2 if layout == "scarf" else 1)
    assert less.load[0] <= bound * (1 + 1e-4)


@pytest.mark.parametrize(
    ("length", "strain", "thickness", "tau"), [(300.0, 1.54, 1.837, 6.347), (253.0, 0.815, 6.0, 5.0)]
)
def test_a_very_long_lap_that_yields_almost_throughout_has_a_strength(length, strain, thickness, tau):
    """Newton's method alone loses its way here; the slip under the load that was found is at its limit."""
    lap = Lap("single-lap", Plate(70e3, thickness), Plate(70e3, thickness), EPOXY, width=25.0)
    strain += tau / 1000
    for whole in (True, False):
        found = yield_strength(lap, length, shear_yield=tau, strain_limit=strain, whole=whole)
        assert found.found.all()
        solver, loads, shares = yielding(lap, np.array([length]), Action())
        reached = under(solver, loads, shares, found.load, yield_flow=tau * 25)
        assert np.abs(reached.course.slip).max() == pytest.approx(strain * 0.2, rel=2e-3 if whole else 0.02)


def test_a_strain_limit_below_the_strain_at_yield_is_refused():
    lap = Lap("double-lap", ALUMINIUM, ALUMINIUM, EPOXY, width=25.0)
    with pytest.raises(InputError, match="strain at yield"):
        yield_strength(lap, 12.0, shear_yield=30.0, strain_limit=0.01)
    with pytest.raises(InputError, match="elastic response"):
        yield_strength(lap, 12.0, Action(moment=5.0), shear_yield=30.0, strain_limit=0.1)


def test_a_free_strain_beyond_the_limit_leaves_no_strength():
    lap = Lap("tube-lap", ALUMINIUM, ALUMINIUM, EPOXY, diameter=40.0)
    found = yield_strength(lap, 100.0, Action(strain=0.02), shear_yield=30.0, strain_limit=0.05)
    assert not found.found[0]
    assert found.load[0] == 0
    assert strengths(respond(lap, 100.0, Action(strain=0.02)), Limits(shear=30.0))["shear"][0] == 0


@settings(max_examples=25, deadline=None)
@given(
    st.sampled_from(["single-lap", "double-lap", "strap", "double-strap", "scarf", "tube-lap"]),
    st.floats(2.0, 200.0),
    st.floats(-4e-4, 4e-4),
    st.sampled_from([1.0, -1.0]),
)
def test_elastic_strength_brings_its_demand_to_the_limit(layout, length, strain, sign):
    plate = Plate(70e3, 2.0, 0.3)
    lap = Lap(layout, plate, plate, EPOXY, width=25.0, diameter=60.0, slope=10)
    response = respond(lap, length, Action(strain=strain))
    limits = Limits(35.0, 30.0, 250.0, 250.0)
    for name, load in strengths(response, limits, sign=sign).items():
        if 0 < load[0] < np.inf:
            assert peaks(response.under(sign * load))[name][0] == pytest.approx(limits.of(name), rel=1e-6)


def test_useful_length_of_a_balanced_shear_lag_joint_has_its_closed_form():
    """Strength goes with tanh(lambda l / 2): growth of 1 % for 10 % more length has one answer."""
    from scipy.optimize import brentq

    plate = Plate(70e3, 1.0)
    lap = Lap("tube-lap", plate, plate, EPOXY, diameter=5000.0)
    rate = math.sqrt(1000 / 0.2 * 2 / 70e3)
    a = brentq(lambda a: math.tanh(1.1 * a) / math.tanh(a) - 1.01, 0.1, 20)
    found = curve(lambda L: strengths(respond(lap, L), Limits(shear=30.0))["shear"], low=1.0, high=200.0)
    assert found.useful == pytest.approx(2 * a / rate, rel=1e-3)


def test_the_useful_length_is_found_from_any_first_range():
    def strength(length):
        return np.minimum(length, 37.0)

    for low, high in ((1e-3, 2e-3), (1.0, 5.0), (1e3, 1e4), (10.0, 100.0)):
        assert curve(strength, low=low, high=high).useful == pytest.approx(37 / 1.01, rel=2e-3)
    assert curve(lambda length: length**2, low=1.0, high=5.0).useful is None
