"""The form: what was typed becomes a document, a document becomes the form again, faults find their boxes."""

from __future__ import annotations

import json

import pytest

from server import checks, documents
from server.errors import Fault
from server.paths import data_folder
from server.web import forms, layouts
from server.web.form_fields import GROUPS
from server.web.form_text import with_unit

BOX = layouts.start("box", "SI") | {"title": "B1", "span": "6.0", "load": "4.2"}


def document(**changes: str) -> dict[str, object]:
    raw, faults = forms.read(BOX | {name.replace("__", "."): text for name, text in changes.items()})
    assert faults == {}
    return raw


def test_a_bare_number_takes_the_unit_beside_its_box():
    raw = document()
    assert raw["member"]["length"] == "6.0 m"
    assert raw["section"]["pieces"]["web L"] == {
        "shape": "rectangle",
        "width": "12.5 mm",
        "depth": "400 mm",
        "at": ["0 mm", "0 mm"],
        "material": "plywood",
    }
    assert raw["materials"]["timber"]["E"] == "11000 MPa"


def test_a_typed_unit_is_kept_as_typed():
    raw, _ = forms.read(BOX | {"span": "13' 9-1/2\"", "load": "290 plf"})
    assert raw["member"]["length"] == "13' 9-1/2\""
    assert raw["loads"]["imposed"][0]["value"] == "290 plf"


@pytest.mark.parametrize(
    ("typed", "said"),
    [("4", "4 in"), ("11-5/8", "11-5/8 in"), ("3 1/2", "3 1/2 in"), ("0.703", "0.703 in"), ("1.2e1", "1.2e1 in")],
)
def test_fractions_and_exponents_count_as_bare_numbers(typed, said):
    assert with_unit(typed, "size", "US") == said


@pytest.mark.parametrize("typed", ["abc", "nan", "inf", "4 kg", "12 mm", "--", ""])
def test_what_is_no_bare_number_is_left_for_the_document_to_judge(typed):
    assert with_unit(typed, "size", "SI") == typed


def test_boxes_marked_in_us_units_mean_us_units():
    raw, _ = forms.read(layouts.start("tee", "US") | {"span": "8", "load": "532"})
    assert raw["display"] == "US"
    assert raw["member"]["length"] == "8 ft"
    assert raw["loads"]["imposed"][0]["value"] == "532 lbf/ft"
    assert raw["section"]["pieces"]["rib"]["width"] == "1.5 in"


def test_units_of_the_sheet_do_not_change_what_the_boxes_mean():
    raw, _ = forms.read(BOX | {"display": "US"})
    assert raw["display"] == "US"
    assert raw["member"]["length"] == "6.0 m"


def test_no_support_rows_means_a_pin_at_either_end():
    assert document()["member"]["supports"] == [{"at": "0 mm", "kind": "pin"}, {"at": "6.0 m", "kind": "pin"}]


def test_support_rows_replace_the_pins_at_the_ends():
    raw, _ = forms.read(
        BOX | {"supports[0].at": "0", "supports[0].kind": "fixed", "supports[3].at": "", "hinges[2].at": "2"}
    )
    assert raw["member"]["supports"] == [{"at": "0 m", "kind": "fixed"}]
    assert raw["member"]["hinges"] == ["2 m"]


def test_empty_rows_are_left_out():
    raw, faults = forms.read(
        BOX | {"loads[4].kind": "line", "loads[4].case": "snow", "pieces[9].grain": "", "supports[1].kind": "pin"}
    )
    assert faults == {}
    assert list(raw["loads"]) == ["imposed"]
    assert len(raw["section"]["pieces"]) == 4


def test_each_kind_of_load_reads_its_value_in_its_own_unit():
    rows = {}
    for index, (kind, value) in enumerate((("point", "3"), ("line", "2"), ("couple", "1.5"), ("area", "6"))):
        rows |= {f"loads[{index}].kind": kind, f"loads[{index}].value": value, f"loads[{index}].case": kind}
    raw, _ = forms.read(BOX | rows)
    assert {case: load[0]["value"] for case, load in raw["loads"].items()} == {
        "imposed": "4.2 kN/m",
        "point": "3 kN",
        "line": "2 kN/m",
        "couple": "1.5 kN*m",
        "area": "6 kN/m2",
    }


def test_a_varying_line_load_has_two_values():
    raw, _ = forms.read(BOX | {"loads[0].value": "1", "loads[0].value2": "3", "loads[0].from": "0", "loads[0].to": "2"})
    assert raw["loads"]["imposed"][1] == {"kind": "line", "from": "0 m", "to": "2 m", "value": ["1 kN/m", "3 kN/m"]}


def test_self_weight_needs_nothing_but_its_kind():
    raw, _ = forms.read(BOX | {"loads[0].kind": "self-weight", "loads[0].case": "dead"})
    assert raw["loads"]["dead"] == [{"kind": "self-weight"}]


