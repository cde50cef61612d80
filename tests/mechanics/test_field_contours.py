"""Lines around what lies above a level, and the stresses inside pieces, against closed forms."""

from __future__ import annotations

import numpy as np
import pytest

from server.mechanics.field import shear_field
from server.mechanics.field_contours import above, stress_grid
from server.mechanics.field_stress import torsion_stress
from server.mechanics.section import Piece, properties, rectangle


def area(loops):
    total = 0.0
    for loop in loops:
        x, u = np.array(loop).T
        total += (x * np.roll(u, -1) - u * np.roll(x, -1)).sum() / 2
    return total


def plank():
    piece = [Piece("plank", rectangle(40.0, 100.0, (5.0, 7.0)), 10.0, 2.0)]
    section = properties(piece)
    return piece, section, shear_field(piece, section, [])


def test_shear_of_a_rectangle_is_the_parabola():
    piece, section, field = plank()
    points, _, stress, weight = stress_grid(piece, section, field)
    u = points[:, 1] - 57.0
    V = 1000.0
    tau = stress[:, :, 0] * V / section.EI
    np.testing.assert_allclose(tau[:, 1], -1.5 * V / 4000 * (1 - (u / 50) ** 2), atol=1e-9)
    np.testing.assert_allclose(tau[:, 0], 0.0, atol=1e-9)
    assert weight.sum() == pytest.approx(6 * 4000.0)


def test_lines_enclose_what_lies_above():
    piece, section, field = plank()
    points, triangles, stress, _ = stress_grid(piece, section, field)
    height = points[:, 1]
    assert area(above(points, triangles, height, 57.0)) == pytest.approx(40 * 50.0)
    assert area(above(points, triangles, height, 0.0)) == pytest.approx(4000.0)
    assert above(points, triangles, height, 200.0) == []
    size = np.abs(stress[:, 1, 0])
    band = area(above(points, triangles, size, 0.75 * size.max()))
    assert band == pytest.approx(40 * 50.0, rel=0.02)  # 1 - (u/50)^2 > 3/4 within 25 mm of the middle


def test_torsion_stress_of_a_rectangle():
    """Short of the largest, T / (alpha b t^2), which stands at the middle of the long sides (Timoshenko, Goodier)."""
    piece = [Piece("bar", rectangle(10.0, 50.0, (0.0, 0.0)), 1.0, 1.0)]
    section = properties(piece)
    found = torsion_stress(piece, section, shear_field(piece, section, []))[0]
    greatest = 1 / (0.291 * 50 * 10**2)
    assert 0.9 * greatest < found < 1.01 * greatest
