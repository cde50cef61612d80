"""The beam solver: signs, loads in awkward places, what is refused, and what must hold for any numbers."""

from __future__ import annotations

import math
from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.beam import (
    Beam,
    Couple,
    LineLoad,
    Load,
    PointLoad,
    Stretch,
    Support,
    evaluate,
    extremes,
    solve,
    solve_alike,
    span_ends,
)
from tests.mechanics.test_beam_exact import loads_on, members, weight

L, EI = 4000.0, 4.5e11


def beam(*supports: Support, hinges: tuple[float, ...] = (), length: float = L, EI: float = EI) -> Beam:
    return Beam(length, supports, hinges, [Stretch(0, length, EI)])


SIMPLE = beam(Support(0, "pin"), Support(L, "pin"))


def at(response, name: str, x: float, side: str = "right") -> float:
    return float(evaluate(response.breaks, getattr(response, name), x, side)[0])


# Signs, as the contract has them


def test_left_fixed_cantilever_pulls_down_with_an_anticlockwise_couple():
    response = solve(beam(Support(0, "fixed")), [[PointLoad(L, 500)]])
    assert response.reaction_force[0] == pytest.approx([500])
    assert response.reaction_couple[0] == pytest.approx([500 * L])
    assert at(response, "moment", 0) == pytest.approx(-500 * L)
    assert at(response, "shear", 0) == pytest.approx(500)
    assert at(response, "deflection", L) == pytest.approx(500 * L**3 / (3 * EI))


def test_right_fixed_cantilever_is_held_by_a_clockwise_couple():
    response = solve(beam(Support(L, "fixed")), [[PointLoad(0, 500)]])
    assert response.reaction_force[0] == pytest.approx([500])
    assert response.reaction_couple[0] == pytest.approx([-500 * L])
    assert at(response, "moment", L) == pytest.approx(-500 * L)
    assert at(response, "shear", L) == pytest.approx(-500)


def test_anticlockwise_couple_makes_the_moment_jump_down_by_itself():
    C, a = 6e6, 1000.0
    response = solve(SIMPLE, [[Couple(a, C)]])
    assert response.reaction_force[0] == pytest.approx([C / L, -C / L])
    assert at(response, "moment", a, "left") == pytest.approx(C * a / L)
    assert at(response, "moment", a) == pytest.approx(C * a / L - C)


@pytest.mark.parametrize(("place", "moment"), [(0.0, -6e6), (L, 6e6)])
def test_couple_at_a_pinned_end_enters_the_member(place, moment):
    response = solve(SIMPLE, [[Couple(place, 6e6)]])
    assert at(response, "moment", place) == pytest.approx(moment)
    assert at(response, "moment", L - place) == pytest.approx(0, abs=1e-3)


# Loads in awkward places


@pytest.mark.parametrize("place", [0.0, L])
def test_point_load_over_a_support_goes_straight_into_the_reaction(place):
    response = solve(SIMPLE, [[PointLoad(place, 700), PointLoad(L / 2, 100)]])
    expected = [750, 50] if place == 0 else [50, 750]
    assert response.reaction_force[0] == pytest.approx(expected)
    assert at(response, "shear", 0) == pytest.approx(50)
    assert at(response, "shear", L) == pytest.approx(-50)


def test_point_load_and_couple_on_an_inner_fixed_support_go_into_its_reaction():
    member = beam(Support(0, "pin"), Support(1500, "fixed"), Support(L, "pin"))
    bare, loaded = (
        solve(member, [[LineLoad(0, L, 2, 3), *extra]]) for extra in ([], [PointLoad(1500, 900), Couple(1500, 4e6)])
    )
    assert loaded.reaction_force[0] - bare.reaction_force[0] == pytest.approx([0, 900, 0], abs=1e-9)
    assert loaded.reaction_couple[0] - bare.reaction_couple[0] == pytest.approx([0, -4e6, 0], abs=1e-3)
    np.testing.assert_allclose(loaded.moment, bare.moment, rtol=0, atol=1e-4)


