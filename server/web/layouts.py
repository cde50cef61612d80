"""What a new check starts from: a layout's pieces and joints in ordinary sizes, and the shop's defaults.

Nothing here is a hidden value: every number stands in a box of the form, and what is folded away is said in words.
Timber starts from EN 338:2016 Table 1, class C24 (SI); plywood and US lumber start without strengths, so that a check
cannot pass before the shop has put in what its own material carries.
"""

from __future__ import annotations

from collections.abc import Mapping

from server import units
from server.errors import InputError
from server.web.form_text import with_unit

LAYOUTS: dict[str, str] = {
    "box": "Box: two flanges, two webs",
    "i": "I: two flanges, one web",
    "tee": "Tee: a rib under a skin",
    "stack": "Stack: layers one on another",
    "empty": "Empty: rows to fill",
}

DEFAULTS: dict[str, str] = {
    "load_case": "imposed",
    "basis.method": "allowable",
    "basis.adhesive": "3",
    "basis.fastener": "2.5",
    "basis.material": "2.5",
    "held_sideways": "yes",
    "deflection_limit": "300",
    "slip": "auto",
    "shear_deformation": "yes",
    "field": "auto",
    "combinations[0].name": "all",
    "combinations[0].duration": "medium-term",
}

_TIMBER = {
    "SI": {
        "name": "timber",
        "kind": "timber",
        "E": "11000",
        "G": "690",
        "bending": "24",
        "shear": "4",
        "density": "420",
        "source": "EN 338:2016 Table 1, class C24",
    },
    "US": {
        "name": "timber",
        "kind": "timber",
        "E": "1400000",
        "G": "87500",
        "density": "30",
        "source": "ordinary softwood lumber, common practice (G = E/16); put in your own",
    },
}
_PLYWOOD = {
    "SI": {
        "name": "plywood",
        "kind": "plywood",
        "E": "6500",
        "G": "600",
        "density": "520",
        "layered": "yes",
        "source": "ordinary softwood plywood, common practice; put in your own panel's values",
    },
    "US": {
        "name": "plywood",
        "kind": "plywood",
        "E": "1200000",
        "G": "87000",
        "density": "34",
        "layered": "yes",
        "source": "ordinary softwood plywood, common practice; put in your own panel's values",
    },
}

Sizes = tuple[str, str, str, str, str, str]  # name, width, depth, across, up, material
_PIECES: dict[str, dict[str, tuple[Sizes, ...]]] = {
    "SI": {
        "box": (
            ("bottom flange", "90", "70", "12.5", "0", "timber"),
            ("top flange", "90", "70", "12.5", "330", "timber"),
            ("web L", "12.5", "400", "0", "0", "plywood"),
            ("web R", "12.5", "400", "102.5", "0", "plywood"),
        ),
        "i": (
            ("bottom flange", "90", "45", "0", "0", "timber"),
            ("web", "18", "260", "36", "45", "plywood"),
            ("top flange", "90", "45", "0", "305", "timber"),
        ),
        "tee": (
            ("rib", "45", "195", "127.5", "0", "timber"),
            ("skin", "300", "18", "0", "195", "plywood"),
        ),
        "stack": (
            ("lower", "90", "45", "0", "0", "timber"),
            ("middle", "90", "45", "0", "45", "timber"),
            ("upper", "90", "45", "0", "90", "timber"),
        ),
    },
    "US": {
        "box": (
            ("bottom flange", "3.5", "3", "0.469", "0", "timber"),
            ("top flange", "3.5", "3", "0.469", "13", "timber"),
            ("web L", "0.469", "16", "0", "0", "plywood"),
            ("web R", "0.469", "16", "3.969", "0", "plywood"),
        ),
        "i": (
            ("bottom flange", "3.5", "1.5", "0", "0", "timber"),
            ("web", "0.703", "10", "1.3985", "1.5", "plywood"),
            ("top flange", "3.5", "1.5", "0", "11.5", "timber"),
        ),
        "tee": (
            ("rib", "1.5", "7.25", "5.25", "0", "timber"),
            ("skin", "12", "0.703", "0", "7.25", "plywood"),
        ),
        "stack": (
            ("lower", "3.5", "1.5", "0", "0", "timber"),
            ("middle", "3.5", "1.5", "0", "1.5", "timber"),
            ("upper", "3.5", "1.5", "0", "3", "timber"),
        ),
    },
}
_JOINTS: dict[str, tuple[tuple[str, str], ...]] = {
    "box": (
        ("top flange", "web L"),
        ("top flange", "web R"),
        ("bottom flange", "web L"),
        ("bottom flange", "web R"),
    ),
    "i": (("web", "top flange"), ("web", "bottom flange")),
    "tee": (("skin", "rib"),),
    "stack": (("lower", "middle"), ("middle", "upper")),
}


