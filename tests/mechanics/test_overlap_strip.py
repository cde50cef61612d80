"""Strip ends against the reference's finite-element model of two beams, and where the answer is known."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.overlap_strip import Host, Strip, strip_course

# 6_bonded_joints.toml, "plate-end-udl-*": tau_end_coupled_Pa, sigma_end_coupled_Pa (two Euler beams by finite elements)
CASES = [
    ((30e3, 200, 300, 100e3, 200, 4, 740.7407407, 2000, 2, 3000, 300, 50), 2.512, 2.083),
    ((11e3, 100, 240, 210e3, 80, 6, 1500, 4000, 1, 4000, 200, 6), 5.908, 4.576),
]


def uniform(case, face="bottom", sign=1.0, **taper):
    """A simply supported beam under a uniform load with a strip that stops ``a`` short of each support."""
    E1, b1, h1, E2, b2, t2, G, Ea, ta, span, a, q = case

    def moment(x):
        return (sign * q * (x + a) * (span - a - x) / 2)[..., None]

    return strip_course(
        Host(E1 * b1 * h1, E1 * b1 * h1**3 / 12, h1 / 2),
        Strip(E2, b2, t2, **taper),
        shear_modulus=G,
        E=Ea,
        bond_line=ta,
        length=span - 2 * a,
        moment=moment,
        strain=0.0,
        face=face,
    )


@pytest.mark.parametrize(("case", "shear", "peel"), CASES)
def test_ends_agree_with_the_reference_finite_elements(case, shear, peel):
    course = uniform(case)
    assert course.shear[0, 0] == pytest.approx(shear, rel=0.003)
    assert course.peel[0, 0] == pytest.approx(peel, rel=0.003)
    assert course.shear[-1, 0] == pytest.approx(-shear, rel=0.003)
    assert course.peel[-1, 0] == pytest.approx(peel, rel=0.003)


def test_a_strip_on_the_compressed_face_is_pressed_on():
    case = CASES[1][0]
    course = uniform(case, face="top")
    below = uniform(case)
    assert np.allclose(course.shear, -below.shear)
    assert np.allclose(course.peel, -below.peel)
    hogging = uniform(case, face="top", sign=-1.0)
    assert np.allclose(hogging.peel, below.peel)


def test_in_the_middle_the_strip_takes_what_the_composite_section_gives_it():
    E1, b1, h1, E2, b2, t2, _, _, ta, span, _, q = case = CASES[1][0]
    course = uniform(case)
    # transformed section with the bond line between strip and host
    EA = E1 * b1 * h1, E2 * b2 * t2
    apart = (h1 + t2) / 2 + ta
    EI = E1 * b1 * h1**3 / 12 + E2 * b2 * t2**3 / 12 + apart**2 * EA[0] * EA[1] / sum(EA)
    expected = q * span**2 / 8 / EI * EA[1] * apart * EA[0] / sum(EA)
    assert course.force[len(course.at) // 2, 0] == pytest.approx(expected, rel=2e-3)


def test_a_taper_relieves_the_end_and_a_very_short_one_changes_nothing():
    case = CASES[1][0]
    plain, short, long = uniform(case), uniform(case, taper=1e-4, tip=1.5), uniform(case, taper=200.0, tip=1.5)
    assert short.shear[0, 0] == pytest.approx(plain.shear[0, 0], rel=1e-4)
    assert short.peel[0, 0] == pytest.approx(plain.peel[0, 0], rel=1e-4)
    assert np.abs(long.shear).max() < 0.8 * plain.shear[0, 0]
    assert long.peel.max() < 0.9 * plain.peel[0, 0]
    assert long.force[len(long.at) // 2, 0] == pytest.approx(plain.force[len(plain.at) // 2, 0], rel=1e-3)


def test_free_strain_of_a_strip_on_a_stiff_host_is_shear_lag():
    """A host that neither stretches nor bends: tau_end = G eps tanh(beta l/2) / (beta t_a), if the strip is thin."""
    E, b, t, G, ta, length, strain = 70e3, 40.0, 0.5, 300.0, 1.0, 300.0, 5e-4
    course = strip_course(
        Host(1e15, 1e20, 100.0),
        Strip(E, b, t),
        shear_modulus=G,
        E=1e-6,  # no peel stiffness: the strip is free to bend, which makes it four times as soft at its face
        bond_line=ta,
        length=length,
        moment=lambda x: np.zeros((*x.shape, 1)),
        strain=strain,
    )
    soft = 1 / (E * t) + ((t + ta) / 2) ** 2 * 12 / (E * t**3)
    beta = math.sqrt(G / ta * soft)
    expected = G * strain * math.tanh(beta * length / 2) / (beta * ta)
    assert abs(course.shear[0, 0]) == pytest.approx(expected, rel=1e-3)


@settings(max_examples=30, deadline=None)
@given(
    st.floats(20, 400),
    st.floats(1, 40),
    st.floats(5e3, 3e5),
    st.floats(5e3, 3e5),
    st.floats(0.5, 3e3),
    st.floats(0.1, 5),
)
def test_the_force_in_the_strip_is_what_the_bond_hands_over(height, thickness, E_host, E_strip, G, ta):
    course = strip_course(
        Host(E_host * 100 * height, E_host * 100 * height**3 / 12, height / 2),
        Strip(E_strip, 60.0, thickness),
        shear_modulus=G,
        E=2.7 * G,
        bond_line=ta,
        length=1500.0,
        moment=lambda x: (1e6 + 2e3 * x)[..., None] * np.array([1.0, -0.5]),
        strain=[0.0, 1e-4],
        breaks=[700.0],
    )
    for column in (0, 1):
        handed = np.trapezoid(course.shear[:, column], course.at) * 60.0
        largest = np.abs(course.force[:, column]).max()
        assert abs(handed) < 3e-3 * largest + 1e-6
        half = len(course.at) // 2
        assert np.trapezoid(course.shear[:half, column], course.at[:half]) * 60 == pytest.approx(
            course.force[half - 1, column], abs=4e-3 * largest
        )


@pytest.mark.parametrize("taper", [{"taper": 2000.0, "tip": 1.0}, {"taper": 10.0, "tip": 9.0}, {"taper": 10.0}])
def test_a_taper_that_does_not_fit_is_refused(taper):
    with pytest.raises(InputError, match=r"taper|tip"):
        uniform(CASES[1][0], **taper)
