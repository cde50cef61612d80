"""Shear and peel along a bond, plotted under a drawing that shares the places across; and strength over overlap."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import pairwise
from typing import Any

from server.sheets import drafting
from server.sheets.plotting import Axis, across, texts_of
from server.sheets.svg import CAP, FONT_SIZE, Drawing, spread, text_width
from server.sheets.values import unit

PLOT = 118.0
MOST_POINTS = 220


def stress_plot(
    drawing: Drawing,
    x: Axis,
    top: float,
    distribution: Mapping[str, Sequence[float]],
    *,
    display: str,
    mean: float | None = None,
    limits: Mapping[str, float] | None = None,
) -> float:
    """Plot shear (heavy) and peel (dashed) between ``top`` and the value returned, places on the axis ``x``."""
    at, shear, peel = (list(distribution[name]) for name in ("at", "shear", "peel"))
    of = unit("MPa", display)
    values = [0.0, *shear, *peel, *((mean,) if mean else ())]
    low, high = min(values), max(values)
    near = [v for v in (limits or {}).values() if high < v < 2.2 * high]
    high = max([high, *near])
    wide = (high - low) or 1.0
    y = Axis(low - 0.06 * wide, high + 0.08 * wide, top + PLOT, top)
    _levels(drawing, x, y, of.factor)
    drawing.line("outline", x.start, y(0.0), x.end, y(0.0))
    drawing.line("thin", x.start, top, x.start, top + PLOT)
    drawing.line("thin", x.end, top, x.end, top + PLOT)
    for pen, run in (("heavy", shear), ("touching", peel)):
        points = _thinned([(x(a), y(v)) for a, v in zip(at, run, strict=True)])
        drawing.pen(pen).append("M" + "L".join(f"{px:.1f} {py:.1f}" for px, py in points))
    if mean:
        drawing.line("axis", x.start, y(mean), x.end, y(mean))
    told = [(y(mean), f"mean {of.number(mean)}")] if mean else []
    for name, value in (limits or {}).items():
        if y.low <= value <= y.high:
            drawing.line("chain", x.start, y(value), x.end, y(value))
            told.append((y(value), f"{name} {of.number(value)}"))
    told.sort()
    placed = spread([place for place, _ in told], [12.0] * len(told), top, top + PLOT, 1)
    for place, (want, words) in zip(placed, told, strict=True):
        if abs(place - want) > 2:
            drawing.line("thin", x.end, want, x.end + 5, place)
        drawing.text(x.end + 7, place + CAP * FONT_SIZE, words)
    _peaks(drawing, x, y, at, shear, peel, of)
    foot = top + PLOT
    _legend(drawing, x.start, foot + 14, of.text)
    return foot + 20


def _levels(drawing: Drawing, x: Axis, y: Axis, factor: float) -> None:
    shown = Axis(y.low * factor, y.high * factor, y.start, y.end)
    marks = shown.marks(5)
    for mark, text in zip(marks, texts_of(marks), strict=True):
        place = shown(mark)
        drawing.pen("grid").append(f"M{x.start:.1f} {place:.1f}H{x.end:.1f}")
        drawing.text(x.start - 5, place + CAP * FONT_SIZE, text.replace("-", drafting.MINUS), "end")


def _peaks(
    drawing: Drawing, x: Axis, y: Axis, at: Sequence[float], shear: Sequence[float], peel: Sequence[float], of: Any
) -> None:
    """A dot and a number at the largest shear and the largest pull."""
    top = max(range(len(shear)), key=lambda i: abs(shear[i]))
    pull = max(range(len(peel)), key=lambda i: peel[i])
    marks = [(top, shear[top], "shear")] + ([(pull, peel[pull], "peel")] if peel[pull] > 0 else [])
    wanted = [y(value) for _, value, _ in marks]
    placed = spread(wanted, [12.0] * len(marks), y.end - 4, y.start, 1)
    for (index, value, name), place in zip(marks, placed, strict=True):
        px, py = x(at[index]), y(value)
        drawing.dot(px, py, 2.4)
        side = 1.0 if px < (x.start + x.end) / 2 else -1.0
        words = f"{name} {of.number(value, 3)}"
        width = text_width(words)
        left = px + 12 if side > 0 else px - 12 - width
        drawing.backing(left - 2, place - 7, width + 4, 13)
        drawing.line("thin", px, py, px + side * 10, place)
        drawing.text(left, place + CAP * FONT_SIZE, words)


def _legend(drawing: Drawing, left: float, y: float, unit_text: str) -> None:
    drawing.line("heavy", left, y - 4, left + 22, y - 4)
    words = f"shear [{unit_text}]"
    drawing.text(left + 27, y, words)
    left += 27 + text_width(words) + 16
    drawing.line("touching", left, y - 4, left + 22, y - 4)
    drawing.text(left + 27, y, f"peel [{unit_text}], up pulls apart")


def _thinned(points: Sequence[tuple[float, float]]) -> list[tuple[float, float]]:
    """Points far enough apart to be seen, both ends kept."""
    kept = [points[0]]
    for point, after in pairwise(points[1:]):
        if abs(point[0] - kept[-1][0]) + abs(point[1] - kept[-1][1]) >= 0.7 or after is points[-1]:
            kept.append(point)
    return [*kept, points[-1]]


def curve_svg(result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0) -> str:
    """Strength over overlap, with the overlap as it is, the useful length and the load; "" where there is no curve."""
    curve = result.get("overlap_curve")
    if not curve or len(curve["overlap"]) < 2:
        return ""
    drawing = Drawing(width)
    load = abs(float(result["drawing"]["load"]["axial"]))
    length, useful, strength = result["overlap"], result.get("overlap_useful"), result.get("joint_strength")
    scale = drafting.scale_for("force", max([*curve["strength"], load]), display)
    size = unit("mm", display)
    x = Axis(0.0, max(curve["overlap"]) * size.factor, 64.0, width - 120.0)
    top, foot = 16.0, 196.0
    y = Axis(0.0, max([*curve["strength"], load]) * 1.08 * scale.factor, foot, top)
    across(drawing, x, foot, f"Overlap [{size.text}]", grid_to=top)
    marks = y.marks(6)
    for mark, text in zip(marks, texts_of(marks), strict=True):
        drawing.pen("grid").append(f"M{x.start:.1f} {y(mark):.1f}H{x.end:.1f}")
        drawing.text(x.start - 6, y(mark) + CAP * FONT_SIZE, text, "end")
    drawing.text(14, (top + foot) / 2, f"Strength [{scale.unit}]", "middle", turned=True)
    drawing.line("outline", x.start, top, x.start, foot)
    points = [
        (x(a * size.factor), y(s * scale.factor)) for a, s in zip(curve["overlap"], curve["strength"], strict=True)
    ]
    drawing.pen("heavy").append("M" + "L".join(f"{px:.1f} {py:.1f}" for px, py in points))
    told: list[tuple[float, str]] = []
    if load:
        drawing.line("chain", x.start, y(load * scale.factor), x.end, y(load * scale.factor))
        told.append((y(load * scale.factor), f"load {scale.full(load)}"))
    for place, words in zip(spread([p for p, _ in told], [12.0] * len(told), top, foot, 1), told, strict=True):
        drawing.text(x.end + 6, place + CAP * FONT_SIZE, words[1])
    if isinstance(useful, float) and useful * size.factor <= x.high:
        px = x(useful * size.factor)
        drawing.line("chain", px, top, px, foot)
        words_at = f"useful {size.number(useful)}"
        right = px + 5 + text_width(words_at) < x.end
        drawing.backing(px + 3 if right else px - 7 - text_width(words_at), foot - 20, text_width(words_at) + 4, 13)
        drawing.text(px + 5 if right else px - 5, foot - 10, words_at, "" if right else "end")
    if isinstance(strength, float) and length * size.factor <= x.high:
        px, py = x(length * size.factor), y(strength * scale.factor)
        drawing.dot(px, py, 3.4)
        words_at = f"as drawn: {scale.full(strength)}"
        right = px + 12 + text_width(words_at) < x.end
        place = py + 18 if py < foot - 30 else py - 10
        left = px + 8 if right else px - 8 - text_width(words_at)
        drawing.backing(left - 2, place - 10, text_width(words_at) + 4, 13)
        drawing.text(left, place, words_at)
    drawing.height = foot + 42
    limit = f"beyond {size.full(useful)} it hardly grows" if isinstance(useful, float) else "it goes on growing"
    return drawing.svg("overlap-curve", "Strength over overlap", f"Strength against overlap; {limit}.")
