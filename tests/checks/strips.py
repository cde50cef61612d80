"""Documents of strip ends and of members whose bonds end or move, made up for tests."""

from __future__ import annotations

import copy
from typing import Any

Raw = dict[str, Any]

PLATE: Raw = {
    "format": "bondwright/1",
    "kind": "strip-end",
    "title": "Plate under a beam",
    "basis": {"method": "allowable", "safety_factor": 2.0},
    "materials": {
        "plate": {"E": 100000, "expansion": 1e-6, "strengths": {"shear": 30, "tension_across": 20}},
        "beam": {"E": 30000, "density": 2400, "expansion": 10e-6, "strengths": {"shear": 6, "tension_across": 6}},
    },
    "adhesives": {
        "paste": {
            "shear_modulus": 2000 / 2.7,
            "E": 2000,
            "thickness": 2,
            "shear_yield": 15,
            "peel_strength": 10,
        }
    },
    "strip": {"material": "plate", "width": 200, "thickness": 4, "from": 300, "to": 2700},
    "face": "bottom",
    "host": {"pieces": {"beam": {"shape": "rectangle", "width": 200, "depth": 300, "at": [0, 0], "material": "beam"}}},
    "member": {"length": 3000, "supports": [{"at": 0, "kind": "pin"}, {"at": 3000, "kind": "pin"}]},
    "adhesive": "paste",
    "loads": {"q": [{"kind": "line", "from": 0, "to": 3000, "value": 50}]},
}

# needs.md, demo 3: a steel strip under a mill lintel; block shear and pull-off values of its coupons, factor 3
LINTEL: Raw = {
    "format": "bondwright/1",
    "kind": "member",
    "title": "Steel strip under a mill lintel",
    "basis": {"method": "allowable", "safety_factor": 3.0},
    "materials": {
        "steel": {
            "E": 205000,
            "nu": 0.3,
            "yield": 235,
            "expansion": 12e-6,
            "strengths": {"shear": 135, "bending": 235},
        },
        "timber": {
            "E": 9500,
            "G": 590,
            "expansion": 4e-6,
            "moisture_expansion": 1e-4,
            "strengths": {"bending": 40, "shear": 4, "tension_across": 1.54},
        },
    },
    "adhesives": {
        "E7": {
            "shear_strength": 3.47,
            "peel_strength": 1.54,
            "shear_modulus": 1700,
            "E": 4500,
            "thickness": 1.0,
            "shear_yield": 18,
        }
    },
    "section": {
        "pieces": {
            "strip": {
                **{"shape": "rectangle", "width": 80, "depth": 8, "at": [30, 0], "material": "steel"},
                **{"from": 250, "to": 4550},
            },
            "timber": {"shape": "rectangle", "width": 140, "depth": 240, "at": [0, 8], "material": "timber"},
        },
        "joints": [{"between": ["strip", "timber"], "adhesive": "E7"}],
    },
    "member": {"length": 4800, "supports": [{"at": 0, "kind": "pin"}, {"at": 4800, "kind": "pin"}]},
    "loads": {
        "all": [
            {"kind": "line", "from": 0, "to": 4800, "value": 4.5},
            {"kind": "point", "at": 2400, "value": 7000},
        ]
    },
}

# needs.md, demo 6: aluminium straps on spruce with a stiff, a tough and a rubbery adhesive
GANGWAY_ADHESIVES: Raw = {
    "epoxy": {"shear_modulus": 1200, "E": 3240, "thickness": 0.3, "shear_yield": 25, "peel_strength": 12},
    "methacrylate": {"shear_modulus": 250, "E": 675, "thickness": 1.0, "shear_yield": 14, "peel_strength": 8},
    "polyurethane": {"shear_modulus": 1.2, "E": 3.6, "thickness": 3.0, "shear_yield": 1.5, "peel_strength": 1.5},
}


def gangway(adhesive: str, **service: Any) -> Raw:
    """The stringer with one of its three adhesives; ``service`` on top of the cold night."""
    value = {"shear_strength": 4.5, "glass_transition": 90 if adhesive != "polyurethane" else -40}
    line = GANGWAY_ADHESIVES[adhesive]["thickness"]
    strap = {"shape": "rectangle", "width": 45, "depth": 4, "material": "aluminium"}
    return {
        "format": "bondwright/1",
        "kind": "member",
        "title": "Gangway stringer",
        "basis": {"method": "allowable", "safety_factor": 2.0},
        "materials": {
            "aluminium": {
                "E": 69000,
                "expansion": 23e-6,
                "yield": 150,
                "strengths": {"shear": 86, "bending": 150},
            },
            "spruce": {
                "E": 10500,
                "G": 650,
                "expansion": 4e-6,
                "moisture_expansion": 1e-4,
                "strengths": {"bending": 30, "shear": 6, "tension_across": 1.5},
            },
        },
        "adhesives": {adhesive: GANGWAY_ADHESIVES[adhesive] | value},
        "section": {
            "pieces": {
                "bottom": strap | {"at": [0, -4 - line]},
                "core": {"shape": "rectangle", "width": 45, "depth": 180, "at": [0, 0], "material": "spruce"},
                "top": strap | {"at": [0, 180 + line]},
            },
            "joints": [
                {"between": ["bottom", "core"], "adhesive": adhesive},
                {"between": ["top", "core"], "adhesive": adhesive},
            ],
        },
        "member": {"length": 4200, "supports": [{"at": 0, "kind": "pin"}, {"at": 4200, "kind": "pin"}]},
        "loads": {
            "own": [{"kind": "line", "from": 0, "to": 4200, "value": 1.35}],
            "person": [{"kind": "point", "at": 2100, "value": 1000}],
        },
        "service": {"temperature": [-10, 35], "cure_temperature": 20, **service},
    }


def changed(made: Raw, **changes: Any) -> Raw:
    """A copy with values put at paths such as ``strip__from`` ("__" for a level down); None takes a key out."""
    made = copy.deepcopy(made)
    for path, value in changes.items():
        *way, last = path.split("__")
        at = made
        for key in way:
            at = at[key]
        if value is None:
            at.pop(last, None)
        else:
            at[last] = value
    return made
