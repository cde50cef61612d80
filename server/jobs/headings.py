"""Jobs: their headings, and finding them again."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import Row, column, func, literal_column, select, table, text
from sqlalchemy.orm import aliased

from server import storage
from server.errors import DocumentError, Fault
from server.jobs.shop import DISPLAYS, PAPERS, shop
from server.library import NotFoundError, fields
from server.library.record import MOST
from server.storage import Session
from server.storage.tables import Check as CheckRow
from server.storage.tables import CheckRevision as RevisionRow
from server.storage.tables import Job as JobRow

_SEARCH = table("job_search", column("rowid"), column("job_search"))
_WORST_FIRST = ("fail", "not proven", "pass")


@dataclass(frozen=True)
class Job:
    """A job's heading."""

    id: int
    number: str
    title: str
    customer: str
    drawing: str
    note: str
    paper: str
    display: str
    created_at: str
    changed_at: str


@dataclass(frozen=True)
class JobLine(Job):
    """A job in a list: how many checks it has, and the worst verdict and utilisation of their newest revisions."""

    checks: int = 0
    verdict: str = ""
    utilisation: float | None = None


@dataclass(frozen=True)
class FoundJobs:
    """One page of a search, and how many there are in all."""

    jobs: Sequence[JobLine]
    total: int


def create(
    session: Session,
    *,
    title: str,
    number: str = "",
    customer: str = "",
    drawing: str = "",
    note: str = "",
    paper: str | None = None,
    display: str | None = None,
    made_by: str = "",
    now: datetime | None = None,
) -> Job:
    """Start a job; without ``number`` the next free one (J-001), without paper or display the shop's.

    Raises
    ------
    DocumentError
        With every fault, by the names used here.
    """
    defaults = shop(session)
    entered = _checked(
        {
            "number": number,
            "title": title,
            "customer": customer,
            "drawing": drawing,
            "note": note,
            "paper": paper or defaults.paper,
            "display": display or defaults.display,
        },
        made_by,
    )
    at = storage.utc_text(now)
    with storage.write(session):
        entered["number"] = entered["number"] or _next_number(session)
        _refuse_taken(session, entered["number"], None)
        row = JobRow(created_at=at, changed_at=at, **entered)
        session.add(row)
        session.flush()
        index(session, row.id)
        storage.note(session, at=at, who=made_by.strip(), what="job started", subject=f"job {row.number}")
        return _job(row)


def edit(
    session: Session,
    job_id: int,
    *,
    number: str | None = None,
    title: str | None = None,
    customer: str | None = None,
    drawing: str | None = None,
    note: str | None = None,
    paper: str | None = None,
    display: str | None = None,
    made_by: str = "",
    now: datetime | None = None,
) -> Job:
    """Correct a job's heading; what is left out stays. Sheets already saved keep the heading they were saved with."""
    given = {
        "number": number,
        "title": title,
        "customer": customer,
        "drawing": drawing,
        "note": note,
        "paper": paper,
        "display": display,
    }
    at = storage.utc_text(now)
    with storage.write(session):
        old = get(session, job_id)
        entered = _checked({name: getattr(old, name) if new is None else new for name, new in given.items()}, made_by)
        entered["number"] = entered["number"] or old.number
        _refuse_taken(session, entered["number"], job_id)
        row = session.get_one(JobRow, job_id)
        moved = {name: [getattr(old, name), new] for name, new in entered.items() if new != getattr(old, name)}
        for name, new in entered.items():
            setattr(row, name, new)
        row.changed_at = at
        session.flush()
        index(session, job_id)
        subject = f"job {row.number}"
        storage.note(session, at=at, who=made_by.strip(), what="job heading changed", subject=subject, detail=moved)
        return _job(row)


def get(session: Session, job_id: int) -> Job:
    """Return job ``job_id``; NotFoundError where there is none."""
    row = session.get(JobRow, job_id) if 0 < job_id < MOST else None
    if row is None:
        raise NotFoundError(f"There is no job with the id {job_id}. Look for it under Jobs.")
    return _job(row)


