"""A process that saves until it is killed; it tells the id and hash of each save that was acknowledged."""

from __future__ import annotations

from multiprocessing.connection import Connection
from pathlib import Path

from server import checks, documents, storage
from tests.jobs.samples import save, start_job
from tests.library.samples import document


def save_until_killed(path: Path, acknowledged: Connection) -> None:
    """Save into a new job of the record book at ``path`` without end."""
    raw = document(shear_strength="4.2 MPa", status="approved")
    result = checks.run(documents.read(raw))  # once, so that most of the time goes into saving
    with storage.reading(storage.engine(path)) as session:
        job = start_job(session)
        check_id = None
        while True:
            saved = save(session, job, raw, check_id=check_id, run=lambda _: result)
            acknowledged.send((saved.id, saved.sha256))
            check_id = saved.check_id
