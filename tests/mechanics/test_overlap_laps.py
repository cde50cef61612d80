"""Every layout of overlap against an independent boundary-value solution, and in limits with a known answer."""

from __future__ import annotations

import math
import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.overlap_edges import goland_reissner_factor, hart_smith_factor, strap_factors
from server.mechanics.overlap_laps import Action, BondLine, Lap, Plate, peaks, respond
from tests.mechanics.overlap_oracles import two_bars, two_bars_by_energy, two_beams

ALUMINIUM, STEEL, SPRUCE = Plate(70e3, 1.62, 0.33), Plate(210e3, 1.0, 0.3), Plate(11e3, 20.0)
EPOXY = BondLine(1000.0, 2700.0, 0.2)
WITHIN = 0.005


def beam(plate, width, share=1.0):
    EA = plate.plane_modulus * plate.thickness * width * share
    return EA, EA * plate.thickness**2 / 12, plate.thickness / 2


def ends_of(lap, L, P, action):
    """End loads of a single lap or strap by hand: factors, arms, equilibrium."""
    h = (lap.inner.thickness + lap.outer.thickness) / 2
    D = [beam(p, lap.width)[1] for p in (lap.inner, lap.outer)]
    if lap.layout == "single-lap":
        m_i, m_o = (P * h / 2 / (1 + (x := math.sqrt(P / d) * L / 2) + x**2 / 6) for d in D)
    else:
        EA = [beam(p, lap.width)[0] for p in (lap.inner, lap.outer)]
        edge, butt = strap_factors(P, L, stretching=tuple(EA), bending=tuple(D), arm=h)
        m_i, m_o = float(edge) * P * h, float(butt) * P * h
    V = (m_i + m_o - P * h) / L + action.shear
    at_start = -m_i + action.moment - action.shear * L / 2
    at_end = m_o + action.moment + action.shear * L / 2
    return (0.0, 0.0, 0.0), (P, V, at_end), (P, V, at_start)


@pytest.mark.parametrize("layout", ["single-lap", "strap"])
@pytest.mark.parametrize(
    ("inner", "outer", "action"),
    [
        (ALUMINIUM, ALUMINIUM, Action()),
        (ALUMINIUM, STEEL, Action(strain=4e-4)),
        (SPRUCE, Plate(70e3, 4.0, 0.33), Action(moment=9000.0, shear=400.0)),
    ],
)
def test_laps_with_eccentric_load_agree_with_the_displacement_solution(layout, inner, outer, action):
    L, P, b = 25.0, 3000.0, 25.0
    lap = Lap(layout, inner, outer, EPOXY, width=b)
    response = respond(lap, L, action)
    fields = response.under(P)
    ks, kp = EPOXY.shear_modulus * b / EPOXY.thickness, EPOXY.E * b / EPOXY.thickness
    x, q, pull, y = two_beams(
        L, beam(outer, b), beam(inner, b), ks, kp, ends_of(lap, L, P, action), mismatch=action.strain
    )
    shear = np.interp(x, response.at[0], fields["shear"][0])
    peel = np.interp(x, response.at[0], fields["peel"][0])
    assert np.abs(shear - q / b).max() < WITHIN * np.abs(q / b).max()
    assert np.abs(peel - pull / b).max() < WITHIN * np.abs(pull / b).max()
    for name, plate, (N, M) in (("outer", outer, (1, 4)), ("inner", inner, (7, 10))):
        stress = np.abs(y[N]) / (b * plate.thickness) + 6 * np.abs(y[M]) / (b * plate.thickness**2)
        assert peaks(fields)[name][0] == pytest.approx(stress.max(), rel=WITHIN)


