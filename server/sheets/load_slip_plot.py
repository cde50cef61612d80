"""Load over slip of the shop's own fastener tests, with the points that give the slip modulus of each."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from server.sheets.diagrams import ticks
from server.sheets.plotting import Axis, across, texts_of
from server.sheets.svg import CAP, FONT_SIZE, Drawing, path, spread, text_width
from server.sheets.values import Unit, unit

LEFT, TOP, HEIGHT = 60.0, 22.0, 240.0
SAID = 14.0
"""Step between two texts at the right-hand edge."""
LINE = 11.0
"""Height of a specimen's number."""
APART = 22.0
"""Curves that end within this width share a column of numbers."""
MOST_NUMBERED = 20
PARTS = (0.1, 0.4)
Specimen = Mapping[str, Any]
Point = tuple[float, float]


def has_curves(result: Mapping[str, Any]) -> bool:
    """Whether a result of kind "load-slip" has anything to draw; older ones keep no readings."""
    return any(points for _, points in _runs(result))


def load_slip_svg(result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0, prefix: str = "") -> str:
    """Draw the tests of a result of kind "load-slip" as SVG, loads of one fastener and shear plane.

    A specimen with readings is its curve, one without them the line through its two slips. The characteristic load and
    the mean are level lines.
    """
    drawing, force, length = Drawing(width), unit("N", display), unit("mm", display)
    runs = [(each, points) for each, points in _runs(result) if points]
    levels = _levels(result, force)
    right = width - max([0.0, *(text_width(text) for _, text, _ in levels)]) - 16
    loads = [load for _, points in runs for _, load in points] + [value for value, *_ in levels]
    slips = [slip for _, points in runs for slip, _ in points]
    x_axis = Axis(0.0, 1.08 * max(slips, default=1.0) * length.factor or 1.0, LEFT, right)
    y_axis = Axis(min(0.0, *loads) * force.factor, 1.1 * max(loads) * force.factor, TOP + HEIGHT, TOP)
    _load_axis(drawing, y_axis, right, force)
    across(drawing, x_axis, TOP + HEIGHT, f"Slip [{length.text}]", grid_to=TOP)
    _draw_levels(drawing, y_axis, right, levels, force)
    ends = []
    for each, points in runs:
        placed = [(x_axis(slip * length.factor), y_axis(load * force.factor)) for slip, load in points]
        marked = [(x_axis(s * length.factor), y_axis(f * force.factor)) for s, f in _thirds(each)]
        _specimen(drawing, each, placed, marked)
        ends.append((*placed[-1], str(each["index"] + 1)))
    if len(runs) <= MOST_NUMBERED:
        _numbers(drawing, ends)
    drawing.height = TOP + HEIGHT + 46
    _key(drawing, runs)
    return drawing.svg("load-slip", "Load over slip", _words(result, runs, force, length), prefix=prefix)


def _runs(result: Mapping[str, Any]) -> Iterator[tuple[Specimen, list[Point]]]:
    """Each specimen with its points (slip, load): its readings, else its two slips, from rest."""
    for each in result.get("specimens") or ():
        curve = each.get("curve")
        if curve:
            yield each, list(zip(curve["slip"], curve["load"], strict=True))
        else:
            marks = _thirds(each)
            yield each, [(0.0, 0.0), *marks] if marks else []


def _thirds(each: Specimen) -> list[Point]:
    """The points at a tenth and four tenths of the reference load, between which the slip modulus is taken."""
    reference, slips = each.get("reference"), (each.get("v01"), each.get("v04"))
    if reference is None or None in slips:
        return []
    return [(float(slip), part * reference) for slip, part in zip(slips, PARTS, strict=True) if slip is not None]


def _levels(result: Mapping[str, Any], force: Unit) -> list[tuple[float, str, str]]:
    found = [(result.get("mean"), "mean", "axis"), (result.get("shear_resistance"), "characteristic", "heavy")]
    return [(value, f"{name} {force.full(value)}", pen) for value, name, pen in found if isinstance(value, int | float)]


