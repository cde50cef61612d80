"""Kind "glue-up": mass, mixes, clamps and times of one glue-up, against numbers worked out by hand."""

from __future__ import annotations

import json
from math import ceil
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server import checks, documents
from server.errors import DocumentError

GLUE = {"spread": 400, "pot_life": 20, "open_time": 25, "press_time": 360, "pressure": 0.6, "density": 1200}
CLAMPS = {"force": 5000, "reach": 200}


def run(**changes: Any) -> dict[str, Any]:
    document = {
        "format": "bondwright/1",
        "kind": "glue-up",
        "areas": [{"width": 100, "length": 4000}],
        "adhesive": GLUE,
        "clamps": CLAMPS,
        "assembly_rate": 20000,
        **changes,
    }
    found = checks.run(documents.read({name: each for name, each in document.items() if each is not None}))
    json.dumps(found, allow_nan=False)
    return found


def faults(**changes: Any) -> dict[str, str]:
    with pytest.raises(DocumentError) as caught:
        run(**changes)
    return {fault.path: fault.message for fault in caught.value.faults}


def about(found: dict[str, Any]) -> set[str]:
    return {caution["about"] for caution in found["cautions"] if caution["answer"]}


MEMBER = {
    "format": "bondwright/1",
    "kind": "member",
    "title": "Two planks and a rider",
    "basis": {"method": "allowable", "safety_factor": 3},
    "materials": {"pine": {"E": 11000, "G": 690}},
    "adhesives": {"R": {"thickness": 0.1, "shear_strength": 6}, "S": {"shear_strength": 6}},
    "section": {
        "pieces": {
            "low": {"shape": "rectangle", "width": 100, "depth": 40, "at": [0, 0], "material": "pine"},
            "high": {"shape": "rectangle", "width": 80, "depth": 40, "at": [0, 40], "material": "pine"},
            "rider": {
                **{"shape": "rectangle", "width": 60, "depth": 20, "at": [0, 80], "material": "pine"},
                **{"from": 500, "to": 2500},
            },
        },
        "joints": [
            {"between": ["high", "low"], "adhesive": "R", "coverage": 0.8},
            {"between": ["rider", "high"], "adhesive": "R", "width": 50},
        ],
    },
    "member": {"length": 3000, "supports": [{"at": 0, "kind": "pin"}, {"at": 3000, "kind": "pin"}]},
    "loads": {"all": [{"kind": "line", "from": 0, "to": 3000, "value": 1}]},
}


def member(**joint: Any) -> dict[str, Any]:
    lower, upper = MEMBER["section"]["joints"]  # type: ignore[index]
    section = {**MEMBER["section"], "joints": [lower, {**upper, **joint}]}  # type: ignore[dict-item]
    return {**MEMBER, "section": section}


def test_a_plank_by_hand():
    """A = 100 x 4000 mm2 = 0.4 m2; 0.4 x 400 g x 1.1 = 176 g; 0.4/0.02 = 20 min; 0.6 x 0.4e6 = 240 kN / 5 kN = 48."""
    found = run()
    assert found["area"] == pytest.approx(4e5)
    assert found["adhesive_mass"] == pytest.approx(0.176)
    assert found["adhesive_volume"] == pytest.approx(0.176 / 1200 * 1e9)
    assert (found["mixes"], found["assembly_time"], found["time_limit"]) == (1, 20.0, 20.0)
    assert (found["fits_open_time"], found["utilisation"]) == (True, pytest.approx(20 / 25))
    assert (found["clamp_force"], found["clamps"]) == (pytest.approx(240e3), 48)
    assert found["clamp_spacing"] == pytest.approx(4000 / 48)
    assert found["clamp_force_per_length"] == pytest.approx(60)
    assert (found["verdict"], found["missing"]) == ("pass", [])


def test_the_spread_is_that_of_each_face_and_waste_comes_on_top():
    assert run(adhesive={**GLUE, "sides": 2, "waste": "25 %"})["adhesive_mass"] == pytest.approx(0.4 * 0.4 * 2 * 1.25)
    assert run(adhesive={**GLUE, "waste": 0})["adhesive_mass"] == pytest.approx(0.16)


def test_mixes_are_spread_before_their_pot_life_ends():
    found = run(adhesive={**GLUE, "pot_life": 6, "open_time": 30})
    assert (found["mixes"], found["time_limit"], found["fits_open_time"]) == (4, 6.0, True)
    assert [mix["mixed_at"] for mix in found["mix_plan"]] == pytest.approx([0, 5, 10, 15])
    assert [mix["spread_by"] for mix in found["mix_plan"]] == pytest.approx([6, 11, 16, 21])
    assert [mix["close_by"] for mix in found["mix_plan"]] == pytest.approx([30, 35, 40, 45])
    assert sum(mix["mass"] for mix in found["mix_plan"]) == pytest.approx(found["adhesive_mass"])