@pytest.mark.parametrize("layout", ["double-lap", "double-strap"])
@pytest.mark.parametrize("strain", [0.0, -3e-4])
def test_double_laps_agree_with_the_displacement_solution(layout, strain):
    L, P, b, inner, outer = 30.0, 9000.0, 25.0, Plate(70e3, 3.0, 0.33), Plate(210e3, 1.0, 0.3)
    lap = Lap(layout, inner, outer, EPOXY, width=b)
    response = respond(lap, L, Action(strain=strain))
    fields = response.under(P)
    ks, kp = EPOXY.shear_modulus * b / EPOXY.thickness, EPOXY.E * b / EPOXY.thickness
    half = (beam(inner, b, 0.5)[0], np.inf, inner.thickness / 2)
    ends = ((0.0, 0.0, 0.0), (P / 2, 0.0, 0.0), (P / 2, 0.0, 0.0))
    x, q, pull, _ = two_beams(L, beam(outer, b), half, ks, kp, ends, mismatch=strain, guided=layout == "double-strap")
    shear = np.interp(x, response.at[0], fields["shear"][0])
    peel = np.interp(x, response.at[0], fields["peel"][0])
    assert np.abs(shear - q / b).max() < WITHIN * np.abs(q / b).max()
    assert np.abs(peel - pull / b).max() < WITHIN * np.abs(pull / b).max()


def test_a_double_lap_that_bends_carries_its_moment_through_both_bonds():
    L, b, m = 40.0, 25.0, 20e3
    lap = Lap("double-lap", Plate(70e3, 3.0), Plate(70e3, 2.0), EPOXY, width=b)
    response = respond(lap, L, Action(moment=m))
    fields = response.under(0.0)
    half = len(response.at[0])
    upper, lower = fields["shear"][0, :half], fields["shear"][0, half:]
    assert np.allclose(upper, -lower)
    # what the middle plate gives up, the outer plates hold as a couple of forces and as their own bending
    force = np.trapezoid(upper * b, response.at[0])
    arm, EA, D = 2.5, 70e3 * 2 * b, 70e3 * 2**3 / 12 * b
    assert -2 * force * arm == pytest.approx(m * EA * arm**2 / (EA * arm**2 + D), rel=2e-3)
    inner = fields["inner"][0, 0]
    assert abs(inner) == pytest.approx(6 * m / (b * 3.0**2), rel=1e-6)


def test_tube_laps_agree_with_the_boundary_value_solution():
    lap = Lap("tube-lap", Plate(70e3, 2.5, G=26e3), Plate(40e3, 1.5, G=15e3), EPOXY, diameter=25.0)
    L, P, T, r = 30.0, 15e3, 200e3, 12.6
    response = respond(lap, L, Action(torque=T, strain=2e-4))
    fields = response.under(P)
    areas = math.pi * (12.5**2 - 10**2), math.pi * (14.2**2 - 12.7**2)
    polar = math.pi / 2 * (12.5**4 - 10**4), math.pi / 2 * (14.2**4 - 12.7**4)
    ks = 1000 / 0.2 * 2 * math.pi * r
    x, q = two_bars(L, lambda x: 1 / (40e3 * areas[1]), lambda x: 1 / (70e3 * areas[0]), ks, P, mismatch=2e-4)
    shear = np.interp(x, response.at[0], fields["shear"][0])
    assert np.abs(shear * 2 * math.pi * r - q).max() < WITHIN * np.abs(q).max()
    x, q = two_bars(L, lambda x: r**2 / (15e3 * polar[1]), lambda x: r**2 / (26e3 * polar[0]), ks, T / r)
    around = np.interp(x, response.at[0], fields["shear_around"][0])
    assert np.abs(around * 2 * math.pi * r - q).max() < WITHIN * np.abs(q).max()
    assert peaks(fields)["shear"][0] == pytest.approx(np.hypot(fields["shear"], fields["shear_around"]).max())


