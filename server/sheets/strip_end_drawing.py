"""A member from the side with the strip on its face, and the moment along it: where the strip ends, and under what."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import pairwise
from typing import Any

from server.sheets import drafting
from server.sheets.hatching import hatch
from server.sheets.plotting import Axis
from server.sheets.svg import CAP, FONT_SIZE, Drawing
from server.sheets.values import quantity, unit

LEFT, RIGHT = 46.0, 594.0
DEEPEST, SHALLOWEST, STRIP = 56.0, 18.0, 6.0
MOMENT = 64.0


def strip_end_svg(result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0) -> str:
    """The member's side view, lengths to scale, depths drawn larger where they must be; "" without a drawing."""
    picture = result.get("drawing")
    if not picture or not picture.get("pieces"):
        return ""
    drawing = Drawing(width)
    x = Axis(0.0, picture["length"], LEFT, RIGHT)
    below = picture["face"] == "bottom"
    pieces = picture["pieces"]
    host = pieces[1:]
    heights = [point[1] for piece in host for point in piece["outline"]]
    deep = min(max((max(heights) - min(heights)) * (RIGHT - LEFT) / picture["length"], SHALLOWEST), DEEPEST)
    top = 22.0 if below else 22.0 + STRIP + 3
    kind = host[0]["kind"] if host else ""
    hatch(drawing, [(LEFT, top), (RIGHT, top), (RIGHT, top + deep), (LEFT, top + deep)], (), kind, 0)
    strip = picture["strip"]
    start, stop = x(strip["from"]), x(strip["to"])
    y = top + deep + 2.8 if below else top - 2.8 - STRIP
    hatch(drawing, [(start, y), (stop, y), (stop, y + STRIP), (start, y + STRIP)], (), pieces[0]["kind"], 1)
    line = top + deep + 1.4 if below else top - 1.4
    drawing.line("bond", start, line, stop, line)
    foot = top + deep + (STRIP + 4 if below else 2)
    for support in picture["supports"]:
        _support(drawing, x(support["at"]), foot)
    levels = [0.0, strip["from"], strip["to"], picture["length"]]
    pixels = [x(level) for level in levels]
    texts = [quantity(b - a, "mm", display) for a, b in pairwise(levels)]
    made = drafting.chain(pixels, pixels, texts, None)
    if made is not None:
        drafting.dimension_across(drawing, foot + 22, made)
    drawing.text(LEFT, 14, "strip on the " + ("underside" if below else "top"))
    y = _moment(drawing, picture, x, foot + 50, (start, stop), display)
    drawing.height = y + 8
    where = f"strip from {quantity(strip['from'], 'mm', display)} to {quantity(strip['to'], 'mm', display)}"
    return drawing.svg("strip-end", "Member with its bonded strip", f"Side view: {where}.")


def _support(drawing: Drawing, x: float, y: float) -> None:
    drawing.pen("outline").append(f"M{x:.1f} {y:.1f}l-7 11h14z")


def _moment(
    drawing: Drawing, picture: Mapping[str, Any], x: Axis, top: float, ends: tuple[float, float], display: str
) -> float:
    """The bending moment below, sagging downwards, with what acts at the strip's ends."""
    if not picture.get("moment"):
        return top
    places, values = picture["moment"]
    of = unit("N*mm", display)
    low, high = min(0.0, *values), max(0.0, *values)
    wide = (high - low) or 1.0
    y = Axis(low, high, top, top + MOMENT * (high - low) / wide)
    drawing.line("outline", x.start, y(0.0), x.end, y(0.0))
    points = [(x(a), y(v)) for a, v in zip(places, values, strict=True)]
    drawing.pen("heavy").append("M" + "L".join(f"{px:.1f} {py:.1f}" for px, py in points))
    for place in ends:
        near = min(range(len(points)), key=lambda i: abs(points[i][0] - place))
        px, py = points[near]
        drawing.line("thin", place, y(0.0), place, py)
        drawing.dot(px, py, 2.4)
        words = of.number(values[near], 3)
        anchor = "end" if place < (x.start + x.end) / 2 else ""
        drawing.text(place + (-5 if anchor else 5), py + CAP * FONT_SIZE + 4, words, anchor)
    drawing.text(x.start, top + MOMENT + 16, f"moment [{of.text}], sagging downwards, largest combination")
    return top + MOMENT + 20
