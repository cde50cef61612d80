"""A lot of adhesive over its life: until when it may be used, and what it counts as today."""

from __future__ import annotations

from datetime import UTC, date, datetime, timedelta

from server import units
from server.library.record import Record

BARRED = ("quarantined", "rejected")
"""States in which nothing may rest on a lot."""


def opened_on(lot: Record) -> date | None:
    """Return the day on which a lot was opened, by the act or as it was entered."""
    told = lot.acted.get("opened") or lot.values.get("opened")
    return date.fromisoformat(str(told)) if told else None


def expiry(lot: Record) -> date | None:
    """Return the last day on which a lot may be used; None where nobody entered one.

    A retest that extended it decides; else the earlier of the maker's expiry and the day of opening plus the days that
    it keeps once open.
    """
    extended = lot.acted.get("until")
    if extended:
        return date.fromisoformat(str(extended))
    days = []
    if lot.values.get("maker_expiry"):
        days.append(date.fromisoformat(str(lot.values["maker_expiry"])))
    opened, keeps = opened_on(lot), lot.values.get("days_after_opening")
    if opened is not None and keeps is not None:
        days.append(opened + timedelta(days=int(units.parse("", keeps, "factor"))))
    return min(days, default=None)


def lot_state(lot: Record, today: date | None = None) -> str:
    """Return what a lot counts as on a day: its state, or "expired" where its last day is over."""
    return "expired" if lot.status not in BARRED and is_over(lot, today) else lot.status


def is_over(lot: Record, today: date | None = None) -> bool:
    """Return whether a lot's last day is over, whatever its state."""
    last = expiry(lot)
    return last is not None and last < (today or datetime.now(UTC).date())
