"""The zones that the flow asks for, put into the form by a button: in the units of the boxes, and they hold."""

from __future__ import annotations

import re

import pytest
from fastapi.testclient import TestClient

from server import checks, documents
from server.web import forms, needed_zones
from server.web.panel import Judged
from tests.checks.made import Raw
from tests.checks.test_slip import deck, planks
from tests.web.test_member import shop

__all__ = ["shop"]  # the fixture


def pressed(raw: Raw) -> tuple[dict[str, str], str]:
    values = forms.write(raw)
    reading = forms.reading_of(values)
    result = checks.run(documents.read(reading.raw), working=False)
    shaped, told = needed_zones.put(values, Judged(reading.raw, result, {}), reading.paths, forms.system_of(values))
    return shaped.values, told


@pytest.mark.parametrize("system", ["SI", "US"])
def test_the_zones_stand_in_the_box_as_typed_and_hold(system: str) -> None:
    raw = planks(display=system, fasteners__screw__spacing_max=600) | {"title": "planks"}
    raw["fasteners"]["screw"] |= {"shear_resistance": 3000, "slip_modulus": 50000}
    values, told = pressed(raw)
    assert told == "The zones are put in for 1 joint."
    text = values["joints[0].spacing"]
    assert text.count(";") >= 2, text
    read, faults = forms.read(values)
    assert not faults
    result = checks.run(documents.read(read))
    (fasteners,) = result["joints"][0]["limits"]
    assert 0.5 < fasteners["utilisation"] <= 1
    step = 25.4 if system == "US" else 25
    spacings = [zone.spacing for zone in documents.read(read).section.joints[0].spacing]  # type: ignore[attr-defined]
    assert all(abs(each / step - round(each / step)) < 1e-9 for each in spacings)
    again, _ = pressed(read)  # from other zones, other flows: perhaps other zones again, and they hold too
    (fasteners,) = checks.run(documents.read(forms.read(again)[0]))["joints"][0]["limits"]
    assert 0.5 < fasteners["utilisation"] <= 1


def test_every_joint_gets_its_own_and_those_without_say_why() -> None:
    values, told = pressed(deck(4))
    assert {values[f"joints[{i}].spacing"] for i in range(5)} == {"10", "12"}  # inner ribs, edge ribs
    assert told == "The zones are put in for 5 joints."
    assert checks.run(documents.read(forms.read(values)[0]))["verdict"] == "pass"
    values, told = pressed(deck(8))
    assert values["joints[2].spacing"] == "6"  # as it was
    assert "The zones are put in for 2 joints. No zones for skin/rib 2" in told
    assert "under the least of 2 in" in told


def test_without_javascript_the_button_gives_the_page_with_the_zones_in(shop: TestClient) -> None:
    values = forms.write(deck(4)) | {"needed_zones": "yes"}
    page = shop.post("/jobs/1/checks/form", data=values)
    assert page.status_code == 200
    box = re.search(r'name="joints\[0\]\.spacing" value="([^"]*)"', page.text)
    assert box
    assert box[1] == "12"
    assert "The zones are put in for 5 joints." in page.text
    assert 'id="fold-joints" open' in page.text


def test_a_form_at_fault_keeps_what_was_typed_and_says_why(shop: TestClient) -> None:
    values = forms.write(deck(4)) | {"needed_zones": "yes", "joints[0].spacing": "six", "span": ""}
    page = shop.post("/jobs/1/checks/form", data=values)
    assert "No zones yet" in page.text
    assert 'value="six"' in page.text
