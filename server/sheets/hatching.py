"""Hatching of cut pieces by material kind, as in ISO 128-3 (general hatching) and drafting practice.

Timber shows its end grain, plywood its layers (every second one across), steel paired and aluminium solid-and-broken
lines at 45 degrees, fibre composites a net, cores small cells, anything else plain 45 degree lines. Touching pieces
of one metal are hatched in opposite directions. The sorts for wood and metals are common practice, not a published
rule, so the drawing's own key names the material of every sort and nothing rests on the hatching alone.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from math import hypot

from server.sheets.svg import Drawing, polygon

# The first word found in the material's kind decides; layered wood stands before wood.
_WORDS: tuple[tuple[str, str], ...] = tuple(
    (word, sort)
    for sort, words in (
        ("layers", "plywood ply lvl osb clt veneer"),
        ("board", "mdf hardboard particle fibreboard fiberboard"),
        ("pairs", "steel stainless iron"),
        ("net", "gfrp cfrp frp grp glass composite carbon laminate plastic"),
        ("cells", "foam core balsa honeycomb cork insulation"),
        ("broken", "alumin"),
        ("plain", "metal brass bronze copper"),
        ("stones", "concrete mortar screed"),
        ("rings", "timber wood glulam lumber spruce pine oak fir larch beech"),
    )
    for word in words.split()
)

# Tiles: size, then strokes. Lines keep clear of the tile's edge, where half of a stroke would be cut off.
_TILES = {
    "plain": (6, 6, '<path d="M0 3H6"/>'),
    "pairs": (6, 8, '<path d="M0 2H6M0 4.2H6"/>'),
    "broken": (12, 8, '<path d="M0 2H12M1 6H8"/>'),
    "net": (5, 5, '<path d="M0 2.5H5M2.5 0V5"/>'),
    "cells": (
        13,
        13,
        '<circle cx="3" cy="3" r="1.5"/><circle cx="9.2" cy="5.2" r="2"/><circle cx="4.6" cy="9.8" r="1.9"/>'
        '<circle cx="11" cy="11" r="1"/>',
    ),
    "stones": (
        18,
        18,
        '<path d="M4 4l4-2 1 4zM11 13l4 1-3 2z"/><path d="M14 5h.6M3 13h.6M8 10h.6M16 9h.6M7 16h.6" stroke-width="1"/>',
    ),
    "board": (9, 9, '<path d="M1 2h2M5.5 4h1M2.5 6.5h1M6.5 7.5h2"/>'),
    "layers": (4, 9, '<path d="M0 1H4M0 5.5H4M2 1V5.5"/>'),
}
_TURNED = ("plain", "pairs", "broken", "net")


@lru_cache(maxsize=512)
def sort_of(kind: str | None) -> str:
    """The hatching sort for a material's kind as typed; unknown kinds are hatched as any solid."""
    words = (kind or "").lower()
    return next((sort for word, sort in _WORDS if word in words), "plain")


def hatch(
    drawing: Drawing,
    outline: Sequence[Sequence[float]],
    holes: Sequence[Sequence[Sequence[float]]],
    kind: str | None,
    variant: int,
) -> None:
    """Draw one cut piece, outline in pixels: white ground, hatching, thin outline.

    ``variant`` (0 or 1) turns the hatching, so that neighbours differ.
    """
    data = polygon(outline) + "".join(polygon(hole) for hole in holes)
    xs = [point[0] for point in outline]
    ys = [point[1] for point in outline]
    left, top, right, bottom = min(xs), min(ys), max(xs), max(ys)
    sort = sort_of(kind)
    if sort == "layers" and len(outline) == 4 and not holes:
        drawing.under.append(f'<path d="{data}" fill="#fff" stroke="none"/>')
        _layers(drawing, outline)
    elif min(right - left, bottom - top) < 2.5:
        drawing.under.append(f'<path d="{data}" fill="#999" fill-rule="evenodd" stroke="none"/>')
    elif sort == "rings":
        _rings(drawing, data, left, top, right, bottom, variant)
    else:
        tall = sort == "layers" and bottom - top > right - left
        fill = _tile(drawing, sort, variant or int(tall))
        drawing.under.append(
            f'<path d="{data}" fill="#fff" fill-rule="evenodd" stroke="none"/>'
            f'<path d="{data}" fill="url(#~{fill})" fill-rule="evenodd" stroke="none"/>'
        )
    drawing.pen("outline").append(data)