def start(layout: str, system: str) -> dict[str, str]:
    """Return the form's boxes for a new check: ``layout`` is one of LAYOUTS, ``system`` is 'SI' or 'US'."""
    values = {"units": system, "display": system, "layout": layout, **DEFAULTS}
    pieces = _PIECES[system].get(layout, ())
    for index, sizes in enumerate(pieces):
        for name, text in zip(("name", "width", "depth", "across", "up", "material"), sizes, strict=True):
            values[f"pieces[{index}].{name}"] = text
    for index, (first, second) in enumerate(_JOINTS.get(layout, ())):
        values |= {
            f"joints[{index}].first": first,
            f"joints[{index}].second": second,
            f"joints[{index}].adhesive": "glue",
        }
    values["adhesives[0].name"] = "glue"
    used = {sizes[-1] for sizes in pieces} or {"timber"}
    for index, material in enumerate(kind for kind in (_TIMBER, _PLYWOOD) if kind[system]["name"] in used):
        values |= {f"materials[{index}].{name}": text for name, text in material[system].items()}
    return values


def set_out(values: Mapping[str, str]) -> dict[str, str] | None:
    """Return the boxes that place a layout's pieces from their sizes; None where its own pieces are not all there.

    Pieces are known by the names the layout gave them. A size that cannot be read leaves every place as typed.
    """
    layout, system = values.get("layout", ""), "US" if values.get("units") == "US" else "SI"
    rows = _rows_by_name(values)
    names = [sizes[0] for sizes in _PIECES[system].get(layout, ())]
    if not names or not set(names) <= rows.keys():
        return None
    sizes = {}
    for name in names:
        try:
            sizes[name] = tuple(
                _size(values.get(f"pieces[{rows[name]}].{side}", ""), system) for side in ("width", "depth")
            )
        except InputError:
            return {}
    factor = 25.4 if system == "US" else 1.0
    placed: dict[str, str] = {}
    for name, (across, up) in _places(layout, names, sizes).items():
        placed[f"pieces[{rows[name]}].across"] = f"{round(across / factor, 4):g}"
        placed[f"pieces[{rows[name]}].up"] = f"{round(up / factor, 4):g}"
    return placed


def _rows_by_name(values: Mapping[str, str]) -> dict[str, str]:
    return {
        text.strip(): name[len("pieces[") : -len("].name")]
        for name, text in values.items()
        if name.startswith("pieces[") and name.endswith("].name")
    }


def _size(text: str, system: str) -> float:
    """Return a size in mm; a bare number is in the unit of its box."""
    return units.parse("size", with_unit(text, "size", system), "length")


def _places(layout: str, names: list[str], sizes: Mapping[str, tuple[float, ...]]) -> dict[str, tuple[float, float]]:
    """Return where each piece stands: a stack is centred; the box's webs stand outside its flanges."""
    if layout == "box":
        bottom, top, left, right = names
        thick, wide = sizes[left][0], sizes[bottom][0]
        return {
            left: (0.0, 0.0),
            bottom: (thick, 0.0),
            top: (thick, sizes[left][1] - sizes[top][1]),
            right: (thick + wide, 0.0),
        }
    widest = max(sizes[name][0] for name in names)
    found, up = {}, 0.0
    for name in names:
        found[name] = ((widest - sizes[name][0]) / 2, up)
        up += sizes[name][1]
    return found