def test_radial_stress_of_a_tube_lap_agrees_with_the_boundary_value_solution():
    from scipy.integrate import solve_bvp

    lap = Lap("tube-lap", Plate(70e3, 2.5), Plate(70e3, 1.5), EPOXY, diameter=25.0)
    response = respond(lap, 30.0)
    fields = response.under(15e3)
    (t1, t2), (r1, r2) = (1.5, 2.5), (12.7 + 0.75, 11.25)
    D1, D2, k1, k2 = 70e3 * t1**3 / 12, 70e3 * t2**3 / 12, 70e3 * t1 / r1**2, 70e3 * t2 / r2**2

    def equations(x, y):
        q = np.interp(x, response.at[0], fields["shear"][0])
        pull = 2700 / 0.2 * (y[0] - y[4])
        return np.vstack(
            [
                *(y[1], y[2] / D1, y[3] + t1 / 2 * q, -pull - k1 * y[0]),
                *(y[5], y[6] / D2, y[7] + t2 / 2 * q, pull - k2 * y[4]),
            ]
        )

    b1, b2 = (k1 / 4 / D1) ** 0.25, (k2 / 4 / D2) ** 0.25

    def ends(a, b):
        """The free ends, and the tubes that run on as long shells."""
        return np.array(
            [
                *(a[2], a[3], b[6], b[7]),
                b[2] + 2 * D1 * b1 * (b1 * b[0] + b[1]),
                b[3] - 2 * D1 * b1**2 * (2 * b1 * b[0] + b[1]),
                a[6] + 2 * D2 * b2 * (b2 * a[4] - a[5]),
                a[7] + 2 * D2 * b2**2 * (2 * b2 * a[4] - a[5]),
            ]
        )

    x = np.linspace(0, 30, 1001)
    found = solve_bvp(equations, ends, x, np.zeros((8, x.size)), tol=1e-5, max_nodes=20000)
    pull = 2700 / 0.2 * (found.sol(x)[0] - found.sol(x)[4])
    assert np.abs(np.interp(x, response.at[0], fields["peel"][0]) - pull).max() < WITHIN * np.abs(pull).max()


def test_unlike_scarf_agrees_with_the_boundary_value_solution():
    lap = Lap("scarf", Plate(70e3, 20.0), Plate(11e3, 20.0), EPOXY, width=25.0, slope=8)
    L, P, b, t = 160.0, 5000.0, 25.0, 20.0
    response = respond(lap, L)
    fields = response.under(P)
    cosine = 8 / math.hypot(1, 8)
    ks = 1000 * b / 0.2 / cosine
    x, q = two_bars_by_energy(
        L, lambda x: 1 / (11e3 * t * b * (x / L)), lambda x: 1 / (70e3 * t * b * (1 - x / L)), ks, P
    )
    shear = np.interp(x, response.at[0], fields["shear"][0])
    assert np.abs(shear - q * cosine**2 / b).max() < WITHIN * q.max() * cosine**2 / b
    # a long scarf tends to the ratio of the moduli at the tip of the stiffer piece (Hart-Smith, NASA CR-112237)
    long = peaks(respond(lap, 1e5).under(P))["shear"][0]
    assert long / (P / (b * 1e5)) == pytest.approx(70 / 11, rel=0.01)


@pytest.mark.parametrize("slope", [5, 8, 12, 20])
def test_scarf_of_one_material_is_uniformly_stressed(slope):
    lap = Lap("scarf", Plate(11e3, 20.0), Plate(11e3, 20.0), EPOXY, width=25.0, slope=slope)
    fields = respond(lap, 20.0 * slope).under(5000.0)
    theta = math.atan(1 / slope)
    assert np.allclose(fields["shear"], 10 * math.sin(theta) * math.cos(theta), rtol=1e-6)
    assert np.allclose(fields["peel"], 10 * math.sin(theta) ** 2, rtol=1e-6)
    assert np.allclose(fields["inner"], 10, rtol=1e-4)


def test_moment_on_a_scarf_stresses_its_tips_as_a_solid_piece():
    lap = Lap("scarf", SPRUCE, SPRUCE, EPOXY, width=25.0, slope=10)
    fields = respond(lap, 200.0, Action(moment=5e4)).under(0.0)
    edge, theta = 6 * 5e4 / (25 * 20**2), math.atan(0.1)
    assert np.abs(fields["shear"]).max() == pytest.approx(edge * math.sin(theta) * math.cos(theta), rel=1e-6)
    assert np.abs(fields["inner"]).max() == pytest.approx(edge, rel=1e-6)


