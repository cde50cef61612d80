"""The cut of a member to scale: hatched pieces, heavy bond lines, numbered joints, dimensions, neutral axis, key.

Drawn from ``result["drawing"]`` alone; nothing is calculated here. The left-hand and lower sides carry the dimensions.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import pairwise
from math import hypot
from typing import Any

from server.sheets import drafting
from server.sheets.hatching import hatch
from server.sheets.labels import Label
from server.sheets.section_names import name_pieces
from server.sheets.section_view import AXIS, MARGIN, Box, Mark, View, fastener_places, levels_of
from server.sheets.svg import CAP, FONT_SIZE, Drawing, path, polygon, shorten, text_width

ROW = 16.0
SWATCH = 24.0


def section_svg(
    result: Mapping[str, Any],
    *,
    display: str = "SI",
    width: float = 640.0,
    height: float = 320.0,
    shade_joint: str | None = None,
    prefix: str = "",
) -> str:
    """Draw a member's section as SVG.

    ``width`` is that of the whole drawing, ``height`` the greatest height of the section itself, both in pixels; the
    drawing grows below for dimensions and key. ``shade_joint`` shades the part that the joint's shear flow holds to
    the rest.
    """
    pieces = result["drawing"]["pieces"]
    drawing = Drawing(width)
    view = View(result, display, width, height)
    boxes = [view.box(piece) for piece in pieces]
    marks = view.marks()
    variants = _variants(result["drawing"]["contacts"], pieces)
    for piece, box in zip(pieces, boxes, strict=True):
        hatch(drawing, box.outline, box.holes, piece.get("kind") or piece.get("material"), variants[piece["id"]])
    shaded = _shade(drawing, view, boxes, shade_joint)
    for mark in marks:
        _contact(drawing, mark)
    rails: dict[str, list[Label]] = {"left": [], "right": [], "top": [], "bottom": []}
    _number_joints(view, marks, rails)
    tags = name_pieces(drawing, view, boxes, marks, rails)
    _neutral_axis(drawing, view, rails)
    view.settle(drawing, rails)
    _dimensions(drawing, view, rails)
    _key(drawing, view, marks, variants, tags, shaded)
    summary, details = _words(view, marks, shaded)
    scale = f' data-scale="{view.scale:.6g}" data-left="{view.left:.2f}" data-bottom="{view.bottom:.2f}"'
    return drawing.svg("section", f"Section of {view.title}", summary, details, scale, prefix)


def _variants(contacts: Sequence[Mapping[str, Any]], pieces: Sequence[Mapping[str, Any]]) -> dict[str, int]:
    """Turn of each piece's hatching: the other way than the neighbours drawn before it."""
    neighbours: dict[str, list[str]] = {piece["id"]: [] for piece in pieces}
    for contact in contacts:
        one, two = contact["between"]
        if one in neighbours and two in neighbours:
            neighbours[one].append(two)
            neighbours[two].append(one)
    found: dict[str, int] = {}
    for name, touching in neighbours.items():
        taken = [found[other] for other in touching if other in found]
        found[name] = 1 if taken.count(0) > taken.count(1) else 0
    return found


def _shade(drawing: Drawing, view: View, boxes: Sequence[Box], joint_id: str | None) -> str | None:
    """Shade the pieces cut off by a joint; return the words for the key."""
    joint = next((j for j in view.result.get("joints") or () if j["id"] == joint_id), None)
    cut_off = set(joint.get("cut_off") or ()) if joint else set()
    if not cut_off:
        return None
    for i, (piece, box) in enumerate(zip(view.pieces, boxes, strict=True)):
        if piece["id"] in cut_off or i in cut_off:
            data = polygon(box.outline) + "".join(polygon(hole) for hole in box.holes)
            drawing.under.append(
                f'<path class="outside" d="{data}" fill="#000" fill-opacity=".25" fill-rule="evenodd" stroke="none"/>'
            )
    return f"outside area of joint {view.numbers.get(str(joint_id), 0)}"


