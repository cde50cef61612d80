"""The cut of a member to scale: hatched pieces, heavy bond lines, numbered joints, dimensions, neutral axis, key.

Drawn from ``result["drawing"]`` alone; nothing is calculated here. The left-hand and lower sides carry the dimensions.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import hypot
from typing import Any

from server.sheets import drafting, labels
from server.sheets.hatching import hatch
from server.sheets.labels import Label, Point
from server.sheets.svg import CAP, FONT_SIZE, Drawing, polygon, shorten, text_width

ROW = 16.0
SWATCH = 24.0
MARGIN = 8.0
AXIS = 13.0
"""Half the length at which a fastener's axis is drawn."""


@dataclass(frozen=True)
class Box:
    """A piece in pixels: its bounding box, outline and holes."""

    left: float
    top: float
    right: float
    bottom: float
    outline: list[Point]
    holes: list[list[Point]]


@dataclass(frozen=True)
class Mark:
    """A contact in pixels with what holds it together."""

    number: int
    start: Point
    end: Point
    bonded: bool
    fastened: bool
    rows: int


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

    ``width`` is that of the whole drawing, ``height`` the greatest height of the section itself, both in pixels; the drawing
    grows below for dimensions and key. ``shade_joint`` shades the part that the joint's shear flow holds to the rest.
    """
    pieces = result["drawing"]["pieces"]
    drawing = Drawing(width)
    view = _View(result, display, width, height)
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
    tags = _name_pieces(drawing, view, boxes, marks, rails)
    _neutral_axis(drawing, view, rails)
    view.settle(drawing, rails)
    _dimensions(drawing, view, rails)
    _key(drawing, view, marks, variants, tags, shaded)
    summary, details = _words(view, marks, shaded)
    scale = f' data-scale="{view.scale:.6g}" data-left="{view.left:.2f}" data-bottom="{view.bottom:.2f}"'
    return drawing.svg("section", f"Section of {view.title}", summary, details, scale, prefix)


class _View:
    """Where the section lies on the drawing, and the joints' numbers."""

    def __init__(self, result: Mapping[str, Any], display: str, width: float, height: float) -> None:
        self.result = result
        self.display = display
        self.width = width
        self.title = str(result.get("title") or "the member")
        self.pieces = result["drawing"]["pieces"]
        self.numbers = joint_numbers(result)
        across = [point[0] for piece in self.pieces for point in piece["outline"]]
        up = [point[1] for piece in self.pieces for point in piece["outline"]]
        self.low_a, self.high_a, self.low_u, self.high_u = min(across), max(across), min(up), max(up)
        wide, deep = self.high_a - self.low_a, self.high_u - self.low_u
        levels = list(_levels(self.pieces, 1, walls=False))
        texts = sorted((self.size(b - a) for a, b in pairwise(levels)), key=len)[-1:] if len(levels) > 2 else []
        self.chain_room = max((text_width(f"12 × {text}") for text in texts), default=0.0)
        self.left_room = MARGIN + text_width(self.size(deep)) + 14 + (self.chain_room + 16 if texts else 0) + 30
        self.scale = min((width - self.left_room - 84) / wide, height / deep)
        self.wide, self.deep = wide * self.scale, deep * self.scale
        self.left = self.left_room
        self.top = 0.0
        self.bottom = self.deep
        self.right = self.left + self.wide
        self.reach = self.right

    def size(self, mm: float) -> str:
        """A dimension's text."""
        return drafting.size_text(mm, self.display)

    def at(self, point: Sequence[float]) -> Point:
        """Pixels of a point [across, up]."""
        return self.left + (point[0] - self.low_a) * self.scale, self.bottom - (point[1] - self.low_u) * self.scale

    def box(self, piece: Mapping[str, Any]) -> Box:
        """A piece in pixels."""
        outline = [self.at(point) for point in piece["outline"]]
        xs, ys = [p[0] for p in outline], [p[1] for p in outline]
        holes = [[self.at(point) for point in hole] for hole in piece.get("holes") or ()]
        return Box(min(xs), min(ys), max(xs), max(ys), outline, holes)

    def marks(self) -> list[Mark]:
        """The contacts in pixels, joined or not."""
        joints = {joint["id"]: joint for joint in self.result.get("joints") or ()}
        found = []
        for contact in self.result["drawing"]["contacts"]:
            joint = joints.get(contact["id"], {}) if contact["joined"] else {}
            held = [str(limit.get("what", "")) for limit in joint.get("limits") or ()]
            fastened = bool(contact.get("fastener")) or any(what.startswith("fastener ") for what in held)
            bonded = bool(contact.get("bonded")) or any(what.startswith("adhesive ") for what in held)
            number = self.numbers.get(contact["id"], 0) if contact["joined"] else 0
            rows = int(contact.get("rows") or 1)
            bonded = contact["joined"] and (bonded or not fastened)
            found.append(Mark(number, self.at(contact["start"]), self.at(contact["end"]), bonded, fastened, rows))
        return found

    def settle(self, drawing: Drawing, rails: dict[str, list[Label]]) -> None:
        """Place the labels and draw them."""
        grown = 0.5 * max(0.0, 40 - self.deep)
        labels.place(rails["left"], "left", self.left, self.top - 4 - grown, self.bottom + 4 + grown)
        labels.place(rails["right"], "right", self.right, self.top - 4 - grown, self.bottom + 4 + grown)
        labels.place(rails["top"], "top", self.top, self.left - 20, self.width - MARGIN)
        labels.place(rails["bottom"], "bottom", self.bottom, self.left - 20, self.width - MARGIN)
        every = [label for rail in rails.values() for label in rail]
        labels.draw(drawing, every)
        drawing.top = min([self.top - 6, *(label.box[1] for label in every)]) - 4
        self.reach = max([self.right, *(label.box[2] for label in every)])


