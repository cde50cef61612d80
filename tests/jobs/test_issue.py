"""What holds a check back, the differences between tested and used, and issuing by another person."""

from __future__ import annotations

import copy
import sqlite3
from collections.abc import Callable
from typing import Any

import pytest
from sqlalchemy import Engine

from server import jobs, library, storage
from server.errors import DocumentError
from server.jobs import SavedRevision
from server.library import NotFoundError
from server.people import THIS_MACHINE
from server.sheets import SheetData
from server.storage import Session
from tests.jobs.samples import NOON, quick_sheet, save, start_job
from tests.library.evidence import ANN, BO, MADE_OF, add_bond_on, approved_value, coupons
from tests.library.samples import document, put


def raw(**more: Any) -> dict[str, Any]:
    """The two planks of one material record, at the temperature the coupons were tested at."""
    made = copy.deepcopy(document())
    made["materials"]["spruce"] = {"record": "M-001"}
    made["loads"]["imposed"][0]["value"] = "0.4 kN/m"
    return made | {"service": {"temperature": [15, 25], "cure_temperature": 20}} | more


@pytest.fixture
def saved(session: Session) -> SavedRevision:
    """A check that stands on a bond tested exactly as it is used."""
    wood = put(
        session,
        group="materials",
        name="Spruce C24",
        values={"E": 11000, "strengths": {"bending": 24, "shear": 4}, "duration_factors": {"long-term": 0.7}},
        source="EN 338",
        status="approved",
        made_by=ANN.name,
    )
    links = {"adherend_a": wood.itself, "adherend_b": wood.itself}
    value = approved_value(session, values={"coupons": coupons(lot="24-117")}, links=links)
    add_bond_on(session, value)
    return save(session, start_job(session), raw(), made_by=ANN.name)


def found(session: Session, saved: SavedRevision, kind: str, **more: Any) -> list[str]:
    return [each.about for each in jobs.hindrances(session, saved.id, **more) if each.kind == kind]


def answer_all(session: Session, saved: SavedRevision) -> None:
    for each in jobs.hindrances(session, saved.id):
        if each.answerable and each.open:
            jobs.answer(session, saved.id, each.key, "Looked at; it holds.", by=ANN, now=NOON)


def issue(session: Session, saved: SavedRevision, **more: Any) -> jobs.Issue:
    return jobs.issue(session, saved.id, **({"by": BO, "draw": quick_sheet, "now": NOON} | more))


def faults(call: Callable[..., Any], *arguments: Any, **named: Any) -> dict[str, str]:
    with pytest.raises(DocumentError) as caught:
        call(*arguments, **named)
    return {fault.path: fault.message for fault in caught.value.faults}


def test_a_bond_used_as_it_was_tested_differs_in_nothing(session: Session, saved: SavedRevision) -> None:
    assert saved.verdict == "pass"
    assert found(session, saved, "difference") == []
    assert found(session, saved, "status") == []


@pytest.mark.parametrize(
    ("bond", "more", "about"),
    [
        ({"details": MADE_OF | {"surface_a_preparation": "sawn"}}, {}, "preparation of dressed softwood"),
        ({"details": MADE_OF | {"cure": "5 °C, 1 day"}}, {}, "cure"),
        ({"details": MADE_OF | {"product": "Fjellvik M5"}}, {}, "product"),
        ({"details": MADE_OF | {"exposure": "outdoors"}}, {}, "exposure"),
        ({"values": {"thickness": "0.5 mm", "duration_factors": {"long-term": 0.6}}}, {}, "bond-line thickness"),
        ({}, {"service": {"temperature": [-10, 60], "cure_temperature": 20}}, "temperature"),
        ({}, {"service": None}, "temperature"),
    ],
)
def test_each_difference_between_tested_and_used_is_listed(
    session: Session, saved: SavedRevision, bond: dict[str, Any], more: dict[str, Any], about: str
) -> None:
    if bond:
        library.edit(session, "B-001", made_by=ANN.name, **bond)
        library.approve(session, "B-001", by=BO)
    given = {name: value for name, value in raw(**more).items() if value is not None}
    again = save(session, jobs.get(session, saved.job_id), given, check_id=saved.check_id)
    assert found(session, again, "difference") == [about]
    assert "difference" in {each.kind for each in jobs.hindrances(session, again.id) if each.open}


