"""The stage deck in a real browser, in inch-pound units: legs at the ends only, then middle legs too."""

from __future__ import annotations

import threading
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import httpx
import pytest
import uvicorn

from server.app import create_app
from server.settings import Settings
from server.web import forms
from tests.checks.test_slip import deck


@pytest.fixture(scope="module")
def address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """A running program that holds the deck of 8 ft."""
    folder: Path = tmp_path_factory.mktemp("book")
    config = uvicorn.Config(create_app(Settings(data=folder, port=8300)), host="127.0.0.1", port=0, log_level="error")
    server = uvicorn.Server(config)
    thread = threading.Thread(target=server.run, daemon=True)
    thread.start()
    while not server.started:
        time.sleep(0.02)
    base = f"http://127.0.0.1:{server.servers[0].sockets[0].getsockname()[1]}"
    with httpx.Client(base_url=base, headers={"Sec-Fetch-Site": "same-origin"}, timeout=60) as client:
        job = {"number": "26-014", "title": "Decks", "display": "US", "paper": "Letter"}
        assert client.post("/jobs", data=job).status_code == 303
        values = {**forms.write(deck(8)), "mark": "D4", "made_by": "M. Hand"}
        assert client.post("/jobs/1/checks", data=values).status_code == 303
    yield base
    server.should_exit = True
    thread.join(timeout=10)


@pytest.mark.browser
def test_both_options_tell_whether_there_is_a_fall_back(browser: Any, address: str) -> None:
    page = browser.new_page(viewport={"width": 800, "height": 900}, base_url=address)
    errors: list[str] = []
    page.on("console", lambda line: errors.append(line.text) if line.type == "error" else None)
    page.goto("/checks/1")
    assert "There is none: with the glue gone the member keeps 44 %" in page.inner_text("#result")
    assert "298.6 lbf" in page.inner_text("#result").replace("\u00a0", " ")
    assert page.locator("svg.setting-out").count() == 1
    with page.expect_request("**/setting-out.pdf") as asked:
        page.evaluate("href => fetch(href)", page.get_attribute("text=Setting-out page (PDF)", "href"))
    assert asked.value.response().headers["content-type"] == "application/pdf"
    page.goto("/checks/1/edit")
    page.wait_for_selector("#verdict-strip:has-text('Fail')", timeout=20000)
    page.click("#fold-loads > summary")
    page.fill("[name='loads[0].to']", "4")
    page.fill("[name=span]", "4")
    page.wait_for_selector("#verdict-strip:has-text('Pass')", timeout=20000)
    assert "There is a fall-back: with the glue gone the member keeps 35 %" in page.inner_text("#result")
    assert errors == []
    page.close()