def _draw_levels(
    drawing: Drawing, axis: Axis, right: float, levels: Sequence[tuple[float, str, str]], force: Unit
) -> None:
    """A level line for each value, its name in the margin."""
    ordered = sorted(levels, key=lambda level: -level[0])
    places = [axis(value * force.factor) for value, *_ in ordered]
    lettered = spread(places, [SAID] * len(places), TOP - 8, TOP + HEIGHT + 8, 0)
    for (_, text, pen), y, at in zip(ordered, places, lettered, strict=True):
        drawing.line(pen, LEFT, y, right, y)
        drawing.text(right + 8, at + CAP * FONT_SIZE, text, bold=pen == "heavy")


def _load_axis(drawing: Drawing, axis: Axis, right: float, force: Unit) -> None:
    drawing.line("outline", LEFT, TOP, LEFT, TOP + HEIGHT)
    marks = [mark for mark in ticks(axis.low, axis.high, 7) if axis.holds(mark)]
    for mark, text in zip(marks, texts_of(marks), strict=True):
        y = axis(mark)
        drawing.pen("grid").append(f"M{LEFT:.1f} {y:.1f}H{right:.1f}")
        drawing.text(LEFT - 6, y + CAP * FONT_SIZE, text, "end")
    drawing.text(LEFT, 12, f"Load of one fastener and shear plane [{force.text}]", bold=True)


def _specimen(drawing: Drawing, each: Specimen, placed: Sequence[Point], marked: Sequence[Point]) -> None:
    """The curve, dashed where the specimen is excluded, and a dot at a tenth and at four tenths."""
    drawing.pen("touching" if each.get("excluded") else "outline").append(path(placed))
    for point in marked:
        drawing.dot(*point)


def _numbers(drawing: Drawing, ends: Sequence[tuple[float, float, str]]) -> None:
    """The specimens' numbers where their curves end; those that would lie on each other step aside, with a leader."""
    columns: list[list[tuple[float, float, str]]] = []
    for end in sorted(ends):
        if columns and end[0] - columns[-1][-1][0] < APART:
            columns[-1].append(end)
        else:
            columns.append([end])
    for column in columns:
        ordered = sorted(column, key=lambda end: end[1])
        left = max(x for x, *_ in ordered) + 8
        places = spread([y for _, y, _ in ordered], [LINE] * len(ordered), TOP, TOP + HEIGHT, 0)
        for (x, y, text), at in zip(ordered, places, strict=True):
            drawing.line("thin", x + 1, y, left - 1, at)
            drawing.backing(left, at - LINE / 2, text_width(text), LINE)
            drawing.text(left, at + CAP * FONT_SIZE, text)


def _key(drawing: Drawing, runs: Sequence[tuple[Specimen, Sequence[Point]]]) -> None:
    """What dots and dashes mean, below the axis."""
    y, x = drawing.height + 6, LEFT
    if any(_thirds(each) for each, _ in runs):
        drawing.dot(x + 4, y - CAP * FONT_SIZE)
        text = "at a tenth and four tenths of the load, for the slip modulus"
        drawing.text(x + 14, y, text)
        x += 14 + text_width(text) + 18
    if any(each.get("excluded") for each, _ in runs):
        drawing.line("touching", x, y - CAP * FONT_SIZE, x + 20, y - CAP * FONT_SIZE)
        drawing.text(x + 26, y, "excluded, with its cause")
    drawing.height = y + 8


def _words(
    result: Mapping[str, Any], runs: Sequence[tuple[Specimen, Sequence[Point]]], force: Unit, length: Unit
) -> str:
    """The text alternative: how many, how far, and the level lines."""
    count = len(runs)
    farthest = max(slip for _, points in runs for slip, _ in points)
    words = [f"Load over slip of {count} specimen{'' if count == 1 else 's'}, to a slip of {length.full(farthest)}"]
    words += [text for _, text, _ in _levels(result, force)]
    out = [str(each["index"] + 1) for each, _ in runs if each.get("excluded")]
    return "; ".join(words + ([f"excluded: no. {', '.join(out)}"] if out else [])) + "."