@pytest.mark.parametrize("place", [0.0, L])
def test_loads_at_a_free_end_act_there(place):
    response = solve(beam(Support(L - place, "fixed")), [[PointLoad(place, 300), Couple(place, 2e6)]])
    away = -1 if place == 0 else 1
    assert at(response, "shear", place) == pytest.approx(away * 300)
    assert at(response, "moment", place) == pytest.approx(away * 2e6)


def test_point_load_on_a_hinge_is_carried_by_both_sides():
    response = solve(beam(Support(0, "fixed"), Support(L, "fixed"), hinges=(L / 2,)), [[PointLoad(L / 2, 800)]])
    assert response.reaction_force[0] == pytest.approx([400, 400])
    assert at(response, "moment", L / 2) == pytest.approx(0, abs=1e-6)
    assert at(response, "deflection", L / 2) == pytest.approx(400 * (L / 2) ** 3 / (3 * EI))


def test_hinge_over_a_support_parts_the_spans():
    member = beam(Support(0, "pin"), Support(1600, "pin"), Support(L, "pin"), hinges=(1600,))
    response = solve(member, [[LineLoad(0, L, 5, 5)]])
    assert response.reaction_force[0] == pytest.approx([4000, 10000, 6000])
    assert at(response, "moment", 800) == pytest.approx(5 * 1600**2 / 8)
    assert at(response, "moment", 2800) == pytest.approx(5 * 2400**2 / 8)


def test_spring_gives_by_its_reaction_over_its_stiffness():
    response = solve(beam(Support(0, "spring", 50), Support(L, "spring", 200)), [[PointLoad(L / 2, 1000)]])
    assert at(response, "deflection", 0) == pytest.approx(10)
    assert at(response, "deflection", L) == pytest.approx(2.5)
    assert at(response, "deflection", L / 2) == pytest.approx(6.25 + 1000 * L**3 / (48 * EI))


def test_places_that_differ_by_rounding_are_one_place():
    third = beam(Support(0, "pin"), Support(0.1 + 0.2, "pin"), length=0.3)
    assert len(solve(third, [[PointLoad(0.3, 10), PointLoad(0.1, 1)]]).breaks) == 3


def test_member_without_loads_or_cases_is_still():
    empty = solve(SIMPLE, [[], []])
    assert not empty.deflection.any()
    assert not empty.reaction_force.any()
    assert solve(SIMPLE, []).shear.shape == (0, 1, 3)


# Two- and three-span coefficients stand in tests/published; the cases share one set of equations here


def test_cases_and_combinations_are_sums_of_their_loads():
    member = beam(Support(0, "pin"), Support(2500, "pin"), Support(L, "fixed"))
    first, second = [LineLoad(0, L, 2, 5), Couple(900, 1e6)], [PointLoad(700, 900)]
    cases = solve(member, [first, second])
    combined = cases.combine([[1.35, 1.5], [1.0, 0.0]])
    direct = solve(
        member, [[LineLoad(0, L, 2.7, 6.75), Couple(900, 1.35e6), PointLoad(700, 1350)], [*first, PointLoad(700, 0)]]
    )
    for name in ("shear", "moment", "deflection", "reaction_force", "reaction_couple"):
        value = getattr(direct, name)
        np.testing.assert_allclose(getattr(combined, name), value, rtol=1e-9, atol=1e-12 * np.abs(value).max())
    both = combined.plus(direct)
    np.testing.assert_allclose(both.moment, 2 * direct.moment, rtol=1e-9, atol=1e-9)
    with pytest.raises(InputError, match="cut at different places"):
        combined.plus(solve(member, [first]))


