"""Lettering the pieces of a section: inside them where there is room, else beside the section with leaders."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from math import hypot

from server.sheets.labels import Label, Point
from server.sheets.section_view import AXIS, Box, Mark, View, fastener_places
from server.sheets.svg import CAP, FONT_SIZE, Drawing, text_width

# Where in its piece a name is tried, as shares of the room to either side: the middle first.
_SHARES = (
    *((0.0, 0.0), (0.0, -0.5), (0.4, 0.0), (-0.4, 0.0), (0.8, 0.0), (-0.8, 0.0)),
    *((0.0, 0.5), (0.0, -1.0), (0.0, 1.0), (0.8, -0.8), (-0.8, 0.8)),
)


def name_pieces(
    drawing: Drawing, view: View, boxes: Sequence[Box], marks: Sequence[Mark], rails: dict[str, list[Label]]
) -> dict[str, str]:
    """Letter each piece's name inside it where it fits, else on a rail; letters stand for names that have no room
    there.

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
        if side in ("top", "bottom"):
            x = _clear_of(x, box, busy)
        anchor = _on_material(box, side, x, y, busy)
        wanted = anchor[1] if side in ("left", "right") else anchor[0]
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
    return max(choices, key=lambda choice: min(*(abs(choice - bx) for bx in near), 12.0))


def _on_material(box: Box, side: str, x: float, y: float, busy: Sequence[Point]) -> Point:
    """A point of the piece near the given side, at the level y (left, right) or the place x (top, bottom).

    No dot that is there already comes between it and that side.
    """
    along, level = (0, y) if side in ("left", "right") else (1, x)
    cuts = []
    for ring in (box.outline, *box.holes):
        for a, b in pairwise((*ring, ring[0])):
            if (a[1 - along] <= level) != (b[1 - along] <= level):
                share = (level - a[1 - along]) / (b[1 - along] - a[1 - along])
                cuts.append(a[along] + share * (b[along] - a[along]))
    cuts.sort()
    if len(cuts) < 2:
        return x, y
    low, high = cuts[-2:] if side in ("right", "bottom") else cuts[:2]
    inset = min(9.0, 0.4 * (high - low))
    for dot in busy:
        far = high - dot[along] if side in ("right", "bottom") else dot[along] - low
        if 0 < far <= inset + 3 and abs(dot[1 - along] - level) < (30 if along == 0 else 5):
            inset = min(inset, 0.5 * far)
    place = high - inset if side in ("right", "bottom") else low + inset
    return (place, level) if along == 0 else (level, place)


def _letters_for_crowds(
    view: View, outside: Sequence[tuple[Label, str]], rails: dict[str, list[Label]]
) -> dict[str, str]:
    """Where a rail is too short for the names on it: letters that the key explains; where these do not fit either, no
    names.

    A joint's number gives way last: then the first, the last and those between at equal steps are drawn.
    """
    tags: dict[str, str] = {}
    for side, rail in rails.items():
        upright = side in ("left", "right")
        room = max(view.deep, 60) + 70 if upright else view.wide + 60
        names = [label for label, where in outside if where == side]
        too_wide = side == "left" and any(label.width > 70 for label in names)
        if _need(rail, upright) <= room and not too_wide:
            continue
        letters = {label.text: _letter(len(tags) + i) for i, label in enumerate(names)}
        for label in names:
            label.text = letters[label.text]
            label.measure()
        if _need(rail, upright) <= room:
            tags |= {letter: name for name, letter in letters.items()}
            continue
        rail[:] = [label for label in rail if label not in names]
        step = -(-_need(rail, upright) // room)
        if step > 1:
            view.crowded = True
            last = len(rail) - 1
            rail[:] = [label for i, label in enumerate(rail) if not label.balloon or i % step == 0 or i == last]
    return tags


def _need(rail: Sequence[Label], upright: bool) -> float:
    return sum((label.height if upright else label.width) + 3 for label in rail)


def _letter(index: int) -> str:
    """A, B, ... Z, AA, AB, ..."""
    return (chr(64 + index // 26) if index >= 26 else "") + chr(65 + index % 26)


def _letter_inside(drawing: Drawing, view: View, box: Box, name: str, busy: Sequence[Point]) -> bool:
    """Letter a name inside an upright rectangle, level or reading from the right, clear of dots and fasteners."""
    if len(box.outline) != 4 or box.holes:
        return False
    wide, deep = box.right - box.left, box.bottom - box.top
    if abs(_area(box.outline)) < 0.98 * wide * deep:
        return False
    for lines in ([name], _two_lines(name)) if " " in name else ([name],):
        long, high = max(text_width(line) for line in lines), 12.5 * len(lines)
        if wide >= long + 5 and deep >= high + 1.5:
            turned = False
            break
    else:
        for lines in ([name], _two_lines(name)) if " " in name else ([name],):
            long, high = max(text_width(line) for line in lines), 12.5 * len(lines)
            if deep >= long + 6 and wide >= high + 1:
                turned = True
                break
        else:
            return False
    half_x, half_y = (high / 2, long / 2 + 2) if turned else (long / 2 + 2, high / 2)
    axis = view.at(view.result["section"]["neutral_axis"])[1]
    place = _quiet_place(box, half_x, half_y, axis, busy)
    if place is None:
        return False
    x, y = place
    drawing.backing(x - half_x, y - half_y, 2 * half_x, 2 * half_y)
    for i, line in enumerate(lines):
        off = 12.5 * (i - 0.5 * (len(lines) - 1)) + CAP * FONT_SIZE
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


def _quiet_place(box: Box, half_x: float, half_y: float, axis: float, busy: Sequence[Point]) -> Point | None:
    """The centre of the box, or a place near it where lettering meets neither the neutral axis nor a busy point.

    The neutral axis gives way where there is no other place; None where every place is busy.
    """
    x, y = 0.5 * (box.left + box.right), 0.5 * (box.top + box.bottom)
    slack_x, slack_y = 0.5 * (box.right - box.left) - half_x - 2, 0.5 * (box.bottom - box.top) - half_y - 1
    second = None
    for share_x, share_y in _SHARES:
        px, py = x + share_x * max(0.0, slack_x), y + share_y * max(0.0, slack_y)
        if all(abs(px - bx) > half_x + 4 or abs(py - by) > half_y + 4 for bx, by in busy):
            if abs(py - axis) >= half_y + 1:
                return px, py
            second = second or (px, py)
    return second


def _area(outline: Sequence[Point]) -> float:
    closed = [*outline, outline[0]]
    return 0.5 * sum(a[0] * b[1] - b[0] * a[1] for a, b in pairwise(closed))


def _along_axes(mark: Mark) -> list[Point]:
    """Points that lettering keeps clear of: along the fasteners' axes."""
    (x1, y1), (x2, y2) = mark.start, mark.end
    length = hypot(x2 - x1, y2 - y1) or 1.0
    nx, ny = (y2 - y1) / length, (x1 - x2) / length
    return [
        (x + nx * far, y + ny * far) for x, y in fastener_places(mark) for far in (-AXIS, -AXIS / 2, 0, AXIS / 2, AXIS)
    ]
