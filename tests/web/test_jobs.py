"""Jobs and the shop's heading over HTTP: each form works, refuses, keeps what was typed."""

from __future__ import annotations

import html
from pathlib import Path

import pytest
from fastapi.testclient import TestClient

from server import jobs, storage
from server.app import create_app
from server.settings import Settings
from tests.web.conftest import ADDRESS
from tests.web.test_api import changed

JOB = {
    "number": "26-014",
    "title": "Roof box beams",
    "customer": "Hollin Quay",
    "drawing": "HQ-07 rev C",
    "paper": "Letter",
    "display": "US",
    "note": "one spare",
}
NONSENSE = ["<script>alert(1)</script>", "'; DROP TABLE jobs; --", "{{ 7*7 }}", "\u202egnp", "Ω ≤ é", "%00", "a\x00b"]


@pytest.fixture
def job(client: TestClient) -> str:
    """The address of one job."""
    return client.post("/jobs", data=JOB).headers["location"]


class TestStart:
    def test_a_job_is_started_and_shown(self, client: TestClient) -> None:
        answer = client.post("/jobs", data=JOB)
        assert answer.status_code == 303
        text = client.get(answer.headers["location"]).text
        for typed in ("26-014", "Roof box beams", "Hollin Quay", "HQ-07 rev C", "one spare", "US customary"):
            assert typed in text
        assert "No check yet" in text

    def test_the_form_starts_with_the_shops_paper_and_units(self, client: TestClient) -> None:
        client.post("/shop", data={"name": "Marlow Ferry", "paper": "Letter", "display": "US"})
        text = client.get("/jobs/new").text
        assert '<option value="Letter" selected>' in text
        assert '<option value="US" selected>' in text

    def test_without_a_number_it_gets_the_next_free_one(self, client: TestClient) -> None:
        client.post("/jobs", data=JOB | {"number": ""})
        assert "J-001" in client.get("/jobs").text

    def test_a_bad_entry_keeps_the_typed_text_and_saves_nothing(self, client: TestClient) -> None:
        answer = client.post("/jobs", data=JOB | {"title": "   ", "note": "keep this <b>"})
        assert answer.status_code == 422
        assert "title is empty" in answer.text
        assert 'aria-invalid="true"' in answer.text
        assert 'aria-describedby="f-title-message f-title-hint"' in answer.text
        assert 'value="26-014"' in answer.text
        assert "keep this &lt;b&gt;" in answer.text
        assert '<option value="Letter" selected>' in answer.text
        assert "26-014" not in client.get("/jobs").text

    def test_a_taken_number_is_refused_beside_its_box(self, client: TestClient, job: str) -> None:
        answer = client.post("/jobs", data=JOB | {"title": "Another"})
        assert answer.status_code == 422
        assert "26-014 is taken by another job" in answer.text
        assert "Another" not in client.get("/jobs").text

    @pytest.mark.parametrize("paper", ["A3", "", "letter"])
    def test_an_unknown_paper_is_refused_or_the_shops(self, client: TestClient, paper: str) -> None:
        assert client.post("/jobs", data=JOB | {"paper": paper}).status_code == (303 if paper == "" else 422)

    def test_an_empty_form_is_refused_in_words(self, client: TestClient) -> None:
        assert client.post("/jobs").status_code == 422
        assert client.post("/jobs", json={"title": "x"}).status_code == 422

    @pytest.mark.parametrize("text", NONSENSE)
    def test_odd_text_is_shown_as_typed_never_run(self, client: TestClient, text: str) -> None:
        answer = client.post("/jobs", data=JOB | {"title": text, "customer": text})
        assert answer.status_code == 303
        shown = client.get(answer.headers["location"]).text
        assert html.escape(text.replace("\x00", ""), quote=False) in html.unescape(
            shown.replace("&lt;", "&amp;lt;").replace("&gt;", "&amp;gt;")
        )
        assert "<script>" not in shown
        assert ">49<" not in shown

    def test_a_sign_that_no_sheet_can_print_is_refused_beside_its_box(self, client: TestClient) -> None:
        answer = client.post("/jobs", data=JOB | {"title": "deck 木"})
        assert answer.status_code == 422
        assert 'id="f-title-message"' in answer.text
        assert 'value="deck 木"' in answer.text
        assert "26-014" not in client.get("/jobs").text

    def test_a_long_text_is_refused_in_words(self, client: TestClient) -> None:
        answer = client.post("/jobs", data=JOB | {"title": "x" * 500})
        assert answer.status_code == 422
        assert "500 characters" in answer.text


