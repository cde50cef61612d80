"""What the drawings of test results share: axes with round marks, and marks that differ by shape and word."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from server.sheets import drafting
from server.sheets.diagrams import ticks
from server.sheets.svg import CAP, FONT_SIZE, Drawing, text_width

DOT = 3.6
"""Radius of a coupon's mark."""
TICK = 4.0


@dataclass(frozen=True)
class Axis:
    """A scale between two values and two places in pixels; logarithmic where it says so."""

    low: float
    high: float
    start: float
    end: float
    logarithmic: bool = False

    def __call__(self, value: float) -> float:
        """Return the place of a value in pixels; beyond the ends it stays within a width of the drawing."""
        low, high = self._on(self.low), self._on(self.high)
        share = (self._on(value) - low) / (high - low) if high > low else 0.5
        return self.start + min(max(share, -1.0), 2.0) * (self.end - self.start)

    def holds(self, value: float) -> bool:
        """Whether a value lies between the ends."""
        return self.low <= value <= self.high

    def marks(self, most: int) -> list[float]:
        """Return round values along the axis, at most about so many."""
        if self.logarithmic and self.low > 0 and self.high > 4 * self.low:
            found: list[float] = []
            for power in range(math.floor(math.log10(self.low)), math.ceil(math.log10(self.high)) + 1):
                found += [factor * 10.0**power for factor in (1, 2, 5)]
            return [each for each in found if self.low <= each <= self.high]
        return [each for each in ticks(self.low, self.high, most) if self.low <= each <= self.high]

    def _on(self, value: float) -> float:
        return math.log(max(value, 1e-300)) if self.logarithmic else value


def round_ends(values: list[float], *, room: float = 0.06, least: float | None = None) -> tuple[float, float]:
    """Return the ends of an axis that holds ``values``, with some room; never below ``least``."""
    low, high = min(values), max(values)
    wide = (high - low) or abs(high) or 1.0
    low, high = low - room * wide, high + room * wide
    return (max(low, least) if least is not None and low < least else low), high


def across(drawing: Drawing, axis: Axis, y: float, title: str, *, most: int = 9, grid_to: float | None = None) -> None:
    """Draw a horizontal axis at ``y`` with its marks below it, and grid lines up to ``grid_to``."""
    drawing.line("outline", axis.start, y, axis.end, y)
    last = -math.inf
    marks = axis.marks(most)
    for mark, text in zip(marks, texts_of(marks), strict=True):
        x = axis(mark)
        drawing.line("thin", x, y, x, y + TICK)
        if grid_to is not None:
            drawing.pen("grid").append(f"M{x:.1f} {y:.1f}V{grid_to:.1f}")
        if x - text_width(text) / 2 > last + 4:
            drawing.text(x, y + TICK + 3 + 2 * CAP * FONT_SIZE, text, "middle")
            last = x + text_width(text) / 2
    drawing.text((axis.start + axis.end) / 2, y + 2 * TICK + 8 + 4 * CAP * FONT_SIZE, title, "middle")


def texts_of(marks: Sequence[float]) -> list[str]:
    """Return the numbers of an axis with as many decimals as the one that needs most: 1.8, 2.0, 2.2."""
    plain = [drafting.number(mark) for mark in marks]
    decimals = max((len(text.partition(".")[2]) for text in plain), default=0)
    if not decimals or any(not text.replace(".", "").isdecimal() for text in plain):
        return plain
    return [f"{mark:.{decimals}f}" for mark in marks]


def coupon_mark(drawing: Drawing, kind: str, x: float, y: float, r: float = DOT) -> None:
    """Draw one coupon: a filled dot; a dot in a square where it lies apart; an open circle with a cross if excluded."""
    if kind == "excluded":
        drawing.pen("outline").append(
            f"M{x - r:.1f} {y:.1f}a{r} {r} 0 1 0 {2 * r} 0a{r} {r} 0 1 0 {-2 * r} 0z"
            f"M{x - 0.7 * r:.1f} {y - 0.7 * r:.1f}l{1.4 * r:.1f} {1.4 * r:.1f}"
            f"M{x - 0.7 * r:.1f} {y + 0.7 * r:.1f}l{1.4 * r:.1f} {-1.4 * r:.1f}"
        )
        return
    drawing.dot(x, y, r * 0.85)
    if kind == "outlier":
        side = 2 * r + 3.4
        drawing.pen("outline").append(f"M{x - side / 2:.1f} {y - side / 2:.1f}h{side:.1f}v{side:.1f}h{-side:.1f}z")


def kind_of(coupon: object) -> str:
    """Return how a coupon of a result is drawn."""
    assert isinstance(coupon, dict)
    return "excluded" if coupon.get("excluded") else "outlier" if coupon.get("outlier") else "coupon"


def legend(drawing: Drawing, x: float, y: float, kinds: set[str]) -> None:
    """Name the marks that a drawing shows, in one line."""
    words = {"coupon": "coupon", "outlier": "stands apart from the others", "excluded": "excluded, with its cause"}
    for kind, text in words.items():
        if kind in kinds:
            coupon_mark(drawing, kind, x + 5, y - CAP * FONT_SIZE)
            drawing.text(x + 14, y, text)
            x += 14 + text_width(text) + 18
