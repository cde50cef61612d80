"""What a form offers while a key is typed: the newest records of each group, few enough for a list."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from server import library
from server.library import Record
from server.storage import Session

_MOST = 100
GROUPS_OF_LINKS = ("products", "preparations", "cures", "materials", "sets", "values")


def offered(session: Session) -> Mapping[str, Sequence[Record]]:
    """Return the records that a form's boxes offer, by group."""
    return {group: library.search(session, group=group, limit=_MOST).records for group in GROUPS_OF_LINKS}
