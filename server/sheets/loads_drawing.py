"""The member in elevation: supports, hinges, spans, pieces that start and stop, and the loads of each case above it.

Loads are drawn to one scale a kind, so that twice the load is twice the height; arrows point the way the load acts.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

from server.sheets import drafting
from server.sheets.drafting import Scale
from server.sheets.svg import CAP, FONT_SIZE, Drawing, shorten, text_width

MARGIN = 34.0
LINE_HEIGHT = 24.0
POINT_HEIGHT = 26.0
LEAST = {"line": 7.0, "point": 15.0, "couple": 0.0}
LETTERS = FONT_SIZE + 3
TRAVEL = 12.0  # px below the line, for the stretch that axles run over
LANES = 6
"""Most rows for one load case; what does not fit is counted in words."""


@dataclass(frozen=True)
class Placed:
    """One load in pixels: its own reach, that of its lettering, and its heights about the lane's line."""

    load: Mapping[str, Any]
    own: tuple[float, float]
    letters: tuple[float, float]
    above: float
    below: float

    def clear_of(self, other: Placed) -> bool:
        """Whether two loads may share a lane: they may touch, their lettering may not."""

        def apart(one: tuple[float, float], two: tuple[float, float], gap: float) -> bool:
            return one[0] >= two[1] + gap or two[0] >= one[1] + gap

        return (
            apart(self.own, other.own, -0.5)
            and apart(self.letters, other.letters, 6)
            and apart(self.own, other.letters, -0.5)
            and apart(self.letters, other.own, -0.5)
        )


@dataclass(frozen=True)
class Frame:
    """Places along the member to pixels, and the units of the drawing."""

    left: float
    scale: float
    length: float
    display: str
    force: Scale
    line: Scale
    couple: Scale
    greatest: Mapping[str, float]

    def x(self, at: float) -> float:
        """Pixels of a place along the member."""
        return self.left + at * self.scale

    def high(self, kind: str, value: float) -> float:
        """Height of a load's arrow, never too short to be seen."""
        most = self.greatest[kind]
        if not value or not most:
            return 0.0
        full = LINE_HEIGHT if kind == "line" else POINT_HEIGHT
        size = max(LEAST[kind], full * abs(value) / most)
        return size if value > 0 else -size


def loads_svg(result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0, prefix: str = "") -> str:
    """Draw the member's elevation with its loads as SVG, ``width`` pixels wide; every load case has rows of its own."""
    member = result["drawing"]["member"]
    loads = result["drawing"]["loads"]
    drawing = Drawing(width)
    frame = _frame(member, loads, display, width)
    y = 0.0
    cases = list(dict.fromkeys(load["case"] for load in loads))
    for case in cases:
        y = _case(drawing, frame, case, [load for load in loads if load["case"] == case], y)
    if not cases:
        drawing.text(frame.left, 12, "no loads")
        y = 20.0
    y = _member(drawing, frame, result["drawing"], y + 12)
    drawing.height = y
    title = str(result.get("title") or "the member")
    summary, details = _words(frame, title, member, loads)
    return drawing.svg("loads", f"Loads on {title}", summary, details, f' data-scale="{frame.scale:.6g}"', prefix)


def _values(load: Mapping[str, Any]) -> tuple[float, float]:
    """A load's value at its start and at its end; of axles the greatest and the least force."""
    if load["kind"] == "moving":
        forces = [float(force) for _, force in load["axles"]]
        return max(forces), min(forces)
    value = load["value"]
    return (float(value[0]), float(value[1])) if isinstance(value, list | tuple) else (float(value), float(value))


def _frame(member: Mapping[str, Any], loads: Sequence[Mapping[str, Any]], display: str, width: float) -> Frame:
    kinds = {"point": ("point", "moving"), "line": ("line",), "couple": ("couple",)}
    greatest = {
        kind: max((abs(v) for load in loads if load["kind"] in own for v in _values(load)), default=0.0)
        for kind, own in kinds.items()
    }
    length = float(member["length"])
    scale = (width - 2 * MARGIN) / length
    units = [
        drafting.scale_for(*pair, display)
        for pair in zip(("force", "line_load", "couple"), greatest.values(), strict=True)
    ]
    return Frame(MARGIN, scale, length, display, units[0], units[1], units[2], greatest)


