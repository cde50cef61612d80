"""A job to save into, and a sheet that costs nothing to draw."""

from __future__ import annotations

from datetime import UTC, datetime
from typing import Any

from server import jobs
from server.jobs import Job, SavedRevision
from server.sheets import SheetData
from server.storage import Session
from tests.library.samples import document

NOON = datetime(2026, 12, 1, 12, tzinfo=UTC)


def start_job(session: Session, **more: Any) -> Job:
    return jobs.create(session, **({"title": "Roof beams", "customer": "Invented Barns"} | more))


def quick_sheet(sheet: SheetData) -> bytes:
    """Stands for the PDF: what the sheet says of itself."""
    return f"sheet {sheet.mark} revision {sheet.revision} {sheet.content_hash}".encode()


def save(session: Session, job: Job, raw: Any = None, **more: Any) -> SavedRevision:
    raw = document(shear_strength="4.2 MPa", status="approved") if raw is None else raw
    return jobs.save(session, **({"job_id": job.id, "raw": raw, "draw": quick_sheet, "now": NOON} | more))
