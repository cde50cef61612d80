"""Acts: how a revision comes by its status: put forward, approved, held, withdrawn; each kept with its name."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import UTC, date, datetime
from typing import Any

from server import storage
from server.errors import DocumentError, Fault
from server.library import fields, heads, kept_pages, reading
from server.library.finding import waiting_ids
from server.library.groups import ALL
from server.library.lot_acts import read_told
from server.library.obstacles import entered_by, obstacles, others_who_may
from server.library.reading import PUT_FORWARD
from server.library.record import NotFoundError, Record
from server.library.rules import rules, status_by_number
from server.library.states import IN_WORK, good, steps, word
from server.people import APPROVES, PREPARES, Person, anybody
from server.storage import Session
from server.storage.evidence_tables import ActRow
from server.storage.tables import RecordRevision as RevisionRow


def put_forward(
    session: Session,
    key: str,
    *,
    by: Person,
    reason: str = "",
    revision: int | None = None,
    now: datetime | None = None,
) -> Record:
    """Send a revision for approval: a value then counts as its coupons' number says, until somebody approves it."""
    record = reading.get(session, key, revision)
    faults = _not_newest(record)
    if record.status not in IN_WORK:
        faults.append(Fault("status", f"{record.itself} is {record.status}; only work in progress is put forward."))
    if record.group == "lots":
        faults.append(Fault("status", f"{record.itself} is released on its page; nothing is put forward for it."))
    text = fields.prose(faults, "reason", reason)
    if faults:
        raise DocumentError(faults)
    status = status_by_number(record, rules(session)) if record.group == "values" else record.status
    return _act(session, record, status, by, text, now, {PUT_FORWARD: True})


def approve(
    session: Session,
    key: str,
    *,
    by: Person,
    outside_checker: str = "",
    checked_on: str = "",
    note: str = "",
    revision: int | None = None,
    now: datetime | None = None,
) -> Record:
    """Approve a revision, as a person who did not enter it; it is frozen from then on.

    A coupon set is accepted so, a lot released. Who approves a value accepts the coupon set behind it in the same act.

    Where one person does everything, or nobody signs in, ``outside_checker`` names who looked it over from outside, on
    which day (``checked_on``, year-month-day).

    Raises
    ------
    DocumentError
        With everything that stands against it (``obstacles``), by what each is about.
    """
    record = reading.get(session, key, revision)
    faults: list[Fault] = []
    outside = fields.line(faults, "outside_checker", outside_checker)
    words = fields.prose(faults, "note", note)
    against = obstacles(session, record, by)
    if outside:
        against = [each for each in against if each.about != "person" or not by.may(APPROVES)]
        faults += outside_faults(session, by, outside, checked_on, entered_by(session, record), APPROVES, now)
    faults += [Fault(each.about, each.text) for each in against]
    if faults:
        raise DocumentError(faults)
    detail = {"outside_checker": outside, "checked_on": checked_on.strip()} if outside else {}
    return _found_good(session, record, by, words, now, detail)


def approve_invented(
    session: Session, key: str, *, who: str, revision: int | None = None, now: datetime | None = None
) -> Record:
    """Put the approval of an invented person on an invented record of the demo shop, marked as invented.

    Refused wherever people sign in: there is no way past ``approve`` for a shop's own records.
    """
    if anybody(session):
        raise DocumentError([Fault("status", "Approvals are invented for the demo shop alone, before people sign in.")])
    record = reading.get(session, key, revision)
    against = [each for each in obstacles(session, record) if each.about not in ("revision", "expiry")]
    if against:
        raise DocumentError([Fault(each.about, each.text) for each in against])
    return _found_good(session, record, Person(0, who), "", now, {"invented": True})


def _found_good(
    session: Session, record: Record, by: Person, words: str, now: datetime | None, detail: Mapping[str, Any]
) -> Record:
    with storage.write(session):
        behind = record.links.get("set") if record.group == "values" else None
        coupons = None if behind is None else reading.get(session, behind.key, behind.revision)
        if coupons is not None and coupons.status in ("tested", "reviewed"):
            _act(session, coupons, good("sets"), by, f"with {record.itself}", now, detail)
        return _act(session, record, good(record.group), by, words, now, detail)


