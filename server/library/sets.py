"""Acts on coupon sets: a coupon excluded for a cause, or taken in again; a value begun from a set."""

from __future__ import annotations

import copy
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from server.errors import DocumentError, Fault
from server.library import fields, reading, records
from server.library.coupon_sets import coupon_result, result_value
from server.library.record import Link, Record
from server.library.retention import Retention, retention
from server.people import Person
from server.storage import Session


@dataclass(frozen=True)
class ValueDraft:
    """What a value begins with where it is found from a set."""

    name: str
    values: Mapping[str, Any]
    details: Mapping[str, str]
    links: Mapping[str, Link]
    shown: float | None


def exclude(
    session: Session,
    key: str,
    index: int,
    *,
    cause: str,
    prevented_by: str = "",
    by: Person,
    based_on: int | None = None,
    now: datetime | None = None,
) -> Record:
    """Leave coupon ``index`` (from 0) out of a set, as a new revision: with its cause, and what now stops that cause.

    Raises
    ------
    DocumentError
        If no cause is written, there is no such coupon, or it is excluded already.
    """
    faults: list[Fault] = []
    written = fields.prose(faults, "cause", cause)
    stops = fields.prose(faults, "prevented_by", prevented_by)
    if not written:
        faults.append(Fault("cause", "The cause is empty; a coupon is excluded only for a cause that can be named."))
    record, coupons = _coupons(session, key, index, faults)
    if coupons[index].get("excluded") is not None:
        raise DocumentError([Fault("index", f"Coupon {index + 1} is excluded already.")])
    coupons[index]["excluded"] = written
    if stops:
        coupons[index]["prevented_by"] = stops
    reason = f"Coupon {index + 1} excluded: {written}"
    return _edited(session, record, coupons, reason, by, based_on, now)


def include(
    session: Session,
    key: str,
    index: int,
    *,
    reason: str,
    by: Person,
    based_on: int | None = None,
    now: datetime | None = None,
) -> Record:
    """Take an excluded coupon in again, as a new revision; the older one keeps why it was left out."""
    faults: list[Fault] = []
    written = fields.prose(faults, "reason", reason)
    if not written:
        faults.append(Fault("reason", "The reason is empty; write why the coupon counts after all."))
    record, coupons = _coupons(session, key, index, faults)
    if coupons[index].pop("excluded", None) is None:
        raise DocumentError([Fault("index", f"Coupon {index + 1} is not excluded.")])
    coupons[index].pop("prevented_by", None)
    reason = f"Coupon {index + 1} counts again: {written}"
    return _edited(session, record, coupons, reason, by, based_on, now)


def value_draft(record: Record, statistic: Mapping[str, Any] | None = None) -> ValueDraft:
    """Return what a value found from a set begins with; ``shown`` is what the coupons show [MPa, or N]."""
    property = record.values["property"]
    values: dict[str, Any] = {"property": property, "origin": "coupon set"}
    if statistic:
        values["statistic"] = dict(statistic)
    return ValueDraft(
        name=record.name,
        values=values,
        details=dict(record.details),
        links={"set": record.itself},
        shown=result_value(coupon_result(record, statistic), property),
    )


def retention_of(session: Session, dry: Link, conditioned: Link) -> Retention:
    """Return what conditioning leaves of a strength: the conditioned set against the dry one.

    Raises
    ------
    DocumentError
        If the two are no pair.
    """
    faults: list[Fault] = []
    pair = [reading.get(session, link.key, link.revision) for link in (dry, conditioned)]
    for role, record in zip(("dry", "conditioned"), pair, strict=True):
        if record.group != "sets":
            faults.append(Fault(role, f"{record.key} is no coupon set."))
    found = None if faults else retention(faults, "pair", *pair)
    if found is None:
        raise DocumentError(faults)
    return found


def _coupons(session: Session, key: str, index: int, faults: list[Fault]) -> tuple[Record, list[dict[str, Any]]]:
    record = reading.get(session, key)
    coupons = copy.deepcopy(record.values.get("coupons")) if record.group == "sets" else None
    if coupons is None:
        faults.append(Fault("key", f"{record.key} is no coupon set."))
    elif not 0 <= index < len(coupons):
        faults.append(Fault("index", f"{record.key} has coupons 1 to {len(coupons)}; there is no coupon {index + 1}."))
    if faults or coupons is None:
        raise DocumentError(faults)
    return record, coupons


def _edited(
    session: Session,
    record: Record,
    coupons: list[dict[str, Any]],
    reason: str,
    by: Person,
    based_on: int | None,
    now: datetime | None,
) -> Record:
    return records.edit(
        session,
        record.key,
        values={**record.values, "coupons": coupons},
        based_on=record.revision if based_on is None else based_on,
        made_by=by.name,
        reason=reason,
        now=now,
    )
