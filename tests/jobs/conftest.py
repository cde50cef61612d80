from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from sqlalchemy import Engine

from server import storage
from server.storage import Session


@pytest.fixture
def book(tmp_path: Path) -> Iterator[Engine]:
    engine = storage.engine(tmp_path / "book.db")
    storage.migrate(engine)
    yield engine
    engine.dispose()


@pytest.fixture
def session(book: Engine) -> Iterator[Session]:
    with storage.reading(book) as opened:
        yield opened
