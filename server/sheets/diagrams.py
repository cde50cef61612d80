"""Shear, moment, deflection and joint flow along the member, drawn from the stored polylines.

Envelopes over the combinations: the greatest values solid, the least dashed, both lightly filled to the zero line.
Shear is drawn up where positive; sagging moments and deflections are drawn down, moments therefore on the side in
tension. Each drawing says so.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import ceil, floor, log10
from typing import Any

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.sheets import drafting
from server.sheets.drafting import Scale
from server.sheets.section_view import joint_numbers
from server.sheets.smooth import rounded
from server.sheets.svg import CAP, FONT_SIZE, Drawing, shorten, text_width

LEFT, RIGHT, HEAD, FOOT = 58.0, 22.0, 22.0, 32.0
MOST_POINTS = 120
LEAST_LETTERED = 0.005
"""A lesser extreme below this share of the greater one is not lettered on the curve (the text alternative has it)."""
LANES = ((1, 110.0), (3, 72.0), (8, 54.0), (10**9, 36.0))
"""Height of a lane by the number of lanes."""
LETTERS = 15.0


@dataclass(frozen=True)
class Quantity:
    """What is drawn: its name, its kind of unit, which way positive values go, and the rule that is printed with it."""

    name: str
    kind: str
    down: bool
    rule: str


QUANTITIES = {
    "shear": Quantity("Shear force", "force", False, "positive: the part at the left pushes up, drawn up"),
    "moment": Quantity("Bending moment", "couple", True, "sagging positive, drawn down (side in tension)"),
    "deflection": Quantity("Deflection", "deflection", True, "downward positive, drawn down"),
    "deflection_long_term": Quantity("Long-term deflection", "deflection", True, "downward positive, drawn down"),
    "shear_lateral": Quantity("Lateral shear", "force", False, "positive: the part at the left pushes to the left"),
    "moment_lateral": Quantity("Lateral moment", "couple", True, "positive: right-hand side in tension, drawn down"),
    "deflection_lateral": Quantity("Lateral deflection", "deflection", True, "to the right positive, drawn down"),
    "deflection_lateral_long_term": Quantity(
        "Long-term lateral deflection", "deflection", True, "to the right positive, drawn down"
    ),
}
FLOW = Quantity("Shear flow", "flow", False, "sign as the shear force")
SLIP = Quantity("Slip", "deflection", False, FLOW.rule)


def diagram_svg(
    result: Mapping[str, Any],
    quantity: str,
    *,
    display: str = "SI",
    width: float = 640.0,
    height: float = 210.0,
    prefix: str = "",
) -> str:
    """Draw the envelope of one of ``QUANTITIES`` along the member as SVG.

    Raises InputError where there is no such quantity; one that the result does not have is a drawing that says so.
    """
    if quantity not in QUANTITIES:
        raise InputError("quantity", f"quantity is {quantity!r}; choose one of {', '.join(QUANTITIES)}.")
    extremes = result.get("member", {}).get(quantity)
    return _diagram(
        result,
        QUANTITIES[quantity],
        quantity,
        result["diagrams"].get(quantity),
        extremes,
        display,
        width,
        height,
        prefix,
    )


def joint_svg(
    result: Mapping[str, Any],
    joint_id: str,
    *,
    display: str = "SI",
    width: float = 640.0,
    height: float = 180.0,
    prefix: str = "",
) -> str:
    """Draw the shear flow of one joint along the member as SVG."""
    number = joint_numbers(result).get(joint_id, 0)
    named = Quantity(f"Shear flow in joint {number}, {joint_id}", "flow", False, FLOW.rule)
    band = (result["diagrams"].get("joints") or {}).get(joint_id)
    return _diagram(result, named, "flow", band, None, display, width, height, prefix)


def flow_svg(result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0, prefix: str = "") -> str:
    """Draw the flow of every joint along the member, one lane a joint (alike joints share one), all to one scale."""
    return _lanes_svg(result, "joints", FLOW, display, width, prefix)


def slip_svg(result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0, prefix: str = "") -> str:
    """Draw the slip of every joint along the member, one lane a joint (alike joints share one), all to one scale."""
    return _lanes_svg(result, "slips", SLIP, display, width, prefix)


def _lanes_svg(result: Mapping[str, Any], key: str, drawn: Quantity, display: str, width: float, prefix: str) -> str:
    drawing = Drawing(width)
    title = str(result.get("title") or "the member")
    what = f"{drawn.name} in the joints"
    bands = result["diagrams"].get(key) or {}
    at = np.asarray(result["diagrams"]["at"], dtype=float)
    if not bands or not len(at):
        drawing.height = 26
        drawing.text(8, 17, f"{what}: there is no joint, or no load combination asks for it.")
        return drawing.svg(f"diagram {drawn.kind}", f"{what}, {title}", f"{what} of {title}: nothing to draw")
    lanes = _lanes(bands)
    high = max(0.0, *(float(lane.high.max()) for lane in lanes))
    low = min(0.0, *(float(lane.low.min()) for lane in lanes))
    scale = drafting.scale_for(drawn.kind, max(high, -low), display)
    tall = next(lane for most, lane in LANES if len(lanes) <= most)
    bottom = HEAD + len(lanes) * (tall + LETTERS) + 4
    frame = _Plot(result, at, low, high, scale, False, display, width, HEAD, bottom)
    frame.places(drawing)
    joints = {joint["id"]: joint for joint in result.get("joints") or ()}
    numbers = joint_numbers(result)
    words = []
    for i, lane in enumerate(lanes):
        top = HEAD + i * (tall + LETTERS) + LETTERS
        plot = _Plot(result, at, low, high, scale, False, display, width, top, top + tall - 2)
        plot.curve(drawing, lane.high, lane.low)
        plot.zero_line(drawing)
        drawing.text(LEFT - 6, plot.zero + CAP * FONT_SIZE, "0", "end")
        peak = _joint_peak(at, lane, joints.get(lane.names[0], {}))
        said = plot.label_lane(drawing, peak, lane, numbers)
        words.append(said)
    several = "; solid greatest, dashed least" if any(np.any(lane.high != lane.low) for lane in lanes) else ""
    drawing.text(LEFT, 13, f"{what} [{scale.unit}]", bold=True)
    drawing.text(width - RIGHT, 13, f"{drawn.rule}; all to one scale{several}", "end", size=9.5)
    drawing.height = bottom + 28
    summary = f"{what} of {title}: {'; '.join(words)}"
    head = f"Joint flow, {title}" if drawn.kind == "flow" else f"{what}, {title}"
    return drawing.svg(f"diagram {drawn.kind}", head, summary, prefix=prefix)


@dataclass(frozen=True)
class Lane:
    """The flow of one joint, or of several that carry the same."""

    names: list[str]
    high: NDArray[np.float64]
    low: NDArray[np.float64]


def _lanes(bands: Mapping[str, Any]) -> list[Lane]:
    lanes: list[Lane] = []
    for name, band in bands.items():
        high, low = np.asarray(band["max"], dtype=float), np.asarray(band["min"], dtype=float)
        size = max(float(np.abs(high).max()), float(np.abs(low).max()))
        for lane in lanes:
            apart = max(float(np.abs(lane.high - high).max()), float(np.abs(lane.low - low).max()))
            if apart <= 1e-6 * size:
                lane.names.append(name)
                break
        else:
            lanes.append(Lane([name], high, low))
    return lanes


def _joint_peak(at: NDArray[np.float64], lane: Lane, joint: Mapping[str, Any]) -> Peak:
    """The joint's largest flow of either sign: where it is on the curve, with the combination the result names."""
    i, j = int(lane.high.argmax()), int(lane.low.argmin())
    k, value = (i, float(lane.high[i])) if lane.high[i] >= -lane.low[j] else (j, float(lane.low[j]))
    return Peak(value, float(at[k]), str(joint.get("combination") or ""))


