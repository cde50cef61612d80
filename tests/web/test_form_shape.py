"""What the form's buttons do: rows, layouts, setting out, marking the boxes in other units."""

from __future__ import annotations

import pytest

from server import units
from server.web import form_shape, form_words, forms, layouts
from server.web.form_fields import GROUPS, PLAIN_UNITS, UNITS, shown_unit

BOX = layouts.start("box", "SI") | {"span": "6", "load": "4.2"}


@pytest.mark.parametrize("group", GROUPS)
def test_a_row_is_added_after_the_last_and_the_cursor_goes_there(group):
    before = forms.rows(BOX)[group]
    shaped = form_shape.shape(BOX | {"add": group})
    after = forms.rows(shaped.values)[group]
    added = set(after) - set(before)
    assert len(added) == 1
    assert added == {max(after)}
    assert shaped.focus == f"{group}[{max(after)}].{GROUPS[group].boxes[0].name}"
    assert shaped.opened == group


def test_rows_stop_at_the_limit_of_the_group():
    full = {f"supports[{i}].at": str(i) for i in range(25)}
    assert form_shape.shape(full | {"add": "supports"}).values == full


def test_a_row_is_removed_and_the_others_keep_their_names():
    shaped = form_shape.shape(BOX | {"remove": "pieces[1]"})
    assert list(forms.rows(shaped.values)["pieces"]) == [0, 2, 3]
    assert shaped.values["pieces[2].name"] == "web L"
    assert shaped.focus == "add-pieces"


@pytest.mark.parametrize("remove", ["pieces", "pieces[1", "span", "", "nothing[0]", "pieces[99]"])
def test_a_button_nobody_made_changes_nothing(remove):
    assert form_shape.shape(BOX | {"remove": remove}).values == BOX


def test_another_layout_keeps_what_was_typed_elsewhere():
    typed = BOX | {"title": "B1", "adhesives[0].record": "B-002", "loads[0].case": "snow", "basis.adhesive": "4"}
    shaped = form_shape.shape(typed | {"start": "tee"}).values
    assert [shaped[f"pieces[{i}].name"] for i in range(2)] == ["rib", "skin"]
    assert "pieces[2].name" not in shaped
    assert {
        name: shaped[name] for name in ("title", "span", "adhesives[0].record", "loads[0].case", "basis.adhesive")
    } == {
        "title": "B1",
        "span": "6",
        "adhesives[0].record": "B-002",
        "loads[0].case": "snow",
        "basis.adhesive": "4",
    }


def at(values: dict[str, str], row: int) -> tuple[str, str]:
    return values[f"pieces[{row}].across"], values[f"pieces[{row}].up"]


def test_a_box_is_set_out_from_its_sizes():
    sizes = {
        "pieces[0].width": "120 mm",
        "pieces[2].width": "0.9 cm",
        "pieces[2].depth": "450",
        "pieces[1].depth": "60",
    }
    placed = form_shape.shape(BOX | sizes | {"set_out": "yes"}).values
    assert [at(placed, row) for row in range(4)] == [("9", "0"), ("9", "390"), ("0", "0"), ("129", "0")]


def test_a_stack_is_centred():
    values = layouts.start("stack", "US") | {"pieces[1].width": "5-1/2"}
    placed = layouts.set_out(values)
    assert placed is not None
    assert [at(placed, row) for row in range(3)] == [("1", "0"), ("0", "1.5"), ("1", "3")]


@pytest.mark.parametrize("system", ["SI", "US"])
@pytest.mark.parametrize("layout", ["box", "i", "tee", "stack"])
def test_a_layout_starts_where_setting_out_puts_it(layout, system):
    values = layouts.start(layout, system)
    placed = layouts.set_out(values)
    assert placed is not None
    assert {name: float(text) for name, text in placed.items()} == pytest.approx(
        {name: float(values[name]) for name in placed}, abs=1e-3
    )


def test_what_cannot_be_set_out_stays_as_typed():
    assert layouts.set_out(BOX | {"pieces[0].name": "something else"}) is None
    assert layouts.set_out(BOX | {"pieces[0].width": "wide"}) == {}
    assert layouts.set_out(layouts.start("empty", "SI")) is None


