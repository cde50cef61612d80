"""Tapered laps and blunt scarfs against an independent boundary-value solution, and in limits with a known answer."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.overlap_laps import Action, BondLine, Lap, Plate, peaks, respond
from server.mechanics.overlap_strength import yield_strength, yielded_response
from tests.mechanics.overlap_oracles import two_bars, two_tapered_beams
from tests.mechanics.test_overlap_laps import EPOXY, WITHIN, ends_of

b, L = 25.0, 25.0
FLAT = Plate(70e3, 2.0, 0.33)
KS, KP = EPOXY.shear_modulus * b / EPOXY.thickness, EPOXY.E * b / EPOXY.thickness


def thins(plate, free, share=1.0):
    """(EA, EI, arm) along the bond of a plate that thins towards 0 or L, written out again."""

    def along(x):
        t = np.full(x.shape, plate.thickness)
        if plate.taper:
            inward = x if free == "left" else L - x
            t = np.minimum(t, plate.tip + (plate.thickness - plate.tip) * inward / plate.taper)
        EA = plate.E / (1 - plate.nu**2) * t * b * share
        return EA, EA * t**2 / 12 if share == 1 else np.full(x.shape, 1e14), t / 2

    return along


def places(*plates):
    outer, inner = plates
    return [each for each in (outer.taper, L - inner.taper) if 0 < each < L]


@pytest.mark.parametrize(
    ("layout", "inner", "outer", "action"),
    [
        ("single-lap", replace(FLAT, taper=25.0, tip=0.5), replace(FLAT, taper=10.0, tip=0.5), Action(strain=4e-4)),
        (
            "single-lap",
            Plate(11e3, 12.0, taper=12.0, tip=2.0),
            Plate(70e3, 3.0, 0.3, taper=6.0, tip=0.8),
            Action(moment=9e3),
        ),
        ("strap", FLAT, replace(FLAT, taper=8.0, tip=0.4), Action()),
    ],
)
def test_tapered_laps_agree_with_the_boundary_value_solution(layout, inner, outer, action):
    P, lap = 3000.0, Lap(layout, inner, outer, EPOXY, width=b)
    response = respond(lap, L, action)
    fields = response.under(P)
    x, q, pull, y = two_tapered_beams(
        L, thins(outer, "left"), thins(inner, "right"), KS, KP, ends_of(lap, L, P, action),
        breaks=places(outer, inner), mismatch=action.strain,
    )  # fmt: skip
    shear, peel = (np.interp(x, response.at[0], fields[name][0]) for name in ("shear", "peel"))
    assert np.abs(shear - q / b).max() < WITHIN * np.abs(q / b).max()
    assert np.abs(peel - pull / b).max() < WITHIN * np.abs(pull / b).max()
    for name, plate, free, N, M in (("outer", outer, "left", 0, 1), ("inner", inner, "right", 2, 3)):
        t = 2 * thins(plate, free)(x)[2]
        stress = np.abs(y[N]) / (b * t) + 6 * np.abs(y[M]) / (b * t**2)
        assert peaks(fields)[name][0] == pytest.approx(stress.max(), rel=WITHIN)


def test_a_tapered_double_lap_agrees_with_the_boundary_value_solution():
    inner, outer, P = Plate(70e3, 4.0, 0.33), Plate(210e3, 1.5, 0.3, taper=12.0, tip=0.3), 9000.0
    response = respond(Lap("double-lap", inner, outer, EPOXY, width=b), L)
    fields = response.under(P)
    ends = ((0.0, 0.0, 0.0), (P / 2, 0.0, 0.0), (P / 2, 0.0, 0.0))
    half = thins(inner, "right", 0.5)
    x, q, pull, _ = two_tapered_beams(L, thins(outer, "left"), half, KS, KP, ends, breaks=[12.0])
    shear, peel = (np.interp(x, response.at[0], fields[name][0]) for name in ("shear", "peel"))
    assert np.abs(shear - q / b).max() < WITHIN * np.abs(q / b).max()
    assert np.abs(peel - pull / b).max() < WITHIN * np.abs(pull / b).max()


def test_a_tapered_lap_whose_bond_yields_agrees_with_the_boundary_value_solution():
    plate = replace(FLAT, taper=10.0, tip=0.5)
    lap = Lap("single-lap", plate, plate, EPOXY, width=b)
    found = yield_strength(lap, L, shear_yield=30.0, strain_limit=0.2)
    P = 0.8 * float(found.load[0])
    at, fields = yielded_response(lap, L, P, Action(), shear_yield=30.0)
    x, q, pull, _ = two_tapered_beams(
        L, thins(plate, "left"), thins(plate, "right"), KS, KP, ends_of(lap, L, P, Action()),
        breaks=[10.0, 15.0], yield_flow=30.0 * b,
    )  # fmt: skip
    assert np.abs(np.interp(x, at, fields["shear"]) - q / b).max() < WITHIN * 30
    assert np.abs(np.interp(x, at, fields["peel"]) - pull / b).max() < WITHIN * np.abs(pull / b).max()


def test_a_taper_relieves_the_end_it_is_at_and_one_of_no_length_changes_nothing():
    plain = peaks(respond(Lap("double-lap", FLAT, FLAT, EPOXY, width=b), 40.0).under(8000.0))
    for taper, low, high in ((1e-4, 0.999, 1.001), (15.0, 0.3, 0.9)):
        outer = replace(FLAT, taper=taper, tip=0.4)
        found = peaks(respond(Lap("double-lap", FLAT, outer, EPOXY, width=b), 40.0).under(8000.0))
        assert low < found["peel"][0] / plain["peel"][0] < high


plates = st.builds(Plate, st.floats(5e3, 3e5), st.floats(1.0, 20.0), st.floats(0.0, 0.4))
bonds = st.builds(BondLine, st.floats(0.5, 5e3), st.floats(1.0, 1e4), st.floats(0.05, 4.0))


@settings(max_examples=20, deadline=None)
@given(plates, plates, bonds, st.floats(3.0, 200.0), st.floats(0.05, 1.5), st.floats(0.05, 1.0))
def test_the_stress_adds_up_to_the_load_and_swapping_the_plates_mirrors_it(inner, outer, bond, length, taper, tip):
    one = replace(inner, taper=taper * length, tip=tip * inner.thickness)
    two = replace(outer, taper=taper * length / 2, tip=tip * outer.thickness)
    here, there = (respond(Lap("single-lap", *pair, bond, width=b), length) for pair in ((one, two), (two, one)))
    fields, mirrored = here.under(1000.0), there.under(1000.0)
    assert np.trapezoid(fields["shear"][0], here.at[0]) * b == pytest.approx(1000.0, rel=0.01)
    assert peaks(fields)["shear"][0] == pytest.approx(peaks(mirrored)["shear"][0], rel=1e-5)
    assert peaks(fields)["peel"][0] == pytest.approx(peaks(mirrored)["peel"][0], rel=1e-5, abs=1e-9)


def test_a_scarf_with_blunt_tips_agrees_with_the_boundary_value_solution():
    tip, t, slope, P = 1.5, 12.0, 6.0, 5000.0
    inner, outer = Plate(70e3, t, tip=tip), Plate(11e3, t, tip=tip)
    length = slope * (t - 2 * tip)
    response = respond(Lap("scarf", inner, outer, EPOXY, width=b, slope=slope), length)
    fields = response.under(P)
    cosine = slope / np.hypot(1, slope)
    grown = lambda x: tip + (t - 2 * tip) * x / length  # noqa: E731
    x, q = two_bars(
        length, lambda x: 1 / (11e3 * b * grown(x)), lambda x: 1 / (70e3 * b * (t - grown(x))), KS / cosine, P
    )
    shear = np.interp(x, response.at[0], fields["shear"][0])
    assert np.abs(shear - q * cosine**2 / b).max() < WITHIN * np.abs(q).max() * cosine**2 / b
    assert fields["inner"][0, 0] == pytest.approx(P / (b * (t - tip)), rel=1e-6)  # all on what is left beside the tip


@pytest.mark.parametrize(
    ("layout", "inner", "outer", "field"),
    [
        ("double-lap", replace(FLAT, taper=5.0, tip=1.0), FLAT, "inner.taper"),
        ("strap", replace(FLAT, taper=5.0, tip=1.0), FLAT, "inner.taper"),
        ("tube-lap", FLAT, replace(FLAT, taper=5.0, tip=1.0), "outer.taper"),
        ("single-lap", FLAT, replace(FLAT, taper=5.0), "outer.tip"),
        ("single-lap", FLAT, replace(FLAT, taper=5.0, tip=3.0), "outer.tip"),
        ("scarf", replace(FLAT, tip=1.2), replace(FLAT, tip=1.2), "inner.tip"),
    ],
)
def test_a_taper_that_no_joint_has_is_refused_by_name(layout, inner, outer, field):
    with pytest.raises(InputError) as caught:
        respond(Lap(layout, inner, outer, EPOXY, width=b, diameter=30.0, slope=8.0), L)
    assert caught.value.field == field
