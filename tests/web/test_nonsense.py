"""Kinds of nonsense, each through the API and through the form: refused in words, at its field, and nothing saved."""

from __future__ import annotations

import html
import json
import re
import sqlite3
from collections.abc import Iterator
from typing import Any, NamedTuple

import pytest
from fastapi.testclient import TestClient

from server.app import create_app
from server.settings import Settings
from tests.web.conftest import ADDRESS
from tests.web.test_api import PLANKS, changed
from tests.web.test_member import FORM, JOB, PREVIEW, SAVE, WHOLE, boxes

WHOLE_NUMBERS = "section/joints/0/rows"
LENGTH, DEPTH = "member/length", "section/pieces/upper/depth"
LOAD, AT = "loads/imposed/0/value", "section/pieces/upper/at"


class Kind(NamedTuple):
    """One kind of nonsense: where it goes in a document and what is named, where it goes in the form."""

    path: str
    value: object
    field: str
    box: str
    text: str


KINDS: dict[str, Kind] = {
    "words for a number": Kind(LENGTH, "long", "member.length", "span", "long"),
    "a negative length": Kind(LENGTH, -4000, "member.length", "span", "-4 m"),
    "nothing long": Kind(LENGTH, 0, "member.length", "span", "0"),
    "not a number": Kind(LENGTH, "NaN", "member.length", "span", "NaN"),
    "infinity": Kind(LENGTH, "inf", "member.length", "span", "Infinity"),
    "an overflow": Kind(LENGTH, "1e400", "member.length", "span", "1e400"),
    "an absurd size": Kind(LENGTH, "9e9 km", "member.length", "span", "9e9 km"),
    "a thousand nines": Kind(LENGTH, "9" * 1000, "member.length", "span", "9" * 1000),
    "a unit of the wrong kind": Kind(LENGTH, "4 kg", "member.length", "span", "4 kg"),
    "a unit that is none": Kind(LENGTH, "4 furlongs", "member.length", "span", "4 furlongs"),
    "a unit without a number": Kind(DEPTH, "mm", "section.pieces.upper.depth", "pieces[0].depth", "mm"),
    "two units": Kind(DEPTH, "4 mm mm", "section.pieces.upper.depth", "pieces[0].depth", "4 mm mm"),
    "two numbers": Kind(DEPTH, "4 5 mm", "section.pieces.upper.depth", "pieces[0].depth", "4 5 mm"),
    "a division by nothing": Kind(DEPTH, "1/0 in", "section.pieces.upper.depth", "pieces[0].depth", "1/0 in"),
    "a sum": Kind(DEPTH, "=90+10", "section.pieces.upper.depth", "pieces[0].depth", "=90+10"),
    "a hexadecimal number": Kind(DEPTH, "0x5A", "section.pieces.upper.depth", "pieces[0].depth", "0x5A"),
    "a comma that groups": Kind(DEPTH, "1,200 mm", "section.pieces.upper.depth", "pieces[0].depth", "1,200 mm"),
    "digits of another script": Kind(DEPTH, "٩٠", "section.pieces.upper.depth", "pieces[0].depth", "٩٠"),
    "a mass for a force": Kind(LOAD, "200 kg/m", "loads.imposed[0].value", "load", "200 kg/m"),
    "a force for a line load": Kind(LOAD, "2 kN", "loads.imposed[0].value", "load", "2 kN"),
    "a peel test's value": Kind(
        "adhesives/glue/peel_strength", "6 N/mm", "adhesives.glue.peel_strength", "adhesives[0].peel_strength", "6 N/mm"
    ),
    "a command for a database": Kind(LENGTH, "1'; DROP TABLE job", "member.length", "span", "1'; DROP TABLE job"),
    "a script": Kind(LENGTH, "<script>alert(1)</script>", "member.length", "span", "<script>alert(1)</script>"),
    "a template's braces": Kind(LENGTH, "{{ 7*7 }}", "member.length", "span", "{{ 7*7 }}"),
    "a path of files": Kind(LENGTH, "../../etc/passwd", "member.length", "span", "../../etc/passwd"),
    "places of a format": Kind(LENGTH, "%s%s%n {0.__class__}", "member.length", "span", "%s%s%n {0.__class__}"),
    "letters that run backwards": Kind(LENGTH, "\u202e4 m", "member.length", "span", "\u202e4 m"),
    "a share above the whole": Kind(
        "section/joints/0/coverage", "120 %", "section.joints[0].coverage", "joints[0].coverage", "120 %"
    ),
    "half a row": Kind(WHOLE_NUMBERS, 1.5, "section.joints[0].rows", "joints[0].rows", "1.5"),
    "a material nobody knows": Kind(
        "section/pieces/upper/material", "adamant", "section.pieces.upper.material", "pieces[0].material", "adamant"
    ),
    "a piece glued to itself": Kind(
        "section/joints/0/between", ["lower", "lower"], "section.joints[0].between", "joints[0].second", "top flange"
    ),
    "a piece that is not there": Kind(
        "section/joints/0/between", ["lower", "lid"], "section.joints[0].between", "joints[0].second", "lid"
    ),
    "a bond wider than its contact": Kind(
        "section/joints/0/width", "2 m", "section.joints[0].width", "joints[0].width", "2000"
    ),
    "pieces inside each other": Kind(AT, [0, 50], "section.pieces", "pieces[1].up", "30"),
    "pieces that do not touch": Kind(AT, [0, 300], "section.joints[0].between", "joints[0].second", "bottom flange"),
    "a support off the member": Kind(
        "member/supports/1/at", "5 m", "member.supports[1].at", "supports[0].at", "99 m"
    ),
    "a member that turns over": Kind(
        "member/supports", [{"at": 0, "kind": "pin"}], "member.supports", "supports[0].at", "0"
    ),
    "a load off the member": Kind("loads/imposed/0/to", "9 m", "loads.imposed[0].to", "loads[0].at", "99"),
    "a load that runs backwards": Kind(
        "loads/imposed/0", {"kind": "line", "from": 3000, "to": 1000, "value": 1}, "loads.imposed[0].to",
        "loads[0].to", "0",
    ),
    "a case nobody has": Kind(
        "combinations", {"A": {"factors": {"wind": 1}}}, "combinations.A.factors.wind",
        "combinations[0].factors", "wind 1.5",
    ),
    "a safety factor below one": Kind("basis/safety_factor", 0.5, "basis.safety_factor", "basis.adhesive", "0.5"),
    "a method nobody has": Kind("basis/method", "by eye", "basis.method", "basis.method", "by eye"),
    "a limit of no span": Kind("member/deflection_limit", "L/0", "member.deflection_limit", "deflection_limit", "L/0"),
    "a status nobody gives": Kind(
        "adhesives/glue/status", "lovely", "adhesives.glue.status", "adhesives[0].status", "lovely"
    ),
    "a duration factor without its number": Kind(
        "adhesives/glue/duration_factors", {"permanent": "low"}, "adhesives.glue.duration_factors.permanent",
        "adhesives[0].duration_factors", "permanent low",
    ),
    "a record nobody keeps": Kind("adhesives/glue", {"record": "B-777"}, "adhesives.glue.record", "adhesives[0].record",
                                  "B-777"),
    "signs without a letter for print": Kind("title", "\u0007bell", "title", "title", "木の梁"),
    "a text without an end": Kind("title", "x" * 6000, "title", "title", "x" * 5000),
}  # fmt: skip
MORE_ROWS = {
    "loads[0].at": {"loads[0].kind": "point", "loads[0].value": "3"},
    "loads[0].to": {"loads[0].kind": "line", "loads[0].value": "3", "loads[0].from": "2"},
    "supports[0].at": {"supports[0].kind": "pin"},
    "joints[0].rows": {"joints[0].fastener": "nail", "joints[0].spacing": "90", "fasteners[0].name": "nail"},
}
"""What stands in the same row, for the box to be read at all."""


