"""Drawings of test results: every coupon, marked by shape and word; to scale; the policy all drawings live under."""

from __future__ import annotations

import json
import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.mechanics.control_chart import control_chart
from server.sheets import Point, dot_plot_svg, history_svg, in_words, probability_plot_svg
from server.sheets.plotting import Axis, round_ends, texts_of
from tests.checks import coupon_sets as sets
from tests.sheets.drawing_reading import root

ALLOWED = {"svg", "title", "desc", "defs", "g", "path", "text"}
FALLING = [1.80, 1.83, 1.79, 1.85, 1.78, 1.82, 1.84, 1.80, 1.79, 1.77, 1.76, 1.75, 1.74, 1.73, 1.30]


def demo(distribution: str = "lognormal", exclude: bool = True, batches: bool = False) -> sets.Raw:
    listed = sets.coupons(sets.ROLLING_SHEAR, failure={"substrate": 90, "cohesive": 10})
    if exclude:
        listed[7]["excluded"] = "closed after 19 min"
    for i, coupon in enumerate(listed):
        coupon["batch"] = "AB"[i % 2] if batches else "24-117"
    return sets.run(listed, distribution=distribution)


def points(values: list[float]) -> list[Point]:
    return [Point(f"T-{i + 1:03}", "2026-03-02", value) for i, value in enumerate(values)]


def texts(svg: str) -> list[str]:
    return [element.text or "" for element in root(svg).iter() if element.tag.endswith("}text")]


def dots(svg: str) -> list[tuple[float, float]]:
    """Centres of filled dots: each is one sub-path of the pen that fills."""
    path = next(each for each in root(svg).iter() if each.get("fill") == "#111" and each.tag.endswith("path"))
    return [
        (float(x) + float(r), float(y))
        for x, y, r in re.findall(r"M([-\d.]+) ([-\d.]+)a([\d.]+) [\d.]+ 0 1 0", path.get("d") or "")
    ]


DRAWN = {
    "dots": lambda display: dot_plot_svg(demo(), display=display),
    "batches": lambda display: dot_plot_svg(demo(batches=True), display=display),
    "one coupon": lambda display: dot_plot_svg(sets.run([3.0]), display=display),
    "normal": lambda display: probability_plot_svg(demo("normal"), display=display),
    "weibull": lambda display: probability_plot_svg(demo("weibull", exclude=False), display=display),
    "no plot": lambda display: probability_plot_svg(sets.run([3.0]), display=display),
    "history": lambda display: history_svg(points(FALLING), control_chart(FALLING), display=display),
    "no history": lambda display: history_svg(points([1.8]), None, display=display),
}


@pytest.mark.parametrize("display", ["SI", "US"])
@pytest.mark.parametrize("name", DRAWN)
def test_plain_elements_words_for_those_who_cannot_see_and_no_lost_number(name: str, display: str) -> None:
    svg = DRAWN[name](display)
    drawing = root(svg)
    for element in drawing.iter():
        assert element.tag.split("}")[1] in ALLOWED
        assert not {"style", "href"} & set(element.attrib)
    assert drawing.get("role") == "img"
    assert len(str(drawing.get("aria-label"))) > 30
    assert not re.search(r"\b(nan|inf|None)\b", svg)
    assert svg == DRAWN[name](display)


def test_the_low_coupon_is_marked_by_shape_and_word() -> None:
    open_set, closed = dot_plot_svg(demo(exclude=False)), dot_plot_svg(demo())
    assert "no. 8 apart" in texts(open_set)
    assert "stands apart from the others" in texts(open_set)
    assert len(dots(open_set)) == 12 + 2  # and the marks of the legend
    assert "no. 8 excluded" in texts(closed)
    assert len(dots(closed)) == 11 + 1
    assert "coupon 8 at 1.12, excluded: closed after 19 min" in str(root(closed).get("aria-label"))


