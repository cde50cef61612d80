"""The beam solver against an exact oracle: the same member in rational numbers, by one sweep from the left end.

The oracle carries y, psi, M, V from the left end over all breaks at once for every unknown (left deflection and
rotation, reactions, hinge angles) and solves for them with fractions, so it knows neither rounding nor scaling.
"""

from __future__ import annotations

import math
from fractions import Fraction
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
)

State = list[Fraction]  # y, psi, M, V


def step(state: State, d: Fraction, EI: Fraction, flexibility: Fraction, a: Fraction, b: Fraction) -> State:
    """Carry y, psi, M, V over a length d under the load a + b s."""
    y, psi, M, V = state
    return [
        y
        + psi * d
        - (M * d**2 / 2 + V * d**3 / 6 - a * d**4 / 24 - b * d**5 / 120) / EI
        + (V * d - a * d**2 / 2 - b * d**3 / 6) * flexibility,
        psi - (M * d + V * d**2 / 2 - a * d**3 / 6 - b * d**4 / 24) / EI,
        M + V * d - a * d**2 / 2 - b * d**3 / 6,
        V - a * d - b * d**2 / 2,
    ]


def gauss(A: list[list[Fraction]], rhs: list[Fraction]) -> list[Fraction]:
    n = len(A)
    rows = [[*row, value] for row, value in zip(A, rhs, strict=True)]
    for column in range(n):
        pivot = next(row for row in range(column, n) if rows[row][column] != 0)
        rows[column], rows[pivot] = rows[pivot], rows[column]
        for row in range(n):
            if row != column and rows[row][column] != 0:
                factor = rows[row][column] / rows[column][column]
                rows[row] = [x - factor * p for x, p in zip(rows[row], rows[column], strict=True)]
    return [rows[i][n] / rows[i][i] for i in range(n)]


def exact(beam: Beam, loads: list[Load]) -> tuple[list[float], list[State], list[State], list[Fraction]]:
    """Return breaks, states just left and just right of each, and the upward reaction forces."""
    places = {Fraction(0), Fraction(beam.length), *(Fraction(s.at) for s in beam.supports), *map(Fraction, beam.hinges)}
    places |= {Fraction(s.start) for s in beam.stretches}
    for load in loads:
        places |= {Fraction(load.start), Fraction(load.end)} if isinstance(load, LineLoad) else {Fraction(load.at)}
    breaks = sorted(places)
    unknowns = ["y", "psi", *(("R", s) for s in beam.supports), *(("C", s) for s in beam.supports if s.kind == "fixed")]
    unknowns += [("hinge", h) for h in beam.hinges]

    def carry(unknown: object, loaded: bool) -> tuple[list[State], list[State]]:
        state = [Fraction(unknown == "y"), Fraction(unknown == "psi"), Fraction(0), Fraction(0)]
        before, after = [], []
        for i, x in enumerate(breaks):
            before.append(list(state))
            match unknown:
                case ("R", Support(at=at)) if at == x:
                    state[3] += 1
                case ("C", Support(at=at)) if at == x:
                    state[2] -= 1
                case ("hinge", at) if at == x:
                    state[1] += 1
            a = b = Fraction(0)
            for load in loads if loaded else []:
                if isinstance(load, PointLoad) and load.at == x:
                    state[3] -= Fraction(load.value)
                elif isinstance(load, Couple) and load.at == x:
                    state[2] -= Fraction(load.value)
                elif isinstance(load, LineLoad) and load.start <= x < load.end:
                    slope = (Fraction(load.value_end) - Fraction(load.value_start)) / (
                        Fraction(load.end) - Fraction(load.start)
                    )
                    a += Fraction(load.value_start) + slope * (x - Fraction(load.start))
                    b += slope
            after.append(list(state))
            if i + 1 < len(breaks):
                here = next(s for s in reversed(beam.stretches) if s.start <= x)
                shear = Fraction(0) if math.isinf(here.GA) else 1 / Fraction(here.GA)
                state = step(state, breaks[i + 1] - x, Fraction(here.EI), shear, a, b)
        return before, after

    parts = [carry(unknown, False) for unknown in unknowns]
    own_before, own_after = carry(None, True)
    last = len(breaks) - 1
    A: list[list[Fraction]] = []
    rhs: list[Fraction] = []

    def condition(at: float, component: int, *, beyond: bool = False) -> None:
        i = last if beyond else breaks.index(Fraction(at))
        A.append([(part[1] if beyond else part[0])[i][component] for part in parts])
        rhs.append(-(own_after if beyond else own_before)[i][component])

    for number, support in enumerate(beam.supports):
        condition(support.at, 0)
        if support.kind == "spring":
            A[-1][2 + number] -= 1 / Fraction(support.stiffness)
    for support in beam.supports:
        if support.kind == "fixed":
            condition(support.at, 1)
    for hinge in beam.hinges:
        condition(hinge, 2)
    condition(beam.length, 2, beyond=True)
    condition(beam.length, 3, beyond=True)
    x = gauss(A, rhs)

    def total(side: int, own: list[State]) -> list[State]:
        return [
            [own[i][k] + sum(xj * part[side][i][k] for xj, part in zip(x, parts, strict=True)) for k in range(4)]
            for i in range(len(breaks))
        ]

    return (
        [float(x_) for x_ in breaks],
        total(0, own_before),
        total(1, own_after),
        x[2 : 2 + len(beam.supports)],
    )