lengths = st.floats(2.0, 400.0)
plates = st.builds(Plate, st.floats(1e3, 3e5), st.floats(0.3, 30.0), st.floats(0.0, 0.45))
bond_lines = st.builds(BondLine, st.floats(0.5, 5e3), st.floats(1.0, 1e4), st.floats(0.05, 4.0))
layouts = st.sampled_from(["single-lap", "double-lap", "strap", "double-strap", "scarf", "tube-lap"])


def lap_of(layout, inner, outer, bond):
    if layout == "scarf":
        outer = Plate(outer.E, inner.thickness, outer.nu)
    return Lap(layout, inner, outer, bond, width=40.0, diameter=70.0, slope=8)


@settings(max_examples=60, deadline=None)
@given(layouts, plates, plates, bond_lines, lengths)
def test_the_stress_adds_up_to_the_load(layout, inner, outer, bond, length):
    lap = lap_of(layout, inner, outer, bond)
    response = respond(lap, length)
    shear = response.under(1000.0)["shear"][0]
    if layout == "scarf":
        shear = shear * (1 + (inner.thickness / length) ** 2)
    carried = np.trapezoid(shear, response.at[0][: len(shear)]) * lap.bond_width * lap.bonds
    assert carried == pytest.approx(1000.0, rel=3e-3)


@settings(max_examples=40, deadline=None)
@given(st.sampled_from(["single-lap", "tube-lap", "scarf"]), plates, plates, bond_lines, lengths)
def test_swapping_the_ends_mirrors_the_stresses(layout, inner, outer, bond, length):
    if layout == "tube-lap":  # a tube has an inside: a joint of equal stiffness to both sides is its own mirror
        thin = Plate(outer.E, 1.0)
        lap = Lap(layout, thin, thin, bond, diameter=4000.0)
        mirrored = lap
    else:
        lap = lap_of(layout, inner, outer, bond)
        mirrored = lap_of(layout, lap.outer, lap.inner, bond)
    here, there = (respond(each, length, Action(strain=s)) for each, s in ((lap, 1e-4), (mirrored, -1e-4)))
    one, other = (np.interp(np.linspace(0, length, 50), r.at[0], r.under(1000.0)["shear"][0]) for r in (here, there))
    assert np.allclose(one, other[::-1], rtol=5e-3, atol=2e-3 * np.abs(one).max())


@settings(max_examples=30, deadline=None)
@given(plates, bond_lines)
def test_a_short_overlap_is_uniform_and_a_long_one_as_strong_as_its_end(plate, bond):
    lap = Lap("double-lap", Plate(plate.E, 2 * plate.thickness), Plate(plate.E, plate.thickness), bond, width=30.0)
    decay = math.sqrt(plate.E * plate.thickness * bond.thickness / bond.shear_modulus)
    short = respond(lap, min(decay, plate.thickness) / 100).under(100.0)["shear"][0]
    assert np.allclose(short, short.mean(), rtol=0.05)
    far = 60 * decay + 200 * plate.thickness
    long, longer = peaks(respond(lap, [far, 3 * far]).under(100.0))["shear"]
    assert long == pytest.approx(longer, rel=1e-5)


def test_very_long_stiff_soft_and_thin_joints_stay_finite_and_right():
    start = time.perf_counter()
    for layout in ("single-lap", "double-lap", "strap", "double-strap", "tube-lap"):
        for t, G, length in (
            (1e-3, 1e3, 25.0),
            (1.6, 1e9, 25.0),
            (1.6, 1e-6, 25.0),
            (1.6, 1e3, 1e6),
            (1e-3, 1e7, 1e5),
            (50.0, 1e-3, 0.1),
        ):
            plate = Plate(70e3, t)
            lap = Lap(layout, plate, plate, BondLine(G, 2.7 * G, 0.2), width=25.0, diameter=200.0)
            response = respond(lap, length, Action(strain=1e-5))
            fields = response.under(1e-3)
            assert all(np.isfinite(each).all() for each in fields.values()), (layout, t, G, length)
            free = respond(lap, length)
            carried = np.trapezoid(free.under(1.0)["shear"][0], free.at[0]) * lap.bond_width * lap.bonds
            assert carried == pytest.approx(1.0, rel=0.01), (layout, t, G, length)
    assert time.perf_counter() - start < 20


