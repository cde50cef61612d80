from __future__ import annotations

from typing import Any

import pytest

from server import jobs, storage
from server.errors import DocumentError
from server.library import NotFoundError
from server.storage import Session
from tests.jobs.samples import NOON, save, start_job


def faults(call: Any, *arguments: Any, **named: Any) -> dict[str, str]:
    with pytest.raises(DocumentError) as caught:
        call(*arguments, **named)
    return {fault.path: fault.message for fault in caught.value.faults}


def numbers(session: Session, text: str = "") -> list[str]:
    return [job.number for job in jobs.search(session, text).jobs]


def test_a_job_starts_with_the_shops_defaults(session: Session) -> None:
    assert jobs.shop(session) == jobs.Shop(name="", address="", paper="A4", display="SI")
    jobs.set_shop(session, name="Invented Joinery", address="1 Mill Lane\nNowhere", paper="Letter", display="US")
    job = start_job(session)
    assert (job.number, job.paper, job.display) == ("J-001", "Letter", "US")
    assert start_job(session, paper="A4", display="SI").paper == "A4"
    assert jobs.shop(session).address == "1 Mill Lane\nNowhere"


def test_the_shops_heading_can_be_corrected(session: Session) -> None:
    jobs.set_shop(session, name="One")
    jobs.set_shop(session, name="Two", paper="Letter")
    assert jobs.shop(session) == jobs.Shop(name="Two", paper="Letter")
    assert set(faults(jobs.set_shop, session, name="", paper="A5", display="metric")) == {"name", "paper", "display"}
    assert jobs.shop(session).name == "Two"


def test_numbers_are_given_or_counted_and_never_twice(session: Session) -> None:
    assert start_job(session, number="2026-14").number == "2026-14"
    assert start_job(session).number == "J-001"
    assert start_job(session).number == "J-002"
    assert "taken" in faults(start_job, session, number="j-002")["number"]


def test_every_fault_is_named_and_nothing_saved(session: Session) -> None:
    found = faults(
        jobs.create, session, title="", number="x" * 41, customer="a\x00", paper="A5", display="both", made_by="\ud800"
    )
    assert set(found) == {"title", "number", "customer", "paper", "display", "made_by"}
    assert jobs.search(session).total == 0


def test_a_heading_can_be_corrected_and_the_trail_tells(session: Session) -> None:
    job = start_job(session)
    other = start_job(session)
    edited = jobs.edit(session, job.id, title="Floor beams", number="", made_by="Anna")
    assert (edited.title, edited.number, edited.customer) == ("Floor beams", "J-001", "Invented Barns")
    assert jobs.get(session, job.id) == edited
    assert "taken" in faults(jobs.edit, session, job.id, number=other.number)["number"]
    line = storage.lines(session, subject="job J-001")[0]
    assert (line.who, line.what, line.detail) == (
        "Anna",
        "job heading changed",
        {"title": ["Roof beams", "Floor beams"]},
    )


@pytest.mark.parametrize("job_id", [0, -1, 77, 10**30])
def test_a_job_that_is_not_there_is_told(session: Session, job_id: int) -> None:
    with pytest.raises(NotFoundError, match="no job"):
        jobs.get(session, job_id)
    with pytest.raises(NotFoundError, match="no job"):
        jobs.edit(session, job_id, title="x")
    with pytest.raises(NotFoundError, match="no job"):
        jobs.checks_of(session, job_id)


def test_words_find_jobs(session: Session) -> None:
    barn = start_job(session, drawing="D-4 rev B")
    start_job(session, number="2026-14", title="Gangway", customer="Hafenbühne")
    save(session, barn, mark="RB7")
    assert numbers(session, "gang") == ["2026-14"]
    assert numbers(session, "hafenbuhne 2026") == ["2026-14"]
    assert numbers(session, "rb7") == ["J-001"]  # a member mark
    assert numbers(session, "d-4") == ["J-001"]
    assert numbers(session, '"') == []
    assert numbers(session, "nowhere") == []
    jobs.edit(session, barn.id, title="Shed")
    assert numbers(session, "roof") == []
    assert numbers(session, "shed") == ["J-001"]


def test_the_list_shows_the_worst_of_the_newest_revisions(session: Session) -> None:
    from tests.library.samples import document

    job, empty = start_job(session), start_job(session)
    weak = document(shear_strength="0.1 MPa", status="approved")
    first = save(session, job, weak)
    assert first.verdict == "fail"
    assert jobs.search(session).jobs[-1].verdict in ("fail", "")
    save(session, job, check_id=first.check_id)  # put right
    save(session, job, document(status="approved"))  # no strength: not proven
    lines = {line.id: line for line in jobs.search(session).jobs}
    assert (lines[job.id].checks, lines[job.id].verdict) == (2, "not proven")
    assert (lines[empty.id].checks, lines[empty.id].verdict, lines[empty.id].utilisation) == (0, "", None)


def test_the_list_is_newest_change_first_and_comes_in_pages(session: Session) -> None:
    for day in (3, 1, 2):
        start_job(session, number=f"{day}", now=NOON.replace(day=day))
    assert numbers(session) == ["3", "2", "1"]
    found = jobs.search(session, limit=2, offset=1)
    assert ([job.number for job in found.jobs], found.total) == (["2", "1"], 3)
    assert jobs.search(session, offset=10**30).jobs == ()