def weight(beam: Beam, load: Load) -> float:
    """Return the size of a load as a force."""
    if isinstance(load, LineLoad):
        return (abs(load.value_start) + abs(load.value_end)) * (load.end - load.start)
    return abs(load.value) / (beam.length if isinstance(load, Couple) else 1)


def compare(beam: Beam, loads: list[Load], share: float = 1e-9) -> None:
    """Assert that every value at every break agrees within a share of the curve's greatest value."""
    response = solve(beam, [loads])
    breaks, before, after, reactions = exact(beam, loads)
    for component, curve in ((0, response.deflection), (2, response.moment), (3, response.shear)):
        right = np.array([float(state[component]) for state in after[:-1]])
        left = np.array([float(state[component]) for state in before[1:]])
        size = float(extremes(response.breaks, curve).absolute()[0][0])
        if component:  # what is zero but for rounding is measured by the loads at hand
            size = max(size, 1e-3 * sum(weight(beam, load) for load in loads) * (beam.length if component == 2 else 1))
        np.testing.assert_allclose(evaluate(response.breaks, curve, breaks[:-1])[0], right, rtol=0, atol=share * size)
        np.testing.assert_allclose(
            evaluate(response.breaks, curve, breaks[1:], "left")[0], left, rtol=0, atol=share * size
        )
    forces = np.array([float(r) for r in reactions])
    size = max(np.abs(forces).max(), 1e-3 * sum(weight(beam, load) for load in loads))
    np.testing.assert_allclose(response.reaction_force[0], forces, rtol=0, atol=share * size)


@st.composite
def members(draw: st.DrawFn, stiffness_decades: float = 1.5, spring_decades: tuple[float, float] = (1, 5)) -> Beam:
    """Any member with up to four supports, two hinges and four stretches; unstable ones are mended."""
    length = draw(st.sampled_from([1000.0, 4200.0, 13000.0]))
    places = [length * i / 24 for i in range(25)]
    at = draw(st.lists(st.sampled_from(places), min_size=1, max_size=4, unique=True))
    supports = []
    for place in at:
        kind = draw(st.sampled_from(["pin", "pin", "fixed", "spring"]))
        stiffness = 10 ** draw(st.floats(*spring_decades)) if kind == "spring" else 0.0
        supports.append(Support(place, kind, stiffness))
    hinges = draw(st.lists(st.sampled_from(places[1:-1]), max_size=2, unique=True))
    cuts = sorted(draw(st.lists(st.sampled_from(places[1:-1]), max_size=3, unique=True)))
    ends = [0.0, *cuts, length]
    stretches = [
        Stretch(
            start,
            end,
            10 ** draw(st.floats(11 - stiffness_decades, 11 + stiffness_decades)),
            draw(st.sampled_from([math.inf, 3e5, 5e6])),
        )
        for start, end in pairwise(ends)
    ]
    try:
        beam = Beam(length, supports, hinges, stretches)
        solve(beam, [[]])
    except InputError:
        beam = Beam(length, [Support(supports[0].at, "fixed"), *supports[1:]], [], stretches)
    return beam


