"""The groups of the library, and what a record of each says beside its values."""

from __future__ import annotations

from dataclasses import dataclass

from server import documents
from server.documents import Adhesive, Fastener, Material


@dataclass(frozen=True)
class Group:
    """A kind of record: ``section`` is where a document refers to it, ``details`` its plain fields (name: label)."""

    name: str
    one: str
    section: str
    prefix: str
    model: type[documents.Adhesive] | type[documents.Fastener] | type[documents.Material]
    details: dict[str, str]


GROUPS = {
    group.name: group
    for group in (
        Group(
            "bonds",
            "a bond",
            "adhesives",
            "B",
            Adhesive,
            {
                "product": "Adhesive product",
                "surface_a_material": "Surface A: material",
                "surface_a_preparation": "Surface A: preparation",
                "surface_b_material": "Surface B: material",
                "surface_b_preparation": "Surface B: preparation",
                "test_method": "Test method",
                "load_bearing": "Approved for load-bearing by (standard, class)",
                "cure": "Cure",
            },
        ),
        Group(
            "fasteners",
            "a fastener",
            "fasteners",
            "F",
            Fastener,
            {"product": "Product", "test_method": "Test or rule the values come from", "standard": "Product standard"},
        ),
        Group(
            "materials",
            "a material",
            "materials",
            "M",
            Material,
            {"product": "Product", "grade": "Grade or class", "standard": "Product standard"},
        ),
    )
}
BY_SECTION = {group.section: group for group in GROUPS.values()}

STATUSES = ("draft", "indicative", "provisional", "approved", "on hold", "withdrawn", "superseded")
# These say what holds for the record from now on; a draft, indicative or provisional revision beside an approved one
# is work in progress and leaves the approved one in force.
DECISIVE = ("approved", "on hold", "withdrawn", "superseded")
