"""Placing numbers and names around a drawing: rails on four sides, leaders that do not cross.

Each label wants the place nearest to what it points at; ``spread`` keeps those of one rail apart in order. Where two
leaders of a rail still cross, their labels change places, which always shortens the two together, so it ends.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from math import hypot

from server.sheets.svg import CAP, FONT_SIZE, Drawing, spread, text_width

Point = tuple[float, float]

BALLOON = 8.5
RAIL = 16.0
"""Clear distance between the outline and a rail."""


@dataclass
class Label:
    """A number in a circle, or a text; ``anchor`` is where its leader ends in a dot (None: no leader)."""

    text: str
    anchor: Point | None
    wanted: float
    balloon: bool = False
    weight: float = 1.0
    place: Point = (0.0, 0.0)
    width: float = field(default=0.0)

    def __post_init__(self) -> None:
        self.measure()

    def measure(self) -> None:
        """Take the width anew, after the text was changed."""
        self.width = 2 * self.radius if self.balloon else text_width(self.text)

    @property
    def radius(self) -> float:
        """Radius of the circle about a joint's number."""
        return BALLOON if len(self.text) < 3 else BALLOON + 2

    @property
    def height(self) -> float:
        """Height of the label's box."""
        return 2 * self.radius if self.balloon else FONT_SIZE + 1

    @property
    def box(self) -> tuple[float, float, float, float]:
        """Left, top, right, bottom, once placed: ``place`` is the label's centre."""
        x, y = self.place
        return (x - self.width / 2, y - self.height / 2, x + self.width / 2, y + self.height / 2)


def place(labels: list[Label], side: str, edge: float, low: float, high: float) -> None:
    """Place the labels of one rail; ``edge`` is the outline's coordinate there, ``low`` to ``high`` its reach."""
    if not labels:
        return
    upright = side in ("left", "right")
    across = 1 if upright else 0
    labels.sort(key=lambda label: (label.wanted, label.anchor or (0.0, 0.0)))
    for _ in range(12):
        _along(labels, side, edge, low, high, upright)
        if not _uncross(labels, across):
            return
    _along(labels, side, edge, low, high, upright)


def _along(labels: Sequence[Label], side: str, edge: float, low: float, high: float, upright: bool) -> None:
    sizes = [label.height if upright else label.width for label in labels]
    need = sum(sizes) + 3 * len(sizes) - 3
    if need > high - low:  # the rail runs on beyond both ends
        low, high = 0.5 * (low + high - need), 0.5 * (low + high + need)
    centres = spread([label.wanted for label in labels], sizes, low, high, 3, [label.weight for label in labels])
    outward = 1 if side in ("right", "bottom") else -1
    for label, centre in zip(labels, centres, strict=True):
        half = 0.5 * (label.width if upright else label.height)
        off = edge + outward * (RAIL + half)
        label.place = (off, centre) if upright else (centre, off)


def _uncross(labels: list[Label], across: int) -> bool:
    """Let crossing neighbours change places; True where one did."""
    changed = False
    for i in range(len(labels) - 1):
        one, two = labels[i], labels[i + 1]
        if one.anchor and two.anchor and crossing(one.anchor, leader_end(one), two.anchor, leader_end(two)):
            one.wanted, two.wanted = max(one.wanted, two.wanted), min(one.wanted, two.wanted)
            labels[i], labels[i + 1] = two, one
            changed = True
    return changed


def crossing(a: Point, b: Point, c: Point, d: Point) -> bool:
    """Whether the open strokes a-b and c-d cross."""

    def side(p: Point, q: Point, r: Point) -> float:
        return (q[0] - p[0]) * (r[1] - p[1]) - (q[1] - p[1]) * (r[0] - p[0])

    return side(a, b, c) * side(a, b, d) < 0 and side(c, d, a) * side(c, d, b) < 0


def draw(drawing: Drawing, labels: Sequence[Label]) -> None:
    """Leaders with their dots, circles, numbers and names."""
    rings = []
    for label in labels:
        x, y = label.place
        if label.anchor:
            end_x, end_y = leader_end(label)
            drawing.line("thin", label.anchor[0], label.anchor[1], end_x, end_y)
            drawing.dot(*label.anchor)
        if label.balloon:
            r = label.radius
            rings.append(f"M{x - r:.1f} {y:.1f}a{r} {r} 0 1 0 {2 * r} 0a{r} {r} 0 1 0 {-2 * r} 0z")
            drawing.text(x, y + CAP * FONT_SIZE, label.text, "middle", bold=True)
        else:
            drawing.text(x, y + CAP * FONT_SIZE, label.text, "middle")
    if rings:
        drawing.over.append(f'<path class="balloons" d="{"".join(rings)}" fill="#fff" stroke-width=".9"/>')


def leader_end(label: Label) -> Point:
    """Where the leader meets the label: the rim of the circle, or the near edge of the text."""
    assert label.anchor is not None
    (ax, ay), (x, y) = label.anchor, label.place
    if label.balloon:
        far = hypot(ax - x, ay - y) or 1.0
        return x + (ax - x) / far * label.radius, y + (ay - y) / far * label.radius
    left, top, right, bottom = label.box
    if ax < left or ax > right:
        return (left - 2, y) if ax < left else (right + 2, y)
    return (x, top - 1) if ay < top else (x, bottom + 1)