def _contact(drawing: Drawing, mark: Mark) -> None:
    """A bond line heavy, a contact that nothing joins dashed, fasteners as their axes across the joint."""
    (x1, y1), (x2, y2) = mark.start, mark.end
    pens = ("bond",) if mark.bonded else ("heavy",) if mark.fastened else ("gap", "touching")
    for pen in pens:
        drawing.pen(pen).append(path(mark.line or (mark.start, mark.end)))
    if not mark.fastened:
        return
    length = hypot(x2 - x1, y2 - y1) or 1.0
    ux, uy = (x2 - x1) / length, (y2 - y1) / length
    for x, y in fastener_places(mark):
        drawing.line("axis", x - uy * AXIS, y + ux * AXIS, x + uy * AXIS, y - ux * AXIS)
        for end in (-AXIS, AXIS):
            ex, ey = x + uy * end, y - ux * end
            drawing.line("outline", ex - ux * 2.5, ey - uy * 2.5, ex + ux * 2.5, ey + uy * 2.5)


def _number_joints(view: View, marks: Sequence[Mark], rails: dict[str, list[Label]]) -> None:
    """Choose a side for the number of each joint: the shortest way out that does not run along the joint itself."""
    middle = 0.5 * (view.top + view.bottom)
    crowded = 20 * len(view.numbers) > 0.8 * view.deep
    for mark in marks:
        if not mark.number:
            continue
        (x1, y1), (x2, y2) = sorted((mark.start, mark.end))
        flat = abs(y2 - y1) <= abs(x2 - x1)
        share = 0.3 if mark.fastened else 0.5
        centre = (x1 + (x2 - x1) * share, y1 + (y2 - y1) * share)
        inset = min(14.0, 0.2 * hypot(x2 - x1, y2 - y1)) / (hypot(x2 - x1, y2 - y1) or 1.0)
        first = (x1 + (x2 - x1) * inset, y1 + (y2 - y1) * inset)
        last = (x2 - (x2 - x1) * inset, y2 - (y2 - y1) * inset)
        if flat:
            ends = {"left": first, "right": last, "top": centre, "bottom": centre}
        else:
            upper, lower = (first, last) if y1 <= y2 else (last, first)
            ends = {"left": centre, "right": centre, "top": upper, "bottom": lower}
        costs = {
            "right": view.right - ends["right"][0] + (10 if flat else 0),
            "left": ends["left"][0] - view.left + (16 if flat else 4),
            "top": ends["top"][1] - view.top + (0 if flat else 25),
            "bottom": view.bottom - ends["bottom"][1] + (14 if flat else 40),
        }
        side = min(costs, key=costs.__getitem__)
        if crowded and flat and side == "right" and mark.number % 2 and costs["left"] < costs["right"] + 10:
            side = "left"
        anchor = ends[side]
        if side in ("left", "right"):
            wanted = anchor[1] + (0 if not flat else -14 if anchor[1] < middle else 14)
        else:
            wanted = anchor[0] + (0 if flat else -14 if anchor[0] < 0.5 * (view.left + view.right) else 14)
        rails[side].append(Label(str(mark.number), anchor, wanted, balloon=True))


def _neutral_axis(drawing: Drawing, view: View, rails: dict[str, list[Label]]) -> None:
    """The neutral axis as a chain line across the section, lettered where it leaves; sloping where it bends both ways.

    Results saved before the slope was kept have the level line.
    """
    x, y = view.at(view.result["section"]["neutral_axis"])
    across, up = bent["direction"] if (bent := view.result["section"].get("bent_axis")) else (1.0, 0.0)
    frame = ((view.left - 10, view.right + 14), (view.top - 10, view.bottom + 10))
    reach = [
        min(
            ((high if step > 0 else low) - at) / step
            for at, step, (low, high) in zip((x, y), way, frame, strict=True)
            if step
        )
        for way in ((-across, up), (across, -up))
    ]
    start, end = (x - across * reach[0], y + up * reach[0]), (x + across * reach[1], y - up * reach[1])
    drawing.line("chain", *start, *end)
    if end[0] >= view.right:
        rails["right"].append(Label("N.A.", None, end[1], weight=1000))
    else:
        rails["top" if up > 0 else "bottom"].append(Label("N.A.", None, end[0], weight=1000))


