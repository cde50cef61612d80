from __future__ import annotations

import pytest

from server import library
from server.storage import Session
from tests.library.evidence import MADE_OF, add_set, add_value, coupons
from tests.library.samples import add_bond, put


@pytest.fixture
def filled(session: Session) -> Session:
    add_bond(session)
    add_bond(
        session, name="Epoxy 20 on aluminium", details={"product": "Epoxy 20"}, status="draft", note="for trailers"
    )
    put(session, group="materials", name="Spruce C24", values={"E": 11000}, source="EN 338", status="approved")
    return session


def keys(session: Session, text: str = "", **more: object) -> list[str]:
    return [record.key for record in library.search(session, text, **more).records]  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("", ["B-001", "B-002", "M-001"]),
        ("epo", ["B-002"]),  # a beginning
        ("GRUNLEIM", ["B-001"]),  # without case or dots
        ("spruce b-001", ["B-001"]),  # every word
        ("4.2", ["B-001", "B-002"]),  # a value
        ("338", ["M-001"]),  # a source
        ("trailers", ["B-002"]),  # a note
        ("lap coupons", ["B-001"]),  # a detail
        ("nothing like it", []),
    ],
)
def test_words_find_records(filled: Session, text: str, expected: list[str]) -> None:
    assert sorted(keys(filled, text)) == expected


NONSENSE = [
    '"',
    '""',
    "' OR 1=1 --",
    "spruce AND",
    "NOT",
    "*",
    "^",
    "(",
    "a\x00b",
    "\ud800",
    "NEAR(a b)",
    "-",
    "x" * 5000,
]


@pytest.mark.parametrize("text", NONSENSE)
def test_what_people_type_is_never_an_operator(filled: Session, text: str) -> None:
    assert len(keys(filled, text)) <= 3  # and above all no error


def test_operators_are_words(filled: Session) -> None:
    assert keys(filled, "epoxy OR spruce") == []
    assert keys(filled, "name:epoxy") == []


def test_group_and_status(filled: Session) -> None:
    assert keys(filled, group="bonds") == ["B-001", "B-002"]
    assert keys(filled, status="draft") == ["B-002"]
    assert keys(filled, status="blessed") == []
    assert keys(filled, group="\ud800") == []
    assert keys(filled, "e", group="bonds", status="draft") == ["B-002"]


def test_an_approved_record_with_a_newer_draft_is_found_as_both(filled: Session) -> None:
    library.edit(filled, "B-001", status="draft")
    assert "B-001" in keys(filled, status="approved")
    assert "B-001" in keys(filled, status="draft")
    library.edit(filled, "B-001", status="withdrawn")
    assert "B-001" not in keys(filled, status="approved")
    assert keys(filled, status="withdrawn") == ["B-001"]


def test_an_edit_changes_what_is_found(filled: Session) -> None:
    library.edit(filled, "B-002", name="Acrylic 3", details={})
    assert keys(filled, "epoxy") == []
    found = library.search(filled, "acrylic")
    assert [(record.key, record.revision) for record in found.records] == [("B-002", 2)]


def test_pages(filled: Session) -> None:
    first = library.search(filled, limit=2)
    assert (first.total, len(first.records)) == (3, 2)
    assert keys(filled, limit=2, offset=2) == ["M-001"]
    assert keys(filled, offset=10**30) == []
    assert keys(filled, limit=-1) == []


def test_adherend_and_property(session: Session) -> None:
    behind = add_set(session)
    add_value(session, behind)
    add_set(session, name="steel", details=MADE_OF | {"surface_a_material": "steel S235"}, note="no softwood here")
    assert sorted(keys(session, adherend="softw")) == ["T-001", "T-002", "V-001"]  # ply is softwood on both
    assert keys(session, adherend="steel s2") == ["T-002"]
    assert keys(session, adherend="spruce") == []
    assert keys(session, "R2", adherend="softwood", group=("values", "bonds")) == ["V-001"]
    assert sorted(keys(session, property="bond shear")) == ["T-001", "T-002", "V-001"]
    assert keys(session, property="bond shear", status="draft", group="values") == ["V-001"]
    assert keys(session, property="pull-off") == []
    assert keys(session, property="glue strength") == []
    for nonsense in NONSENSE:
        assert len(keys(session, "softwood", adherend=nonsense)) <= 3


def test_a_set_is_found_by_its_lots_and_not_by_its_numbers(session: Session) -> None:
    add_set(session, values={"coupons": coupons(lot="24-117")})
    assert keys(session, "24-117") == ["T-001"]
    assert keys(session, "1.92") == []