def test_extremes_of_all_curves_in_one_go_are_those_of_each():
    response = solve(SIMPLE, [[LineLoad(0, 3000, 1, 4)], [PointLoad(1000, 5), Couple(3000, 4e3)]])
    together = response.extremes()
    for row, curve in enumerate((response.shear, response.moment, response.deflection)):
        alone = extremes(response.breaks, curve)
        for name in ("max", "at_max", "min", "at_min"):
            np.testing.assert_allclose(getattr(together, name)[row], getattr(alone, name), rtol=1e-9, atol=1e-9)


def test_leftmost_of_two_equal_moments_is_reported():
    member = beam(Support(0, "pin"), Support(L / 2, "pin"), Support(L, "pin"))
    response = solve(member, [[LineLoad(0, L, 5, 5)]])
    found = extremes(response.breaks, response.moment)
    assert found.at_max[0] == pytest.approx(0.375 * L / 2)
    four_points = solve(SIMPLE, [[PointLoad(1000, 100), PointLoad(3000, 100)]])
    level = extremes(four_points.breaks, four_points.moment)
    assert (level.at_max[0], level.at_min[0]) == (1000, 0)


def test_spans_and_overhangs():
    member = beam(Support(3000, "spring", 10), Support(500, "pin"))
    assert span_ends(member) == [(0, 500, "overhang"), (500, 3000, "span"), (3000, L, "overhang")]
    assert span_ends(beam(Support(0, "fixed"))) == [(0, L, "overhang")]
    assert span_ends(SIMPLE) == [(0, L, "span")]


# What is refused, in words


@pytest.mark.parametrize(
    ("member", "field", "words"),
    [
        (beam(), "supports", "no supports"),
        (beam(Support(1000, "pin")), "supports", "turns about its only support at 1000 mm"),
        (beam(Support(1000, "spring", 5)), "supports", "turns about its only support at 1000 mm"),
        (
            beam(Support(0, "pin"), Support(L, "pin"), hinges=(2000,)),
            "hinges",
            "parts from 0 to 2000 mm and from 2000 to 4000 mm can move freely because of the hinge at 2000 mm",
        ),
        (
            beam(Support(0, "fixed"), Support(L, "fixed"), hinges=(1000, 2000, 3000)),
            "hinges",
            "1000 to 2000 mm and from 2000 to 3000 mm can move freely because of the hinges at 1000, 2000, 3000 mm",
        ),
        (
            beam(Support(0, "fixed"), hinges=(2500,)),
            "hinges",
            "the part from 2500 to 4000 mm can move freely because of the hinge at 2500 mm",
        ),
        (
            beam(Support(0, "pin"), Support(1000, "pin"), Support(2000, "pin"), hinges=(1000, 2000)),
            "hinges",
            "the part from 2000 to 4000 mm can move",
        ),
    ],
)
def test_member_that_can_move_is_refused_with_the_part_named(member, field, words):
    with pytest.raises(InputError, match=words) as refusal:
        solve(member, [[PointLoad(10, 1)]])
    assert refusal.value.field == field


@pytest.mark.parametrize(
    "hinges",
    [(1000.0,), (500.0, 3500.0), (1000.0, 3000.0)],
    ids=["one", "one in each end span", "two about the middle"],
)
def test_hinges_that_leave_the_member_standing_are_accepted(hinges):
    member = beam(Support(0, "pin"), Support(1500, "pin"), Support(2500, "pin"), Support(L, "pin"), hinges=hinges)
    response = solve(member, [[LineLoad(0, L, 1, 1)]])
    for hinge in hinges:
        assert at(response, "moment", hinge) == pytest.approx(0, abs=1e-6)


def make(**changes) -> Beam:
    arguments = {"length": L, "supports": SIMPLE.supports, "hinges": (), "stretches": SIMPLE.stretches}
    return Beam(**(arguments | changes))


