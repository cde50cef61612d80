"""Everything typed is shown as typed, with the value used beside it."""

import pytest

from server.sheets import given
from tests.sheets import fixture


def rich_document():
    """The fixture with every kind of entry that a member's document can hold."""
    raw = fixture.document()
    raw["basis"] = {
        "method": "limit-state",
        "partial_factor": {"adhesive": 1.35, "material": {"softwood": 1.31, "ply": 1.21}, "fastener": 1.32},
        "fall_back_factor": 1.15,
    }
    raw["materials"]["softwood"].update(
        {"nu": 0.35, "creep": 0.61, "yield": 27.5, "expansion": 4.5e-6, "layered": True}
    )
    raw["materials"]["softwood"]["duration_factors"] = {"medium-term": 0.81}
    raw["materials"]["softwood"]["factors"] = {"moisture": 0.91}
    raw["materials"]["softwood"]["strengths"]["tension_across"] = "58.5 psi"
    raw["materials"]["spare"] = {"E": 12345, "status": "draft", "note": "kept for later"}
    raw["adhesives"]["R2"] = {"shear_strength": 5.25, "thickness": "0.31 mm", "shear_strain_limit": 0.041}
    raw["fasteners"]["N27"].update({"slip_modulus": "5500 lbf/in", "spacing_min": 27.5, "spacing_max": 151})
    member = raw["member"]
    member["supports"].append({"at": "3.1 m", "kind": "spring", "stiffness": "1.5 kN/mm"})
    member["hinges"] = ["4.4 m"]
    member["held_sideways"] = True
    raw["loads"]["roof"] += [
        {"kind": "area", "from": 11, "to": "12 ft", "value": "125 psf", "width": "4 ft"},
        {"kind": "couple", "at": "13' 9-1/2\"", "value": "1.7 kN*m"},
        {"kind": "line", "from": 14, "to": 15, "value": ["1.6 kN/m", 2.6], "lateral": 0.77, "offset": 16},
        {"kind": "self-weight"},
    ]
    raw["combinations"]["service"] = {"factors": {"roof": 1.05}, "for": "deflection", "sustained": {"roof": 0.37}}
    raw["section"]["pieces"]["web L"].update({"turn": "2.5 deg", "grain": "across", "from": 17, "to": "5.9 m"})
    joint = raw["section"]["joints"][0]
    joint.update({"width": "61 mm", "coverage": 0.93, "segment": 2, "rows": 3})
    joint["spacing"] = [{"from": 0, "to": "1.9 m", "spacing": 71}, {"from": "1.9 m", "to": 6000, "spacing": "72 mm"}]
    raw["analysis"] = {"slip": False, "shear_deformation": True, "field": "never", "rules": ["EN 1995-1-1 9.1.1"]}
    raw["service"] = {"temperature": [-11, "36 degC"], "cure_temperature": 21.5, "moisture_change": {"softwood": 6.5}}
    return raw


def leaves(value):
    if isinstance(value, dict):
        for each in value.values():
            yield from leaves(each)
    elif isinstance(value, list):
        for each in value:
            yield from leaves(each)
    elif not isinstance(value, bool):
        yield value


def test_every_typed_value_is_shown_as_typed():
    raw = rich_document()
    groups = given(raw, {})
    shown = "\n".join(f"{g.title} {g.about} {r.label} {r.typed}" for g in groups for r in g.rows)
    shown += "\n" + "\n".join(g.about for g in groups)
    for part in (
        "basis",
        "member",
        "loads",
        "combinations",
        "section",
        "analysis",
        "service",
        "materials",
        "adhesives",
        "fasteners",
    ):
        for leaf in leaves(raw[part]):
            if leaf not in ("rectangle", "both", "press", 1):
                text = f"{leaf:.12g}" if isinstance(leaf, float) else str(leaf).replace("degC", "°C")
                assert text in shown, f"{leaf!r} of {part}"


def rows_of(groups, title):
    return {row.label: row for group in groups if group.title == title for row in group.rows}


@pytest.mark.parametrize(
    ("title", "label", "typed", "used"),
    [
        ("Member", "Length", "6.0 m", "6000 mm"),
        ("Member", "Support 3", "spring at 3.1 m, stiffness 1.5 kN/mm", "at 3100 mm, stiffness 1500 N/mm"),
        ("Member", "Deflection limit", "span / 300", ""),
        (
            "Loads",
            "roof 2",
            "area 125 psf on a width of 4 ft from 11 to 12 ft",
            "0.005 985 03 N/mm² on a width of 1219.2 mm",
        ),
        ("Loads", "roof 3", "couple 1.7 kN*m at 13' 9-1/2\"", "1.7 kN·m at 4203.7 mm"),
        ("Loads", "hoist", "point 3.0 kN at 2.0 m", "3 kN at 2000 mm"),
        (
            "Section pieces",
            "top flange",
            "90 × 70 at 12.5 across, 330 up; softwood",
            "90 mm × 70 mm at 12.5 mm across, 330 mm up",
        ),
        ("Material softwood", "Strength, tension across", "58.5 psi", "0.403 343 MPa"),
        ("Analysis and service", "Service temperature", "-11 to 36 °C", "−11 °C to 36 °C"),
    ],
)
def test_what_was_typed_stands_beside_what_was_used(title, label, typed, used):
    row = rows_of(given(rich_document(), {}), title)[label]
    assert row.typed == typed
    assert row.converted.replace("\u00a0", " ").replace("\u2009", " ").startswith(used)


def test_in_inch_pound_display_the_used_value_is_in_inches_and_pounds():
    rows = rows_of(given(fixture.document(), {}, "US"), "Member")
    assert rows["Length"].converted.replace("\u00a0", " ") == "236.22 in"


def test_values_from_a_record_name_it_and_claim_nothing_was_typed():
    groups = given(fixture.document(), fixture.result()["values_used"])
    group = next(each for each in groups if each.title == "Adhesive R2")
    assert group.about == "record V-014, revision 2; status approved; block shear, n = 10 (invented)"
    assert group.values
    row = next(row for row in group.rows if row.label == "Shear strength")
    assert (row.typed, row.converted.replace("\u00a0", " ")) == ("", "5.2 MPa")


def test_typed_values_say_so_and_unused_ones_too():
    groups = given(rich_document(), fixture.result()["values_used"])
    about = {group.title: group.about for group in groups}
    assert about["Material softwood"].startswith("typed for this check")
    assert about["Material spare"] == "status draft; kept for later; not used by the section"


def test_half_a_document_is_no_failure():
    assert given({}, {}) == ()
    assert given({"loads": {"a": []}, "section": {"pieces": {}}, "materials": None}, {}) == ()
