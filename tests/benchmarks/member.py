"""The member that the benchmarks check: 5 pieces, 4 joints, 10 loads, 3 combinations, all by clean cuts."""

from __future__ import annotations

from typing import Any

_PINE = {
    "E": 11000, "G": 690, "density": 420, "creep": 0.6,
    "strengths": {"bending": 40, "tension": 30, "compression": 35, "shear": 4},
    "duration_factors": {"medium-term": 0.8, "short-term": 0.9},
}  # fmt: skip
_STEEL = {"E": 205000, "G": 79000, "density": 7850, "strengths": {"bending": 235, "shear": 135}}
_GLUE = {"shear_strength": 5, "thickness": 0.2, "duration_factors": {"medium-term": 0.8, "short-term": 0.9}}

MEMBER: dict[str, Any] = {
    "format": "bondwright/1",
    "kind": "member",
    "title": "Benchmark",
    "basis": {"method": "allowable", "safety_factor": {"adhesive": 3, "material": 2}},
    "materials": {"pine": _PINE, "steel": _STEEL},
    "adhesives": {"glue": _GLUE},
    "section": {
        "pieces": {
            "web": {"shape": "rectangle", "width": 60, "depth": 240, "at": [40, 0], "material": "pine"},
            "left ledge": {"shape": "rectangle", "width": 40, "depth": 45, "at": [0, 0], "material": "pine"},
            "right ledge": {"shape": "rectangle", "width": 40, "depth": 45, "at": [100, 0], "material": "pine"},
            "strip": {"shape": "rectangle", "width": 60, "depth": 5, "at": [40, -5], "material": "steel"},
            "cap": {"shape": "rectangle", "width": 120, "depth": 45, "at": [10, 240], "material": "pine"},
        },
        "joints": [{"between": ["web", name], "adhesive": "glue"}
                   for name in ("left ledge", "right ledge", "strip", "cap")],
    },
    "member": {
        "length": 6000,
        "supports": [{"at": 0, "kind": "pin"}, {"at": 4500, "kind": "pin"}],
        "deflection_limit": 250,
    },
    "loads": {
        "own": [{"kind": "self-weight"}, {"kind": "line", "from": 0, "to": 6000, "value": 0.4}],
        "roof": [
            {"kind": "line", "from": 0, "to": 4500, "value": 1.1},
            {"kind": "line", "from": 4500, "to": 6000, "value": [1.1, 0.4]},
            {"kind": "point", "at": 1500, "value": 900},
            {"kind": "point", "at": 3000, "value": 900},
        ],
        "hoist": [
            {"kind": "point", "at": 2000, "value": 1500},
            {"kind": "point", "at": 6000, "value": 300},
            {"kind": "couple", "at": 4000, "value": 2e5},
            {"kind": "area", "from": 1000, "to": 2500, "value": 0.0005, "width": 600},
        ],
    },
    "combinations": {
        "lasting": {"factors": {"own": 1.0, "roof": 0.6}, "duration": "medium-term", "sustained": {"own": 1.0}},
        "roof": {"factors": {"own": 1.0, "roof": 1.0}, "duration": "short-term", "sustained": {"own": 1.0}},
        "all": {"factors": {"own": 1.0, "roof": 1.0, "hoist": 1.0}, "duration": "short-term"},
    },
}  # fmt: skip
