"""The page of a strip's ends, and what a member's page and sheets say of ends and movement."""

from __future__ import annotations

import re
from html import unescape
from xml.etree import ElementTree

import pytest

from server import checks, documents, sheets
from server.sheets import ONE_PAGES
from server.sheets.bond_ends import end_svg
from server.sheets.strip_end_drawing import strip_end_svg
from server.web import one_page_form as forms
from tests.checks.strips import LINTEL, PLATE, gangway

PAGE = ONE_PAGES["strip-end"]


def fresh(display: str = "SI", **more: str) -> dict[str, str]:
    """The boxes of a new form; ``__`` stands for a dot."""
    return {**forms.start(PAGE, display), **{name.replace("__", "."): text for name, text in more.items()}}


@pytest.fixture
def job(client) -> str:
    made = client.post("/jobs", data={"title": "Mill", "number": "J-8", "paper": "A4", "display": "SI"})
    return made.headers["location"]


def text(html: str) -> str:
    return re.sub(r"\s+", " ", unescape(re.sub(r"<[^>]+>", " ", html)))


@pytest.mark.parametrize("display", ["SI", "US"])
def test_a_new_form_is_a_whole_document(display):
    reading = forms.read(PAGE, fresh(display))
    assert not reading.faults
    result = checks.run(documents.read(reading.raw))
    assert result["verdict"] == "fail"  # demo 3: it passes along the strip and fails at its end


def test_the_page_shows_the_ends_and_what_to_change(client, job):
    html = client.get(f"{job}/checks/strip-end/new").text
    assert 'class="drawing strip-end"' in html
    assert 'class="drawing bond-end"' in html
    shown = text(html)
    for words in (
        "What to change",
        "By Roberts (1989)",
        "By Smith and Teng (2001)",
        "End fasteners would have to hold",
    ):
        assert words in shown
    assert "style=" not in html


def test_a_document_written_elsewhere_gives_the_same_ends_through_the_form():
    for made in (PLATE, {**PLATE, "service": {"temperature": [-10, 30], "cure_temperature": 20}}):
        through = forms.read(PAGE, forms.write(PAGE, made)).raw
        one, other = (checks.run(documents.read(each), working=False) for each in (made, through))
        assert one["verdict"] == other["verdict"]
        for here, there in zip(one["ends"], other["ends"], strict=True):
            for key in ("end_shear", "end_peel", "peak_shear", "utilisation"):
                assert here[key] == pytest.approx(there[key], rel=1e-9)


def test_what_acts_before_bonding_has_its_own_box(client, job):
    typed = fresh()
    case = "loads.before bonding"
    raw = forms.read(PAGE, typed | {case: "0, 4.8, 2"}).raw
    assert raw["before_bonding"] == ["before bonding"]
    assert forms.write(PAGE, raw)[case] == "0 m, 4.8 m, 2 kN/m".replace(" m", "").replace(" kN/m", "")
    html = client.post(f"{job}/checks/strip-end/preview", data=typed | {case: "0, 4.8, 2"}).text
    assert "Fail" in text(html)


def test_save_and_print(client, job):
    saved = client.post(f"{job}/checks/strip-end", data=fresh(title="Lintel", mark="L7", made_by="Ann"))
    assert saved.status_code == 303
    assert "What to change" in text(client.get(saved.headers["location"]).text)
    assert client.get("/checks/1/revisions/1/sheet.pdf").content.startswith(b"%PDF")
    assert 'name="strip.width" value="80"' in client.get("/checks/1/edit").text


def test_drawings_are_well_formed():
    result = checks.run(documents.read(PLATE))
    for display in ("SI", "US"):
        for svg in (strip_end_svg(result, display=display), end_svg(result["ends"][0], display=display)):
            ElementTree.fromstring(svg)
            assert "style=" not in svg
    sheet = sheets.terminal(result)
    assert max(len(line) for line in sheet.splitlines()) <= 80


def test_a_members_sheets_say_its_ends_and_its_movement():
    lintel, stringer = (checks.run(documents.read(each)) for each in (LINTEL, gangway("epoxy")))
    sheet = sheets.terminal(lintel)
    assert "ENDS OF BONDED PIECES" in sheet
    assert "end tapered to 1.5 mm over 50 mm" in sheet
    assert "By Smith and Teng (2001)" in sheet
    moving = sheets.terminal(stringer)
    assert "MOVEMENT OF UNLIKE MATERIALS" in moving
    assert "bond line 3 mm" in moving
    for result, made in ((lintel, LINTEL), (stringer, gangway("epoxy"))):
        drawn = sheets.pdf(sheets.SheetData(document=made, result=result))
        assert drawn.startswith(b"%PDF")
        assert max(len(line) for line in sheets.terminal(result, "US").splitlines()) <= 80


def test_a_members_page_shows_its_ends():
    from server.web.panel import panel

    found = panel(checks.run(documents.read(LINTEL), working=False), "SI")
    assert [title for title, _ in found.blocks] == ["Ends of bonded pieces"]
    plain = panel(checks.run(documents.read(gangway("epoxy")), working=False), "US")
    assert [title for title, _ in plain.blocks] == ["Movement of unlike materials"]


def test_an_end_that_governs_is_named_in_both_units():
    from server.sheets.values import governing

    result = checks.run(documents.read(LINTEL), working=False)
    assert governing(result, "SI").startswith("Start of strip, 250 mm")
    assert governing(result, "US").startswith("Start of strip, 9.843")


def test_the_drawn_stress_ends_where_it_has_fallen_to_the_members_own():
    """The other end of the strip peaks as high: it must not stretch the drawing over half the member."""
    end = checks.run(documents.read(LINTEL), working=False)["ends"][0]
    course = end["distribution"]
    assert 50 < course["at"][-1] < 300
    assert abs(course["shear"][-1]) < 1.3 * end["mean_shear_at_end"]


def test_what_is_missing_at_both_ends_is_said_once():
    from server.sheets.values import missing
    from tests.checks.strips import changed

    result = checks.run(documents.read(changed(PLATE, materials__beam__strengths={"shear": 6})), working=False)
    (line,) = [each for each in missing(result, "SI") if "ension across" in each]
    assert "surface of beam at the start of strip" in line
    assert "surface of beam at the end of strip" in line