def test_what_does_not_close_within_the_open_time_fails():
    found = run(adhesive={**GLUE, "open_time": 19})
    assert (found["verdict"], found["fits_open_time"]) == ("fail", False)
    assert found["utilisation"] == pytest.approx(20 / 19)
    just = run(adhesive={**GLUE, "open_time": 20})
    assert (just["verdict"], just["fits_open_time"]) == ("pass", True)


def test_a_short_reach_asks_for_more_clamps_than_the_force():
    found = run(clamps={"force": "20 kN", "reach": 150})
    assert (found["clamps"], found["clamp_spacing"]) == (27, pytest.approx(4000 / 27))


def test_more_clamps_than_there_are_fail():
    assert run(clamps={**CLAMPS, "available": 48})["verdict"] == "pass"
    found = run(clamps={**CLAMPS, "available": 47})
    assert (found["verdict"], found["utilisation"]) == ("fail", pytest.approx(48 / 47))
    assert found["governing"] == "48 clamps are needed, 47 are there"


def test_bonds_over_one_another_share_their_clamps():
    found = run(areas=[{"width": 100, "length": 4000}] * 3, clamps={**CLAMPS, "area": "0.4 m2"})
    assert (found["area"], found["clamp_force"], found["clamps"]) == (1.2e6, pytest.approx(240e3), 48)
    assert "clamps.area" in faults(clamps={**CLAMPS, "area": "0.41 m2"})


@pytest.mark.parametrize(
    ("lacking", "null"),
    [
        ({"adhesive": {**GLUE, "pot_life": None}}, ("mixes", "time_limit")),
        ({"adhesive": {**GLUE, "open_time": None}}, ("fits_open_time", "time_limit")),
        ({"adhesive": {**GLUE, "spread": None}}, ("adhesive_mass",)),
        ({"adhesive": {**GLUE, "pressure": None}}, ("clamp_force", "clamps", "clamp_spacing")),
        ({"adhesive": {**GLUE, "press_time": None}}, ("press_time",)),
        ({"assembly_rate": None}, ("mixes", "fits_open_time")),
        ({"clamps": {"reach": 200}}, ("clamps", "clamp_spacing")),
        ({"clamps": None}, ("clamps", "clamp_spacing")),
    ],
)
def test_a_number_that_lacks_is_named(lacking: dict[str, Any], null: tuple[str, ...]):
    found = run(**lacking)
    assert found["verdict"] == "not proven"
    assert found["missing"]
    assert [found[name] for name in null] == [None] * len(null)


def test_a_reach_that_lacks_is_named():
    found = run(clamps={"force": 5000})
    assert (found["verdict"], found["clamps"]) == ("not proven", 48)
    assert "clamps.reach" in found["missing"][0]


def test_contact_pressure_needs_no_clamps():
    found = run(adhesive={**GLUE, "pressure": 0}, clamps=None)
    assert (found["verdict"], found["clamp_force"], found["clamps"]) == ("pass", 0, 0)


def test_areas_alone_leave_the_count_along_the_member_to_an_answer():
    found = run(areas=["0.4 m2"])
    assert (found["verdict"], found["clamps"], found["clamp_spacing"]) == ("pass", 48, 200)
    assert about(found) == {"clamps"}


def test_the_areas_of_a_member_check():
    """80 x 3000 over the whole contact, coverage not taken off; 50 x 2000 as wide as bonded, as long as both run."""
    found = run(areas=None, check=MEMBER)
    assert [bond["area"] for bond in found["bonds"]] == pytest.approx([80 * 3000, 50 * 2000])
    assert [bond["id"] for bond in found["bonds"]] == ["high/low", "rider/high"]
    assert found["area"] == pytest.approx(340e3)
    assert found["clamp_spacing"] == pytest.approx(3000 / ceil(0.6 * 340e3 / 5000))
    assert list(found["values_used"]["adhesives"]) == ["R"]
    plain = run(areas=[80 * 3000, 50 * 2000])
    assert found["adhesive_mass"] == pytest.approx(plain["adhesive_mass"])


def test_one_glue_up_is_for_one_adhesive():
    mixed = run(areas=None, check=member(adhesive="S"))
    assert mixed["verdict"] == "not proven"
    assert any("bond" in text for text in mixed["missing"])
    assert run(areas=None, check=member(adhesive="S"), bond="S")["area"] == pytest.approx(50 * 2000)
    assert "did you mean" in faults(areas=None, check=MEMBER, bond="s")["bond"]


def test_an_adhesive_on_hold_is_not_spread():
    held = {**MEMBER, "adhesives": {"R": {"status": "on hold"}, "S": {}}}
    found = run(areas=None, check=held)
    assert found["verdict"] == "not proven"
    assert "'R' is on hold" in found["missing"][0]


def test_fasteners_that_press_and_a_warm_shop_want_an_answer():
    pressed = {**member(fastener="nail", spacing=75), "fasteners": {"nail": {"diameter": 3}}}
    found = run(areas=None, check=pressed, adhesive={**GLUE, "rated_at": 20}, shop_temperature="86 degF")
    assert about(found) >= {"nail pressing", "temperature"}
    assert about(run(adhesive={**GLUE, "pressure": 2.0})) >= {"pressure"}
    assert about(run(adhesive={**GLUE, "pressure": 1.7})) == {"clamps"}  # 136 clamps on 4 m stand too close