@pytest.mark.parametrize(
    ("changes", "field", "words"),
    [
        ({"length": 0.0}, "length", "length is 0 mm"),
        ({"length": math.nan}, "length", "enter a length greater than 0"),
        ({"supports": [Support(0, "pin"), Support(4001, "pin")]}, "supports[1].at", "4001 mm; enter a place on the"),
        ({"supports": [Support(math.nan, "pin")]}, "supports[0].at", "is nan mm"),
        ({"supports": [Support(0, "pin"), Support(0, "fixed")]}, "supports[1].at", "two supports at 0 mm"),
        ({"supports": [Support(0, "roller")]}, "supports[0].kind", 'choose "pin", "fixed" or "spring"'),
        ({"supports": [Support(0, "spring")]}, "supports[0].stiffness", "stiffness is 0 N/mm"),
        ({"supports": [Support(0, "spring", -3)]}, "supports[0].stiffness", "stiffness is -3 N/mm"),
        ({"supports": [Support(0, "spring", 1e13)]}, "supports[0].stiffness", "use a pin"),
        ({"supports": [Support(0, "spring", math.nan)]}, "supports[0].stiffness", "stiffness is nan"),
        ({"hinges": [-1.0]}, "hinges[0]", "enter a place on the member"),
        ({"hinges": [0.0]}, "hinges[0]", "at the end of the member"),
        ({"hinges": [L]}, "hinges[0]", "at the end of the member"),
        ({"hinges": [5.0, 5.0]}, "hinges[1]", "two hinges at 5 mm"),
        ({"hinges": [2e3], "supports": [Support(2e3, "fixed")]}, "hinges[0]", "on a fixed support"),
        ({"stretches": []}, "stretches", "no stiffness given"),
        ({"stretches": [Stretch(0, 3000, EI)]}, "stretches", "must reach 4000 mm"),
        ({"stretches": [Stretch(10, L, EI)]}, "stretches[0].start", "must start at 0 mm"),
        ({"stretches": [Stretch(0, 9, EI), Stretch(8, L, EI)]}, "stretches[1].start", "must start at 9 mm"),
        ({"stretches": [Stretch(0, 0, EI), Stretch(0, L, EI)]}, "stretches[0].end", "must end after 0 mm"),
        ({"stretches": [Stretch(0, L, 0)]}, "stretches[0].EI", "EI is 0"),
        ({"stretches": [Stretch(0, L, math.inf)]}, "stretches[0].EI", "EI is inf"),
        ({"stretches": [Stretch(0, L, EI, 0)]}, "stretches[0].GA", "GA is 0 N"),
        ({"stretches": [Stretch(0, L, EI, math.nan)]}, "stretches[0].GA", "or infinity"),
    ],
)
def test_unusable_member_is_refused_with_its_field(changes, field, words):
    with pytest.raises(InputError, match=words) as refusal:
        make(**changes)
    assert refusal.value.field == field


@pytest.mark.parametrize(
    ("load", "name", "words"),
    [
        (PointLoad(-1, 5), "at", "the load is at -1 mm; enter a place on the member, 0 to 4000 mm"),
        (PointLoad(4001, 5), "at", "the load is at 4001 mm"),
        (PointLoad(math.nan, 5), "at", "at is nan"),
        (PointLoad(10, math.inf), "value", "value is inf"),
        (Couple(10, math.nan), "value", "value is nan"),
        (Couple(9e9, 1), "at", "the load is at 9e"),
        (Couple(2000, 1), "at", "on a hinge, which leaves open which side takes it"),
        (LineLoad(10, 5000, 1, 1), "end", "the load is at 5000 mm"),
        (LineLoad(10, 10, 1, 1), "end", "runs from 10 to 10 mm; its end must lie to the right"),
        (LineLoad(20, 10, 1, 1), "end", "runs from 20 to 10 mm"),
        (LineLoad(0, 10, 1, math.nan), "value_end", "value_end is nan"),
    ],
)
def test_unusable_load_is_refused_with_its_place_in_the_cases(load, name, words):
    member = beam(Support(0, "fixed"), Support(L, "pin"), hinges=(2000,))
    with pytest.raises(InputError, match=words) as refusal:
        solve(member, [[], [PointLoad(5, 1), load]])
    assert refusal.value.field == f"cases[1][1].{name}"


