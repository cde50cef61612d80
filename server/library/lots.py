"""Lots of adhesive: found by the number on the label."""

from __future__ import annotations

from collections.abc import Iterator
from datetime import date

from sqlalchemy import select

from server.library.lot_life import BARRED, expiry, lot_state
from server.library.reading import records, rows
from server.library.record import Record
from server.storage import Session
from server.storage.evidence_tables import HeadRow
from server.storage.tables import RecordRevision as RevisionRow


def lots_named(session: Session, number: str) -> list[Record]:
    """Return the lots (newest revisions) whose number, or whose hardener's lot, is ``number``."""
    wanted = number.strip().casefold()
    query = rows().where(HeadRow.group == "lots", RevisionRow.id == HeadRow.newest_id)
    every = records(session, session.execute(query.order_by(HeadRow.key)).all())
    return [lot for lot in every if wanted and wanted in numbers_of(lot)]


def numbers_of(lot: Record) -> tuple[str, ...]:
    """The numbers a lot is found by: its own, and its hardener's."""
    named = (str(lot.values.get(name, "")).strip().casefold() for name in ("number", "hardener_lot"))
    return tuple(number for number in named if number)


def expired_lots(session: Session, record: Record) -> Iterator[tuple[str, str]]:
    """Questions about coupons of a set that were bonded after their lot had expired."""
    used: dict[str, list[date]] = {}
    for coupon in record.values["coupons"]:
        if coupon.get("lot") and coupon.get("date_bonded"):
            used.setdefault(str(coupon["lot"]).strip(), []).append(date.fromisoformat(coupon["date_bonded"]))
    for number, days in used.items():
        for lot in lots_named(session, number):
            last, late = expiry(lot), max(days)
            if last is not None and number.casefold() == numbers_of(lot)[0] and late > last:
                yield (
                    "lot",
                    f"Lot {number} expired on {last} ({lot.key}); coupons were bonded with it on {late}. Why may "
                    "they count?",
                )


def barred_lots(session: Session, record: Record) -> Iterator[tuple[str, str]]:
    """Return the lots of a set's coupons on which nothing may rest today: number, and what bars it."""
    numbers = {str(each["lot"]).strip() for each in record.values["coupons"] if each.get("lot")}
    for number in sorted(numbers):
        for lot in lots_named(session, number):
            state = lot_state(lot)
            if state in BARRED:
                yield number, f"Lot {number} ({lot.key}), with which coupons of {record.itself} were made, is {state}."


def lot_numbers(session: Session) -> list[str]:
    """The numbers of all lots, for a form's list."""
    query = select(RevisionRow.entry).join(HeadRow, HeadRow.newest_id == RevisionRow.id)
    return [str(entry["number"]) for entry in session.scalars(query.where(HeadRow.group == "lots"))]
