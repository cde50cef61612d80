"""Random member documents for properties that must hold for any member: stacks of layers, and boxes."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st

Raw = dict[str, Any]

LAYOUTS: list[list[tuple[float, str]]] = [
    [(0.0, "pin"), (1.0, "pin")],
    [(0.0, "fixed")],
    [(0.1, "pin"), (0.75, "pin")],
    [(0.0, "fixed"), (0.6, "pin")],
    [(0.0, "pin"), (0.45, "spring"), (1.0, "pin")],
    [(0.0, "pin"), (0.3, "pin"), (0.7, "pin"), (0.95, "spring")],
]
"""Places of the supports as parts of the length, with their kinds."""


def _about(low: float, high: float, step: float) -> st.SearchStrategy[float]:
    """Numbers a person might type: whole steps between two bounds."""
    return st.integers(round(low / step), round(high / step)).map(lambda n: round(n * step, 6))


@st.composite
def materials(draw: st.DrawFn) -> Raw:
    E = draw(st.sampled_from([4000.0, 9500.0, 12000.0, 70000.0]))
    return {
        "E": E, "G": draw(st.sampled_from([E / 16, E / 2.6])), "density": draw(_about(300, 2700, 50)),
        "creep": draw(st.sampled_from([0.0, 0.6, 2.0])), "layered": draw(st.booleans()),
        "strengths": {"bending": 24.0, "tension": 14.0, "compression": 20.0, "shear": 5.0, "rolling_shear": 1.5},
        "duration_factors": {"short": 0.9, "long": 0.6},
    }  # fmt: skip


@st.composite
def stacks(draw: st.DrawFn) -> Raw:
    """Layers on each other, none wholly beside the one below."""
    pieces: Raw = {}
    joints: list[Raw] = []
    up = 0.0
    for n in range(draw(st.integers(2, 4))):
        depth = draw(_about(12, 120, 0.5))
        pieces[f"layer {n}"] = {
            "shape": "rectangle", "width": draw(_about(40, 160, 1)), "depth": depth, "at": [draw(_about(0, 30, 1)), up],
            "material": draw(st.sampled_from("ab")), "grain": draw(st.sampled_from(["along", "along", "across"])),
        }  # fmt: skip
        up += depth
        if n:
            pair = [f"layer {n - 1}", f"layer {n}"]
            joints.append({"between": pair, "adhesive": "glue", "coverage": draw(st.sampled_from([1.0, 0.8]))})
    return {"pieces": pieces, "joints": joints}


@st.composite
def boxes(draw: st.DrawFn) -> Raw:
    """Two flanges between two like webs."""
    width, web, depth = draw(_about(40, 120, 1)), draw(_about(9, 30, 0.5)), draw(_about(150, 400, 5))
    low, high = draw(_about(30, 70, 1)), draw(_about(30, 70, 1))
    sides = {"left": 0.0, "right": web + width}
    pieces: Raw = {
        name: {"shape": "rectangle", "width": web, "depth": depth, "at": [across, 0.0], "material": "b"}
        for name, across in sides.items()
    }
    for name, thick, at in (("top", high, depth - high), ("bottom", low, 0.0)):
        pieces[name] = {"shape": "rectangle", "width": width, "depth": thick, "at": [web, at], "material": "a"}
    pairs = [[flange, side] for flange in ("top", "bottom") for side in sides]
    return {"pieces": pieces, "joints": [{"between": pair, "adhesive": "glue"} for pair in pairs]}


@st.composite
def cases(draw: st.DrawFn, length: float) -> list[Raw]:
    places = st.integers(0, 20).map(lambda n: round(n * length / 20, 6))
    found: list[Raw] = []
    for kind in draw(st.lists(st.sampled_from(["point", "line", "couple"]), min_size=1, max_size=3)):
        if kind == "line":
            start, end = sorted(draw(st.lists(places, min_size=2, max_size=2, unique=True)))
            values = [draw(_about(-2, 4, 0.25)), draw(_about(-2, 4, 0.25))]
            found.append({"kind": "line", "from": start, "to": end, "value": values})
        else:
            size = 1e3 if kind == "point" else 1e6
            found.append({"kind": kind, "at": draw(places), "value": draw(_about(-3, 5, 0.25)) * size})
    return found


@st.composite
def members(draw: st.DrawFn, sections: st.SearchStrategy[Raw] | None = None) -> Raw:
    """A whole document with two cases, a combination for each purpose and duration."""
    length = draw(_about(1500, 9000, 100))
    supports: list[Raw] = []
    for part, kind in draw(st.sampled_from(LAYOUTS)):
        supports.append({"at": round(part * length, 6), "kind": kind})
        if kind == "spring":
            supports[-1]["stiffness"] = draw(_about(200, 4000, 100))
    return {
        "format": "bondwright/1", "kind": "member",
        "basis": {"method": "allowable", "safety_factor": {"adhesive": 3.0, "material": 2.0}},
        "materials": {"a": draw(materials()), "b": draw(materials())},
        "adhesives": {"glue": {"shear_strength": 5.0, "duration_factors": {"short": 0.9, "long": 0.5}}},
        "section": draw(sections if sections is not None else st.one_of(stacks(), boxes())),
        "member": {"length": length, "supports": supports, "deflection_limit": 250},
        "loads": {"one": draw(cases(length)), "two": draw(cases(length))},
        "combinations": {
            "short": {"factors": {"one": 1.35, "two": 1.5}, "duration": "short"},
            "long": {"factors": {"one": 1.0}, "duration": "long", "sustained": {"one": 0.7}},
        },
    }  # fmt: skip