def test_a_stiff_adhesive_tends_to_the_root_law():
    """Peak shear of a long lap goes with the root of the adhesive's stiffness (shear lag)."""
    plate = Plate(70e3, 2.0)
    peak = [
        peaks(respond(Lap("tube-lap", plate, plate, BondLine(G, G, 0.2), diameter=500.0), 500.0).under(1.0))["shear"][0]
        for G in (1e5, 1e7, 1e9)
    ]
    assert peak[1] / peak[0] == pytest.approx(10, rel=1e-4)
    assert peak[2] / peak[1] == pytest.approx(10, rel=1e-4)


def test_edge_moment_factors_have_their_limits():
    D = 1e5
    assert hart_smith_factor(0.0, 25.0, bending_stiffness=D) == 1.0
    assert goland_reissner_factor(0.0, 25.0, bending_stiffness=D) == 1.0
    assert float(goland_reissner_factor(1e9, 1e4, bending_stiffness=D)) == pytest.approx(0.261203874964)
    edge, butt = strap_factors(0.0, 25.0, stretching=(1e6, 1e6), bending=(D, D), arm=2.0)
    assert (float(edge), float(butt)) == pytest.approx((0.0, 1.0))
    edge, butt = strap_factors(1e9, 1e3, stretching=(1e6, 1e6), bending=(D, D), arm=2.0)
    assert float(butt) == pytest.approx(0.5)  # a long strap lies in the line of the load


def test_strap_moments_agree_with_a_large_deflection_beam():
    """The beam-column of plate, overlap and strap, solved as a boundary-value problem."""
    from scipy.integrate import solve_bvp

    P, L, h, EA, D = 3000.0, 25.0, 1.62, (2.8e6, 1.5e6), (6e5, 2e5)
    e = h * EA[1] / sum(EA)
    together = D[0] + D[1] + h**2 * EA[0] * EA[1] / sum(EA)
    far = 12 / math.sqrt(P / D[0])

    def equations(x, y):  # overlap on [0, L] from the butt, plate on [0, far] beyond it, side by side
        return np.vstack([L * y[1], L * P / together * (y[0] + e), far * y[3], far * P / D[0] * y[2]])

    def ends(a, b):
        return np.array([a[1], b[0] - a[2], b[1] - a[3], b[2]])

    found = solve_bvp(equations, ends, np.linspace(0, 1, 101), np.zeros((4, 101)), tol=1e-9)
    edge, butt = strap_factors(P, L, stretching=EA, bending=D, arm=h)
    assert -found.y[2, 0] / h == pytest.approx(float(edge), rel=1e-4)
    assert (h + found.y[0, 0]) / h == pytest.approx(float(butt), rel=1e-4)


@pytest.mark.parametrize(
    ("change", "field"),
    [
        ({"width": 0.0}, "width"),
        ({"inner": Plate(-1.0, 2.0)}, "inner.E"),
        ({"outer": Plate(7e4, math.nan)}, "outer.thickness"),
        ({"bond": BondLine(0.0, 1.0, 1.0)}, "shear_modulus"),
        ({"layout": "scarf"}, "slope"),
        ({"layout": "tube-lap"}, "diameter"),
        ({"layout": "tube-lap", "diameter": 3.0}, "inner.thickness"),
    ],
)
def test_a_size_that_no_joint_has_is_refused_by_name(change, field):
    make = {"layout": "single-lap", "inner": ALUMINIUM, "outer": ALUMINIUM, "bond": EPOXY, "width": 25.0}
    with pytest.raises(InputError) as caught:
        respond(Lap(**{**make, **change}), 12.7)
    assert caught.value.field == field


def test_a_tube_lap_that_bends_is_refused():
    lap = Lap("tube-lap", ALUMINIUM, ALUMINIUM, EPOXY, diameter=25.0)
    with pytest.raises(InputError, match="axial force and torque"):
        respond(lap, 20.0, Action(moment=1.0))
