"""From ``{"record": KEY, "revision": n}`` in a document to the values of that record."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from server import documents
from server.documents import Document, Reference
from server.errors import DocumentError, Fault
from server.library import records
from server.library.groups import BY_SECTION, GROUPS, Group
from server.library.nearest import nearest_words
from server.library.records import NotFoundError, Record
from server.storage import Session


def resolve(session: Session, document: Document) -> Document:
    """Return ``document`` with every reference filled: the record's values with record, revision, source and status.

    Without a revision a reference takes the revision in force: the newest approved one, or, where a later revision put
    the record on hold, withdrew or superseded it, that one, so that the check sees it.

    Raises
    ------
    DocumentError
        With every reference that cannot be filled: unknown key, another group's key, no such revision, none in force.
    """
    faults: list[Fault] = []
    filled: dict[str, dict[str, dict[str, Any]]] = {}
    for section, name, reference in references(document):
        path = f"{section}.{name}"
        record = _find(session, path, BY_SECTION[section], reference, faults)
        if record is not None:
            filled.setdefault(section, {})[name] = entry(record)
    if faults:
        raise DocumentError(faults)
    return documents.fill(document, filled) if filled else document


def references(document: Document) -> Iterator[tuple[str, str, Reference]]:
    """Yield section, name and reference of each entry that stands in the library."""
    for section in BY_SECTION:
        for name, value in getattr(document, section).items():
            if isinstance(value, Reference):
                yield section, name, value


def entry(record: Record) -> dict[str, Any]:
    """Return the record's values as a document holds them, with where they come from and what they count as today."""
    found: dict[str, Any] = {**record.values, "record": record.key, "revision": record.revision}
    found["status"] = standing(record)
    if record.source:
        found["source"] = record.source
    if record.note:
        found["note"] = record.note
    return found


def standing(record: Record) -> str:
    """Return what a revision counts as today: its own status, unless a later revision decided otherwise.

    A later hold or withdrawal stops the older revisions too. A later approval makes an older approved or provisional
    revision superseded; a draft or indicative one stays what it was, as superseded would count for more.
    """
    later = record.in_force is not None and record.in_force > record.revision
    if later and record.in_force_status in ("on hold", "withdrawn"):
        return record.in_force_status
    return "superseded" if later and record.status in ("approved", "provisional") else record.status


def _find(session: Session, path: str, group: Group, reference: Reference, faults: list[Fault]) -> Record | None:
    key, revision = reference.record, reference.revision
    try:
        newest = records.get(session, key)
    except NotFoundError:
        message = f"there is no record {key!r} among the {group.name}. {nearest_words(session, key, group.name)}"
        faults.append(Fault(f"{path}.record", message))
        return None
    if newest.group != group.name:
        message = f"{newest.key} is {GROUPS[newest.group].one}; {group.one} is wanted here. "
        faults.append(Fault(f"{path}.record", message + nearest_words(session, key, group.name)))
        return None
    chosen = newest.in_force if revision is None else revision
    if chosen is None:
        message = (
            f"no revision of {newest.key} is approved (revision {newest.newest} is {newest.status}). Have it approved, "
            f'or name a revision: {{"record": "{newest.key}", "revision": {newest.newest}}}.'
        )
        faults.append(Fault(f"{path}.record", message))
        return None
    if not 1 <= chosen <= newest.newest:
        message = f"{newest.key} has no revision {chosen}; it has revisions 1 to {newest.newest}."
        faults.append(Fault(f"{path}.revision", message))
        return None
    return newest if chosen == newest.revision else records.get(session, key, chosen)
