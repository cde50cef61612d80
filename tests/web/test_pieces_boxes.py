"""A piece's row: boxes of its shape only, profiles by name, and nothing typed is lost when the shape changes."""

from __future__ import annotations

import csv

import pytest

from server import checks, documents
from server.library.profiles import find, profiles
from server.mechanics.polygon import edges_of, moments
from server.web import form_shape, forms, layouts, pieces_boxes
from server.web.form_fields import PIECES

BOX = layouts.start("box", "SI") | {"span": "6", "load": "4.2", "adhesives[0].shear_strength": "3"}


def piece(values, name="odd"):
    raw, faults = forms.read(values)
    return raw["section"]["pieces"][name], faults


def row(**boxes):
    return BOX | {"pieces[9].name": "odd"} | {f"pieces[9].{name}": text for name, text in boxes.items()}


@pytest.mark.parametrize("shape", [value for value, _ in PIECES.box("shape").choices])
def test_the_boxes_of_a_shape_are_the_names_of_its_model(shape):
    arm = next(
        cls
        for cls in documents.Piece.__args__  # type: ignore[attr-defined]
        if cls.model_fields["shape"].annotation.__args__ == (shape,)
    )
    names = {field.alias or name for name, field in arm.model_fields.items()}
    asked = {box.place.removesuffix("[0]").removesuffix("[1]") for box in pieces_boxes.boxes_of(shape)}
    assert asked - {"name"} == names - ({"profile"} if shape == "polygon" else set())


def test_only_boxes_of_the_shape_are_read_and_the_others_keep_what_was_typed():
    typed = row(shape="tube", width="50", depth="40", wall="3", diameter="60", points="x", across="0", up="400")
    found, faults = piece(typed)
    assert found == {
        **{"shape": "tube", "width": "50 mm", "depth": "40 mm", "wall": "3 mm"},
        "at": ["0 mm", "400 mm"],
    }
    assert not faults
    assert form_shape.shape(typed | {"reshape": "pieces[9].shape"}).values == typed


def test_a_profile_brings_shape_and_sizes():
    found, faults = piece(row(profile="ipe200", across="0", up="400"))
    assert not faults
    assert found == {
        **{"shape": "i", "profile": "IPE 200", "width": "100 mm", "depth": "200 mm", "web": "5.6 mm"},
        **{"flange": "8.5 mm", "root_radius": "12 mm", "at": ["0 mm", "400 mm"]},
    }


def test_choosing_a_profile_empties_the_sizes_and_another_shape_lets_it_go():
    typed = row(shape="rectangle", width="50", depth="40", profile="IPE 200", material="timber")
    chosen = form_shape.shape(typed | {"reshape": "pieces[9].profile"})
    assert chosen.values["pieces[9].shape"] == "i"
    assert chosen.values["pieces[9].width"] == chosen.values["pieces[9].depth"] == ""
    assert chosen.values["pieces[9].material"] == "timber"
    assert chosen.focus == "pieces[9].profile"
    other = form_shape.shape(chosen.values | {"pieces[9].shape": "tube", "reshape": "pieces[9].shape"})
    assert other.values["pieces[9].profile"] == ""
    assert other.values["pieces[9].shape"] == "tube"


def test_a_profile_that_is_no_longer_as_it_was_fills_its_sizes():
    found, _ = piece(row(profile="IPE 200", across="0", up="400"))
    again = forms.write(forms.read(BOX)[0] | {"section": {"pieces": {"odd": found}}})
    assert again["pieces[0].profile"] == "IPE 200"
    assert "pieces[0].width" not in again
    changed = forms.write(forms.read(BOX)[0] | {"section": {"pieces": {"odd": found | {"web": "6 mm"}}}})
    assert "pieces[0].profile" not in changed
    assert changed["pieces[0].web"] == "6"


# Area [cm2] and strong second moment [cm4] of standard profiles as in steel handbooks; from memory.
PRINTED = """IPE 80,7.64,80.1
IPE 100,10.3,171
IPE 120,13.2,318
IPE 140,16.4,541
IPE 160,20.1,869
IPE 180,23.9,1317
IPE 200,28.5,1943
IPE 220,33.4,2772
IPE 240,39.1,3892
IPE 270,45.9,5790
IPE 300,53.8,8356
HE 100 A,21.2,349
HE 120 A,25.3,606
HE 140 A,31.4,1033
HE 160 A,38.8,1673
HE 200 A,53.8,3692
HE 100 B,26.0,450
HE 120 B,34.0,864
HE 140 B,43.0,1509
HE 160 B,54.3,2492
HE 200 B,78.1,5696
UPE 80,10.1,107
UPE 100,12.5,207
UPE 120,15.4,364
UPE 140,18.4,600
UPE 160,21.7,911
UPE 180,25.1,1353
UPE 200,29.0,1909
L 50 x 5,4.80,11.0
L 60 x 6,6.91,22.8
L 80 x 8,12.3,72.2
L 90 x 9,15.5,116
L 100 x 10,19.2,177
SHS 40 x 3,4.21,9.32
SHS 50 x 3,5.41,19.5
SHS 80 x 4,11.7,111
SHS 100 x 4,14.9,226
SHS 100 x 5,18.4,271
CHS 60.3 x 3.2,5.74,23.5
CHS 114.3 x 4,13.9,211"""


def last_digit(printed):
    """Rounding of a printed number, as handbooks round now and then from rounded numbers: '11.7' -> 0.06."""
    return 0.6 * 10.0 ** -len(printed.partition(".")[2])


@pytest.mark.parametrize(("name", "area", "inertia"), list(csv.reader(PRINTED.splitlines())))
def test_standard_profiles_have_the_printed_area_and_inertia(name, area, inertia):
    from server.checks.outlines import outline

    found = find(name)
    raw = forms.read(row(profile=name, across="0", up="400", material="timber"))[0]
    shape = outline(documents.read({**raw, "section": {**raw["section"], "joints": []}}).section.pieces["odd"])
    areas, _, inertias = moments(edges_of([shape.rings]))
    assert areas[0] / 100 == pytest.approx(float(area), abs=last_digit(area))
    assert inertias[0, 0] / 1e4 == pytest.approx(float(inertia), abs=last_digit(inertia))
    assert found is not None


def test_every_profile_of_the_list_can_be_checked():
    for name in profiles():
        raw = forms.read(row(profile=name, across="0", up="400", material="timber"))[0]
        only = {"odd": raw["section"]["pieces"]["odd"]}
        result = checks.run(documents.read({**raw, "section": {"pieces": only, "joints": []}}))
        assert result["section"]["area"] > 0