def test_a_library_pick_becomes_a_reference():
    raw, _ = forms.read(BOX | {"adhesives[0].record": "B-002", "adhesives[0].shear_strength": "3"})
    assert raw["adhesives"] == {"glue": {"record": "B-002"}}
    raw, _ = forms.read(BOX | {"adhesives[0].record": "B-002", "adhesives[0].revision": "3"})
    assert raw["adhesives"] == {"glue": {"record": "B-002", "revision": 3}}


def test_an_adhesive_without_any_value_is_still_there_for_the_joints_that_name_it():
    assert document()["adhesives"] == {"glue": {}}


def test_fasteners_alone_turn_slip_on():
    rows = {f"joints[{i}].adhesive": "" for i in range(4)} | {f"joints[{i}].fastener": "nail" for i in range(4)}
    raw, _ = forms.read(BOX | rows | {"fasteners[0].name": "nail", "fasteners[0].shear_resistance": "380"})
    assert raw["analysis"]["slip"] is True
    raw, _ = forms.read(BOX | rows | {"slip": "no"})
    assert raw["analysis"]["slip"] is False
    assert document()["analysis"]["slip"] is False


def test_factors_by_name_are_read_from_one_box():
    raw, faults = forms.read(
        BOX | {"combinations[0].factors": 'imposed 1.5, "snow, drift 0.9"; wind: 0.6', "combinations[0].name": "u1"}
    )
    assert faults == {}
    assert raw["combinations"]["u1"]["factors"] == {"imposed": "1.5", "snow, drift": "0.9", "wind": "0.6"}


def test_a_combination_without_factors_takes_every_case_as_it_is():
    raw, _ = forms.read(BOX | {"loads[0].case": "dead", "loads[0].kind": "self-weight"})
    assert raw["combinations"] == {"all": {"factors": {"imposed": 1.0, "dead": 1.0}, "duration": "medium-term"}}


def test_a_schedule_of_spacing_is_read_from_one_box():
    raw, _ = forms.read(BOX | {"joints[0].spacing": "0 to 1: 75; 1 m to 3 m: 150 mm"})
    assert raw["section"]["joints"][0]["spacing"] == [
        {"from": "0 m", "to": "1 m", "spacing": "75 mm"},
        {"from": "1 m", "to": "3 m", "spacing": "150 mm"},
    ]


@pytest.mark.parametrize(
    ("box", "text", "says"),
    [
        ("combinations[0].factors", "dead", "is not a name and a number"),
        ("combinations[0].factors", "dead 1, dead 2", "given twice"),
        ("joints[0].spacing", "a:b", "is not a stretch"),
        ("pieces[0].name", "", "has no name"),
        ("pieces[1].name", "bottom flange", "given twice"),
        ("pieces[0].up", "", "enter it, 0 included"),
        ("loads[4].axles", "1", "is not two values"),
        ("pieces[0].profile", "IPE 2000", "is not in the list of profiles"),
        ("pieces[0].profile", "IPE 200", "has a width of 100 mm, and 90 is typed beside it"),
        ("lowest", "-10", "enter both"),
        ("note", "x" * 5000, "shorten it"),
    ],
)
def test_what_the_form_alone_can_tell_stands_beside_its_box(box, text, says):
    _, faults = forms.read(BOX | {box: text})
    assert says in (faults.get(box) or faults.get("highest") or "")


def test_a_revision_without_its_record_is_refused_beside_its_box():
    _, faults = forms.read(BOX | {"adhesives[0].revision": "2"})
    assert "belongs to a record" in faults["adhesives[0].revision"]


@pytest.mark.parametrize(("box", "text"), [("joints[0].first", "no such"), ("joints[0].second", "no such")])
def test_a_joint_to_nowhere_is_marked_at_the_piece_that_is_not_there(box, text):
    paths = forms.reading_of(BOX | {box: text}).paths
    beside, _ = forms.place([Fault("section.joints[0].between", "names no piece")], paths)
    assert beside == {box: "names no piece"}


def test_a_load_without_a_case_belongs_to_the_case_of_the_first():
    raw, _ = forms.read(
        BOX | {"load_case": "roof", "loads[0].kind": "point", "loads[0].value": "3", "loads[0].at": "2"}
    )
    assert [load["kind"] for load in raw["loads"]["roof"]] == ["line", "point"]


def test_too_many_rows_are_refused_in_words():
    _, faults = forms.read({f"supports[{i}].at": str(i) for i in range(30)})
    assert faults == {
        "supports[25].at": "There are 30 supports; a form takes at most 25. "
        "Remove some, or send the document as a file to the command line."
    }


