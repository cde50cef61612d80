"""How a fastener yields: every mode in a small section through the joint, the governing one framed.

Members stand side by side as the fastener passes through them, moved apart in the direction of the force. Thin lines:
members and the middle of their holes; heavy: the fastener; dots: where it bends for good. The movement is drawn large,
thicknesses to scale.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from server.sheets import drafting
from server.sheets.hatching import hatch
from server.sheets.svg import Drawing, shorten

PANEL, TALL = 104.0, 118.0
MOST_IN_A_ROW = 6
SHIFT = 9.0  # px, by which each member moves
LEAST = 7.0  # px, of a member however thin
METALS = ("steel", "aluminium")
ANCHOR, HINGE = 0.6, 0.4  # where in a member the fastener crosses the hole's middle, or bends: shares of its thickness

Point = tuple[float, float]


@dataclass(frozen=True)
class Member:
    """One member of a panel: name, where it begins and ends [px], how far it moved, whether it is metal."""

    name: str
    left: float
    right: float
    moved: float
    metal: bool
    kind: str


def modes_svg(result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0) -> str:
    """Every mode of a fastener check with its load, in rows; "" where the result has no modes to draw."""
    picture = result.get("drawing") or {}
    listed = [key for key in result.get("modes", {}) if _bends(picture, key)]
    if not listed:
        return ""
    drawing = Drawing(width)
    columns = min(MOST_IN_A_ROW, len(listed))
    pitch = width / columns
    scale = drafting.scale_for("force", max(result["modes"].values()), display)
    for number, key in enumerate(listed):
        left = pitch * (number % columns) + 0.5 * (pitch - PANEL)
        top = (TALL + 32) * (number // columns) + 4
        _panel(drawing, picture, key, left, top)
        _caption(drawing, result, key, left, top, scale)
    drawing.height = (TALL + 32) * ((len(listed) - 1) // columns + 1) + 6
    governing = str(result.get("governing_mode"))
    words = (result.get("mode_words") or {}).get(governing, "")
    title = f"Yield modes, mode {governing} governs"
    listed_words = ", ".join(f"{key} {scale.full(result['modes'][key])}" for key in listed)
    return drawing.svg("yield-modes", title, f"{title}: {words}. {listed_words}.")


def _bends(picture: Mapping[str, Any], key: str) -> bool:
    mode = (picture.get("modes") or {}).get(key) or {}
    return any(mode.get(name) for name in ("turns", "hinges", "crushed"))


def _caption(
    drawing: Drawing, result: Mapping[str, Any], key: str, left: float, top: float, scale: drafting.Scale
) -> None:
    governs = key == result.get("governing_mode")
    middle = left + PANEL / 2
    if governs:
        drawing.pen("heavy").append(f"M{left:.1f} {top:.1f}h{PANEL}v{TALL + 26:.1f}h{-PANEL}z")
    text = shorten(f"{key}   {scale.full(result['modes'][key])}", PANEL - 6)
    drawing.text(middle, top + TALL + 9, text, "middle", bold=governs)
    if governs:
        drawing.text(middle, top + TALL + 21, "governs", "middle")


def _panel(drawing: Drawing, picture: Mapping[str, Any], key: str, left: float, top: float) -> None:
    mode = picture["modes"][key]
    members = _members(picture, left + 6, left + PANEL - 6)
    middle = top + TALL / 2
    for number, member in enumerate(members):
        _member(drawing, member, top + 16 + member.moved, top + TALL - 16 + member.moved, number % 2)
    path, hinges = _lie(mode, members, picture["shear_planes"] == 2)
    for member in members:
        drawing.line("axis", member.left, middle + member.moved, member.right, middle + member.moved)
    drawing.pen("heavy").append("M" + "L".join(f"{x:.1f} {middle + y:.1f}" for x, y in path))
    _ends(drawing, path, middle, picture.get("type"))
    for x, y in hinges:
        drawing.dot(x, middle + y, 3.0)


def _members(picture: Mapping[str, Any], left: float, right: float) -> list[Member]:
    of = picture["members"]
    names = ("side", "main", "side") if picture["shear_planes"] == 2 else ("side", "main")
    sizes = [float(of[name]["thickness"]) for name in names]
    # A main member much thicker than the side one is cut short: the fastener's end is what counts there.
    sizes = [min(size, 4 * min(sizes)) for size in sizes]
    room = right - left
    widths = [max(LEAST, room * size / sum(sizes)) for size in sizes]
    widths = [room * width / sum(widths) for width in widths]
    found, at = [], left
    for name, width in zip(names, widths, strict=True):
        kind = str(of[name]["kind"])
        moved = -SHIFT if name == "side" else SHIFT
        found.append(Member(name, at, at + width, moved, kind in METALS, kind))
        at += width
    return found


def _member(drawing: Drawing, member: Member, top: float, bottom: float, variant: int) -> None:
    outline = [(member.left, top), (member.right, top), (member.right, bottom), (member.left, bottom)]
    if member.metal:
        hatch(drawing, outline, (), member.kind, variant)
        return
    data = "M" + "L".join(f"{x:.1f} {y:.1f}" for x, y in outline) + "z"
    drawing.pen("thin").append(data)
    x = member.left + 4
    while x < member.right - 2:
        drawing.line("grid", x, top + 3, x, bottom - 3)
        x += 7


def _lie(mode: Mapping[str, Any], members: list[Member], double: bool) -> tuple[list[Point], list[Point]]:
    """The fastener's line from left to right, and its hinges, both about the middle of the panel."""
    outer, inner = members[0], members[1]
    far = 0.5 * (inner.left + inner.right) if double else inner.right
    path, hinges = _half(mode, outer, inner, far, double)
    if not double:
        return path, hinges
    mirrored = [(2 * far - x, y) for x, y in path]
    return [*path, *reversed(mirrored)], [*hinges, *((2 * far - x, y) for x, y in hinges)]


