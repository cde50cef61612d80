"""A running application with an empty record book, and a client that behaves like a browser on its address."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from fastapi.testclient import TestClient

from server.app import create_app
from server.settings import Settings

ADDRESS = "http://127.0.0.1:8300"


@pytest.fixture
def settings(tmp_path: Path) -> Settings:
    return Settings(data=tmp_path)


@pytest.fixture
def client(settings: Settings) -> Iterator[TestClient]:
    """A client that does not follow redirects, so that a 303 is seen."""
    with TestClient(create_app(settings), base_url=ADDRESS, follow_redirects=False) as made:
        yield made
