"""A process that saves until it is killed; it tells the id of each save that was acknowledged."""

from __future__ import annotations

from multiprocessing.connection import Connection
from pathlib import Path

from server import storage
from tests.jobs.samples import save, start_job


def save_until_killed(path: Path, acknowledged: Connection) -> None:
    """Save into a new job of the record book at ``path`` without end."""
    with storage.reading(storage.engine(path)) as session:
        job = start_job(session)
        check_id = None
        while True:
            saved = save(session, job, check_id=check_id)
            acknowledged.send((saved.id, saved.sha256))
            check_id = saved.check_id
