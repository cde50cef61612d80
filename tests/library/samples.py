"""Invented records and a document that refers to them."""

from __future__ import annotations

import copy
from typing import Any

from server import library
from server.library import Record
from server.storage import Session

BOND_VALUES = {"shear_strength": "4.2 MPa", "duration_factors": {"long-term": 0.6}}
SOURCE = "test report T-17 (invented)"
APPROVER = "A. Invented"


def add_bond(session: Session, status: str = "approved", **more: Any) -> Record:
    fields: dict[str, Any] = {
        "group": "bonds",
        "name": "Grünleim 7 on spruce",
        "values": BOND_VALUES,
        "source": SOURCE,
        "status": status,
        "details": {"product": "Grünleim 7", "surface_a_material": "spruce", "test_method": "lap coupons, EN 302-1"},
    }
    return put(session, **(fields | more))


def put(session: Session, *, status: str = "draft", **fields: Any) -> Record:
    """Add a record of the status wanted; an approval is an invented one."""
    if status != "approved":
        return library.add(session, status=status, **fields)
    return approve(session, library.add(session, **fields))


def change(session: Session, key: str, *, status: str | None = None, **fields: Any) -> Record:
    """Edit a record into the status wanted; an approval is an invented one."""
    if status != "approved":
        return library.edit(session, key, status=status, **fields)
    return approve(session, library.edit(session, key, status="draft", **fields))


def approve(session: Session, record: Record) -> Record:
    """Let an invented person approve a revision."""
    return library.approve_invented(session, record.key, who=APPROVER, revision=record.revision)


DOCUMENT: dict[str, Any] = {
    "format": "bondwright/1",
    "kind": "member",
    "title": "Two planks",
    "basis": {"method": "allowable", "safety_factor": 2.5},
    "materials": {"spruce": {"E": 11000, "G": 690, "strengths": {"bending": 24, "shear": 4}}},
    "adhesives": {"glue": {"record": "B-001"}},
    "section": {
        "pieces": {
            "lower": {"shape": "rectangle", "width": 100, "depth": 40, "at": [0, 0], "material": "spruce"},
            "upper": {"shape": "rectangle", "width": 100, "depth": 40, "at": [0, 40], "material": "spruce"},
        },
        "joints": [{"between": ["lower", "upper"], "adhesive": "glue"}],
    },
    "member": {"length": "3 m", "supports": [{"at": 0, "kind": "pin"}, {"at": "3 m", "kind": "pin"}]},
    "loads": {"imposed": [{"kind": "line", "from": 0, "to": "3 m", "value": "0.8 kN/m"}]},
    "combinations": {"design": {"factors": {"imposed": 1.0}, "duration": "long-term"}},
}


def document(**adhesive: Any) -> dict[str, Any]:
    """The document, its adhesive replaced where one is given."""
    made = copy.deepcopy(DOCUMENT)
    if adhesive:
        made["adhesives"]["glue"] = adhesive
    return made
