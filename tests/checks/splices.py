"""Splice documents made up for tests: aluminium, steel and timber, one epoxy."""

from __future__ import annotations

import copy
from typing import Any

from server import checks, documents

Raw = dict[str, Any]

LAP: Raw = {
    "format": "bondwright/1",
    "kind": "splice",
    "title": "Lap of two sheets",
    "basis": {"method": "allowable", "safety_factor": 2.0},
    "materials": {
        "aluminium": {"E": 70000, "nu": 0.33, "G": 26300, "yield": 240, "expansion": 23e-6},
        "steel": {"E": 210000, "nu": 0.3, "yield": 355, "expansion": 12e-6},
        "spruce": {
            "E": 11000,
            "expansion": 4e-6,
            "moisture_expansion": 1e-4,
            "strengths": {"tension": 18, "shear": 6, "rolling_shear": 1.5, "tension_across": 1.8},
        },
    },
    "adhesives": {
        "epoxy": {
            "shear_strength": 22,
            "shear_yield": 30,
            "shear_strain_limit": 0.5,
            "peel_strength": 40,
            "shear_modulus": 1000,
            "E": 2700,
            "thickness": 0.2,
        }
    },
    "layout": "single-lap",
    "adherends": {
        "inner": {"material": "aluminium", "thickness": 1.62},
        "outer": {"material": "aluminium", "thickness": 1.62},
    },
    "width": 25,
    "overlap": 12.7,
    "adhesive": "epoxy",
    "load": {"axial": "1.2 kN"},
}


def lap(**changes: Any) -> Raw:
    """The lap with other keys on top; None takes a key out; ``epoxy`` changes the adhesive."""
    made = copy.deepcopy(LAP)
    made["adhesives"]["epoxy"] |= changes.pop("epoxy", {})
    made["adhesives"]["epoxy"] = {k: v for k, v in made["adhesives"]["epoxy"].items() if v is not None}
    made |= changes
    return {key: value for key, value in made.items() if value is not None}


def sides(inner: str, outer: str, *thickness: float) -> Raw:
    """Adherends of two materials."""
    thick = thickness or (1.62, 1.62)
    return {
        name: {"material": material, "thickness": t}
        for name, material, t in zip(("inner", "outer"), (inner, outer), thick, strict=True)
    }


SHAPES: dict[str, Raw] = {
    "single-lap": {},
    "double-lap": {"layout": "double-lap"},
    "strap": {"layout": "strap"},
    "double-strap": {"layout": "double-strap"},
    "scarf": {"layout": "scarf", "slope": 8, "overlap": None},
    "tube-lap": {"layout": "tube-lap", "diameter": 25, "width": None},
}


def run(**changes: Any) -> dict[str, Any]:
    """The result of the lap with changes."""
    return checks.run(documents.read(lap(**changes)))
