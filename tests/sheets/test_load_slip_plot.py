"""The drawing of fastener tests: to scale, what is excluded dashed, nothing where no readings were kept."""

from __future__ import annotations

import numpy as np
import pytest

from server import checks, documents
from server.sheets.load_slip import PAGE
from server.sheets.load_slip_plot import load_slip_svg
from tests.sheets.drawing_reading import collisions, letters, outside, root
from tests.sheets.test_coupon_drawings import ALLOWED, dots

RISING = [[load, load / 1000 + 0.05] for load in range(0, 4001, 250)]
TESTS = [
    {"readings": RISING},
    {"readings": [[1.1 * load, slip] for load, slip in RISING]},
    {"readings": [[0.4 * load, slip] for load, slip in RISING], "excluded": "head pulled through a knot hole"},
    {"maximum": 4200, "v01": 0.3, "v04": 1.5},
]
MARKED = [(0.45, 400), (1.65, 1600), (0.45, 440), (1.65, 1760), (0.3, 420), (1.5, 1680)]
"""Slip [mm] and load [N] at a tenth and four tenths of the greatest load of those that count, by hand."""


def run(specimens, **more):
    return checks.run(documents.read({"format": "bondwright/1", "kind": "load-slip", "specimens": specimens, **more}))


@pytest.mark.parametrize("display", ["SI", "US"])
def test_the_marks_of_the_slip_modulus_lie_to_one_scale(display):
    svg = load_slip_svg(run(TESTS, fastener_count=2), display=display)
    drawn = np.array(dots(svg)[: len(MARKED)])
    for column, values in enumerate(np.array(MARKED, dtype=float).T):
        slope, at = np.polyfit(values, drawn[:, column], 1)
        assert np.abs(at + slope * values - drawn[:, column]).max() < 0.11  # written in tenths of a pixel
        assert slope > 0 if column == 0 else slope < 0
    assert {each.tag.rpartition("}")[2] for each in root(svg).iter()} <= ALLOWED
    assert not any(each.get("style") for each in root(svg).iter())
    assert not outside(svg)
    assert not collisions([each for each in letters(svg) if each.text])
    words = root(svg).get("aria-label") or ""
    assert "4 specimens" in words
    assert "excluded: no. 3" in words
    assert "characteristic" in words


def test_only_what_is_excluded_is_dashed():
    def dashed(svg):
        return sum(each.get("stroke-dasharray") == "4 3" for each in root(svg).iter())

    assert dashed(load_slip_svg(run(TESTS))) == 1
    assert dashed(load_slip_svg(run([TESTS[0], TESTS[1]]))) == 0


def test_a_result_without_readings_or_slips_has_no_drawing():
    """Those saved before the readings were kept, too."""
    kept, bare = run(TESTS), run([{"maximum": 4000}, {"maximum": 4100}])
    old = {**kept, "specimens": [{**each, "curve": None, "reference": None} for each in kept["specimens"]]}
    assert "Load over slip" in [title for title, _ in PAGE.blocks(kept, "SI")]
    for result in (bare, old):
        assert "Load over slip" not in [title for title, _ in PAGE.blocks(result, "SI")]


def test_very_many_readings_keep_their_extremes():
    slip = np.linspace(0, 12, 2000)
    load = 3000 * (1 - np.exp(-slip)) + 50 * np.sin(40 * slip)
    load[1234], load[567] = 3456.0, 1111.0
    found = run([{"readings": np.column_stack([load, slip]).tolist()}, TESTS[0]])["specimens"][0]["curve"]
    assert len(found["load"]) <= 402
    assert {3456.0, 1111.0, load[-1]} <= set(found["load"])
    assert found["slip"] == sorted(found["slip"])
