"""Invented coupon sets and values, and the people who enter and approve them."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import UTC, datetime
from typing import Any

from server import library
from server.library import Record
from server.people import APPROVES, CHECKS, PREPARES, Person
from server.storage import Session

ANN = Person(1, "Ann Example", frozenset({PREPARES, APPROVES}))
BO = Person(2, "Bo Builder", frozenset({APPROVES, CHECKS}))
NOW = datetime(2026, 12, 1, 12, tzinfo=UTC)
# needs of the demo shop: rolling shear of ply web on softwood flange [MPa]; the eighth was closed too late
ROLLING = (1.92, 1.78, 2.05, 1.66, 1.84, 1.71, 1.97, 1.12, 1.88, 1.75, 1.80, 1.69)
MADE_OF = {
    "product": "Brackwater R2",
    "surface_a_material": "dressed softwood",
    "surface_a_preparation": "planed",
    "surface_b_material": "softwood ply",
    "surface_b_preparation": "sanded 120",
    "cure": "20 °C, 7 days",
    "test_method": "block shear",
    "exposure": "indoors",
}


def coupons(stresses: Sequence[float] = ROLLING, adhesive: float = 10, **more: Any) -> list[dict[str, Any]]:
    return [{"stress": x, "failure": {"adhesive": adhesive, "substrate": 100 - adhesive}, **more} for x in stresses]


def add_set(session: Session, stresses: Sequence[float] = ROLLING, **more: Any) -> Record:
    values = {"property": "bond shear", "coupons": coupons(stresses), "thickness": "0.1 mm", "temperature": 20}
    values |= more.pop("values", {})
    fields: dict[str, Any] = {"name": "Web to flange", "details": MADE_OF, "made_by": ANN.name}
    return library.add(session, group="sets", values=values, **(fields | more))


def add_value(session: Session, behind: Record, **more: Any) -> Record:
    values = {"property": behind.values["property"], "origin": "coupon set"} | more.pop("values", {})
    fields: dict[str, Any] = {"name": "R2 rolling shear", "made_by": ANN.name, "links": {"set": behind.itself}}
    return library.add(session, group="values", values=values, **(fields | more))


def answer_all(session: Session, record: Record, by: Person = ANN) -> None:
    for question in library.questions(session, record):
        if question.open:
            library.answer(session, question.record, question.revision, question.key, "Looked at; it holds.", by=by)


def approved_value(session: Session, stresses: Sequence[float] = ROLLING, **more: Any) -> Record:
    value = add_value(session, add_set(session, stresses, **more))
    library.put_forward(session, value.key, by=ANN)
    answer_all(session, value)
    return library.approve(session, value.key, by=BO, now=NOW)


def add_bond_on(session: Session, value: Record, *, approve: bool = True, **more: Any) -> Record:
    fields: dict[str, Any] = {
        "name": "R2, flange to web",
        "values": {"thickness": "0.1 mm", "duration_factors": {"long-term": 0.6}},
        "details": MADE_OF,
        "links": {"value:shear_strength": value.itself},
        "made_by": ANN.name,
    }
    bond = library.add(session, group="bonds", **(fields | more))
    return library.approve(session, bond.key, by=BO) if approve else bond