def test_another_adherend_is_a_difference_by_its_record(session: Session, saved: SavedRevision) -> None:
    put(
        session,
        group="materials",
        name="Spruce C24",  # the same words, another record
        values={"E": 9000, "strengths": {"bending": 20, "shear": 3}, "duration_factors": {"long-term": 0.7}},
        source="x",
        status="approved",
    )
    given = raw()
    given["materials"]["spruce"] = {"record": "M-002"}
    again = save(session, jobs.get(session, saved.job_id), given, check_id=saved.check_id)
    differences = library.differences(session, again.document, again.values_used)
    assert {each.about for each in differences} == {"adherend"}
    assert "M-002" in differences[0].used
    assert "lower/upper" in differences[0].where


def test_typed_values_ask_what_shows_that_they_hold(session: Session) -> None:
    saved = save(session, start_job(session), made_by=ANN.name)
    assert found(session, saved, "difference") == ["typed values", "typed values"]  # the adhesive, the material


def test_a_bond_with_typed_numbers_says_that_nothing_shows_its_tests(session: Session, saved: SavedRevision) -> None:
    put(session, group="bonds", name="old", values={"shear_strength": 4}, source="x", status="approved", made_by="A")
    given = raw(adhesives={"glue": {"record": "B-002"}})
    again = save(session, jobs.get(session, saved.job_id), given, check_id=saved.check_id)
    assert "tests" in found(session, again, "difference")


def test_a_check_is_issued_when_all_is_answered_by_a_person_who_did_not_prepare_it(
    session: Session, saved: SavedRevision
) -> None:
    assert "bonded width" in faults(issue, session, saved)
    answer_all(session, saved)
    assert "prepared this check" in faults(issue, session, saved, by=ANN)["person"]
    assert "Nobody is signed in" in faults(issue, session, saved, by=THIS_MACHINE)["person"]
    made = issue(session, saved)
    assert (made.state, made.issued_by, made.prepared_by) == ("issued", BO.name, ANN.name)
    assert jobs.issue_of(session, saved.id) == made
    assert {each["about"] for each in made.answers} >= {"bonded width"}
    assert jobs.issued_pdf(session, saved.id) == quick_sheet_of(saved)
    assert "issued already" in faults(issue, session, saved)["issued"]
    line = storage.lines(session, subject="job J-001")[0]
    assert (line.who, line.what) == (BO.name, "check issued")


def quick_sheet_of(saved: SavedRevision) -> bytes:
    return f"sheet {saved.mark} revision {saved.revision} {saved.sha256}".encode()


def test_the_issued_sheet_carries_names_answers_and_state(session: Session, saved: SavedRevision) -> None:
    answer_all(session, saved)
    drawn: list[SheetData] = []
    issue(session, saved, draw=lambda sheet: drawn.append(sheet) or b"%PDF")
    (sheet,) = drawn
    assert (sheet.prepared, sheet.checked, sheet.status) == (ANN.name, f"{BO.name}, 2026-12-01", "issued 2026-12-01")
    assert all(reply == "Looked at; it holds. (Ann Example, 2026-12-01)" for reply in sheet.replies.values())
    assert set(sheet.replies) <= {caution["text"] for caution in saved.result["cautions"]}


def test_a_later_issue_supersedes_the_earlier_one_whose_sheet_stays(session: Session, saved: SavedRevision) -> None:
    answer_all(session, saved)
    issue(session, saved)
    later = save(session, jobs.get(session, saved.job_id), raw(note="n"), check_id=saved.check_id, made_by=ANN.name)
    asked = [each for each in jobs.hindrances(session, later.id) if each.answerable]
    assert asked
    assert all(each.open and each.earlier for each in asked)  # the same questions: the old answers are at hand
    answer_all(session, later)
    issue(session, later)
    states = [(each.revision_id, each.state) for each in jobs.issues(session, saved.check_id)]
    assert states == [(later.id, "issued"), (saved.id, "superseded")]
    assert jobs.issued_pdf(session, saved.id) == quick_sheet_of(saved)