def _case(drawing: Drawing, frame: Frame, case: str, loads: Sequence[Mapping[str, Any]], y: float) -> float:
    """Draw one case in as many lanes as its loads need side by side; return where it ends."""
    left, right = frame.x(0.0), frame.x(frame.length)
    name = shorten(str(case), 0.6 * (right - left))
    drawing.text(frame.left - MARGIN + 6, y + FONT_SIZE + 1, name, bold=True)
    lanes: list[list[Placed]] = []
    over = 0
    for load in sorted(loads, key=lambda load: (load["kind"] != "line", load.get("from", load.get("at")))):
        placed = _placed(frame, load)
        lane = next((lane for lane in lanes if all(placed.clear_of(p) for p in lane)), None)
        if lane is not None:
            lane.append(placed)
        elif len(lanes) < LANES:
            lanes.append([placed])
        else:
            over += 1
    y += FONT_SIZE + 3
    for i, lane in enumerate(lanes):
        above, below = max(p.above for p in lane), max(p.below for p in lane)
        short = i == 0 and any(min(p.own[0], p.letters[0]) < text_width(name) + 16 for p in lane)
        base = y + above + (2 if short or i else -6 if above > 8 else 7)
        drawing.line("thin", left, base, right, base)
        for placed in lane:
            _load(drawing, frame, placed.load, base)
        y = base + below + 4
    if over:
        drawing.text(right, y + FONT_SIZE, f"and {over} more loads of this case, not drawn", "end")
        y += FONT_SIZE + 4
    return y + 2


def _label(frame: Frame, load: Mapping[str, Any]) -> str:
    """What is lettered at a load."""
    first, last = _values(load)
    if load["kind"] == "moving":
        return _axles_label(frame, load)
    if load["kind"] == "couple":
        return f"{frame.couple.full(first)} at {drafting.place_text(load['at'], frame.display)}"
    if load["kind"] == "point":
        return f"{frame.force.full(abs(first))} at {drafting.place_text(load['at'], frame.display)}"
    value = frame.line.full(abs(first)) if first == last else f"{frame.line.text(first)} to {frame.line.full(last)}"
    if load["from"] <= 1e-9 * frame.length and load["to"] >= frame.length * (1 - 1e-9):
        return value
    start, end = (drafting.place_text(load[end], frame.display) for end in ("from", "to"))
    return f"{value}, {start} to {end}"


def _axles_label(frame: Frame, load: Mapping[str, Any]) -> str:
    """The forces of the axles in their order, how far apart they stand, and where they run."""
    axles = sorted(load["axles"])
    forces = " + ".join(frame.force.text(force) for _, force in axles[:5]) + (" + …" if len(axles) > 5 else "")
    apart = [drafting.place_text(b[0] - a[0], frame.display) for a, b in pairwise(axles[:5])]
    spaced = f", {' and '.join(dict.fromkeys(apart))} apart" if apart else ""
    ends = " to ".join(drafting.place_text(load[end], frame.display) for end in ("from", "to"))
    return f"{forces} {frame.force.unit}{spaced}, moving over {ends}"


def _axle_places(load: Mapping[str, Any]) -> list[tuple[float, float]]:
    """The axles in the middle of their stretch, for the drawing: place and force; none beyond its ends."""
    offsets = [offset for offset, _ in load["axles"]]
    middle = 0.5 * (load["from"] + load["to"]) - 0.5 * (min(offsets) + max(offsets))
    return [(min(max(middle + o, load["from"]), load["to"]), f) for o, f in load["axles"]]


def _label_place(frame: Frame, load: Mapping[str, Any]) -> tuple[float, float]:
    """Centre and half width of a load's lettering, kept on the drawing."""
    half = 0.5 * text_width(_label(frame, load))
    middle = 0.5 * (load["from"] + load["to"]) if load["kind"] in ("line", "moving") else load["at"]
    low, high = frame.left - MARGIN + half + 4, frame.x(frame.length) + MARGIN - half - 4
    return min(max(frame.x(middle), low), max(low, high)), half


def _placed(frame: Frame, load: Mapping[str, Any]) -> Placed:
    centre, half = _label_place(frame, load)
    letters = centre - half, centre + half
    if load["kind"] == "couple":
        x = frame.x(load["at"])
        return Placed(load, (x - 11, x + 11), letters, 12 + LETTERS, 12)
    if load["kind"] == "line":
        own = frame.x(load["from"]), frame.x(load["to"])
        heights = [frame.high("line", v) for v in _values(load)]
    elif load["kind"] == "moving":
        own = frame.x(load["from"]), frame.x(load["to"])
        heights = [*(frame.high("point", v) for v in _values(load)), -TRAVEL]
    else:
        own = frame.x(load["at"]) - 3, frame.x(load["at"]) + 3
        heights = [frame.high("point", _values(load)[0])]
    above, below = max(0.0, *heights), max(0.0, *(-h for h in heights))
    if above >= below:
        above += LETTERS
    else:
        below += LETTERS
    return Placed(load, own, letters, above, below)


