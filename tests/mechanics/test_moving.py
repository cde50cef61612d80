"""Moving axles: influence lines against print and the solver, envelopes against stepping and closed forms."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.mechanics.beam import Beam, LineLoad, PointLoad, Stretch, Support, evaluate, solve
from server.mechanics.influence import Influence
from server.mechanics.moving import Train, placing, travel
from server.mechanics.moving_envelope import Envelope, Runner, standing

L = 8000.0
EI = 4e12
NOTHING = np.array([0.0])


def simple(length: float = L) -> Beam:
    return Beam(length, [Support(0, "pin"), Support(length, "pin")], [], [Stretch(0, length, EI)])


def two_spans() -> Beam:
    return Beam(2 * L, [Support(0, "pin"), Support(L, "pin"), Support(2 * L, "pin")], [], [Stretch(0, 2 * L, EI)])


BEAMS = {
    "simple": simple(),
    "two spans": two_spans(),
    "overhangs and a spring": Beam(
        9000, [Support(1200, "pin"), Support(5000, "spring", 900.0), Support(7800, "pin")], [], [Stretch(0, 9000, EI)]
    ),
    "fixed, stepped, soft in shear": Beam(
        6000,
        [Support(0, "fixed"), Support(4500, "pin")],
        [],
        [Stretch(0, 2000, EI, 4e6), Stretch(2000, 6000, EI / 5, 2e6)],
    ),
    "hinged": Beam(
        9000,
        [Support(0, "fixed"), Support(4000, "pin"), Support(9000, "pin")],
        [2500.0],
        [Stretch(0, 9000, EI)],
    ),
}


def none(x, right):
    return np.zeros_like(x)


def value(lines, row: int, knots, p: float) -> float:
    """The influence line's value for a load at p, read off its cubics."""
    piece = min(max(int(np.searchsorted(knots, p, "right")) - 1, 0), len(knots) - 2)
    c = (lines.left if p < lines.x[row] else lines.right)[row, piece]
    return float(np.polynomial.polynomial.polyval(p - knots[piece], c))


@pytest.mark.parametrize("k", [0.1, 0.3, 1 / math.sqrt(3), 0.8])
def test_two_equal_spans_have_the_influence_lines_of_the_handbooks(k):
    """Load P at kL in the first of two equal spans: M_B = -P L (k - k^3)/4, R_C = -P (k - k^3)/4, greatest at
    k = 1/sqrt(3) with 0.0962 P L (AISC Manual Table 3-23, case 29 of two equal spans; from memory, closed form)."""
    influence = Influence(two_spans())
    moment = influence.moment(np.array([L]), np.array([True]))
    force, _ = influence.reactions()
    assert value(moment, 0, influence.knots, k * L) == pytest.approx(-L * (k - k**3) / 4, rel=1e-9)
    assert value(force, 2, influence.knots, k * L) == pytest.approx(-(k - k**3) / 4, rel=1e-9)
    worst, _ = travel(moment, influence.knots, Train((0.0,), (-1.0,), 0, 2 * L))
    assert worst.value[0] == pytest.approx(0.096225 * L, rel=1e-5)


@pytest.mark.parametrize("name", BEAMS)
@pytest.mark.parametrize("quantity", ["shear", "moment", "deflection"])
def test_influence_lines_are_what_the_solver_gives_for_a_unit_load(name, quantity):
    beam = BEAMS[name]
    influence = Influence(beam)
    x = np.array([0.137, 0.31, 0.52, 0.83]) * beam.length
    lines = influence.lines(quantity, x, np.ones(4, dtype=bool))
    for p in np.array([0.02, 0.2, 0.4, 0.47, 0.7, 0.95]) * beam.length:
        found = solve(beam, [[PointLoad(float(p), 1.0)]])
        wanted = evaluate(found.breaks, getattr(found, quantity)[0], x)
        got = [value(lines, row, influence.knots, float(p)) for row in range(4)]
        assert got == pytest.approx(wanted, rel=1e-7, abs=1e-9 * np.abs(wanted).max() + 1e-15)


def _axles(train: Train, datum: float, length: float) -> list[PointLoad]:
    return [
        PointLoad(min(max(datum + o, 0.0), length), f)
        for o, f in zip(train.offsets, train.forces, strict=True)
        if train.start <= datum + o <= train.end
    ]


