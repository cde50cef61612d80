"""Fasteners set out: drawn to scale, stepped off in the units of the sheet, printed on a page of their own."""

from __future__ import annotations

import re
from functools import cache

import pytest

from server import checks, documents, sheets
from server.errors import JointError
from server.sheets import setting_out, slip_parts
from server.sheets.svg import Drawing
from server.sheets.values import in_units
from tests.checks.made import STACK, Raw, changed
from tests.checks.test_slip import deck, planks
from tests.sheets.drawing_reading import texts

ZONES = [
    {"from": 0, "to": 900, "spacing": 75},
    {"from": 900, "to": 2100, "spacing": 150},
    {"from": 2100, "to": 3000, "spacing": 75},
]


@cache
def found(name: str) -> Raw:
    raw = {
        "deck": lambda: deck(4),
        "long deck": lambda: deck(8),
        "planks": lambda: planks(section__joints__0__spacing=ZONES, fasteners__screw__end_distance=75),
        "stack": lambda: STACK,
    }[name]()
    return checks.run(documents.read(raw))


def sheet(name: str, display: str) -> sheets.SheetData:
    return sheets.SheetData(document={}, result=found(name), shop="Shop", job="7", revision=1, display=display)  # type: ignore[arg-type]


def test_joints_set_out_alike_share_one_elevation() -> None:
    (laid,) = setting_out.laid_out(found("deck"))
    assert laid.numbered() == "Joints 1 to 5"
    assert laid.count == 40
    assert setting_out.laid_out(found("stack")) == []


def test_every_fastener_is_drawn_at_its_place() -> None:
    result = found("planks")
    svg = setting_out.setting_out_svg(result)
    scale = float(re.search(r'data-scale="([\d.]+)"', svg)[1])  # type: ignore[index]
    drawn = sorted(float(x) for x in re.findall(r"M([\d.]+) [\d.]+V", svg) if "." in x and len(x.split(".")[1]) == 2)
    places = result["joints"][0]["setting_out"]["places"]
    assert drawn == pytest.approx([setting_out.MARGIN + place * scale for place in places], abs=0.006)


def test_dimensions_step_off_the_whole_joint() -> None:
    lettered = texts(setting_out.setting_out_svg(found("planks")))
    assert [text for text in lettered if re.fullmatch(r"(\d+ × )?\d+", text)] == [
        "75",
        "11 × 75",
        "8 × 150",
        "11 × 75",
        "75",
    ]
    assert "Joint 1: screw, 31" in lettered
    assert 75 + 11 * 75 + 8 * 150 + 11 * 75 + 75 == 3000


def test_inch_pound_units_letter_a_rules_fractions() -> None:
    lettered = texts(setting_out.setting_out_svg(found("deck"), display="US"))
    assert "7 × 6" in lettered
    assert lettered.count("3") == 2
    rows = [row for part in setting_out.tables(found("deck"), "US") if part["kind"] == "table" for row in part["rows"]]
    assert ["screw", "fall-back if the glue is lost", "40"] in rows


def test_too_many_zones_for_the_width_keep_the_ends() -> None:
    svg = setting_out.setting_out_svg(found("planks"), width=130.0)
    assert "3000" in texts(svg)
    assert isinstance(Drawing(100).svg("x", "t", "s"), str)


@pytest.mark.parametrize(("name", "display"), [("deck", "US"), ("planks", "SI")])
def test_the_page_prints_the_same_bytes_twice(name: str, display: str) -> None:
    one, two = (sheets.setting_out_pdf(sheet(name, display)) for _ in range(2))
    assert one == two
    assert one.startswith(b"%PDF")


def test_a_check_without_fasteners_has_no_page() -> None:
    with pytest.raises(JointError, match="sets out no fasteners"):
        sheets.setting_out_pdf(sheet("stack", "SI"))


def test_the_fall_back_is_told_in_words_and_figures() -> None:
    blocks = dict(slip_parts.blocks(found("long deck"), "US"))
    parts = blocks["Fall-back: with the glue gone"]
    assert parts[0]["text"].startswith("There is none: with the glue gone the member keeps 44 %")
    pairs = dict(parts[1]["pairs"])
    assert pairs["Verdict"] == "there is none"
    assert "span over 101" in pairs["Deflection (told, not judged)"]
    forces = [row[4] for row in parts[2]["rows"]]
    assert {text.replace("\u00a0", " ") for text in forces} == {
        "298.6 lbf",
        "369.6 lbf",
    }  # edge ribs; inner ribs with their own width


def test_the_slip_of_the_joints_is_told_where_it_was_reckoned() -> None:
    blocks = dict(slip_parts.blocks(found("planks"), "SI"))
    pairs = dict(blocks["What the joints give"][0]["pairs"])
    assert pairs["Share of the stiffness left"].endswith("%")
    assert "EI by EN 1995-1-1 Annex B, for comparison" in pairs
    assert "What the joints give" not in dict(slip_parts.blocks(found("stack"), "SI"))
    assert "Slip in the joints" in sheets.slip_svg(found("planks"))


def test_zones_that_cannot_be_had_are_explained() -> None:
    raw = planks(analysis={"slip": False}, fasteners__screw__shear_resistance=2000, fasteners__screw__spacing_min=60)
    result = checks.run(documents.read(raw))
    notes = [line for part in setting_out.schedule(result, "SI") if part["kind"] == "list" for line in part["items"]]
    assert any("add a row" in line for line in notes)


def test_a_result_from_before_this_was_reckoned_has_no_blocks() -> None:
    old = {key: value for key, value in found("stack").items() if key not in ("fall_back", "annex_b")}
    joints = [
        {k: v for k, v in j.items() if k not in ("setting_out", "spacing_schedule", "schedule_note")}
        for j in old["joints"]
    ]
    assert list(slip_parts.blocks({**old, "joints": joints}, "SI")) == []
    assert changed(old)


def test_thousands_with_a_comma_change_units_whole() -> None:
    said = "the bolt at 200 mm hands 2,560 N over (1,000 N each), 95.2 N in all"
    assert in_units(said, "US") == "the bolt at 7.874 in hands 575.5 lbf over (224.8 lbf each), 21.4 lbf in all"
