"""Where a record is used: the saved checks that stand on it, themselves or by what pins it."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from sqlalchemy import ColumnElement, func, select, tuple_
from sqlalchemy.orm import aliased

from server.library.lots import lots_named, numbers_of
from server.library.reading import is_key, many
from server.library.record import MOST, Link, Record
from server.storage import Session
from server.storage.evidence_tables import LinkRow
from server.storage.tables import Check, CheckRevision, CheckValue, Job
from server.storage.tables import Record as RecordRow
from server.storage.tables import RecordRevision as RevisionRow

_AT_ONCE = 400
_DEEPEST = 4  # lot, set, value, bond


@dataclass(frozen=True)
class Use:
    """One saved revision of a check that used a record; ``newest``: no later revision of that check exists.

    ``record`` is what the check itself names; ``via`` the way to it from what was asked for ("V-001 rev 2").
    """

    record_revision: int
    name: str
    job_id: int
    job_number: str
    job_title: str
    check_id: int
    check_number: int
    mark: str
    check_revision_id: int
    n: int
    verdict: str
    created_at: str
    newest: bool
    record: str = ""
    via: tuple[str, ...] = ()


@dataclass(frozen=True)
class LotUses:
    """What stands on one lot of adhesive: its records, the sets and values found with it, the checks on those."""

    lots: Sequence[Record]
    sets: Sequence[Record]
    values: Sequence[Record]
    uses: Sequence[Use]


def where_used(
    session: Session, key: str, *, revision: int | None = None, limit: int = 500, offset: int = 0
) -> list[Use]:
    """Return the saved check revisions that used record ``key`` (that ``revision`` of it) itself, newest first."""
    if not is_key(key):
        return []
    condition: ColumnElement[bool] = CheckValue.record_key == key
    if revision is not None:
        condition &= CheckValue.record_revision == min(max(revision, 0), MOST)
    return _uses(session, condition, limit, offset)


def standing_on(session: Session, key: str, *, revision: int | None = None, limit: int = 500) -> list[Use]:
    """Return the saved check revisions that stand on record ``key``, also through what links to it, newest first.

    A coupon set holds up the values found from it, those the bonds that pin them, and those the checks.
    """
    if not is_key(key):
        return []
    query = select(RecordRow.key, RevisionRow.n).join(RevisionRow).where(RecordRow.key == key)
    if revision is not None:
        query = query.where(RevisionRow.n == min(max(revision, 0), MOST))
    start = [Link(found, n) for found, n in session.execute(query)]
    return _above(session, dict.fromkeys(start, ()), limit)


def lot_uses(session: Session, number: str, limit: int = 500) -> LotUses:
    """Return what stands on the lot called ``number``: the question of a recall.

    A hardener's lot counts as the lots that it was delivered with.
    """
    lots = lots_named(session, number)
    numbers = {number.strip().casefold()} | {numbers_of(lot)[0] for lot in lots}
    query = (
        select(RecordRow.key, RevisionRow.n)
        .join(RevisionRow, RevisionRow.record_id == RecordRow.id)
        .join(LinkRow, LinkRow.record_revision_id == RevisionRow.id)
        .where(LinkRow.role == "lot", LinkRow.target_key.in_(numbers - {""}))
        .order_by(RecordRow.key, RevisionRow.n)
    )
    sets = [Link(key, n) for key, n in session.execute(query)]
    above = _linked(session, sets)
    values = sorted({link for _, _, link in above}, key=lambda link: (link.key, link.revision))
    records = many(session, [*sets, *values])
    return LotUses(
        lots=lots,
        sets=[records[link] for link in dict.fromkeys(sets)],
        values=[records[link] for link in values if records[link].group == "values"],
        uses=_above(session, dict.fromkeys(sets, ()), limit),
    )


def links_to(session: Session, key: str, revision: int | None = None) -> list[tuple[str, Link]]:
    """Return what links to a record: the role, and the revision that names it; newest keys and revisions last."""
    query = (
        select(LinkRow.role, RecordRow.key, RevisionRow.n)
        .join(RevisionRow, RevisionRow.id == LinkRow.record_revision_id)
        .join(RecordRow, RecordRow.id == RevisionRow.record_id)
        .where(LinkRow.target_key == key, LinkRow.role != "lot")
        .order_by(RecordRow.key, RevisionRow.n)
    )
    if revision is not None:
        query = query.where(LinkRow.target_revision == min(max(revision, 0), MOST))
    return [(role, Link(found, n)) for role, found, n in session.execute(query)] if is_key(key) else []


def _above(session: Session, start: dict[Link, tuple[str, ...]], limit: int) -> list[Use]:
    """The checks on ``start`` and on everything that links to it, each check value once, by the shortest way."""
    ways, level = dict(start), dict(start)
    for _ in range(_DEEPEST):
        higher: dict[Link, tuple[str, ...]] = {}
        for target, _, link in _linked(session, level):
            if link not in ways:
                higher.setdefault(link, (*level[target], str(target)))
        ways |= higher
        level = higher
    found: list[Use] = []
    links = list(ways)
    for first in range(0, len(links), _AT_ONCE):
        some = [(link.key, link.revision) for link in links[first : first + _AT_ONCE]]
        condition = tuple_(CheckValue.record_key, CheckValue.record_revision).in_(some)
        found += [_by(use, ways) for use in _uses(session, condition, limit, 0)]
    return sorted(found, key=lambda use: -use.check_revision_id)[:limit]


def _by(use: Use, ways: dict[Link, tuple[str, ...]]) -> Use:
    itself = Link(use.record, use.record_revision)
    way = ways.get(itself) or next((ways[link] for link in ways if str(link).casefold() == str(itself).casefold()), ())
    return replace(use, via=(*way, str(itself)) if way else ())


def _linked(session: Session, targets: Iterable[Link]) -> list[tuple[Link, str, Link]]:
    """Target, role and linking revision, for everything that links to one of ``targets``."""
    wanted = {(link.key.casefold(), link.revision): link for link in targets}
    found = []
    pairs = list(wanted)
    for first in range(0, len(pairs), _AT_ONCE):
        some = pairs[first : first + _AT_ONCE]
        query = (
            select(LinkRow.target_key, LinkRow.target_revision, LinkRow.role, RecordRow.key, RevisionRow.n)
            .join(RevisionRow, RevisionRow.id == LinkRow.record_revision_id)
            .join(RecordRow, RecordRow.id == RevisionRow.record_id)
            .where(LinkRow.target_key.in_([key for key, _ in some]), LinkRow.role != "lot")
            .order_by(RecordRow.key, RevisionRow.n)
        )
        found += [
            (target, role, Link(key, n))
            for target_key, target_n, role, key, n in session.execute(query)
            if (target := wanted.get((target_key.casefold(), target_n))) is not None
        ]
    return found


def _uses(session: Session, condition: ColumnElement[bool], limit: int, offset: int) -> list[Use]:
    later = aliased(CheckRevision)
    newest = select(func.max(later.n)).where(later.check_id == Check.id).scalar_subquery()
    query = (
        select(CheckValue, CheckRevision, Check, Job, newest)
        .join(CheckRevision, CheckRevision.id == CheckValue.check_revision_id)
        .join(Check, Check.id == CheckRevision.check_id)
        .join(Job, Job.id == Check.job_id)
        .where(condition)
        .order_by(CheckRevision.id.desc(), CheckValue.name)
        .limit(min(max(limit, 0), MOST))
        .offset(min(max(offset, 0), MOST))
    )
    return [
        Use(
            record_revision=value.record_revision,
            name=value.name,
            job_id=job.id,
            job_number=job.number,
            job_title=job.title,
            check_id=check.id,
            check_number=check.number,
            mark=check.mark,
            check_revision_id=saved.id,
            n=saved.n,
            verdict=saved.verdict,
            created_at=saved.created_at,
            newest=saved.n == last,
            record=value.record_key,
        )
        for value, saved, check, job, last in session.execute(query)
    ]
