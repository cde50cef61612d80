"""What people do with a record's revision: answer its questions, send it for approval, approve, hold, withdraw."""

from __future__ import annotations

from collections.abc import Callable

from fastapi import APIRouter, Request
from fastapi.responses import RedirectResponse, Response

from server import library
from server.errors import DocumentError, Fault
from server.library import Record
from server.library.lot_acts import TOLD
from server.storage import Session
from server.web import record_page
from server.web.inputs import DbSession, FormValues, Id, whole
from server.web.pages import beside, path_for, see
from server.web.who import Who

router = APIRouter(prefix="/library", include_in_schema=False)

_BOXES = ("note", "outside_checker", "checked_on", "reason", "status", *TOLD)


@router.post("/{key}/revisions/{revision}/answers", name="answer_question")
def answer_question(
    request: Request, session: DbSession, values: FormValues, who: Who, key: str, revision: Id
) -> Response:
    """Write an answer to a question about a revision, and go back to the page it was asked on."""
    question = values.get("question", "")
    box = f"answer-{question}"
    try:
        library.answer(session, key, revision, question, values.get(box, ""), by=who)
    except DocumentError as error:
        record = library.get(session, values.get("back") or key)
        faults = {box: "; ".join(fault.message for fault in error.faults)}
        return record_page.show(request, session, record, errors=faults, values={box: values.get(box, "")})
    back = path_for(request, "show_record", key=values.get("back") or key)
    return RedirectResponse(f"{back}#q-{question}", status_code=303)


@router.post("/{key}/exclude", name="exclude_coupon")
def exclude_coupon(request: Request, session: DbSession, values: FormValues, who: Who, key: str) -> Response:
    """Leave one coupon of a set out, for its cause, without the grid: for sets that are larger than the grid."""
    number = whole(values.get("number", ""))
    try:
        library.exclude(
            session,
            key,
            -1 if number is None else number - 1,
            cause=values.get("cause", ""),
            prevented_by=values.get("prevented_by", ""),
            by=who,
            based_on=whole(values.get("revision", "")),
        )
    except DocumentError as error:
        renamed = [Fault("number" if each.path == "index" else each.path, each.message) for each in error.faults]
        faults = beside(DocumentError(renamed), ("cause", "prevented_by", "number"))
        return record_page.show(request, session, library.get(session, key), errors=faults, values=values)
    return see(request, "show_record", key=key)


@router.post("/{key}/put-forward", name="put_forward")
def put_forward(request: Request, session: DbSession, values: FormValues, who: Who, key: str) -> Response:
    """Send a revision for approval."""
    return _act(request, session, values, key, lambda n: library.put_forward(session, key, by=who, revision=n))


@router.post("/{key}/approve", name="approve_record")
def approve_record(request: Request, session: DbSession, values: FormValues, who: Who, key: str) -> Response:
    """Approve a revision, as somebody who did not enter it."""
    return _act(
        request,
        session,
        values,
        key,
        lambda n: library.approve(
            session,
            key,
            by=who,
            outside_checker=values.get("outside_checker", ""),
            checked_on=values.get("checked_on", ""),
            note=values.get("note", ""),
            revision=n,
        ),
    )


@router.post("/{key}/state", name="set_record_state")
def set_record_state(request: Request, session: DbSession, values: FormValues, who: Who, key: str) -> Response:
    """Bring a revision to another state of its group, with the reason."""
    return _act(
        request,
        session,
        values,
        key,
        lambda n: library.set_status(
            session,
            key,
            values.get("status", ""),
            by=who,
            reason=values.get("reason", ""),
            revision=n,
            told={name: values.get(name, "") for name in TOLD},
        ),
    )


def _act(
    request: Request, session: Session, values: FormValues, key: str, act: Callable[[int | None], Record]
) -> Response:
    """Do it and go back to the record; refused, its page says why, with what was typed."""
    typed = values.get("revision", "").strip()
    revision = whole(typed)
    try:
        if typed and revision is None:  # never the newest in the place of one that cannot be read
            raise DocumentError([Fault("revision", f"{typed[:40]!r} is no revision; open the record's page again.")])
        act(revision)
    except DocumentError as error:
        faults = beside(error, _BOXES)
        return record_page.show(request, session, library.get(session, key, revision), errors=faults, values=values)
    return see(request, "show_record", key=key)