def test_boxes_marked_in_other_units_keep_the_unit_of_what_was_typed():
    typed = BOX | {
        "display": "US",
        "units_of_boxes": "yes",
        "loads[0].kind": "point",
        "loads[0].value": "3",
        "joints[0].spacing": "0 to 1: 75; 1 to 6: 150",
        "pieces[9].points": "0, 0; 90, 0; 45, 70",
        "loads[1].axles": "0, 3; 1.2, 4",
        "pieces[0].depth": "2-3/4 in",
    }
    shaped = form_shape.shape(typed).values
    assert shaped["units"] == "US"
    assert shaped["span"] == "6 m"
    assert shaped["pieces[0].width"] == "90 mm"
    assert shaped["pieces[0].depth"] == "2-3/4 in"
    assert shaped["loads[0].value"] == "3 kN"
    assert shaped["joints[0].spacing"] == "0 m to 1 m: 75 mm; 1 m to 6 m: 150 mm"
    assert shaped["basis.adhesive"] == "3"
    before, after = forms.read(typed)[0], forms.read(shaped)[0]
    assert before == after


def test_what_cannot_be_read_keeps_its_text_when_the_boxes_are_marked_anew():
    shaped = form_shape.shape(BOX | {"display": "US", "units_of_boxes": "yes", "joints[0].spacing": "a:b"}).values
    assert shaped["joints[0].spacing"] == "a:b"


KIND_OF = {
    "size": "length",
    "area": "area",
    "position": "length",
    "force": "force",
    "line_load": "line_load",
    "couple": "couple",
    "area_load": "area_load",
    "stress": "stress",
    "fastener_force": "force",
    "fastener_couple": "couple",
    "slip": "stiffness",
    "density": "density",
    "temperature": "temperature",
    "expansion": "expansion",
    "angle": "angle",
    "bond_area": "area",
    "spread": "spread",
    "time": "time",
    "assembly_rate": "assembly_rate",
}


@pytest.mark.parametrize("unit", UNITS)
def test_every_unit_beside_a_box_is_one_that_is_read(unit):
    for spelled in (*UNITS[unit], PLAIN_UNITS[unit]):
        assert units.parse("box", f"0.5 {spelled}", KIND_OF[unit]) != 0.0
    plain = units.parse("box", f"0.5 {PLAIN_UNITS[unit]}", KIND_OF[unit])
    assert plain == pytest.approx(units.parse("box", 0.5, KIND_OF[unit]), rel=1e-12)
    assert shown_unit(unit, "US")


def test_what_is_folded_away_is_said_in_words():
    said = form_words.summaries(forms.read(BOX)[0])
    assert said["basis"] == "allowable stress, safety factor 3 on adhesive, 2.5 on fasteners and material"
    assert said["member"] == "held sideways, simple supports at both ends; deflection limit span/300"
    assert said["combinations"] == "all: every case × 1.0, duration medium-term"
    assert said["joints"] == "4 joints, each held by glue"
    assert said["pieces"].startswith("bottom flange 90 × 70 mm, top flange 90 × 70 mm")
    assert said["adhesives"] == "glue: no strength typed: you are told which to ask for"
    assert said["service"] == "not stated, which the sheet says"


def test_words_follow_what_is_typed():
    typed = BOX | {
        "basis.method": "limit-state",
        "basis.fastener": "",
        "deflection_limit": "",
        "adhesives[0].record": "B-2",
    }
    typed |= {"supports[0].at": "0", "supports[0].kind": "fixed", "combinations[0].factors": "imposed 1.5"}
    said = form_words.summaries(forms.read(typed)[0])
    assert said["basis"] == "limit state, partial factor 3 on adhesive, none on fasteners, 2.5 on material"
    assert said["member"] == "held sideways, 1 support: fixed at 0 m; no deflection limit"
    assert said["combinations"] == "all: imposed 1.5, duration medium-term"
    assert said["adhesives"] == "glue from record B-2, newest approved"


def test_a_box_is_called_by_its_row_and_label():
    assert form_words.label_of("pieces[2].width", BOX) == "Piece web L: width"
    assert form_words.label_of("materials[0].E", BOX) == "Material timber: modulus E"
    assert form_words.label_of("loads[3].at", BOX) == "Load 4: at"
    assert form_words.label_of("span", BOX) == "Span"