BESIDE = {
    "a piece glued to itself": "joints[0].first",
    "pieces that do not touch": "joints[0].first",
    "pieces inside each other": "pieces[0].across",
}
"""Where it is said, if not beside the box that was filled: what two boxes do to each other stands at the first."""


@pytest.fixture(scope="module")
def settings(tmp_path_factory: pytest.TempPathFactory) -> Settings:
    """One record book for all: nothing here is ever saved, so nothing changes it."""
    return Settings(data=tmp_path_factory.mktemp("shop"))


@pytest.fixture(scope="module")
def client(settings: Settings) -> Iterator[TestClient]:
    with TestClient(create_app(settings), base_url=ADDRESS, follow_redirects=False) as made:
        assert made.post("/jobs", data=JOB).status_code == 303
        yield made


@pytest.fixture
def shop(client: TestClient) -> TestClient:
    """The client, for what needs its one job."""
    return client


def rows(settings: Settings) -> dict[str, int]:
    """How many rows every table of the record book has."""
    with sqlite3.connect(settings.records) as book:
        names = [name for (name,) in book.execute("SELECT name FROM sqlite_schema WHERE type = 'table'")]
        return {name: book.execute(f'SELECT count(*) FROM "{name}"').fetchone()[0] for name in names}


def sound(text: str) -> None:
    """No program speaks to the reader."""
    for word in (
        "Traceback",
        "Internal Server Error",
        "pydantic",
        "sqlite3",
        "sqlalchemy",
        ".py",
        "ValueError",
        "0x7f",
    ):
        assert word not in text, word


