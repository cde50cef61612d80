"""The check page over HTTP: start, preview, rows, save; with JavaScript and without."""

from __future__ import annotations

import html
import re
from collections.abc import Callable

import pytest
from fastapi.testclient import TestClient

from server.web import layouts
from server.web.form_fields import GROUPS
from tests.web.approving import approve

JOB = {"number": "26-020", "title": "Roof", "customer": "", "drawing": "", "paper": "A4", "display": "SI", "note": ""}
BOX = layouts.start("box", "SI") | {"mark": "B1", "title": "Roof box beam", "span": "6.0", "load": "4.2"}
WHOLE = BOX | {
    "adhesives[0].shear_strength": "6",
    "materials[1].bending": "30",
    "materials[1].shear": "8",
    "materials[1].rolling_shear": "1.6",
}
PREVIEW, FORM, SAVE = "/jobs/1/checks/preview", "/jobs/1/checks/form", "/jobs/1/checks"
HTMX = {"HX-Request": "true"}


@pytest.fixture
def shop(client: TestClient) -> TestClient:
    """A client with one job."""
    assert client.post("/jobs", data=JOB).headers["location"] == "/jobs/1"
    return client


def boxes(text: str) -> dict[str, str]:
    """Return every box of the page's form as a browser would send it."""
    text = text[text.index('<form id="check"') : text.index("</form>", text.index('<form id="check"'))]
    found: dict[str, str] = {}
    for tag in re.findall(r"<input\b[^>]*>", text):
        attributes = {name: html.unescape(value) for name, value in re.findall(r'([\w-]+)="([^"]*)"', tag)}
        found[attributes["name"]] = attributes.get("value", "")
    for name, options in re.findall(r'<select id="[^"]*" name="([^"]+)"[^>]*>(.*?)</select>', text, re.DOTALL):
        chosen = re.search(r'value="([^"]*)" selected', options) or re.search(r'value="([^"]*)"', options)
        assert chosen is not None
        found[name] = html.unescape(chosen[1])
    return found


def verdict(text: str) -> str:
    """Return what the strip says, tags left out."""
    strip = text[text.index('id="verdict-strip"') :]
    return re.sub(r"\s+", " ", re.sub(r"<[^>]+>", " ", strip[strip.index(">") + 1 : strip.index("</div>")])).strip()


class TestStart:
    @pytest.mark.parametrize("layout", [*layouts.LAYOUTS, "nonsense"])
    def test_each_layout_shows_its_rows(self, shop: TestClient, layout: str) -> None:
        answer = shop.get(f"/jobs/1/checks/new?layout={layout}")
        assert answer.status_code == 200
        sent = boxes(answer.text)
        expected = layouts.start(layout if layout in layouts.LAYOUTS else "empty", "SI")
        assert {name: sent[name] for name in expected} == expected

    def test_the_first_view_waits_without_finding_fault(self, shop: TestClient) -> None:
        text = shop.get("/jobs/1/checks/new").text
        assert "Still to enter: the span, a load." in text
        assert 'aria-invalid="true"' not in text

    def test_the_basis_is_said_in_words_while_it_is_folded_away(self, shop: TestClient) -> None:
        text = shop.get("/jobs/1/checks/new").text
        assert "allowable stress, safety factor 3 on adhesive, 2.5 on fasteners and material" in text
        assert "held sideways, simple supports at both ends of the span; deflection limit span/300" in text

    def test_a_us_job_has_boxes_marked_in_us_units(self, shop: TestClient) -> None:
        shop.post("/jobs", data=JOB | {"number": "2", "display": "US"})
        sent = boxes(shop.get("/jobs/2/checks/new?layout=tee").text)
        assert (sent["units"], sent["display"], sent["pieces[0].depth"]) == ("US", "US", "7.25")

    def test_every_box_of_every_group_is_on_the_page(self, shop: TestClient) -> None:
        values = dict(BOX)
        for name, group in GROUPS.items():
            values |= {f"{name}[7].{group.boxes[0].name}": "x"}
        sent = set(boxes(shop.post(FORM, data=values).text))
        for shape, _ in GROUPS["pieces"].box("shape").choices:  # each shape has its own boxes
            sent |= set(boxes(shop.post(FORM, data=values | {"pieces[7].shape": shape}).text))
        for name, group in GROUPS.items():
            assert {f"{name}[7].{box.name}" for box in group.boxes} <= sent

    def test_a_missing_job_is_said_to_be_missing(self, client: TestClient) -> None:
        assert client.get("/jobs/7/checks/new").status_code == 404
        assert client.post("/jobs/7/checks", data=WHOLE).status_code == 404


