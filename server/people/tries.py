"""Limits against guessing: failed tries are counted by name and by address, and make the next one wait.

A try is counted before the password is weighed and taken back if it fits, so that many at once gain nothing. Names
nobody has are counted the same way: waiting tells nothing about who works here.
"""

from __future__ import annotations

import ipaddress
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta

from sqlalchemy import delete

from server import storage
from server.people.errors import HeldError
from server.people.secret import digest
from server.people.times import since
from server.storage import Session, utc_text
from server.storage.people_tables import TryRow

NAME_FREE, ADDRESS_FREE = 5, 20
FIRST_WAIT, LONGEST_WAIT = timedelta(seconds=30), timedelta(minutes=15)
FORGOTTEN_AFTER = timedelta(days=1)


@dataclass(frozen=True)
class Key:
    """What tries are counted by, and how many may fail before the waiting starts."""

    hash: str
    free: int


def by_name(sign_in_name: str) -> Key:
    """Return the key of a name as typed."""
    return Key(digest(f"name {sign_in_name.strip().casefold()}"), NAME_FREE)


def by_address(address: str) -> Key:
    """Return the key of an address; a whole network of version 6 is one, as one machine has it all."""
    try:
        known = ipaddress.ip_address(address)
    except ValueError:
        return Key(digest(f"address {address}"), ADDRESS_FREE)
    if isinstance(known, ipaddress.IPv6Address):
        return Key(digest(f"address {ipaddress.ip_network((known, 64), strict=False)}"), ADDRESS_FREE)
    return Key(digest(f"address {known}"), ADDRESS_FREE)


def wait_after(failures: int, free: int) -> timedelta:
    """Return how long the next try has to wait.

    >>> [int(wait_after(n, 5).total_seconds()) for n in (1, 4, 5, 6, 7, 30)]
    [0, 0, 30, 60, 120, 900]
    """
    if failures < free:
        return timedelta(0)
    doubled: int = 2 ** min(failures - free, 20)
    return min(FIRST_WAIT * doubled, LONGEST_WAIT)


def count(session: Session, keys: Sequence[Key], now: datetime) -> None:
    """Count a try under every key, or raise HeldError where one has to wait; then nothing is counted."""
    at = utc_text(now)
    with storage.write(session):
        session.execute(delete(TryRow).where(TryRow.last_at < utc_text(now - FORGOTTEN_AFTER)))
        rows = [session.get(TryRow, key.hash, populate_existing=True) for key in keys]
        held = max((row.held_until for row in rows if row is not None), default="")
        if held > at:
            raise HeldError(max(1, round((since(held) - now).total_seconds())))
        for key, row in zip(keys, rows, strict=True):
            if row is None:
                row = TryRow(key_hash=key.hash, failures=0)
                session.add(row)
            row.failures += 1
            row.last_at = at
            row.held_until = utc_text(now + wait_after(row.failures, key.free))


def forgive(session: Session, name: Key, address: Key) -> None:
    """Take a try back that fitted: the name starts afresh, the address only loses this one try.

    Otherwise somebody with a password of their own could guess those of others for ever.
    """
    with storage.write(session):
        session.execute(delete(TryRow).where(TryRow.key_hash == name.hash))
        row = session.get(TryRow, address.hash, populate_existing=True)
        if row is not None:
            row.failures -= 1
            row.held_until = row.last_at
            if row.failures <= 0:
                session.delete(row)
