"""The sets of one value over time: what a control chart is drawn from, so that drift is seen before it fails."""

from __future__ import annotations

from dataclasses import dataclass

from server import sheets
from server.errors import InputError
from server.library import reading
from server.library.coupon_sets import coupon_result
from server.library.groups import MADE_OF, STOPPED
from server.library.record import Record
from server.library.references import standing
from server.mechanics.control_chart import Chart, control_chart
from server.storage import Session
from server.storage.evidence_tables import HeadRow
from server.storage.tables import RecordRevision as RevisionRow

# What makes two sets coupons of the same bond. Load-bearing class and test report may be worded anew.
_SAME = tuple(name for name in MADE_OF if name != "load_bearing")
MOST = 500


@dataclass(frozen=True)
class Point:
    """One set of a history [MPa, or N for fasteners]; ``date`` is its last day of testing, else of entry."""

    date: str
    key: str
    revision: int
    name: str
    n: int
    excluded: int
    mean: float
    standard_deviation: float | None
    characteristic: float | None
    status: str


def history(session: Session, record: Record) -> list[Point]:
    """Return the sets that broke the same kind of coupon as ``record`` (a value, or a set), oldest first.

    The same kind: the same property, and the same product, surfaces, preparations, cure, exposure and test method.
    Rejected sets are left out.
    """
    behind = record.links.get("set")
    mine = record if behind is None else reading.get(session, behind.key, behind.revision)
    if mine.group != "sets":
        return []
    query = (
        reading.rows()
        .where(HeadRow.group == "sets", HeadRow.property == mine.values["property"])
        .where(RevisionRow.id == HeadRow.newest_id)
        .order_by(HeadRow.key)
        .limit(MOST)
    )
    every = reading.records(session, session.execute(query).all())
    points = [_point(each) for each in every if same_coupons(each, mine) and standing(each) not in STOPPED]
    return sorted(points, key=lambda point: (point.date, point.key))


def charted(session: Session, record: Record) -> tuple[list[sheets.Point], Chart | None]:
    """Return the sets of one value over time, and their chart from the second set on; nothing for other groups."""
    if record.group not in ("values", "sets"):
        return [], None
    points = [sheets.Point(each.key, each.date, each.mean) for each in history(session, record)]
    try:
        return points, control_chart([point.value for point in points])
    except InputError:
        return points, None


def same_coupons(one: Record, other: Record) -> bool:
    """Return whether two sets say that they are made and tested alike."""
    return all(_plain(one.details.get(name, "")) == _plain(other.details.get(name, "")) for name in _SAME)


def _plain(text: str) -> str:
    return " ".join(text.casefold().split())


def _point(record: Record) -> Point:
    result = coupon_result(record)
    days = [str(each["date_tested"]) for each in record.values["coupons"] if each.get("date_tested")]
    return Point(
        date=max(days, default=record.created_at[:10]),
        key=record.key,
        revision=record.revision,
        name=record.name,
        n=result["n"],
        excluded=len(result["coupons"]) - result["n"],
        mean=float(result["mean_stress"]),
        standard_deviation=result["standard_deviation_stress"],
        characteristic=result["characteristic"],
        status=standing(record),
    )
