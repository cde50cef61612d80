"""Records and their revisions: add, edit, read, search. An edit adds a revision; every older one stays readable."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import ColumnElement, Row, Select, column, func, literal_column, or_, select, table, text
from sqlalchemy.orm import aliased

from server import storage
from server.errors import DocumentError, Fault, JointError
from server.library import fields
from server.library.groups import DECISIVE, GROUPS, STATUSES, Group
from server.library.nearest import nearest_words
from server.library.values import check_entry
from server.storage import Session
from server.storage.tables import Record as RecordRow
from server.storage.tables import RecordRevision as RevisionRow
from server.storage.tables import compact

_KEY = re.compile(r"[A-Za-z0-9](?:[A-Za-z0-9._-]{0,38}[A-Za-z0-9])?")
MOST = 1_000_000_000  # beyond any revision or page; SQLite refuses numbers of more than 64 bits
_SEARCH = table("record_search", column("rowid"), column("record_search"))


class NotFoundError(JointError):
    """There is no such record, revision, job or check."""


@dataclass(frozen=True)
class Record:
    """One revision of a record.

    ``newest`` is the record's last revision; ``in_force`` the one that a reference without a revision takes, with its
    status (None: no revision was ever approved, put on hold, withdrawn or superseded).
    """

    key: str
    group: str
    revision: int
    name: str
    status: str
    values: Mapping[str, Any]
    details: Mapping[str, str]
    source: str
    note: str
    made_by: str
    reason: str
    created_at: str
    newest: int
    in_force: int | None
    in_force_status: str | None


@dataclass(frozen=True)
class Found:
    """One page of a search, and how many there are in all."""

    records: Sequence[Record]
    total: int


def add(
    session: Session,
    *,
    group: str,
    name: str,
    values: Mapping[str, Any],
    key: str = "",
    source: str = "",
    status: str = "draft",
    note: str = "",
    details: Mapping[str, str] | None = None,
    made_by: str = "",
    reason: str = "",
    now: datetime | None = None,
) -> Record:
    """Add a record as revision 1; without ``key`` the next free one of its group (B-001, F-001, M-001).

    Raises
    ------
    DocumentError
        With every fault: fields as named here, values as ``values.shear_strength``, details as ``details.product``.
    """
    if group not in GROUPS:
        raise DocumentError([Fault("group", f"{group[:60]!r} is not a group; choose one of {', '.join(GROUPS)}.")])
    words = {"name": name, "source": source, "status": status, "note": note, "made_by": made_by, "reason": reason}
    key = key.strip()
    faults = [] if not key or is_key(key) else [_bad_key(key)]
    content = _checked(GROUPS[group], words, values, details or {}, faults)
    at = storage.utc_text(now)
    with storage.write(session):
        key = key or _next_key(session, GROUPS[group])
        if session.scalar(select(RecordRow.id).where(RecordRow.key == key)) is not None:
            raise DocumentError([Fault("key", f"{key} is taken; choose another key, or edit that record.")])
        row = RecordRow(key=key, group=group, created_at=at)
        session.add(row)
        session.flush()
        _store(session, row, 1, content, at)
    return get(session, key)


def edit(
    session: Session,
    key: str,
    *,
    name: str | None = None,
    values: Mapping[str, Any] | None = None,
    source: str | None = None,
    status: str | None = None,
    note: str | None = None,
    details: Mapping[str, str] | None = None,
    based_on: int | None = None,
    made_by: str = "",
    reason: str = "",
    now: datetime | None = None,
) -> Record:
    """Add a revision; what is left out stays as in the newest one.

    ``based_on`` is the revision that the person had before them: if another was saved meanwhile, nothing is.
    """
    with storage.write(session):
        old = get(session, key)
        if based_on is not None and based_on != old.newest:
            raise DocumentError(
                [
                    Fault(
                        "based_on",
                        f"{old.key} was changed meanwhile: revision {old.newest} was saved, yours started from "
                        f"revision {based_on}. Look at revision {old.newest} and enter your change again.",
                    )
                ]
            )
        words = {
            "name": old.name if name is None else name,
            "source": old.source if source is None else source,
            "status": old.status if status is None else status,
            "note": old.note if note is None else note,
            "made_by": made_by,
            "reason": reason,
        }
        content = _checked(
            GROUPS[old.group],
            words,
            old.values if values is None else values,
            old.details if details is None else details,
            [],
        )
        row = session.scalars(select(RecordRow).where(RecordRow.key == key)).one()
        _store(session, row, old.newest + 1, content, storage.utc_text(now))
    return get(session, key)


def get(session: Session, key: str, revision: int | None = None) -> Record:
    """Return a revision of record ``key``, the newest without ``revision``; NotFoundError where there is none."""
    query = _revisions().where(RecordRow.key == _plausible(session, key))
    query = query.where(RevisionRow.n == (_newest() if revision is None else min(max(revision, 0), MOST)))
    row = session.execute(query).one_or_none()
    if row is None:
        newest = session.scalar(select(func.max(RevisionRow.n)).join(RecordRow).where(RecordRow.key == key))
        if newest is not None:
            raise NotFoundError(f"{key} has no revision {revision}; it has revisions 1 to {newest}.")
        raise _no_record(session, key)
    return _record(row)


def revisions(session: Session, key: str) -> list[Record]:
    """Return every revision of record ``key``, newest first."""
    query = _revisions().where(RecordRow.key == _plausible(session, key))
    found = [_record(row) for row in session.execute(query)]
    if not found:
        raise _no_record(session, key)
    return sorted(found, key=lambda record: -record.revision)


def in_force(session: Session, key: str) -> Record | None:
    """Return the revision that a reference without a revision takes; None where none was ever approved or stopped."""
    newest = get(session, key)
    return None if newest.in_force is None else get(session, key, newest.in_force)


def search(
    session: Session,
    text: str = "",
    *,
    group: str | None = None,
    status: str | None = None,
    limit: int = 50,
    offset: int = 0,
) -> Found:
    """Find records by words of their key, name, source, note, details or values, each from its beginning.

    Each record comes once, as its newest revision. ``status`` finds records whose newest revision, or whose revision
    in force, has it: an approved bond with a newer draft is found as both.
    """
    conditions: list[ColumnElement[bool]] = [RevisionRow.n == _newest()]
    if group:
        conditions.append(RecordRow.group == group)
    if status:
        conditions.append(or_(RevisionRow.status == status, _in_force(RevisionRow.status) == status))
    terms = storage.search_terms(text)
    unknown = (group and group not in GROUPS) or (status and status not in STATUSES)
    if unknown or (text.strip() and terms is None):
        return Found((), 0)
    order: list[Any] = [RecordRow.key]
    if terms is not None:
        conditions += [_SEARCH.c.rowid == RecordRow.id, _SEARCH.c.record_search.op("MATCH")(terms)]
        order = [literal_column("record_search.rank"), RecordRow.key]
    total = session.scalar(select(func.count()).select_from(RecordRow).join(RevisionRow).where(*conditions)) or 0
    query = _revisions().where(*conditions).order_by(*order).limit(min(max(limit, 0), 500))
    query = query.offset(min(max(offset, 0), MOST))
    return Found(tuple(_record(row) for row in session.execute(query)), total)


def _newest() -> Any:
    other = aliased(RevisionRow)
    return select(func.max(other.n)).where(other.record_id == RecordRow.id).correlate(RecordRow).scalar_subquery()


def _in_force(what: Any = RevisionRow.n) -> Any:
    """The number, or another column, of the last revision whose status decides."""
    other = aliased(RevisionRow)
    mine = (other.record_id == RecordRow.id) & other.status.in_(DECISIVE)
    chosen = select(getattr(other, what.key)).where(mine).order_by(other.n.desc()).limit(1)
    return chosen.correlate(RecordRow).scalar_subquery()


def _revisions() -> Select[RecordRow, RevisionRow, int, int | None, str | None]:
    return select(RecordRow, RevisionRow, _newest(), _in_force(), _in_force(RevisionRow.status)).join(RevisionRow)


def _record(row: Row[RecordRow, RevisionRow, int, int | None, str | None]) -> Record:
    record, revision, newest, in_force, in_force_status = row
    return Record(
        key=record.key,
        group=record.group,
        revision=revision.n,
        name=revision.name,
        status=revision.status,
        values=revision.entry,
        details=revision.details,
        source=revision.source,
        note=revision.note,
        made_by=revision.made_by,
        reason=revision.reason,
        created_at=revision.created_at,
        newest=newest,
        in_force=in_force,
        in_force_status=in_force_status,
    )


def _checked(
    group: Group, words: Mapping[str, str], values: Mapping[str, Any], details: Mapping[str, str], faults: list[Fault]
) -> dict[str, Any]:
    """Return the columns of a revision, or raise with every fault."""
    content: dict[str, Any] = {
        "name": fields.line(faults, "name", words["name"], needed="what the shop calls it"),
        "status": fields.choice(faults, "status", words["status"], STATUSES),
        "source": fields.prose(faults, "source", words["source"]),
        "note": fields.prose(faults, "note", words["note"]),
        "made_by": fields.line(faults, "made_by", words["made_by"]),
        "reason": fields.prose(faults, "reason", words["reason"]),
        "details": _details(faults, group, details),
        "entry": check_entry(faults, group, values),
    }
    if content["status"] == "approved" and not content["source"]:
        faults.append(
            Fault("source", "The source is empty; name the test report or standard before the values are approved.")
        )
    if faults:
        raise DocumentError(faults)
    return content


def _details(faults: list[Fault], group: Group, details: Mapping[str, str]) -> dict[str, str]:
    for name in details:
        if name not in group.details:
            known = ", ".join(group.details)
            faults.append(Fault(f"details.{name[:60]}", f"{group.one} has no such field; it has {known}."))
    cleaned = {
        name: fields.prose(faults, f"details.{name}", details[name], most=1000)
        for name in group.details
        if name in details
    }
    return {name: text for name, text in cleaned.items() if text}


def _bad_key(key: str) -> Fault:
    return Fault(
        "key",
        f"{key[:60]!r} cannot be a key; use 1 to 40 letters, digits, hyphens, dots or underscores, such as B-001, or "
        "leave it empty for the next free one.",
    )


def _next_key(session: Session, group: Group) -> str:
    keys = session.scalars(select(RecordRow.key).where(RecordRow.key.istartswith(f"{group.prefix}-", autoescape=True)))
    numbers = [int(tail) for key in keys if (tail := key[len(group.prefix) + 1 :]).isdecimal() and len(tail) < 10]
    return f"{group.prefix}-{max(numbers, default=0) + 1:03d}"


def _store(session: Session, row: RecordRow, n: int, content: Mapping[str, Any], at: str) -> None:
    session.add(RevisionRow(record_id=row.id, n=n, created_at=at, **content))
    session.flush()
    words = [*content["details"].values(), content["source"], content["note"], content["made_by"]]
    session.execute(text("DELETE FROM record_search WHERE rowid = :id"), {"id": row.id})
    session.execute(
        text("INSERT INTO record_search (rowid, key, name, words) VALUES (:id, :key, :name, :words)"),
        {
            "id": row.id,
            "key": row.key,
            "name": content["name"],
            "words": "\n".join([*words, compact(content["entry"])]),
        },
    )
    storage.note(
        session,
        at=at,
        who=content["made_by"],
        what="record added" if n == 1 else "record edited",
        subject=f"record {row.key}",
        detail={"revision": n, "status": content["status"], "reason": content["reason"]},
    )


def is_key(text: str) -> bool:
    """Return whether ``text`` can be a record's key.

    >>> is_key("B-001"), is_key("B 001")
    (True, False)
    """
    return _KEY.fullmatch(text) is not None


def _plausible(session: Session, key: str) -> str:
    """Return ``key`` if it can be one at all: what cannot may not even be text the database takes."""
    if not is_key(key):
        raise _no_record(session, key)
    return key


def _no_record(session: Session, key: str) -> NotFoundError:
    return NotFoundError(f"There is no record {key[:60]!r} in the library. {nearest_words(session, key)}")
