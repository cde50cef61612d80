"""Diagrams: exact places and values, upright jumps, named extremes, and nothing for nothing."""

from __future__ import annotations

import re
from itertools import pairwise
from typing import Any

import numpy as np
import pytest

from server.errors import InputError
from server.sheets import diagram_svg, flow_svg, joint_svg
from server.sheets.diagrams import QUANTITIES, thinned, ticks
from server.sheets.smooth import rounded
from tests.sheets import drawing_fixtures as fixtures
from tests.sheets.drawing_reading import collisions, letters, outside, polyline, root, texts


def frame(svg: str) -> tuple[float, float]:
    """Pixels of a unit of the value, and of zero."""
    return float(str(root(svg).get("data-scale"))), float(str(root(svg).get("data-zero")))


@pytest.mark.parametrize("quantity", QUANTITIES)
@pytest.mark.parametrize("name", fixtures.DEMOS)
def test_nothing_lettered_overlaps_or_leaves_the_sheet(name: str, quantity: str) -> None:
    result = fixtures.DEMOS[name]()
    svg = diagram_svg(result, quantity, display=result["display"])
    assert collisions(letters(svg)) == []
    assert outside(svg) == []


def test_the_curve_goes_through_the_stored_values() -> None:
    result = fixtures.box_beam()
    svg = diagram_svg(result, "moment")
    per_value, zero = frame(svg)
    curve = polyline(svg, "max")
    x = np.interp(result["diagrams"]["at"], [0, 6000], [58, 640 - 22])
    y = zero + np.array(result["diagrams"]["moment"]["max"]) * per_value
    drawn = np.interp(x, [p[0] for p in curve], [p[1] for p in curve])
    assert np.abs(drawn - y).max() < 0.25


def test_sagging_is_drawn_down_and_positive_shear_up_and_both_are_said() -> None:
    moment, shear = (diagram_svg(fixtures.box_beam(), quantity) for quantity in ("moment", "shear"))
    assert max(y for _, y in polyline(moment, "max")) > frame(moment)[1] + 50
    assert polyline(shear, "max")[0][1] < frame(shear)[1] - 30
    assert any("sagging positive, drawn down" in text for text in texts(moment))
    assert any("drawn up" in text for text in texts(shear))


def test_jumps_are_upright() -> None:
    svg = diagram_svg(fixtures.strip(), "shear")
    curve = polyline(svg, "max")
    steps = [(a, b) for a, b in pairwise(curve) if a[0] == b[0] and a[1] != b[1]]
    assert len(steps) == 1
    (x, above), (_, below) = steps[0]
    assert x == pytest.approx(58 + 0.5 * 560, abs=0.06)
    assert (below - above) / abs(frame(svg)[0]) == pytest.approx(7000, rel=0.01)


def test_extremes_are_lettered_with_value_place_and_combination() -> None:
    found = texts(diagram_svg(fixtures.box_beam(), "shear"))
    assert "14.6 kN at 0, all together" in found
    assert "−13.6 kN at 6 m, all together" in found
    assert "2128 lbf at 0, all" in [
        text.replace("\u2009", "") for text in texts(diagram_svg(fixtures.deck(), "shear", display="US"))
    ]


def test_the_stored_extreme_is_lettered_and_not_the_highest_drawn_point() -> None:
    result = fixtures.box_beam()
    result["member"]["moment"] |= {"max": 22.345e6, "at_max": 2761.0, "combination_max": "exact"}
    svg = diagram_svg(result, "moment")
    assert any(
        text.startswith("22.34 kN·m at 2.761 m, exact") or text.startswith("22.35 kN·m at 2.761 m")
        for text in texts(svg)
    )


def test_an_envelope_shows_greatest_and_least() -> None:
    svg = diagram_svg(fixtures.box_beam(), "moment")
    assert 'class="min"' in svg
    assert any("solid greatest, dashed least" in text for text in texts(svg))
    alone = diagram_svg(fixtures.strip(), "moment")
    assert 'class="min"' not in alone
    assert not any("dashed" in text for text in texts(alone))


def test_axes_have_units_and_round_steps() -> None:
    svg = diagram_svg(fixtures.strip(), "moment")
    assert "Bending moment [kN·m]" in texts(svg)
    assert {"0", "5", "10", "15", "20", "0 m"} <= set(texts(svg))
    us = diagram_svg(fixtures.deck(), "deflection", display="US")
    assert "Deflection [in]" in texts(us)
    assert {"0.1", "0.2", "0 ft", "8"} <= set(texts(us))


