"""A small SVG writer for drafting drawings: pens, lettering, arrowheads, and the frame around them.

Only presentation attributes are written, never ``style`` or script, so the drawings live under the strict content
policy of the page; everything used here (patterns, clip paths, dashes, rotated text) is also drawn by typst in the
PDF. One drawing unit is one CSS pixel at full size; a 640 wide drawing set 170 mm wide on paper prints 11 px
lettering at 8.3 pt.
"""

from __future__ import annotations

import zlib
from collections.abc import Iterable, Sequence
from functools import lru_cache
from math import ceil, floor

INK = "#111"
FACES = "'Source Sans 3',Arial,'Liberation Sans','Libertinus Serif',sans-serif"
FONT_SIZE = 11.0
CAP = 0.36
"""Half the height of digits and capitals over the font size: added to a centre line it gives the baseline."""

# Widths of a common grotesque in thousandths of the font size; wider than the page's own face, to be safe.
_WIDTHS = {
    **dict.fromkeys("ijl|'", 240),
    **dict.fromkeys("ft!,.:;/ []()I", 295),
    **dict.fromkeys('r-"*°·', 350),
    **dict.fromkeys("cksvxyzJ", 510),
    **dict.fromkeys("ABEKPSVXY&", 670),
    **dict.fromkeys("CDHNRUw", 730),
    **dict.fromkeys("GOQ", 785),
    **dict.fromkeys("mMW%@", 890),
}
_ILLEGAL = dict.fromkeys((*range(9), 11, 12, *range(14, 32), 65534, 65535, *range(55296, 57344)))
_ESCAPES = {
    **_ILLEGAL,
    ord("&"): "&amp;",
    ord("<"): "&lt;",
    ord(">"): "&gt;",
    ord('"'): "&quot;",
    9: " ",
    10: " ",
    13: " ",
}


@lru_cache(maxsize=4096)
def escape(text: str) -> str:
    """Text made safe for content and for quoted attributes; characters that XML forbids are dropped."""
    return text.translate(_ESCAPES)


@lru_cache(maxsize=4096)
def text_width(text: str, size: float = FONT_SIZE) -> float:
    """Width a line of lettering takes, on the generous side; characters outside Latin script count as a full square."""
    widths = _WIDTHS
    return size / 1000 * sum(widths.get(letter, 560 if letter < "\u0370" else 800) for letter in text)


@lru_cache(maxsize=4096)
def shorten(text: str, width: float, size: float = FONT_SIZE) -> str:
    """The text, cut with an ellipsis where it is wider than ``width``."""
    if text_width(text, size) <= width:
        return text
    while text and text_width(text + "…", size) > width:
        text = text[:-1]
    return text.rstrip() + "…"


# How each pen draws. Order is drawing order: what comes later lies on top.
PENS = {
    "grid": 'stroke="#bbb" stroke-width=".5"',
    "thin": 'stroke-width=".6"',
    "outline": 'stroke-width="1.1"',
    "bond": 'stroke-width="2.8"',
    "gap": 'stroke="#fff" stroke-width="2.6"',
    "touching": 'stroke-width="1.4" stroke-dasharray="4 3"',
    "axis": 'stroke-width=".8" stroke-dasharray="9 2.5 1.5 2.5"',
    "chain": 'stroke-width=".7" stroke-dasharray="14 3 2 3"',
    "heavy": 'stroke-width="1.8"',
    "blot": 'fill="#111" stroke="none"',
    "blank": 'fill="#fff" stroke="none"',
}


