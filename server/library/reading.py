"""Records read back: one revision, all of them, the one in force."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from functools import reduce
from operator import or_
from typing import Any

from sqlalchemy import Row, Select, func, select

from server.library.nearest import nearest_words
from server.library.record import MOST, Act, Approval, Factor, Link, NotFoundError, Record
from server.library.states import FOUND_GOOD, word
from server.storage import Session
from server.storage.evidence_tables import ActRow, HeadRow
from server.storage.tables import Record as RecordRow
from server.storage.tables import RecordRevision as RevisionRow

_KEY = re.compile(r"[A-Za-z0-9](?:[A-Za-z0-9._-]{0,38}[A-Za-z0-9])?")
PUT_FORWARD = "put forward"

Rows = Select[RecordRow, RevisionRow, HeadRow]


def is_key(text: str) -> bool:
    """Return whether ``text`` can be a record's key.

    >>> is_key("B-001"), is_key("B 001")
    (True, False)
    """
    return _KEY.fullmatch(text) is not None


def get(session: Session, key: str, revision: int | None = None) -> Record:
    """Return a revision of record ``key``, the newest without ``revision``; NotFoundError where there is none."""
    query = rows().where(RecordRow.key == _plausible(session, key))
    query = query.where(RevisionRow.n == (HeadRow.newest if revision is None else min(max(revision, 0), MOST)))
    row = session.execute(query).one_or_none()
    if row is None:
        newest = session.scalar(select(func.max(RevisionRow.n)).join(RecordRow).where(RecordRow.key == key))
        if newest is not None:
            raise NotFoundError(f"{key} has no revision {revision}; it has revisions 1 to {newest}.")
        raise _no_record(session, key)
    return records(session, [row])[0]


def revisions(session: Session, key: str) -> list[Record]:
    """Return every revision of record ``key``, newest first."""
    query = rows().where(RecordRow.key == _plausible(session, key)).order_by(RevisionRow.n.desc())
    found = records(session, session.execute(query).all())
    if not found:
        raise _no_record(session, key)
    return found


def in_force(session: Session, key: str) -> Record | None:
    """Return the revision that a reference without a revision takes; None where none was ever approved or stopped."""
    newest = get(session, key)
    return None if newest.in_force is None else get(session, key, newest.in_force)


def many(session: Session, links: Iterable[Link]) -> dict[Link, Record]:
    """Return the revisions that ``links`` name, as far as they are there."""
    wanted = set(links)
    query = rows().where(RecordRow.key.in_({link.key for link in wanted}))
    query = query.where(RevisionRow.n.in_({link.revision for link in wanted}))
    found = {each.itself: each for each in records(session, session.execute(query).all())} if wanted else {}
    return {link: each for link in wanted if (each := found.get(link)) is not None}


def acts(session: Session, key: str, revision: int | None = None) -> list[Act]:
    """Return what happened to a revision's status, oldest first."""
    record = get(session, key, revision)
    return [act for _, act in _acts(session, [record.revision_id])]


def rows() -> Rows:
    """The query that ``records`` makes records of."""
    return (
        select(RecordRow, RevisionRow, HeadRow)
        .join(RevisionRow, RevisionRow.record_id == RecordRow.id)
        .join(HeadRow, HeadRow.record_id == RecordRow.id)
    )


def records(session: Session, found: Sequence[Row[RecordRow, RevisionRow, HeadRow]]) -> list[Record]:
    """Make records of rows; their acts are read in one go."""
    by_revision: dict[int, list[Act]] = {}
    for revision_id, act in _acts(session, [revision.id for _, revision, _ in found]):
        by_revision.setdefault(revision_id, []).append(act)
    return [_record(row, by_revision.get(row[1].id, [])) for row in found]


def _acts(session: Session, revision_ids: Sequence[int]) -> list[tuple[int, Act]]:
    query = select(ActRow).where(ActRow.record_revision_id.in_(revision_ids)).order_by(ActRow.id)
    return [
        (row.record_revision_id, Act(row.status, row.who, row.at, row.reason, row.detail))
        for row in session.scalars(query)
    ]


def _record(row: Row[RecordRow, RevisionRow, HeadRow], acts: Sequence[Act]) -> Record:
    record, revision, head = row
    approved = [act for act in acts if act.status in FOUND_GOOD]
    return Record(
        key=record.key,
        group=record.group,
        revision=revision.n,
        name=revision.name,
        status=word(record.group, acts[-1].status if acts else revision.status),
        values=revision.entry,
        details=revision.details,
        source=revision.source,
        note=revision.note,
        made_by=revision.made_by,
        reason=revision.reason,
        created_at=revision.created_at,
        newest=head.newest,
        in_force=head.in_force,
        in_force_status=head.in_force_status,
        links={role: Link(str(key), int(n)) for role, (key, n) in revision.links.items()},
        chain=tuple(_factor(each) for each in revision.chain),
        approval=_approval(approved[-1]) if approved else None,
        put_forward=bool(acts) and bool(acts[-1].detail.get(PUT_FORWARD)),
        acted=reduce(or_, (dict(act.detail) for act in acts), {}),
        revision_id=revision.id,
    )


def _factor(stored: Mapping[str, Any]) -> Factor:
    pair = {role: Link(*stored[role]) if role in stored else None for role in ("dry", "conditioned")}
    return Factor(stored["name"], stored["value"], stored.get("source", ""), stored.get("evidence", ""), **pair)


def _approval(act: Act) -> Approval:
    return Approval(
        by=act.who,
        at=act.at,
        outside_checker=str(act.detail.get("outside_checker", "")),
        checked_on=str(act.detail.get("checked_on", "")),
        note=act.reason,
        invented=bool(act.detail.get("invented", False)),
    )


def _plausible(session: Session, key: str) -> str:
    """Return ``key`` if it can be one at all: what cannot may not even be text the database takes."""
    if not is_key(key):
        raise _no_record(session, key)
    return key


def _no_record(session: Session, key: str) -> NotFoundError:
    return NotFoundError(f"There is no record {key[:60]!r} in the library. {nearest_words(session, key)}")