def _diagram(
    result: Mapping[str, Any],
    quantity: Quantity,
    key: str,
    band: Mapping[str, Any] | None,
    extremes: Mapping[str, Any] | None,
    display: str,
    width: float,
    height: float,
    prefix: str,
) -> str:
    drawing = Drawing(width)
    drawing.height = height
    title = str(result.get("title") or "the member")
    if not band or not len(result["diagrams"]["at"]):
        drawing.height = 26
        drawing.text(8, 17, f"{quantity.name}: no load combination asks for it, so there is nothing to draw.")
        return drawing.svg(
            f"diagram {key}", f"{quantity.name}, {title}", f"{quantity.name} of {title}: nothing to draw"
        )
    at, high, low = (np.asarray(values, dtype=float) for values in (result["diagrams"]["at"], band["max"], band["min"]))
    peaks = _peaks(at, high, low, extremes)
    greatest = max(abs(peaks[0].value), abs(peaks[1].value))
    scale = drafting.scale_for(quantity.kind, greatest, display)
    plot = _Plot(
        result,
        at,
        min(0.0, peaks[1].value),
        max(0.0, peaks[0].value),
        scale,
        quantity.down,
        display,
        width,
        HEAD,
        height - FOOT,
    )
    plot.axes(drawing)
    curve = plot.curve(drawing, high, low)
    plot.zero_line(drawing)
    words = plot.label_peaks(drawing, peaks)
    drawing.text(LEFT, 13, shorten(f"{quantity.name} [{scale.unit}]", 0.55 * width, FONT_SIZE), bold=True)
    rule = quantity.rule + ("; solid greatest, dashed least" if curve == 2 else "")
    if text_width(rule, 9.5) + text_width(quantity.name) + 80 > width - LEFT - RIGHT:
        drawing.text(width - RIGHT, height + 8, rule, "end", size=9.5)
        drawing.height = height + 12
    else:
        drawing.text(width - RIGHT, 13, rule, "end", size=9.5)
    summary = f"{quantity.name} of {title}: {words}"
    frame = f' data-scale="{plot.per_value:.6g}" data-zero="{plot.y(0.0):.2f}"'
    return drawing.svg(f"diagram {key}", f"{quantity.name}, {title}", summary, rule, frame, prefix)


