"""A document is read whole, or refused with every fault, each with its path and the next step."""

from __future__ import annotations

import copy
import json
import math
import re
from typing import get_args, get_origin

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pydantic import BaseModel

from server import documents, units
from server.documents import AreaLoad, LineLoad, MemberDocument, Rectangle, fields
from server.documents.quantities import Quantity
from server.errors import DocumentError
from tests.documents.examples import BOX, changed, drop, faults, only_fault, put, read


def test_a_whole_document_is_read_in_n_mm_mpa() -> None:
    document = read(BOX)
    assert document.member.length == 4200.0
    assert document.member.deflection_limit == 300.0
    assert document.member.held_sideways is True
    assert document.material("deal").E == 11000.0
    assert document.material("deal").yield_ == 30.0
    assert document.adhesive("PU").shear_strength == pytest.approx(900 * 6.894757293168361e-3)
    assert document.fastener("nail").shear_resistance == 800.0
    web = document.section.pieces["web L"]
    assert isinstance(web, Rectangle)
    assert (web.width, web.at, web.grain, web.turn, web.from_, web.to) == (12.7, (-12.7, 0.0), "along", 0.0, None, None)
    bonded, half, pressed, nailed = document.section.joints
    assert (bonded.coverage, half.coverage, half.width) == (1.0, 0.8, 40.0)
    assert (bonded.effective_role, pressed.effective_role, nailed.effective_role) == (None, "press", "sole")
    assert isinstance(nailed.spacing, list)
    assert [zone.spacing for zone in nailed.spacing] == [50.0, 70.0]
    assert nailed.id == "web R/top"
    line, _, area, _ = document.loads["snow"]
    assert isinstance(line, LineLoad)
    assert line.ends == (1.0, 2.0)
    assert isinstance(area, AreaLoad)
    assert area.value == pytest.approx(125 * 47.88025898e-6, rel=1e-9)
    assert area.width == 1219.2
    assert document.combinations["B"].for_ == "deflection"
    assert document.basis.factor("adhesive") == 3.0
    assert document.basis.factor("material", "ply") == 2.2
    assert document.basis.fall_back() == 2.5


def test_text_bytes_and_mapping_read_alike() -> None:
    text = json.dumps(BOX)
    assert (
        read(text) == read(text.encode()) == read(BOX) == read("\ufeff" + text) == read(b"\xef\xbb\xbf" + text.encode())
    )


def test_what_was_typed_is_kept_apart_from_the_caller() -> None:
    data = copy.deepcopy(BOX)
    document = read(data)
    data["member"]["length"] = "9 m"
    assert document.raw == BOX
    assert document.raw["member"]["length"] == "4.2 m"


def test_nothing_changes_after_reading() -> None:
    with pytest.raises(ValueError, match="frozen"):
        read(BOX).member.length = 5.0


def test_without_combinations_all_cases_count_once() -> None:
    document = read(changed(drop("combinations")))
    assert list(document.combinations) == ["all"]
    combination = document.combinations["all"]
    assert (combination.factors, combination.duration, combination.for_) == ({"dead": 1.0, "snow": 1.0}, None, "both")


def test_service_and_analysis_have_defaults() -> None:
    document = read(BOX)
    assert document.service is None
    assert (document.analysis.slip, document.analysis.shear_deformation, document.analysis.field) == (
        False,
        True,
        "auto",
    )


def test_service_is_read() -> None:
    service = read(
        changed(put("service", {"temperature": ["14 degF", 40], "cure_temperature": 20, "moisture_change": {"ply": 4}}))
    ).service
    assert service is not None
    assert service.temperature == (pytest.approx(-10.0), 40.0)
    assert service.moisture_change == {"ply": 4.0}


def test_texts_from_a_form_read_like_numbers() -> None:
    for typed in ("2", " 2 ", 2.0):
        assert read(changed(put("section/joints/3/rows", typed))).section.joints[3].rows == 2
    assert read(changed(put("member/deflection_limit", "300"))).member.deflection_limit == 300.0


def test_null_leaves_an_optional_field_out() -> None:
    data = changed(put("section/joints/0", {"between": ["web L", "bottom"], "adhesive": "PU", "width": None}))
    data["section"]["joints"][0] |= dict.fromkeys(("fastener", "spacing", "role"))
    data["section"]["pieces"]["top"] |= {"from": None, "to": None}
    data["materials"]["deal"]["G"] = None
    data["service"] = None
    document = read(data)
    assert document.section.joints[0] == read(BOX).section.joints[0]
    assert document.material("deal").G is None