def joint_numbers(result: Mapping[str, Any]) -> dict[str, int]:
    """Numbers of the joints as in circles on the drawing: their order in the result."""
    names = [joint["id"] for joint in result.get("joints") or ()]
    names += [contact["id"] for contact in result["drawing"]["contacts"] if contact["joined"]]
    return {name: i + 1 for i, name in enumerate(dict.fromkeys(names))}


def _levels(pieces: Sequence[Mapping[str, Any]], axis: int, walls: bool) -> dict[float, float]:
    """Coordinates to dimension, each with the coordinate across it where its extension line starts (the leftmost, the lowest).

    The pieces' extents, and the corners of plain shapes, with ``walls`` also those of their hollows; curves give their extents.
    """
    found: dict[float, float] = {}
    for piece in pieces:
        edge = min(point[1 - axis] for point in piece["outline"])
        for ring in (piece["outline"], *(piece.get("holes") or ())) if walls else (piece["outline"],):
            values = [point[axis] for point in ring]
            ends = (min(values), max(values)) if len(values) > 12 else None
            for point in ring:
                level, other = point[axis], point[1 - axis] if ring is piece["outline"] else edge
                if (ends is None or level in ends) and other < found.get(level, float("inf")):
                    found[level] = other
    near = 1e-6 * (max(found) - min(found))
    kept: dict[float, float] = {}
    last = None
    for level in sorted(found):
        if last is not None and level - last <= near:
            kept[last] = min(kept[last], found[level])
            continue
        kept[level] = found[level]
        last = level
    return kept


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


def _shade(drawing: Drawing, view: _View, boxes: Sequence[Box], joint_id: str | None) -> str | None:
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
    if not mark.bonded and not mark.fastened:
        drawing.line("touching", x1, y1, x2, y2)
        return
    drawing.line("bond" if mark.bonded else "heavy", x1, y1, x2, y2)
    length = hypot(x2 - x1, y2 - y1) or 1.0
    ux, uy = (x2 - x1) / length, (y2 - y1) / length
    for x, y in _fastener_places(mark):
        drawing.line("axis", x - uy * AXIS, y + ux * AXIS, x + uy * AXIS, y - ux * AXIS)
        for end in (-AXIS, AXIS):
            ex, ey = x + uy * end, y - ux * end
            drawing.line("outline", ex - ux * 2.5, ey - uy * 2.5, ex + ux * 2.5, ey + uy * 2.5)


def _fastener_places(mark: Mark) -> list[Point]:
    """Where the axes of a joint's fasteners cross it: its rows, evenly over the contact."""
    if not mark.fastened:
        return []
    (x1, y1), (x2, y2) = mark.start, mark.end
    rows = max(1, min(mark.rows, int(hypot(x2 - x1, y2 - y1) / 6) or 1))
    shares = [(row + 0.5) / rows for row in range(rows)]
    return [(x1 + (x2 - x1) * share, y1 + (y2 - y1) * share) for share in shares]


def _along_axes(mark: Mark) -> list[Point]:
    """Points that lettering keeps clear of: along the fasteners' axes."""
    (x1, y1), (x2, y2) = mark.start, mark.end
    length = hypot(x2 - x1, y2 - y1) or 1.0
    nx, ny = (y2 - y1) / length, (x1 - x2) / length
    return [
        (x + nx * far, y + ny * far) for x, y in _fastener_places(mark) for far in (-AXIS, -AXIS / 2, 0, AXIS / 2, AXIS)
    ]


