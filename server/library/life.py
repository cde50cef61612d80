"""The life of a coupon set or of a lot in a few lines: what happened to it, on which day, by whom."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from server.library.lot_life import expiry, opened_on
from server.library.record import Record

Line = tuple[str, str, str]


def life(record: Record) -> list[Line]:
    """Return state, day and person of what happened before the acts: bonded, conditioned, tested; received, opened."""
    if record.group == "sets":
        return list(_of_a_set(record))
    return list(_of_a_lot(record)) if record.group == "lots" else []


def _of_a_set(record: Record) -> Iterator[Line]:
    coupons = record.values["coupons"]
    for state, day, who in (("Bonded", "date_bonded", "made_by"), ("Tested", "date_tested", "tested_by")):
        if state == "Tested" and record.details.get("exposure"):
            yield "Conditioned", record.details["exposure"], ""
        told = _span([str(each[day]) for each in coupons if each.get(day)])
        names = list(dict.fromkeys(str(each[who]) for each in coupons if each.get(who)))
        if told or names:
            yield state, told or "day not recorded", ", ".join(names[:4])


def _of_a_lot(record: Record) -> Iterator[Line]:
    if record.values.get("received"):
        yield "Received", str(record.values["received"]), ""
    opened, last = opened_on(record), expiry(record)
    if opened is not None:
        yield "Opened", opened.isoformat(), ""
    if record.acted.get("retest"):
        yield "Extended by retest", str(record.acted["retest"]), ""
    yield "To be used until", last.isoformat() if last is not None else "no expiry entered", ""


def _span(days: Sequence[str]) -> str:
    if not days:
        return ""
    first, last = min(days), max(days)
    return first if first == last else f"{first} to {last}"