@pytest.mark.parametrize(
    ("low", "high", "most", "expected"),
    [
        (0, 10, 5, [0, 2, 4, 6, 8, 10]),
        (-7, 23, 4, [0, 10, 20]),
        (0, 1, 5, [0, 0.2, 0.4, 0.6, 0.8, 1.0]),
        (0, 47e3, 5, [0, 10e3, 20e3, 30e3, 40e3]),
        (3, 3, 5, [3]),
    ],
)
def test_ticks_step_by_one_two_or_five(low: float, high: float, most: int, expected: list[float]) -> None:
    assert ticks(low, high, most) == pytest.approx(expected)


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_nothing_everywhere_is_a_flat_line(quantity: str) -> None:
    result = fixtures.strip()
    count = len(result["diagrams"]["at"])
    result["diagrams"][quantity] = {"max": [0.0] * count, "min": [0.0] * count}
    result["member"][quantity] = {**result["member"]["moment"], "max": 0.0, "min": 0.0, "at_max": 0.0, "at_min": 0.0}
    svg = diagram_svg(result, quantity)
    assert "0 everywhere" in texts(svg)
    assert "nan" not in svg
    assert len({y for _, y in polyline(svg, "max")}) == 1


def test_what_no_combination_asks_for_is_said() -> None:
    result = fixtures.strip()
    del result["diagrams"]["deflection"], result["member"]["deflection"]
    assert any("nothing to draw" in text for text in texts(diagram_svg(result, "deflection")))
    del result["diagrams"]["joints"]
    assert any("there is no joint" in text for text in texts(flow_svg(result)))


def test_an_unknown_quantity_is_refused_by_name() -> None:
    with pytest.raises(InputError, match="'torque'; choose one of shear, moment"):
        diagram_svg(fixtures.strip(), "torque")


def test_supports_inside_the_member_are_marked() -> None:
    svg = diagram_svg(fixtures.cross_bearer(), "shear")
    marks = next(p for p in root(svg).iter() if p.get("class") == "supports")
    places = [float(n) for n in re.findall(r"M([\d.]+)", str(marks.get("d")))]
    assert places == pytest.approx([58 + 560 * 550 / 2400, 58 + 560 * 1850 / 2400], abs=0.06)


def test_few_points_are_written_and_none_that_matters_is_lost() -> None:
    x = np.linspace(0, 560, 2001)
    y = 80 * np.sin(x / 40) + np.where(x > 300, 25.0, 0.0)
    few_x, few_y = thinned(x, y)
    assert len(few_x) < 200
    assert (few_x[0], few_x[-1]) == (0, 560)
    assert np.abs(np.interp(x, few_x, few_y) - y).max() < 1.0
    straight = thinned(np.linspace(0, 100, 65), np.linspace(0, 50, 65))
    assert len(straight[0]) <= 5


@pytest.mark.parametrize("name", fixtures.DEMOS)
def test_a_drawing_is_small(name: str) -> None:
    result = fixtures.DEMOS[name]()
    for quantity in ("shear", "moment", "deflection"):
        assert len(diagram_svg(result, quantity, display=result["display"])) < 6000


def test_one_joint_is_drawn_with_its_number() -> None:
    svg = joint_svg(fixtures.box_beam(), "bottom flange/web L")
    assert "Shear flow in joint 3, bottom flange/web L [N/mm]" in texts(svg)
    assert any(text.startswith("17.8 N/mm at 0") for text in texts(svg))
    assert collisions(letters(svg)) == []


def test_joints_that_carry_the_same_share_a_lane() -> None:
    svg = flow_svg(fixtures.box_beam())
    assert svg.count('class="max"') == 1
    assert "joints 1, 2, 3, 4" in texts(svg)
    assert "17.8 N/mm at 0, all together" in texts(svg)


def test_joints_that_differ_are_drawn_to_one_scale() -> None:
    result = fixtures.stack(4)
    svg = flow_svg(result)
    curves = [str(p.get("d")) for p in root(svg).iter() if p.get("class") == "max"]
    assert len(curves) == 3

    def rise(path: str) -> float:
        zero, first = re.findall(r"M[\d.]+ ([\d.]+)L[\d.]+ ([\d.]+)", path)[0]
        return float(zero) - float(first)

    assert rise(curves[2]) == pytest.approx(3 * rise(curves[0]), abs=0.2)
    assert collisions(letters(svg)) == []
    assert outside(svg) == []


def test_sixty_joints_make_sixty_lanes() -> None:
    svg = flow_svg(fixtures.stack(60))
    assert svg.count('class="max"') == 59
    assert collisions(letters(svg)) == []


def test_combination_names_are_text_and_never_markup() -> None:
    result: dict[str, Any] = fixtures.strip()
    result["member"]["shear"]["combination_max"] = '<b onload="x">'
    assert any('<b onload="x">' in text for text in texts(diagram_svg(result, "shear")))


def test_a_curve_is_drawn_round_between_its_samples_and_sharp_at_kinks_and_jumps() -> None:
    x = np.array([0.0, 1, 2, 3, 3, 4, 5, 6])
    y = np.array([0.0, 5, 8, 9, -1, 0, -1, -4])  # two parabolas with a jump between them
    xs, ys = rounded(x, y)
    first = xs < 3
    assert ys[first] == pytest.approx(6 * xs[first] - xs[first] ** 2)
    second = xs > 3
    assert ys[second] == pytest.approx(-((xs[second] - 4) ** 2))
    tent = np.array([0.0, 1, 2, 3, 2, 1, 0])
    xs, ys = rounded(np.arange(7.0), tent)
    assert ys == pytest.approx(np.interp(xs, np.arange(7.0), tent))