def test_every_fault_finds_its_box():
    paths = forms.reading_of(
        BOX | {"loads[5].kind": "point", "loads[5].value": "3", "loads[5].case": "snow.roof"}
    ).paths
    beside, on_top = forms.place(
        [
            Fault("section.pieces.web L.width", "too wide"),
            Fault("section.pieces.web L.at[1]", "too high"),
            Fault("section.pieces.web L.at", "out"),
            Fault("section.joints[2].between[0]", "no such piece"),
            Fault("section.joints[1].between", "do not touch"),
            Fault("loads.snow.roof[0].at", "outside"),
            Fault("loads.imposed[0].value", "absurd"),
            Fault("member.length", "missing"),
            Fault("member.supports", "none"),
            Fault("materials.timber.strengths.bending", "negative"),
            Fault("basis.safety_factor.adhesive", "below 1"),
            Fault("combinations.all.factors.snow", "no such case"),
            Fault("adhesives.glue", "no such record"),
            Fault("", "something else"),
        ],
        paths,
    )
    assert beside == {
        "pieces[2].width": "too wide",
        "pieces[2].up": "too high",
        "pieces[2].across": "out",
        "joints[2].first": "no such piece",
        "joints[1].first": "do not touch",
        "loads[5].at": "outside",
        "load": "absurd",
        "span": "missing none",
        "materials[0].bending": "negative",
        "basis.adhesive": "below 1",
        "combinations[0].factors": "no such case",
        "adhesives[0].name": "no such record",
    }
    assert on_top == ["something else"]


FULL = (
    BOX
    | {
        "note": "to be glued on Thursday",
        "shop_note": "two of these",
        "basis.method": "limit-state",
        "basis.material": "plywood 1.2, timber 1.3",
        "basis.fall_back_factor": "1.3",
        "held_sideways": "no",
        "shear_deformation": "no",
        "field": "never",
        "rules": "EN 1995-1-1 9.1.1, EN 1995-1-1 9.1.2",
        "lowest": "-10",
        "highest": "35",
        "cure": "20",
        "moisture": "timber 6 %",
    }
    | {"pieces[0].grain": "across", "pieces[0].turn": "90", "pieces[0].from": "0.5", "pieces[0].to": "5.5"}
    | {"pieces[4].name": "tri", "pieces[4].shape": "polygon", "pieces[4].points": "0, 0; 90, 0; 45, 70 mm"}
    | {"pieces[4].material": "timber", "pieces[4].holes": "1, 1; 2, 1; 2, 2 | 5, 5; 6, 5; 6, 6"}
    | {"pieces[5].name": "u", "pieces[5].shape": "channel", "pieces[5].width": "40", "pieces[5].depth": "80"}
    | {"pieces[5].web": "4", "pieces[5].flange": "5", "pieces[5].across": "0", "pieces[5].up": "400"}
    | {"pieces[6].name": "o", "pieces[6].shape": "round", "pieces[6].diameter": "40", "pieces[6].wall": "4"}
    | {"pieces[7].name": "p", "pieces[7].shape": "i", "pieces[7].profile": "IPE 200", "pieces[7].material": "timber"}
    | {"pieces[8].name": "t", "pieces[8].shape": "tube", "pieces[8].wall": "3", "pieces[8].corner_radius": "6"}
    | {"pieces[9].name": "r", "pieces[9].shape": "rectangle", "pieces[9].width": "30", "pieces[9].rounded": "4"}
    | {"pieces[10].name": "c", "pieces[10].shape": "rectangle", "pieces[10].width": "30", "pieces[10].chamfer": "4"}
    | {"pieces[11].name": "a", "pieces[11].shape": "angle", "pieces[11].root_radius": "6", "pieces[11].toe_radius": "3"}
    | {"joints[0].fastener": "nail", "joints[0].spacing": "0 to 1: 75; 1 to 6: 150", "joints[0].rows": "2"}
    | {"joints[0].role": "fall-back", "joints[0].coverage": "0.9", "joints[0].width": "60", "joints[0].segment": "2"}
    | {"supports[0].at": "0", "supports[0].kind": "fixed", "supports[1].at": "6", "supports[1].kind": "spring"}
    | {"supports[1].stiffness": "1200", "hinges[0].at": "3"}
    | {"loads[0].case": "dead", "loads[0].kind": "self-weight"}
    | {"loads[1].case": "hoist", "loads[1].kind": "point", "loads[1].at": "2", "loads[1].value": "3"}
    | {"loads[1].lateral": "0.2", "loads[1].offset": "15"}
    | {"loads[2].case": "snow", "loads[2].kind": "line", "loads[2].from": "1", "loads[2].to": "5"}
    | {"loads[2].value": "1", "loads[2].value2": "2"}
    | {"loads[3].case": "people", "loads[3].kind": "area", "loads[3].from": "0", "loads[3].to": "6"}
    | {"loads[3].value": "6", "loads[3].width": "0.3"}
    | {"loads[4].case": "cart", "loads[4].kind": "moving", "loads[4].axles": "0, 3; 1.2, 4 kN"}
    | {"loads[5].case": "twist", "loads[5].kind": "couple", "loads[5].at": "1", "loads[5].value": "-2"}
    | {"combinations[0].factors": "dead 1.35, snow 1.5", "combinations[0].for": "strength"}
    | {"combinations[1].name": "sag", "combinations[1].for": "deflection", "combinations[1].sustained": "snow 0.2"}
    | {f"materials[0].{n}": "2" for n in ("tension", "compression", "rolling_shear", "tension_across", "bearing")}
    | {f"materials[0].{n}": "0.3" for n in ("nu", "creep", "expansion", "yield", "G_rolling")}
    | {"materials[0].status": "provisional", "materials[0].duration_factors": "medium-term 0.8, short-term 0.9"}
    | {"materials[0].factors": "wet 0.8", "materials[0].note": "n"}
    | {"materials[1].layered": "no"}
    | {f"adhesives[0].{n}": "1" for n in ("shear_strength", "thickness", "shear_modulus", "peel_strength", "E")}
    | {
        "adhesives[0].kind": "epoxy",
        "fasteners[0].kind": "nail",
        "adhesives[0].shear_yield": "20",
        "adhesives[0].shear_strain_limit": "0.4",
    }
    | {f"fasteners[0].{n}": "5" for n in ("shear_resistance", "slip_modulus", "diameter", "spacing_min")}
    | {"fasteners[0].name": "nail", "fasteners[0].spacing_max": "200", "fasteners[0].creep": "0.6"}
    | {"fasteners[1].name": "screw", "fasteners[1].record": "F-001", "fasteners[1].revision": "2"}
)