def test_all_faults_are_said_at_once() -> None:
    def change(data: dict) -> None:  # type: ignore[type-arg]
        data["section"]["pieces"]["web L"]["widht"] = data["section"]["pieces"]["web L"].pop("width")
        data["section"]["pieces"]["bottom"]["material"] = "dael"
        data["section"]["pieces"]["top"] |= {"shape": "hexagon", "points": []}
        data["section"]["joints"][0] |= {"adhesive": "PUR", "rows": "two"}
        data["section"]["joints"][1]["coverage"] = 1.2
        data["section"]["joints"][2]["between"] = ["web L"]
        data["section"]["joints"][3]["role"] = "press"
        data["loads"]["snow"][0]["value"] = [1, "4 kg"]
        data["loads"]["snow"][1] |= {"value": "4 lb", "at": "5 m"}
        data["loads"]["snow"][2] = {"kind": "moving", "axles": [[0, "4 kg"]]}
        data["loads"]["snow"][3]["kind"] = "cuple"
        data["combinations"]["A"]["sustained"] = {"wind": 0.2}
        data["combinations"]["B"] |= {"for": "both of", "factors": {"wind": 1}}
        del data["basis"]

    found = faults(changed(change))
    assert set(found) == {
        "section.pieces.web L.width",
        "section.pieces.web L.widht",
        "section.pieces.bottom.material",
        "section.pieces.top.shape",
        "section.joints[0].adhesive",
        "section.joints[0].rows",
        "section.joints[1].coverage",
        "section.joints[2].between[1]",
        "section.joints[3].role",
        "loads.snow[0].value[1]",
        "loads.snow[1].value",
        "loads.snow[1].at",
        "loads.snow[2].axles[0][1]",
        "loads.snow[3].kind",
        "combinations.A.sustained.wind",
        "combinations.B.for",
        "combinations.B.factors.wind",
        "combinations.B.sustained.dead",
        "combinations.B.sustained.snow",
        "basis",
    }
    assert "did you mean 'width'?" in found["section.pieces.web L.widht"]
    assert "did you mean 'deal'?" in found["section.pieces.bottom.material"]
    assert "known: 'angle', 'channel'" in found["section.pieces.top.shape"]
    assert "it weighs 4 kgf" in found["loads.snow[2].axles[0][1]"]
    assert "it weighs 4 lbf (17.79 N)" in found["loads.snow[1].value"]
    assert "did you mean 'couple'?" in found["loads.snow[3].kind"]


