"""Coupons on probability paper: whether they follow the distribution that was chosen, and where the value lies."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from server.sheets import drafting
from server.sheets.plotting import DOT, Axis, across, coupon_mark, kind_of, legend, round_ends
from server.sheets.svg import CAP, FONT_SIZE, Drawing, text_width
from server.sheets.values import Unit, unit

LEFT, RIGHT, TOP = 58.0, 16.0, 22.0
NAMES = {"normal": "normal", "lognormal": "log-normal", "weibull": "Weibull", "nonparametric": "normal"}


def probability_plot_svg(
    result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0, height: float = 300.0, prefix: str = ""
) -> str:
    """Draw the probability plot of a result of kind "coupons" as SVG; one without a plot is a drawing that says so."""
    drawing, of = Drawing(width), unit(str(result.get("unit") or "MPa"), display)
    plot, title = result.get("probability_plot"), str(result.get("title") or "this set")
    if not plot:
        drawing.height = 26
        drawing.text(8, 17, "Probability plot: too few coupons, or too many, to be told apart on paper.")
        return drawing.svg("coupons probability", f"Probability plot, {title}", "Probability plot: nothing to draw.")
    distribution = str((result.get("statistic") or {}).get("distribution"))
    value = result.get("characteristic")
    bottom = height - 46
    axis = _stresses(plot, value, of, width)
    up = Axis(*_reach(plot), bottom, TOP)
    _shares(drawing, plot, up, axis)
    across(drawing, axis, bottom, f"{result.get('quantity') or 'Stress at failure'} [{of.text}]", grid_to=TOP)
    drawing.line("outline", LEFT, TOP, LEFT, bottom)
    drawing.text(LEFT, 13, f"Share of coupons below, {NAMES.get(distribution, '')} probability paper", bold=True)
    if plot["line"]:
        _line(drawing, plot["line"], axis, up, of)
    _asked(drawing, plot["asked"], value, axis, up, of)
    kinds = _points(drawing, result, plot, axis, up, of)
    drawing.height = height
    if kinds - {"coupon"}:
        legend(drawing, LEFT, height + 8, kinds)
        drawing.height += 14
    words = _words(result, plot, of)
    return drawing.svg("coupons probability", f"Probability plot, {title}", words, prefix=prefix)


def _stresses(plot: Mapping[str, Any], value: object, of: Unit, width: float) -> Axis:
    drawn = [point["stress"] * of.factor for point in plot["points"]]
    if isinstance(value, int | float) and value > 0:
        drawn.append(value * of.factor)
    low, high = round_ends(drawn, room=0.08, least=0.0 if not plot["logarithmic"] else min(drawn) * 0.9)
    return Axis(low, high, LEFT, width - RIGHT, bool(plot["logarithmic"]))


def _reach(plot: Mapping[str, Any]) -> tuple[float, float]:
    places = [point["place"] for point in plot["points"]] + [plot["asked"]["place"]]
    return min(places) - 0.55, max(places) + 0.3


def _shares(drawing: Drawing, plot: Mapping[str, Any], up: Axis, axis: Axis) -> None:
    for mark in plot["axis"]:
        if up.holds(mark["place"]):
            y = up(mark["place"])
            drawing.pen("grid").append(f"M{axis.start:.1f} {y:.1f}H{axis.end:.1f}")
            drawing.text(LEFT - 6, y + CAP * FONT_SIZE, f"{drafting.number(100 * mark['share'])} %", "end")


def _line(drawing: Drawing, line: list[dict[str, float]], axis: Axis, up: Axis, of: Unit) -> None:
    """The fitted line, cut at the edges of the paper."""
    (x1, y1), (x2, y2) = ((axis(end["stress"] * of.factor), up(end["place"])) for end in line)
    if x1 == x2:
        return
    slope = (y2 - y1) / (x2 - x1)
    left, right = max(min(x1, x2), axis.start), min(max(x1, x2), axis.end)
    if left < right:
        drawing.line("outline", left, y1 + slope * (left - x1), right, y1 + slope * (right - x1))


def _asked(drawing: Drawing, asked: Mapping[str, float], value: object, axis: Axis, up: Axis, of: Unit) -> None:
    """The share that may lie below, and the characteristic value: left of the line by what few coupons cost."""
    y = up(asked["place"])
    drawing.line("chain", axis.start, y, axis.end, y)
    drawing.text(axis.end, y - 4, f"{drafting.number(100 * asked['share'])} % may lie below", "end", size=9.5)
    if isinstance(value, int | float) and value > 0:
        x, text = axis(value * of.factor), f"characteristic {of.number(value)}"
        drawing.line("heavy", x, y - 8, x, y + 8)
        wide = 1.06 * text_width(text)
        left = min(max(x - wide / 2, axis.start + 6), axis.end - wide)
        drawing.backing(left - 2, y + 10, wide + 4, 12)
        drawing.text(left, y + 19.5, text, bold=True)


def _points(
    drawing: Drawing, result: Mapping[str, Any], plot: Mapping[str, Any], axis: Axis, up: Axis, of: Unit
) -> set[str]:
    listed = {each["index"]: each for each in result["coupons"]}
    kinds = set()
    for point in plot["points"]:
        kind = kind_of(listed[point["index"]])
        kinds.add(kind)
        x, y = axis(point["stress"] * of.factor), up(point["place"])
        coupon_mark(drawing, kind, x, y, DOT * 0.9)
        if kind == "outlier":
            text = f"no. {point['index'] + 1} apart"
            drawing.backing(x + 8, y - 6, text_width(text) + 2, 12)
            drawing.text(x + 9, y + CAP * FONT_SIZE, text)
    return kinds


def _words(result: Mapping[str, Any], plot: Mapping[str, Any], of: Unit) -> str:
    fit = result.get("fit") or {}
    told = ""
    if fit.get("test"):
        told = f" {fit['test']}: {'accepted' if fit['accepted'] else 'not accepted'} at 5 %."
    points = ", ".join(
        f"{of.number(point['stress'])} at {drafting.number(100 * point['share'], 3)} %" for point in plot["points"][:12]
    )
    more = f" and {len(plot['points']) - 12} more" if len(plot["points"]) > 12 else ""
    return f"Coupons in rising order with the share that lies below each: {points}{more}.{told}"
