"""Where a record is used: the saved checks that stand on it."""

from __future__ import annotations

from dataclasses import dataclass

from sqlalchemy import func, select
from sqlalchemy.orm import aliased

from server.library.reading import is_key
from server.library.record import MOST
from server.storage import Session
from server.storage.tables import Check, CheckRevision, CheckValue, Job


@dataclass(frozen=True)
class Use:
    """One saved revision of a check that used a record; ``newest``: no later revision of that check exists."""

    record_revision: int
    name: str
    job_id: int
    job_number: str
    job_title: str
    check_id: int
    check_number: int
    mark: str
    check_revision_id: int
    n: int
    verdict: str
    created_at: str
    newest: bool


def where_used(
    session: Session, key: str, *, revision: int | None = None, limit: int = 500, offset: int = 0
) -> list[Use]:
    """Return the saved check revisions that used record ``key`` (that ``revision`` of it), newest first."""
    if not is_key(key):
        return []
    later = aliased(CheckRevision)
    newest = select(func.max(later.n)).where(later.check_id == Check.id).scalar_subquery()
    query = (
        select(CheckValue, CheckRevision, Check, Job, newest)
        .join(CheckRevision, CheckRevision.id == CheckValue.check_revision_id)
        .join(Check, Check.id == CheckRevision.check_id)
        .join(Job, Job.id == Check.job_id)
        .where(CheckValue.record_key == key)
        .order_by(CheckRevision.id.desc(), CheckValue.name)
        .limit(min(max(limit, 0), MOST))
        .offset(min(max(offset, 0), MOST))
    )
    if revision is not None:
        query = query.where(CheckValue.record_revision == min(max(revision, 0), MOST))
    return [
        Use(
            record_revision=value.record_revision,
            name=value.name,
            job_id=job.id,
            job_number=job.number,
            job_title=job.title,
            check_id=check.id,
            check_number=check.number,
            mark=check.mark,
            check_revision_id=saved.id,
            n=saved.n,
            verdict=saved.verdict,
            created_at=saved.created_at,
            newest=saved.n == last,
        )
        for value, saved, check, job, last in session.execute(query)
    ]