def test_numbers_too_large_to_reckon_with_are_refused_in_words():
    with np.errstate(all="ignore"), pytest.raises(InputError, match="differ too much in size"):
        solve(SIMPLE, [[PointLoad(1000, 1e308), PointLoad(2000, 1e308), PointLoad(3000, 1e308)]])


# What must hold for any numbers


def centre(loads: list[Load]) -> tuple[float, float]:
    """Return the sum of the loads and of their anticlockwise moments about the left end."""
    force = moment = 0.0
    for load in loads:
        if isinstance(load, PointLoad):
            force, moment = force + load.value, moment - load.value * load.at
        elif isinstance(load, Couple):
            moment += load.value
        else:
            d, a, b = load.end - load.start, load.value_start, load.value_end
            force += d * (a + b) / 2
            moment -= d * (a + b) / 2 * load.start + d * d * (a + 2 * b) / 6
    return force, moment


def size(member: Beam, loads: list[Load]) -> float:
    return sum(weight(member, load) for load in loads)


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_reactions_balance_the_loads(data):
    member = data.draw(members())
    loads = data.draw(loads_on(member))
    response = solve(member, [loads])
    force, moment = centre(loads)
    up, couples = response.reaction_force[0], response.reaction_couple[0]
    turning = up @ [s.at for s in member.supports] + couples.sum()
    scale = max(size(member, loads), np.abs(up).max(), np.abs(couples).max() / member.length)
    assert up.sum() == pytest.approx(force, abs=1e-9 * scale)
    assert turning == pytest.approx(-moment, abs=1e-9 * scale * member.length)


def samples(member: Beam, *responses) -> list[np.ndarray]:
    """Return shear, moment, deflection of each response at places that are no breaks, one row a response."""
    x = member.length * (np.arange(1, 200) + 0.123) / 200.5
    return [
        np.array([evaluate(r.breaks, getattr(r, name), x)[0] for r in responses])
        for name in ("shear", "moment", "deflection")
    ]


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_loads_together_do_what_they_do_alone(data):
    member = data.draw(members())
    first, second = data.draw(loads_on(member)), data.draw(loads_on(member))
    for together, a, b in samples(
        member, solve(member, [first + second]), solve(member, [first]), solve(member, [second])
    ):
        scale = np.abs(a).max() + np.abs(b).max()
        np.testing.assert_allclose(together, a + b, rtol=0, atol=1e-8 * scale + 1e-12)


def mirrored(member: Beam, loads: list[Load]) -> tuple[Beam, list[Load]]:
    length = member.length
    other: list[Load] = []
    for load in loads:
        if isinstance(load, LineLoad):
            other.append(LineLoad(length - load.end, length - load.start, load.value_end, load.value_start))
        elif isinstance(load, Couple):
            other.append(Couple(length - load.at, -load.value))
        else:
            other.append(PointLoad(length - load.at, load.value))
    return (
        Beam(
            length,
            [replace(s, at=length - s.at) for s in member.supports],
            [length - h for h in member.hinges],
            [replace(s, start=length - s.end, end=length - s.start) for s in reversed(member.stretches)],
        ),
        other,
    )


