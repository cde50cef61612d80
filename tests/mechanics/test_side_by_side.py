"""Beams side by side on ties: the beam on an elastic foundation, plain beams, equilibrium, and the limits."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.beam import Beam, Couple, LineLoad, PointLoad, Stretch, Support, extremes, solve
from server.mechanics.side_by_side import Tie, solve_side_by_side

L = 6000.0
PINS = [Support(0, "pin"), Support(L, "pin")]


def test_at_a_support_the_ties_hand_over_what_a_beam_on_an_elastic_foundation_does() -> None:
    """Hetenyi, "Beams on Elastic Foundation" (1946), the semi-infinite beam under an end load; from memory:

    q = r (2 lambda R - w), lambda^4 = k/4 (1/EI_1 + 1/EI_2), where one of two long beams alone bears.
    """
    EI, k, s, w = (4e11, 2e11), 60.0, 10.0, 5.0
    ties = [Tie(0, 1, x, k * s) for x in np.arange(s / 2, L, s)]
    found = solve_side_by_side(L, EI, (True, False), PINS, ties, [[LineLoad(0, L, w, w)]])
    r, decay = EI[1] / sum(EI), (k / 4 * (1 / EI[0] + 1 / EI[1])) ** 0.25
    q = found.tie[:, 0] / s
    at_end = 1.5 * q[0] - 0.5 * q[1]  # the first tie stands half a space from the support
    assert at_end == pytest.approx(-r * (2 * decay * w * L / 2 - w), rel=5e-3)
    assert q[len(q) // 2] == pytest.approx(r * w, rel=0.02)  # far from the ends the other beam takes its share


@pytest.mark.parametrize(
    "supports",
    [PINS, [Support(0, "fixed"), Support(L, "pin")], [Support(500, "spring", 800.0), Support(3000, "pin"),
     Support(L, "pin")]],
    ids=["pins", "a fixed end", "a spring"],
)  # fmt: skip
def test_where_all_bear_or_there_is_one_it_is_the_beam(supports: list[Support]) -> None:
    loads = [[LineLoad(500, 4500, 3, 1), PointLoad(1700, 4000), Couple(2500, 3e6)], [LineLoad(0, L, 2, 2)]]
    EI = (4e11, 2e11)
    plain = solve(Beam(L, supports, [], [Stretch(0, L, sum(EI))]), loads)
    both = solve_side_by_side(L, EI, (True, True), supports, [Tie(0, 1, 1000, 500.0)], loads)
    single = solve_side_by_side(L, [sum(EI)], [True], supports, [], loads)
    sag = extremes(plain.breaks, plain.deflection, 0, L)
    bend = extremes(plain.breaks, plain.moment, 0, L)
    for case in range(2):
        assert np.abs(both.tie[:, case]).max() < 1e-6 * 4000
        assert single.deflection[0, :, case].max() == pytest.approx(sag.max[case], rel=1e-3)
        assert single.moment[0, :, :, case].max() == pytest.approx(bend.max[case], rel=4e-3)
        assert single.moment[0, :, :, case].min() == pytest.approx(bend.min[case], rel=4e-3, abs=1e3)
        share = EI[0] / sum(EI)
        assert both.moment[0, :, :, case].max() == pytest.approx(share * bend.max[case], rel=4e-3)


@settings(max_examples=25, deadline=None)
@given(st.floats(1e10, 1e12), st.floats(1e10, 1e12), st.floats(50, 1e6), st.floats(100, 5900), st.integers(3, 30))
def test_what_is_handed_over_balances_and_stiff_ties_share_by_stiffness(
    first: float, second: float, k: float, at: float, count: int
) -> None:
    ties = [Tie(0, 1, x, k) for x in np.linspace(100, L - 100, count)]
    found = solve_side_by_side(L, (first, second), (True, False), PINS, ties, [[PointLoad(at, 1000.0)]])
    force = found.tie[:, 0]
    places = np.array([tie.at for tie in ties])
    size = np.abs(force).sum() + 1e-9
    assert abs(force.sum()) < 1e-4 * size  # the beam that hangs is held by the ties alone
    assert abs(force @ places) < 1e-4 * size * L
    total = found.moment[:, 1, :, 0].sum(axis=0)  # both together carry the whole moment
    whole = np.interp(found.places, [0, at, L], [0, 1000 * at * (L - at) / L, 0])
    assert np.abs(total - whole).max() < 1e-4 * whole.max()
    stiff = [Tie(0, 1, x, 1e9) for x in np.linspace(0, L, 241)]
    tied = solve_side_by_side(L, (first, second), (True, False), PINS, stiff, [[LineLoad(0, L, 1, 1)]])
    middle = np.abs(tied.places - L / 2).argmin()
    share = first / (first + second)
    assert tied.moment[0, 1, middle, 0] == pytest.approx(share * L**2 / 8, rel=5e-3)


def test_a_beam_that_nothing_holds_is_refused() -> None:
    with pytest.raises(InputError, match="two ties"):
        solve_side_by_side(L, (1e11, 1e11), (True, False), PINS, [], [[PointLoad(1000, 1.0)]])
    with pytest.raises(InputError, match="bears"):
        solve_side_by_side(L, (1e11, 1e11), (False, False), PINS, [], [[PointLoad(1000, 1.0)]])
