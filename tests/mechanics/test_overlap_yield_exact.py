"""Every layout's elastic-plastic strength, shear and end strains against an independent boundary-value solution."""

from __future__ import annotations

import math

import numpy as np
import pytest

from server.mechanics.overlap_laps import Action, BondLine, Lap, Plate
from server.mechanics.overlap_strength import yield_strength, yielded_response
from tests.mechanics.overlap_yield_oracles import Beams, bars_at_limit
from tests.mechanics.test_overlap_laps import ALUMINIUM, EPOXY, STEEL, WITHIN, beam, ends_of

TAU, B = 30.0, 25.0


def beams_of(lap, length, action, tau=TAU):
    """The joint as two beams on the bond, from sizes alone."""
    b, bond = lap.width, lap.bond
    lower, guided = beam(lap.inner, b), lap.layout == "double-strap"
    if lap.layout.startswith("double"):
        lower = (beam(lap.inner, b, 0.5)[0], np.inf, lap.inner.thickness / 2)
    return Beams(
        length,
        beam(lap.outer, b),
        lower,
        bond.shear_modulus * b / bond.thickness,
        bond.E * b / bond.thickness,
        tau * b,
        (lambda P: ((0.0, 0.0, 0.0), (P / 2, 0.0, 0.0), (P / 2, 0.0, 0.0)))
        if lap.layout.startswith("double")
        else lambda P: ends_of(lap, length, P, action),
        action.strain,
        guided,
    )


def agree(found, load, s, slip, limit, at_yield):
    """Strength, both end strains and the shear all along: slips found and exact at the same places, ends among them."""
    assert found.settled[0]
    assert found.load[0] == pytest.approx(load, rel=1e-3)
    assert s[[0, -1]] == pytest.approx(slip[[0, -1]], abs=WITHIN * limit)
    here, there = (np.clip(each / at_yield, -1, 1) for each in (s, slip))
    assert here == pytest.approx(there, abs=WITHIN)


SOFT = BondLine(300.0, 800.0, 0.3)
CASES = [
    pytest.param("double-lap", Plate(70e3, 3.0, 0.33), Plate(210e3, 1.0, 0.3), EPOXY, 30.0, Action(), id="outer-stiff"),
    pytest.param("double-lap", Plate(210e3, 4.0, 0.3), Plate(70e3, 1.0, 0.33), EPOXY, 18.0, Action(), id="inner-stiff"),
    pytest.param("double-lap", ALUMINIUM, STEEL, SOFT, 40.0, Action(strain=-4e-4), id="cooled"),
    pytest.param("double-strap", Plate(70e3, 3.0, 0.33), Plate(210e3, 1.0, 0.3), EPOXY, 30.0, Action(), id="strap"),
    pytest.param("double-strap", STEEL, ALUMINIUM, EPOXY, 40.0, Action(strain=3e-4), id="strap-warmed"),
    pytest.param("single-lap", ALUMINIUM, STEEL, EPOXY, 20.0, Action(), id="single"),
    pytest.param("single-lap", STEEL, Plate(70e3, 3.0, 0.33), SOFT, 35.0, Action(strain=4e-4), id="single-warmed"),
    pytest.param("strap", ALUMINIUM, STEEL, EPOXY, 20.0, Action(), id="one-sided"),
    pytest.param("strap", Plate(70e3, 2.0), Plate(70e3, 2.0), EPOXY, 30.0, Action(strain=-3e-4), id="one-sided-cooled"),
]


