"""A record book with nobody in it, a moment, and people made the short way."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from datetime import UTC, datetime
from pathlib import Path

import pytest

from server import people, storage
from server.people import Browser, Member

NOW = datetime(2026, 12, 1, 9, 0, tzinfo=UTC)
PASSWORD = "seven planed boards"
HERE = Browser(address="192.168.1.7", kind="Firefox on Linux")

Make = Callable[..., Member]


@pytest.fixture
def session(tmp_path: Path) -> Iterator[storage.Session]:
    engine = storage.engine(tmp_path / "book.db")
    storage.migrate(engine)
    with storage.reading(engine) as made:
        yield made
    engine.dispose()


@pytest.fixture
def make(session: storage.Session) -> Make:
    """Add a person who chose PASSWORD; the first one keeps the book."""

    def made(name: str = "Ann Example", *roles: str, password: str = PASSWORD) -> Member:
        short = name.split()[0].lower()
        member, code = people.add(
            session, name=name, sign_in_name=short, roles=roles or people.ROLES, by="test", now=NOW
        )
        people.use_code(
            session, sign_in_name=short, code=code.code, password=password, again=password, browser=HERE, now=NOW
        )
        return people.member(session, member.id)

    return made