def _dimensions(drawing: Drawing, view: View, rails: dict[str, list[Label]]) -> None:
    """Overall and chain dimensions at the left and below, outside the rails that are used there."""
    left = min([label.box[0] for label in rails["left"]], default=view.left) - 12
    bottom = max([label.box[3] for label in rails["bottom"]], default=view.bottom) + 12
    starts, rows = _chain(view, 1)
    overall = left
    if rows:
        drafting.dimension_up(drawing, left, rows)
        for y in rows.ticks:
            drawing.line("thin", starts[y] - 3, y, left - 3, y)
        overall = left - max((text_width(text) for _, text in rows.texts), default=0.0) - 18
    ends = (max(starts), min(starts))
    drafting.dimension_up(drawing, overall, _overall(ends, view.size(view.high_u - view.low_u)))
    for y in ends:
        drawing.line("thin", left - 3 if rows else starts[y] - 3, y, overall - 3, y)
    starts, columns = _chain(view, 0)
    overall = bottom
    if columns:
        drafting.dimension_across(drawing, bottom, columns)
        for x in columns.ticks:
            drawing.line("thin", x, starts[x] + 3, x, bottom + 3)
        overall = bottom + 12 + drafting.ROW * columns.rows
    ends = (min(starts), max(starts))
    drafting.dimension_across(drawing, overall, _overall(ends, view.size(view.high_a - view.low_a)))
    for x in ends:
        drawing.line("thin", x, bottom + 3 if columns else starts[x] + 3, x, overall + 3)
    drawing.height = overall + 20


def _chain(view: View, axis: int) -> tuple[dict[float, float], drafting.Chain | None]:
    """Dimensions along one axis as fine as there is room for, and where each extension line starts, in pixels."""
    starts: dict[float, float] = {}
    hollow = any(piece.get("holes") for piece in view.pieces)
    for walls in (True, False) if hollow else (False,):
        levels = levels_of(view.pieces, axis, walls)
        points = [(level, other) if axis == 0 else (other, level) for level, other in levels.items()]
        starts = {view.at(point)[axis]: view.at(point)[1 - axis] for point in points}
        texts = [view.size(high - low) for low, high in pairwise(levels)]
        if len(texts) < 2:
            return starts, None
        chain = drafting.chain(list(levels), list(starts), texts, FONT_SIZE if axis else None)
        if chain is not None:
            return starts, chain
    return starts, None


def _overall(ticks: Sequence[float], text: str) -> drafting.Chain:
    return drafting.Chain((ticks[0], ticks[-1]), ((0.5 * (ticks[0] + ticks[-1]), text),))


