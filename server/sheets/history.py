"""The sets of one value over time as a control chart: drift is seen before a joint fails."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from server.mechanics.control_chart import Chart
from server.sheets import drafting
from server.sheets.plotting import Axis, round_ends, texts_of
from server.sheets.svg import CAP, FONT_SIZE, Drawing, shorten, text_width
from server.sheets.values import Unit, unit

LEFT, RIGHT, TOP = 58.0, 96.0, 22.0
VALUES, RANGES, BETWEEN = 150.0, 72.0, 26.0
FIRM = 20
"""Sets from which on limits are more than a first estimate."""
MOST_NAMED = 16


@dataclass(frozen=True)
class Point:
    """One set in the history: its name, its day, and what is charted of it [MPa]."""

    name: str
    day: str
    value: float


def history_svg(
    points: Sequence[Point],
    chart: Chart | None,
    *,
    what: str = "Mean of the set",
    stored: str = "MPa",
    display: str = "SI",
    width: float = 640.0,
    prefix: str = "",
) -> str:
    """Draw values in the order of time with centre and limits, and their moving ranges below, as SVG.

    Without ``chart`` (fewer than two sets) the drawing says that there is no history yet.
    """
    drawing, of = Drawing(width), unit(stored, display)
    if chart is None or len(points) < 2:
        drawing.height = 26
        drawing.text(8, 17, "History: one set so far. From the second on, drift is charted here.")
        return drawing.svg("coupons history", "History of sets", "History of sets: one set so far, nothing to chart.")
    flagged = _flagged(chart)
    x = Axis(0.0, float(len(points) - 1), LEFT + 16, width - RIGHT - 16)
    values = _panel(drawing, chart, points, of, TOP, TOP + VALUES, width)
    drawing.text(LEFT, 13, f"{what} [{of.text}]", bold=True)
    _points(drawing, x, values, [point.value * of.factor for point in points], flagged)
    top = TOP + VALUES + BETWEEN
    ranges = _ranges(drawing, chart, of, top, top + RANGES, width)
    drawing.text(LEFT, top - 8, f"Change from set to set [{of.text}]", bold=True)
    jumped = {signal.points[1] for signal in chart.signals if signal.rule == "range beyond its limit"}
    moved = [(i + 1, float(each) * of.factor) for i, each in enumerate(chart.ranges)]
    _points(drawing, x, ranges, [value for _, value in moved], jumped, first=1)
    _names(drawing, x, points, top + RANGES)
    drawing.height = top + RANGES + 32
    if len(points) < FIRM:
        text = f"Limits from {len(points)} sets: a first estimate until there are about {FIRM}."
        drawing.text(LEFT, drawing.height + 10, text, size=9.5)
        drawing.height += 16
    return drawing.svg("coupons history", "History of sets", _words(points, chart, of, what), prefix=prefix)


def in_words(points: Sequence[Point], chart: Chart) -> list[str]:
    """Say in plain words what speaks against chance; empty where nothing does."""
    said = []
    for signal in chart.signals:
        first, last = points[signal.points[0]].name, points[signal.points[-1]].name
        count = len(signal.points)
        if signal.rule == "beyond a limit":
            side = "below the lower" if points[signal.points[0]].value < chart.centre else "above the upper"
            said.append(f"{first} lies {side} limit.")
        elif signal.rule == "range beyond its limit":
            said.append(f"From {first} to {last} it jumped by more than chance explains.")
        elif signal.rule == "run on one side":
            side = "below" if points[signal.points[0]].value < chart.centre else "above"
            said.append(f"{count} sets in a row, {first} to {last}, lie {side} the middle.")
        else:
            way = "falls" if points[signal.points[-1]].value < points[signal.points[0]].value else "rises"
            said.append(f"It {way} over {count} sets in a row, {first} to {last}.")
    return said


def _flagged(chart: Chart) -> set[int]:
    return {i for signal in chart.signals if signal.rule != "range beyond its limit" for i in signal.points}


def _panel(
    drawing: Drawing, chart: Chart, points: Sequence[Point], of: Unit, top: float, bottom: float, width: float
) -> Axis:
    levels = [level * of.factor for level in (chart.lower, chart.centre, chart.upper)]
    low, high = round_ends([*levels, *(point.value * of.factor for point in points)], room=0.1)
    axis = Axis(low, high, bottom, top)
    _frame(drawing, axis, top, bottom, width)
    for level, pen, name in zip(
        levels, ("touching", "outline", "touching"), ("lower limit", "middle", "upper limit"), strict=True
    ):
        _level(drawing, axis, level, pen, name, width)
    return axis


def _ranges(drawing: Drawing, chart: Chart, of: Unit, top: float, bottom: float, width: float) -> Axis:
    greatest = max(chart.range_upper, float(chart.ranges.max())) * of.factor
    axis = Axis(0.0, 1.1 * greatest or 1.0, bottom, top)
    _frame(drawing, axis, top, bottom, width, most=3)
    _level(drawing, axis, chart.mean_range * of.factor, "outline", "middle", width)
    _level(drawing, axis, chart.range_upper * of.factor, "touching", "limit", width)
    return axis


def _frame(drawing: Drawing, axis: Axis, top: float, bottom: float, width: float, most: int = 5) -> None:
    marks = axis.marks(most)
    for mark, text in zip(marks, texts_of(marks), strict=True):
        y = axis(mark)
        drawing.pen("grid").append(f"M{LEFT:.1f} {y:.1f}H{width - RIGHT:.1f}")
        drawing.text(LEFT - 6, y + CAP * FONT_SIZE, text, "end")
    drawing.line("outline", LEFT, top, LEFT, bottom)
    drawing.line("outline", LEFT, bottom, width - RIGHT, bottom)


def _level(drawing: Drawing, axis: Axis, level: float, pen: str, name: str, width: float) -> None:
    y = axis(level)
    drawing.line(pen, LEFT, y, width - RIGHT, y)
    drawing.text(width - RIGHT + 5, y + CAP * FONT_SIZE, f"{name} {drafting.number(level)}", size=9.5)


def _points(drawing: Drawing, x: Axis, y: Axis, values: Sequence[float], flagged: set[int], first: int = 0) -> None:
    """Dots joined by a line; those that speak against chance stand in a square."""
    places = [(x(float(i)), y(value)) for i, value in enumerate(values, first)]
    drawing.pen("thin").append("M" + "L".join(f"{a:.1f} {b:.1f}" for a, b in places))
    for i, (a, b) in enumerate(places, first):
        drawing.dot(a, b, 2.8)
        if i in flagged:
            drawing.pen("outline").append(f"M{a - 5.5:.1f} {b - 5.5:.1f}h11v11h-11z")


def _names(drawing: Drawing, x: Axis, points: Sequence[Point], bottom: float) -> None:
    """The sets' names and days below; of a long history as many as find room."""
    each = max(1, -(-len(points) // MOST_NAMED))
    room = abs(x.end - x.start) / max(1, (len(points) - 1) // each) - 6
    end = -1e9
    for i, point in enumerate(points):
        if i % each and i != len(points) - 1:
            continue
        name = shorten(point.name, max(room, 40.0), 9.5)
        half = max(text_width(name, 9.5), text_width(point.day, 9.5)) / 2
        if x(float(i)) - half < end + 3:
            continue
        drawing.line("thin", x(float(i)), bottom, x(float(i)), bottom + 4)
        drawing.text(x(float(i)), bottom + 14, name, "middle", size=9.5)
        drawing.text(x(float(i)), bottom + 25, point.day, "middle", size=9.5)
        end = x(float(i)) + half


def _words(points: Sequence[Point], chart: Chart, of: Unit, what: str) -> str:
    listed = "; ".join(f"{point.name}, {point.day}: {of.number(point.value)}" for point in points[-12:])
    told = " ".join(in_words(points, chart)) or "Nothing speaks against chance."
    return (
        f"{what} over {len(points)} sets, the last of them {listed}. Middle {of.number(chart.centre)}, limits "
        f"{of.number(chart.lower)} and {of.full(chart.upper)}. {told}"
    )
