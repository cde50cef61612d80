"""Zones of fastener spacing: never wider than allowed, in whole steps, alike from both ends; and places to set out."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.spacing import SpacedZone, positions, spaces, zones


def bow_tie(x: np.ndarray, length: float, tightest: float, widest: float = 300.0) -> np.ndarray:
    """Spacing allowed under a uniform load: inverse to the shear, no wider than the greatest."""
    shear = np.abs(1 - 2 * x / length)
    return np.minimum(tightest / np.maximum(shear, 1e-9), widest)


def test_a_uniform_load_asks_for_tight_ends_alike() -> None:
    x = np.linspace(50, 5950, 400)
    found = zones(50, 5950, x, bow_tie(x, 6000, 80), step=25)
    spacings = [zone.spacing for zone in found]
    assert spacings == spacings[::-1]
    assert spacings[0] == 75
    assert max(spacings) == spacings[len(spacings) // 2] >= 150
    assert 3 <= len(found) <= 7
    for left, right in zip(found, reversed(found), strict=True):
        assert left.start - 50 == pytest.approx(5950 - right.end, abs=1e-6)


@settings(max_examples=60, deadline=None)
@given(
    length=st.floats(300, 12000),
    step=st.sampled_from([5.0, 10.0, 25.0, 25.4]),
    knots=st.lists(st.floats(26, 700), min_size=2, max_size=8),
)
def test_no_zone_is_wider_than_is_allowed_anywhere_in_it(length: float, step: float, knots: list[float]) -> None:
    x = np.linspace(0, length, 600)
    allowed = np.interp(x, np.linspace(0, length, len(knots)), knots)
    found = zones(0, length, x, allowed, step=step)
    assert found[0].start == 0
    assert found[-1].end == pytest.approx(length)
    for left, right in pairwise(found):
        assert left.end == right.start
        assert left.spacing != right.spacing
    for zone in found:
        assert zone.spacing / step == pytest.approx(round(zone.spacing / step))
        inside = (x >= zone.start) & (x <= zone.end)
        assert zone.spacing <= allowed[inside].min(initial=np.inf) + 1e-9
    places = positions(0, length, found)
    for a, b in pairwise(places):
        middle = (a + b) / 2
        zone = next(z for z in found if z.start - 1e-6 <= middle <= z.end + 1e-6)
        assert 0 < b - a <= max(zone.spacing, step) + 1e-6


def test_all_but_the_widest_zone_hold_whole_spaces() -> None:
    x = np.linspace(0, 4000, 300)
    found = zones(0, 4000, x, bow_tie(x, 4000, 60), step=25)
    widest = max(zone.spacing for zone in found)
    for zone in found:
        if zone.spacing < widest:
            whole = (zone.end - zone.start) / zone.spacing
            assert whole == pytest.approx(round(whole))


def test_a_step_more_than_what_is_allowed_is_refused_with_the_place() -> None:
    with pytest.raises(InputError, match="at 0 mm only 20 mm are allowed, less than one step of 25 mm"):
        zones(0, 1000, [0, 1000], [20, 200], step=25)
    for start, end, step in ((5, 5, 25), (0, 1000, 0)):
        with pytest.raises(InputError):
            zones(start, end, [0, 1000], [100, 100], step=step)


def test_places_step_over_zones_of_any_width() -> None:
    given = [SpacedZone(0, 200, 50), SpacedZone(200, 700, 120), SpacedZone(700, 1000, 60)]
    places = positions(30, 970, given)
    assert places == pytest.approx([30, 80, 130, 180, 230, 350, 470, 590, 700, 760, 820, 880, 940, 970])
    assert spaces(places) == [(4, 50), (3, 120), (1, 110), (4, 60), (1, 30)]


def test_fewer_spaces_than_one_leave_both_ends() -> None:
    assert positions(10, 60, [SpacedZone(0, 70, 300)]) == [10, 60]
    with pytest.raises(InputError):
        positions(0, 10, [])
