"""The frame: errors in words, links, files, numbers for people."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from fastapi.testclient import TestClient

from server.app import create_app
from server.settings import Settings
from server.web.pages import number, percent
from tests.web.conftest import ADDRESS

STATIC = re.compile(r'(?:href|src)="(/static/[^"]+)"')


def test_the_first_page_is_the_jobs(client: TestClient) -> None:
    answer = client.get("/")
    assert answer.status_code == 303
    assert answer.headers["location"] == "/jobs"


def test_an_empty_record_book_says_what_to_do_next(client: TestClient) -> None:
    text = client.get("/jobs").text
    assert "Start a job" in text
    assert 'href="/jobs/new"' in text


@pytest.mark.parametrize("path", ["/jobs", "/nothing-here"])
def test_the_standing_caution_stands_on_every_page(client: TestClient, path: str) -> None:
    text = client.get(path).text
    assert "It does not replace the local code" in text
    assert "proof testing" in text


@pytest.mark.parametrize(
    "path", ["/nothing-here", "/jobs/999", "/jobs/abc", "/jobs/0", "/jobs/99999999999999999999999", "/static/no.css"]
)
def test_a_missing_page_says_so_in_words(client: TestClient, path: str) -> None:
    answer = client.get(path)
    assert answer.status_code == 404
    assert "Bondwright" in answer.text
    assert "Traceback" not in answer.text
    assert "detail" not in answer.text


def test_a_missing_api_address_answers_json(client: TestClient) -> None:
    answer = client.get("/api/nothing")
    assert answer.status_code == 404
    assert answer.json()["faults"][0]["message"]


def test_the_wrong_method_is_refused_in_words(client: TestClient) -> None:
    answer = client.delete("/jobs")
    assert answer.status_code == 405
    assert "Open the page with its form" in answer.text


def test_an_unexpected_failure_shows_a_plain_page_with_a_mark(
    settings: Settings, caplog: pytest.LogCaptureFixture
) -> None:
    app = create_app(settings)

    def fails() -> None:
        raise RuntimeError("secret detail")

    app.add_api_route("/fails", fails)
    app.add_api_route("/api/fails", fails)
    client = TestClient(app, base_url=ADDRESS, raise_server_exceptions=False)
    for path in ("/fails", "/api/fails"):
        caplog.clear()
        answer = client.get(path)
        assert answer.status_code == 500
        assert "secret detail" not in answer.text
        assert "RuntimeError" not in answer.text
        assert "content-security-policy" in answer.headers
        mark = re.search(r"mark in the log is (\w{8})", answer.text)
        assert mark is not None
        assert mark[1] in caplog.text


def test_files_are_kept_for_ever_under_an_address_that_follows_their_content(client: TestClient) -> None:
    links = STATIC.findall(client.get("/jobs").text)
    assert any("bondwright.css" in link for link in links)
    assert any("htmx.min.js" in link for link in links)
    for link in links:
        assert "?v=" in link
        answer = client.get(link)
        assert answer.status_code == 200
        assert "immutable" in answer.headers["cache-control"]


def test_pages_are_asked_for_anew(client: TestClient) -> None:
    assert client.get("/jobs").headers["cache-control"] == "no-cache"


def test_every_file_the_stylesheet_names_is_there(client: TestClient) -> None:
    names = re.findall(r'url\("([^"]+)"\)', client.get("/static/bondwright.css").text)
    assert names
    for name in names:
        assert client.get(f"/static/{name}").status_code == 200


def test_files_from_other_hands_are_the_ones_in_the_licence_list() -> None:
    import hashlib

    static = Path(__file__).parents[2] / "static"
    listed = dict(
        re.findall(r"`([\w./-]+)`[^|]*\|.*`([0-9a-f]{64})`", (static / "licences/README.md").read_text("utf-8"))
    )
    others = [static / "htmx.min.js", *sorted((static / "fonts").iterdir())]
    assert set(listed) == {file.relative_to(static).as_posix() for file in others}
    for file in others:
        assert hashlib.sha256(file.read_bytes()).hexdigest() == listed[file.relative_to(static).as_posix()]


def test_nothing_is_loaded_from_elsewhere() -> None:
    root = Path(__file__).parents[2]
    for file in [*root.glob("templates/**/*.html"), root / "static/bondwright.css", root / "static/bondwright.js"]:
        assert not re.search(r'(?:src|href|url\()\s*=?\s*["\'(]?\s*(?:https?:)?//', file.read_text("utf-8")), file


def test_no_template_has_an_inline_style() -> None:
    for file in (Path(__file__).parents[2] / "templates").rglob("*.html"):
        text = file.read_text("utf-8")
        assert not re.search(r"\sstyle\s*=|<style|\son\w+\s*=\s*[\"']", text), file


def test_the_openapi_schema_is_served_without_a_page_of_its_own(client: TestClient) -> None:
    assert "/api/checks/run" in client.get("/openapi.json").json()["paths"]
    assert client.get("/docs").status_code == 404
    assert client.get("/redoc").status_code == 404


def test_numbers_are_shown_with_a_true_minus_sign() -> None:
    assert number(-12.3456) == "−12.35"
    assert number(0.0) == "0"
    assert number(-1.005, 1) == "−1.0"


def test_shares_are_shown_as_percentages() -> None:
    assert percent(0.421) == "42 %"
    assert number(1.005, 1) == "1.0"
