"""Records are added and edited here. An edit adds a revision; every older one stays readable."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import select

from server import storage
from server.errors import DocumentError, Fault
from server.library import fields, heads
from server.library.groups import ALL, STATUSES, Group
from server.library.links import Given, pinned_records, read_chain, read_links
from server.library.reading import get, is_key
from server.library.record import Factor, Record
from server.library.states import LOT_STATES, SET_STATES, first, word
from server.library.values import check_entry, complete_value
from server.storage import Session
from server.storage.evidence_tables import LinkRow
from server.storage.tables import Record as RecordRow
from server.storage.tables import RecordRevision as RevisionRow

Chain = Sequence[Factor | Mapping[str, Any]]


@dataclass(frozen=True)
class Draft:
    """What a revision is to hold, as it was given."""

    name: str
    values: Mapping[str, Any]
    source: str = ""
    status: str = "draft"
    note: str = ""
    details: Mapping[str, str] | None = None
    links: Mapping[str, Given] | None = None
    chain: Chain | None = None
    made_by: str = ""
    reason: str = ""


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
    links: Mapping[str, Given] | None = None,
    chain: Chain | None = None,
    made_by: str = "",
    reason: str = "",
    now: datetime | None = None,
) -> Record:
    """Add a record as revision 1; without ``key`` the next free one of its group (B-001, V-001, T-001).

    ``links`` names the revisions it stands on by role, ``chain`` the factors of a bond, fastener or material.

    Raises
    ------
    DocumentError
        With every fault: fields as named here, values as ``values.shear_strength``, details as ``details.product``,
        links as ``links.product``, factors as ``chain[0].source``.
    """
    if group not in ALL:
        raise DocumentError([Fault("group", f"{group[:60]!r} is not a group; choose one of {', '.join(ALL)}.")])
    draft = Draft(name, values, source, status, note, details, links, chain, made_by, reason)
    key = key.strip()
    faults = [] if not key or is_key(key) else [_bad_key(key)]
    content = checked(session, ALL[group], draft, faults)
    at = storage.utc_text(now)
    with storage.write(session):
        key = key or _next_key(session, ALL[group])
        if session.scalar(select(RecordRow.id).where(RecordRow.key == key)) is not None:
            raise DocumentError([Fault("key", f"{key} is taken; choose another key, or edit that record.")])
        row = RecordRow(key=key, group=group, created_at=at)
        session.add(row)
        session.flush()
        store(session, row, 1, content, at)
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
    links: Mapping[str, Given] | None = None,
    chain: Chain | None = None,
    based_on: int | None = None,
    made_by: str = "",
    reason: str = "",
    now: datetime | None = None,
) -> Record:
    """Add a revision; what is left out stays as in the newest one, except that an approval never passes on.

    ``based_on`` is the revision that the person had before them: if another was saved meanwhile, nothing is.
    """
    with storage.write(session):
        old = get(session, key)
        if based_on is not None and based_on != old.newest:
            raise DocumentError([_changed_meanwhile(old, based_on)])
        draft = Draft(
            name=old.name if name is None else name,
            values=old.values if values is None else values,
            source=old.source if source is None else source,
            status=_next_status(old) if status is None else status,
            note=old.note if note is None else note,
            details=old.details if details is None else details,
            links=old.links if links is None else links,
            chain=old.chain if chain is None else chain,
            made_by=made_by,
            reason=reason,
        )
        content = checked(session, ALL[old.group], draft, [])
        row = session.scalars(select(RecordRow).where(RecordRow.key == key)).one()
        store(session, row, old.newest + 1, content, storage.utc_text(now))
    return get(session, key)


def _next_status(old: Record) -> str:
    """A new revision is work in progress: what was approved, or a value put forward, begins again as a draft."""
    if old.group in ("sets", "lots"):
        return first(old.group)
    return "draft" if old.group == "values" or old.status == "approved" or old.put_forward else old.status


def _changed_meanwhile(old: Record, based_on: int) -> Fault:
    return Fault(
        "based_on",
        f"{old.key} was changed meanwhile: revision {old.newest} was saved, yours started from revision {based_on}. "
        f"Look at revision {old.newest} and enter your change again.",
    )


def checked(session: Session, group: Group, draft: Draft, faults: list[Fault]) -> dict[str, Any]:
    """Return the columns of a revision, or raise with every fault."""
    content: dict[str, Any] = {
        "name": fields.line(faults, "name", draft.name, needed="what the shop calls it"),
        "status": _status(faults, group, draft.status),
        "source": fields.prose(faults, "source", draft.source),
        "note": fields.prose(faults, "note", draft.note),
        "made_by": fields.line(faults, "made_by", draft.made_by),
        "reason": fields.prose(faults, "reason", draft.reason),
        "details": _details(faults, group, draft.details or {}),
    }
    links = read_links(session, faults, group, draft.links or {})
    pinned = pinned_records(links)
    sound = len(faults)
    content["entry"] = check_entry(faults, group, draft.values, tuple(pinned))
    if group.name == "values" and len(faults) == sound and content["entry"]:
        behind = links["set"][1] if "set" in links else None
        content["entry"], content["details"] = complete_value(
            faults, content["entry"], content["details"], content["source"], behind
        )
    content["chain"] = _chain(session, faults, group, draft, content["entry"], tuple(pinned.values()))
    if faults:
        raise DocumentError(faults)
    content["links"] = {role: [target.key, target.revision] for role, (target, _) in links.items()}
    return content


def _chain(
    session: Session,
    faults: list[Fault],
    group: Group,
    draft: Draft,
    entry: Mapping[str, Any],
    pinned: Sequence[Record],
) -> list[dict[str, Any]]:
    if draft.chain and not group.section:
        faults.append(Fault("chain", f"Factors belong to a bond, a fastener or a material, not to {group.one}."))
        return []
    return read_chain(session, faults, draft.chain or (), entry, pinned)


def _status(faults: list[Fault], group: Group, status: str) -> str:
    """A status somebody may enter: never "approved", and of a value only that it is a draft."""
    status = word(group.name, status)
    known = {"sets": SET_STATES, "lots": LOT_STATES}.get(group.name, STATUSES)
    fields.choice(faults, "status", status, known)
    if group.name in ("sets", "lots") and status in known and status not in (first(group.name), "rejected"):
        message = f"{group.one} begins as {first(group.name)!r}; what comes after is done on its page, under a name."
        faults.append(Fault("status", message))
    if status == "approved":
        message = "Nobody enters 'approved': save the record as a draft, then have another person approve it."
        faults.append(Fault("status", message))
    elif group.name == "values" and status in ("indicative", "provisional", "superseded"):
        message = "A value starts as a draft; its number of coupons decides what it counts as once it is put forward."
        faults.append(Fault("status", message))
    return status


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


def store(session: Session, row: RecordRow, n: int, content: Mapping[str, Any], at: str) -> RevisionRow:
    """Write a revision with all that is derived from it; called inside ``storage.write``."""
    revision = RevisionRow(record_id=row.id, n=n, created_at=at, **content)
    session.add(revision)
    session.flush()
    session.add_all(
        LinkRow(record_revision_id=revision.id, role=role, target_key=key, target_revision=target)
        for role, key, target in _link_rows(content)
    )
    session.flush()
    heads.refresh(session, row.id)
    heads.index(session, row, revision)
    storage.note(
        session,
        at=at,
        who=content["made_by"],
        what="record added" if n == 1 else "record edited",
        subject=f"record {row.key}",
        detail={"revision": n, "status": content["status"], "reason": content["reason"]},
    )
    return revision


def _link_rows(content: Mapping[str, Any]) -> set[tuple[str, str, int]]:
    """The links of a revision: as given, the sets behind its factors, and the lots that its coupons name."""
    found = {(role, key, n) for role, (key, n) in content["links"].items()}
    for factor in content["chain"]:
        pair = [factor[role] for role in ("dry", "conditioned") if role in factor]
        found |= {(f"factor:{factor['name']}", key, n) for key, n in pair}
    coupons = content["entry"].get("coupons", ())
    lots = {str(each.get("lot", "")).strip().casefold() for each in coupons if isinstance(each, Mapping)}
    return found | {("lot", lot, 0) for lot in lots if lot}