@pytest.mark.parametrize(
    ("change", "path", "says"),
    [
        (drop("basis"), "basis", "The basis is missing; state what strengths are divided by"),
        (drop("format"), "format", "Missing; enter 'bondwright/1'"),
        (put("format", "bondwright/2"), "format", "'bondwright/2' is not accepted; enter 'bondwright/1'"),
        (drop("kind"), "kind", "Missing; enter one of 'member'"),
        (put("kind", "membr"), "kind", "did you mean 'member'?"),
        (put("kind", 3), "kind", "3 is no kind of check; known: 'coupons', "),
        (put("extra", 1), "extra", "'extra' is not a name of the contract here"),
        (put("display", "metric"), "display", "enter one of 'SI', 'US'"),
        (put("title", 3), "title", "3 is not accepted; enter a text"),
        (put("title", "x" * 201), "title", "Holds 201 characters"),
        (put("title", "a\x00b"), "title", "control character U\\+0000"),
        (put("title", "a\ud800b"), "title", "control character U\\+D800"),
        (put("note", "x" * 6000), "note", "at most 5000"),
        (put("materials/deal/E", 0), "materials.deal.E", "enter a stress greater than 0"),
        (put("materials/deal/E", -5.0), "materials.deal.E", "-5 is not accepted; enter a stress greater than 0"),
        (put("materials/deal/E", "11 kN"), "materials.deal.E", "'11 kN' is a force, not a stress"),
        (put("materials/deal/E", math.nan), "materials.deal.E", "NaN is not a finite number"),
        (put("materials/deal/E", True), "materials.deal.E", "rue is not a stress"),
        (put("materials/deal/nu", 1.2), "materials.deal.nu", "of at most 0.99"),
        (put("materials/deal/layered", "yes"), "materials.deal.layered", "enter true or false"),
        (put("materials/deal/status", "fine"), "materials.deal.status", "enter one of 'approved'"),
        (put("materials/deal/strengths", {"bendnig": 3}), "materials.deal.strengths.bendnig", "did you mean 'bending'"),
        (put("materials/deal/revision", 3), "materials.deal", "A revision belongs to a record"),
        (put("materials/ deal", {"E": 1}), "materials. deal", "without spaces before or after"),
        (put("materials/deal", 3), "materials.deal", "3 is not accepted; enter an object"),
        (
            put("adhesives/PU/peel_strength", "4 N/mm"),
            "adhesives.PU.peel_strength",
            "peel test's N/mm is a workmanship",
        ),
        (put("adhesives/PU/peel_strength", "20 lbf/in"), "adhesives.PU.peel_strength", "peel test's N/mm is a workm"),
        (put("adhesives/PU/peel_test", 4), "adhesives.PU.peel_test", "is not a name of the contract"),
        (put("adhesives/PU/duration_factors", {"long": 0}), "adhesives.PU.duration_factors.long", "greater than 0"),
        (put("basis/method", "lrfd"), "basis.method", "'lrfd' is not accepted; known: 'allowable', 'limit-state'"),
        (drop("basis/method"), "basis.method", "Missing; enter one of 'allowable', 'limit-state'"),
        (put("basis", 3), "basis", "3 is not an object"),
        (put("basis/safety_factor", 0.5), "basis.safety_factor", "of at least 1"),
        (put("basis/safety_factor", {"adhesives": 3}), "basis.safety_factor.adhesives", "did you mean 'adhesive'?"),
        (drop("basis/safety_factor"), "basis.safety_factor", "Missing; enter"),
        (put("section/pieces", {}), "section.pieces", "at least 1 entry"),
        (put("section/pieces/top/shape", "circle"), "section.pieces.top.shape", "'circle' is not accepted"),
        (put("section/pieces/top/shape", "tube"), "section.pieces.top.wall", "Missing; enter a length greater than 0"),
        (put("section/pieces/top/wall", 3), "section.pieces.top.wall", "not a name of the contract here"),
        (put("section/pieces/top/corner_radius", -1), "section.pieces.top.corner_radius", "of at least 0"),
        (drop("section/pieces/top/shape"), "section.pieces.top.shape", "Missing; enter one of 'angle'"),
        (put("section/pieces/top/at", [0]), "section.pieces.top.at[1]", "two are wanted"),
        (put("section/pieces/top/at", [0, 1, 2]), "section.pieces.top.at", "at most 2"),
        (put("section/pieces/top/at", "0, 0"), "section.pieces.top.at", "enter a list of two values"),
        (put("section/pieces/top/grain", "up"), "section.pieces.top.grain", "enter one of 'along', 'across'"),
        (put("section/pieces/top/width", "4 kg"), "section.pieces.top.width", "'4 kg' is a mass, not a length"),
        (put("section/joints", {}), "section.joints", "enter a list"),
        (put("section/joints/0/coverage", 0), "section.joints[0].coverage", "greater than 0"),
        (put("section/joints/0/coverage", "120 %"), "section.joints[0].coverage", "of at most 1"),
        (put("section/joints/0/width", 0), "section.joints[0].width", "greater than 0"),
        (put("section/joints/3/rows", 0), "section.joints[3].rows", "whole number from 1"),
        (put("section/joints/3/rows", 1.5), "section.joints[3].rows", "whole number from 1"),
        (put("section/joints/3/rows", True), "section.joints[3].rows", "whole number from 1"),
        (put("section/joints/3/spacing", []), "section.joints[3].spacing", "at least 1 entry"),
        (put("section/joints/3/spacing", 0), "section.joints[3].spacing", "greater than 0"),
        (put("section/joints/3/role", "glue"), "section.joints[3].role", "enter one of 'sole'"),
        (put("member/length", 0), "member.length", "greater than 0"),
        (put("member/length", "2 km"), "member.length", "beyond what this program takes"),
        (put("member/supports", []), "member.supports", "at least 1 entry"),
        (put("member/supports/0/kind", "roller"), "member.supports[0].kind", "enter one of 'pin', 'fixed', 'spring'"),
        (put("member/supports/0/at", -5), "member.supports[0].at", "of at least 0"),
        (put("member/deflection_limit", "L/0"), "member.deflection_limit", "such as 300 or L/300"),
        (put("loads", {}), "loads", "at least 1 entry"),
        (put("loads/snow", {"kind": "point"}), "loads.snow", "enter a list"),
        (put("loads/snow/1", 3), "loads.snow[1]", "3 is not an object"),
        (drop("loads/snow/1/kind"), "loads.snow[1].kind", "Missing; enter one of 'area'"),
        (put("loads/snow/1/kind", ["point"]), "loads.snow[1].kind", "A list"),
        (put("loads/snow/1/value", "5 kg"), "loads.snow[1].value", "it weighs 5 kgf"),
        (put("loads/snow/0/value", [1]), "loads.snow[0].value[1]", "two are wanted"),
        (put("loads/snow/3/lateral", 4), "loads.snow[3].lateral", "is not a name of the contract here"),
        (put("combinations", {}), "combinations", "at least 1 entry"),
        (put("combinations/A/factors", {}), "combinations.A.factors", "at least 1 entry"),
        (drop("combinations/A/factors"), "combinations.A.factors", "Missing; enter an object of named entries"),
        (put("combinations/B/sustained/dead", 1.2), "combinations.B.sustained.dead", "of at most 1"),
        (put("analysis", {"slip": "yes"}), "analysis.slip", "enter true or false"),
        (put("analysis", {"field": "never ever"}), "analysis.field", "'auto', 'always', 'never'"),
    ],
)
def test_one_wrong_field_is_one_fault_that_names_it(change: object, path: str, says: str) -> None:
    found_path, message = only_fault(changed(change))  # type: ignore[arg-type]
    assert found_path == path
    assert re.search(says, message), message


