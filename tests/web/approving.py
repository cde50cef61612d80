"""Approvals for tests that are about something else: an invented person approves, past the screens."""

from __future__ import annotations

from fastapi import FastAPI
from fastapi.testclient import TestClient

from server import library, storage


def approve(client: TestClient, key: str) -> None:
    """Let an invented person approve the newest revision of a record."""
    app = client.app
    assert isinstance(app, FastAPI)
    with storage.reading(app.state.records.engine) as session:
        library.approve_invented(session, key, who="A. Invented")
