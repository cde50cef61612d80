"""A splice from the side, to scale, with the stress along its bond plotted below it at the same places."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from server.sheets import drafting
from server.sheets.bond_plot import stress_plot
from server.sheets.hatching import hatch
from server.sheets.plotting import Axis
from server.sheets.svg import Drawing, shorten
from server.sheets.values import quantity

LEFT, RIGHT = 120.0, 520.0
STUB = 64.0
THICKEST, THINNEST = 46.0, 5.0
Point = tuple[float, float]
NAMES = {
    "single-lap": ("inner", "outer"),
    "double-lap": ("middle plate", "outer plates"),
    "strap": ("main plates", "strap"),
    "double-strap": ("main plates", "straps"),
    "scarf": ("inner", "outer"),
    "tube-lap": ("inner tube", "outer tube"),
}


def splice_svg(result: Mapping[str, Any], *, display: str = "SI", width: float = 640.0) -> str:
    """Draw the joint with its stresses; "" for a result without a drawing."""
    picture = result.get("drawing")
    if not picture:
        return ""
    drawing = Drawing(width)
    x = Axis(0.0, picture["length"], LEFT, RIGHT)
    per_mm = (RIGHT - LEFT) / picture["length"]
    sizes = [each["thickness"] for each in picture["adherends"]]
    scale = min(per_mm, THICKEST / max(sizes))
    thick = [max(size * scale, THINNEST) for size in sizes]
    layout = picture["layout"]
    foot = _joint(drawing, picture, thick, 34.0)
    _loads(drawing, picture, thick, 34.0, display)
    _names(drawing, picture, display)
    chain = drafting.Chain((LEFT, RIGHT), ((0.5 * (LEFT + RIGHT), quantity(picture["length"], "mm", display)),))
    drafting.dimension_across(drawing, foot + 14, chain)
    y = foot + 36
    note = "" if abs(scale - per_mm) < 1e-9 * per_mm and min(thick) > THINNEST else "; thicknesses not to scale"
    distribution = result.get("distribution") or {}
    if distribution.get("at"):
        y = stress_plot(
            drawing, x, y + 10, distribution, display=display, mean=result.get("mean_shear"),
            limits=_limits(result),
        )  # fmt: skip
    drawing.height = y + 6
    words = f"{layout.replace('-', ' ')} of {quantity(picture['length'], 'mm', display)}{note}"
    return drawing.svg(f"splice {layout}", "The joint and the stress along its bond", f"Side view of a {words}.")


def _limits(result: Mapping[str, Any]) -> dict[str, float]:
    """What the shear may reach, for a line in the plot."""
    own = [e["resistance"] for e in result.get("limits", ()) if str(e.get("what", "")).endswith("shear yield")]
    return {"shear limit": own[0]} if own else {}


def _joint(drawing: Drawing, picture: Mapping[str, Any], thick: Sequence[float], top: float) -> float:
    """The pieces and bond lines; returns where they end below."""
    layout, inner, outer = picture["layout"], thick[0], thick[1]
    kinds = [each["kind"] for each in picture["adherends"]]
    gap = 2.8  # a bond line as drawn
    tapers = [_taper(each) for each in picture["adherends"]]
    if layout == "scarf":
        return _scarf(drawing, kinds, inner, top, tapers[0][1])
    per_mm = (RIGHT - LEFT) / picture["length"]
    ends = [(length * per_mm, tip * size) for (length, tip), size in zip(tapers, thick, strict=True)]
    double = layout in ("double-lap", "double-strap")
    straps = layout in ("strap", "double-strap")
    y = top
    _outer(drawing, (y, y + outer), ends[1], kinds[1])
    _bond(drawing, y + outer + gap / 2)
    y += outer + gap
    reach, tip = ends[0]
    outline = [(LEFT - STUB, y), (RIGHT, y), (RIGHT, y + tip), (RIGHT - reach, y + inner), (LEFT - STUB, y + inner)]
    _piece(drawing, outline, kinds[0], 0)
    if straps:
        _box(drawing, RIGHT + 3, RIGHT + STUB, y, y + inner, kinds[0], 0)
        drawing.line("bond", RIGHT + 3, y - gap / 2, RIGHT + STUB, y - gap / 2)
    y += inner
    if double:
        _bond(drawing, y + gap / 2)
        if straps:
            drawing.line("bond", RIGHT + 3, y + gap / 2, RIGHT + STUB, y + gap / 2)
        _outer(drawing, (y + gap + outer, y + gap), ends[1], kinds[1])
        y += gap + outer
    if layout == "tube-lap":
        drawing.line("axis", LEFT - STUB - 8, y + 12, RIGHT + STUB + 8, y + 12)
        y += 16
    _breaks(drawing, top, y)
    return y


def _taper(each: Mapping[str, Any]) -> tuple[float, float]:
    """Length of an adherend's taper [mm], and its tip over its thickness; 0 and 1 where it is even."""
    tip = float(each.get("tip") or 0.0)
    return float(each.get("taper") or 0.0), tip / each["thickness"] if tip else 1.0


