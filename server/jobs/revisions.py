"""Saved revisions of checks, read back as they were saved. Nothing here calculates."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from sqlalchemy import Row, Select, func, select
from sqlalchemy.orm import aliased, undefer

from server.jobs import headings
from server.library import NotFoundError
from server.library.record import MOST
from server.storage import Session
from server.storage.tables import Check as CheckRow
from server.storage.tables import CheckRevision as RevisionRow


@dataclass(frozen=True)
class CheckLine:
    """One revision of a check in a list. ``newest`` is the last revision of that check."""

    id: int
    revision_id: int
    job_id: int
    number: int
    mark: str
    revision: int
    newest: int
    follows_id: int | None
    kind: str
    title: str
    verdict: str
    utilisation: float | None
    made_by: str
    reason: str
    saved_at: str


@dataclass(frozen=True)
class SavedRevision:
    """One unchangeable revision of a check, whole except for its sheet (``pdf_bytes``).

    ``heading`` holds what the sheet says beside the check, as it was on the day: shop_name, shop_address, job_number,
    job_title, customer, drawing, check_number, mark, revision, title, paper, display, made_by, reason, saved_at.
    """

    id: int
    job_id: int
    check_id: int
    check_number: int
    mark: str
    revision: int
    newest: int
    follows_id: int | None
    kind: str
    title: str
    verdict: str
    utilisation: float | None
    heading: Mapping[str, Any]
    document: Mapping[str, Any]
    values_used: Mapping[str, Any]
    result: Mapping[str, Any]
    engine: str
    sha256: str
    pdf_sha256: str
    made_by: str
    reason: str
    saved_at: str


def checks_of(session: Session, job_id: int) -> list[CheckLine]:
    """Return the checks of a job in their order, each as its newest revision."""
    headings.get(session, job_id)
    query = _lines().where(CheckRow.job_id == job_id, RevisionRow.n == _newest()).order_by(CheckRow.number)
    return [_line(row) for row in session.execute(query)]


def revisions_of(session: Session, check_id: int) -> list[CheckLine]:
    """Return every revision of a check, newest first."""
    query = _lines().where(CheckRow.id == _possible(check_id)).order_by(RevisionRow.n.desc())
    found = [_line(row) for row in session.execute(query)]
    if not found:
        raise _no_check(check_id)
    return found


def revision(session: Session, revision_id: int) -> SavedRevision:
    """Return the saved revision with this id; NotFoundError where there is none."""
    query = _whole().where(RevisionRow.id == _possible(revision_id))
    row = session.execute(query).one_or_none()
    if row is None:
        raise NotFoundError(f"There is no saved check with the id {revision_id}. Look for it under its job.")
    return _saved(row)


def revision_of(session: Session, check_id: int, n: int | None = None) -> SavedRevision:
    """Return revision ``n`` of a check, without ``n`` its newest."""
    query = _whole().where(CheckRow.id == _possible(check_id))
    row = session.execute(query.where(RevisionRow.n == (_newest() if n is None else _possible(n)))).one_or_none()
    if row is None:
        newest = revisions_of(session, check_id)[0]
        raise NotFoundError(f"Check {newest.mark} has no revision {n}; it has revisions 1 to {newest.newest}.")
    return _saved(row)


def pdf_bytes(session: Session, revision_id: int) -> bytes:
    """Return the sheet of a saved revision: the bytes that were drawn when it was saved."""
    data = session.scalar(select(RevisionRow.pdf).where(RevisionRow.id == _possible(revision_id)))
    if data is None:
        raise NotFoundError(f"There is no saved check with the id {revision_id}. Look for it under its job.")
    return data


def _newest() -> Any:
    later = aliased(RevisionRow)
    return select(func.max(later.n)).where(later.check_id == CheckRow.id).correlate(CheckRow).scalar_subquery()


def _lines() -> Select[CheckRow, RevisionRow, int]:
    return select(CheckRow, RevisionRow, _newest()).join(RevisionRow, RevisionRow.check_id == CheckRow.id)


def _whole() -> Select[CheckRow, RevisionRow, int]:
    return _lines().options(*(undefer(part) for part in _PARTS))


_PARTS = (RevisionRow.heading, RevisionRow.document, RevisionRow.values_used, RevisionRow.result)


def _line(row: Row[CheckRow, RevisionRow, int]) -> CheckLine:
    check, saved, newest = row
    return CheckLine(
        id=check.id,
        revision_id=saved.id,
        job_id=check.job_id,
        number=check.number,
        mark=check.mark,
        revision=saved.n,
        newest=newest,
        follows_id=saved.follows_id,
        kind=saved.kind,
        title=saved.title,
        verdict=saved.verdict,
        utilisation=saved.utilisation,
        made_by=saved.made_by,
        reason=saved.reason,
        saved_at=saved.created_at,
    )


def _saved(row: Row[CheckRow, RevisionRow, int]) -> SavedRevision:
    check, saved, newest = row
    return SavedRevision(
        id=saved.id,
        job_id=check.job_id,
        check_id=check.id,
        check_number=check.number,
        mark=check.mark,
        revision=saved.n,
        newest=newest,
        follows_id=saved.follows_id,
        kind=saved.kind,
        title=saved.title,
        verdict=saved.verdict,
        utilisation=saved.utilisation,
        heading=saved.heading,
        document=saved.document,
        values_used=saved.values_used,
        result=saved.result,
        engine=saved.engine,
        sha256=saved.sha256,
        pdf_sha256=saved.pdf_sha256,
        made_by=saved.made_by,
        reason=saved.reason,
        saved_at=saved.created_at,
    )


def _possible(number: int) -> int:
    return number if 0 < number < MOST else 0


def _no_check(check_id: int) -> NotFoundError:
    return NotFoundError(f"There is no check with the id {check_id}. Look for it under its job.")
