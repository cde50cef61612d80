"""The groups of the library, and what a record of each says beside its values."""

from __future__ import annotations

from dataclasses import dataclass, field

from pydantic import BaseModel

from server.documents import Adhesive, Fastener, Material, evidence
from server.library.properties import BY_FIELD, role_of

# A bond and the coupon sets behind it say what they are made of by the same names, so that they can be compared.
MADE_OF = {
    "product": "Adhesive product",
    "surface_a_material": "Surface A: material",
    "surface_a_preparation": "Surface A: preparation",
    "surface_b_material": "Surface B: material",
    "surface_b_preparation": "Surface B: preparation",
    "test_method": "Test method",
    "load_bearing": "Approved for load-bearing by (standard, class)",
    "cure": "Cure",
    "exposure": "Exposure",
}
MADE_OF_LINKS = {
    "product": "products",
    "adherend_a": "materials",
    "adherend_b": "materials",
    "preparation_a": "preparations",
    "preparation_b": "preparations",
    "cure": "cures",
}

LINK_LABELS = {
    "product": "Adhesive product",
    "adherend_a": "Surface A: material",
    "preparation_a": "Surface A: preparation",
    "adherend_b": "Surface B: material",
    "preparation_b": "Surface B: preparation",
    "cure": "Cure",
    "set": "Coupon set",
}
"""What each link is called, in the order in which they are shown."""


@dataclass(frozen=True)
class Group:
    """A kind of record: ``details`` are its plain fields (name: label), ``links`` its links (role: group linked to).

    ``section`` is where a document refers to it; '' for evidence, to which documents do not refer.
    """

    name: str
    one: str
    section: str
    prefix: str
    model: type[BaseModel]
    details: dict[str, str]
    links: dict[str, str] = field(default_factory=dict)

    @property
    def pins(self) -> dict[str, str]:
        """The roles under which values are pinned, with the property of each."""
        return {role_of(at): known.name for (section, at), known in BY_FIELD.items() if section == self.section}


def _by_name(*groups: Group) -> dict[str, Group]:
    return {group.name: group for group in groups}


GROUPS = _by_name(
    Group("bonds", "a bond", "adhesives", "B", Adhesive, MADE_OF, MADE_OF_LINKS),
    Group(
        "fasteners",
        "a fastener",
        "fasteners",
        "F",
        Fastener,
        {
            "product": "Product",
            "test_method": "Test or rule the values come from",
            "standard": "Product standard",
            "side_member": "Side member it was found with: material",
            "side_thickness": "Side member: thickness",
            "main_member": "Main member it was found with: material",
            "exposure": "Exposure",
        },
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
EVIDENCE = _by_name(
    Group(
        "products",
        "an adhesive product",
        "",
        "A",
        evidence.Product,
        {
            "load_bearing": "Approved for load-bearing by (standard, class)",
            "exposure": "Exposure it is approved for",
            "storage": "Storage and shelf life",
        },
    ),
    Group(
        "preparations",
        "a surface preparation",
        "",
        "S",
        evidence.Preparation,
        {"material": "For which material", "standard": "Procedure follows (standard)"},
    ),
    Group("cures", "a cure", "", "C", evidence.Cure, {"conditions": "Conditions of the shop"}),
    Group(
        "lots",
        "a lot of adhesive",
        "",
        "L",
        evidence.Lot,
        {"supplier": "Supplier", "storage": "Where it is kept"},
        {"product": "products"},
    ),
    Group("sets", "a coupon set", "", "T", evidence.CouponSet, MADE_OF, MADE_OF_LINKS),
    Group(
        "values",
        "a value",
        "",
        "V",
        evidence.Value,
        {**MADE_OF, "conditions": "Conditions"},
        {**MADE_OF_LINKS, "set": "sets"},
    ),
)
ALL = GROUPS | EVIDENCE
BY_SECTION = {group.section: group for group in GROUPS.values()}

STATUSES = ("draft", "indicative", "provisional", "approved", "on hold", "withdrawn", "superseded")
# These say what holds for the record from now on; a draft, indicative or provisional revision beside an approved one
# is work in progress and leaves the approved one in force.
DECISIVE = (
    *("approved", "on hold", "withdrawn", "superseded"),
    *("accepted", "rejected", "released", "opened", "extended"),
)
STOPPED = ("on hold", "withdrawn", "rejected")