def test_both_answers_and_the_mean_stand_on_it() -> None:
    found = texts(dot_plot_svg(demo()))
    for text in ("characteristic 1.584", "with every coupon 1.275", "mean 1.823"):
        assert text in found
    assert "characteristic 229.8" in texts(dot_plot_svg(demo(), display="US"))  # 1.584 MPa in psi


def test_batches_have_a_row_each() -> None:
    svg = dot_plot_svg(demo(batches=True))
    assert {"batch A", "batch B"} <= set(texts(svg))
    assert len({y for _, y in dots(svg)}) == 3  # two rows and the legend


def test_dots_are_to_scale_and_hide_none_another() -> None:
    svg = dot_plot_svg(sets.run([10.0, 10.0, 10.0, 12.0, 14.0]))
    found = sorted(dots(svg))
    assert len(found) == 5
    assert len(set(found)) == 5
    tens, twelve, fourteen = found[0][0], found[3][0], found[4][0]
    assert twelve - tens == pytest.approx(fourteen - twelve, abs=0.2)


def test_points_of_a_fitting_set_lie_along_the_line() -> None:
    plot = demo()["probability_plot"]
    (low, high) = plot["line"]
    assert plot["points"][0]["index"] == 3  # the lowest that is left: 1.66
    assert low["stress"] < plot["points"][0]["stress"] < plot["points"][-1]["stress"] < high["stress"]
    assert 7 not in [point["index"] for point in plot["points"]]
    assert "5 % may lie below" in texts(probability_plot_svg(demo()))


def test_a_distribution_free_plot_has_points_and_no_line() -> None:
    plot = sets.run(sets.ROLLING_SHEAR * 3, distribution="nonparametric")["probability_plot"]
    assert plot["line"] is None
    assert len(plot["points"]) == 36


def test_a_falling_history_is_told_before_it_is_beyond_a_limit() -> None:
    before, after = FALLING[:-1], FALLING
    assert any("falls over 8 sets" in line for line in in_words(points(before), control_chart(before)))
    assert not any("limit" in line for line in in_words(points(before), control_chart(before)))
    assert "T-015 lies below the lower limit." in in_words(points(after), control_chart(after))
    assert "a first estimate" in " ".join(texts(history_svg(points(after), control_chart(after))))


@given(st.lists(st.floats(0.01, 500), min_size=1, max_size=30))
@settings(max_examples=25, deadline=None)
def test_any_set_can_be_drawn(values: list[float]) -> None:
    result = sets.run([round(value, 4) for value in values], distribution="normal")
    for svg in (dot_plot_svg(result), probability_plot_svg(result, display="US")):
        assert not re.search(r"\b(nan|inf)\b", svg)
        box = [float(each) for each in str(root(svg).get("viewBox")).split()]
        assert box[3] > 20
    assert len(dots(dot_plot_svg(result))) >= len(values)


def test_names_of_batches_cannot_break_out() -> None:
    listed = sets.coupons([5.0, 6.0, 5.5, 5.2])
    listed[0]["batch"], listed[1]["batch"] = "<script>", '"&'
    svg = dot_plot_svg(sets.run(listed))
    assert "batch <script>" in texts(svg)
    assert "<script>" not in svg


def test_axes_have_round_ends_and_even_decimals() -> None:
    assert texts_of([1.8, 2.0, 2.2]) == ["1.8", "2.0", "2.2"]
    assert round_ends([5.0, 5.0])[0] < 5.0 < round_ends([5.0, 5.0])[1]
    assert round_ends([0.1, 5.0], least=0.0)[0] == 0.0
    axis = Axis(1.0, 100.0, 0.0, 200.0, logarithmic=True)
    assert axis(10.0) == pytest.approx(100.0)
    assert axis.marks(9) == [1, 2, 5, 10, 20, 50, 100]


def test_the_result_with_its_plot_is_plain_json() -> None:
    for distribution in ("normal", "lognormal", "weibull", "nonparametric"):
        result = demo(distribution, exclude=False)
        assert json.loads(json.dumps(result, allow_nan=False)) == result
