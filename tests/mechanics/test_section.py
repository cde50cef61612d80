"""Section properties, horizontal cuts and GA against sums over level lines, and what must hold for any section."""

from __future__ import annotations

import math
from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from server.errors import InputError
from server.mechanics.section import (
    Piece,
    largest_cuts,
    piece_properties,
    properties,
    rectangle,
    reweighted,
    shear_stiffness,
)

sizes = st.floats(1.0, 400.0)
moduli = st.floats(10.0, 200_000.0)


def chords(rings, u):
    """Left and right ends of the material on the level line at ``u``, by crossing every edge: the tests' own way."""
    crossings = []
    for ring in rings:
        for (x0, u0), (x1, u1) in zip(ring, np.roll(ring, -1, axis=0), strict=True):
            if (u0 > u) != (u1 > u):
                crossings.append(x0 + (u - u0) * (x1 - x0) / (u1 - u0))
    crossings.sort()
    return list(zip(crossings[::2], crossings[1::2], strict=True))


def integrate(rings, value, extra=()):
    """Integral over a polygon of ``value(left, right, u)``, band by band."""
    levels = sorted({float(u) for ring in rings for u in ring[:, 1]} | set(extra))
    total = 0.0
    for low, high in pairwise(levels):
        total += quad(lambda u: sum(value(a, b, u) for a, b in chords(rings, u)), low, high)[0]
    return total


def all_rings(piece):
    return [piece.outline, *piece.holes]


ODD_PIECES = [
    Piece(
        "tee",
        np.array([(0, 0), (20, 0), (20, 60), (70, 60), (70, 80), (-30, 80), (-30, 60), (0, 60)], float),
        9000,
        500,
    ),
    Piece("wedge", np.array([(70, 60), (100, 60), (75, 110.0)]), 30000, 2000),
    Piece("turned", rectangle(40, 25, (-60, -30), turn=33), 12000, 700),
    Piece("tube", rectangle(80, 50, (150, 20)), 70000, 26000, holes=(rectangle(60, 20, (160, 30), turn=0),)),
    Piece("notched", np.array([(0, -90), (60, -70), (60, -10), (30, -40), (5, -10.0)]), 11000, 690),
]


@pytest.mark.parametrize("piece", ODD_PIECES, ids=lambda piece: piece.name)
def test_piece_properties_agree_with_sums_over_level_lines(piece):
    rings = all_rings(piece)
    area = integrate(rings, lambda a, b, u: b - a)
    across = integrate(rings, lambda a, b, u: (b * b - a * a) / 2) / area
    up = integrate(rings, lambda a, b, u: (b - a) * u) / area
    inertia = (
        integrate(rings, lambda a, b, u: (b - a) * (u - up) ** 2),
        integrate(rings, lambda a, b, u: ((b - across) ** 3 - (a - across) ** 3) / 3),
        integrate(rings, lambda a, b, u: ((b - across) ** 2 - (a - across) ** 2) / 2 * (u - up)),
    )
    found = piece_properties([piece])
    assert found.area[0] == pytest.approx(area, rel=1e-10)
    assert found.centroid[0] == pytest.approx([across, up], rel=1e-10)
    assert found.inertia[0] == pytest.approx(inertia, rel=1e-9, abs=1e-9 * max(inertia))


def test_a_clockwise_outline_and_an_anticlockwise_hole_are_read_alike():
    tube = ODD_PIECES[3]
    turned = replace(tube, outline=tube.outline[::-1], holes=(tube.holes[0][::-1],))
    found, expected = properties([turned]).EI, properties([tube]).EI
    assert found == pytest.approx(expected, rel=1e-14)


def test_a_corner_typed_twice_counts_once():
    tee = ODD_PIECES[0]
    closed = replace(tee, outline=np.vstack((tee.outline[:3], tee.outline[2:], tee.outline[:1])))
    assert values([closed]) == pytest.approx(values([tee]), rel=1e-14)
    assert len(properties([closed]).edges.start) == len(tee.outline)
    with pytest.raises(InputError, match="fewer than three distinct corners"):
        properties([tee, Piece("flat", np.array([(0, 0), (5, 0), (5, 0), (0, 0.0)]), 1.0)])


