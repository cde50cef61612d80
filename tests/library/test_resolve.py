"""From a reference to values: which revision, with which standing, and what is said where none can be had."""

from __future__ import annotations

from typing import Any

import pytest

from server import documents, library
from server.errors import DocumentError
from server.storage import Session
from tests.library.samples import SOURCE, add_bond, change, document, put


def filled(session: Session, **adhesive: Any) -> documents.Adhesive:
    read = documents.read(document(**adhesive))
    resolved = library.resolve(session, read)
    assert resolved.unresolved() == []
    assert resolved.raw == read.raw
    return resolved.adhesive("glue")


def faults(session: Session, **adhesive: Any) -> dict[str, str]:
    with pytest.raises(DocumentError) as caught:
        library.resolve(session, documents.read(document(**adhesive)))
    return {fault.path: fault.message for fault in caught.value.faults}


def revisions(session: Session, *statuses: str) -> None:
    """B-001 with one revision a status; revision n has a shear strength of n MPa."""
    for n, status in enumerate(statuses, start=1):
        values = {"shear_strength": float(n)}
        if n == 1:
            add_bond(session, status=status, values=values)
        else:
            change(session, "B-001", status=status, values=values)


def test_a_reference_brings_values_and_where_they_are_from(session: Session) -> None:
    add_bond(session)
    glue = filled(session)
    assert glue.shear_strength == 4.2
    assert (glue.record, glue.revision, glue.status, glue.source) == ("B-001", 1, "approved", SOURCE)
    assert filled(session, record="b-001").record == "B-001"


def test_every_section_is_filled(session: Session) -> None:
    add_bond(session)
    put(session, group="materials", name="s", values={"E": "11 GPa"}, source="x", status="approved")
    put(session, group="fasteners", name="f", values={"shear_resistance": "1 kN"}, source="x", status="approved")
    raw = document()
    raw["materials"]["spruce"] = {"record": "M-001"}
    raw["fasteners"] = {"screw": {"record": "F-001"}}
    resolved = library.resolve(session, documents.read(raw))
    assert resolved.material("spruce").E == 11000
    assert resolved.fastener("screw").shear_resistance == 1000


def test_a_document_without_references_is_left_alone(session: Session) -> None:
    read = documents.read(document(shear_strength=3))
    assert library.resolve(session, read) is read


@pytest.mark.parametrize(
    ("statuses", "taken", "status"),
    [
        (["approved"], 1, "approved"),
        (["approved", "approved"], 2, "approved"),
        (["approved", "draft"], 1, "approved"),
        (["approved", "provisional", "indicative"], 1, "approved"),
        (["draft", "approved"], 2, "approved"),
        (["approved", "withdrawn"], 2, "withdrawn"),  # a stop is never passed over in silence
        (["approved", "on hold"], 2, "on hold"),
        (["approved", "on hold", "draft"], 2, "on hold"),
        (["approved", "on hold", "approved"], 3, "approved"),
        (["approved", "superseded"], 2, "superseded"),
        (["draft", "on hold"], 2, "on hold"),
    ],
)
def test_without_a_revision_the_one_in_force_is_taken(
    session: Session, statuses: list[str], taken: int, status: str
) -> None:
    revisions(session, *statuses)
    glue = filled(session)
    assert (glue.revision, glue.shear_strength, glue.status) == (taken, float(taken), status)


@pytest.mark.parametrize("status", ["draft", "indicative", "provisional"])
def test_with_none_approved_the_fault_says_how_to_name_one(session: Session, status: str) -> None:
    revisions(session, status)
    message = faults(session)["adhesives.glue.record"]
    assert f"revision 1 is {status}" in message
    assert '{"record": "B-001", "revision": 1}' in message
    assert filled(session, record="B-001", revision=1).status == status


@pytest.mark.parametrize(
    ("statuses", "revision", "status"),
    [
        (["approved", "draft"], 1, "approved"),
        (["approved", "draft"], 2, "draft"),
        (["approved", "approved"], 1, "superseded"),
        (["provisional", "approved"], 1, "superseded"),
        (["draft", "approved"], 1, "draft"),  # superseded would count for more than it ever did
        (["indicative", "approved"], 1, "indicative"),
        (["withdrawn", "approved"], 1, "withdrawn"),
        (["approved", "withdrawn"], 1, "withdrawn"),
        (["approved", "on hold"], 1, "on hold"),
        (["approved", "on hold", "approved"], 1, "superseded"),
        (["approved", "on hold", "draft"], 3, "draft"),
    ],
)
def test_a_named_revision_counts_as_what_it_is_today(
    session: Session, statuses: list[str], revision: int, status: str
) -> None:
    revisions(session, *statuses)
    glue = filled(session, record="B-001", revision=revision)
    assert (glue.revision, glue.shear_strength, glue.status) == (revision, float(revision), status)


def test_an_unknown_key_names_its_neighbours(session: Session) -> None:
    add_bond(session, key="PU-20")
    add_bond(session, key="PU-21")
    message = faults(session, record="PU-2")["adhesives.glue.record"]
    assert "no record 'PU-2' among the bonds" in message
    assert "PU-20" in message
    assert "Library" in faults(session, record="zzzzzz")["adhesives.glue.record"]


def test_a_record_of_another_group_is_refused(session: Session) -> None:
    put(session, group="materials", name="s", values={"E": 1}, source="x", status="approved")
    assert "M-001 is a material; a bond is wanted" in faults(session, record="M-001")["adhesives.glue.record"]


def test_a_revision_that_is_not_there_is_refused(session: Session) -> None:
    add_bond(session)
    assert "revisions 1 to 1" in faults(session, record="B-001", revision=2)["adhesives.glue.revision"]


def test_every_bad_reference_is_named(session: Session) -> None:
    raw = document(record="B-404")
    raw["materials"]["spruce"] = {"record": "M-404"}
    with pytest.raises(DocumentError) as caught:
        library.resolve(session, documents.read(raw))
    assert {fault.path for fault in caught.value.faults} == {"adhesives.glue.record", "materials.spruce.record"}