def set_status(
    session: Session,
    key: str,
    status: str,
    *,
    by: Person,
    reason: str,
    revision: int | None = None,
    told: Mapping[str, str] | None = None,
    now: datetime | None = None,
) -> Record:
    """Bring a revision to another state of its group (``states.steps``): hold, withdraw, reject; the reason is kept.

    ``told`` is what a lot's step needs: ``on``, the day it was opened; ``until`` and ``retest``, the last day and the
    coupon set of the retest that extends it.
    """
    record = reading.get(session, key, revision)
    faults: list[Fault] = []
    status = word(record.group, status)
    text = fields.prose(faults, "reason", reason)
    if not text:
        faults.append(Fault("reason", "The reason is empty; write why, for whoever meets this record later."))
    if not (by.may(PREPARES) or by.may(APPROVES)):
        faults.append(Fault("person", f"{by.name} may not change records."))
    may_become = steps(record.group, record.status)
    if status == record.status and status not in may_become:
        faults.append(Fault("status", f"{record.itself} is {status} already."))
    elif status not in may_become:
        allowed = f"it may become {', '.join(may_become)}" if may_become else "save a new revision to work on it"
        faults.append(Fault("status", f"{record.itself} is {record.status}, not {status[:60]!r} next: {allowed}."))
    detail = read_told(session, faults, record, status, told or {}, now) if record.group == "lots" else {}
    if faults:
        raise DocumentError(faults)
    return _act(session, record, status, by, text, now, detail)


def waiting(session: Session, limit: int = 50) -> list[Record]:
    """Return the records that were put forward and wait for somebody to approve them, oldest first."""
    return [reading.get(session, key, n) for key, n in waiting_ids(session, limit)]


def outside_faults(
    session: Session,
    by: Person,
    outside: str,
    checked_on: str,
    entered: list[str],
    role: str,
    now: datetime | None,
) -> list[Fault]:
    """What is wrong with an outside checker: others could do it, it is the same person, or the day cannot be."""
    faults = []
    others = others_who_may(session, by, role)
    if others:
        message = f"{', '.join(others[:5])} may do this here; an outside checker is for a shop of one person."
        faults.append(Fault("outside_checker", message))
    own = {name.casefold() for name in entered} | ({by.name.casefold()} if by.named else set())
    if outside.casefold() in own:
        faults.append(Fault("outside_checker", f"{outside} entered it; an outside checker is somebody else."))
    try:
        day = date.fromisoformat(checked_on.strip())
    except ValueError:
        faults.append(Fault("checked_on", f"{checked_on[:40]!r} is no day; write year-month-day, such as 2026-11-30."))
        return faults
    today = (datetime.now(UTC) if now is None else now).date()
    if day > today:
        faults.append(Fault("checked_on", f"{day} is still to come; enter the day on which it was looked over."))
    return faults


def _not_newest(record: Record) -> list[Fault]:
    if record.revision == record.newest:
        return []
    return [Fault("revision", f"{record.itself} is not the newest; look at revision {record.newest}.")]


def _act(
    session: Session,
    record: Record,
    status: str,
    by: Person,
    reason: str,
    now: datetime | None,
    detail: Mapping[str, Any],
) -> Record:
    at = storage.utc_text(now)
    with storage.write(session):
        today = reading.get(session, record.key, record.revision)
        if (today.status, today.newest) != (record.status, record.newest):
            raise DocumentError([Fault("status", f"{record.itself} was changed meanwhile; look at it again.")])
        row = session.get(RevisionRow, record.revision_id)
        if row is None:
            raise NotFoundError(f"There is no {record.itself}.")
        act = ActRow(
            record_revision_id=row.id,
            status=status,
            who=by.name,
            person_id=by.id or None,
            at=at,
            reason=reason,
            detail=dict(detail),
        )
        session.add(act)
        session.flush()
        heads.refresh(session, row.record_id)
        if status == "approved" and record.group == "values":
            kept_pages.keep(session, reading.get(session, record.key, record.revision), act.id, at)
        storage.note(
            session,
            at=at,
            who=by.name,
            what=f"{ALL[record.group].one.split(' ', 1)[1]} put forward"
            if detail.get(PUT_FORWARD)
            else f"{ALL[record.group].one.split(' ', 1)[1]} {status}",
            subject=f"record {record.key}",
            detail={"revision": record.revision, "status": status, "reason": reason, **detail},
        )
    return reading.get(session, record.key, record.revision)
