"""A running program with an empty record book, a browser, and pages that fail the test on a console error."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest
import uvicorn

from server import library
from server.app import create_app
from server.jobs import demo
from server.settings import Settings
from server.storage import engine, migrate, reading

AXE = (Path(__file__).parent / "vendor" / "axe.min.js").read_text(encoding="utf-8")


def running(settings: Settings) -> Iterator[str]:
    """Serve until the test is done; yields the address."""
    config = uvicorn.Config(create_app(settings), host="127.0.0.1", port=0, log_level="error")
    server = uvicorn.Server(config)
    thread = threading.Thread(target=server.run, daemon=True)
    thread.start()
    while not server.started:
        time.sleep(0.02)
    yield f"http://127.0.0.1:{server.servers[0].sockets[0].getsockname()[1]}"
    server.should_exit = True
    thread.join(timeout=10)


@pytest.fixture(scope="module")
def settings(tmp_path_factory: pytest.TempPathFactory) -> Settings:
    return Settings(data=tmp_path_factory.mktemp("book"))


@pytest.fixture(scope="module")
def address(settings: Settings) -> Iterator[str]:
    yield from running(settings)


@pytest.fixture(scope="module")
def approve(settings: Settings, address: str) -> Callable[[str], None]:
    """Let an invented person approve a record, past the screens: for tests about something else."""

    def act(key: str) -> None:
        book = engine(settings.records)
        with reading(book) as session:
            library.approve_invented(session, key, who="A. Invented")
        book.dispose()

    return act


@pytest.fixture(scope="session")
def demo_address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """The demo shop, filled once for all tests: they look, and save nothing in it."""
    settings = Settings(data=tmp_path_factory.mktemp("demo"))
    book = engine(settings.records)
    migrate(book)
    demo.fill(book)
    book.dispose()
    yield from running(settings)


@pytest.fixture
def open_page(browser: Any) -> Iterator[Callable[..., Any]]:
    """Open a page at an address; an error on its console fails the test (a refused form, 422, is none)."""
    contexts, errors = [], []

    def make(address: str, *, width: int = 1280, javascript: bool = True) -> Any:
        context = browser.new_context(
            viewport={"width": width, "height": 900}, java_script_enabled=javascript, base_url=address
        )
        contexts.append(context)
        page = context.new_page()
        page.on("console", lambda line: errors.append(line.text) if line.type == "error" else None)
        page.on("pageerror", lambda error: errors.append(str(error)))
        page.on("dialog", lambda dialog: dialog.accept())
        return page

    yield make
    for context in contexts:
        context.close()
    assert [each for each in errors if "422" not in each and "404" not in each] == []


def violations(page: Any) -> list[str]:
    """What axe finds on a page: rule and the first place of each."""
    page.evaluate(AXE)
    found = page.evaluate("axe.run(document, {resultTypes: ['violations']})")
    return [f"{each['id']}: {each['nodes'][0]['html'][:160]}" for each in found["violations"]]
