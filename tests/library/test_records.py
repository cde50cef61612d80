from __future__ import annotations

import threading
from datetime import UTC, datetime
from typing import Any

import pytest

from server import library, storage
from server.errors import DocumentError
from server.library import NotFoundError
from server.storage import Session
from tests.library.samples import APPROVER, BOND_VALUES, SOURCE, add_bond, approve


def faults(call: Any, *arguments: Any, **named: Any) -> dict[str, str]:
    with pytest.raises(DocumentError) as caught:
        call(*arguments, **named)
    return {fault.path: fault.message for fault in caught.value.faults}


def test_a_record_comes_back_as_typed(session: Session) -> None:
    added = add_bond(session, made_by="Shop office", reason="first tests", now=datetime(2026, 12, 1, 9, tzinfo=UTC))
    assert added == library.get(session, "B-001")
    assert added.approval is not None
    assert added.values == BOND_VALUES  # "4.2 MPa" stays text
    assert (added.key, added.revision, added.newest, added.in_force) == ("B-001", 1, 1, 1)
    assert added.created_at == "2026-12-01T09:00:00Z"
    assert added.details["test_method"] == "lap coupons, EN 302-1"


def test_an_edit_makes_a_revision_and_the_old_one_stays(session: Session) -> None:
    add_bond(session)
    library.edit(session, "B-001", values={**BOND_VALUES, "shear_strength": 3.9}, reason="new batch")
    assert library.get(session, "B-001").values["shear_strength"] == 3.9
    assert library.get(session, "B-001", 1).values["shear_strength"] == "4.2 MPa"
    assert library.get(session, "B-001").source == SOURCE  # what was left out stays
    assert [record.revision for record in library.revisions(session, "B-001")] == [2, 1]


def test_two_people_editing_at_once_are_told(session: Session) -> None:
    add_bond(session)
    library.edit(session, "B-001", note="first", based_on=1)
    found = faults(library.edit, session, "B-001", note="second", based_on=1)
    assert "revision 2 was saved" in found["based_on"]
    assert library.get(session, "B-001").note == "first"


def test_keys_are_counted_by_group(session: Session) -> None:
    add_bond(session, key="b-007")
    assert add_bond(session).key == "B-008"
    assert library.add(session, group="materials", name="spruce C24", values={"E": 11000}).key == "M-001"
    assert library.add(session, group="fasteners", name="screw", values={"diameter": "5 mm"}).key == "F-001"


def test_a_key_is_unique_whatever_its_case(session: Session) -> None:
    add_bond(session, key="PU-1")
    assert "taken" in faults(add_bond, session, key="pu-1")["key"]
    assert library.get(session, "pu-1").key == "PU-1"


@pytest.mark.parametrize("key", ["a b", "-x", "x" * 41, "ä", "a/b", "a'b", "\ud800", "a\x00"])
def test_a_bad_key_is_refused_and_never_found(session: Session, key: str) -> None:
    assert "cannot be a key" in faults(add_bond, session, key=key)["key"]
    with pytest.raises(NotFoundError, match="no record"):
        library.get(session, key)


def test_every_fault_is_named_at_once_and_nothing_saved(session: Session) -> None:
    found = faults(
        add_bond,
        session,
        status="blessed",
        name=" ",
        note="a\x07",
        values={"shear_strength": "4 kg", "colour": "red", "status": "approved", "factors": {"wet": -1}},
        details={"product": "x", "flavour": "y"},
        made_by="n" * 201,
    )
    assert {
        "name",
        "status",
        "note",
        "made_by",
        "details.flavour",
        "values.shear_strength",
        "values.colour",
        "values.status",
        "values.factors.wet",
    } == set(found)
    assert library.search(session).total == 0


def test_what_no_sheet_can_print_is_refused_at_entry(session: Session) -> None:
    sign = "\U0001f3aa"
    found = faults(add_bond, session, name=f"a{sign}", source=sign, values={"factors": {sign: 1.0}})
    assert set(found) == {"name", "source", "values"}
    assert "U+1F3AA" in found["name"]
    assert add_bond(session, name="Grünleim ½ – λ ≤ Ø").key == "B-001"


@pytest.mark.parametrize(
    ("group", "values", "path"),
    [
        ("materials", {"G": 690}, "values.E"),
        ("materials", {"E": 11000, "strengths": {"bending": "24 kN"}}, "values.strengths.bending"),
        ("fasteners", {"shear_resistance": "1.2 m"}, "values.shear_resistance"),
        ("bonds", {"peel_strength": "3 N/mm"}, "values.peel_strength"),
        ("bonds", {"shear_strength": float("nan")}, "values.shear_strength"),
        ("bonds", {"factors": {"wet\x00": 1.0}}, "values.factors"),
    ],
)
def test_values_are_checked_by_the_documents_models(
    session: Session, group: str, values: dict[str, Any], path: str
) -> None:
    assert path in faults(library.add, session, group=group, name="x", values=values)


def test_values_are_bounded(session: Session) -> None:
    many = {f"factor {n} {'x' * 50}": 1.0 for n in range(50)}
    add_bond(session, values={"factors": many})
    found = faults(add_bond, session, values={"factors": {f"{n}": 1.0 for n in range(51)}})
    assert "values.factors" in found


def test_an_approved_record_names_its_source(session: Session) -> None:
    add_bond(session, source="", status="draft")
    assert "test report or standard" in faults(approve, session, library.get(session, "B-001"))["source"]


def test_an_unknown_group_or_record_is_told(session: Session) -> None:
    assert (
        "bonds, fasteners, materials, products"
        in faults(library.add, session, group="glues", name="x", values={})["group"]
    )
    add_bond(session)
    with pytest.raises(NotFoundError, match="Nearest: B-001"):
        library.get(session, "B-01")
    with pytest.raises(NotFoundError, match="no revision 4; it has revisions 1 to 1"):
        library.get(session, "B-001", 4)
    with pytest.raises(NotFoundError):
        library.get(session, "B-001", 10**30)
    with pytest.raises(NotFoundError):
        library.edit(session, "B-9", note="x")


def test_the_trail_tells_of_every_revision(session: Session) -> None:
    add_bond(session, made_by="Anna")
    library.edit(session, "b-001", status="on hold", reason="batch in doubt", made_by="Ben")
    told = storage.lines(session, subject="record B-001")
    assert [(line.who, line.what, line.detail["status"]) for line in told] == [
        ("Ben", "record edited", "on hold"),
        (APPROVER, "bond approved", "approved"),
        ("Anna", "record added", "draft"),
    ]


def test_people_adding_at_once_get_different_keys(session: Session) -> None:
    engine = session.get_bind()
    keys: list[str] = []

    def work() -> None:
        with storage.reading(engine) as mine:  # type: ignore[arg-type]
            keys.extend(add_bond(mine).key for _ in range(5))

    threads = [threading.Thread(target=work) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert sorted(keys) == [f"B-{n:03d}" for n in range(1, 21)]
