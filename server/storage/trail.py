"""The trail: who did what to which subject, when. Lines are added, never changed."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

from sqlalchemy import select

from server.storage.sessions import Session
from server.storage.tables import TrailEntry


@dataclass(frozen=True)
class TrailLine:
    """One line of the trail; ``subject`` reads like "record B-001" or "job 2026-014"."""

    id: int
    at: str
    who: str
    what: str
    subject: str
    detail: Mapping[str, Any]


def utc_text(now: datetime | None = None) -> str:
    """Return ``now`` (left out: this moment) in UTC as "2026-12-01T09:30:00Z".

    >>> utc_text(datetime(2026, 12, 1, 9, 30, tzinfo=UTC))
    '2026-12-01T09:30:00Z'
    """
    moment = datetime.now(UTC) if now is None else now.astimezone(UTC)
    return moment.strftime("%Y-%m-%dT%H:%M:%SZ")


def note(
    session: Session, *, at: str, who: str, what: str, subject: str, detail: Mapping[str, Any] | None = None
) -> None:
    """Add a line; it stands or falls with the change it tells of."""
    session.add(TrailEntry(at=at, who=who, what=what, subject=subject, detail=dict(detail or {})))


def lines(session: Session, *, subject: str | None = None, limit: int = 100, offset: int = 0) -> list[TrailLine]:
    """Return lines, newest first; of one subject when it is given."""
    query = select(TrailEntry).order_by(TrailEntry.id.desc()).limit(min(limit, 1000)).offset(min(offset, 1_000_000_000))
    if subject is not None:
        query = query.where(TrailEntry.subject == subject)
    return [
        TrailLine(id=row.id, at=row.at, who=row.who, what=row.what, subject=row.subject, detail=row.detail)
        for row in session.scalars(query)
    ]