def search(session: Session, text: str = "", *, limit: int = 50, offset: int = 0) -> FoundJobs:
    """Find jobs by words of their number, title, customer, drawing or member marks; all, newest change first."""
    terms = storage.search_terms(text)
    if text.strip() and terms is None:
        return FoundJobs((), 0)
    query, count = select(JobRow), select(func.count()).select_from(JobRow)
    if terms is None:
        query = query.order_by(JobRow.changed_at.desc(), JobRow.id.desc())
    else:
        matching = (_SEARCH.c.rowid == JobRow.id, _SEARCH.c.job_search.op("MATCH")(terms))
        query = query.where(*matching).order_by(literal_column("job_search.rank"), JobRow.id.desc())
        count = count.where(*matching)
    rows = session.scalars(query.limit(min(max(limit, 0), 500)).offset(min(max(offset, 0), MOST))).all()
    standing = _standing(session, [row.id for row in rows])
    found = [JobLine(**vars(_job(row)), **standing.get(row.id, {})) for row in rows]
    return FoundJobs(tuple(found), session.scalar(count) or 0)


def index(session: Session, job_id: int) -> None:
    """Bring the search index of one job up to date; called inside ``storage.write``."""
    row = session.get_one(JobRow, job_id)
    marks = session.scalars(select(CheckRow.mark).where(CheckRow.job_id == job_id)).all()
    session.execute(text("DELETE FROM job_search WHERE rowid = :id"), {"id": job_id})
    session.execute(
        text(
            "INSERT INTO job_search (rowid, number, title, customer, drawing, marks) "
            "VALUES (:id, :number, :title, :customer, :drawing, :marks)"
        ),
        {
            "id": job_id,
            "number": row.number,
            "title": row.title,
            "customer": row.customer,
            "drawing": row.drawing,
            "marks": "\n".join(marks),
        },
    )


def worst(checks: Iterable[tuple[str, float | None]]) -> tuple[str, float | None]:
    """Return the worst verdict and the largest utilisation; ("", None) without checks.

    >>> worst([("pass", 0.9), ("not proven", 0.4)])
    ('not proven', 0.9)
    """
    found = list(checks)
    verdict = min((verdict for verdict, _ in found), key=_WORST_FIRST.index, default="")
    return verdict, max((share for _, share in found if share is not None), default=None)


def _standing(session: Session, job_ids: Sequence[int]) -> dict[int, dict[str, Any]]:
    later = aliased(RevisionRow)
    newest = select(func.max(later.n)).where(later.check_id == CheckRow.id).correlate(CheckRow).scalar_subquery()
    rows: Sequence[Row[int, str, float | None]] = session.execute(
        select(CheckRow.job_id, RevisionRow.verdict, RevisionRow.utilisation)
        .join(RevisionRow, RevisionRow.check_id == CheckRow.id)
        .where(CheckRow.job_id.in_(job_ids), RevisionRow.n == newest)
    ).all()
    checks: dict[int, list[tuple[str, float | None]]] = {}
    for job_id, verdict, utilisation in rows:
        checks.setdefault(job_id, []).append((verdict, utilisation))
    return {
        job_id: dict(zip(("checks", "verdict", "utilisation"), (len(found), *worst(found)), strict=True))
        for job_id, found in checks.items()
    }


def _checked(entered: dict[str, str], made_by: str) -> dict[str, str]:
    faults: list[Fault] = []
    checked = {
        "number": fields.line(faults, "number", entered["number"], most=40),
        "title": fields.line(faults, "title", entered["title"], needed="what is being made, such as roof box beam"),
        "customer": fields.line(faults, "customer", entered["customer"]),
        "drawing": fields.line(faults, "drawing", entered["drawing"]),
        "note": fields.prose(faults, "note", entered["note"]),
        "paper": fields.choice(faults, "paper", entered["paper"], PAPERS),
        "display": fields.choice(faults, "display", entered["display"], DISPLAYS),
    }
    fields.line(faults, "made_by", made_by)
    if faults:
        raise DocumentError(faults)
    return checked


def _refuse_taken(session: Session, number: str, job_id: int | None) -> None:
    other = session.scalar(select(JobRow.id).where(JobRow.number == number))
    if other is not None and other != job_id:
        raise DocumentError([Fault("number", f"{number} is taken by another job; choose another number.")])


def _next_number(session: Session) -> str:
    numbers = session.scalars(select(JobRow.number).where(JobRow.number.istartswith("J-")))
    used = [int(tail) for number in numbers if (tail := number[2:]).isdecimal() and len(tail) < 10]
    return f"J-{max(used, default=0) + 1:03d}"


def _job(row: JobRow) -> Job:
    names = Job.__dataclass_fields__
    return Job(**{name: getattr(row, name) for name in names})
