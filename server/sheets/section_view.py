"""Where a section lies on its drawing: pixels, joint numbers, contacts, and the coordinates worth a dimension."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import hypot
from typing import Any

from server.sheets import drafting, labels
from server.sheets.labels import Label, Point
from server.sheets.svg import Drawing, text_width

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
    """A contact in pixels with what holds it together; ``line`` its points where it is not straight."""

    number: int
    start: Point
    end: Point
    bonded: bool
    fastened: bool
    rows: int
    line: tuple[Point, ...] = ()


class View:
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
        levels = list(levels_of(self.pieces, 1, walls=False))
        texts = sorted((self.size(b - a) for a, b in pairwise(levels)), key=len)[-1:] if len(levels) > 2 else []
        self.chain_room = max((text_width(f"12 × {text}") for text in texts), default=0.0)
        height = min(900.0, max(height, 15.0 * (len(levels) - 1)))
        self.left_room = MARGIN + text_width(self.size(deep)) + 14 + (self.chain_room + 16 if texts else 0) + 30
        self.scale = min((width - self.left_room - 84) / wide, height / deep)
        self.wide, self.deep = wide * self.scale, deep * self.scale
        self.left = self.left_room
        self.top = 0.0
        self.bottom = self.deep
        self.right = self.left + self.wide
        self.reach = self.right
        self.crowded = False

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
            fastened = bool(joint.get("fastener"))
            bonded = bool(contact.get("bonded") or joint.get("adhesive"))
            number = self.numbers.get(contact["id"], 0) if contact["joined"] else 0
            rows = int(joint.get("rows") or 1)
            bonded = contact["joined"] and (bonded or not fastened)
            line = tuple(self.at(point) for point in contact.get("line") or ())
            found.append(Mark(number, self.at(contact["start"]), self.at(contact["end"]), bonded, fastened, rows, line))
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
    names += [contact["id"] for contact in result["drawing"].get("contacts", ()) if contact["joined"]]
    return {name: i + 1 for i, name in enumerate(dict.fromkeys(names))}


def levels_of(pieces: Sequence[Mapping[str, Any]], axis: int, walls: bool) -> dict[float, float]:
    """Coordinates to dimension, each with the coordinate across it where its extension line starts (the leftmost, the
    lowest).

    The pieces' extents, and the corners of square shapes, with ``walls`` also those of their hollows; curves and
    turned pieces give their extents.
    """
    found: dict[float, float] = {}
    for piece in pieces:
        edge = min(point[1 - axis] for point in piece["outline"])
        for ring in (piece["outline"], *(piece.get("holes") or ())) if walls else (piece["outline"],):
            values = [point[axis] for point in ring]
            ends = None if _square(ring) else (min(values), max(values))
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


def _square(ring: Sequence[Sequence[float]]) -> bool:
    """Whether every edge runs across or up."""
    return all(a[0] == b[0] or a[1] == b[1] for a, b in pairwise((*ring, ring[0])))


def fastener_places(mark: Mark) -> list[Point]:
    """Where the axes of a joint's fasteners cross it: its rows, evenly over the contact."""
    if not mark.fastened:
        return []
    (x1, y1), (x2, y2) = mark.start, mark.end
    rows = max(1, min(mark.rows, int(hypot(x2 - x1, y2 - y1) / 6) or 1))
    shares = [(row + 0.5) / rows for row in range(rows)]
    return [(x1 + (x2 - x1) * share, y1 + (y2 - y1) * share) for share in shares]
