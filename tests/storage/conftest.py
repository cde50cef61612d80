from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from sqlalchemy import Engine

from server import storage


@pytest.fixture
def book(tmp_path: Path) -> Iterator[Engine]:
    engine = storage.engine(tmp_path / "book.db")
    storage.migrate(engine)
    yield engine
    engine.dispose()