@st.composite
def loads_on(draw: st.DrawFn, beam: Beam, max_size: int = 4) -> list[Load]:
    """Any loads, on the ends, on supports and hinges too; couples beside hinges only."""
    places = [beam.length * i / 24 for i in range(25)]
    place = st.sampled_from(places)
    value = st.integers(-40, 40)
    loads: list[Load] = []
    for kind in draw(st.lists(st.sampled_from(["point", "line", "couple"]), min_size=1, max_size=max_size)):
        if kind == "point":
            loads.append(PointLoad(draw(place), 125.0 * draw(value)))
        elif kind == "couple":
            loads.append(Couple(draw(place.filter(lambda x: x not in beam.hinges)), 5e4 * draw(value)))
        else:
            start, end = sorted(draw(st.lists(place, min_size=2, max_size=2, unique=True)))
            loads.append(LineLoad(start, end, 0.25 * draw(value), 0.25 * draw(value)))
    return loads


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_any_member_agrees_with_exact_arithmetic(data):
    beam = data.draw(members())
    compare(beam, data.draw(loads_on(beam)))


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_extreme_stiffness_ratios_keep_their_digits(data):
    beam = data.draw(members(stiffness_decades=5, spring_decades=(-6, 12)))
    compare(beam, data.draw(loads_on(beam)), share=1e-7)


@pytest.mark.parametrize("stiffness", [1e-6, 1e-3, 1.0, 1e3, 1e6, 1e9, 1e12])
@pytest.mark.parametrize(
    "kinds", [("spring", "spring", "spring"), ("pin", "spring", "pin"), ("fixed", "spring", "pin")]
)
def test_softest_and_stiffest_springs_agree_with_exact_arithmetic(kinds, stiffness):
    supports = [
        Support(at, kind, stiffness if kind == "spring" else 0.0)
        for at, kind in zip((0.0, 1500.0, 4000.0), kinds, strict=True)
    ]
    beam = Beam(5000.0, supports, [], [Stretch(0.0, 5000.0, 4.5e11, 5e6)])
    compare(beam, [LineLoad(0.0, 5000.0, 2.0, 5.0), PointLoad(700.0, 1000.0)])


@pytest.mark.parametrize("ratio", [1e-12, 1e-9, 1e-6, 1e6, 1e9, 1e12])
def test_one_stretch_far_stiffer_or_softer_than_the_rest_agrees_with_exact_arithmetic(ratio):
    stretches = [Stretch(0.0, 1250.0, 1e12), Stretch(1250.0, 1500.0, 1e12 * ratio), Stretch(1500.0, 6000.0, 1e12)]
    supports = [Support(0.0, "fixed"), Support(3000.0, "pin"), Support(6000.0, "fixed")]
    compare(Beam(6000.0, supports, [], stretches), [LineLoad(0.0, 6000.0, 3.0, 1.0), PointLoad(2000.0, 500.0)], 1e-7)


def test_twenty_spans_agree_with_exact_arithmetic():
    supports = [Support(3000.0 * i, "pin") for i in range(21)]
    beam = Beam(60000.0, supports, [], [Stretch(0.0, 30000.0, 4e11, 5e6), Stretch(30000.0, 60000.0, 6e11)])
    compare(beam, [LineLoad(0.0, 60000.0, 2.0, 7.0), PointLoad(4321.0, 900.0), Couple(31000.0, 1e6)])