def _tile(drawing: Drawing, sort: str, variant: int) -> str:
    """Define the tile of a sort once; return its id."""
    name = f"{sort}{variant}"
    width, height, strokes = _TILES[sort]
    turn = 45 if sort in _TURNED else 0
    if variant:
        turn = {"net": 20, "layers": 90}.get(sort, -45 if sort in _TURNED else 0)
    place = f' patternTransform="rotate({turn})"' if turn else ""
    definition = (
        f'<pattern id="~{name}" width="{width}" height="{height}" patternUnits="userSpaceOnUse"{place}>'
        f'<g fill="none" stroke="#111" stroke-width=".5">{strokes}</g></pattern>'
    )
    if definition not in drawing.defs:
        drawing.defs.append(definition)
    return name


def _rings(drawing: Drawing, data: str, left: float, top: float, right: float, bottom: float, variant: int) -> None:
    """End grain: arcs about a pith outside the piece, below it or (variant 1) above."""
    width, height = right - left, bottom - top
    short = min(width, height)
    away = 0.3 * short + 4
    pith_x = left + width * (0.38 if variant else 0.62)
    pith_y = top - away if variant else bottom + away
    reach = hypot(max(pith_x - left, right - pith_x), height + away)
    step = max(6.0, (reach - away) / 20)
    sweep = 0 if variant else 1
    # Half circles. A radius written a little short is stretched to the chord; a little long, it would move the centre.
    arcs = []
    radius = away + 0.5 * step
    while radius < reach:
        arcs.append(
            f"M{pith_x - radius:.1f} {pith_y:.1f}a{radius - 0.1:.1f} {radius - 0.1:.1f} 0 0 {sweep} {2 * radius:.1f} 0"
        )
        radius += step
    name = f"r{len(drawing.defs)}"
    drawing.defs.append(f'<clipPath id="~{name}"><path d="{data}" clip-rule="evenodd"/></clipPath>')
    drawing.under.append(
        f'<path d="{data}" fill="#fff" fill-rule="evenodd" stroke="none"/>'
        f'<path d="{"".join(arcs)}" clip-path="url(#~{name})" stroke-width=".5"/>'
    )


def _layers(drawing: Drawing, outline: Sequence[Sequence[float]]) -> None:
    """Plies of a rectangular panel along its longer side; every second ply shows its end grain as short strokes."""
    (x0, y0), (x1, y1), (x2, y2) = outline[0], outline[1], outline[2]
    if hypot(x1 - x0, y1 - y0) < hypot(x2 - x1, y2 - y1):
        (x0, y0), (x1, y1), (x2, y2) = outline[1], outline[2], outline[3]
    across_x, across_y = x2 - x1, y2 - y1
    thickness = hypot(across_x, across_y)
    plies = 1 if thickness < 4 else 3 if thickness < 15 else 5 if thickness < 32 else 7 if thickness < 70 else 9

    def along(share: float) -> str:
        dx, dy = across_x * share, across_y * share
        return f"M{x0 + dx:.1f} {y0 + dy:.1f}L{x1 + dx:.1f} {y1 + dy:.1f}"

    ply = thickness / plies
    crossed = "".join(along((i + 0.5) / plies) for i in (range(1, plies, 2) if plies > 1 else (0,)))
    drawing.under.append(
        f'<path d="{crossed}" stroke-width="{ply:.1f}" stroke-dasharray=".5 {3.2 if ply < 8 else 4.5}"/>'
    )
    if plies > 1:
        lines = "".join(along(i / plies) for i in range(1, plies))
        drawing.under.append(f'<path d="{lines}" stroke-width=".4"/>')
