"""Run again with today's values, and what moved."""

from __future__ import annotations

import copy

import pytest

from server import jobs, library, units
from server.errors import DocumentError
from server.jobs import SavedRevision
from server.storage import Session
from tests.jobs.samples import quick_sheet, save, start_job
from tests.library.samples import add_bond, change, document


def again(session: Session, saved: SavedRevision) -> SavedRevision:
    return jobs.run_again(session, saved.id, draw=quick_sheet)


def differences(old: SavedRevision, new: SavedRevision) -> dict[str, tuple[str, str]]:
    return {found.what: (found.old, found.new) for found in jobs.moved(old, new)}


def test_an_open_reference_takes_todays_revision(session: Session) -> None:
    add_bond(session)
    old = save(session, start_job(session), document())
    values = {"shear_strength": "0.2 MPa", "duration_factors": {"long-term": 0.6}}
    change(session, "B-001", status="approved", values=values)
    new = again(session, old)
    assert (new.check_id, new.revision, new.follows_id) == (old.check_id, 2, old.id)
    assert new.document == old.document
    assert new.reason == "Revision 1 run again with today's values"
    assert (old.verdict, new.verdict) == ("pass", "fail")
    found = differences(old, new)
    assert found["adhesive glue: record"] == ("B-001 revision 1", "B-001 revision 2")
    assert found["adhesive glue: shear strength"] == (units.show(4.2, "stress"), units.show(0.2, "stress"))
    assert found["verdict"] == ("pass", "fail")
    assert set(found) == {
        "adhesive glue: record",
        "adhesive glue: shear strength",
        "verdict",
        "utilisation",
        "governing",
        "joint lower/upper: utilisation",
    }
    old_share, new_share = (float(text.removesuffix(" %")) for text in found["joint lower/upper: utilisation"])
    assert new_share / old_share == pytest.approx(4.2 / 0.2, rel=0.02)  # utilisation goes as 1 / strength


def test_a_named_revision_takes_todays_too_and_the_document_says_so(session: Session) -> None:
    add_bond(session)
    old = save(session, start_job(session), document(record="B-001", revision=1))
    change(session, "B-001", status="approved", note="n")
    new = again(session, old)
    assert new.document["adhesives"]["glue"] == {"record": "B-001", "revision": 2}
    assert old.document["adhesives"]["glue"] == {"record": "B-001", "revision": 1}


def test_a_named_revision_of_a_record_never_approved_stays(session: Session) -> None:
    add_bond(session, status="draft")
    old = save(session, start_job(session), document(record="B-001", revision=1))
    library.edit(session, "B-001", note="n")
    assert old.verdict == "not proven"
    assert again(session, old).document["adhesives"]["glue"]["revision"] == 1


def test_a_withdrawn_record_makes_it_not_proven(session: Session) -> None:
    add_bond(session)
    old = save(session, start_job(session), document())
    library.edit(session, "B-001", status="withdrawn", reason="bad batch")
    new = again(session, old)
    assert (old.verdict, new.verdict) == ("pass", "not proven")
    assert differences(old, new)["adhesive glue: status"] == ("approved", "withdrawn")


def test_nothing_moves_when_nothing_changed(session: Session) -> None:
    add_bond(session)
    old = save(session, start_job(session), document())
    assert jobs.moved(old, again(session, old)) == []


def test_what_was_given_is_compared_as_typed(session: Session) -> None:
    job = start_job(session)
    raw = document(shear_strength=4.2)
    raw["member"]["deflection_limit"] = 300
    old = save(session, job, raw)
    raw = copy.deepcopy(raw)
    raw["loads"]["imposed"][0]["value"] = "0.9 kN/m"
    raw["note"] = "heavier"
    found = jobs.moved(old, save(session, job, raw, check_id=old.check_id))
    given = {one.what: (one.old, one.new) for one in found if one.about == "given"}
    assert given == {"loads.imposed[0].value": ("0.8 kN/m", "0.9 kN/m"), "note": ("–", "heavier")}
    results = {one.what for one in found if one.about == "result"}
    span = f"{units.show(0, 'length')} to {units.show(3000, 'length')}"
    assert results >= {"utilisation", "piece lower: utilisation", f"deflection from {span}: utilisation"}


def test_a_record_that_can_no_longer_be_filled_is_a_fault_and_saves_nothing(session: Session) -> None:
    add_bond(session)
    old = save(session, start_job(session), document())
    change(session, "B-001", status="approved", values={"shear_modulus": 800})
    new = again(session, old)  # a strength that is gone is said, not refused
    assert new.verdict == "not proven"
    assert differences(old, new)["adhesive glue: shear strength"][1] == "–"
    with pytest.raises(DocumentError):
        jobs.save(session, job_id=old.job_id, raw=document(record="B-404"), draw=quick_sheet)
    assert len(jobs.revisions_of(session, old.check_id)) == 2