class TestPreview:
    def test_the_outside_area_of_a_chosen_joint_is_shaded(self, shop: TestClient) -> None:
        plain = shop.post(PREVIEW, data=WHOLE).text
        assert 'class="outside"' not in plain
        shaded = shop.post(PREVIEW, data=WHOLE | {"shade": "top flange/web L"}).text
        assert 'class="outside"' in shaded
        assert "Shaded: top flange. First moment about the neutral axis" in shaded
        assert '<option value="top flange/web L" selected>' in shaded
        assert 'class="outside"' not in shop.post(PREVIEW, data=WHOLE | {"shade": "<b>no such"}).text

    def test_the_verdict_stands_as_word_and_number(self, shop: TestClient) -> None:
        text = shop.post(PREVIEW, data=WHOLE).text
        assert verdict(text).startswith("Pass 0.92 utilisation")
        assert "bending in" in verdict(text)

    def test_the_result_has_drawings_diagrams_and_tables(self, shop: TestClient) -> None:
        text = shop.post(PREVIEW, data=WHOLE).text
        assert text.count("<svg") == 6
        for heading in ("Joints", "Pieces", "Deflection", "Cautions", "Not checked here"):
            assert heading in text
        assert not re.search(r"<[^>]+\sstyle=", text)
        assert "<script" not in text

    def test_what_is_missing_is_listed_once_with_every_place(self, shop: TestClient) -> None:
        text = shop.post(PREVIEW, data=BOX).text
        assert verdict(text).startswith("Not proven")
        missing = text[text.index("missing-list") : text.index("</ul>", text.index("missing-list"))]
        adhesive = [line for line in missing.split("<li>") if "adhesive" in line]
        assert len(adhesive) == 1

    def test_a_fault_is_told_beside_its_box_and_in_the_list(self, shop: TestClient) -> None:
        answer = shop.post(PREVIEW, data=WHOLE | {"pieces[2].width": "4 kg"})
        assert answer.status_code == 200
        assert re.search(r'id="m-pieces\[2\]\.width" hx-swap-oob="true">[^<]+is a mass, not a length', answer.text)
        assert '<a href="#f-pieces[2].width">Piece web L: width</a>' in answer.text
        assert 'aria-invalid="true" hx-swap-oob="outerSync"' in answer.text
        assert "a plain number is in" not in answer.text

    def test_a_fault_put_right_is_taken_back(self, shop: TestClient) -> None:
        text = shop.post(PREVIEW, data=WHOLE | {"shown": "pieces[2].width span"}).text
        assert '<span class="message" id="m-pieces[2].width" hx-swap-oob="true"></span>' in text
        assert '<span class="message" id="m-span" hx-swap-oob="true"></span>' in text

    def test_boxes_nobody_has_are_not_put_on_the_page(self, shop: TestClient) -> None:
        text = shop.post(PREVIEW, data=WHOLE | {"shown": 'x"><script> pieces[0].nonsense evil[0].name'}).text
        assert "script" not in text
        assert "nonsense" not in text
        assert "evil" not in text

    def test_several_faults_come_at_once(self, shop: TestClient) -> None:
        text = shop.post(PREVIEW, data=WHOLE | {"span": "long", "pieces[0].depth": "-70", "basis.adhesive": "0"}).text
        for box in ("m-span", "m-pieces[0].depth", "m-basis.adhesive"):
            assert re.search(rf'id="{re.escape(box)}" hx-swap-oob="true">[^<]+<', text)
        assert verdict(text) == "Not yet 3 entries need another look."

    def test_typed_markup_stays_text(self, shop: TestClient) -> None:
        text = shop.post(PREVIEW, data=WHOLE | {"pieces[0].name": "<b onclick=x>", "joints[2].first": "<i>"}).text
        assert "<b onclick" not in text
        assert "<i>" not in text

    def test_letters_the_sheet_cannot_print_are_refused_at_entry(self, shop: TestClient) -> None:
        text = shop.post(PREVIEW, data=WHOLE | {"title": "木 beam"}).text
        assert re.search(r'id="m-title" hx-swap-oob="true">[^<]*fonts have no “木”', text)

    def test_a_library_record_fills_the_check(self, shop: TestClient) -> None:
        record = {"units": "SI", "key": "B-002", "name": "R2", "status": "draft", "source": "test 14 (invented)"}
        assert shop.post("/library/new/bonds", data=record | {"shear_strength": "0.3"}).status_code == 303
        approve(shop, "B-002")
        assert "B-002  R2, rev 1 approved" in shop.get("/jobs/1/checks/new").text
        text = shop.post(PREVIEW, data=WHOLE | {"adhesives[0].record": "B-002"}).text
        assert verdict(text).startswith("Fail 2.19")

    def test_a_record_that_is_not_there_is_named_at_its_box(self, shop: TestClient) -> None:
        text = shop.post(PREVIEW, data=WHOLE | {"adhesives[0].record": "B-999"}).text
        assert re.search(r'id="m-adhesives\[0\]\.record" hx-swap-oob="true">[^<]*B-999', text)

    def test_the_working_comes_when_it_is_asked_for(self, shop: TestClient) -> None:
        text = shop.post("/jobs/1/checks/working", data=WHOLE).text
        assert "<math" in text
        assert "Shear flow" in text
        assert "<math" not in shop.post(PREVIEW, data=WHOLE).text


