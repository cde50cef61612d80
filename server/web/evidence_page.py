"""The evidence page of a value as PDF: as it stands today, and as it was kept when the value was approved."""

from __future__ import annotations

from fastapi import APIRouter
from fastapi.responses import Response

from server import library
from server.library import Record
from server.storage import Session
from server.web.inputs import DbSession, Id

router = APIRouter(prefix="/library", include_in_schema=False)


@router.get("/{key}/revisions/{revision}/evidence.pdf", name="evidence_page")
def evidence_page(session: DbSession, key: str, revision: Id) -> Response:
    """Draw the evidence page of one revision of a value as it stands today."""
    record = _value(session, key, revision)
    return _handed(library.evidence_pdf(session, record), record, "evidence")


@router.get("/{key}/revisions/{revision}/evidence-as-approved.pdf", name="kept_evidence")
def kept_evidence(session: DbSession, key: str, revision: Id) -> Response:
    """Hand out the page that was kept when the revision was approved."""
    record = _value(session, key, revision)
    return _handed(library.kept_pdf(session, record), record, "evidence-as-approved")


def _value(session: Session, key: str, revision: int) -> Record:
    record = library.get(session, key, revision)
    if record.group != "values":
        raise library.NotFoundError(f"{record.key} is no value; only values have an evidence page.")
    return record


def _handed(pdf: bytes, record: Record, what: str) -> Response:
    headers = {"Content-Disposition": f'inline; filename="{record.key}-rev-{record.revision}-{what}.pdf"'}
    return Response(pdf, media_type="application/pdf", headers=headers)