def test_section_properties_agree_with_sums_over_level_lines():
    found = properties(ODD_PIECES)
    EA = sum(p.E * integrate(all_rings(p), lambda a, b, u: b - a) for p in ODD_PIECES)
    across = sum(p.E * integrate(all_rings(p), lambda a, b, u: (b * b - a * a) / 2) for p in ODD_PIECES) / EA
    up = sum(p.E * integrate(all_rings(p), lambda a, b, u: (b - a) * u) for p in ODD_PIECES) / EA
    EI = sum(p.E * integrate(all_rings(p), lambda a, b, u: (b - a) * (u - up) ** 2) for p in ODD_PIECES)
    lateral = sum(
        p.E * integrate(all_rings(p), lambda a, b, u: ((b - across) ** 3 - (a - across) ** 3) / 3) for p in ODD_PIECES
    )
    product = sum(
        p.E * integrate(all_rings(p), lambda a, b, u: ((b - across) ** 2 - (a - across) ** 2) / 2 * (u - up))
        for p in ODD_PIECES
    )
    assert found.neutral_axis == pytest.approx([across, up], rel=1e-10)
    assert [found.EA, found.EI, found.EI_lateral] == pytest.approx([EA, EI, lateral], rel=1e-10)
    assert found.EI_product == pytest.approx(product, rel=1e-9)
    assert found.first_moments.sum() == pytest.approx(0.0, abs=1e-9 * np.abs(found.first_moments).max())


def stress_line(pieces, section):
    """ES(u) and b(u) by level lines."""
    up = section.neutral_axis[1]

    nodes, weights = np.polynomial.legendre.leggauss(2)  # exact: chord x height is quadratic in a band

    def first_moment(u):
        total = 0.0
        for piece in pieces:
            levels = sorted({u, *(float(v) for ring in all_rings(piece) for v in ring[:, 1] if v > u)})
            for low, high in pairwise(levels):
                for x, weight in zip(nodes, weights, strict=True):
                    v = low + (high - low) * (x + 1) / 2
                    chord = sum(b - a for a, b in chords(all_rings(piece), v))
                    total += piece.E * chord * (v - up) * weight * (high - low) / 2
        return total

    def width(u):
        return sum(b - a for piece in pieces for a, b in chords(all_rings(piece), u))

    return first_moment, width


def test_largest_cuts_are_the_largest_of_finely_spaced_cuts():
    section = properties(ODD_PIECES)
    first_moment, width = stress_line(ODD_PIECES, section)
    for piece, cut in zip(ODD_PIECES, largest_cuts(ODD_PIECES, section), strict=True):
        low, high = piece.outline[:, 1].min(), piece.outline[:, 1].max()
        levels = np.linspace(low + 1e-9, high - 1e-9, 201)
        sampled = max(first_moment(u) / width(u) for u in levels) / section.EI
        assert cut.intensity >= sampled * (1 - 1e-9), piece.name
        assert cut.intensity <= sampled * 1.002, piece.name  # the samples are not exactly at the place
        inside = np.clip(cut.up, low + 1e-7, high - 1e-7)
        near = [first_moment(v) / width(v) / section.EI for v in (inside - 1e-7, inside + 1e-7)]
        assert cut.intensity == pytest.approx(max(near), rel=1e-6), piece.name
        assert cut.intensity == pytest.approx(cut.first_moment / cut.width / section.EI, rel=1e-12)