def test_the_printed_working_gives_the_result():
    steps = {step["symbol"]: step for step in run()["steps"]}
    assert steps["m"]["formula"] == "m_s*n_s*A*(1 + w)/1e9"
    assert steps["m"]["value"] == pytest.approx(0.176)
    without = checks.run(documents.read({"format": "bondwright/1", "kind": "glue-up", "areas": [1e5], "adhesive": {}}))
    assert without["verdict"] == "not proven"


AREA = st.floats(1e3, 1e7)


@settings(max_examples=40, deadline=None)
@given(st.lists(AREA, min_size=1, max_size=4), st.floats(1.0, 3.0))
def test_more_area_takes_more_of_everything(areas: list[float], times: float):
    one, more = run(areas=areas), run(areas=[area * times for area in areas])
    whole = run(areas=[sum(areas)])
    for name in ("area", "adhesive_mass", "clamp_force", "assembly_time"):
        assert more[name] == pytest.approx(one[name] * times)
        assert whole[name] == pytest.approx(one[name])
    for name in ("mixes", "clamps"):
        assert more[name] >= one[name]
        assert whole[name] == one[name]
    assert one["mixes"] >= one["assembly_time"] / 20 - 1e-6


@settings(max_examples=25, deadline=None)
@given(st.floats(30, 500), st.floats(300, 9000))
def test_units_change_nothing(width: float, length: float):
    plain = run(areas=[{"width": width, "length": length}])
    typed = run(
        areas=[{"width": f"{width / 25.4!r} in", "length": f"{length / 1000!r} m"}],
        adhesive={
            **GLUE,
            "spread": "0.4 kg/m2",
            "pot_life": "1200 s",
            "open_time": f"{25 / 60!r} h",
            "press_time": "6 h",
        },
        assembly_rate="1.2 m2/h",
        clamps={"force": "5 kN", "reach": "20 cm"},
    )
    for name in ("area", "adhesive_mass", "assembly_time", "clamp_force", "utilisation", "press_time"):
        assert typed[name] == pytest.approx(plain[name], rel=1e-9)


@pytest.mark.parametrize(
    ("changes", "path", "says"),
    [
        ({"areas": None}, "areas", "Missing; enter the areas"),
        ({"check": MEMBER}, "areas", "keep one of the two"),
        ({"areas": []}, "areas", "at least 1"),
        ({"areas": [-5]}, "areas[0]", "greater than 0"),
        ({"areas": ["4 m"]}, "areas[0]", "is a length, not an area"),
        ({"areas": [{"width": 5}]}, "areas[0].length", "Missing"),
        ({"areas": [{"width": 5, "length": 5, "area": 25}]}, "areas[0].area", "is given too"),
        ({"adhesive": {**GLUE, "spread": "400 g"}}, "adhesive.spread", "is a mass"),
        ({"adhesive": {**GLUE, "sides": 3}}, "adhesive.sides", "1 to 2"),
        ({"adhesive": {**GLUE, "waste": -0.1}}, "adhesive.waste", "at least 0"),
        ({"adhesive": {**GLUE, "pot_life": 0}}, "adhesive.pot_life", "greater than 0"),
        ({"adhesive": {**GLUE, "open_time": "20 m"}}, "adhesive.open_time", "is a length, not a time"),
        ({"adhesive": {**GLUE, "potlife": 5}}, "adhesive.potlife", "did you mean 'pot_life'"),
        ({"adhesive": None}, "adhesive", "Missing"),
        ({"clamps": {"force": "500 kg"}}, "clamps.force", "weighs"),
        ({"clamps": {"available": 0}}, "clamps.available", "1 to"),
        ({"assembly_rate": 0}, "assembly_rate", "greater than 0"),
        ({"bond": "R"}, "bond", "elongs to a member check"),
        ({"areas": None, "check": {**MEMBER, "kind": "splice"}}, "check.kind", "'member'"),
        ({"areas": None, "check": member(adhesive="T")}, "check.section.joints[1].adhesive", "names no adhesive"),
        ({"areas": None, "check": member(width=90)}, "check.section.joints[1].width", "touch over only 60 mm"),
    ],
)
def test_nonsense_is_refused_by_its_field(changes: dict[str, Any], path: str, says: str):
    found = faults(**changes)
    assert says in found[path]


def test_records_inside_the_check_are_still_to_be_filled():
    referring = {**MEMBER, "adhesives": {"R": {"record": "B-1"}, "S": {}}}
    document = {"format": "bondwright/1", "kind": "glue-up", "check": referring, "adhesive": {}}
    assert documents.read(document).unresolved() == ["check.adhesives.R"]
    assert "check.adhesives.R" in faults(areas=None, check=referring)


def test_every_step_says_where_its_formula_is_from():
    found = run(areas=None, check=MEMBER, clamps={**CLAMPS, "available": 99})
    assert [step["title"] for step in found["steps"] if step["formula"] and not step["source"]] == []