def _outer(drawing: Drawing, levels: tuple[float, float], end: tuple[float, float], kind: str) -> None:
    """An outer plate between its outer and its bonded face; its free end, at the left, may thin on the outer one."""
    (outside, bonded), (reach, tip) = levels, end
    thin = bonded + (outside - bonded) * tip / abs(outside - bonded)
    right = RIGHT + STUB
    outline = [(LEFT, thin), (LEFT + reach, outside), (right, outside), (right, bonded), (LEFT, bonded)]
    _piece(drawing, outline if outside < bonded else outline[::-1], kind, 1)


def _scarf(drawing: Drawing, kinds: Sequence[str], thick: float, top: float, tip: float) -> float:
    low = top + thick
    blunt = tip * thick if tip < 1 else 0.0
    upper, lower = top + blunt, low - blunt  # where the slope begins and ends
    inner = [(LEFT - STUB, top), (LEFT, top), (LEFT, upper), (RIGHT, lower), (RIGHT, low), (LEFT - STUB, low)]
    outer = [(LEFT, top), (RIGHT + STUB, top), (RIGHT + STUB, low), (RIGHT, low), (RIGHT, lower), (LEFT, upper)]
    _piece(drawing, inner, kinds[0], 0)
    _piece(drawing, outer, kinds[1], 1)
    drawing.line("bond", LEFT, upper, RIGHT, lower)
    return low


def _box(drawing: Drawing, left: float, right: float, top: float, bottom: float, kind: str, variant: int) -> None:
    _piece(drawing, [(left, top), (right, top), (right, bottom), (left, bottom)], kind, variant)


def _piece(drawing: Drawing, outline: Sequence[Point], kind: str, variant: int) -> None:
    hatch(drawing, outline, (), kind, variant)


def _bond(drawing: Drawing, y: float) -> None:
    drawing.line("bond", LEFT, y, RIGHT, y)


def _breaks(drawing: Drawing, top: float, bottom: float) -> None:
    """Where pieces run on beyond the drawing, at the far ends of those that do."""
    for x in (LEFT - STUB, RIGHT + STUB):
        drawing.pen("gap").append(f"M{x:.1f} {top - 2:.1f}V{bottom + 2:.1f}")


def _loads(drawing: Drawing, picture: Mapping[str, Any], thick: Sequence[float], top: float, display: str) -> None:
    load, layout = picture["load"], picture["layout"]
    inner, outer = thick
    middle = top + (inner / 2 if layout == "scarf" else outer + 2.8 + inner / 2)
    right = middle
    if layout in ("single-lap", "tube-lap"):
        right = top + outer / 2
    axial = float(load["axial"])
    words = []
    if axial:
        words.append(quantity(abs(axial), "N", display) + (" pull" if axial > 0 else " push"))
        for x, y, side in ((LEFT - STUB - 8, middle, -1.0), (RIGHT + STUB + 8, right, 1.0)):
            tail, tip = (x, x + side * 30) if axial > 0 else (x + side * 30, x)
            drawing.line("outline", tail, y, tip, y)
            drawing.arrow(tip, y, 1.0 if tip > tail else -1.0, 0.0)
    for name, stored, title in (("moment", "N*mm", "moment"), ("shear", "N", "shear"), ("torque", "N*mm", "torque")):
        if load[name]:
            words.append(f"{title} {quantity(load[name], stored, display)}")
    if load["temperature_change"]:
        words.append(f"{load['temperature_change']:+g} K")
    drawing.text(drawing.width / 2, 14, shorten(", ".join(words), drawing.width - 20), "middle", bold=True)


def _names(drawing: Drawing, picture: Mapping[str, Any], display: str) -> None:
    names = NAMES[picture["layout"]]
    texts = [
        f"{name}: {'' if each['material'] == each['id'] else each['material'] + ', '}"
        f"{quantity(each['thickness'], 'mm', display)}"
        for name, each in zip(names, picture["adherends"], strict=True)
    ]
    drawing.text(8, 28, shorten(texts[0], 300))
    drawing.text(drawing.width - 8, 28, shorten(texts[1], 300), "end")