def test_shear_stiffness_is_the_strain_energy_of_finely_spaced_cuts():
    section = properties(ODD_PIECES)
    first_moment, width = stress_line(ODD_PIECES, section)
    levels = np.unique([float(v) for piece in ODD_PIECES for ring in all_rings(piece) for v in ring[:, 1]])
    energy = 0.0
    nodes, weights = np.polynomial.legendre.leggauss(24)
    for low, high in pairwise(levels):
        for x, w in zip(nodes, weights, strict=True):
            u = low + (high - low) * (x + 1) / 2
            tau = first_moment(u) / width(u) / section.EI
            soft = sum((b - a) / piece.G for piece in ODD_PIECES for a, b in chords(all_rings(piece), u))
            energy += w * (high - low) / 2 * tau**2 * soft
    assert shear_stiffness(ODD_PIECES, section) == pytest.approx(1 / energy, rel=1e-7)


@given(width=sizes, depth=sizes, E=moduli, G=moduli, turn=st.sampled_from([0, 90, 180, 270, -90, 450]))
def test_a_rectangle_has_its_textbook_values(width, depth, E, G, turn):
    piece = Piece("plank", rectangle(width, depth, (3.0, -7.0), turn=turn), E, G, 480.0)
    section = properties([piece])
    b, h = (width, depth) if turn % 180 == 0 else (depth, width)
    assert section.area == pytest.approx(b * h, rel=1e-12)
    assert [section.EI, section.EI_lateral] == pytest.approx([E * b * h**3 / 12, E * h * b**3 / 12], rel=1e-12)
    assert section.EI_product == pytest.approx(0.0, abs=1e-12 * section.EI + 1e-12 * section.EI_lateral)
    assert section.mass_per_length == pytest.approx(480.0 * b * h * 1e-6, rel=1e-12)
    assert section.neutral_axis == pytest.approx([3.0 + b / 2, -7.0 + h / 2], rel=1e-12)
    assert shear_stiffness([piece], section) == pytest.approx(5 / 6 * G * b * h, rel=1e-12)
    cut = largest_cuts([piece], section)[0]
    assert cut.up == pytest.approx(-7.0 + h / 2, rel=1e-12)
    assert cut.intensity * b * h == pytest.approx(1.5, rel=1e-12)


@given(width=sizes, depth=sizes, turn=st.floats(-720, 720), across=st.floats(-500, 500), up=st.floats(-500, 500))
def test_a_turned_rectangle_keeps_its_size_and_sits_at_its_lower_left_corner(width, depth, turn, across, up):
    outline = rectangle(width, depth, (across, up), turn=turn)
    assert outline.min(axis=0) == pytest.approx([across, up], abs=1e-9)
    found = piece_properties([Piece("p", outline, 1.0)])
    assert found.area[0] == pytest.approx(width * depth, rel=1e-9)
    assert found.inertia[0, :2].sum() == pytest.approx(width * depth * (width**2 + depth**2) / 12, rel=1e-9)
    sides = outline[1] - outline[0]
    assert (
        math.degrees(math.atan2(sides[1], sides[0])) % 360 == pytest.approx(turn % 360, abs=1e-6) or turn % 360 > 359.9
    )


def test_a_half_turned_rectangle_by_mohrs_circle():
    # b = 60, h = 20 turned by 30 degrees anticlockwise: product of inertia (I_lateral - I_up) / 2 x sin 60
    i_up, i_lateral = 60 * 20**3 / 12, 20 * 60**3 / 12
    found = piece_properties([Piece("p", rectangle(60, 20, (0, 0), turn=30), 1.0)]).inertia[0]
    expected = [
        (i_up + i_lateral) / 2 + (i_up - i_lateral) / 2 * 0.5,
        (i_up + i_lateral) / 2 - (i_up - i_lateral) / 2 * 0.5,
        (i_lateral - i_up) / 2 * math.sqrt(3) / 2,
    ]
    assert found == pytest.approx(expected, rel=1e-12)


def test_a_triangle_has_its_greatest_shear_at_half_height():
    # 3/2 of the mean at half height, 4/3 at the centroid: S. P. Timoshenko, Strength of Materials, part I (from memory)
    triangle = [Piece("t", np.array([(0, 0), (90, 0), (20, 60.0)]), 1.0, 1.0)]
    cut = largest_cuts(triangle, properties(triangle))[0]
    assert cut.up == pytest.approx(30.0, rel=1e-9)
    assert cut.intensity * 90 * 60 / 2 == pytest.approx(1.5, rel=1e-12)