def _number_joints(view: _View, marks: Sequence[Mark], rails: dict[str, list[Label]]) -> None:
    """Choose a side for the number of each joint: the shortest way out that does not run along the joint itself."""
    middle = 0.5 * (view.top + view.bottom)
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
        anchor = ends[side]
        if side in ("left", "right"):
            wanted = anchor[1] + (0 if not flat else -14 if anchor[1] < middle else 14)
        else:
            wanted = anchor[0] + (0 if flat else -14 if anchor[0] < 0.5 * (view.left + view.right) else 14)
        rails[side].append(Label(str(mark.number), anchor, wanted, balloon=True))


def _name_pieces(
    drawing: Drawing, view: _View, boxes: Sequence[Box], marks: Sequence[Mark], rails: dict[str, list[Label]]
) -> dict[str, str]:
    """Letter each piece's name inside it where it fits, else on a rail; letters stand for names that have no room there.

    Returns the letters used, to be explained in the key.
    """
    outside: list[tuple[Label, str]] = []
    busy = [label.anchor for rail in rails.values() for label in rail if label.anchor]
    for mark in marks:
        busy += _along_axes(mark)
    axis = view.at(view.result["section"]["neutral_axis"])[1]
    for piece, box in zip(view.pieces, boxes, strict=True):
        name = str(piece["id"])
        if _letter_inside(drawing, view, box, name, busy):
            continue
        costs = {
            "right": view.right - box.right,
            "left": box.left - view.left + 8,
            "top": box.top - view.top + 10,
            "bottom": view.bottom - box.bottom + 24,
        }
        side = min(costs, key=costs.__getitem__)
        x, y = 0.5 * (box.left + box.right), 0.5 * (box.top + box.bottom)
        if abs(y - axis) < 14 and box.bottom - box.top > 60:
            y -= 0.2 * (box.bottom - box.top)
        inset = min(9.0, 0.3 * (box.right - box.left)), min(9.0, 0.5 * (box.bottom - box.top))
        if side in ("left", "right"):
            anchor = (box.right - inset[0] if side == "right" else box.left + inset[0], y)
            wanted = y
        else:
            anchor = (x, box.top + inset[1] if side == "top" else box.bottom - inset[1])
            x = _clear_of(x, box, busy)
            anchor = (x, anchor[1])
            wanted = x
        anchor = _on_material(anchor, box)
        label = Label(name, anchor, wanted)
        rails[side].append(label)
        outside.append((label, side))
    return _letters_for_crowds(view, outside, rails)


def _clear_of(x: float, box: Box, busy: Sequence[Point]) -> float:
    """The place along a piece, near its middle, that is farthest from dots and fasteners already there."""
    near = [bx for bx, by in busy if box.left - 4 < bx < box.right + 4 and box.top - 14 < by < box.bottom + 14]
    if not near:
        return x
    wide = box.right - box.left
    choices = [x, x + 0.25 * min(wide, 80), x - 0.25 * min(wide, 80)]
    return max(choices, key=lambda choice: min(min(abs(choice - bx) for bx in near), 12.0))


def _on_material(anchor: Point, box: Box) -> Point:
    """Move an anchor out of a hole, onto the wall beside it."""
    for hole in box.holes:
        xs, ys = [p[0] for p in hole], [p[1] for p in hole]
        if min(xs) < anchor[0] < max(xs) and min(ys) < anchor[1] < max(ys):
            return 0.5 * (box.right + max(xs)), anchor[1]
    return anchor


def _letters_for_crowds(
    view: _View, outside: Sequence[tuple[Label, str]], rails: dict[str, list[Label]]
) -> dict[str, str]:
    """Where a rail is too short for the names on it, use letters that the key explains."""
    tags: dict[str, str] = {}
    for side, rail in rails.items():
        upright = side in ("left", "right")
        need = sum((label.height if upright else label.width) + 3 for label in rail)
        room = max(view.deep, 60) + 30 if upright else view.wide + 40
        too_wide = side == "left" and any(label.width > 70 for label in rail if not label.balloon)
        if need <= room and not too_wide:
            continue
        for label, where in outside:
            if where == side:
                tags[_letter(len(tags))] = label.text
                label.text = list(tags)[-1]
                label.__post_init__()
    return tags