@pytest.mark.parametrize("values", [BOX, FULL, layouts.start("i", "US") | {"span": "12", "load": "90"}])
def test_a_document_fills_the_form_that_says_it(values):
    raw, faults = forms.read(values)
    assert faults == {}
    again, faults = forms.read(forms.write(raw))
    assert faults == {}
    assert again == raw


def test_every_box_reaches_the_document():
    """A box that is on the page but not read would lose what was typed: blank each one and see the document change."""
    raw, _ = forms.read(FULL)
    optional = {"layout", "units", "display", "pieces[7].shape"}  # a profile says its shape itself
    for name in FULL:
        if name in optional or (name.endswith(".kind") and name.startswith(("loads", "supports"))):
            continue
        changed, faults = forms.read({**FULL, name: "no such" if FULL[name] == "" else ""})
        default = FULL[name] in ("rectangle", "auto", "yes", "imposed")
        assert changed != raw or faults or default, name


def test_plain_numbers_of_a_document_come_back_with_their_unit():
    raw, _ = forms.read(BOX)
    raw["member"]["length"] = 6000
    raw["section"]["pieces"]["web L"]["width"] = 12.5
    raw["loads"]["imposed"][0]["value"] = 4.2
    raw["materials"]["timber"]["E"] = 11000
    values = forms.write(raw)
    assert values["span"] == "6000 mm"
    assert values["pieces[2].width"] == "12.5"
    assert values["loads[0].value"] == "4.2 N/mm"
    assert values["materials[0].E"] == "11000"


@pytest.mark.parametrize("system", ["SI", "US"])
@pytest.mark.parametrize("layout", layouts.LAYOUTS)
def test_each_layout_starts_without_a_fault_of_its_own(layout, system):
    raw, faults = forms.read(layouts.start(layout, system) | {"span": "4", "load": "1"})
    assert faults == {}
    assert len(raw["section"]["joints"]) == {"box": 4, "i": 2, "tee": 1, "stack": 2, "empty": 0}[layout]
    assert raw["basis"]["safety_factor"] == {"adhesive": "3", "fastener": "2.5", "material": "2.5"}


@pytest.mark.parametrize("group", GROUPS.values(), ids=lambda group: group.name)
def test_names_of_boxes_are_their_own_within_a_row(group):
    names = [box.name for box in group.boxes]
    assert len(names) == len(set(names))


@pytest.mark.parametrize("name", ["pass", "fail", "not-proven"])
def test_a_document_written_elsewhere_gives_the_same_result_through_the_form(name):
    given = json.loads((data_folder("seed_data") / "checks" / f"{name}.json").read_text(encoding="utf-8"))
    raw, faults = forms.read(forms.write(given))
    assert faults == {}
    before, after = (checks.run(documents.read(each)) for each in (given, raw))
    for part in ("verdict", "utilisation", "joints", "pieces", "member", "missing", "drawing"):
        assert after[part] == before[part]
