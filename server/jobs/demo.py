"""The demo shop: seed data put into an empty record book through the same doors that people use."""

from __future__ import annotations

import json
from typing import Any

from sqlalchemy import Engine

from server import library, storage
from server.jobs import headings, saving
from server.jobs.shop import set_shop
from server.library.states import FOUND_GOOD, first
from server.paths import data_folder
from server.people import Person

WHO = "demo"
APPROVER = "M. Invented (demo)"
REASON = "demo shop"


def fill(engine: Engine) -> bool:
    """Fill an empty record book with the demo shop; return False, with nothing done, where it already has jobs."""
    seed = data_folder("seed_data")
    with storage.reading(engine) as session:
        if headings.search(session, limit=1).total:
            return False
        set_shop(session, **_read(seed / "shop.json"), made_by=WHO)
        for record in _read(seed / "library.json"):
            _add(session, record)
        for job in _read(seed / "jobs.json"):
            checks = job.pop("checks")
            made = headings.create(session, **job, made_by=WHO)
            for check in checks:
                _save(session, made.id, check)
    return True


def _add(session: storage.Session, record: dict[str, Any]) -> None:
    """Add a seed record; what it says is approved gets the approval of an invented person, marked as invented."""
    approved, answers = record.get("status") in FOUND_GOOD, record.pop("answers", {})
    put_forward = record.pop("put_forward", False)
    made = library.add(
        session, **(record | {"status": first(record["group"])} if approved else record), made_by=WHO, reason=REASON
    )
    for question in library.questions(session, made) if answers else ():
        text = answers[question.about]
        library.answer(session, made.key, made.revision, question.key, text, by=Person(0, WHO))
    if put_forward:
        library.put_forward(session, made.key, by=Person(0, WHO), reason=REASON)
    if approved:
        library.approve_invented(session, made.key, who=APPROVER)


def _save(session: storage.Session, job_id: int, check: dict[str, Any]) -> None:
    saved = saving.save(session, job_id=job_id, raw=check["document"], mark=check["mark"], made_by=WHO, reason=REASON)
    for later in check.get("then", []):
        saving.save(
            session, job_id=job_id, raw=later["document"], check_id=saved.check_id, made_by=WHO, reason=later["reason"]
        )


def _read(path: Any) -> Any:
    return json.loads(path.read_text(encoding="utf-8"))
