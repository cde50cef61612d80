"""Saving a check: read, fill, run and draw first; then one short transaction that keeps it all for ever."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

from sqlalchemy import func, select

from server import checks, documents, library, sheets, storage
from server.documents import Document
from server.errors import DocumentError, Fault
from server.jobs import headings
from server.jobs.content import bytes_hash, content_hash, leaves
from server.jobs.revisions import SavedRevision, revision
from server.jobs.shop import shop
from server.library import NotFoundError, fields
from server.library.record import MOST
from server.storage import Session
from server.storage.tables import Check as CheckRow
from server.storage.tables import CheckRevision as RevisionRow
from server.storage.tables import CheckValue as ValueRow
from server.storage.tables import Job as JobRow

Run = Callable[[Document], Mapping[str, Any]]
Draw = Callable[[sheets.SheetData], bytes]

# The sheet carries its revision number, which another save may take while this one draws. After so many sheets drawn
# for nothing the last is drawn inside the transaction.
_TRIES = 3


@dataclass(frozen=True)
class _Checked:
    """A check that was run: what will be kept of it."""

    document: Mapping[str, Any]
    result: Mapping[str, Any]
    made_by: str
    reason: str
    at: str
    follows_id: int | None


def save(
    session: Session,
    *,
    job_id: int,
    raw: str | bytes | Mapping[str, Any],
    check_id: int | None = None,
    mark: str | None = None,
    made_by: str = "",
    reason: str = "",
    follows_id: int | None = None,
    now: datetime | None = None,
    run: Run | None = None,
    draw: Draw | None = None,
) -> SavedRevision:
    """Check ``raw`` and keep it: as revision 1 of a new check in the job, or as the next revision of ``check_id``.

    When this returns, the revision is on disk. ``mark`` is the member mark (left out: as before, for a new check C1,
    C2, ...); ``follows_id`` the saved revision that was run again; ``run`` and ``draw`` stand for the check and the
    sheet.

    Raises
    ------
    DocumentError
        If the document, a reference in it, or a text given beside it cannot be used; nothing is saved.
    NotFoundError
        If there is no such job, or no such check in it.
    """
    faults: list[Fault] = []
    mark = None if mark is None else fields.line(faults, "mark", mark, most=60)
    made_by, reason = fields.line(faults, "made_by", made_by), fields.prose(faults, "reason", reason)
    if faults:
        raise DocumentError(faults)
    document = documents.read(raw)
    result = (run or checks.run)(library.resolve(session, document))
    moment = datetime.now(UTC) if now is None else now
    checked = _Checked(document.raw, result, made_by, reason, storage.utc_text(moment), follows_id)
    for attempt in range(_TRIES):
        heading = _heading(session, job_id, check_id, mark, checked)
        kept = _kept(checked, heading, draw or sheets.pdf)
        with storage.write(session):
            today = _heading(session, job_id, check_id, mark, checked)
            if today != heading and attempt < _TRIES - 1:
                continue
            if today != heading:
                kept = _kept(checked, today, draw or sheets.pdf)
            saved_id = _store(session, job_id, check_id, kept, checked)
        break
    return revision(session, saved_id)


def run_again(
    session: Session,
    revision_id: int,
    *,
    made_by: str = "",
    reason: str = "",
    now: datetime | None = None,
    run: Run | None = None,
    draw: Draw | None = None,
) -> SavedRevision:
    """Run a saved revision's document again with today's values; the outcome stands beside it as a new revision.

    Every reference takes the revision that is in force today, also where the document named one; its new document says
    so. ``moved`` tells what became different.
    """
    old = revision(session, revision_id)
    return save(
        session,
        job_id=old.job_id,
        raw=_with_todays_revisions(session, old.document),
        check_id=old.check_id,
        made_by=made_by,
        reason=reason or f"Revision {old.revision} run again with today's values",
        follows_id=old.id,
        now=now,
        run=run,
        draw=draw,
    )


def _with_todays_revisions(session: Session, document: Mapping[str, Any]) -> dict[str, Any]:
    """Move every named revision to the one in force; where none ever was, the named one is all there is."""
    today = dict(document)
    for section in ("materials", "adhesives", "fasteners"):
        entries = today.get(section)
        if isinstance(entries, Mapping):
            today[section] = {name: _todays(session, value) for name, value in entries.items()}
    if isinstance(today.get("check"), Mapping):  # a glue-up may hold the member check it is for
        today["check"] = _with_todays_revisions(session, today["check"])
    return today


def _todays(session: Session, value: Any) -> Any:
    if not isinstance(value, Mapping) or value.get("revision") is None or "record" not in value:
        return value
    current = library.in_force(session, str(value["record"]))
    return value if current is None else {**value, "revision": current.revision}


def _heading(
    session: Session, job_id: int, check_id: int | None, mark: str | None, checked: _Checked
) -> dict[str, Any]:
    """Return what the sheet says beside the check, as things stand now; the number of the revision to come included."""
    job, today = headings.get(session, job_id), shop(session)
    if check_id is None:
        number = (session.scalar(select(func.max(CheckRow.number)).where(CheckRow.job_id == job_id)) or 0) + 1
        n, old_mark = 1, f"C{number}"
    else:
        row = session.get(CheckRow, check_id, populate_existing=True) if 0 < check_id < MOST else None
        if row is None or row.job_id != job_id:
            raise NotFoundError(f"Job {job.number} has no check with the id {check_id}. Look for it under its job.")
        newest = session.scalar(select(func.max(RevisionRow.n)).where(RevisionRow.check_id == check_id)) or 0
        number, n, old_mark = row.number, newest + 1, row.mark
    return {
        "shop_name": today.name,
        "shop_address": today.address,
        "job_number": job.number,
        "job_title": job.title,
        "customer": job.customer,
        "drawing": job.drawing,
        "check_number": number,
        "mark": mark or old_mark,
        "revision": n,
        "title": str(checked.document.get("title") or job.title),
        "paper": job.paper,
        "display": job.display,
        "made_by": checked.made_by,
        "reason": checked.reason,
        "saved_at": checked.at,
    }


def _kept(checked: _Checked, heading: Mapping[str, Any], draw: Draw) -> dict[str, Any]:
    """Return the columns of the revision to come, its sheet among them."""
    result = checked.result
    content = {
        "heading": heading,
        "document": checked.document,
        "values_used": result["values_used"],
        "result": result,
        "engine": result["engine"],
    }
    sha256 = content_hash(content)
    try:
        pdf = draw(sheet_data(content, sha256))
    except sheets.UnprintableError as error:
        raise DocumentError(_unprintable(checked.document, error) or [Fault("", str(error))]) from error
    return {**content, "sha256": sha256, "pdf": pdf, "pdf_sha256": bytes_hash(pdf)}


def _unprintable(document: Mapping[str, Any], error: sheets.UnprintableError) -> list[Fault]:
    """Name the fields of the document that hold what the sheet's fonts do not have."""
    return [
        Fault(path, str(error))
        for path, value in leaves(document)
        if any(sign in path or sign in str(value) for sign in error.characters)
    ]