def test_a_tapered_section_gives_the_same_energy_however_fine_its_bands():
    tall = np.array([(0, 0), (100, 0), (50.001, 300), (49.999, 300.0)])
    split = np.array(
        [
            (0, 0),
            (100, 0),
            *[(100 - 49.999 * k / 40, 300 * k / 40) for k in range(1, 40)],
            (50.001, 300),
            (49.999, 300.0),
        ]
    )
    one, many = ([Piece("p", outline, 1.0, 1.0)] for outline in (tall, split))
    assert shear_stiffness(one, properties(one)) == pytest.approx(shear_stiffness(many, properties(many)), rel=1e-12)


def test_no_shear_stiffness_where_a_piece_has_no_shear_modulus():
    pieces = [Piece("a", rectangle(10, 10, (0, 0)), 1.0, 1.0), Piece("b", rectangle(10, 10, (0, 10)), 1.0)]
    assert shear_stiffness(pieces, properties(pieces)) is None
    assert properties(pieces).mass_per_length is None


def box(E_web=6500.0):
    return [
        Piece("bottom", rectangle(90, 70, (12.5, 0)), 11000.0, 690.0, 420.0),
        Piece("top", rectangle(90, 70, (12.5, 330)), 11000.0, 690.0, 420.0),
        Piece("left", rectangle(12.5, 400, (0, 0)), E_web, 600.0, 480.0),
        Piece("right", rectangle(12.5, 400, (102.5, 0)), E_web, 600.0, 480.0),
    ]


def values(pieces):
    section = properties(pieces)
    cuts = [cut.intensity for cut in largest_cuts(pieces, section)]
    return np.array([section.EA, section.EI, section.EI_lateral, shear_stiffness(pieces, section), *cuts])


def moved(pieces, change):
    return [replace(p, outline=change(p.outline), holes=tuple(change(hole) for hole in p.holes)) for p in pieces]


@given(st.tuples(st.floats(-1e5, 1e5), st.floats(-1e5, 1e5)))
@settings(max_examples=30)
def test_moving_the_origin_changes_nothing(shift):
    there = moved(ODD_PIECES, lambda outline: outline + shift)
    assert values(there) == pytest.approx(values(ODD_PIECES), rel=1e-7)
    assert properties(there).EI_product == pytest.approx(properties(ODD_PIECES).EI_product, rel=1e-7)


@pytest.mark.parametrize("flip", [(-1, 1), (1, -1), (-1, -1)])
def test_a_mirrored_or_half_turned_section_has_the_same_values(flip):
    there = moved(ODD_PIECES, lambda outline: outline * flip)
    assert values(there) == pytest.approx(values(ODD_PIECES), rel=1e-11)
    assert properties(there).EI_product == pytest.approx(
        flip[0] * flip[1] * properties(ODD_PIECES).EI_product, rel=1e-11
    )


@given(st.floats(0.01, 100.0))
@settings(max_examples=20)
def test_scaling_the_size_scales_by_powers(k):
    there = moved(ODD_PIECES, lambda outline: outline * k)
    powers = np.array([k**2, k**4, k**4, k**2, *[k**-2] * len(ODD_PIECES)])
    assert values(there) == pytest.approx(values(ODD_PIECES) * powers, rel=1e-9)


@given(st.floats(5.0, 65.0))
@settings(max_examples=20)
def test_splitting_a_piece_changes_nothing_else(height):
    whole = box()
    halves = [
        replace(whole[0], outline=rectangle(90, height, (12.5, 0))),
        replace(whole[0], outline=rectangle(90, 70 - height, (12.5, height))),
    ]
    split = [*halves, *whole[1:]]
    assert values(split)[:4] == pytest.approx(values(whole)[:4], rel=1e-12)
    assert values(split)[6:] == pytest.approx(values(whole)[5:], rel=1e-12)
    assert properties(split).mass_per_length == pytest.approx(properties(whole).mass_per_length, rel=1e-12)


