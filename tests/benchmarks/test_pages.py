"""Preview and save over HTTP in process, against a bare framework page with the same bytes in the same run.

Ratios are printed and stored; nothing absolute is asserted. The bare page is what the framework itself costs: one
route that reads the same form and answers with one template of as many bytes.
"""

from __future__ import annotations

import copy
import statistics
import time
from collections.abc import Callable, Iterator
from typing import Any

import pytest
from fastapi import FastAPI, Request
from fastapi.responses import HTMLResponse, Response
from fastapi.testclient import TestClient
from jinja2 import Template
from pytest_benchmark.fixture import BenchmarkFixture

from server import documents
from server.app import create_app
from server.checks import member
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


def typical_box() -> dict[str, Any]:
    """Six pieces and eight joints whose flow only the field gives: a box of four webs, one of them soft."""
    box = copy.deepcopy(MEMBER)
    plank = {"material": "softwood", "shape": "rectangle"}
    box["materials"] = {
        "softwood": {"E": 11000, "G": 690, "density": 420, "strengths": {"bending": 24, "shear": 4}},
        "ply": {"E": 6500, "G": 600, "density": 500, "strengths": {"bending": 30, "shear": 9}},
        "soft": {"E": 6500, "G": 300, "density": 500, "strengths": {"bending": 30, "shear": 9}},
    }
    web = {"shape": "rectangle", "width": 12, "depth": 260, "material": "ply"}
    box["section"] = {
        "pieces": {
            "bottom": {**plank, "width": 236, "depth": 45, "at": [0, 0]},
            "top": {**plank, "width": 236, "depth": 45, "at": [0, 305]},
            "left": {**web, "at": [0, 45]},
            "soft": {**web, "at": [75, 45], "material": "soft"},
            "middle": {**web, "at": [150, 45]},
            "right": {**web, "at": [224, 45]},
        },
        "joints": [
            {"between": pair, "adhesive": "resin"}
            for pair in [[w, flange] for w in ("left", "soft", "middle", "right") for flange in ("bottom", "top")]
        ],
    }
    box["adhesives"] = {"resin": {"shear_strength": 6}}
    box["basis"] = {"method": "allowable", "safety_factor": 2.5}
    box["combinations"] = {"all": {"factors": dict.fromkeys(box["loads"], 1.0)}}
    box["analysis"] = {}
    return box


@pytest.mark.parametrize("change", ["a load", "a size"])
def test_preview_with_the_field_against_the_bare_page(
    change: str,
    benchmark: BenchmarkFixture,
    shop: TestClient,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    """Something is typed before every answer: a load, for which nothing is solved again; a size, for which all is."""
    answer = shop.post("/jobs/1/checks/preview", data=forms.write(typical_box()) | {"mark": "B2"}, headers=HTMX)
    assert answer.text.count("by field") >= 8
    empty, spent = bare(len(answer.content)), [0.0]
    own = member.run

    def timed(*given: Any, **named: Any) -> dict[str, object]:
        start = time.perf_counter()
        found = own(*given, **named)
        spent[0] = time.perf_counter() - start
        return found

    monkeypatch.setattr(member, "run", timed)
    rounds = 6 if benchmark.disabled else 40
    rest, alone, calculated = [], [], []
    for n in range(rounds):
        document = typical_box()
        if change == "a load":
            next(iter(document["loads"].values())).append({"kind": "point", "at": 1000, "value": 100 + n})
        else:
            document["section"]["pieces"]["left"]["width"] = 12 + 0.1 * n
        values = forms.write(document) | {"mark": "B2"}
        start = time.perf_counter()
        assert shop.post("/jobs/1/checks/preview", data=values, headers=HTMX).status_code == 200
        rest.append(time.perf_counter() - start - spent[0])
        calculated.append(spent[0])
        start = time.perf_counter()
        empty.post("/", data=values)
        alone.append(time.perf_counter() - start)
    calculation, ratio = statistics.median(calculated), statistics.median(rest) / statistics.median(alone)
    benchmark.extra_info.update(ratio=ratio, calculation=calculation)
    with capsys.disabled():
        print(
            f"\npreview with the field, {change} typed: its own calculation {calculation * 1e3:.0f} ms, and"
            f" {ratio:.2f} times the bare page of {len(answer.content)} bytes (budget {PREVIEW_BUDGET:g})"
        )
    if not benchmark.disabled:
        assert ratio <= PREVIEW_BUDGET
    benchmark.pedantic(lambda: None, rounds=1)


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
