"""What is derived from a record's revisions and acts: where it stands today, and the words it is found by."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from sqlalchemy import select, text

from server.library.groups import DECISIVE
from server.library.states import word
from server.storage import Session
from server.storage.evidence_tables import ActRow, HeadRow
from server.storage.tables import Record as RecordRow
from server.storage.tables import RecordRevision as RevisionRow

_ADHERENDS = ("surface_a_material", "surface_b_material", "material")
# Numbers of single coupons would make every set answer to every number.
_UNSEARCHED = ("coupons", "statistic")


def refresh(session: Session, record_id: int) -> None:
    """Bring the head of one record up to date; called inside ``storage.write``, after every revision and act."""
    record = session.get_one(RecordRow, record_id)
    query = select(RevisionRow.id, RevisionRow.n, RevisionRow.status).where(RevisionRow.record_id == record_id)
    revisions = session.execute(query.order_by(RevisionRow.n)).all()
    acted = select(ActRow.record_revision_id, ActRow.status).where(
        ActRow.record_revision_id.in_([row.id for row in revisions])
    )
    last = {revision_id: status for revision_id, status in session.execute(acted.order_by(ActRow.id))}  # noqa: C416
    standing = [(row.id, row.n, word(record.group, last.get(row.id, row.status))) for row in revisions]
    newest_id, newest, status = standing[-1]
    decided = [(n, state) for _, n, state in standing if state in DECISIVE]
    in_force, in_force_status = decided[-1] if decided else (None, None)
    head = session.get(HeadRow, record_id) or HeadRow(record_id=record_id)
    head.key, head.group, head.newest_id, head.newest, head.status = record.key, record.group, newest_id, newest, status
    head.in_force, head.in_force_status = in_force, in_force_status
    head.property = str(session.get_one(RevisionRow, newest_id).entry.get("property", ""))
    session.add(head)
    session.flush()


def index(session: Session, record: RecordRow, revision: RevisionRow) -> None:
    """Bring the search index of one record up to date; called inside ``storage.write``."""
    targets = " ".join(str(target[0]) for target in revision.links.values())
    words = [
        *revision.details.values(),
        revision.source,
        revision.note,
        revision.made_by,
        targets,
        *_words(revision.entry),
        *(f"{each['name']} {each.get('source', '')}" for each in revision.chain),
    ]
    session.execute(text("DELETE FROM record_search WHERE rowid = :id"), {"id": record.id})
    session.execute(
        text(
            "INSERT INTO record_search (rowid, key, name, words, adherend) VALUES (:id, :key, :name, :words, :adherend)"
        ),
        {
            "id": record.id,
            "key": record.key,
            "name": revision.name,
            "words": "\n".join(words),
            "adherend": "\n".join(revision.details.get(name, "") for name in _ADHERENDS),
        },
    )


def _words(entry: Mapping[str, Any]) -> Iterator[str]:
    for name, value in entry.items():
        if name == "coupons" and isinstance(value, list):
            yield from _lots(value)
        if name in _UNSEARCHED:
            continue
        if isinstance(value, Mapping):
            yield name
            yield from _words(value)
        elif isinstance(value, list):
            yield " ".join(map(str, value))
        else:
            yield f"{name} {value}"


def _lots(coupons: list[Any]) -> list[str]:
    named = {str(each[of]) for each in coupons if isinstance(each, Mapping) for of in ("lot", "batch") if each.get(of)}
    return sorted(named)
