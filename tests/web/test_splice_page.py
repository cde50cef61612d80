"""The page of a splice: its form both ways, live answer, saving, printing, its drawings, and its cost."""

from __future__ import annotations

import re
from html import unescape
from xml.etree import ElementTree

import pytest

from server import checks, documents
from server.sheets import ONE_PAGES, terminal
from server.sheets.bond_plot import curve_svg
from server.sheets.splice_drawing import splice_svg
from server.web import one_page_form as forms
from tests.checks.splices import SHAPES, lap

PAGE = ONE_PAGES["splice"]


def fresh(display: str = "SI", **more: str) -> dict[str, str]:
    """The boxes of a new form; ``__`` stands for a dot."""
    return {**forms.start(PAGE, display), **{name.replace("__", "."): text for name, text in more.items()}}


@pytest.fixture
def job(client) -> str:
    made = client.post("/jobs", data={"title": "Gate", "number": "J-7", "paper": "A4", "display": "SI"})
    return made.headers["location"]


def text(html: str) -> str:
    return re.sub(r"\s+", " ", unescape(re.sub(r"<[^>]+>", " ", html)))


@pytest.mark.parametrize("display", ["SI", "US"])
def test_a_new_form_answers_at_once(client, job, display):
    reading = forms.read(PAGE, fresh(display))
    assert not reading.faults
    assert checks.run(documents.read(reading.raw))["verdict"] == "pass"
    html = client.get(f"{job}/checks/splice/new").text
    assert 'class="drawing splice single-lap"' in html
    assert 'class="drawing overlap-curve"' in html
    assert "style=" not in html
    assert "Useful overlap" in text(html)


@pytest.mark.parametrize("layout", SHAPES)
def test_a_document_written_elsewhere_gives_the_same_result_through_the_form(layout):
    made = lap(**SHAPES[layout], display="SI")
    through = forms.read(PAGE, forms.write(PAGE, made)).raw
    one, other = (checks.run(documents.read(each), working=False) for each in (made, through))
    assert one["verdict"] == other["verdict"]
    for key in ("utilisation", "peak_shear", "peak_peel", "joint_strength", "overlap_useful"):
        assert one[key] == pytest.approx(other[key], rel=1e-9), key


def test_tapers_and_blunt_tips_go_through_the_form_and_onto_the_drawing():
    thin = {"material": "aluminium", "thickness": 2, "taper": 8, "tip": 0.5}
    made = lap(adherends={"inner": thin, "outer": thin}, display="SI")
    blunt = {"material": "spruce", "thickness": 12, "tip": 1}
    scarf = lap(**SHAPES["scarf"], adherends={"inner": blunt, "outer": {**blunt, "tip": 1}}, display="SI")
    for each in (made, scarf):
        through = forms.read(PAGE, forms.write(PAGE, each)).raw
        one, other = (checks.run(documents.read(raw), working=False) for raw in (each, through))
        assert one["peak_shear"] == pytest.approx(other["peak_shear"], rel=1e-9)
    sharp, dull = (
        splice_svg(checks.run(documents.read(each), working=False)) for each in (lap(**SHAPES["scarf"]), scarf)
    )
    begins = [float(re.search(r'stroke-width="2.8" d="M120.0 ([\d.]+)L', svg)[1]) for svg in (sharp, dull)]
    assert begins[1] > begins[0] + 2  # the slope begins below a blunt tip


def test_boxes_come_and_go_with_the_layout(client, job):
    asked = " ".join(forms.shown(PAGE, fresh()))
    answer = client.post(f"{job}/checks/splice/preview", data=fresh(asked=asked, layout="tube-lap"))
    assert 'name="diameter"' in answer.text
    assert 'name="load.torque"' in answer.text
    assert '<input type="hidden" name="slope" value="8">' in answer.text
    scarf = client.post(f"{job}/checks/splice/preview", data=fresh(asked=asked, layout="scarf"))
    assert 'name="slope"' in scarf.text


def test_a_preview_of_every_layout_shows_a_result(client, job):
    for layout in SHAPES:
        for response in ("elastic", "elastic-plastic"):
            html = client.post(f"{job}/checks/splice/preview", data=fresh(layout=layout, response=response)).text
            assert f'class="drawing splice {layout}"' in html, (layout, response)


def test_a_wrong_box_has_its_message_and_keeps_what_was_typed(client, job):
    typed = fresh(overlap="4 kg", calculate="yes")
    answer = client.post(f"{job}/checks/splice/form", data=typed)
    assert 'value="4 kg"' in answer.text
    assert re.search(r'id="m-overlap">[^<]*a length', answer.text)
    assert client.post(f"{job}/checks/splice", data=typed).status_code == 422


def test_save_print_and_change(client, job):
    saved = client.post(f"{job}/checks/splice", data=fresh(title="Lap", mark="L1", made_by="Ann"))
    assert saved.status_code == 303
    page = client.get(saved.headers["location"]).text
    assert 'class="drawing splice single-lap"' in page
    assert "Peak shear" in text(page)
    sheet = client.get("/checks/1/revisions/1/sheet.pdf")
    assert sheet.content.startswith(b"%PDF")
    assert 'name="overlap" value="25"' in client.get("/checks/1/edit").text
    changed = client.post("/checks/1/revisions", data=fresh(overlap="30", reason="longer", mark="L1"))
    assert changed.status_code == 303
    assert "overlap" in text(client.get("/checks/1/compare/1/2").text).lower()


@pytest.mark.parametrize("layout", SHAPES)
def test_drawings_are_well_formed_and_say_the_peaks(layout):
    result = checks.run(documents.read(lap(**SHAPES[layout])))
    for display in ("SI", "US"):
        svg = splice_svg(result, display=display)
        ElementTree.fromstring(svg)
        letters = " ".join(ElementTree.fromstring(svg).itertext())
        assert "shear" in letters
        assert "mean" in letters
        assert "style=" not in svg
        curve = curve_svg(result, display=display)
        ElementTree.fromstring(curve)
        assert "as drawn" in curve
    sheet = terminal(result)
    assert max(len(line) for line in sheet.splitlines()) <= 80
    assert "STRENGTH AND OVERLAP" in sheet


def test_the_bonds_ends_stand_under_the_joints_ends():
    """Drawn to one scale across: the plot begins and ends where the bond line does."""
    svg = splice_svg(checks.run(documents.read(lap())))
    bond = re.search(r'stroke-width="2.8" d="M([\d.]+) [\d.]+L([\d.]+) ', svg)
    heavy = re.search(r'stroke-width="1.8" d="M([\d.]+) [^M"]*L([\d.]+) [\d.]+["M]', svg)
    assert bond is not None
    assert heavy is not None
    assert float(bond[1]) == pytest.approx(float(heavy[1]), abs=0.2)
    assert float(bond[2]) == pytest.approx(float(heavy[2]), abs=0.2)