@settings(max_examples=40, deadline=None)
@given(st.data())
def test_stiffnesses_solved_together_do_as_each_alone(data):
    """Also where the stiffness jumps steeply in one of them only."""
    member = data.draw(members())
    loads = data.draw(loads_on(member))
    shares = st.sampled_from([1.0, 0.6, 1e-3, 1e-6])
    soft = Beam(
        member.length,
        member.supports,
        member.hinges,
        [replace(s, EI=s.EI * (share := data.draw(shares)), GA=s.GA * share) for s in member.stretches],
    )
    for together, beam in zip(solve_alike([member, soft], [loads]), (member, soft), strict=True):
        alone = solve(beam, [loads])
        np.testing.assert_array_equal(together.breaks, alone.breaks)
        for name in ("shear", "moment", "deflection"):
            a, b = (evaluate(each.breaks, getattr(each, name), alone.breaks) for each in (together, alone))
            scale = size(member, loads) * {"shear": 1e-3, "moment": 1e-3 * member.length}.get(name, 0)
            np.testing.assert_allclose(a, b, rtol=0, atol=1e-8 * max(np.abs(b).max(), scale) + 1e-12)


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_a_mirrored_member_answers_in_the_mirror(data):
    member = data.draw(members())
    loads = data.draw(loads_on(member))
    other, other_loads = mirrored(member, loads)
    here, there = solve(member, [loads]), solve(other, [other_loads])
    x = member.length * (np.arange(1, 200) + 0.123) / 200.5
    for name, sign in (("shear", -1), ("moment", 1), ("deflection", 1)):
        a = evaluate(here.breaks, getattr(here, name), x)
        b = evaluate(there.breaks, getattr(there, name), member.length - x, "left")
        scale = size(member, loads) * {"shear": 1e-3, "moment": 1e-3 * member.length}.get(name, 0)
        np.testing.assert_allclose(a, sign * b, rtol=0, atol=1e-8 * max(np.abs(a).max(), scale) + 1e-12)
    scale = max(np.abs(here.reaction_force).max(), size(member, loads))
    np.testing.assert_allclose(here.reaction_force, there.reaction_force, rtol=0, atol=1e-8 * scale)
    np.testing.assert_allclose(here.reaction_couple, -there.reaction_couple, rtol=0, atol=1e-8 * scale * member.length)


@settings(max_examples=40, deadline=None)
@given(st.data(), st.sampled_from([1e-3, 25.4, 304.8]), st.sampled_from([4.448, 1e-3]))
def test_other_units_change_nothing_but_the_units(data, longer, stronger):
    member = data.draw(members())
    loads = data.draw(loads_on(member))
    other = Beam(
        member.length * longer,
        [replace(s, at=s.at * longer, stiffness=s.stiffness * stronger / longer) for s in member.supports],
        [h * longer for h in member.hinges],
        [
            Stretch(s.start * longer, s.end * longer, s.EI * stronger * longer**2, s.GA * stronger)
            for s in member.stretches
        ],
    )
    other_loads: list[Load] = []
    for load in loads:
        if isinstance(load, LineLoad):
            k = stronger / longer
            other_loads.append(
                LineLoad(load.start * longer, load.end * longer, load.value_start * k, load.value_end * k)
            )
        elif isinstance(load, Couple):
            other_loads.append(Couple(load.at * longer, load.value * stronger * longer))
        else:
            other_loads.append(PointLoad(load.at * longer, load.value * stronger))
    here, there = solve(member, [loads]), solve(other, [other_loads])
    x = member.length * (np.arange(1, 200) + 0.123) / 200.5
    for name, factor in (("shear", stronger), ("moment", stronger * longer), ("deflection", longer)):
        a = factor * evaluate(here.breaks, getattr(here, name), x)
        b = evaluate(there.breaks, getattr(there, name), longer * x)
        scale = {"shear": 1e-3, "moment": 1e-3 * member.length}.get(name, 0) * size(member, loads) * factor
        np.testing.assert_allclose(a, b, rtol=0, atol=1e-8 * max(np.abs(a).max(), scale) + 1e-15)


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_curves_obey_the_differential_equations_and_join(data):
    member = data.draw(members())
    loads = [load for load in data.draw(loads_on(member)) if not isinstance(load, Couple)]
    response = solve(member, [loads])
    V, M, y = response.shear[0], response.moment[0], response.deflection[0]
    np.testing.assert_allclose(M[:, 1:] * [1, 2, 3], V, rtol=1e-12, atol=0)  # dM/dx = V
    middle = (response.breaks[1:] + response.breaks[:-1]) / 2
    w = np.zeros(len(middle))
    for load in loads:
        if isinstance(load, LineLoad):
            share = (middle - load.start) / (load.end - load.start)
            value = load.value_start + share * (load.value_end - load.value_start)
            w += np.where((share > 0) & (share < 1), value, 0)
    s = middle - response.breaks[:-1]
    np.testing.assert_allclose(-V[:, 1] - 2 * V[:, 2] * s, w, rtol=0, atol=1e-9)  # dV/dx = -w
    here = [next(t for t in member.stretches if t.start <= x <= t.end) for x in middle]
    f, g = np.array([1 / t.EI for t in here]), np.array([1 / t.GA for t in here])
    bent = y[:, 2:] * [2, 6, 12, 20]  # y'' = -M/EI + V'/GA
    bent[:, :2] -= V[:, 1:] * [1, 2] * g[:, None]
    # Where moment and shear both bend the axis, each coefficient is a difference: last bits of its larger term count.
    terms = np.abs(y[:, 2:] * [2, 6, 12, 20])
    np.testing.assert_array_less(
        np.abs(bent + M * f[:, None]), 1e-9 * np.maximum(terms, np.abs(M * f[:, None])) + 1e-30
    )
    fixed = [support.at for support in member.supports if support.kind == "fixed"]
    for name, kept in (("deflection", []), ("moment", fixed)):
        curve = getattr(response, name)
        x = np.array([b for b in response.breaks[1:-1] if not any(abs(b - at) < 1e-6 for at in kept)])
        if len(x):
            left, right = evaluate(response.breaks, curve, x, "left"), evaluate(response.breaks, curve, x)
            np.testing.assert_allclose(left, right, rtol=0, atol=1e-9 * np.abs(curve[..., 0]).max() + 1e-9)