def stepped(beam: Beam, train: Train, stays: list, steps: int) -> dict[str, tuple[float, float]]:
    """Extremes by brute force: the train at many positions, every curve evaluated on both sides of every break."""
    found = {"shear": [], "moment": [], "deflection": [], "reaction_force": []}
    for each in (train, train.turned):
        low, high = each.reach
        ends = [end - o + d for end in (each.start, each.end) for o in each.offsets for d in (-1e-6, 0.0, 1e-6)]
        steps_and_ends = np.sort([*np.linspace(low, high, steps), *(u for u in ends if low <= u <= high)])
        for u in np.array_split(steps_and_ends, len(steps_and_ends) // 10):
            cases = [[*stays, *_axles(each, float(datum), beam.length)] for datum in u]
            response = solve(beam, cases)
            whole = response.extremes()
            for row, name in enumerate(("shear", "moment", "deflection")):
                found[name] += [*whole.max[row], *whole.min[row]]
            found["reaction_force"] += [*response.reaction_force.ravel()]
    return {name: (max(values), min(values)) for name, values in found.items()}


TRAINS = {
    "one axle": Train((0.0,), (9000.0,), 0.0, 6000.0),
    "uneven pair": Train((0.0, 1100.0), (9000.0, 4000.0), 0.0, 6000.0),
    "three on a part": Train((-500.0, 300.0, 1900.0), (4000.0, 8000.0, 8000.0), 1000.0, 5200.0),
    "one that lifts": Train((0.0, 900.0), (9000.0, -3000.0), 500.0, 5500.0),
}


@pytest.mark.parametrize("name", BEAMS)
@pytest.mark.parametrize("which", TRAINS)
def test_envelopes_agree_with_stepping(name, which):
    beam, train = BEAMS[name], TRAINS[which]
    stays = [LineLoad(0.0, beam.length, 0.6, 1.4), PointLoad(0.4 * beam.length, 2500.0)]
    static = solve(beam, [stays])
    influence = Influence(beam)
    found = stepped(beam, train, stays, 200)
    for quantity in ("shear", "moment", "deflection"):
        envelope = Envelope(
            [Runner(train, [(influence, 1.0)])],
            quantity,
            standing(static.breaks, getattr(static, quantity)[0]),
            static.breaks,
        )
        ((high, low),) = envelope.extremes([(0.0, beam.length)])
        most, least = found[quantity]
        size = max(abs(most), abs(least))
        # Stepping comes from below, by as much as a step misses.
        assert most - 1e-6 * size <= high.value <= most + 8e-3 * size
        assert least - 8e-3 * size <= low.value <= least + 1e-6 * size


@pytest.mark.parametrize("name", BEAMS)
def test_the_position_found_gives_the_value_found(name):
    beam, train = BEAMS[name], TRAINS["three on a part"]
    stays = [LineLoad(0.0, beam.length, 1.0, 1.0)]
    static, influence = solve(beam, [stays]), Influence(beam)
    for quantity in ("shear", "moment", "deflection"):
        envelope = Envelope(
            [Runner(train, [(influence, 1.5)])],
            quantity,
            standing(static.breaks, getattr(static, quantity)[0]),
            static.breaks,
        )
        for pair in envelope.extremes([(0.0, beam.length), (0.3 * beam.length, 0.6 * beam.length)]):
            for extreme in pair:
                loads = [PointLoad(p.at, 1.5 * p.value) for p in extreme.placings[0].loads()]
                curve = solve(beam, [[*stays, *loads]])
                sides = [
                    float(evaluate(curve.breaks, getattr(curve, quantity)[0], extreme.at + d, side))
                    for d in (0.0, 2e-6 * beam.length, -2e-6 * beam.length)
                    for side in ("left", "right")
                ]
                size = np.abs(getattr(curve, quantity)).max()
                assert min(abs(each - extreme.value) for each in sides) <= 2e-5 * max(abs(extreme.value), size)


def test_two_axles_on_a_simple_span_have_the_absolute_greatest_moment_of_the_closed_form():
    """Axles P1 >= P2 a apart: M = (P1 + P2)/L (L/2 - e/2)^2 under P1, e = P2 a/(P1 + P2) from P1 to their resultant
    (absolute maximum moment: resultant and axle equidistant from midspan; any text on moving loads)."""
    one, two, apart = 70e3, 45e3, 1800.0
    train = Train((0.0, apart), (one, two), 0.0, L)
    envelope = Envelope([Runner(train, [(Influence(simple()), 1.0)])], "moment", none, NOTHING)
    ((high, low),) = envelope.extremes([(0.0, L)])
    e = two * apart / (one + two)
    assert high.value == pytest.approx((one + two) / L * (L / 2 - e / 2) ** 2, rel=1e-7)
    assert high.at == pytest.approx(L / 2 - e / 2, rel=1e-3)
    assert low.value == pytest.approx(0.0, abs=1e-3)


def test_two_axles_on_a_simple_span_have_the_shear_and_the_support_force_of_statics():
    one, two, apart = 70e3, 45e3, 1800.0
    train = Train((0.0, apart), (one, two), 0.0, L)
    influence = Influence(simple())
    ((high, low),) = Envelope([Runner(train, [(influence, 1.0)])], "shear", none, NOTHING).extremes([(0.0, L)])
    wanted = one + two * (L - apart) / L
    assert high.value == pytest.approx(wanted, rel=1e-9)
    assert low.value == pytest.approx(-wanted, rel=1e-9)
    force, couple = influence.reactions()
    most, least = travel(force, influence.knots, train)
    assert most.value == pytest.approx([wanted, wanted], rel=1e-9)
    assert least.value == pytest.approx([0.0, 0.0], abs=1e-6)
    assert travel(couple, influence.knots, train)[0].value == pytest.approx([0.0, 0.0], abs=1e-6)


def test_the_middle_axle_of_a_wheel_pair_straddling_midspan_sags_most():
    """Two equal axles a apart, symmetric about midspan: y = P (L - a) (3 L^2 - (L - a)^2) / (48 EI) * 2 / 2 each."""
    train = Train((0.0, 2000.0), (20e3, 20e3), 0.0, L)
    ((high, _),) = Envelope([Runner(train, [(Influence(simple()), 1.0)])], "deflection", none, NOTHING).extremes(
        [(0.0, L)]
    )
    b = (L - 2000.0) / 2
    assert high.value == pytest.approx(2 * 20e3 * b * (3 * L**2 - 4 * b**2) / (48 * EI), rel=1e-9)


def test_an_axle_off_its_stretch_carries_nothing():
    train = Train((0.0, 3000.0), (1e4, 5e4), 2000.0, 4000.0)
    envelope = Envelope([Runner(train, [(Influence(simple()), 1.0)])], "moment", none, NOTHING)
    ((high, _),) = envelope.extremes([(0.0, L)])
    assert high.value == pytest.approx(5e4 * L / 4)
    assert high.placings[0].at == (pytest.approx(4000.0),)
    assert high.placings[0].forces == (5e4,)


def test_a_point_to_stand_on_is_a_stretch_too():
    train = Train((0.0,), (1e4,), 2000.0, 2000.0)
    ((high, _),) = Envelope([Runner(train, [(Influence(simple()), 1.0)])], "moment", none, NOTHING).extremes([(0.0, L)])
    assert high.value == pytest.approx(1e4 * 2000 * 6000 / L)


def test_between_an_axle_that_left_and_one_that_is_to_come_there_is_no_position():
    """A stretch shorter than the axles are apart: one axle is always on it, so the cantilever always hogs."""
    beam = Beam(L, [Support(0, "fixed")], [], [Stretch(0, L, EI)])
    train = Train((0.0, 3000.0), (1e4, 1e4), 5000.0, 6000.0)
    ((high, low),) = Envelope([Runner(train, [(Influence(beam), 1.0)])], "moment", none, NOTHING).extremes([(0.0, 1.0)])
    assert high.value == pytest.approx(-1e4 * 4999)
    assert low.value == pytest.approx(-1e4 * 6000)


def test_trains_that_travel_apart_add_up():
    one, two = Train((0.0,), (1e4,), 0.0, L), Train((0.0, 900.0), (6e3, 2e3), 0.0, L)
    influence = Influence(two_spans())
    at = np.array([0.4 * L, L, 1.7 * L])
    sides = np.ones(3, dtype=bool)
    alone = [
        Envelope([Runner(t, [(influence, f)])], "moment", none, NOTHING).at(at, sides)[0]
        for t, f in ((one, 1.5), (two, -0.5))
    ]
    both = Envelope([Runner(one, [(influence, 1.5)]), Runner(two, [(influence, -0.5)])], "moment", none, NOTHING).at(
        at, sides
    )[0]
    assert both == pytest.approx(alone[0] + alone[1])


def test_an_axle_is_moved_off_the_support_that_would_swallow_it():
    influence = Influence(simple())
    lines = influence.shear(np.array([0.0]), np.array([True]))
    train = Train((0.0,), (1.0,), 0.0, L)
    high, _ = travel(lines, influence.knots, train)
    assert 0 < placing(train, high, 0, influence).at[0] < 1e-5 * L


@settings(max_examples=30, deadline=None)
@given(
    st.sampled_from(sorted(BEAMS)),
    st.lists(st.floats(0, 3000), min_size=1, max_size=4),
    st.lists(st.floats(100, 9000), min_size=4, max_size=4),
    st.floats(0.0, 0.9),
    st.sampled_from(["shear", "moment", "deflection"]),
)
def test_the_envelope_lies_on_or_outside_every_single_position(name, offsets, forces, where, quantity):
    beam = BEAMS[name]
    train = Train(tuple(sorted(offsets)), tuple(forces[: len(offsets)]), 0.0, beam.length)
    influence = Influence(beam)
    x, sides = np.linspace(0.01, 0.99, 7) * beam.length, np.ones(7, dtype=bool)
    high, low = Envelope([Runner(train, [(influence, 1.0)])], quantity, none, NOTHING).at(x, sides)[0]
    least, most = train.reach
    u = least + where * (most - least)
    axles = [PointLoad(u + o, f) for o, f in zip(train.offsets, train.forces, strict=True) if 0 <= u + o <= beam.length]
    found = solve(beam, [axles])
    values = evaluate(found.breaks, getattr(found, quantity)[0], x)
    slack = 1e-7 * max(float(np.abs(high).max()), float(np.abs(low).max()))
    assert (values <= high + slack).all()
    assert (values >= low - slack).all()
