"""The stage deck through the form: fall-back in words, slip by itself, spacing zones, and the setting-out page."""

from __future__ import annotations

import re

import pytest
from fastapi.testclient import TestClient

from server import documents
from server.web import forms
from tests.checks.made import Raw
from tests.checks.test_slip import deck, planks
from tests.web.test_member import SAVE, shop

__all__ = ["shop"]  # the fixture
PAGE = "/checks/1/revisions/1/setting-out.pdf"


def save(shop: TestClient, raw: Raw) -> str:
    answer = shop.post(SAVE, data={**forms.write(raw), "mark": "D4", "made_by": "M. Hand"})
    assert answer.status_code == 303, re.findall(r'class="message"[^>]*>([^<]+)', answer.text)
    return str(shop.get("/checks/1").text)


def test_the_deck_says_whether_there_is_a_fall_back(shop: TestClient) -> None:
    text = save(shop, deck(8))
    assert "There is none: with the glue gone the member keeps 44 % of its stiffness" in text
    assert "Fasteners: spacing and setting out" in text
    assert 'class="drawing setting-out"' in text
    assert PAGE in text
    answer = shop.get(PAGE)
    assert answer.headers["content-type"] == "application/pdf"
    assert "D4-rev-1-setting-out.pdf" in answer.headers["content-disposition"]
    assert answer.content.startswith(b"%PDF")


def test_a_check_without_fasteners_offers_no_page(shop: TestClient) -> None:
    raw = deck(4)
    for joint in raw["section"]["joints"]:
        for key in ("fastener", "spacing", "role"):
            del joint[key]
    assert "Setting-out page" not in save(shop, raw)
    answer = shop.get(PAGE)
    assert 400 <= answer.status_code < 500
    assert "sets out no fasteners" in answer.text


ZONES = [{"from": 0, "to": "1 ft", "spacing": "6 in"}, {"from": "2 ft", "to": "4 ft", "spacing": "6 in"}]


@pytest.mark.parametrize(
    ("where", "wrong", "box", "words"),
    [
        ("fasteners__screw__length", "5 in", "joints[0].fastener", "is 5 in long, and"),
        ("fasteners__screw__row_spacing", "1 in", "joints[0].rows", "rows need"),
        ("fasteners__screw__slip_modulus", 0, "fasteners[0].slip_modulus", "enter a stiffness"),
        ("section__joints__0__spacing", ZONES, "joints[0].spacing", "A gap between the zone that ends at 12 in"),
    ],
    ids=["longer than the parts", "rows that do not fit", "slip modulus 0", "gap in the zones"],
)
def test_what_cannot_be_is_refused_beside_its_box(
    shop: TestClient, where: str, wrong: object, box: str, words: str
) -> None:
    more = {"section__joints__0__rows": 3} if "row_spacing" in where else {}
    answer = shop.post(SAVE, data={**forms.write(deck(4, **{where: wrong}, **more)), "mark": "D4", "made_by": "M."})
    assert answer.status_code == 422
    said = re.search(rf'id="m-{re.escape(box)}"[^>]*>([^<]+)', answer.text)
    assert said
    assert words in said[1]


def test_a_spacing_below_the_least_is_saved_as_not_proven(shop: TestClient) -> None:
    text = save(shop, deck(4, **{f"section__joints__{i}__spacing": "1 in" for i in range(5)}))
    assert "Not proven" in text
    assert "skin/rib 1, 0 to 1219.2 mm: under the least, 50.8 mm" in text  # a job in SI


def test_the_form_turns_slip_on_by_itself_and_keeps_step_and_distances() -> None:
    raw = planks(analysis={"slip": True, "spacing_step": 50})
    raw["fasteners"]["screw"] |= {"end_distance": 40, "edge_distance": 20, "row_spacing": 30, "length": 90}
    values = forms.write(raw)
    assert values["slip"] == "auto"
    raw, faults = forms.read(values)
    assert not faults
    document = documents.read(raw)
    assert isinstance(document, documents.MemberDocument)
    assert document.analysis.slip
    assert document.analysis.spacing_step == 50
    screw = document.fastener("screw")
    assert (screw.end_distance, screw.edge_distance, screw.row_spacing, screw.length) == (40, 20, 30, 90)