def test_there_are_many_kinds() -> None:
    assert len(KINDS) >= 45


@pytest.mark.parametrize("name", KINDS)
def test_the_api_names_the_field(client: TestClient, settings: Settings, name: str) -> None:
    kind, before = KINDS[name], rows(settings)
    document = changed(kind.path, kind.value) if kind.path != "combinations" else PLANKS | {"combinations": kind.value}
    answer = client.post("/api/checks/run", content=json.dumps(document))
    assert answer.status_code == 422
    faults = answer.json()["faults"]
    assert any(fault["path"].startswith(kind.field) for fault in faults), faults
    for fault in faults:
        assert 10 < len(fault["message"]) < 600
        assert "\n" not in fault["message"]
        sound(fault["message"])
    assert rows(settings) == before


@pytest.mark.parametrize("name", KINDS)
def test_the_form_says_it_beside_the_box(shop: TestClient, settings: Settings, name: str) -> None:
    kind, before = KINDS[name], rows(settings)
    typed = WHOLE | MORE_ROWS.get(kind.box, {}) | {kind.box: kind.text, "made_by": "M. Hand", "note": "keep me"}
    preview = shop.post(PREVIEW, data=typed)
    assert preview.status_code == 200
    sound(preview.text)
    answer = shop.post(SAVE, data=typed)
    assert answer.status_code == 422
    sound(answer.text)
    assert "Nothing was saved" in answer.text
    box = BESIDE.get(name, kind.box)
    message = re.search(rf'id="m-{re.escape(box)}">([^<]*)<', answer.text)
    assert message is not None
    assert len(html.unescape(message[1]).strip()) > 10, f"nothing stands beside {box}"
    sent = boxes(answer.text)
    assert sent["note"] == "keep me"
    if kind.box not in ("basis.method", "adhesives[0].status"):  # a list to choose from holds only its own choices
        assert sent[kind.box] == kind.text
    assert "<script>alert" not in answer.text
    assert rows(settings) == before


