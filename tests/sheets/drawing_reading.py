"""Reading drawings back: their lettering, and the ground that it covers."""

from __future__ import annotations

import re
from typing import NamedTuple
from xml.etree import ElementTree

from server.sheets.svg import FONT_SIZE, text_width


class Letters(NamedTuple):
    """A line of lettering or a circle, and its box."""

    text: str
    left: float
    top: float
    right: float
    bottom: float


def root(svg: str) -> ElementTree.Element:
    return ElementTree.fromstring(svg)


def texts(svg: str) -> list[str]:
    return ["".join(element.itertext()) for element in root(svg).iter() if element.tag.endswith("}text")]


def letters(svg: str) -> list[Letters]:
    """Boxes of capitals' height about every line of lettering, by the writer's own generous widths."""
    found = []
    for element in root(svg).iter():
        if not element.tag.endswith("}text"):
            continue
        text = "".join(element.itertext())
        size = float(element.get("font-size", FONT_SIZE))
        x, y, width, cap = (
            float(str(element.get("x"))),
            float(str(element.get("y"))),
            text_width(text, size),
            0.72 * size,
        )
        left = {"middle": x - width / 2, "end": x - width}.get(element.get("text-anchor", ""), x)
        if element.get("transform"):
            found.append(Letters(text, x - cap, y - width / 2, x, y + width / 2))
        else:
            found.append(Letters(text, left, y - cap, left + width, y))
    return found


def collisions(boxes: list[Letters]) -> list[tuple[str, str]]:
    return [
        (a.text, b.text)
        for i, a in enumerate(boxes)
        for b in boxes[:i]
        if a.left < b.right - 0.2 and b.left < a.right - 0.2 and a.top < b.bottom - 0.2 and b.top < a.bottom - 0.2
    ]


def outside(svg: str) -> list[Letters]:
    """Lettering that runs over the edge of the drawing."""
    left, top, width, height = (float(n) for n in str(root(svg).get("viewBox")).split())
    return [
        box
        for box in letters(svg)
        if box.left < left - 0.5 or box.right > left + width + 0.5 or box.top < top or box.bottom > top + height
    ]


def polyline(svg: str, name: str) -> list[tuple[float, float]]:
    """The drawn curve of a class, without the strokes from and to the zero line."""
    path = next(element for element in root(svg).iter() if element.get("class") == name)
    inner = re.sub(r"V[\d.]+$", "", str(path.get("d"))).split("L", 1)[1]
    numbers = [float(n) for n in inner.split()]
    return list(zip(numbers[0::2], numbers[1::2], strict=True))