@dataclass(frozen=True)
class Peak:
    """An extreme value, its place and the combination that gives it."""

    value: float
    at: float
    combination: str


def _peaks(
    at: NDArray[np.float64], high: NDArray[np.float64], low: NDArray[np.float64], extremes: Mapping[str, Any] | None
) -> tuple[Peak, Peak]:
    """The stored extremes; those of the polyline where the result stores none."""
    if extremes:
        return (
            Peak(float(extremes["max"]), float(extremes["at_max"]), str(extremes.get("combination_max") or "")),
            Peak(float(extremes["min"]), float(extremes["at_min"]), str(extremes.get("combination_min") or "")),
        )
    i, j = int(high.argmax()), int(low.argmin())
    return Peak(float(high[i]), float(at[i]), ""), Peak(float(low[j]), float(at[j]), "")


def ticks(low: float, high: float, most: int) -> list[float]:
    """Round values from low to high, steps of 1, 2 or 5 times a power of ten, at most about ``most`` of them."""
    if not high > low:
        return [low]
    rough = (high - low) / max(1, most)
    power = 10.0 ** floor(log10(rough))
    step = next(power * factor for factor in (1, 2, 5, 10) if power * factor >= rough * (1 - 1e-9))
    first, last = ceil(low / step - 1e-9), floor(high / step + 1e-9)
    return [round(i * step, 12) for i in range(first, last + 1)]


