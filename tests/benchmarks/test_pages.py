"""Preview and save over HTTP in process, against a bare framework page with the same bytes in the same run.

Ratios are printed and stored; nothing absolute is asserted. The bare page is what the framework itself costs: one
route that reads the same form and answers with one template of as many bytes.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable, Iterator

import pytest
from fastapi import FastAPI, Request
from fastapi.responses import HTMLResponse, Response
from fastapi.testclient import TestClient
from jinja2 import Template
from pytest_benchmark.fixture import BenchmarkFixture

from server import documents
from server.app import create_app
from server.settings import Settings
from server.web import forms
from tests.benchmarks.member import MEMBER

ADDRESS = "http://127.0.0.1:8300"
JOB = {"number": "1", "title": "Bench", "customer": "", "drawing": "", "paper": "A4", "display": "SI", "note": ""}
PREVIEW_BUDGET = 6.0
HTMX = {"HX-Request": "true"}


@pytest.fixture(scope="module")
def shop(tmp_path_factory: pytest.TempPathFactory) -> Iterator[TestClient]:
    app = create_app(Settings(data=tmp_path_factory.mktemp("bench")))
    with TestClient(app, base_url=ADDRESS, follow_redirects=False) as client:
        client.post("/jobs", data=JOB)
        yield client


@pytest.fixture(scope="module")
def values() -> dict[str, str]:
    """The benchmark's member as the form sends it."""
    documents.read(MEMBER)
    return forms.write(MEMBER) | {"mark": "B1"}


def bare(size: int) -> TestClient:
    """An application with one route that reads the posted form and answers with a template of ``size`` bytes."""
    app, template = FastAPI(), Template("<p>{{ text }}</p>")

    async def page(request: Request) -> Response:
        await request.form()
        return HTMLResponse(template.render(text="x" * (size - 7)))

    app.add_api_route("/", page, methods=["POST"])
    return TestClient(app, base_url=ADDRESS)


def median(call: Callable[[], object], rounds: int) -> float:
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        call()
        times.append(time.perf_counter() - start)
    return statistics.median(times)


def test_preview_against_the_bare_page(
    benchmark: BenchmarkFixture, shop: TestClient, values: dict[str, str], capsys: pytest.CaptureFixture[str]
) -> None:
    answer = shop.post("/jobs/1/checks/preview", data=values, headers=HTMX)
    assert answer.status_code == 200
    assert "Utilisation" in answer.text or "utilisation" in answer.text
    empty = bare(len(answer.content))
    rounds = 5 if benchmark.disabled else 60
    alone = median(lambda: empty.post("/", data=values), rounds)
    benchmark.pedantic(
        lambda: shop.post("/jobs/1/checks/preview", data=values, headers=HTMX), rounds=rounds, warmup_rounds=3
    )
    whole = median(lambda: shop.post("/jobs/1/checks/preview", data=values, headers=HTMX), rounds)
    benchmark.extra_info["ratio"] = whole / alone
    with capsys.disabled():
        print(f"\npreview / bare page of {len(answer.content)} bytes: {whole / alone:.2f} (budget {PREVIEW_BUDGET:g})")


def test_save_against_the_bare_page(
    benchmark: BenchmarkFixture, shop: TestClient, values: dict[str, str], capsys: pytest.CaptureFixture[str]
) -> None:
    """A save draws its PDF once; the ratio says what that costs."""
    empty = bare(1000)
    rounds = 3 if benchmark.disabled else 15
    alone = median(lambda: empty.post("/", data=values), rounds)

    def save() -> None:
        assert shop.post("/jobs/1/checks", data=values).status_code == 303

    benchmark.pedantic(save, rounds=rounds, warmup_rounds=1)
    whole = median(save, rounds)
    benchmark.extra_info["ratio"] = whole / alone
    with capsys.disabled():
        print(f"\nsave / bare page: {whole / alone:.1f}")
