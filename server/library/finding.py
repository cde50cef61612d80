"""Search over the whole library; quick however many records there are."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from sqlalchemy import ColumnElement, column, exists, func, literal_column, or_, select, table
from sqlalchemy.orm import aliased

from server import storage
from server.library.groups import ALL
from server.library.properties import PROPERTIES
from server.library.reading import records, rows
from server.library.record import MOST, Found
from server.library.states import ALL_STATES
from server.storage import Session
from server.storage.evidence_tables import ActRow, HeadRow
from server.storage.tables import RecordRevision as RevisionRow

_SEARCH = table("record_search", column("rowid"), column("record_search"))
# Ranking reads every match; where more than this many match, their rank tells nobody anything.
_MOST_RANKED = 500


def search(
    session: Session,
    text: str = "",
    *,
    group: str | Sequence[str] | None = None,
    status: str | None = None,
    adherend: str = "",
    property: str = "",
    limit: int = 50,
    offset: int = 0,
) -> Found:
    """Find records by words of their key, name, source, note, details or values, each from its beginning.

    Each record comes once, as its newest revision. ``status`` finds records whose newest revision, or whose revision
    in force, has it: an approved bond with a newer draft is found as both. ``adherend`` finds words of the materials
    bonded; ``property`` is one of ``PROPERTIES``. A few hundred finds come best match first, more come newest record
    first; without words they come by key.
    """
    groups = [group] if isinstance(group, str) else list(group or ())
    terms = _terms(text, adherend)
    unknown = any(each not in ALL for each in groups) or (status and status not in ALL_STATES)
    if unknown or (property and property not in PROPERTIES) or terms is None:
        return Found((), 0)
    conditions: list[ColumnElement[bool]] = []
    if groups:
        conditions.append(HeadRow.group.in_(groups))
    if status:
        conditions.append(or_(HeadRow.status == status, HeadRow.in_force_status == status))
    if property:
        conditions.append(HeadRow.property == property)
    matching: list[ColumnElement[bool]] = [_SEARCH.c.record_search.op("MATCH")(terms)] if terms else []
    counted = select(func.count()).select_from(HeadRow if conditions or not terms else _SEARCH)
    if terms and conditions:
        matching.append(_SEARCH.c.rowid == HeadRow.record_id)
    total = session.scalar(counted.where(*conditions, *matching)) or 0
    order: list[Any] = [HeadRow.key]
    if terms:
        conditions += [_SEARCH.c.rowid == HeadRow.record_id, matching[0]]
        ranked = [literal_column("record_search.rank"), HeadRow.key]
        # The index gives its entries in order of their numbers: a page of many is there without sorting them all.
        order = ranked if total <= _MOST_RANKED else [_SEARCH.c.rowid.desc()]
    # First the page's keys, on the slim table; only then their revisions with all they hold.
    wanted = select(HeadRow.newest_id).where(*conditions).order_by(*order)
    wanted = wanted.limit(min(max(limit, 0), 500)).offset(min(max(offset, 0), MOST))
    ids = list(session.scalars(wanted))
    found = records(session, session.execute(rows().where(RevisionRow.id.in_(ids))).all())
    place = {revision_id: at for at, revision_id in enumerate(ids)}
    return Found(tuple(sorted(found, key=lambda record: place[record.revision_id])), total)


def _terms(text: str, adherend: str) -> str | None:
    """The full-text query; '' where nothing was asked for, None where what was typed holds no word."""
    words, bonded = storage.search_terms(text), storage.search_terms(adherend)
    if (text.strip() and words is None) or (adherend.strip() and bonded is None):
        return None
    if words and bonded:
        return f"({words}) AND adherend : ({bonded})"
    return f"adherend : ({bonded})" if bonded else words or ""


def waiting_ids(session: Session, limit: int) -> list[tuple[str, int]]:
    """Keys and revisions that were put forward and not decided upon since, oldest first; never what only indicates."""
    later = aliased(ActRow)
    decided = exists().where(later.record_revision_id == ActRow.record_revision_id, later.id > ActRow.id)
    query = (
        select(HeadRow.key, HeadRow.newest)
        .select_from(ActRow)
        .join(RevisionRow, RevisionRow.id == ActRow.record_revision_id)
        .join(HeadRow, HeadRow.record_id == RevisionRow.record_id)
        .where(HeadRow.newest_id == RevisionRow.id, ~decided)
        .where(HeadRow.status.in_(("draft", "provisional", "tested", "reviewed", "quarantined")))
        .where(func.json_extract(ActRow.detail, '$."put forward"') == 1)
        .order_by(ActRow.id)
        .limit(limit)
    )
    return [(key, newest) for key, newest in session.execute(query)]
