"""What stands between a saved check and its issue: differences from the tests, cautions, values; answers; the act."""

from __future__ import annotations

from fastapi import APIRouter, Request
from fastapi.responses import RedirectResponse, Response

from server import jobs
from server.errors import DocumentError
from server.web import saved as saved_page
from server.web.inputs import DbSession, FormValues, Id
from server.web.pages import beside, path_for
from server.web.who import Who

router = APIRouter(prefix="/checks/{check_id}/revisions/{revision}", include_in_schema=False)

_BOXES = ("outside_checker", "checked_on")


@router.post("/answers", name="answer_hindrance")
def answer_hindrance(
    request: Request, session: DbSession, values: FormValues, who: Who, check_id: Id, revision: Id
) -> Response:
    """Write an answer to what holds a check back, and go back to it."""
    saved = jobs.revision_of(session, check_id, revision)
    key = values.get("question", "")
    box = f"answer-{key}"
    try:
        jobs.answer(session, saved.id, key, values.get(box, ""), by=who)
    except DocumentError as error:
        faults = {box: "; ".join(fault.message for fault in error.faults)}
        return saved_page.show(request, session, saved, errors=faults, values={box: values.get(box, "")})
    where = path_for(request, "show_revision", check_id=check_id, revision=revision)
    return RedirectResponse(f"{where}#h-{key}", status_code=303)


@router.post("/issue", name="issue_check")
def issue_check(
    request: Request, session: DbSession, values: FormValues, who: Who, check_id: Id, revision: Id
) -> Response:
    """Issue a revision: its sheet is drawn once more with the answers, and kept."""
    saved = jobs.revision_of(session, check_id, revision)
    try:
        jobs.issue(
            session,
            saved.id,
            by=who,
            outside_checker=values.get("outside_checker", ""),
            checked_on=values.get("checked_on", ""),
        )
    except DocumentError as error:
        return saved_page.show(request, session, saved, errors=beside(error, _BOXES), values=values)
    where = path_for(request, "show_revision", check_id=check_id, revision=revision)
    return RedirectResponse(f"{where}#issue", status_code=303)


@router.get("/issued.pdf", name="issued_pdf")
def issued_pdf(session: DbSession, check_id: Id, revision: Id) -> Response:
    """Hand out the issued sheet: the bytes drawn when the revision was issued."""
    saved = jobs.revision_of(session, check_id, revision)
    headers = {"Content-Disposition": f'inline; filename="{saved_page.file_name(saved)}-issued.pdf"'}
    return Response(jobs.issued_pdf(session, saved.id), media_type="application/pdf", headers=headers)
