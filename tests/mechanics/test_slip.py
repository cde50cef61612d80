"""Members with slip: limits, equilibrium, symmetry, pieces that stop short, and a finite-element library beside it."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.beam import Beam, Couple, LineLoad, Load, PointLoad, Stretch, Support, evaluate, extremes, solve
from server.mechanics.slip import FlexibleJoint, Layer, LayeredMember, Share, SlipResponse, Zone, solve_slip
from tests.mechanics.slip_fem import solve_by_elements

L = 4200.0
PINS = [Support(0, "pin"), Support(L, "pin")]
FLOOR = [Layer(0, L, 22.8e6, 427.5e6, 227.5), Layer(0, L, 108.9e6, 439.23e9, 110.0)]
LOADS: list[list[Load]] = [[LineLoad(0, L, 1.5, 3.0), PointLoad(1200, 3000)], [LineLoad(900, 3000, 2, 1)]]
SYSTEMS = {
    "simple": (PINS, ()),
    "cantilever": ([Support(0, "fixed")], ()),
    "two spans": ([Support(0, "pin"), Support(2500, "pin"), Support(L, "pin")], ()),
    "held ends": ([Support(0, "fixed"), Support(L, "fixed")], ()),
    "springs": ([Support(0, "spring", 500.0), Support(2500, "pin"), Support(L, "spring", 30.0)], ()),
    "hinge": ([Support(0, "pin"), Support(2500, "pin"), Support(L, "fixed")], (1000.0,)),
    "overhang": ([Support(600, "pin"), Support(3900, "pin")], ()),
}


def floor(k: float, system: str = "simple", GA: float | None = None) -> LayeredMember:
    supports, hinges = SYSTEMS[system]
    shear = [] if GA is None else [Stretch(0, L, 1.0, GA)]
    return LayeredMember(L, supports, hinges, FLOOR, [FlexibleJoint(1, 0, (Zone(0, L, k),))], shear)


def plain(EI: float, system: str = "simple", GA: float = np.inf) -> Beam:
    supports, hinges = SYSTEMS[system]
    return Beam(L, supports, hinges, [Stretch(0, L, EI, GA)])


def stiffness() -> tuple[float, float]:
    """EI of the layers tied together, and of the layers lying loose."""
    EA = np.array([layer.EA for layer in FLOOR])
    z = np.array([layer.height for layer in FLOOR])
    loose = sum(layer.EI for layer in FLOOR)
    return loose + float(EA @ (z - EA @ z / EA.sum()) ** 2), loose


RIGID, LOOSE = stiffness()


def peaks(response: SlipResponse) -> np.ndarray:
    found = response.response.extremes()
    return np.maximum(np.abs(found.max), np.abs(found.min))


def difference(k: float, system: str, EI: float, GA: float = np.inf) -> float:
    found = peaks(solve_slip(floor(k, system, None if np.isinf(GA) else GA), LOADS))
    rigid = solve(plain(EI, system, GA), LOADS).extremes()
    expected = np.maximum(np.abs(rigid.max), np.abs(rigid.min))
    return float(np.abs(found / expected - 1).max())


@pytest.mark.parametrize("system", SYSTEMS)
def test_stiff_joints_tend_to_the_rigid_member_in_proportion(system: str) -> None:
    """At 1e6 times the stiffness at which the joint begins to matter, 1e-4; ten times stiffer, a tenth."""
    EA_star = 1 / sum(1 / layer.EA for layer in FLOOR)
    unit = EA_star / L**2
    errors = [difference(unit * ratio, system, RIGID) for ratio in (1e6, 1e7, 1e8, 1e10)]
    assert errors[0] <= 1e-4
    assert errors[1] == pytest.approx(errors[0] / 10, rel=0.05)
    assert errors[2] == pytest.approx(errors[0] / 100, rel=0.05)
    assert errors[3] == pytest.approx(errors[0] / 1e4, rel=0.05)


@pytest.mark.parametrize("system", SYSTEMS)
@pytest.mark.parametrize("GA", [np.inf, 4e5])
def test_no_joint_leaves_the_layers_loose(system: str, GA: float) -> None:
    assert difference(0.0, system, LOOSE, GA) < 1e-9


@pytest.mark.parametrize("system", SYSTEMS)
def test_shear_deformation_is_that_of_the_beam(system: str) -> None:
    assert difference(1e13, system, RIGID, 4e5) < 1e-9


def three_layers(supports: list[Support]) -> LayeredMember:
    """Unlike layers that stop short, zones, two joints between the same layers, one of them partial."""
    long = 5000.0
    layers = [Layer(0, long, 45e6, 3e9, 20.0), Layer(400, long, 80e6, 30e9, 100.0), Layer(900, 4100, 30e6, 1e9, 190.0)]
    joints = [
        FlexibleJoint(0, 1, (Zone(400, 1500, 40.0), Zone(1500, long, 12.0))),
        FlexibleJoint(2, 1, (Zone(0, long, 25.0),)),
        FlexibleJoint(1, 2, (Zone(2000, 2600, 100.0),)),
    ]
    return LayeredMember(long, supports, [], layers, joints)


@pytest.mark.parametrize(
    "supports",
    [
        [Support(0, "pin"), Support(3000, "pin"), Support(5000, "fixed")],
        [Support(0, "pin"), Support(3000, "spring", 900.0), Support(5000, "pin")],
    ],
    ids=["pins and a fixed end", "a spring between"],
)
@pytest.mark.parametrize("narrowed", [False, True], ids=["whole", "in part"])
def test_three_layers_agree_with_finite_elements(supports: list[Support], narrowed: bool) -> None:
    member = three_layers(supports)
    if narrowed:  # as effective widths that differ from stretch to stretch
        shares = ((Share(400, 900, 0.5),), (Share(400, 900, 0.8), Share(900, 4100, 0.35)), (Share(900, 4100, 0.6),))
        layers = [replace(layer, shares=each) for layer, each in zip(member.layers, shares, strict=True)]
        member = LayeredMember(member.length, supports, [], layers, member.joints)
    found = solve_slip(member, [[LineLoad(0, 5000, 2, 5), PointLoad(1200, 3000)]])
    places = [0, 400, 900, 1200, 1500, 2000, 2600, 3000, 4100, 5000]
    other = solve_by_elements(member, places, line=lambda x: 2 + 3 * x / 5000, points=[(1200, 3000)], cells=24)
    breaks = found.response.breaks
    pairs = [(found.response.deflection[0], other.points, other.deflection)]
    pairs += [(found.curves.flow[j, 0], other.middles, other.flow[j]) for j in range(3)]
    pairs += [(found.curves.axial[i, 0], other.middles, other.axial[i]) for i in range(3)]
    for number, (curve, x, expected) in enumerate(pairs):
        value = evaluate(breaks, curve, x)
        assert np.abs(value - expected).max() < 2e-3 * np.abs(expected).max(), number


def test_joints_between_the_same_layers_share_by_stiffness() -> None:
    one = solve_slip(floor(12.0), LOADS)
    joints = [FlexibleJoint(1, 0, (Zone(0, L, 9.0),)), FlexibleJoint(0, 1, (Zone(0, L, 3.0),))]
    two = solve_slip(LayeredMember(L, PINS, [], FLOOR, joints), LOADS)
    np.testing.assert_allclose(two.response.deflection[:, :, 0], one.response.deflection[:, :, 0], rtol=1e-9)
    np.testing.assert_allclose(two.curves.flow[0, ..., 0], 0.75 * one.curves.flow[0, ..., 0], rtol=1e-9, atol=1e-12)
    np.testing.assert_allclose(two.curves.flow[1, ..., 0], -0.25 * one.curves.flow[0, ..., 0], rtol=1e-9, atol=1e-12)


def test_split_in_two_a_layer_stays_the_same() -> None:
    """Two like layers at one height, each with half the joint, are one layer."""
    half = Layer(0, L, FLOOR[0].EA / 2, FLOOR[0].EI / 2, FLOOR[0].height)
    joints = [FlexibleJoint(1, i, (Zone(0, L, 5.0),)) for i in (0, 2)]
    parts = solve_slip(LayeredMember(L, PINS, [], [half, FLOOR[1], half], joints), LOADS)
    whole = solve_slip(floor(10.0), LOADS)
    np.testing.assert_allclose(peaks(parts), peaks(whole), rtol=1e-10)


def test_zone_ends_change_nothing_where_the_stiffness_stays() -> None:
    ends = np.linspace(0, L, 30)
    zones = tuple(Zone(a, b, 10.0) for a, b in pairwise(ends))
    cut = solve_slip(LayeredMember(L, PINS, [], FLOOR, [FlexibleJoint(1, 0, zones)]), LOADS)
    np.testing.assert_allclose(peaks(cut), peaks(solve_slip(floor(10.0), LOADS)), rtol=1e-10)


def test_a_layer_that_stops_has_no_force_at_its_ends_and_all_layers_balance() -> None:
    found = solve_slip(three_layers([Support(0, "pin"), Support(5000, "pin")]), [[LineLoad(0, 5000, 3, 3)]])
    breaks, axial = found.response.breaks, found.curves.axial[:, 0]
    size = np.abs(evaluate(breaks, axial, 2500.0)).max()
    assert abs(evaluate(breaks, axial[2], 900.0)) < 1e-9 * size
    assert abs(evaluate(breaks, axial[2], 4100.0, "left")) < 1e-9 * size
    assert np.abs(axial[..., 0].sum(0)).max() < 1e-9 * size
    assert np.abs(evaluate(breaks, axial[2], [200.0, 4600.0])).max() == 0


def test_moment_is_bending_of_the_layers_and_their_couple() -> None:
    found = solve_slip(floor(10.0), LOADS)
    x = np.linspace(50, L - 50, 41)
    breaks = found.response.breaks
    kappa = evaluate(breaks, found.curves.curvature, x)
    axial = evaluate(breaks, found.curves.axial, x)
    inner = -LOOSE * kappa - sum(layer.height * N for layer, N in zip(FLOOR, axial, strict=True))
    moment = evaluate(breaks, found.response.moment, x)
    np.testing.assert_allclose(inner, moment, rtol=1e-4, atol=1e-5 * float(np.abs(moment).max()))


def test_a_hinge_cuts_every_layer() -> None:
    found = solve_slip(floor(10.0, "hinge"), LOADS)
    breaks, size = found.response.breaks, np.abs(found.curves.axial[..., 0]).max()
    for side in ("left", "right"):
        assert np.abs(evaluate(breaks, found.curves.axial, 1000.0, side)).max() < 1e-9 * size


def test_nothing_slides_at_a_fixed_support() -> None:
    found = solve_slip(floor(10.0, "cantilever"), LOADS)
    slip = evaluate(found.response.breaks, found.curves.slip[0], np.array([0.0, L]))
    assert np.abs(slip[:, 0]).max() < 1e-12 * np.abs(slip[:, 1]).max()


def test_combinations_are_sums_of_cases() -> None:
    factors = np.array([[1.35, 1.5], [1.0, -0.3]])
    found = solve_slip(floor(10.0, "two spans"), LOADS)
    mixed = found.combine(factors)
    x = np.linspace(0, L, 57)
    for name in ("deflection", "flow", "axial", "slip", "curvature", "shear", "moment"):
        own, parts = (evaluate(r.response.breaks, getattr(r.curves, name), x) for r in (mixed, found))
        expected = np.einsum("kc,...cx->...kx", factors, parts)
        np.testing.assert_allclose(own, expected, rtol=1e-9, atol=1e-9 * float(np.abs(expected).max()))
    np.testing.assert_allclose(mixed.reaction_force, factors @ found.reaction_force)


@settings(max_examples=40, deadline=None)
@given(
    heights=st.lists(st.floats(0, 400), min_size=2, max_size=5, unique=True),
    axial=st.lists(st.floats(1e6, 1e8), min_size=5, max_size=5),
    own=st.lists(st.floats(1e7, 1e11), min_size=5, max_size=5),
    k=st.lists(st.floats(-4, 7), min_size=4, max_size=4),
    at=st.floats(300, 3900),
)
def test_any_stack_lies_between_loose_and_rigid_and_balances(
    heights: list[float], axial: list[float], own: list[float], k: list[float], at: float
) -> None:
    layers = [Layer(0, L, axial[i], own[i], z) for i, z in enumerate(heights)]
    joints = [FlexibleJoint(i, i + 1, (Zone(0, L, 10 ** k[i]),)) for i in range(len(layers) - 1)]
    loads: list[Load] = [PointLoad(at, 1000), LineLoad(0, L, 1, 0)]
    found = solve_slip(LayeredMember(L, PINS, [], layers, joints), [loads])
    EA = np.array([layer.EA for layer in layers])
    z = np.array(heights)
    loose = sum(layer.EI for layer in layers)
    rigid = loose + float(EA @ (z - EA @ z / EA.sum()) ** 2)
    sag = float(extremes(found.response.breaks, found.response.deflection).max[0])
    low, high = (float(solve(plain(EI), [loads]).extremes().max[2, 0]) for EI in (rigid, loose))
    assert low * (1 - 1e-9) <= sag <= high * (1 + 1e-9)
    assert found.reaction_force.sum() == pytest.approx(1000 + L / 2, rel=1e-9)
    mirrored = solve_slip(LayeredMember(L, PINS, [], layers, joints), [[PointLoad(L - at, 1000), LineLoad(0, L, 0, 1)]])
    assert float(extremes(mirrored.response.breaks, mirrored.response.deflection).max[0]) == pytest.approx(
        sag, rel=1e-8
    )


def test_a_couple_is_shared_by_bending_stiffness() -> None:
    """Just beside the couple every layer takes it by its own EI: only later do the joints make the rest."""
    found = solve_slip(floor(10.0), [[Couple(2000, 4e6)]])
    breaks = found.response.breaks
    jump = evaluate(breaks, found.curves.curvature[0], 2000.0) - evaluate(
        breaks, found.curves.curvature[0], 2000.0, "left"
    )
    assert float(jump) == pytest.approx(4e6 / LOOSE, rel=1e-8)


@pytest.mark.parametrize(
    ("field", "change"),
    [
        ("layers", {"layers": []}),
        ("layers[0].EA", {"layers": [Layer(0, L, 0.0, 1e9, 0)]}),
        ("layers[0].EI", {"layers": [Layer(0, L, 1e6, -1.0, 0)]}),
        ("layers[0].end", {"layers": [Layer(500, 400, 1e6, 1e9, 0)]}),
        ("layers[0].height", {"layers": [Layer(0, L, 1e6, 1e9, float("nan"))]}),
        ("layers", {"layers": [Layer(0, 2000, 1e6, 1e9, 0), Layer(2100, L, 1e6, 1e9, 0)]}),
        ("joints[0].second", {"joints": [FlexibleJoint(0, 5, ())]}),
        ("joints[0].second", {"joints": [FlexibleJoint(1, 1, ())]}),
        ("joints[0].zones[0].stiffness", {"joints": [FlexibleJoint(0, 1, (Zone(0, L, -1),))]}),
        ("joints[0].zones", {"joints": [FlexibleJoint(0, 1, (Zone(0, 2000, 1), Zone(1500, L, 1)))]}),
    ],
)
def test_an_unusable_member_is_refused_by_field(field: str, change: dict) -> None:
    given: dict = {"length": L, "supports": PINS, "hinges": [], "layers": FLOOR, "joints": [], **change}
    with pytest.raises(InputError) as caught:
        LayeredMember(**given)
    assert caught.value.field == field


def test_a_member_that_can_move_is_refused() -> None:
    with pytest.raises(InputError, match="only support"):
        solve_slip(LayeredMember(L, [Support(0, "pin")], [], FLOOR, []), LOADS)
