"""Saved checks: drawn as stored, printed from the kept bytes, changed, run again, compared."""

from __future__ import annotations

import json
import re

import pytest
from fastapi.testclient import TestClient

from tests.web.approving import approve
from tests.web.test_member import HTMX, SAVE, WHOLE, boxes, shop, verdict

__all__ = ["shop"]  # the fixture
BOND = {"units": "SI", "key": "B-002", "name": "R2", "status": "draft", "source": "test report 14 (invented)"}
PICKED = WHOLE | {"adhesives[0].record": "B-002", "adhesives[0].shear_strength": ""}
PDF = "/checks/1/revisions/1/sheet.pdf"


@pytest.fixture
def book(shop: TestClient) -> TestClient:
    """A client with one saved check on one library bond."""
    assert shop.post("/library/new/bonds", data=BOND | {"shear_strength": "6"}).status_code == 303
    approve(shop, "B-002")
    assert shop.post(SAVE, data=PICKED | {"made_by": "M. Hand"}).status_code == 303
    return shop


def weaken(book: TestClient) -> None:
    """A later test halves the bond's strength: revision 2, approved."""
    entry = BOND | {"based_on": "1", "shear_strength": "0.5", "reason": "new coupons"}
    page = book.get("/library/B-002/edit")
    names = re.findall(r'<form method="post" action="([^"]+)"', page.text)
    assert book.post(names[0], data=entry).status_code == 303
    approve(book, "B-002")


class TestShow:
    def test_the_newest_revision_is_shown(self, book: TestClient) -> None:
        text = book.get("/checks/1").text
        assert "B1: Roof box beam" in text
        assert "M. Hand" in text
        assert verdict(text).startswith("Pass 0.92")
        assert "<math" in text

    def test_the_outside_area_of_a_chosen_joint_is_shaded(self, book: TestClient) -> None:
        assert 'class="outside"' not in book.get("/checks/1").text
        shaded = book.get("/checks/1", params={"shade": "top flange/web L"}).text
        assert 'class="outside"' in shaded
        assert "Shaded: top flange" in shaded

    def test_values_name_their_record_and_revision(self, book: TestClient) -> None:
        text = book.get("/checks/1/revisions/1").text
        assert "/library/B-002?revision=1" in text
        assert "test report 14 (invented)" in text

    @pytest.mark.parametrize(
        "address", ["/checks/9", "/checks/1/revisions/9", PDF.replace("1/s", "9/s"), "/checks/1/compare/1/9"]
    )
    def test_what_is_missing_is_said_to_be_missing(self, book: TestClient, address: str) -> None:
        answer = book.get(address)
        assert answer.status_code == 404
        assert "Traceback" not in answer.text

    def test_the_stored_result_is_drawn_without_running_the_check(
        self, book: TestClient, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        def refuse(*_: object) -> None:
            raise AssertionError("a saved check was run again")

        monkeypatch.setattr("server.checks.run", refuse)
        monkeypatch.setattr("server.library.resolve", refuse)
        assert verdict(book.get("/checks/1").text).startswith("Pass 0.92")


class TestPrint:
    def test_the_sheet_is_the_kept_pdf_with_a_name(self, book: TestClient) -> None:
        answer = book.get(PDF)
        assert answer.headers["content-type"] == "application/pdf"
        assert answer.headers["content-disposition"] == 'inline; filename="26-020-B1-rev-1.pdf"'
        assert answer.content.startswith(b"%PDF-")

    def test_the_bytes_stay_the_same_after_the_library_changed(self, book: TestClient) -> None:
        before = book.get(PDF).content
        weaken(book)
        book.post("/checks/1/revisions/1/again")
        assert book.get(PDF).content == before

    def test_the_document_runs_elsewhere(self, book: TestClient) -> None:
        answer = book.get("/checks/1/revisions/1/document.json")
        document = json.loads(answer.content)
        assert document["adhesives"] == {"glue": {"record": "B-002"}}
        assert book.post("/api/checks/run", content=answer.content).json()["verdict"] == "pass"


class TestLater:
    def test_a_newer_library_value_is_noticed_and_the_sheet_stays(self, book: TestClient) -> None:
        assert "is now rev" not in book.get("/checks/1").text
        weaken(book)
        text = book.get("/checks/1").text
        assert "Library value B-002 is now rev 2. This sheet used rev 1 and still prints rev 1." in text
        assert verdict(text).startswith("Pass 0.92")

    def test_running_again_makes_a_revision_and_shows_what_moved(self, book: TestClient) -> None:
        weaken(book)
        answer = book.post("/checks/1/revisions/1/again")
        assert (answer.status_code, answer.headers["location"]) == (303, "/checks/1/compare/1/2")
        text = book.get("/checks/1/compare/1/2").text
        assert "The verdict changed from pass to fail." in text
        assert "B-002 revision 2" in text
        assert verdict(book.get("/checks/1/revisions/1").text).startswith("Pass")
        assert verdict(book.get("/checks/1/revisions/2").text).startswith("Fail")

    def test_running_again_without_a_change_moves_nothing(self, book: TestClient) -> None:
        book.post("/checks/1/revisions/1/again")
        assert "Nothing moved" in book.get("/checks/1/compare/1/2").text

    def test_an_older_revision_points_to_the_newest(self, book: TestClient) -> None:
        book.post("/checks/1/revisions/1/again")
        text = book.get("/checks/1/revisions/1").text
        assert "The newest is" in text
        assert "/checks/1/compare/1/2" in text


class TestChange:
    def test_the_form_comes_filled_as_it_was_typed(self, book: TestClient) -> None:
        sent = boxes(book.get("/checks/1/edit").text)
        for name in ("mark", "title", "span", "load", "pieces[2].width", "adhesives[0].record", "basis.adhesive"):
            assert sent[name] == PICKED[name]

    def test_a_change_needs_its_reason(self, book: TestClient) -> None:
        sent = boxes(book.get("/checks/1/edit").text) | {"load": "3"}
        answer = book.post("/checks/1/revisions", data=sent)
        assert answer.status_code == 422
        assert re.search(r'id="m-reason">[^<]*reason is empty', answer.text)
        assert boxes(answer.text)["load"] == "3"
        assert book.get("/checks/1/revisions/2").status_code == 404

    def test_a_change_is_the_next_revision(self, book: TestClient) -> None:
        sent = boxes(book.get("/checks/1/edit").text) | {"load": "3", "reason": "lighter roof"}
        answer = book.post("/checks/1/revisions", data=sent)
        assert answer.headers["location"] == "/checks/1/revisions/2"
        assert "lighter roof" in book.get("/checks/1").text
        text = book.get("/checks/1/compare/1/2").text
        assert "Loads, imposed 1, value" in text
        assert verdict(book.get("/checks/1/revisions/1").text).startswith("Pass 0.92")

    def test_rows_can_be_changed_while_changing_a_check(self, book: TestClient) -> None:
        page = book.get("/checks/1/edit").text
        sent = boxes(page)
        shape = re.search(r'hx-post="(/jobs/1/checks/form\?check=1)"', page)
        assert shape is not None
        text = book.post(shape[1], data=sent | {"add": "loads"}).text
        assert 'action="/checks/1/revisions"' in text
        assert "reason" in boxes(text)
        assert book.post(shape[1], data=sent | {"add": "loads"}, headers=HTMX).status_code == 200