def _load(drawing: Drawing, frame: Frame, load: Mapping[str, Any], base: float) -> None:
    centre, _ = _label_place(frame, load)
    if load["kind"] == "line":
        top = _line_load(drawing, frame, load, base)
    elif load["kind"] == "couple":
        _couple(drawing, frame.x(load["at"]), base, _values(load)[0])
        top = base - 12
    elif load["kind"] == "moving":
        top = min(_arrow(drawing, frame, at, force, base) for at, force in _axle_places(load))
        _travel(drawing, frame.x(load["from"]), frame.x(load["to"]), base + TRAVEL - 3)
    else:
        top = _arrow(drawing, frame, load["at"], _values(load)[0], base)
    baseline = top - 4 if top <= base else top + 2 * CAP * FONT_SIZE + 4
    drawing.text(centre, baseline, _label(frame, load), "middle")


def _arrow(drawing: Drawing, frame: Frame, at: float, force: float, base: float) -> float:
    """One force; returns where its shaft begins."""
    top = base - frame.high("point", force)
    x = frame.x(at)
    down = 1 if top < base else -1
    if top != base:
        drawing.line("heavy", x, top, x, base - 6 * down)
        drawing.arrow(x, base, 0, down, 9, 3.2)
    return top


def _travel(drawing: Drawing, left: float, right: float, y: float) -> None:
    """The stretch that axles run over: a thin line with a head at either end."""
    drawing.line("thin", left, y, right, y)
    drawing.arrow(left, y, -1, 0)
    drawing.arrow(right, y, 1, 0)


def _line_load(drawing: Drawing, frame: Frame, load: Mapping[str, Any], base: float) -> float:
    """A band with arrows; returns the height at which it is lettered."""
    left, right = frame.x(load["from"]), frame.x(load["to"])
    first, last = (frame.high("line", v) for v in _values(load))
    if first * last < 0:  # changes sign: the true slope, so that zero lies where it is
        scale = LINE_HEIGHT / frame.greatest["line"]
        first, last = (v * scale for v in _values(load))
    drawing.under.append(
        f'<path d="M{left:.1f} {base:.1f}V{base - first:.1f}L{right:.1f} {base - last:.1f}V{base:.1f}" '
        'fill="#000" fill-opacity=".06" stroke-width=".8"/>'
    )
    count = max(2, min(24, round((right - left) / 26)))
    for i in range(count + 1):
        share = i / count
        high = first + (last - first) * share
        if abs(high) < 6:
            continue
        x = left + (right - left) * share
        down = 1 if high > 0 else -1
        drawing.line("thin", x, base - high, x, base - 4 * down)
        drawing.arrow(x, base, 0, down, 5.5, 1.7)
    high = max(first, last) if max(first, last) >= -min(first, last) else min(first, last)
    return base - high


def _couple(drawing: Drawing, x: float, y: float, value: float) -> None:
    """Three quarters of a circle with a head: anticlockwise when positive."""
    if not value:
        return
    r = 10.0
    side = 1 if value > 0 else -1  # anticlockwise: from the right, over the top, to the lower left
    sweep = 0 if value > 0 else 1
    drawing.pen("outline").append(
        f"M{x + side * r * 0.87:.1f} {y + r * 0.5:.1f}A{r} {r} 0 1 {sweep} {x:.1f} {y + r:.1f}"
    )
    drawing.arrow(x + side * 5.5, y + r - 1.4, side * 0.97, -0.24, 7.5, 2.6)
    drawing.dot(x, y, 1.6)


def _member(drawing: Drawing, frame: Frame, picture: Mapping[str, Any], y: float) -> float:
    """The member itself with supports, hinges, short pieces and dimensions; returns where it ends."""
    member = picture["member"]
    left, right = frame.x(0.0), frame.x(frame.length)
    drawing.under.append(
        f'<path d="M{left:.1f} {y:.1f}h{right - left:.1f}v6h{left - right:.1f}z" fill="#fff" stroke-width="1.1"/>'
    )
    for support in member["supports"]:
        _support(drawing, frame, support, y)
    for hinge in member.get("hinges") or ():
        x = frame.x(hinge)
        drawing.over.append(f'<circle cx="{x:.1f}" cy="{y + 3:.1f}" r="3.4" fill="#fff" stroke-width="1.2"/>')
    y += 34
    y = _short_pieces(drawing, frame, picture["pieces"], y)
    return _spans(drawing, frame, member, y)