class TestRows:
    def test_a_row_is_added_with_everything_else_as_typed(self, shop: TestClient) -> None:
        sent = boxes(shop.post(FORM, data=WHOLE | {"add": "loads"}).text)
        assert sent["loads[0].value"] == ""
        assert {name: sent[name] for name in WHOLE} == WHOLE

    def test_a_row_is_removed(self, shop: TestClient) -> None:
        sent = boxes(shop.post(FORM, data=WHOLE | {"remove": "joints[1]"}).text)
        assert "joints[1].first" not in sent
        assert sent["joints[2].first"] == "bottom flange"

    def test_the_part_that_was_changed_stands_open(self, shop: TestClient) -> None:
        text = shop.post(FORM, data=WHOLE | {"add": "loads"}).text
        assert '<details class="fold" id="fold-loads" open>' in text
        assert '<details class="fold" id="fold-joints">' in text

    def test_calculate_answers_with_the_whole_page_and_its_working(self, shop: TestClient) -> None:
        text = shop.post(FORM, data=WHOLE | {"calculate": "yes"}).text
        assert verdict(text).startswith("Pass 0.92")
        assert "<math" in text

    def test_rows_changed_in_place_leave_the_answer_to_the_preview(self, shop: TestClient) -> None:
        answer = shop.post(FORM, data=WHOLE | {"add": "loads"}, headers=HTMX)
        assert answer.headers["HX-Trigger"] == "shaped"
        assert "<math" not in answer.text

    def test_enter_calculates_instead_of_changing_rows(self, shop: TestClient) -> None:
        """The first submit button of a form is the one that Enter presses."""
        text = shop.get("/jobs/1/checks/new").text
        first = re.search(r'<button type="submit"[^>]*>', text[text.index('<form id="check"') :])
        assert first is not None
        assert 'name="calculate"' in first[0]