@pytest.mark.parametrize(
    ("data", "path", "says"),
    [
        ("", "", "not JSON: line 1, column 1"),
        ('{"a": }', "", "not JSON: line 1, column 7"),
        (b"\xff\xfe", "", "not UTF-8"),
        ("[]", "", "a list"),
        ("3", "", "The document is 3"),
        ("null", "", "The document is null"),
        ("[" * 100_000, "", "nested too deeply"),
        ('{"a":' * 20 + "1" + "}" * 20, ".".join("a" * 16), "nested too deeply"),
        ('{"kind": ' + "1" * 5000 + "}", "", "a number of more than 4000 digits"),
        ('"' + "x" * 1_000_000 + '"', "", "at most 1000000 are read"),
        ('{"kind": "member", "kind": "member"}', "kind", "'kind' is given twice"),
        ('{"section": {"joints": [{}, {"rows": 1, "rows": 2}]}}', "section.joints[1].rows", "'rows' is given twice"),
        ({"kind": "member", 3: 4}, "", "The name 3 is not a text"),
        ({"kind": object()}, "kind", "not a JSON value"),
        ({"kind": "member", "title": ["x"] * 100_001}, "", "too large"),
        ({"a": ["x" * 5000] * 300, "b": []}, "", "too large"),
    ],
    ids=range(16),
)
def test_what_is_no_document_is_refused(data: object, path: str, says: str) -> None:
    found_path, message = only_fault(data)
    assert found_path == path
    assert re.search(says, message), message


def test_every_key_given_twice_is_named() -> None:
    assert set(faults('{"a": 1, "a": 2, "b": {"c": 1, "d": 2, "c": 3}}')) == {"a", "b.c"}


def test_a_document_that_holds_itself_is_refused() -> None:
    data: dict[str, object] = {"kind": "member"}
    data["note"] = data
    assert "nested too deeply" in next(iter(faults(data).values()))


@pytest.mark.parametrize(
    ("change", "path", "most"),
    [
        (
            lambda d: d["section"].update(pieces={f"p{i}": d["section"]["pieces"]["top"] for i in range(201)}),
            "section.pieces",
            200,
        ),
        (lambda d: d["section"].update(joints=[d["section"]["joints"][0]] * 401), "section.joints", 400),
        (lambda d: d["loads"].update(snow=[d["loads"]["snow"][1]] * 1001), "loads.snow", 1000),
        (lambda d: d["loads"].update({f"c{i}": [d["loads"]["snow"][1]] * 200 for i in range(6)}), "loads", 1000),
        (lambda d: d["loads"].update({f"c{i}": [] for i in range(101)}), "loads", 100),
        (
            lambda d: d["combinations"].update({f"c{i}": d["combinations"]["A"] for i in range(101)}),
            "combinations",
            100,
        ),
    ],
    ids=["pieces", "joints", "loads of a case", "loads", "cases", "combinations"],
)
def test_sizes_are_limited(change: object, path: str, most: int) -> None:
    found = faults(changed(change))  # type: ignore[arg-type]
    assert f"at most {most} are read" in found[path]