def _letter(index: int) -> str:
    """A, B, ... Z, AA, AB, ..."""
    return (chr(64 + index // 26) if index >= 26 else "") + chr(65 + index % 26)


def _letter_inside(drawing: Drawing, view: _View, box: Box, name: str, busy: Sequence[Point]) -> bool:
    """Letter a name inside an upright rectangle, level or reading from the right, clear of neutral axis, dots and fasteners."""
    if len(box.outline) != 4 or box.holes:
        return False
    wide, deep = box.right - box.left, box.bottom - box.top
    if abs(_area(box.outline)) < 0.98 * wide * deep:
        return False
    lines = [name]
    if text_width(name) + 8 > wide and " " in name and deep >= 30:
        lines = _two_lines(name)
    long = max(text_width(line) for line in lines)
    high = 13.0 * len(lines)
    turned = not (wide >= long + 8 and deep >= high + 3)
    if turned and not (deep >= long + 6 and wide >= high + 0.5):
        return False
    half_x, half_y = (high / 2, long / 2 + 2) if turned else (long / 2 + 2, high / 2)
    axis = view.at(view.result["section"]["neutral_axis"])[1]
    x, y = _quiet_place(box, half_x, half_y, axis, busy)
    drawing.backing(x - half_x, y - half_y, 2 * half_x, 2 * half_y)
    for i, line in enumerate(lines):
        off = 13.0 * (i - 0.5 * (len(lines) - 1)) + CAP * FONT_SIZE
        if turned:
            drawing.text(x + off, y, line, "middle", turned=True)
        else:
            drawing.text(x, y + off, line, "middle")
    return True


def _two_lines(name: str) -> list[str]:
    """A name broken at the space nearest its middle."""
    spaces = [i for i, letter in enumerate(name) if letter == " "]
    at = min(spaces, key=lambda i: abs(2 * i - len(name)))
    return [name[:at], name[at + 1 :]]


def _quiet_place(box: Box, half_x: float, half_y: float, axis: float, busy: Sequence[Point]) -> Point:
    """The centre of the box, or the place nearest to it where lettering meets neither the neutral axis nor a busy point."""
    x, y = 0.5 * (box.left + box.right), 0.5 * (box.top + box.bottom)
    slack_x, slack_y = 0.5 * (box.right - box.left) - half_x - 2, 0.5 * (box.bottom - box.top) - half_y - 1
    for share_x, share_y in (
        (0, 0),
        (0, -0.5),
        (0.4, 0),
        (-0.4, 0),
        (0.8, 0),
        (-0.8, 0),
        (0, 0.5),
        (0, -1),
        (0, 1),
        (0.8, -0.8),
        (-0.8, 0.8),
    ):
        px, py = x + share_x * max(0.0, slack_x), y + share_y * max(0.0, slack_y)
        if abs(py - axis) < half_y + 1:
            continue
        if all(abs(px - bx) > half_x + 4 or abs(py - by) > half_y + 4 for bx, by in busy):
            return px, py
    return x, y


def _area(outline: Sequence[Point]) -> float:
    closed = [*outline, outline[0]]
    return 0.5 * sum(a[0] * b[1] - b[0] * a[1] for a, b in zip(closed[:-1], closed[1:], strict=True))


def _neutral_axis(drawing: Drawing, view: _View, rails: dict[str, list[Label]]) -> None:
    """The neutral axis as a chain line across the section, lettered at the right."""
    y = view.at(view.result["section"]["neutral_axis"])[1]
    drawing.line("chain", view.left - 10, y, view.right + 14, y)
    rails["right"].append(Label("N.A.", None, y, weight=1000))


def _dimensions(drawing: Drawing, view: _View, rails: dict[str, list[Label]]) -> None:
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
        overall = bottom + 25
    ends = (min(starts), max(starts))
    drafting.dimension_across(drawing, overall, _overall(ends, view.size(view.high_a - view.low_a)))
    for x in ends:
        drawing.line("thin", x, bottom + 3 if columns else starts[x] + 3, x, overall + 3)
    drawing.height = overall + 20


def _chain(view: _View, axis: int) -> tuple[dict[float, float], drafting.Chain | None]:
    """The chain of dimensions along one axis, as fine as there is room for, and where each extension line starts, in pixels."""
    starts: dict[float, float] = {}
    for walls in (True, False):
        levels = _levels(view.pieces, axis, walls)
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
    view: _View,
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
    materials: dict[str, tuple[str | None, int]] = {}
    for piece in view.pieces:
        materials.setdefault(str(piece["material"]), (piece.get("kind") or piece["material"], variants[piece["id"]]))
    rows += [(f"material {name}", name) for name in materials]
    rows.append(("", f"Dimensions in {'inches' if view.display == 'US' else 'mm'}"))
    left = view.reach + 26
    room = view.width - MARGIN - left
    wants = min(300.0, max((SWATCH + 8 if symbol else 0) + text_width(text) for symbol, text in rows))
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


def _words(view: _View, marks: Sequence[Mark], shaded: str | None) -> tuple[str, str]:
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
