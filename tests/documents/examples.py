"""A whole member document that every test here starts from, and the two ways tests look at a document."""

from __future__ import annotations

import copy
from collections.abc import Callable
from typing import Any

import pytest

from server import documents
from server.documents import MemberDocument
from server.errors import DocumentError

BOX: dict[str, Any] = {
    "format": "bondwright/1",
    "kind": "member",
    "title": "Box beam over a gate",
    "basis": {
        "method": "allowable",
        "safety_factor": {"adhesive": 3, "fastener": 2.5, "material": {"deal": 2, "ply": 2.2}},
    },
    "materials": {
        "deal": {"E": "11 GPa", "G": 690, "density": 420, "yield": 30, "strengths": {"bending": 24, "shear": 4.0}},
        "ply": {
            "E": 9000,
            "G": 600,
            "density": "600 kg/m3",
            "layered": True,
            "strengths": {"shear": 5, "rolling_shear": "1.2 MPa"},
        },
    },
    "adhesives": {
        "PU": {"shear_strength": "900 psi", "thickness": "0.2 mm", "duration_factors": {"medium-term": 0.8}},
    },
    "fasteners": {"nail": {"shear_resistance": "0.8 kN", "spacing_min": "20 mm", "spacing_max": "150 mm"}},
    "section": {
        "pieces": {
            "bottom": {"shape": "rectangle", "width": "90 mm", "depth": 45, "at": [0, 0], "material": "deal"},
            "top": {"shape": "rectangle", "width": "90 mm", "depth": 45, "at": [0, "255 mm"], "material": "deal"},
            "web L": {"shape": "rectangle", "width": "1/2 in", "depth": 300, "at": ["-1/2 in", 0], "material": "ply"},
            "web R": {"shape": "rectangle", "width": "1/2 in", "depth": 300, "at": [90, 0], "material": "ply"},
        },
        "joints": [
            {"between": ["web L", "bottom"], "adhesive": "PU"},
            {"between": ["web R", "bottom"], "adhesive": "PU", "coverage": "80 %", "width": "40 mm"},
            {"between": ["web L", "top"], "adhesive": "PU", "fastener": "nail", "spacing": 100, "role": "press"},
            {
                "between": ["web R", "top"],
                "fastener": "nail",
                "rows": 2,
                "spacing": [{"from": 0, "to": "2 m", "spacing": 50}, {"from": "2 m", "to": "4.2 m", "spacing": 70}],
            },
        ],
    },
    "member": {
        "length": "4.2 m",
        "supports": [{"at": 0, "kind": "pin"}, {"at": "4.2 m", "kind": "pin"}],
        "deflection_limit": "L/300",
    },
    "loads": {
        "dead": [{"kind": "self-weight"}, {"kind": "line", "from": 0, "to": "4.2 m", "value": "0.5 kN/m"}],
        "snow": [
            {"kind": "line", "from": 0, "to": "4.2 m", "value": ["1 kN/m", "2 kN/m"]},
            {"kind": "point", "at": "2.1 m", "value": "2.5 kN"},
            {"kind": "area", "from": 0, "to": 4200, "value": "125 psf", "width": "4 ft"},
            {"kind": "couple", "at": 0, "value": "1 kNm"},
        ],
    },
    "combinations": {
        "A": {"factors": {"dead": 1.35, "snow": 1.5}, "duration": "medium-term"},
        "B": {"factors": {"dead": 1, "snow": 1}, "for": "deflection", "sustained": {"dead": 1.0, "snow": 0.2}},
    },
}


def changed(change: Callable[[dict[str, Any]], object]) -> dict[str, Any]:
    """A copy of the box beam after ``change``."""
    data = copy.deepcopy(BOX)
    change(data)
    return data


def put(path: str, value: object) -> Callable[[dict[str, Any]], object]:
    """A change that sets one value: put('section/joints/0/role', 'sole')."""

    def change(data: dict[str, Any]) -> None:
        *parents, last = [int(part) if part.isdecimal() else part for part in path.split("/")]
        place: Any = data
        for part in parents:
            place = place[part]
        place[last] = value

    return change


def drop(path: str) -> Callable[[dict[str, Any]], object]:
    """A change that takes one value out."""

    def change(data: dict[str, Any]) -> None:
        *parents, last = [int(part) if part.isdecimal() else part for part in path.split("/")]
        place: Any = data
        for part in parents:
            place = place[part]
        del place[last]

    return change


def read(data: object) -> MemberDocument:
    """The document in ``data``, which must be a member."""
    document = documents.read(data)  # type: ignore[arg-type]
    assert isinstance(document, MemberDocument)
    return document


def faults(data: object) -> dict[str, str]:
    """The faults of a document that must be refused: path -> message."""
    with pytest.raises(DocumentError) as caught:
        documents.read(data)  # type: ignore[arg-type]
    found = caught.value.faults
    for fault in found:
        assert "\n" not in str(fault)
        assert "Traceback" not in str(fault)
        assert "\x00" not in str(fault)
    return {fault.path: fault.message for fault in found}


def only_fault(data: object) -> tuple[str, str]:
    """The one fault of a document."""
    found = faults(data)
    assert len(found) == 1, found
    return next(iter(found.items()))
