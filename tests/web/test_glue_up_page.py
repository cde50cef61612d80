"""A glue-up through the browser: begun from a member check, saved, its traveller printed."""

from __future__ import annotations

import re
from html import unescape

import pytest
from fastapi.testclient import TestClient

from server import documents, sheets
from server.errors import JointError
from server.sheets import ONE_PAGES
from server.web import forms as member_forms
from server.web import one_page_form as forms
from tests.checks.made import STACK
from tests.checks.test_glue_up import run
from tests.web.test_member import SAVE, shop

__all__ = ["shop"]  # the fixture
PAGE = ONE_PAGES["glue-up"]
TYPED = {
    "areas": "100, 4, web\n90 mm, 13 ft, flange",
    "areas_alone": "0.2, gusset",
    "adhesive.spread": "400",
    "adhesive.pot_life": "12",
    "adhesive.open_time": "1 h",
    "adhesive.press_time": "6 h",
    "adhesive.pressure": "0.7",
    "assembly_rate": "0.03",
    "clamps.force": "5",
    "clamps.reach": "200",
}


def text(html: str) -> str:
    return re.sub(r"\s+", " ", unescape(re.sub(r"<[^>]+>", " ", html)))


def typed(display: str = "SI", **more: str) -> dict[str, str]:
    return {**forms.start(PAGE, display), **TYPED, **more}


def test_what_the_boxes_say_is_the_document_and_back():
    raw = forms.read(PAGE, typed()).raw
    document = documents.read(raw)
    assert isinstance(document, documents.GlueUpDocument)
    assert [each.area for each in document.areas or () if isinstance(each, documents.Area)] == [None, None, 0.2e6]
    assert document.assembly_rate == pytest.approx(30000)
    assert forms.read(PAGE, forms.write(PAGE, raw)).raw == raw
    in_feet = forms.in_units(PAGE, typed(), "US")
    again = documents.read(forms.read(PAGE, in_feet).raw)
    assert isinstance(again, documents.GlueUpDocument)
    assert again.assembly_rate == pytest.approx(30000, rel=1e-3)


def test_a_glue_up_begins_with_the_areas_of_a_saved_member(shop: TestClient):
    assert shop.post(SAVE, data={**member_forms.write(STACK), "mark": "P3"}).status_code == 303
    saved = shop.get("/checks/1").text
    link = re.search(r'href="([^"]+glue-up/new\?check=1[^"]*)"', saved)
    assert link is not None
    html = shop.get(unescape(link[1])).text
    assert "100, 3000 mm, lower/upper" in html
    assert "P3 revision 1" in html
    assert "Not proven" in text(html)

    preview = shop.post("/jobs/1/checks/glue-up/preview", data=typed(areas="100, 3, lower/upper"))
    assert "Spreading and closing takes" in text(preview.text)
    wrong = shop.post("/jobs/1/checks/glue-up", data=typed(**{"adhesive.pot_life": "12 m"}))
    assert wrong.status_code == 422
    assert "is a length, not a time" in unescape(wrong.text)

    kept = shop.post("/jobs/1/checks/glue-up", data=typed(mark="P3-G", areas="100, 3, lower/upper"))
    assert kept.status_code == 303
    page = shop.get("/checks/2").text
    assert "/checks/2/revisions/1/traveller.pdf" in page
    answer = shop.get("/checks/2/revisions/1/traveller.pdf")
    assert answer.content.startswith(b"%PDF")
    assert "P3-G-rev-1-traveller.pdf" in answer.headers["content-disposition"]
    assert shop.get("/checks/2/edit").status_code == 200
    assert shop.get("/checks/1/revisions/1/traveller.pdf").status_code >= 400
    assert shop.get("/jobs/1/checks/glue-up/new?check=2").status_code >= 400  # a glue-up has no joints of its own


@pytest.mark.parametrize(("paper", "display"), [("A4", "SI"), ("Letter", "US")])
def test_the_traveller_is_one_page_however_many_bonds_and_mixes(paper, display):
    areas = [{"name": f"bond {number}", "width": 90, "length": 4000} for number in range(30)]
    for result in (run(areas=areas), run(areas=areas[:1], assembly_rate=None)):
        document = {"adhesive": {"spread": "400 g/m2"}}
        sheet = sheets.SheetData(document, result, shop="Shop", job="7", revision=1, paper=paper, display=display)
        one, two = sheets.traveller_pdf(sheet), sheets.traveller_pdf(sheet)
        assert one == two
        assert len(re.findall(rb"/Type\s*/Page\b", one)) == 1


def test_nails_that_press_come_over_and_want_an_answer(shop: TestClient):
    nailed = {**STACK, "fasteners": {"nail": {"diameter": 3}}}
    joint = {**STACK["section"]["joints"][0], "fastener": "nail", "spacing": 75}
    nailed["section"] = {**STACK["section"], "joints": [joint]}
    assert shop.post(SAVE, data={**member_forms.write(nailed), "mark": "P4"}).status_code == 303
    html = shop.get("/jobs/1/checks/glue-up/new?check=1").text
    assert re.search(r'<option value="fasteners"\s+selected', html)
    assert "press low and unevenly" in text(html)


def test_only_a_glue_up_has_a_traveller():
    with pytest.raises(JointError, match="Only a glue-up"):
        sheets.traveller_pdf(sheets.SheetData({}, {"kind": "member"}))


def test_the_terminal_says_what_the_page_says():
    shown = sheets.terminal(run())
    for words in ("48 clamps", "176", "Fits the open time", "A = "):
        assert words in shown
    assert "lb" in sheets.terminal(run(), "US")


def test_the_api_fills_the_records_of_the_check_inside(shop: TestClient):
    document = {"format": "bondwright/1", "kind": "glue-up", "check": STACK, "adhesive": {}}
    assert shop.post("/api/checks/run", json=document).json()["area"] == pytest.approx(100 * 3000)
    unknown = {**document, "check": {**STACK, "adhesives": {"glue": {"record": "B-999"}}}}
    answer = shop.post("/api/checks/run", json=unknown)
    assert answer.status_code == 422
    assert [fault["path"] for fault in answer.json()["faults"]] == ["check.adhesives.glue.record"]
    named = shop.get("/openapi.json").json()["components"]["schemas"]["Document"]["discriminator"]["mapping"]
    assert named["glue-up"] == "#/components/schemas/GlueUpDocument"