@pytest.mark.parametrize("strain", [0.06, 0.2])
@pytest.mark.parametrize(("layout", "inner", "outer", "bond", "length", "action"), CASES)
def test_plates_that_yield_agree_with_the_exact_zones(layout, inner, outer, bond, length, action, strain):
    lap = Lap(layout, inner, outer, bond, width=B)
    at_yield, limit = TAU / bond.shear_modulus * bond.thickness, (strain + TAU / bond.shear_modulus) * bond.thickness
    found = yield_strength(lap, length, action, shear_yield=TAU, strain_limit=limit / bond.thickness)
    at, s = found.course.at[0], found.course.slip[0, :, 0]
    # only the guess is taken from what is tested
    inside = at[np.abs(s) <= at_yield]
    guess = found.load[0], inside.min(), length - inside.max()
    exact = beams_of(lap, length, action)
    zones = exact.at_limit(limit, guess)
    some = np.unique(np.append(np.arange(0, len(at), max(len(at) // 50, 1)), len(at) - 1))
    at, s = at[some], s[some]
    slip, opening = exact.slip(at, *zones)
    yielded = (at < zones[1] - 1e-9) | (at > length - zones[2] + 1e-9)
    assert (np.abs(slip[~yielded]) <= at_yield * (1 + 1e-6)).all()  # the zones are where they were assumed
    assert (slip[yielded] >= at_yield * (1 - 1e-6)).all()
    assert np.abs(slip).max() == pytest.approx(limit, rel=1e-6)
    agree(found, zones[0], s, slip, limit, at_yield)
    # what the diagram shows under that load
    _, fields = yielded_response(lap, length, zones[0], action, shear_yield=TAU)
    assert fields["shear"][some] == pytest.approx(np.clip(slip / at_yield, -1, 1) * TAU, abs=WITHIN * TAU)
    pull = bond.E / bond.thickness * opening
    assert fields["peel"][some] == pytest.approx(pull, abs=WITHIN * np.abs(pull).max())
    quick = yield_strength(lap, length, action, shear_yield=TAU, strain_limit=limit / bond.thickness, whole=False)
    assert quick.load[0] == pytest.approx(zones[0], rel=1e-3)  # the coarser mesh of the overlap curve


def bars_agree(found, load, x, s, limit, ks, flow):
    at_yield = flow / ks
    at = found.course.at[0]
    agree(found, load, found.course.slip[0, :, 0], np.interp(at, x, s), limit, at_yield)
    assert np.trapezoid(np.clip(ks * s, -flow, flow), x) == pytest.approx(load, rel=1e-4)
    assert np.abs(s).max() > 1.2 * at_yield  # it yields


def guess_of(found):
    return found.load[0], *found.course.slip[0, [0, -1], 0]


@pytest.mark.parametrize(("free", "strain"), [(5e-4, 0.08), (0.0, 0.3)])
@pytest.mark.parametrize(
    ("inner", "outer"), [(Plate(70e3, 2.0), Plate(40e3, 2.0)), (Plate(21e4, 3.0), Plate(70e3, 1.0))]
)
def test_tubes_that_yield_along_their_axis_agree_with_the_exact_course(inner, outer, free, strain):
    lap = Lap("tube-lap", inner, outer, EPOXY, diameter=30.0)
    L, bore, around = 40.0, 15.2, 2 * math.pi * 15.1
    found = yield_strength(lap, L, Action(strain=free), shear_yield=TAU, strain_limit=strain)
    area_i = math.pi * (15**2 - (15 - inner.thickness) ** 2)
    area_o = math.pi * ((bore + outer.thickness) ** 2 - bore**2)
    soft = 1 / (outer.E * area_o), 1 / (inner.E * area_i)
    ks, flow, limit = 1000 / 0.2 * around, TAU * around, strain * 0.2
    exact = bars_at_limit(L, lambda x: soft[0], lambda x: soft[1], ks, flow, limit, guess_of(found), mismatch=free)
    bars_agree(found, *exact, limit, ks, flow)


@pytest.mark.parametrize("strain", [0.08, 0.3])
@pytest.mark.parametrize(
    ("inner", "outer"),
    [(Plate(70e3, 2.5, G=26e3), Plate(40e3, 1.5, G=15e3)), (Plate(70e3, 15.0, 0.33), Plate(21e4, 1.0, 0.3))],
)
def test_tubes_that_yield_under_torque_agree_with_the_exact_course(inner, outer, strain):
    """A turn of one wall against the other shears the bond by radius times turn; the second inner one is a bar."""
    lap = Lap("tube-lap", inner, outer, EPOXY, diameter=30.0)
    L, r, bore = 30.0, 15.1, 15.2
    found = yield_strength(lap, L, Action(torque=1.0), shear_yield=TAU, strain_limit=strain)
    J_i = math.pi / 2 * (15**4 - (15 - inner.thickness) ** 4)
    J_o = math.pi / 2 * ((bore + outer.thickness) ** 4 - bore**4)
    G_i, G_o = (p.G if p.G else p.E / 2 / (1 + p.nu) for p in (inner, outer))
    # by torque T and turn phi: T' = 2 pi r^2 tau, slip = r phi; the load is torque over radius
    soft = r / (G_o * J_o), r / (G_i * J_i)
    ks, flow, limit = 1000 / 0.2 * 2 * math.pi * r**2, TAU * 2 * math.pi * r**2, strain * 0.2
    guess = guess_of(found)
    torque, x, s = bars_at_limit(L, lambda x: soft[0], lambda x: soft[1], ks, flow, limit, (guess[0] * r, *guess[1:]))
    bars_agree(found, torque / r, x, s, limit, ks / r, flow / r)


@pytest.mark.parametrize("strain", [0.06, 0.2])
@pytest.mark.parametrize("tip", [0.0, 1.0])
@pytest.mark.parametrize(("E_i", "E_o"), [(70e3, 11e3), (12e3, 60e3)])
def test_unlike_scarfs_that_yield_agree_with_the_exact_course(E_i, E_o, tip, strain):
    t, L = 10.0, 50.0
    lap = Lap("scarf", Plate(E_i, t, tip=tip), Plate(E_o, t, tip=tip), EPOXY, width=B, slope=L / (t - 2 * tip))
    found = yield_strength(lap, L, shear_yield=TAU, strain_limit=strain)
    cosine = math.cos(math.atan((t - 2 * tip) / L))
    ks, flow, limit = 1000 * B / 0.2 / cosine, TAU * B / cosine**2, strain * 0.2 / cosine

    def thick(x):
        return tip + (t - 2 * tip) * x / L

    exact = bars_at_limit(
        L,
        lambda x: 1 / (E_o * B * thick(x)),
        lambda x: 1 / (E_i * B * thick(L - x)),
        ks,
        flow,
        limit,
        guess_of(found),
    )
    bars_agree(found, *exact, limit, ks, flow)