class _Plot:
    """A plot area: places along the member to the right, values up or down, both to scale."""

    def __init__(
        self, result: Mapping[str, Any], at: NDArray[np.float64], low: float, high: float, scale: Scale, down: bool,
        display: str, width: float, top: float, bottom: float,
    ) -> None:  # fmt: skip
        member = result["drawing"]["member"]
        self.at, self.scale, self.down, self.display = at, scale, down, display
        self.length = float(member["length"])
        self.supports = [float(support["at"]) for support in member["supports"]]
        self.left, self.right, self.top, self.bottom = LEFT, width - RIGHT, top, bottom
        if not high > low:  # nothing anywhere: a flat line in the middle of an honest, unlabelled height
            low, high = -1.0, 1.0
            self.flat = True
        else:
            self.flat = False
        room = 0.16 * (high - low)
        self.low = low - (room if low < 0 else 0.06 * (high - low))
        self.high = high + (room if high > 0 else 0.06 * (high - low))
        self.per_length = (self.right - self.left) / self.length
        self.per_value = (bottom - top) / (self.high - self.low) * (1 if down else -1)
        self.zero = top - self.low * self.per_value if down else bottom - self.low * self.per_value

    def x(self, place: float) -> float:
        """Pixels of a place."""
        return self.left + place * self.per_length

    def y(self, value: float) -> float:
        """Pixels of a value."""
        return self.zero + value * self.per_value

    def axes(self, drawing: Drawing) -> None:
        """Grid, tick labels, the frame's left side, supports."""
        grid = drawing.pen("grid")
        across = f"M{self.left:.1f} "
        if not self.flat:
            factor = self.scale.factor
            marks = ticks(self.low * factor, self.high * factor, max(2, int((self.bottom - self.top) / 26)))
            for mark in marks:
                y = self.y(mark / factor)
                if mark:
                    grid.append(f"{across}{y:.1f}H{self.right:.1f}")
                drawing.text(self.left - 6, y + CAP * FONT_SIZE, drafting.number(mark), "end")
        else:
            drawing.text(self.left - 6, self.zero + CAP * FONT_SIZE, "0", "end")
        self.places(drawing)

    def places(self, drawing: Drawing) -> None:
        """Places along the member: grid, tick labels below, the frame's sides."""
        grid = drawing.pen("grid")
        place = drafting.scale_for("place", self.length, self.display)
        marks = ticks(0.0, self.length * place.factor, 12)
        for mark in marks:
            x = self.x(mark / place.factor)
            grid.append(f"M{x:.1f} {self.top:.1f}V{self.bottom + 4:.1f}")
            text = drafting.number(mark) if mark else f"0 {place.unit}"
            drawing.text(x, self.bottom + 6 + 2 * CAP * FONT_SIZE, text, "middle")
        drawing.line("thin", self.left, self.top, self.left, self.bottom)
        drawing.line("thin", self.right, self.top, self.right, self.bottom)

    def zero_line(self, drawing: Drawing) -> None:
        """The member as the zero line, with its supports as small triangles."""
        drawing.line("outline", self.left, self.zero, self.right, self.zero)
        marks = [f"M{self.x(at):.1f} {self.zero:.1f}l-4.5 8h9z" for at in self.supports]
        drawing.over.append(f'<path class="supports" d="{"".join(marks)}" fill="#fff" stroke-width=".9"/>')
        drawing.pen("axis").extend(
            [f"M{self.x(at):.1f} {self.top:.1f}V{self.bottom:.1f}" for at in self.supports if 0 < at < self.length]
        )

    def curve(self, drawing: Drawing, high: NDArray[np.float64], low: NDArray[np.float64]) -> int:
        """The envelope; returns the number of lines drawn (one where greatest and least are the same)."""
        xs = self.left + self.at * self.per_length
        first = self._path(xs, high)
        same = bool(np.all(np.abs(high - low) * abs(self.per_value) < 0.05))
        drawing.under.append(f'<path class="max" d="{first}" fill="#000" fill-opacity=".07" stroke-width="1.4"/>')
        if same:
            return 1
        second = self._path(xs, low)
        drawing.under.append(
            f'<path class="min" d="{second}" fill="#000" fill-opacity=".07" '
            'stroke-width="1.2" stroke-dasharray="6 2.5"/>'
        )
        return 2

    def _path(self, xs: NDArray[np.float64], values: NDArray[np.float64]) -> str:
        """From the zero line along the curve and back to it, in tenths of a pixel."""
        x, y = thinned(*rounded(xs, self.zero + values * self.per_value))
        pairs = np.empty(2 * len(x))
        pairs[0::2], pairs[1::2] = x, y
        line = ("%.1f %.1f " * len(x)) % tuple(pairs.tolist())
        return f"M{x[0]:.1f} {self.zero:.1f}L{line[:-1]}V{self.zero:.1f}"

    def label_peaks(self, drawing: Drawing, peaks: tuple[Peak, Peak]) -> str:
        """Letter greatest and least value with place and combination; returns them in words."""
        greatest = max(abs(peak.value) for peak in peaks)
        if not greatest:
            drawing.text(0.5 * (self.left + self.right), self.zero - 5, "0 everywhere", "middle")
            return "0 everywhere"
        words = []
        taken: list[tuple[float, float, float, float]] = []
        for word, peak in zip(("greatest", "least"), peaks, strict=True):
            where = "" if peak.at is None else f" at {drafting.place_text(peak.at, self.display)}"
            why = f", {peak.combination}" if peak.combination else ""
            words.append(f"{word} {self.scale.full(peak.value)}{where}{why}")
            if abs(peak.value) < LEAST_LETTERED * greatest or (word == "least" and peak == peaks[0]):
                continue
            self._label_peak(drawing, peak, f"{self.scale.full(peak.value)}{where}{why}", taken)
        return "; ".join(words)

    def label_lane(self, drawing: Drawing, peak: Peak, lane: Lane, numbers: Mapping[str, int]) -> str:
        """The head of a lane: numbers and names of its joints, and the largest flow; returns them in words."""
        drawing.dot(self.x(peak.at), self.y(peak.value), 2.4)
        why = f", {peak.combination}" if peak.combination else ""
        most = f"{self.scale.full(abs(peak.value))} at {drafting.place_text(peak.at, self.display)}{why}"
        if not peak.value:
            most = "0 everywhere"
        names = ", ".join(str(numbers.get(name, "?")) for name in lane.names)
        names = f"{names} = {', '.join(lane.names)}" if len(lane.names) <= 2 else f"joints {names}"
        room = self.right - self.left
        most = shorten(most, 0.6 * room)
        drawing.text(self.left + 4, self.top - 3, shorten(names, room - text_width(most) - 20))
        drawing.text(self.right - 4, self.top - 3, most, "end")
        return f"joint {names}: largest {most}"

    def _label_peak(
        self, drawing: Drawing, peak: Peak, text: str, taken: list[tuple[float, float, float, float]]
    ) -> None:
        """A dot on the curve, and the text beyond it, away from the zero line and inside the frame."""
        x, y = self.x(peak.at), self.y(peak.value)
        outward = 1 if y >= self.zero else -1
        text = shorten(text, self.right - self.left - 8)
        half = 0.5 * text_width(text)
        centre = min(max(x, self.left + half + 4), self.right - half - 4)
        middle = y + outward * 9.5
        box = (centre - half - 2, middle - 6.5, centre + half + 2, middle + 6.5)
        for left, top, right, bottom in taken:
            if box[0] < right and left < box[2] and box[1] < bottom and top < box[3]:
                middle = bottom + 7 if outward > 0 else top - 7
        taken.append((centre - half - 2, middle - 6.5, centre + half + 2, middle + 6.5))
        drawing.dot(x, y, 2.4)
        drawing.backing(centre - half - 2, middle - 6, 2 * half + 4, 12.5)
        drawing.text(centre, middle + CAP * FONT_SIZE, text, "middle")


def thinned(x: NDArray[np.float64], y: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Leave out points that lie on the line between their neighbours to a twentieth of a pixel.

    Every second point at most goes in one pass, so that a slow curve is not eaten up; the ends stay.
    """
    for _ in range(6):
        if len(x) < 5:
            break
        dx, dy = x[2:] - x[:-2], y[2:] - y[:-2]
        px, py = x[1:-1] - x[:-2], y[1:-1] - y[:-2]
        span = np.abs(dx) + np.abs(dy)
        idle = np.abs(dx * py - dy * px) <= 0.05 * span
        idle[1::2] = False
        if not idle.any():
            if len(x) <= MOST_POINTS:
                break
            idle[0::2] = np.abs(dx[0::2] * py[0::2] - dy[0::2] * px[0::2]) <= 0.3 * span[0::2]
            if not idle.any():
                break
        keep = np.ones(len(x), dtype=bool)
        keep[1:-1] = ~idle
        x, y = x[keep], y[keep]
    return x, y
