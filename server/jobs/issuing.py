"""Issuing a check: by a person who did not prepare it, with every answer on the sheet; its bytes are kept."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from typing import Any

from sqlalchemy import select
from sqlalchemy.orm import undefer

from server import sheets, storage
from server.errors import DocumentError, Fault
from server.jobs.content import bytes_hash
from server.jobs.hindrances import Hindrance, hindrances
from server.jobs.revisions import SavedRevision, revision
from server.jobs.saving import sheet_data
from server.library import NotFoundError, fields
from server.library.acts import outside_faults
from server.library.record import MOST
from server.people import CHECKS, Person
from server.storage import Session
from server.storage.evidence_tables import IssueRow

Draw = Callable[[sheets.SheetData], bytes]


@dataclass(frozen=True)
class Issue:
    """One issued revision. ``state`` is "issued" for the last one of its check, "superseded" for those before."""

    revision_id: int
    check_id: int
    state: str
    prepared_by: str
    issued_by: str
    issued_at: str
    outside_checker: str
    checked_on: str
    answers: Sequence[Mapping[str, Any]]
    pdf_sha256: str


def issue(
    session: Session,
    revision_id: int,
    *,
    by: Person,
    outside_checker: str = "",
    checked_on: str = "",
    now: datetime | None = None,
    draw: Draw | None = None,
) -> Issue:
    """Issue a saved revision: its sheet is drawn once more, with answers and names, and kept.

    Where one person does everything, or nobody signs in, ``outside_checker`` names who looked the check over from
    outside, on which day (``checked_on``, year-month-day). An earlier issued revision of the check becomes superseded.

    Raises
    ------
    DocumentError
        With everything that still holds the check back, by what each is about.
    """
    saved = revision(session, revision_id)
    faults: list[Fault] = []
    outside = fields.line(faults, "outside_checker", outside_checker)
    every = hindrances(session, revision_id, by)
    against = [each for each in every if each.open]
    if outside:
        against = [each for each in against if each.kind != "person" or not by.may(CHECKS) or not saved.made_by]
        faults += outside_faults(session, by, outside, checked_on, [saved.made_by], CHECKS, now)
    faults += [Fault(each.about, each.text) for each in against]
    if faults:
        raise DocumentError(faults)
    at = storage.utc_text(now)
    given = [_kept(each) for each in every if each.answerable]
    pdf = (draw or sheets.pdf)(_sheet(saved, every, by, outside, checked_on.strip(), at))
    row = IssueRow(
        check_revision_id=saved.id,
        check_id=saved.check_id,
        prepared_by=saved.made_by,
        issued_by=by.name,
        person_id=by.id or None,
        outside_checker=outside,
        checked_on=checked_on.strip() if outside else "",
        answers=given,
        pdf=pdf,
        pdf_sha256=bytes_hash(pdf),
        at=at,
    )
    with storage.write(session):
        today = revision(session, revision_id)
        if today.newest != saved.newest or session.get(IssueRow, saved.id) is not None:
            raise DocumentError([Fault("revision", "This check was changed meanwhile; look at it again.")])
        session.add(row)
        storage.note(
            session,
            at=at,
            who=by.name,
            what="check issued",
            subject=f"job {saved.heading['job_number']}",
            detail={
                "check": saved.check_number,
                "mark": saved.mark,
                "revision": saved.revision,
                "outside_checker": outside,
                "answers": len(given),
                "pdf_sha256": row.pdf_sha256,
            },
        )
    found = issue_of(session, revision_id)
    assert found is not None
    return found


def issue_of(session: Session, revision_id: int) -> Issue | None:
    """Return how a revision was issued; None where it was not."""
    row = session.get(IssueRow, revision_id) if 0 < revision_id < MOST else None
    return (
        None
        if row is None
        else next(each for each in issues(session, row.check_id) if each.revision_id == row.check_revision_id)
    )


def issues(session: Session, check_id: int) -> list[Issue]:
    """Return the issued revisions of a check, the last one first."""
    if not 0 < check_id < MOST:
        return []
    query = select(IssueRow).where(IssueRow.check_id == check_id).order_by(IssueRow.check_revision_id.desc())
    return [_issue(row, "issued" if place == 0 else "superseded") for place, row in enumerate(session.scalars(query))]


def issued_pdf(session: Session, revision_id: int) -> bytes:
    """Return the sheet of an issued revision: the bytes that went out."""
    row = None
    if 0 < revision_id < MOST:
        query = select(IssueRow).where(IssueRow.check_revision_id == revision_id).options(undefer(IssueRow.pdf))
        row = session.scalars(query).one_or_none()
    if row is None:
        raise NotFoundError("This revision is not issued; its working sheet stands under the check.")
    return row.pdf


def _issue(row: IssueRow, state: str) -> Issue:
    return Issue(
        revision_id=row.check_revision_id,
        check_id=row.check_id,
        state=state,
        prepared_by=row.prepared_by,
        issued_by=row.issued_by,
        issued_at=row.at,
        outside_checker=row.outside_checker,
        checked_on=row.checked_on,
        answers=tuple(row.answers),
        pdf_sha256=row.pdf_sha256,
    )


def _kept(each: Hindrance) -> dict[str, Any]:
    """What stays with the issue of one question: its words, whatever the program asks later, and the answer."""
    names = ("key", "kind", "about", "where", "tested", "used", "text", "answer", "answered_by", "answered_at")
    return {name: getattr(each, name) for name in names}


def _sheet(
    saved: SavedRevision, every: Sequence[Hindrance], by: Person, outside: str, checked_on: str, at: str
) -> sheets.SheetData:
    content = {name: getattr(saved, name) for name in ("heading", "document", "values_used", "result", "engine")}
    issued = datetime.strptime(at, "%Y-%m-%dT%H:%M:%SZ").replace(tzinfo=UTC)
    checker = f"{outside}, {checked_on} (outside checker)" if outside else f"{by.name}, {at[:10]}"
    cautions = {str(each.get("text")) for each in saved.result.get("cautions", ())}
    asked = [each for each in every if each.answerable]
    return replace(
        sheet_data(content, saved.sha256),
        status=f"issued {at[:10]}",
        checked=checker,
        saved_at=int(issued.timestamp()),
        replies={each.text: _signed(each) for each in asked if each.text in cautions},
        answered=tuple((_about(each), each.text, _signed(each)) for each in asked if each.text not in cautions),
    )


def _about(each: Hindrance) -> str:
    return f"{each.about}, {each.where}" if each.where else each.about


def _signed(each: Hindrance) -> str:
    return f"{each.answer} ({each.answered_by or 'without a name'}, {each.answered_at[:10]})"