@settings(max_examples=40, deadline=None)
@given(st.data())
def test_splitting_a_stretch_changes_nothing(data):
    member = data.draw(members())
    loads = data.draw(loads_on(member))
    cut = data.draw(st.floats(0.01, 0.99))
    first, *rest = member.stretches
    place = first.start + cut * (first.end - first.start)
    split = Beam(
        member.length, member.supports, member.hinges, [replace(first, end=place), replace(first, start=place), *rest]
    )
    for a, b in samples(member, solve(member, [loads]), solve(split, [loads])):
        np.testing.assert_allclose(a, b, rtol=0, atol=1e-8 * np.abs(a).max() + 1e-6 * size(member, loads))


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_deflection_at_b_of_a_load_at_a_is_that_at_a_of_a_load_at_b(data):
    """Maxwell and Betti's reciprocity."""
    member = data.draw(members())
    a, b = (member.length * data.draw(st.integers(0, 48)) / 48 for _ in range(2))
    response = solve(member, [[PointLoad(a, 1000)], [PointLoad(b, 1000)]])
    (_, y_b_of_a), (y_a_of_b, _) = evaluate(response.breaks, response.deflection, [a, b])
    scale = extremes(response.breaks, response.deflection).absolute()[0].max()
    assert y_b_of_a == pytest.approx(y_a_of_b, abs=1e-9 * scale)


@settings(max_examples=40, deadline=None)
@given(st.data())
def test_extremes_are_never_passed_between_breaks(data):
    member = data.draw(members())
    response = solve(member, [data.draw(loads_on(member))])
    for curve in (response.shear, response.moment, response.deflection):
        found = extremes(response.breaks, curve)
        for x0, x1 in pairwise(response.breaks):
            inside = evaluate(response.breaks, curve, np.linspace(x0, x1, 40)[1:-1])[0]
            slack = 1.1e-9 * max(abs(found.max[0]), abs(found.min[0]))
            assert inside.max() <= found.max[0] + slack
            assert inside.min() >= found.min[0] - slack