def test_only_the_newest_revision_that_passes_is_issued(session: Session, saved: SavedRevision) -> None:
    heavy = raw()
    heavy["loads"]["imposed"][0]["value"] = "80 kN/m"
    failing = save(session, jobs.get(session, saved.job_id), heavy, check_id=saved.check_id, made_by=ANN.name)
    assert "verdict" in faults(issue, session, failing)
    assert "only the newest" in faults(issue, session, saved)["revision"]


@pytest.mark.parametrize(("key", "status"), [("V-001", "on hold"), ("T-001", "rejected"), ("B-001", "withdrawn")])
def test_what_is_stopped_now_holds_a_check_back_for_good(
    session: Session, saved: SavedRevision, key: str, status: str
) -> None:
    library.set_status(session, key, status, by=BO, reason="doubt")
    answer_all(session, saved)
    held = [each for each in jobs.hindrances(session, saved.id) if each.kind == "status"]
    assert held
    assert not any(each.answerable for each in held)
    assert any(f"is {status} now" in each.text for each in held)


def test_a_lot_in_quarantine_holds_back_the_checks_on_its_coupons(session: Session, saved: SavedRevision) -> None:
    lot = library.add(session, group="lots", name="R2", values={"number": "24-117"}, made_by=ANN.name)
    assert found(session, saved, "status") == ["lot 24-117"]  # it begins in quarantine
    library.approve(session, lot.key, by=BO)
    assert found(session, saved, "status") == []
    library.set_status(session, lot.key, "quarantined", by=BO, reason="recall")
    assert found(session, saved, "status") == ["lot 24-117"]


def test_a_newer_value_is_a_question_not_a_bar(session: Session, saved: SavedRevision) -> None:
    library.edit(session, "V-001", note="n", made_by=ANN.name)
    for question in library.questions(session, library.get(session, "V-001")):
        if question.open:
            library.answer(session, question.record, question.revision, question.key, "x", by=ANN)
    library.approve(session, "V-001", by=BO)
    held = [each for each in jobs.hindrances(session, saved.id) if each.kind == "status"]
    assert [each.answerable for each in held] == [True]
    assert "V-001 rev 1" in held[0].text


def test_a_one_person_shop_names_its_outside_checker(session: Session, saved: SavedRevision) -> None:
    answer_all(session, saved)
    alone = {"by": jobs_person(), "outside_checker": "D. Outside", "checked_on": "2026-11-30"}
    assert (
        "somebody else" in faults(issue, session, saved, **(alone | {"outside_checker": ANN.name}))["outside_checker"]
    )
    made = issue(session, saved, **alone)
    assert (made.outside_checker, made.checked_on) == ("D. Outside", "2026-11-30")


def jobs_person() -> Any:
    return type(ANN)(ANN.id, ANN.name, ANN.roles | BO.roles)


def test_an_answer_is_written_to_a_question_that_is_asked(session: Session, saved: SavedRevision) -> None:
    key = next(each.key for each in jobs.hindrances(session, saved.id) if each.answerable)
    assert "answer" in faults(jobs.answer, session, saved.id, key, "  ", by=ANN)
    with pytest.raises(NotFoundError, match="no such question"):
        jobs.answer(session, saved.id, "nonsense", "x", by=ANN)
    with pytest.raises(NotFoundError):
        jobs.answer(session, 10**12, key, "x", by=ANN)
    answer_all(session, saved)
    issue(session, saved)
    assert "its answers stand" in faults(jobs.answer, session, saved.id, key, "other", by=ANN)["answer"]


def test_an_issue_is_never_changed(session: Session, saved: SavedRevision) -> None:
    answer_all(session, saved)
    issue(session, saved)
    session.rollback()
    book = session.get_bind()
    assert isinstance(book, Engine)
    with sqlite3.connect(str(book.url.database)) as connection:
        for statement in ("UPDATE issues SET issued_by = 'x'", "DELETE FROM issues"):
            with pytest.raises(sqlite3.IntegrityError, match="a saved row of issues"):
                connection.execute(statement)


def test_what_was_never_issued_has_no_issued_sheet(session: Session, saved: SavedRevision) -> None:
    assert jobs.issue_of(session, saved.id) is None
    assert jobs.issues(session, 10**12) == []
    for revision_id in (saved.id, 0, 10**12):
        with pytest.raises(NotFoundError, match="not issued"):
            jobs.issued_pdf(session, revision_id)