class Drawing:
    """Collects strokes by pen, free elements, and lettering; ``svg`` puts them in order.

    Strokes of one pen become one path element: few bytes, and quick to write and to read.
    """

    def __init__(self, width: float) -> None:
        self.width = width
        self.top = 0.0
        self.height = 0.0  # where the drawing ends below; ``top`` is where it starts
        self.defs: list[str] = []
        self.under: list[str] = []
        self.over: list[str] = []
        self.letters: list[str] = []
        self._pens: dict[str, list[str]] = {}

    def pen(self, name: str) -> list[str]:
        """The path data of one pen, to append to."""
        strokes = self._pens.get(name)
        if strokes is None:
            strokes = self._pens[name] = []
        return strokes

    def line(self, pen: str, x1: float, y1: float, x2: float, y2: float) -> None:
        """One straight stroke."""
        self.pen(pen).append(f"M{x1:.1f} {y1:.1f}L{x2:.1f} {y2:.1f}")

    def dot(self, x: float, y: float, r: float = 2.2) -> None:
        """A filled dot, as at the end of a leader inside an outline."""
        self.pen("blot").append(f"M{x - r:.1f} {y:.1f}a{r} {r} 0 1 0 {2 * r} 0a{r} {r} 0 1 0 {-2 * r} 0z")

    def arrow(self, x: float, y: float, dx: float, dy: float, length: float = 7.0, half: float = 2.2) -> None:
        """A filled arrowhead with its tip at (x, y), pointing along the unit vector (dx, dy)."""
        bx, by = x - dx * length, y - dy * length
        self.pen("blot").append(
            f"M{x:.1f} {y:.1f}L{bx - dy * half:.1f} {by + dx * half:.1f}L{bx + dy * half:.1f} {by - dx * half:.1f}z"
        )

    def text(
        self,
        x: float,
        y: float,
        text: str,
        anchor: str = "",
        *,
        size: float = 0.0,
        bold: bool = False,
        turned: bool = False,
    ) -> None:
        """One line of lettering on the baseline ``y``; ``anchor`` is "", "middle" or "end"."""
        place = f'x="{x:.1f}" y="{y:.1f}"'
        if anchor:
            place += f' text-anchor="{anchor}"'
        if turned:
            place += f' transform="rotate(-90 {x:.1f} {y:.1f})"'
        if size:
            place += f' font-size="{size:g}"'
        if bold:
            place += ' font-weight="bold"'
        self.letters.append(f"<text {place}>{escape(text)}</text>")

    def backing(self, left: float, top: float, width: float, height: float) -> None:
        """A white patch for lettering that lies on hatching."""
        self.pen("blank").append(f"M{left:.1f} {top:.1f}h{width:.1f}v{height:.1f}h{-width:.1f}z")

    def svg(
        self, kind: str, title: str, summary: str, details: str = "", attributes: str = "", prefix: str = ""
    ) -> str:
        """The finished drawing: ``kind`` is its class, ``summary`` the text alternative that is read out for it.

        Inside the drawing ids are written with a leading "~"; here it becomes a mark made from the drawing's own
        content (and ``prefix``), so that two drawings on one page never share an id unless they are the same drawing.
        """
        strokes = [
            f'<path {PENS[name]} d="{"".join(self._pens[name])}"/>'
            for name in PENS
            if self._pens.get(name) and name not in ("blank", "grid")
        ]
        blank, grid = (
            f'<path {PENS[name]} d="{"".join(self._pens[name])}"/>' if name in self._pens else ""
            for name in ("blank", "grid")
        )
        defs = f"<defs>{''.join(self.defs)}</defs>" if self.defs else ""
        drawn = "".join([grid, *self.under, *strokes, blank, *self.over])
        body = f'{defs}<g fill="none" stroke="{INK}">{drawn}</g><g fill="{INK}">{"".join(self.letters)}</g>'
        if self.defs:
            mark = f"{prefix}{kind[0]}{zlib.crc32(body.encode('utf-8', 'replace')):08x}-"
            body = body.replace('id="~', f'id="{mark}').replace("url(#~", f"url(#{mark}")
        top = floor(self.top)
        height = ceil(self.height) - top
        more = f"<desc>{escape(details)}</desc>" if details else ""
        return (
            f'<svg xmlns="http://www.w3.org/2000/svg" class="drawing {kind}" role="img" aria-label="{escape(summary)}" '
            f'viewBox="0 {top} {self.width:g} {height}" width="{self.width:g}" height="{height}" '
            f'font-family="{FACES}" font-size="{FONT_SIZE:g}"{attributes}>'
            f"<title>{escape(title)}</title>{more}{body}</svg>"
        )


def polygon(points: Sequence[Sequence[float]]) -> str:
    """Path data of a closed outline, to a hundredth of a pixel."""
    pairs = [f"{x:.2f} {y:.2f}" for x, y in points]
    return "M" + "L".join(pairs) + "z"


def path(points: Sequence[Sequence[float]]) -> str:
    """Path data of an open line, to a tenth of a pixel."""
    return "M" + "L".join(f"{x:.1f} {y:.1f}" for x, y in points)


def spread(
    wanted: Sequence[float],
    sizes: Sequence[float],
    low: float,
    high: float,
    gap: float,
    weights: Sequence[float] | None = None,
) -> list[float]:
    """Centres of labels along a line: in the given order, none overlapping, as near as can be to where they are
    wanted.

    Least squares with the order kept (pool adjacent violators). Where [low, high] is too short the labels run on past
    ``high``: the caller sees it from the last centre.
    """
    if not wanted:
        return []
    offsets, run = [], 0.0
    for i, size in enumerate(sizes):
        run += size / 2 if i == 0 else (sizes[i - 1] + size) / 2 + gap
        offsets.append(run)
    pools: list[list[float]] = []  # [weighted sum, weight, count]
    for i, target in enumerate(wanted):
        weight = weights[i] if weights else 1.0
        pools.append([(target - offsets[i]) * weight, weight, 1])
        while len(pools) > 1 and pools[-2][0] * pools[-1][1] > pools[-1][0] * pools[-2][1]:
            total, weight, count = pools.pop()
            pools[-1][0] += total
            pools[-1][1] += weight
            pools[-1][2] += count
    last = high - offsets[-1] - sizes[-1] / 2
    starts: list[float] = []
    for total, weight, count in pools:
        starts += [max(low, min(total / weight, last))] * int(count)
    return [start + offset for start, offset in zip(starts, offsets, strict=True)]


def overlaps(boxes: Iterable[tuple[float, float, float, float]], box: tuple[float, float, float, float]) -> bool:
    """Whether a box (left, top, right, bottom) shares ground with any of the others."""
    left, top, right, bottom = box
    return any(left < r and l < right and top < b and t < bottom for l, t, r, b in boxes)  # noqa: E741
