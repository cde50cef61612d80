"""A splice with its overlap curve, typed live: its preview stays within its own calculation plus six bare pages.

The bare page is the framework's own: one route that reads the same form and answers with one template of as many
bytes. The own calculation is clocked inside the preview itself, and both are taken in turns, in processor time: what
other programs do on the machine does not count. Every round types another overlap, so that nothing kept from a round
before helps it.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from typing import Any

import pytest
from fastapi.testclient import TestClient

from server import checks
from server.app import create_app
from server.settings import Settings
from server.sheets import ONE_PAGES
from server.web import one_page_form as forms
from tests.benchmarks.test_pages import ADDRESS, HTMX, JOB, PREVIEW_BUDGET, bare

PAGE = ONE_PAGES["splice"]
ROUNDS = 5


@pytest.fixture(scope="module")
def shop(tmp_path_factory: pytest.TempPathFactory) -> Iterator[TestClient]:
    with TestClient(create_app(Settings(data=tmp_path_factory.mktemp("splice"))), base_url=ADDRESS) as client:
        client.post("/jobs", data=JOB)
        yield client


def timed(call: Callable[[], object]) -> float:
    start = time.process_time()
    call()
    return time.process_time() - start


@pytest.mark.parametrize("response", ["elastic", "elastic-plastic"])
@pytest.mark.parametrize("layout", ["single-lap", "scarf"])
def test_a_splice_with_its_curve_stays_within_the_preview_budget(
    shop: TestClient,
    layout: str,
    response: str,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    values = {**forms.start(PAGE, "SI"), "layout": layout, "response": response}
    box, address = "slope" if layout == "scarf" else "overlap", "/jobs/1/checks/splice/preview"
    answer = shop.post(address, data=values, headers=HTMX)
    assert 'class="drawing overlap-curve"' in answer.text
    empty = bare(len(answer.content))
    empty.post("/", data=values)
    run, inside = checks.run, []

    def clocked(*arguments: Any, **options: Any) -> dict[str, Any]:
        start = time.process_time()
        result = run(*arguments, **options)
        inside.append(time.process_time() - start)
        return result

    monkeypatch.setattr(checks, "run", clocked)
    rest, alone = [], []
    for turn in range(ROUNDS):
        typed = {**values, box: f"{float(values[box]) + 0.01 * (turn + 1)}"}
        inside.clear()
        whole = timed(lambda typed=typed: shop.post(address, data=typed, headers=HTMX))  # type: ignore[misc]
        assert inside  # nothing was answered without being reckoned
        rest.append(whole - sum(inside))
        alone.append(timed(lambda: empty.post("/", data=values)))
    with capsys.disabled():
        print(
            f"\nsplice, {layout}, {response}: its own calculation {sum(inside) * 1e3:.0f} ms, "
            f"the rest {min(rest) / min(alone):.1f} bare pages (budget {PREVIEW_BUDGET:g})"
        )
    assert min(rest) <= PREVIEW_BUDGET * min(alone)
