"""Signing in, in a real browser: by keyboard, without JavaScript, on a narrow screen; axe finds nothing."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest
import uvicorn

from server import people, storage
from server.app import create_app
from server.settings import Settings

AXE = Path(__file__).parents[1] / "browser" / "vendor" / "axe.min.js"
PASSWORD, OTHER = "seven planed boards", "nine sharp chisels"


class Running:
    """A program with sign-in, served on a free port, and nobody in it."""

    def __init__(self, folder: Path) -> None:
        self.app = create_app(Settings(data=folder, sign_in=True))
        self.server = uvicorn.Server(uvicorn.Config(self.app, host="127.0.0.1", port=0, log_level="error"))
        self.thread = threading.Thread(target=self.server.run, daemon=True)
        self.thread.start()
        while not self.server.started:
            time.sleep(0.02)
        self.address = f"http://127.0.0.1:{self.server.servers[0].sockets[0].getsockname()[1]}"

    def code(self) -> str:
        with storage.reading(self.app.state.records.engine) as session:
            code = people.first_code(session)
        assert code is not None
        return code.code


@pytest.fixture
def running(tmp_path: Path) -> Iterator[Running]:
    made = Running(tmp_path)
    yield made
    made.server.should_exit = True
    made.thread.join(timeout=10)


@pytest.fixture
def opened(browser: Any, running: Running) -> Iterator[Callable[..., Any]]:
    """Open another browser of somebody's; errors on a console fail the test (a refused form is none)."""
    contexts, errors = [], []

    def make(*, javascript: bool = True, width: int = 1280) -> Any:
        context = browser.new_context(
            viewport={"width": width, "height": 900}, java_script_enabled=javascript, base_url=running.address
        )
        contexts.append(context)
        page = context.new_page()
        page.on("console", lambda line: errors.append(line.text) if line.type == "error" else None)
        page.on("pageerror", lambda error: errors.append(str(error)))
        return page

    yield make
    for context in contexts:
        context.close()
    assert [each for each in errors if not any(code in each for code in ("401", "403", "422"))] == []


def axe(page: Any) -> None:
    page.evaluate(AXE.read_text(encoding="utf-8"))
    found = page.evaluate("axe.run(document, {resultTypes: ['violations']})")
    assert [f"{each['id']}: {each['nodes'][0]['html'][:200]}" for each in found["violations"]] == [], page.url
    assert page.evaluate("document.documentElement.scrollWidth <= document.documentElement.clientWidth"), page.url


def fill(page: Any, **typed: str) -> None:
    for name, text in typed.items():
        page.fill(f"[name={name}]", text)


def first(page: Any, running: Running) -> None:
    page.goto("/jobs")
    assert page.url.endswith("/first-person")
    fill(page, code=running.code(), name="Ann Example", sign_in_name="ann.e", password=PASSWORD, again=PASSWORD)
    page.click("main button[type=submit]")
    page.wait_for_url("**/jobs")


def send(page: Any) -> None:
    page.click("main .bar button[type=submit]")


@pytest.mark.parametrize("javascript", [True, False])
def test_from_the_first_person_to_the_second_and_out_again(
    opened: Callable[..., Any], running: Running, javascript: bool
) -> None:
    ann = opened(javascript=javascript)
    first(ann, running)
    assert ann.inner_text(".who a") == "Ann Example"
    ann.click("nav >> text=People")
    ann.click("text=Add a person")
    fill(ann, name="Bo Builder", sign_in_name="bo")
    ann.check("[name=role_prepares]")
    send(ann)
    code = ann.inner_text("#code")

    bo = opened(javascript=javascript, width=800)
    bo.goto("/jobs/new")
    bo.click("text=I have a one-time code")
    fill(bo, sign_in_name="bo", code=code.lower(), password=OTHER, again=OTHER)
    send(bo)
    bo.wait_for_url("**/jobs")
    assert bo.locator("nav >> text=People").count() == 0
    bo.click(".who button")
    bo.goto("/jobs/new")
    fill(bo, sign_in_name="bo", password="not this one")
    send(bo)
    assert "do not fit" in bo.inner_text("[role=alert]")
    assert bo.input_value("[name=sign_in_name]") == "bo"
    assert bo.input_value("[name=password]") == ""
    fill(bo, password=OTHER)
    send(bo)
    bo.wait_for_url("**/jobs/new")  # where it began

    ann.goto("/people/2")
    ann.click("text=Switch Bo Builder off")
    bo.goto("/jobs")
    assert "/sign-in" in bo.url


def test_axe_finds_nothing(opened: Callable[..., Any], running: Running) -> None:
    page = opened(width=800)
    page.goto("/first-person")
    axe(page)
    send(page)
    axe(page)
    first(page, running)
    for path in ("/me", "/people", "/people/new", "/people/1", "/jobs"):
        page.goto(path)
        axe(page)
    page.goto("/people/new")
    send(page)
    axe(page)
    fill(page, name="Bo Builder", sign_in_name="bo")
    send(page)
    page.wait_for_selector("#code")
    axe(page)
    page.goto("/people/1")
    page.click("text=Switch Ann Example off")
    axe(page)
    page.goto("/me")
    page.click("text=Change the password >> nth=-1")
    axe(page)
    fill(page, label="saw list")
    page.click("text=Make a token")
    page.wait_for_selector("#token")
    axe(page)
    page.click(".who button")
    axe(page)
    page.goto("/jobs")
    send(page)
    axe(page)
    page.goto("/sign-in/code")
    send(page)
    axe(page)


def test_a_session_that_ends_while_typing_says_so_and_loses_nothing(
    opened: Callable[..., Any], running: Running
) -> None:
    page = opened()
    first(page, running)
    page.goto("/jobs/new")
    fill(page, number="26-001", title="Gangway")
    send(page)
    page.click("text=New check")
    page.wait_for_selector("#check")
    with storage.writing(running.app.state.records.engine) as session:
        session.execute(storage.people_tables.SessionRow.__table__.delete())
    page.fill("[name=span]", "6.0")
    page.wait_for_selector("#signed-out-note:has-text('not signed in any more')")
    axe(page)
    assert page.input_value("[name=span]") == "6.0"
    with page.context.expect_page() as other:
        page.click("#signed-out-note a")
    fill(other.value, sign_in_name="ann.e", password=PASSWORD)
    send(other.value)
    other.value.wait_for_url("**/jobs")
    page.fill("[name=load]", "4.2")
    page.wait_for_selector("#verdict-strip:has-text('Not proven')", timeout=15000)