class TestHeading:
    def test_it_comes_filled_and_a_change_is_kept(self, client: TestClient, job: str) -> None:
        form = client.get(f"{job}/heading").text
        assert 'value="HQ-07 rev C"' in form
        answer = client.post(f"{job}/heading", data=JOB | {"drawing": "HQ-07 rev D"})
        assert answer.status_code == 303
        assert "HQ-07 rev D" in client.get(job).text

    def test_a_bad_entry_changes_nothing(self, client: TestClient, job: str) -> None:
        answer = client.post(f"{job}/heading", data=JOB | {"title": "", "drawing": "HQ-99"})
        assert answer.status_code == 422
        assert 'value="HQ-99"' in answer.text
        assert "HQ-99" not in client.get(job).text

    @pytest.mark.parametrize("number", ["77", "0", "-1", "x", "9" * 30])
    def test_a_missing_job_says_so(self, client: TestClient, number: str) -> None:
        for answer in (
            client.get(f"/jobs/{number}"),
            client.get(f"/jobs/{number}/heading"),
            client.post(f"/jobs/{number}/heading", data=JOB),
        ):
            assert answer.status_code == 404
            assert "There is no" in answer.text or "There is nothing" in answer.text


class TestChecksOfAJob:
    @pytest.mark.parametrize(("strength", "word", "share"), [(1.2, "Pass", "0.50"), (0.5, "Fail", "1.20")])
    def test_they_stand_with_verdict_utilisation_and_sheet(
        self, client: TestClient, job: str, strength: float, word: str, share: str
    ) -> None:
        document = changed("adhesives/glue", {"shear_strength": strength, "status": "approved"})
        with storage.reading(client.app.state.records.engine) as session:  # type: ignore[attr-defined]
            saved = jobs.save(session, job_id=1, raw=document, mark="B1")
        text = client.get(job).text
        assert f'<span class="word">{word}</span><span class="used">{share}</span>' in text
        assert "two planks" in text
        assert f'href="/checks/{saved.check_id}"' in text
        assert client.get(f"/checks/{saved.check_id}/revisions/1/sheet.pdf").content.startswith(b"%PDF")
        listed = client.get("/jobs").text
        assert f'<span class="word">{word}</span><span class="used">{share}</span>' in listed


class TestSearch:
    def test_it_finds_by_any_words_of_the_heading(self, client: TestClient, job: str) -> None:
        client.post("/jobs", data=JOB | {"number": "26-015", "title": "Stage deck", "customer": "Ottermoor"})
        assert "26-015" not in client.get("/jobs?q=roof").text
        assert "26-014" in client.get("/jobs?q=roof hollin").text
        assert "26-015" in client.get("/jobs?q=otterm").text

    def test_what_is_not_found_is_said_with_what_was_typed(self, client: TestClient, job: str) -> None:
        text = client.get("/jobs", params={"q": "<zebra>"}).text
        assert "No job has “&lt;zebra&gt;”" in text
        assert 'value="&lt;zebra&gt;"' in text

    @pytest.mark.parametrize("q", ['"', "*", "AND", "NEAR(", "a:b", "^", "\x00", "'" * 5000, "-", "title:x OR 1"])
    def test_no_search_text_breaks_it(self, client: TestClient, job: str, q: str) -> None:
        assert client.get("/jobs", params={"q": q}).status_code == 200

    @pytest.mark.parametrize("start", ["-5", "x", "9" * 40, "100"])
    def test_no_page_number_breaks_it(self, client: TestClient, job: str, start: str) -> None:
        assert client.get("/jobs", params={"start": start}).status_code == 200


class TestShop:
    SHOP = {"name": "Marlow Ferry Joinery", "address": "Unit 4\nFerry Lane", "paper": "A4", "display": "SI"}  # noqa: RUF012

    def test_the_heading_is_kept_and_said_so(self, client: TestClient) -> None:
        answer = client.post("/shop", data=self.SHOP)
        assert answer.status_code == 303
        text = client.get(answer.headers["location"]).text
        assert "Saved." in text
        assert 'value="Marlow Ferry Joinery"' in text
        assert "Unit 4\nFerry Lane</textarea>" in text

    def test_a_bad_entry_keeps_the_typed_text_and_saves_nothing(self, client: TestClient) -> None:
        client.post("/shop", data=self.SHOP)
        answer = client.post("/shop", data=self.SHOP | {"name": "", "address": "elsewhere", "display": "metric"})
        assert answer.status_code == 422
        assert "elsewhere" in answer.text
        assert "name is empty" in answer.text
        assert "not known here" in answer.text
        assert "elsewhere" not in client.get("/shop").text


def test_a_folder_that_cannot_be_made_is_said_in_words(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("in the way")
    client = TestClient(create_app(Settings(data=tmp_path / "file" / "data")), base_url=ADDRESS)
    answer = client.get("/jobs")
    assert answer.status_code == 422
    assert "cannot be made" in answer.text