OTHER_FORMS: dict[str, tuple[str, dict[str, str], str]] = {
    "a job without a title": ("/jobs", JOB | {"number": "7", "title": " "}, "title"),
    "a job on paper nobody sells": ("/jobs", JOB | {"number": "7", "paper": "Foolscap"}, "paper"),
    "a job in units nobody uses": ("/jobs", JOB | {"number": "7", "display": "cubits"}, "display"),
    "a job number that is taken": ("/jobs", JOB, "number"),
    "a job number without an end": ("/jobs", JOB | {"number": "7" * 5000}, "number"),
    "a shop without a name": ("/shop", {"name": "", "paper": "A4", "display": "SI"}, "name"),
    "a shop of signs nobody prints": ("/shop", {"name": "木工所", "paper": "A4", "display": "SI"}, "name"),
    "a bond without a name": ("/library/new/bonds", {"status": "draft", "units": "SI"}, "name"),
    "a bond as strong as words": (
        "/library/new/bonds", {"name": "G", "status": "draft", "units": "SI", "shear_strength": "very"},
        "shear_strength",
    ),
    "a bond with a peel test's value": (
        "/library/new/bonds", {"name": "G", "status": "draft", "units": "SI", "peel_strength": "6 N/mm"},
        "peel_strength",
    ),
    "a material without stiffness": (
        "/library/new/materials", {"name": "Oak", "status": "draft", "units": "SI", "E": "0"}, "E",
    ),
    "a fastener that weighs": (
        "/library/new/fasteners", {"name": "N", "status": "draft", "units": "SI", "shear_resistance": "4 kg"},
        "shear_resistance",
    ),
    "a record of a status nobody gives": (
        "/library/new/bonds", {"name": "G", "status": "lovely", "units": "SI"}, "status",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", OTHER_FORMS)
def test_the_other_forms_refuse_it_beside_the_box(shop: TestClient, settings: Settings, name: str) -> None:
    (address, typed, box), before = OTHER_FORMS[name], rows(settings)
    answer = shop.post(address, data=typed)
    assert answer.status_code == 422
    sound(answer.text)
    marked = re.findall(r'<(?:input|select|textarea)[^>]*aria-invalid="true"[^>]*>', answer.text)
    assert [tag for tag in marked if f'name="{box}"' in tag], f"{box} is not marked"
    assert rows(settings) == before


BODIES = {
    "nothing": b"",
    "no JSON": b"hello",
    "JSON cut short": b'{"format": "bondwright/1", "kind": "mem',
    "a list": b"[1, 2]",
    "a number": b"42",
    "no text at all": bytes(range(256)),
    "sixteen bits": '{"kind": "member"}'.encode("utf-16"),
    "brackets without an end": b"[" * 200_000,
    "objects without an end": b'{"a":' * 100_000,
    "a key twice": b'{"format": "bondwright/1", "kind": "member", "kind": "member"}',
    "a number that is none": b'{"format": "bondwright/1", "kind": "member", "member": {"length": NaN}}',
    "a number of ten thousand digits": b'{"format": "bondwright/1", "kind": "member", "x": ' + b"9" * 10_000 + b"}",
    "half a character": rb'{"format": "bondwright/1", "kind": "member", "title": "\ud800"}',
    "a form": b"span=6&load=4.2",
    "another format": json.dumps(PLANKS | {"format": "bondwright/2"}).encode(),
    "another kind": json.dumps(PLANKS | {"kind": "raft"}).encode(),
    "a kind that is a list": json.dumps(PLANKS | {"kind": ["member"]}).encode(),
    "a name the contract lacks": json.dumps(PLANKS | {"colour": "red"}).encode(),
    "ten thousand faults": json.dumps(PLANKS | {f"x{n}": n for n in range(10_000)}).encode(),
}


@pytest.mark.parametrize("name", BODIES)
def test_a_body_that_is_no_document_is_refused(client: TestClient, settings: Settings, name: str) -> None:
    before = rows(settings)
    for kind in ("application/json", "text/plain", "application/x-www-form-urlencoded", "multipart/form-data", ""):
        answer = client.post("/api/checks/run", content=BODIES[name], headers={"content-type": kind})
        assert answer.status_code == 422
        assert 0 < len(answer.json()["faults"]) <= 200
        sound(answer.text)
    assert rows(settings) == before


ADDRESSES = [
    "/jobs/abc", "/jobs/0", "/jobs/-1", "/jobs/99999999999999999999", "/jobs/1.5", "/checks/1/revisions/99",
    "/checks/0/revisions/0", "/library/%00", "/library/..%2f..%2fetc", "/static/../pyproject.toml",
    "/static/..%2f..%2fpyproject.toml", "/api/records/%22%3E", "/api/records/B-1?revision=99999999999999999999",
    "/jobs/%F0%9F%8C%B2", "/" + "x" * 3000,
]  # fmt: skip


@pytest.mark.parametrize("address", ADDRESSES)
def test_an_address_that_leads_nowhere_says_so(shop: TestClient, address: str) -> None:
    answer = shop.get(address)
    assert answer.status_code in (404, 422)
    sound(answer.text)


@pytest.mark.parametrize(
    "box", ["pieces[9999].width", "pieces[-1].width", "pieces[x].width", "a[0].b", "[]", "=", "\x00"]
)
def test_boxes_that_no_form_has_are_let_fall(shop: TestClient, settings: Settings, box: str) -> None:
    before = rows(settings)
    for address, status in ((PREVIEW, 200), (FORM, 200), (SAVE, 422)):
        answer = shop.post(address, data=WHOLE | {box: "5", "span": "long"})
        assert answer.status_code == status
        sound(answer.text)
    assert rows(settings) == before


@pytest.mark.parametrize(
    "do", ["", "nonsense", "add:", "add:nothing", "remove:pieces:99", "remove:x", "layout:attic", "\x00"]
)
def test_buttons_that_no_form_has_do_no_harm(shop: TestClient, settings: Settings, do: str) -> None:
    before = rows(settings)
    answer = shop.post(FORM, data=WHOLE | {"do": do, "add": do, "remove": do, "layout": do})
    assert answer.status_code in (200, 422)
    sound(answer.text)
    assert rows(settings) == before


def test_a_file_where_a_form_belongs_is_refused(shop: TestClient, settings: Settings) -> None:
    before = rows(settings)
    answer = shop.post(SAVE, files={"span": ("span.txt", b"6")})
    assert answer.status_code in (400, 413, 422)
    sound(answer.text)
    assert rows(settings) == before


def test_a_mass_typed_for_a_force_is_told_the_force_it_weighs(client: TestClient) -> None:
    answer: Any = client.post("/api/checks/run", content=json.dumps(changed(LOAD, "200 kg/m"))).json()
    assert "1.96" in answer["faults"][0]["message"] or "kgf" in answer["faults"][0]["message"]