def sheet_data(content: Mapping[str, Any], sha256: str) -> sheets.SheetData:
    """Return what a sheet of ``content`` (heading, document, result, engine) is drawn from."""
    heading = content["heading"]
    saved = datetime.strptime(heading["saved_at"], "%Y-%m-%dT%H:%M:%SZ").replace(tzinfo=UTC)
    return sheets.SheetData(
        document=content["document"],
        result=content["result"],
        shop=heading["shop_name"],
        address=tuple(line for line in heading["shop_address"].splitlines() if line.strip()),
        job=heading["job_number"],
        customer=heading["customer"],
        title=heading["title"],
        drawing=heading["drawing"],
        mark=heading["mark"],
        revision=heading["revision"],
        date=heading["saved_at"][:10],
        paper=heading["paper"],
        display=heading["display"],
        prepared=heading["made_by"],
        content_hash=sha256,
        engine=content["engine"],
        saved_at=int(saved.timestamp()),
    )


def sheet_of(saved: SavedRevision) -> sheets.SheetData:
    """Return what a further page of a saved revision is drawn from: as it was saved, nothing reckoned."""
    content = {
        "heading": saved.heading,
        "document": saved.document,
        "result": saved.result,
        "engine": saved.engine,
    }
    return sheet_data(content, saved.sha256)


def _store(session: Session, job_id: int, check_id: int | None, kept: Mapping[str, Any], checked: _Checked) -> int:
    heading, result = kept["heading"], kept["result"]
    if check_id is None:
        check = CheckRow(job_id=job_id, number=heading["check_number"], mark=heading["mark"], created_at=checked.at)
        session.add(check)
        session.flush()
    else:
        check = session.get_one(CheckRow, check_id)
        check.mark = heading["mark"]
    row = RevisionRow(
        check_id=check.id,
        n=heading["revision"],
        follows_id=checked.follows_id,
        kind=str(result["kind"]),
        title=heading["title"],
        verdict=str(result["verdict"]),
        utilisation=result["utilisation"],
        made_by=checked.made_by,
        reason=checked.reason,
        created_at=checked.at,
        **kept,
    )
    session.add(row)
    session.flush()
    for section, entries in kept["values_used"].items():
        for name, value in entries.items():
            if value.get("record") is not None:
                key, number = value["record"], value["revision"]
                session.add(
                    ValueRow(
                        check_revision_id=row.id, section=section, name=name, record_key=key, record_revision=number
                    )
                )
    session.get_one(JobRow, job_id).changed_at = checked.at
    session.flush()
    headings.index(session, job_id)
    storage.note(
        session,
        at=checked.at,
        who=checked.made_by,
        what="check saved",
        subject=f"job {heading['job_number']}",
        detail={
            "check": heading["check_number"],
            "mark": heading["mark"],
            "revision": heading["revision"],
            "verdict": row.verdict,
            "sha256": kept["sha256"],
        },
    )
    return row.id
