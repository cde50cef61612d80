"""Check documents made up for the tests of the checks, and ways to change one value of them."""

from __future__ import annotations

import copy
from collections.abc import Mapping
from typing import Any

from server import checks, documents

Raw = dict[str, Any]

STACK: Raw = {
    "format": "bondwright/1",
    "kind": "member",
    "title": "Two planks",
    "basis": {"method": "allowable", "safety_factor": 2.0},
    "materials": {
        "pine": {
            "E": 10000,
            "G": 625,
            "density": 450,
            "strengths": {"bending": 20, "tension": 12, "compression": 18, "shear": 3},
            "duration_factors": {"long-term": 0.7, "short-term": 0.9},
        }
    },
    "adhesives": {"glue": {"shear_strength": 4, "duration_factors": {"long-term": 0.6, "short-term": 0.9}}},
    "section": {
        "pieces": {
            "lower": {"shape": "rectangle", "width": 100, "depth": 50, "at": [0, 0], "material": "pine"},
            "upper": {"shape": "rectangle", "width": 100, "depth": 50, "at": [0, 50], "material": "pine"},
        },
        "joints": [{"between": ["lower", "upper"], "adhesive": "glue"}],
    },
    "member": {"length": 3000, "supports": [{"at": 0, "kind": "pin"}, {"at": 3000, "kind": "pin"}]},
    "loads": {"live": [{"kind": "line", "from": 0, "to": 3000, "value": 1.2}]},
}

BOX: Raw = {
    "format": "bondwright/1",
    "kind": "member",
    "basis": {"method": "allowable", "safety_factor": {"adhesive": 3, "material": 2.5}},
    "materials": {
        "softwood": {"E": 11000, "G": 690, "density": 420, "strengths": {"bending": 40, "shear": 6}},
        "ply": {
            "E": 6500,
            "G": 600,
            "density": 500,
            "layered": True,
            "strengths": {"bending": 30, "shear": 9, "rolling_shear": 1.28},
        },
    },
    "adhesives": {"resin": {"shear_strength": 6}},
    "section": {
        "pieces": {
            "bottom": {"shape": "rectangle", "width": 90, "depth": 70, "at": [12.5, 0], "material": "softwood"},
            "top": {"shape": "rectangle", "width": 90, "depth": 70, "at": [12.5, 330], "material": "softwood"},
            "left": {"shape": "rectangle", "width": 12.5, "depth": 400, "at": [0, 0], "material": "ply"},
            "right": {"shape": "rectangle", "width": 12.5, "depth": 400, "at": [102.5, 0], "material": "ply"},
        },
        "joints": [
            {"between": [flange, web], "adhesive": "resin"} for flange in ("top", "bottom") for web in ("left", "right")
        ],
    },
    "member": {
        "length": "6 m",
        "supports": [{"at": 0, "kind": "pin"}, {"at": "6 m", "kind": "pin"}],
        "deflection_limit": 250,
    },
    "loads": {
        "roof": [{"kind": "line", "from": 0, "to": "6 m", "value": "4.2 kN/m"}],
        "hoist": [{"kind": "point", "at": "2 m", "value": "3 kN"}],
    },
}


def changed(raw: Mapping[str, Any], **changes: object) -> Raw:
    """A copy with values set by path: ``changed(STACK, materials__pine__E=9000, loads__live__0__value=2)``.

    A value of ``...`` takes the key out.
    """
    made: Raw = copy.deepcopy(dict(raw))
    for path, value in changes.items():
        *way, last = path.split("__")
        place: Any = made
        for step in way:
            place = place[int(step)] if isinstance(place, list) else place.setdefault(step, {})
        if value is ...:
            del place[last]
        elif isinstance(place, list):
            place[int(last)] = value
        else:
            place[last] = value
    return made


def run(raw: Mapping[str, Any], **changes: object) -> dict[str, Any]:
    """The result of a document with some values changed."""
    return checks.run(documents.read(changed(raw, **changes)))