class TestSave:
    def test_a_check_is_saved_and_shown(self, shop: TestClient) -> None:
        answer = shop.post(SAVE, data=WHOLE)
        assert (answer.status_code, answer.headers["location"]) == (303, "/checks/1/revisions/1")
        text = shop.get("/checks/1/revisions/1").text
        assert "B1: Roof box beam" in text
        assert verdict(text).startswith("Pass 0.92")

    def test_a_refused_check_comes_back_as_typed_and_nothing_is_saved(self, shop: TestClient) -> None:
        typed = WHOLE | {"pieces[0].width": "ninety", "note": "keep <this>", "made_by": "M. Hand"}
        answer = shop.post(SAVE, data=typed)
        assert answer.status_code == 422
        sent = boxes(answer.text)
        assert {name: sent[name] for name in typed} == typed
        assert "Nothing was saved. 1 entry needs another look." in answer.text
        assert re.search(r'id="m-pieces\[0\]\.width">[^<]*ninety', answer.text)
        assert shop.get("/checks/1").status_code == 404

    def test_an_empty_form_is_refused_at_the_boxes_of_the_first_view(self, shop: TestClient) -> None:
        answer = shop.post(SAVE, data=layouts.start("box", "SI"))
        assert answer.status_code == 422
        for box in ("m-span", "m-load"):
            assert re.search(rf'id="{box}">[^<]+<', answer.text)

    def test_nothing_at_all_is_refused_too(self, shop: TestClient) -> None:
        answer = shop.post(SAVE, data={"x": "y"})
        assert answer.status_code == 422
        assert "Nothing was saved" in answer.text

    def test_a_failing_check_can_be_saved(self, shop: TestClient) -> None:
        assert shop.post(SAVE, data=WHOLE | {"load": "9"}).status_code == 303
        assert verdict(shop.get("/checks/1").text).startswith("Fail")


NONSENSE = [
    "abc",
    "-1",
    "nan",
    "1e400",
    "4 kg",
    "<script>",
    "9" * 300,
    "木",
    "1,200 m",
    "'; --",
    "[]",
    "1/0",
    "=",
    "\x00",
]


@pytest.mark.parametrize("group", [*GROUPS, "singles"])
def test_nonsense_in_any_box_is_answered_in_words(shop: TestClient, group: str) -> None:
    names = [name for name in BOX if "[" not in name] if group == "singles" else _boxes_of(group)
    for number, name in enumerate(names):
        text = NONSENSE[number % len(NONSENSE)]
        answer = shop.post(PREVIEW, data=WHOLE | {name: text})
        assert answer.status_code == 200, (name, text)
        assert "Traceback" not in answer.text
        saved = shop.post(SAVE, data=WHOLE | {name: text, "span": "nonsense"})
        assert saved.status_code == 422, (name, text)
    assert shop.get("/checks/1").status_code == 404


def _boxes_of(group: str) -> list[str]:
    return [f"{group}[0].{box.name}" for box in GROUPS[group].boxes]


BREAKS: list[tuple[str, str, Callable[[str], bool]]] = [
    ("pieces[1].up", "30", lambda text: "overlap" in text),
    ("joints[0].second", "bottom flange", lambda text: "do not touch" in text or "touch" in text),
    ("supports[0].at", "9", lambda text: 'id="m-supports[0].at"' in text),
    ("joints[0].width", "100", lambda text: 'id="m-joints[0].width"' in text),
    ("combinations[0].factors", "wind 1.5", lambda text: 'id="m-combinations[0].factors"' in text),
]


@pytest.mark.parametrize(("name", "text", "told"), BREAKS)
def test_what_only_the_check_can_tell_finds_its_box_too(
    shop: TestClient, name: str, text: str, told: Callable[[str], bool]
) -> None:
    answer = shop.post(PREVIEW, data=WHOLE | {name: text})
    assert verdict(answer.text).startswith("Not yet")
    assert told(answer.text)
