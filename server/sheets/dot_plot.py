"""A set of coupons as dots on one scale: mean, characteristic value with and without what was excluded."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from server.sheets.plotting import DOT, Axis, across, coupon_mark, kind_of, legend, round_ends
from server.sheets.svg import CAP, FONT_SIZE, Drawing, shorten, spread, text_width
from server.sheets.values import Unit, unit

Coupon = Mapping[str, Any]
LEFT, RIGHT = 16.0, 16.0
STEP = 2 * DOT + 1.6
MOST_HIGH = 9
"""Dots on top of each other before they lie closer."""
MOST_ROWS = 8
ROW_LEAST = 30.0
FLAG = 14.0


def dot_plot_svg(result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0, prefix: str = "") -> str:
    """Draw the coupons of a result of kind "coupons" as SVG, one row a batch where there are several."""
    drawing, of = Drawing(width), unit(str(result.get("unit") or "MPa"), display)
    rows = _rows(result)
    named = len(rows) > 1
    left = LEFT + (min(max(text_width(name) for name, _ in rows), 130.0) + 10 if named else 0.0)
    marks = _marks(result, of)
    stresses = [each["stress"] * of.factor for _, listed in rows for each in listed]
    low, high = round_ends([*stresses, *(value for value, *_ in marks)], least=0.0)
    axis = Axis(low, high, left, width - RIGHT)
    top = 4.0 + FLAG * 2
    y = top
    for name, listed in rows:
        y += _row(drawing, axis, y, name, listed, of, named=named)
    y += 4
    _letter_marks(drawing, axis, marks, top, y)
    across(drawing, axis, y, f"{result.get('quantity') or 'Stress at failure'} [{of.text}]", grid_to=top)
    kinds = {kind_of(each) for _, listed in rows for each in listed}
    foot = y + 46
    if kinds - {"coupon"}:
        legend(drawing, left, foot + 6, kinds)
        foot += 12
    drawing.height = foot
    words = _words(result, rows, of)
    return drawing.svg("coupons dots", f"Coupons of {result.get('title') or 'this set'}", words, prefix=prefix)


def _rows(result: Mapping[str, Any]) -> list[tuple[str, list[Coupon]]]:
    """The coupons by batch; all in one row where there is one batch, or too many to draw apart."""
    by_batch: dict[str, list[Coupon]] = {}
    for each in result["coupons"]:
        by_batch.setdefault(str(each.get("batch") or "").strip(), []).append(each)
    if not 2 <= len(by_batch) <= MOST_ROWS:
        return [("", list(result["coupons"]))]
    return [(f"batch {name}" if name else "no batch", listed) for name, listed in by_batch.items()]


Mark = tuple[float, str, str, str]
"""Value as shown, its short name, the pen, and its side: "up" in the first row of names, "high" in the second."""


def _marks(result: Mapping[str, Any], of: Unit) -> list[Mark]:
    """Mean and characteristic value, and the value with every coupon where some are excluded."""
    whole = result.get("without_exclusions") or {}
    found = [
        (result.get("mean_stress"), "mean", "axis"),
        (result.get("characteristic"), "characteristic", "heavy"),
        (whole.get("characteristic"), "with every coupon", "touching"),
    ]
    return [
        (value * of.factor, f"{name} {of.number(value)}", pen, name)
        for value, name, pen in found
        if isinstance(value, int | float)
    ]


def _letter_marks(drawing: Drawing, axis: Axis, marks: Sequence[Mark], top: float, bottom: float) -> None:
    """A line for each value, its name above: the mean's in the upper row, the characteristic values' in the lower."""
    for row, names in ((0, ("mean",)), (1, ("with every coupon", "characteristic"))):
        chosen = sorted(mark for mark in marks if mark[3] in names)
        texts = [shorten(text, 0.45 * (axis.end - axis.start)) for _, text, *_ in chosen]
        widths = [text_width(text) for text in texts]
        centres = spread([axis(mark[0]) for mark in chosen], widths, axis.start, axis.end, 12)
        base = top - FLAG * (1 - row) - 5
        for (value, _, pen, name), text, centre in zip(chosen, texts, centres, strict=True):
            drawing.line(pen, axis(value), base + 3, axis(value), bottom)
            drawing.text(centre, base, text, "middle", bold=name == "characteristic")


def _row(
    drawing: Drawing, axis: Axis, top: float, name: str, listed: Sequence[Coupon], of: Unit, *, named: bool
) -> float:
    """Dots stacked where they would touch; returns the height taken."""
    order = sorted(listed, key=lambda each: each["stress"])
    levels = _levels([axis(each["stress"] * of.factor) for each in order])
    deepest = max(levels, default=0)
    step = STEP * min(1.0, MOST_HIGH / (deepest + 1))
    flagged = any(kind_of(each) != "coupon" for each in order)
    height = max(deepest * step + 2 * DOT + 8 + (FLAG if flagged else 0.0), ROW_LEAST)
    base = top + height - DOT - 3
    for each, level in zip(order, levels, strict=True):
        x, y, kind = axis(each["stress"] * of.factor), base - level * step, kind_of(each)
        coupon_mark(drawing, kind, x, y)
        if kind != "coupon":
            text = f"no. {each['index'] + 1} {'excluded' if kind == 'excluded' else 'apart'}"
            half = text_width(text) / 2
            centre = min(max(x, axis.start + half), axis.end - half)
            drawing.backing(centre - half - 1, y - DOT - 15, 2 * half + 2, 11)
            drawing.text(centre, y - DOT - 6, text, "middle")
    if named:
        drawing.text(LEFT, base + CAP * FONT_SIZE, shorten(name, 130.0))
        drawing.line("grid", axis.start, top + height, axis.end, top + height)
    return height


def _levels(places: Sequence[float]) -> list[int]:
    """How many dots each dot lies on, so that none hides another; ``places`` in rising order."""
    ends: list[float] = []
    levels = []
    for x in places:
        level = next((i for i, end in enumerate(ends) if x - end >= 2 * DOT + 0.6), len(ends))
        if level == len(ends):
            ends.append(x)
        ends[level] = x
        levels.append(level)
    return levels


def _words(result: Mapping[str, Any], rows: Sequence[tuple[str, Sequence[Coupon]]], of: Unit) -> str:
    """The text alternative: how many, from where to where, the values, and each coupon that is marked."""
    listed = [each for _, row in rows for each in row]
    values = [each["stress"] for each in listed]
    words = [f"{len(listed)} coupons from {of.number(min(values))} to {of.full(max(values))}"]
    words += [text for _, text, *_ in _marks(result, of)]
    for each in listed:
        kind = kind_of(each)
        if kind != "coupon":
            told = f"excluded: {each['excluded']}" if kind == "excluded" else "stands apart from the others"
            words.append(f"coupon {each['index'] + 1} at {of.number(each['stress'])}, {told}")
    return "; ".join(words) + "."
