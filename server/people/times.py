"""Moments as they are stored."""

from __future__ import annotations

from datetime import UTC, datetime


def moment(now: datetime | None) -> datetime:
    """Return ``now``; left out, this moment."""
    return datetime.now(UTC) if now is None else now


def since(stored: str) -> datetime:
    """Return a stored time.

    >>> since("2026-12-01T09:30:00Z").hour
    9
    """
    return datetime.strptime(stored, "%Y-%m-%dT%H:%M:%SZ").replace(tzinfo=UTC)