def _half(
    mode: Mapping[str, Any], outer: Member, inner: Member, far: float, double: bool
) -> tuple[list[Point], list[Point]]:
    if mode["crushed"]:
        level = inner.moved if outer.name in mode["crushed"] else outer.moved
        return [(outer.left, level), (far, level)], []
    width = outer.right - outer.left
    depth = (far - inner.left) * (1.0 if not double else 0.9)
    start = _place(mode, outer, outer.right, -width)
    end = _place(mode, inner, inner.left, depth)
    hinges = [point for point, bends in (start, end) if bends]
    (x_1, y_1), bent_1 = start
    (x_2, y_2), bent_2 = end
    slope = (y_2 - y_1) / (x_2 - x_1)
    first = (outer.left, y_1) if bent_1 else (outer.left, y_1 + slope * (outer.left - x_1))
    last = (far, y_2) if bent_2 else (far, y_2 + slope * (far - x_2))
    return [first, (x_1, y_1), (x_2, y_2), last], hinges


def _place(mode: Mapping[str, Any], member: Member, edge: float, inward: float) -> tuple[Point, bool]:
    """Where the fastener meets the middle of a member's hole, and whether it bends there."""
    bends = member.name in mode["hinges"]
    if member.metal:
        return ((edge, member.moved), True) if bends else ((edge + 0.5 * inward, member.moved), False)
    return (edge + (HINGE if bends else ANCHOR) * inward, member.moved), bends


def _ends(drawing: Drawing, path: list[Point], middle: float, sort: object) -> None:
    """A head at the left; a bolt has a nut at the right too."""
    ends: Iterator[Point] = iter((path[0], path[-1]) if sort == "bolt" else (path[0],))
    if sort == "dowel":
        return
    for x, y in ends:
        drawing.line("bond", x, middle + y - 5, x, middle + y + 5)


def caption(result: Mapping[str, Any]) -> str:
    """What the drawing shows, in one line."""
    both = "both planes alike" if (result.get("drawing") or {}).get("shear_planes") == 2 else "one plane"
    return f"Yield modes in a section through the joint, {both}; dots: where the fastener bends for good"
