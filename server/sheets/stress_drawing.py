"""The cut of a member with shaded bands of stress, and the run of stress along each bond.

Drawn from ``result["contours"]`` and the joints' ``distribution``; nothing is calculated here. Bands are greys that
print, compression is hatched as well; every band is named in the key by its values.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from itertools import pairwise
from math import hypot
from typing import Any

from server.sheets import drafting, values
from server.sheets.labels import Point
from server.sheets.section_view import MARGIN, View
from server.sheets.svg import CAP, FONT_SIZE, Drawing, overlaps, path, polygon, text_width

TITLES = {"shear": "Shear stress", "bending": "Bending stress"}
ROW, SWATCH = 16.0, 24.0
LETTERS = 9.0
LEAST_LINE, MOST_TRIED, ON_EDGE = 6.0, 4, 0.35  # pixels, lines, pixels
COMPRESSED = (
    '<pattern id="~compressed" width="5" height="5" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">'
    '<path d="M0 0V5" stroke="#111" stroke-width=".9"/></pattern>'
)
REACH = 26.0
"""Length at which the greatest stress along a bond is drawn."""


def stress_svg(
    result: Mapping[str, Any], which: str, *, display: str = "SI", width: float = 640.0, height: float = 320.0
) -> str:
    """Draw the bands of one stress; empty where the result has none."""
    picture = (result.get("contours") or {}).get(which)
    if not picture or not picture["levels"]:
        return ""
    drawing, view = Drawing(width), View(result, display, width, height)
    shown = [piece for piece in view.pieces if piece["id"] in set(picture["pieces"])]
    largest = max(abs(picture["greatest"]), abs(picture["least"])) or 1.0
    levels = picture["levels"]
    ends = [*levels, picture["greatest"]]
    outlines = "".join(
        polygon([view.at(point) for point in ring])
        for piece in shown
        for ring in (piece["outline"], *(piece.get("holes") or ()))
    )
    drawing.under.append(_filled(outlines, _grey(levels[0], largest)))
    signed = levels[0] < 0
    if signed:
        drawing.defs.append(COMPRESSED)
    for k, loops in enumerate(picture["above"]):
        if signed and levels[k] >= 0:
            drawing.under.append(_filled(outlines, "url(#~compressed)"))
            signed = False
        data = "".join(polygon([view.at(point) for point in loop]) for loop in loops)
        if data:
            middle = (ends[k] + ends[k + 1]) / 2
            drawing.under.append(_filled(data, _grey(middle, largest), 'stroke="#111" stroke-width=".4"'))
    if signed:
        drawing.under.append(_filled(outlines, "url(#~compressed)"))
    for piece in shown:
        for ring in (piece["outline"], *(piece.get("holes") or ())):
            drawing.pen("outline").append(polygon([view.at(point) for point in ring]))
    _letter_levels(drawing, view, picture, shown, values.unit("MPa", display))
    if which == "shear":
        _runs(drawing, view, result)
    drawing.top = -REACH - 6
    drawing.height = view.bottom + REACH + 6
    rows = _key(picture, which, largest, display)
    _write_key(drawing, view, rows, largest)
    where = f"{drafting.size_text(picture['at'], display)} {'in' if display == 'US' else 'mm'} from the left end"
    summary = f"{TITLES[which]} in the section {where}, combination {picture['combination']}"
    words = "; ".join(text for _, text in rows)
    return drawing.svg(f"stress {which}", f"{TITLES[which]} of {view.title}", summary, words)


def _letter_levels(
    drawing: Drawing, view: View, picture: Mapping[str, Any], shown: Sequence[Mapping[str, Any]], unit: values.Unit
) -> None:
    """The value of each level on its longest line inside the pieces, where no other value stands."""
    sides = [
        (view.at(a), view.at(b))
        for piece in shown
        for ring in (piece["outline"], *(piece.get("holes") or ()))
        for a, b in zip(ring, (*ring[1:], ring[0]), strict=True)
    ]
    taken: list[tuple[float, float, float, float]] = []
    for level, loops in zip(picture["levels"][1:], picture["above"][1:], strict=True):
        text = unit.number(level)
        wide, high = text_width(text, LETTERS) + 3, LETTERS
        for x, y in _places(loops, view, sides):
            box = (x - wide / 2, y - high / 2, x + wide / 2, y + high / 2)
            if not overlaps(taken, box):
                taken.append(box)
                drawing.backing(box[0], box[1], wide, high)
                drawing.text(x, y + CAP * LETTERS, text, "middle", size=LETTERS)
                break


def _places(
    loops: Sequence[Sequence[Sequence[float]]], view: View, sides: Sequence[tuple[Point, Point]]
) -> Iterator[Point]:
    """Places on the inner parts of closed lines, from the longest part on, its middle first."""
    found: list[list[Point]] = []
    for loop in loops:
        line = [view.at(point) for point in loop]
        run: list[Point] = []
        for a, b in zip(line, (*line[1:], line[0]), strict=True):
            if any(_on(((a[0] + b[0]) / 2, (a[1] + b[1]) / 2), side) for side in sides):
                found.append(run)
                run = []
            else:
                run = [*(run or [a]), b]
        found.append(run)
    found.sort(key=_length, reverse=True)
    for run in found[:MOST_TRIED]:
        if _length(run) >= LEAST_LINE:
            yield from (_at_share(run, share) for share in (0.5, 0.3, 0.7, 0.15, 0.85))


def _length(run: Sequence[Point]) -> float:
    return sum(hypot(b[0] - a[0], b[1] - a[1]) for a, b in pairwise(run))


def _at_share(run: Sequence[Point], share: float) -> Point:
    left = share * _length(run)
    for a, b in pairwise(run):
        step = hypot(b[0] - a[0], b[1] - a[1])
        if left <= step:
            return a[0] + (b[0] - a[0]) * left / (step or 1.0), a[1] + (b[1] - a[1]) * left / (step or 1.0)
        left -= step
    return run[-1]


def _on(point: Point, side: tuple[Point, Point]) -> bool:
    """Whether a point lies on a side of an outline."""
    (x1, y1), (x2, y2) = side
    dx, dy, px, py = x2 - x1, y2 - y1, point[0] - x1, point[1] - y1
    t = min(max((px * dx + py * dy) / ((dx * dx + dy * dy) or 1.0), 0.0), 1.0)
    return hypot(px - t * dx, py - t * dy) < ON_EDGE


def _filled(data: str, shade: str, stroke: str = 'stroke="none"') -> str:
    return f'<path d="{data}" fill="{shade}" fill-rule="evenodd" {stroke}/>'


def _grey(value: float, largest: float) -> str:
    """From near white at nothing to dark at the largest stress."""
    share = min(abs(value) / largest, 1.0)
    level = round(248 - 158 * share)
    return f"#{level:02x}{level:02x}{level:02x}"


def _key(picture: Mapping[str, Any], which: str, largest: float, display: str) -> list[tuple[float | None, str]]:
    """A line for each band, the highest first: its middle, and its ends in words."""
    unit = values.unit("MPa", display)
    ends = [*picture["levels"], picture["greatest"]]
    rows: list[tuple[float | None, str]] = []
    for k in reversed(range(len(picture["levels"]))):
        low, high = ends[k], ends[k + 1]
        word = "" if which == "shear" else " tension" if low >= 0 else " compression" if high <= 0 else ""
        last = k == len(picture["levels"]) - 1
        text = (
            f"over {unit.number(low)} {unit.text}" if last else f"{unit.number(low)} to {unit.number(high)} {unit.text}"
        )
        rows.append(((low + high) / 2, text + word))
    least = picture["least"]
    if which == "bending" and least < picture["levels"][0]:
        rows.append((least, f"under {unit.number(picture['levels'][0])} {unit.text} compression"))
    if which == "shear":
        rows.append(
            (None, f"greatest short of the peaks at inward corners: {values.quantity(largest, 'MPa', display)}")
        )
    else:
        for name in ("greatest", "least"):
            rows.append((None, f"{name}: {values.quantity(picture[name], 'MPa', display)}"))
    return rows


def _write_key(drawing: Drawing, view: View, rows: Sequence[tuple[float | None, str]], largest: float) -> None:
    left = view.right + REACH + 24
    wants = max((SWATCH + 8 if value is not None else 0) + text_width(text) for value, text in rows)
    top = view.top
    if left + wants > view.width - MARGIN:
        left, top = MARGIN, drawing.height + 6
    for i, (value, text) in enumerate(rows):
        x, y = left, top + (i + 0.5) * ROW
        if value is not None:
            box = f'd="M{x:.1f} {y - 6:.1f}h{SWATCH:g}v12h-{SWATCH:g}z"'
            drawing.under.append(f'<path {box} fill="{_grey(value, largest)}" stroke="#111" stroke-width=".6"/>')
            if "compression" in text:
                drawing.under.append(f'<path {box} fill="url(#~compressed)" stroke="none"/>')
            x += SWATCH + 8
        drawing.text(x, y + CAP * FONT_SIZE, text)
    drawing.height = max(drawing.height, top + len(rows) * ROW + 6)


def _runs(drawing: Drawing, view: View, result: Mapping[str, Any]) -> None:
    """The stress along each bond as steps beside its line, to one scale."""
    joints = {joint["id"]: joint for joint in result["joints"] if joint.get("distribution")}
    top = max((abs(v) for joint in joints.values() for v in joint["distribution"]), default=0.0)
    for contact in result["drawing"]["contacts"]:
        joint = joints.get(contact["id"])
        if joint is None or top <= 0 or contact.get("line"):
            continue
        (x1, y1), (x2, y2) = view.at(contact["start"]), view.at(contact["end"])
        length = hypot(x2 - x1, y2 - y1) or 1.0
        share = min(joint["bonded_width"] / (contact["length"] or 1.0), 1.0)
        ux, uy = (x2 - x1) / length, (y2 - y1) / length
        first = length * (1 - share) / 2
        steps = joint["distribution"]
        each = length * share / len(steps)
        outward = 1.0 if (x1 + x2) / 2 > (view.left + view.right) / 2 else -1.0
        nx, ny = (-uy, ux) if (-uy) * outward > 0 or (uy == 0 and ux * outward > 0) else (uy, -ux)
        line = [(x1 + ux * first, y1 + uy * first)]
        for k, value in enumerate(steps):
            size = REACH * value / top
            for s in (first + k * each, first + (k + 1) * each):
                line.append((x1 + ux * s + nx * size, y1 + uy * s + ny * size))
        line.append((x1 + ux * (first + length * share), y1 + uy * (first + length * share)))
        drawing.under.append(f'<path d="{polygon(line)}" fill="#fff" fill-opacity=".6" stroke="none"/>')
        drawing.pen("thin").append(path(line))
        drawing.pen("bond").append(path(((x1, y1), (x2, y2))))