def _key(
    drawing: Drawing,
    view: View,
    marks: Sequence[Mark],
    variants: Mapping[str, int],
    tags: Mapping[str, str],
    shaded: str | None,
) -> None:
    """What numbers, letters, lines and hatchings mean: beside a narrow section, else below it."""
    rows: list[tuple[str, str]] = []
    named = {mark.number: mark for mark in marks if mark.number}
    rows += [("", f"{number} = {name}, {_held(named.get(number))}") for name, number in view.numbers.items()]
    rows += [("", f"{tag} = {name}") for tag, name in tags.items()]
    if any(mark.bonded for mark in marks):
        rows.append(("bond", "bond line"))
    if any(mark.fastened for mark in marks):
        rows.append(("axis", "fasteners"))
    if any(not mark.bonded and not mark.fastened for mark in marks):
        rows.append(("touching", "touching, not joined"))
    if shaded:
        rows.append(("shaded", shaded))
    if bent := view.result["section"].get("bent_axis"):
        place = drafting.place_text(bent["at"], view.display)
        rows.append(("chain", f"N.A. at {place}, {bent['combination']}"))
    if view.crowded:
        rows.append(("", "not every joint is numbered, for want of room"))
    materials: dict[str, tuple[str | None, int]] = {}
    for piece in view.pieces:
        materials.setdefault(str(piece["material"]), (piece.get("kind") or piece["material"], variants[piece["id"]]))
    rows += [(f"material {name}", name) for name in materials]
    rows.append(("", f"Dimensions in {'inches' if view.display == 'US' else 'mm'}"))
    left = view.reach + 26
    room = view.width - MARGIN - left
    wants = min(440.0, max((SWATCH + 8 if symbol else 0) + text_width(text) for symbol, text in rows))
    if room >= wants and len(rows) * ROW <= drawing.height - view.top + 40:
        columns, top, room = 1, view.top + 4, wants
        drawing.height = max(drawing.height, top + len(rows) * ROW + 4)
    else:
        left, top = MARGIN, drawing.height + 8
        columns = max(1, int((view.width - 2 * MARGIN + 16) / (wants + 16)))
        room = (view.width - 2 * MARGIN + 16) / columns - 16
        drawing.height = top + -(-len(rows) // columns) * ROW + 4
    per_column = -(-len(rows) // columns)
    for i, (symbol, text) in enumerate(rows):
        x, y = left + (i // per_column) * (room + 16), top + (i % per_column) * ROW + 0.5 * ROW
        if symbol:
            _symbol(drawing, symbol, x, y, materials)
            x += SWATCH + 8
        drawing.text(x, y + CAP * FONT_SIZE, shorten(text, room - (SWATCH + 8 if symbol else 0)))


def _held(mark: Mark | None) -> str:
    """How a joint is held, in words."""
    if mark is None or (mark.bonded and not mark.fastened):
        return "glued"
    return "glued and fastened" if mark.bonded else "fastened"


def _symbol(drawing: Drawing, symbol: str, x: float, y: float, materials: Mapping[str, tuple[str | None, int]]) -> None:
    """The sample beside a line of the key."""
    if symbol.startswith("material "):
        kind, variant = materials[symbol.removeprefix("material ")]
        corners = [(x, y + 6), (x + SWATCH, y + 6), (x + SWATCH, y - 6), (x, y - 6)]
        hatch(drawing, corners, (), kind, variant)
    elif symbol == "shaded":
        drawing.under.append(
            f'<path d="M{x:.1f} {y - 6:.1f}h{SWATCH:g}v12h-{SWATCH:g}z" fill="#000" fill-opacity=".25"/>'
        )
    elif symbol == "axis":
        drawing.line("axis", x, y, x + SWATCH, y)
        drawing.line("outline", x, y - 2.5, x, y + 2.5)
        drawing.line("outline", x + SWATCH, y - 2.5, x + SWATCH, y + 2.5)
    else:
        drawing.line(symbol, x, y, x + SWATCH, y)


def _words(view: View, marks: Sequence[Mark], shaded: str | None) -> tuple[str, str]:
    """The drawing in words: a summary, and the joints and pieces one by one."""
    unit = "in" if view.display == "US" else "mm"
    axis = view.result["section"]["neutral_axis"][1] - view.low_u
    count, joined = len(view.pieces), len(view.numbers)
    summary = (
        f"Section of {view.title}: {count} piece{'s' * (count != 1)}, {joined or 'no'} joint{'s' * (joined != 1)}; "
        f"{view.size(view.high_a - view.low_a)} {unit} wide, {view.size(view.high_u - view.low_u)} {unit} deep; "
        f"neutral axis {view.size(axis)} {unit} above the lowest edge"
    )
    named = {mark.number: mark for mark in marks if mark.number}
    joints = [f"{number} = {name}, {_held(named.get(number))}" for name, number in view.numbers.items()]
    pieces = [f"{piece['id']} of {piece['material']}" for piece in view.pieces]
    parts = ["Pieces: " + "; ".join(pieces)]
    if joints:
        parts.append("Joints: " + "; ".join(joints))
    if shaded:
        parts.append("Shaded: " + shaded)
    return summary, ". ".join(parts) + "."
