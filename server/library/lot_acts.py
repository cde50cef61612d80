"""What is told with a step of a lot: the day it was opened, or the retest that extends its life."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import UTC, date, datetime
from typing import Any

from server.errors import Fault
from server.library import reading
from server.library.lot_life import expiry
from server.library.lots import numbers_of
from server.library.record import NotFoundError, Record
from server.storage import Session

TOLD = ("on", "until", "retest")


def read_told(
    session: Session, faults: list[Fault], lot: Record, status: str, told: Mapping[str, str], now: datetime | None
) -> dict[str, Any]:
    """Return what is kept with a step of a lot; faults stand at ``on``, ``until`` and ``retest``."""
    today = (datetime.now(UTC) if now is None else now).date()
    if status == "opened":
        day = _day(faults, "on", told.get("on", "") or today.isoformat())
        if day is not None and day > today:
            faults.append(Fault("on", f"{day} is still to come; enter the day on which it was opened."))
        return {"opened": "" if day is None else day.isoformat()}
    if status != "extended":
        return {}
    until = _day(faults, "until", told.get("until", ""))
    last = expiry(lot)
    if until is not None and until < today:
        faults.append(Fault("until", f"{until} is over; enter the last day on which the retest lets it be used."))
    elif until is not None and last is not None and until <= last:
        faults.append(Fault("until", f"It may be used until {last} as it is; enter a later day."))
    return {"until": "" if until is None else until.isoformat(), "retest": _retest(session, faults, lot, told)}


def _day(faults: list[Fault], path: str, text: str) -> date | None:
    try:
        return date.fromisoformat(text.strip())
    except ValueError:
        faults.append(Fault(path, f"{text[:40]!r} is no day; write year-month-day, such as 2026-11-30."))
        return None


def _retest(session: Session, faults: list[Fault], lot: Record, told: Mapping[str, str]) -> str:
    """The coupon set of the retest: accepted, and made with this very lot."""
    key = told.get("retest", "").strip()
    if not key:
        faults.append(Fault("retest", "Missing; name the coupon set of the retest, such as T-004."))
        return ""
    try:
        found = reading.get(session, key)
    except NotFoundError as error:
        faults.append(Fault("retest", str(error)))
        return ""
    own = numbers_of(lot)
    if found.group != "sets":
        faults.append(Fault("retest", f"{found.key} is no coupon set; name the set of the retest."))
    elif not any(str(each.get("lot", "")).strip().casefold() in own for each in found.values["coupons"]):
        faults.append(Fault("retest", f"No coupon of {found.itself} names lot {lot.values['number']}."))
    elif found.status != "accepted":
        faults.append(Fault("retest", f"{found.itself} is {found.status}; have it accepted first."))
    return str(found.itself)
