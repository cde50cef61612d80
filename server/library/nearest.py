"""Keys that look like the one somebody typed."""

from __future__ import annotations

import difflib

from sqlalchemy import select

from server.storage import Session
from server.storage.tables import Record as RecordRow

_MOST_COMPARED = 3000


def nearest(session: Session, key: str, group: str | None = None) -> list[str]:
    """Return up to three keys of ``group`` that resemble ``key``, the likeliest first."""
    wanted = key[:40].strip().upper()
    query = select(RecordRow.key).order_by(RecordRow.key)
    if group is not None:
        query = query.where(RecordRow.group == group)
    if wanted[:1].isascii() and wanted[:1].isalnum():
        # Comparing is slow: in a large library only keys that begin alike are compared.
        query = query.order_by(None).order_by(RecordRow.key.istartswith(wanted[0]).desc(), RecordRow.key)
    keys = {found.upper(): found for found in session.scalars(query.limit(_MOST_COMPARED))}
    return [keys[name] for name in difflib.get_close_matches(wanted, keys, n=3, cutoff=0.5)]


def nearest_words(session: Session, key: str, group: str | None = None) -> str:
    """Return the next step for somebody whose key was not found."""
    found = nearest(session, key, group)
    if not found:
        return "Look for it under Library, or add it there."
    return f"Nearest: {', '.join(found)}."
