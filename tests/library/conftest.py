from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from server import storage
from server.storage import Session


@pytest.fixture
def session(tmp_path: Path) -> Iterator[Session]:
    engine = storage.engine(tmp_path / "book.db")
    storage.migrate(engine)
    with storage.reading(engine) as opened:
        yield opened
    engine.dispose()