def test_names_are_limited() -> None:
    data = changed(lambda d: d["materials"].update({"x" * 61: d["materials"]["deal"]}))
    assert "61 characters; at most 60" in faults(data)["materials." + "x" * 61]


def test_faults_are_limited_in_number() -> None:
    data = changed(lambda d: d["loads"].update(snow=[{"kind": "point"}] * 1000))
    with pytest.raises(DocumentError) as caught:
        documents.read(data)
    assert len(caught.value.faults) == 200


JSON = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=10),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3),
    max_leaves=8,
)


@given(st.data())
@settings(max_examples=200, deadline=None)
def test_any_value_in_any_place_is_read_or_refused(data: st.DataObject) -> None:
    document = copy.deepcopy(BOX)
    place: object = document
    while True:
        assert isinstance(place, dict | list)
        keys = list(place) if isinstance(place, dict) else list(range(len(place)))
        key = data.draw(st.sampled_from(keys))
        if isinstance(place[key], dict | list) and place[key] and data.draw(st.booleans()):
            place = place[key]
            continue
        place[key] = data.draw(JSON)
        break
    try:
        documents.read(document)
    except DocumentError as error:
        for fault in error.faults:
            assert "\n" not in str(fault)
            assert "\x00" not in str(fault)


@given(st.dictionaries(st.sampled_from([*BOX, "x"]), JSON, max_size=8), st.booleans())
@settings(max_examples=200, deadline=None)
def test_any_object_is_read_or_refused(data: dict[str, object], member: bool) -> None:
    with pytest.raises(DocumentError):
        documents.read(data | ({"kind": "member"} if member else {}))


@given(st.text(max_size=40) | st.binary(max_size=40))
def test_any_text_is_refused(data: str | bytes) -> None:
    with pytest.raises(DocumentError):
        documents.read(data)


def test_the_schema_names_every_field_as_the_contract_does() -> None:
    schema = documents.schema()
    text = json.dumps(schema)
    assert "\\u0000" not in text
    for name in ("from", "for", "yield", "between", "peel_strength", "deflection_limit"):
        assert f'"{name}"' in text
    assert "from_" not in text
    assert schema["properties"]["kind"]["const"] == "member"
    assert schema["$defs"]["Rectangle"]["properties"]["width"]["x-unit"] == "mm"
    assert set(schema["required"]) == {"format", "kind", "basis", "section", "member", "loads"}


@pytest.mark.parametrize(
    ("path", "choice", "kind"),
    [
        ("section.pieces.web L.width", "", "length"),
        ("section.pieces.a.b.c.turn", "", "angle"),
        ("section.pieces.*.at[0]", "", "length"),
        ("section.pieces.*.material", "", None),
        ("section.joints[0].spacing", "", "length"),
        ("section.joints[*].spacing[*].from", "", "length"),
        ("section.joints[*].coverage", "", "factor"),
        ("section.joints[*].rows", "", None),
        ("loads.*[*].value", "point", "force"),
        ("loads.*[*].value", "line", "line_load"),
        ("loads.*[*].value[1]", "line", "line_load"),
        ("loads.*[*].value", "area", "area_load"),
        ("loads.*[*].value", "couple", "couple"),
        ("basis.safety_factor", "allowable", "factor"),
        ("basis.partial_factor.material.*", "limit-state", "factor"),
        ("materials.*.strengths.shear", "", "stress"),
        ("materials.*.density", "", "density"),
        ("fasteners.*.slip_modulus", "", "stiffness"),
        ("service.temperature[0]", "", "temperature"),
        ("service.moisture_change.*", "", "moisture"),
        ("member.deflection_limit", "", "factor"),
        ("title", "", None),
        ("nowhere.at.all", "", None),
    ],
)
def test_the_unit_kind_of_a_field_is_known(path: str, choice: str, kind: str | None) -> None:
    assert documents.kind_of(path, choice) == kind


def test_every_quantity_field_has_a_kind_units_knows() -> None:
    seen: list[str] = []

    def walk(model: type[BaseModel]) -> None:
        for field in model.model_fields.values():
            for spot in fields.spots(field.annotation, field.metadata):
                seen.extend(marker.kind for marker in spot.markers if isinstance(marker, Quantity))
                inner = get_args(spot.annotation)[-1:] if get_origin(spot.annotation) in (dict, list) else ()
                for deeper in [spot, *(s for arg in inner for s in fields.spots(arg))]:
                    if deeper.model is not None:
                        walk(deeper.model)

    walk(MemberDocument)
    assert len(seen) > 50
    assert set(seen) <= set(units.KINDS)
