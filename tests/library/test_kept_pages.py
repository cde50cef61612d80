"""The evidence page of an approved value is kept as it was, whatever comes after; chains that multiply it are named."""

from __future__ import annotations

import hashlib

import pytest
from sqlalchemy import text
from sqlalchemy.exc import DBAPIError

from server import library, storage
from server.errors import JointError
from server.library import Link
from server.storage import Session
from tests.library.evidence import ANN, BO, NOW, add_bond_on, add_set, add_value, answer_all, approved_value

FACTORS = [
    {"name": "moisture", "value": 0.85, "source": "guide (invented)", "evidence": "no own tests yet"},
    {"name": "workmanship", "value": 0.9, "source": "shop rule (invented)", "evidence": "site work"},
]


def kept(session: Session, key: str = "V-001", revision: int = 1) -> bytes:
    return library.kept_pdf(session, library.get(session, key, revision))


def test_the_page_of_the_day_of_approval_stays_whatever_comes_after(session: Session) -> None:
    value = approved_value(session)
    before, told = kept(session), library.kept_page(session, value)
    assert told is not None
    assert before.startswith(b"%PDF")
    assert hashlib.sha256(before).hexdigest() == told.pdf_sha256
    today = library.evidence_pdf(session, value)
    add_bond_on(session, value, chain=FACTORS)
    library.edit(session, "T-001", name="Renamed", made_by=ANN.name)
    library.set_status(session, "V-001", "withdrawn", by=BO, reason="a recall")
    assert kept(session) == before
    assert library.evidence_pdf(session, library.get(session, "V-001")) not in (before, today)


def test_nothing_is_kept_before_approval_and_a_second_approval_keeps_its_own(session: Session) -> None:
    value = add_value(session, add_set(session))
    assert library.kept_page(session, value) is None
    with pytest.raises(library.NotFoundError, match="one is kept when a value is approved"):
        library.kept_pdf(session, value)
    library.put_forward(session, "V-001", by=ANN)
    answer_all(session, value)
    library.approve(session, "V-001", by=BO, now=NOW)
    first = kept(session)
    library.set_status(session, "V-001", "on hold", by=BO, reason="lot under question")
    library.set_status(session, "V-001", "draft", by=BO, reason="lot cleared")
    library.approve(session, "V-001", by=BO, note="after the recall")
    assert kept(session) != first


def test_a_kept_page_is_never_changed_and_tampering_is_seen(session: Session) -> None:
    approved_value(session)
    session.commit()
    for act in ("UPDATE evidence_pages SET pdf = x'00'", "DELETE FROM evidence_pages"):
        with pytest.raises(DBAPIError, match="evidence_pages is never"):
            session.execute(text(act))
        session.rollback()
    with storage.write(session):
        session.execute(text("DROP TRIGGER evidence_pages_update"))
        session.execute(text("UPDATE evidence_pages SET content = replace(content, '1.92', '1.93')"))
    with pytest.raises(JointError, match="was altered"):
        kept(session)


def test_the_chains_that_multiply_a_value_stand_on_one_line_each(session: Session) -> None:
    value = approved_value(session)
    add_bond_on(session, value, chain=FACTORS)
    add_bond_on(session, value, name="Without a chain")
    (found,) = library.chains_on(session, value)
    assert found.record.itself == Link("B-001", 1)
    assert found.line == "1.275 MPa × 0.85 (moisture) × 0.9 (workmanship) = 0.9755 MPa"
    library.edit(session, "B-001", chain=FACTORS[:1], made_by=ANN.name)
    (found,) = library.chains_on(session, value)
    assert (found.record.revision, found.standing) == (2, "draft")
    library.set_status(session, "B-001", "withdrawn", by=BO, reason="not used any more")
    assert library.chains_on(session, value) == []


def test_a_stiffness_has_no_chain(session: Session) -> None:
    behind = add_set(session, values={"property": "bond shear modulus"})
    value = add_value(session, behind)
    links = {"value:shear_modulus": value.itself}
    library.add(session, group="bonds", name="Stiff", values={"shear_strength": 2}, links=links, chain=FACTORS)
    assert library.chains_on(session, value) == []