def test_quarter_turns_of_the_whole_swap_the_two_bendings():
    there = moved(ODD_PIECES, lambda outline: np.stack((-outline[:, 1], outline[:, 0]), axis=1))
    before, after = properties(ODD_PIECES), properties(there)
    assert (after.EI, after.EI_lateral) == pytest.approx((before.EI_lateral, before.EI), rel=1e-12)
    assert after.EI_product == pytest.approx(-before.EI_product, rel=1e-12)


def test_a_bond_line_between_layers_takes_no_part():
    touching = [Piece(n, rectangle(90, 40, (0, u)), 1.0, 1.0) for n, u in (("a", 0), ("b", 40))]
    apart = [Piece(n, rectangle(90, 40, (0, u)), 1.0, 1.0) for n, u in (("a", 0), ("b", 40.001))]
    assert values(apart) == pytest.approx(values(touching), rel=2e-4)
    assert largest_cuts(apart, properties(apart))[1].up == pytest.approx(40.001)


@pytest.mark.parametrize(
    ("arguments", "field"),
    [
        ({"width": 0.0}, "width"),
        ({"width": math.nan}, "width"),
        ({"depth": -3.0}, "depth"),
        ({"depth": math.inf}, "depth"),
        ({"at": (0.0, math.nan)}, "at"),
        ({"at": (1.0,)}, "at"),
        ({"turn": math.inf}, "turn"),
    ],
)
def test_an_unusable_rectangle_is_refused_by_name(arguments, field):
    with pytest.raises(InputError, match=field) as caught:
        rectangle(**{"width": 1.0, "depth": 1.0, "at": (0.0, 0.0), **arguments})
    assert caught.value.field == field


@pytest.mark.parametrize("G", [0.0, -1.0, math.nan])
def test_an_unusable_shear_modulus_is_refused_with_the_name_of_the_piece(G):
    piece = Piece("plank", rectangle(1, 1, (0, 0)), 1.0, G)
    with pytest.raises(InputError, match="G of plank"):
        shear_stiffness([piece], properties([piece]))


@pytest.mark.parametrize("E", [0.0, -1.0, math.nan, math.inf])
def test_an_unusable_modulus_is_refused_with_the_name_of_the_piece(E):
    with pytest.raises(InputError, match="E of plank"):
        properties([Piece("plank", rectangle(1, 1, (0, 0)), E)])


def test_pieces_without_area_and_sections_without_pieces_are_refused():
    with pytest.raises(InputError, match="no pieces"):
        properties([])
    with pytest.raises(InputError, match="Piece 2 has no area"):
        properties([box()[0], Piece("line", np.array([(0, 0), (1, 1), (2, 2.0)]), 1.0)])
    with pytest.raises(InputError, match="2 points"):
        properties([Piece("line", np.array([(0, 0), (1, 1.0)]), 1.0)])


def test_reweighted_is_properties_with_other_moduli() -> None:
    stiff = [Piece("web", rectangle(20, 100, (40, 0)), 9000.0, 500.0, 400.0),
             Piece("flange", rectangle(100, 20, (0, 100)), 12000.0, 700.0, 450.0)]  # fmt: skip
    soft = [replace(piece, E=piece.E / factor) for piece, factor in zip(stiff, (1.6, 1.8), strict=True)]
    found, expected = reweighted(soft, properties(stiff)), properties(soft)
    for name in ("area", "mass_per_length", "EA", "EI", "EI_lateral", "EI_product", "neutral_axis", "first_moments"):
        assert getattr(found, name) == pytest.approx(getattr(expected, name), rel=1e-12), name
    assert shear_stiffness(soft, found) == pytest.approx(shear_stiffness(soft, expected), rel=1e-12)