def _support(drawing: Drawing, frame: Frame, support: Mapping[str, Any], y: float) -> None:
    """Pin: triangle on hatched ground; fixed: hatched wall at an end, clamp inside; spring: zigzag."""
    x, kind = frame.x(support["at"]), support["kind"]
    outline, thin = drawing.pen("outline"), drawing.pen("thin")
    low = y + 6
    if kind == "fixed":
        at_left, at_right = support["at"] <= 1e-9 * frame.length, support["at"] >= frame.length * (1 - 1e-9)
        if at_left or at_right:
            out = -1 if at_left else 1
            outline.append(f"M{x:.1f} {y - 9:.1f}V{low + 9:.1f}")
            thin.extend(
                [
                    f"M{x:.1f} {y - 9 + 5 * i:.1f}l{out * 5} {5 if at_left else -5}"
                    for i in range(1 if at_right else 0, 5)
                ]
            )
        else:
            outline.append(f"M{x - 7:.1f} {y - 3:.1f}h14M{x - 7:.1f} {low + 3:.1f}h14")
            thin.extend(
                [
                    f"M{x - 7 + 4 * i:.1f} {edge:.1f}l3 {turn}"
                    for i in range(4)
                    for edge, turn in ((y - 3, -4), (low + 3, 4))
                ]
            )
        return
    foot = low + 11
    if kind == "spring":
        outline.append(f"M{x:.1f} {low:.1f}v2l4 1.5l-8 3l8 3l-8 3l4 1.5v2")
        foot = low + 16
    else:
        outline.append(f"M{x:.1f} {low:.1f}l-6.5 11h13z")
    outline.append(f"M{x - 10:.1f} {foot:.1f}h20")
    thin.extend([f"M{x - 8 + 4 * i:.1f} {foot:.1f}l-3.5 4" for i in range(5)])


def _short_pieces(drawing: Drawing, frame: Frame, pieces: Sequence[Mapping[str, Any]], y: float) -> float:
    """Pieces that start or stop along the member, as bars with their names and ends."""
    near = 1e-9 * frame.length
    for piece in pieces:
        start, end = piece.get("from") or 0.0, piece.get("to")
        end = frame.length if end is None else end
        if start <= near and end >= frame.length - near:
            continue
        left, right = frame.x(start), frame.x(end)
        drawing.under.append(
            f'<path d="M{left:.1f} {y:.1f}H{right:.1f}V{y + 5:.1f}H{left:.1f}z" '
            'fill="#000" fill-opacity=".2" stroke-width=".8"/>'
        )
        places = " to ".join(drafting.place_text(place, frame.display) for place in (start, end))
        text = f"{piece['id']}, {places}"
        half = 0.5 * text_width(text)
        low, high = frame.left - MARGIN + half + 4, frame.x(frame.length) + MARGIN - half - 4
        drawing.text(min(max(0.5 * (left + right), low), max(low, high)), y + 6 + FONT_SIZE, text, "middle")
        y += 10 + LETTERS
    return y


def _spans(drawing: Drawing, frame: Frame, member: Mapping[str, Any], y: float) -> float:
    """Dimensions between supports and ends, and the length overall where there is more than one."""
    inside = {float(s["at"]) for s in member["supports"]} | {0.0, frame.length}
    places = sorted(inside)
    near = 1e-9 * frame.length
    places = [place for i, place in enumerate(places) if i == 0 or place - places[i - 1] > near]
    ticks = [frame.x(place) for place in places]
    texts = [drafting.place_text(b - a, frame.display) for a, b in pairwise(places)]
    rows = drafting.chain(places, ticks, texts, None)
    if len(places) > 2 and rows:
        drafting.dimension_across(drawing, y, rows)
        y += 12 + drafting.ROW * rows.rows
    whole = drafting.Chain(
        (ticks[0], ticks[-1]), ((0.5 * (ticks[0] + ticks[-1]), drafting.place_text(frame.length, frame.display)),)
    )
    drafting.dimension_across(drawing, y, whole)
    return y + 20


def _words(frame: Frame, title: str, member: Mapping[str, Any], loads: Sequence[Mapping[str, Any]]) -> tuple[str, str]:
    supports = ", ".join(f"{s['kind']} at {drafting.place_text(s['at'], frame.display)}" for s in member["supports"])
    length = drafting.place_text(frame.length, frame.display)
    count = len(loads)
    summary = f"Elevation of {title}: length {length}, supports {supports}; {count or 'no'} load{'s' * (count != 1)}"
    details = "; ".join(f"{load['case']}: {load['kind']} load {_label(frame, load)}" for load in loads[:40])
    return summary, details
