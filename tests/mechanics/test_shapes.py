"""Shapes of pieces: areas and second moments against closed forms and handbook tables, places, turns, fillets."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics import shapes
from server.mechanics.polygon import edges_of, moments
from server.mechanics.section import Piece, largest_cuts, properties, rectangle
from server.mechanics.shapes import (
    drawn_angle,
    drawn_channel,
    drawn_i,
    drawn_rectangle,
    drawn_round,
    drawn_tee,
    drawn_tube,
    placed,
    polygon,
)


def area_and_inertia(shape):
    area, _, inertia = moments(edges_of([shape.rings]))
    return area[0], *inertia[0].tolist()


def test_a_quarter_of_an_arc_keeps_the_moments_of_the_quarter_disc():
    sector = np.vstack(([0.0, 0.0], shapes._QUARTER))
    area, centroid, inertia = (each[0] for each in moments(edges_of([sector])))
    assert area == pytest.approx(math.pi / 4, rel=1e-14)
    assert centroid * area == pytest.approx([1 / 3, 1 / 3], rel=1e-14)
    about_corner = inertia[0] + area * centroid[1] ** 2
    assert about_corner == pytest.approx(math.pi / 16, rel=7e-7)


@pytest.mark.parametrize(("diameter", "wall"), [(60.0, 0.0), (60.3, 3.2), (0.4, 0.0)])
def test_a_round_has_the_area_and_inertia_of_the_circle(diameter, wall):
    area, vertical, lateral, product = area_and_inertia(placed(drawn_round(diameter, wall), (3.0, -7.0), 33.0))
    inner = diameter - 2 * wall if wall else 0.0
    assert area == pytest.approx(math.pi / 4 * (diameter**2 - inner**2), rel=1e-12)
    exact = math.pi / 64 * (diameter**4 - inner**4)
    assert vertical == pytest.approx(exact, rel=1e-6)
    assert lateral == pytest.approx(exact, rel=1e-6)
    assert product == pytest.approx(0.0, abs=1e-9 * exact)


# Sections of EN 10365:2017 (hot rolled) and EN 10219-2:2019 (cold formed hollow): nominal sizes, area [cm2] and second
# moment about the strong axis [cm4] as printed in steel handbooks; from memory.
PROFILES = [
    ("IPE 200", drawn_i(100, 200, 5.6, 8.5, root_radius=12), 28.5, 1943, 0.05, 0.5),
    ("HE 200 B", drawn_i(200, 200, 9, 15, root_radius=18), 78.1, 5696, 0.05, 0.5),
    ("UPE 200", drawn_channel(80, 200, 6, 11, root_radius=13), 29.0, 1909, 0.05, 0.5),
    ("SHS 100 x 5, R = 2 t", drawn_tube(100, 100, 5, corner_radius=10), 18.4, 271, 0.05, 0.5),
    ("L 100 x 10", drawn_angle(100, 100, 10, root_radius=12, toe_radius=6), 19.2, 177, 0.05, 0.5),
    ("CHS 60.3 x 3.2", drawn_round(60.3, 3.2), 5.74, 23.5, 0.005, 0.05),
]


@pytest.mark.parametrize(("name", "shape", "area", "inertia", "area_off", "inertia_off"), PROFILES)
def test_profiles_match_the_handbook(name, shape, area, inertia, area_off, inertia_off):
    found = area_and_inertia(shape)
    assert found[0] / 1e2 == pytest.approx(area, abs=area_off)
    assert found[1] / 1e4 == pytest.approx(inertia, abs=inertia_off)


def test_a_rounded_corner_takes_off_and_a_root_fills_what_geometry_says():
    corner = (1 - math.pi / 4) * 10.0**2
    assert area_and_inertia(drawn_rectangle(80, 40, corner_radius=10))[0] == pytest.approx(3200 - 4 * corner)
    assert area_and_inertia(drawn_rectangle(80, 40, chamfer=10))[0] == pytest.approx(3200 - 4 * 50)
    sharp, filled = drawn_tee(100, 80, 8, 10), drawn_tee(100, 80, 8, 10, root_radius=10)
    assert area_and_inertia(filled)[0] - area_and_inertia(sharp)[0] == pytest.approx(2 * corner)


def test_rounded_rectangle_matches_the_integral_over_its_height():
    """Second moment by quadrature of the width over the height, which knows nothing of polygons."""
    from scipy.integrate import quad

    w, d, r = 60.0, 90.0, 25.0

    def width(u):
        deep = max(abs(u) - (d / 2 - r), 0.0)
        return w - 2 * (r - math.sqrt(max(r * r - deep * deep, 0.0)))

    exact = 2 * quad(lambda u: u * u * width(u), 0, d / 2, points=[d / 2 - r], epsabs=1e-9, epsrel=1e-12)[0]
    assert area_and_inertia(drawn_rectangle(w, d, corner_radius=r))[1] == pytest.approx(exact, rel=1e-6)


def test_drawings_before_turning_are_as_the_check_file_says():
    def centre(shape):
        return moments(edges_of([shape.rings]))[1][0]

    assert centre(drawn_channel(80, 200, 6, 11))[0] < 40  # web at the left
    assert (centre(drawn_angle(100, 80, 10)) < [50, 40]).all()  # corner at the lower left
    assert centre(drawn_tee(100, 80, 8, 10))[1] > 40  # flange on top
    assert centre(drawn_i(100, 200, 6, 9)) == pytest.approx([50, 100])


ANY = {
    "rectangle": drawn_rectangle(80, 40, corner_radius=5),
    "round": drawn_round(50, 4),
    "tube": drawn_tube(80, 60, 4, corner_radius=8),
    "angle": drawn_angle(90, 60, 8, root_radius=7, toe_radius=3),
    "channel": drawn_channel(70, 120, 6, 9, root_radius=8),
    "i": drawn_i(90, 140, 6, 9, root_radius=10),
    "tee": drawn_tee(90, 70, 6, 9, root_radius=6),
    "polygon": polygon([(0, 0), (50, 0), (30, 40)], [[(20, 5), (35, 5), (28, 12)]]),
}


@settings(max_examples=40, deadline=None)
@given(
    st.sampled_from(sorted(ANY)),
    st.tuples(st.floats(-1e5, 1e5), st.floats(-1e5, 1e5)),
    st.floats(-720, 720),
)
def test_turning_and_placing_change_no_principal_value(name, at, turn):
    shape = ANY[name]
    there = placed(shape, at, turn)
    assert there.box()[0] == pytest.approx(at, abs=1e-9)
    before, after = area_and_inertia(shape), area_and_inertia(there)

    def principal(values):
        tensor = np.array([[values[1], values[3]], [values[3], values[2]]])
        return np.linalg.eigvalsh(tensor)

    assert after[0] == pytest.approx(before[0], rel=1e-9)
    assert principal(after) == pytest.approx(principal(before), rel=1e-9)
    back = placed(there, shape.box()[0], -turn)
    for one, other in zip(back.rings, shape.rings, strict=True):
        assert one == pytest.approx(other, abs=1e-9)


@pytest.mark.parametrize("turn", [0.0, 30.0, 45.0, 90.0, 211.0])
def test_the_box_of_rounded_shapes_is_that_of_the_true_arcs(turn):
    low, high = placed(drawn_round(50), (0, 0), turn).box()
    assert high - low == pytest.approx([50, 50], abs=1e-12)
    tube = placed(drawn_rectangle(80, 40, corner_radius=10), (0, 0), turn)
    c, s = abs(math.cos(math.radians(turn))), abs(math.sin(math.radians(turn)))
    assert tube.box()[1] == pytest.approx([60 * c + 20 * s + 20, 60 * s + 20 * c + 20], abs=1e-9)


def test_quarter_turns_are_exact():
    shape = placed(drawn_angle(90, 60, 8), (12.5, 3.0), 90.0)
    assert {tuple(p) for p in shape.outline.tolist()} == {
        (12.5, 3.0),
        (12.5, 93.0),
        (20.5, 93.0),
        (20.5, 11.0),
        (72.5, 11.0),
        (72.5, 3.0),
    } or shape.box()[1].tolist() == [72.5, 93.0]


def test_a_plain_rectangle_is_the_section_module_s_own():
    assert placed(drawn_rectangle(90, 70), (12.5, 1.0), 33.0).outline == pytest.approx(
        rectangle(90, 70, (12.5, 1.0), 33.0)
    )


def test_shear_over_a_round_is_four_thirds_and_over_a_thin_pipe_twice_the_mean():
    bar = placed(drawn_round(40), (0, 0))
    piece = [Piece("bar", bar.outline, 1.0, holes=bar.holes)]
    cut = largest_cuts(piece, properties(piece))[0]
    assert cut.up == pytest.approx(20.0, abs=0.5)  # the straight sides shift the flat maximum a little
    assert cut.intensity * math.pi * 400 == pytest.approx(4 / 3, rel=3e-4)
    outer, inner = 50.0, 48.0
    pipe = drawn_round(2 * outer, outer - inner)
    piece = [Piece("pipe", pipe.outline, 1.0, holes=pipe.holes)]
    cut = largest_cuts(piece, properties(piece))[0]
    area = math.pi * (outer**2 - inner**2)
    exact = 4 / 3 * (outer**2 + outer * inner + inner**2) / (outer**2 + inner**2)  # Gere, Mechanics of Materials
    assert cut.intensity * area == pytest.approx(exact, rel=3e-4)


@pytest.mark.parametrize(
    ("draw", "field", "says"),
    [
        (lambda: drawn_tube(50, 40, 20), "wall", "leaves no hollow"),
        (lambda: drawn_tube(50, 40, 3, corner_radius=21), "corner_radius", "more than half"),
        (lambda: drawn_round(50, 25), "wall", "leaves no hollow"),
        (lambda: drawn_round(0), "diameter", "greater than 0"),
        (lambda: drawn_angle(50, 40, 40), "wall", "leaves nothing"),
        (lambda: drawn_channel(50, 80, 50, 8), "web", "leaves nothing"),
        (lambda: drawn_channel(50, 80, 5, 40), "flange", "leaves no hollow"),
        (lambda: drawn_i(50, 80, 5, 40), "flange", "leaves no hollow"),
        (lambda: drawn_tee(50, 80, 50, 8), "web", "leaves nothing"),
        (lambda: drawn_i(50, 80, 5, 8, root_radius=40), "radius", "need"),
        (lambda: drawn_angle(50, 40, 5, toe_radius=6), "radius", "need"),
        (lambda: drawn_rectangle(50, 40, corner_radius=21), "corner_radius", "more than half"),
        (lambda: drawn_rectangle(50, 40, corner_radius=2, chamfer=2), "chamfer", "either"),
        (lambda: placed(drawn_rectangle(50, 40), (0, 0), math.inf), "turn", "degrees"),
        (lambda: placed(drawn_rectangle(50, 40), (0, math.nan)), "at", "two numbers"),
    ],
)
def test_impossible_sizes_are_refused_by_name(draw, field, says):
    with pytest.raises(InputError, match=says) as error:
        draw()
    assert error.value.field == field
