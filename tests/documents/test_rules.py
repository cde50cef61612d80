"""Rules that look across fields: names, roles, places, cases, factors."""

from __future__ import annotations

import re
from typing import Any

import pytest

from tests.documents.examples import BOX, changed, drop, faults, only_fault, put, read

JOINT = {"between": ["web L", "bottom"]}


@pytest.mark.parametrize(
    ("change", "path", "says"),
    [
        (
            put("section/pieces/top/material", "oak"),
            "section.pieces.top.material",
            "names no material of this document; known: 'deal', 'ply'",
        ),
        (
            put("section/joints/0/adhesive", "PUR"),
            "section.joints[0].adhesive",
            "names no adhesive .*did you mean 'PU'",
        ),
        (put("section/joints/2/fastener", "screw"), "section.joints[2].fastener", "names no fastener .*known: 'nail'"),
        (put("section/joints/0/between", ["web L", "botom"]), "section.joints[0].between", "did you mean 'bottom'"),
        (put("section/joints/0/between", ["top", "top"]), "section.joints[0].between", "is named twice"),
        (
            put("combinations/A/factors/wind", 1),
            "combinations.A.factors.wind",
            "names no load case .*known: 'dead', 'snow'",
        ),
        (
            put("combinations/A/sustained", {"wind": 0.3}),
            "combinations.A.sustained.wind",
            "not in this combination's factors",
        ),
        (put("service", {"moisture_change": {"oak": 3}}), "service.moisture_change.oak", "names no material"),
        (put("service", {"temperature": [30, 20]}), "service.temperature", "first temperature is above the second"),
        (put("section/joints/0", JOINT), "section.joints[0]", "neither an adhesive nor a fastener"),
        (put("section/joints/0/role", "sole"), "section.joints[0].role", "the joint names none; name a fastener"),
        (put("section/joints/0/spacing", 50), "section.joints[0].spacing", "the joint names none; name a fastener"),
        (
            put("section/joints/2/role", "sole"),
            "section.joints[2].role",
            "strengths of glue and fasteners are never added",
        ),
        (put("section/joints/3/role", "press"), "section.joints[3].role", "nothing would carry the flow"),
        (put("section/joints/3/role", "fall-back"), "section.joints[3].role", "nothing would carry the flow"),
        (put("section/joints/3/role", "peel-stop"), "section.joints[3].role", "nothing would carry the flow"),
        (put("section/joints/1/between", ["bottom", "web L"]), "section.joints[1].between", "Joint 0 already joins"),
        (
            put("section/pieces/top/from", "5 m"),
            "section.pieces.top.from",
            "beyond the end of the member; .* its length, 4.200 mm",
        ),
        (put("section/pieces/top/to", 4200.0001), "section.pieces.top.to", r"4200\.0001 mm is beyond the end"),
        (put("section/pieces/top/from", 4200), "section.pieces.top.from", "begins where the member ends"),
        (put("section/pieces/top/to", 0), "section.pieces.top.to", "ends where the member begins"),
        (
            lambda d: d["section"]["pieces"]["bottom"].update({"from": 3000, "to": 2000}),
            "section.pieces.bottom.to",
            "not to the right of 'from'",
        ),
        (put("member/supports/1/at", "5 m"), "member.supports[1].at", "5.000 mm is beyond the end of the member"),
        (put("member/supports/1/at", 0), "member.supports[1].at", "Support 0 already stands at 0 mm"),
        (put("member/supports/1/at", 1e-12), "member.supports[1].at", "Support 0 already stands at 0 mm"),
        (put("materials/deal/E", 1e-200), "materials.deal.E", "1e-200 is next to nothing"),
        (
            put("member/supports/1", {"at": 4200, "kind": "spring", "stiffness": 1e-8}),
            "member.supports[1].stiffness",
            "1e-08 N/mm is not accepted",
        ),
        (
            put("member/supports/1", {"at": 4200, "kind": "spring"}),
            "member.supports[1].stiffness",
            "a spring needs its stiffness",
        ),
        (
            put("member/supports/1", {"at": 4200, "kind": "pin", "stiffness": 5}),
            "member.supports[1].stiffness",
            "does not give way",
        ),
        (put("member/hinges", [0]), "member.hinges[0]", "at an end of the member"),
        (put("member/hinges", ["4.2 m"]), "member.hinges[0]", "at an end of the member"),
        (put("member/hinges", [5000]), "member.hinges[0]", "beyond the end"),
        (put("member/hinges", [1000, 1000]), "member.hinges[1]", "already stands at 1.000 mm"),
        (
            lambda d: (
                d["member"]["supports"].append({"at": 2000, "kind": "fixed"}),
                d["member"].update(hinges=[2000]),
            ),
            "member.hinges[0]",
            "at the fixed support at 2.000 mm",
        ),
        (put("loads/snow/1/at", "5 m"), "loads.snow[1].at", "beyond the end of the member"),
        (put("loads/snow/3/at", 4201), "loads.snow[3].at", "beyond the end of the member"),
        (put("loads/snow/0/to", "5 m"), "loads.snow[0].to", "beyond the end of the member"),
        (put("loads/snow/0/from", "4.2 m"), "loads.snow[0].to", "not to the right of 'from'"),
        (put("loads/snow/2/to", 0), "loads.snow[2].to", "not to the right of 'from'"),
        (put("loads/snow/1/lateral", 100), "loads.snow[1].lateral", "held sideways"),
        (put("loads/snow/0/lateral", "1 kN/m"), "loads.snow[0].lateral", "held sideways"),
        (drop("materials/deal/density"), "materials.deal.density", "self-weight of 'bottom', 'top' needs it"),
        (put("loads", {"dead": [], "snow": []}), "loads", "no load in any case"),
        (put("fasteners/nail/spacing_max", 10), "fasteners.nail.spacing_max", "is less than spacing_min"),
        (
            put("basis/safety_factor", {"fastener": 2, "material": 2}),
            "basis.safety_factor.adhesive",
            "a joint is bonded",
        ),
        (
            put("basis/safety_factor", {"adhesive": 2, "material": 2}),
            "basis.safety_factor.fastener",
            "carried by fasteners",
        ),
        (
            put("basis/safety_factor", {"adhesive": 2, "fastener": 2}),
            "basis.safety_factor.material",
            "pieces of 'deal' are judged",
        ),
        (put("basis/safety_factor/material", {"deal": 2}), "basis.safety_factor.material.ply", "its pieces are judged"),
        (put("basis/safety_factor/material/oak", 2), "basis.safety_factor.material.oak", "names no material"),
    ],
)
def test_one_broken_rule_is_one_fault_that_names_the_field(change: Any, path: str, says: str) -> None:
    found_path, message = only_fault(changed(change))
    assert found_path == path
    assert re.search(says, message), message
    assert message[0].isupper() or not message[0].isalpha()


@pytest.mark.parametrize(
    ("zones", "path", "says"),
    [
        ([(0, 2000), (2100, 4200)], "section.joints[3].spacing[1].from", "A gap between"),
        ([(2100, 4200), (0, 2000)], "section.joints[3].spacing[0].from", "A gap between"),
        ([(0, 2000), (1900, 4200)], "section.joints[3].spacing[1].from", "An overlap between"),
        ([(0, 2000), (2000, 4300)], "section.joints[3].spacing[1].to", "beyond the end of the member"),
        ([(0, 2000), (2000, 4000)], "section.joints[3].spacing", "let the zones cover the joint"),
        ([(100, 2000), (2000, 4200)], "section.joints[3].spacing", "let the zones cover the joint"),
    ],
)
def test_zones_of_spacing_cover_the_joint(zones: list[tuple[float, float]], path: str, says: str) -> None:
    value = [{"from": start, "to": end, "spacing": 50} for start, end in zones]
    found_path, message = only_fault(changed(put("section/joints/3/spacing", value)))
    assert (found_path, message[: len(says)] == says or says in message) == (path, True)


def test_zones_need_only_cover_the_run_of_a_short_piece() -> None:
    def change(data: dict[str, Any]) -> None:
        data["section"]["pieces"]["top"] |= {"from": "1 m", "to": "3 m"}
        data["section"]["joints"][3]["spacing"] = [{"from": "1 m", "to": "3 m", "spacing": 50}]

    assert read(changed(change)).section.pieces["top"].from_ == 1000.0


def test_zones_that_meet_within_a_rounding_error_have_no_gap() -> None:
    value = [{"from": 0, "to": "6 ft 6-3/4 in", "spacing": 50}, {"from": 2000.25, "to": 4200, "spacing": 50}]
    read(changed(put("section/joints/3/spacing", value)))


@pytest.mark.parametrize("role", ["fall-back", "peel-stop", "press"])
def test_fasteners_beside_an_adhesive_may_have_any_role_but_sole(role: str) -> None:
    assert read(changed(put("section/joints/2/role", role))).section.joints[2].effective_role == role


def test_a_second_segment_of_a_pair_is_another_joint() -> None:
    second = {"between": ["bottom", "web L"], "segment": 2, "adhesive": "PU"}
    joints = read(changed(lambda d: d["section"]["joints"].append(second))).section.joints
    assert joints[-1].id == "bottom/web L#2"


def test_two_joints_are_never_called_the_same() -> None:
    def change(data: dict[str, Any]) -> None:
        piece = data["section"]["pieces"]["top"]
        data["section"]["pieces"] |= {"a": piece, "b/c": piece, "a/b": piece, "c": piece}
        data["section"]["joints"] += [{"between": pair, "adhesive": "PU"} for pair in (["a", "b/c"], ["a/b", "c"])]

    path, message = only_fault(changed(change))
    assert path == "section.joints[5].between"
    assert "would be called 'a/b/c', as joint 4 is" in message


def test_lateral_loads_are_read_where_the_member_is_free_sideways() -> None:
    def change(data: dict[str, Any]) -> None:
        data["member"]["held_sideways"] = False
        data["loads"]["snow"][1]["lateral"] = "1 kN"

    assert read(changed(change)).member.held_sideways is False


def test_factors_nobody_uses_may_be_left_out() -> None:
    def no_fastener_carries(data: dict[str, Any]) -> None:
        data["section"]["joints"][3] = {"between": ["web R", "top"], "adhesive": "PU"}
        del data["basis"]["safety_factor"]["fastener"]

    assert read(changed(no_fastener_carries)).basis.factor("fastener") is None


def test_a_fall_back_is_divided_by_its_own_factor_or_the_fasteners() -> None:
    def change(data: dict[str, Any]) -> None:
        data["section"]["joints"][3] = {"between": ["web R", "top"], "adhesive": "PU"}
        data["section"]["joints"][2]["role"] = "fall-back"
        del data["basis"]["safety_factor"]["fastener"]

    path, message = only_fault(changed(change))
    assert (path, "fall_back_factor" in message) == ("basis.safety_factor.fastener", True)
    data = changed(change)
    data["basis"]["fall_back_factor"] = 1.5
    assert read(data).basis.fall_back() == 1.5


def test_one_number_serves_every_kind() -> None:
    basis = read(changed(put("basis", {"method": "limit-state", "partial_factor": 1.3}))).basis
    assert (basis.factor("adhesive"), basis.factor("material", "ply"), basis.fall_back()) == (1.3, 1.3, 1.3)


def test_broken_fields_do_not_call_other_names_unknown() -> None:
    def change(data: dict[str, Any]) -> None:
        data["materials"]["ply"]["E"] = "x"
        data["adhesives"]["PU"]["shear_strength"] = "x"
        data["fasteners"]["nail"]["diameter"] = "x"
        data["section"]["pieces"]["web L"]["from"] = "x"
        data["loads"]["snow"][1]["at"] = "x"

    assert set(faults(changed(change))) == {
        "materials.ply.E",
        "adhesives.PU.shear_strength",
        "fasteners.nail.diameter",
        "section.pieces.web L.from",
        "loads.snow[1].at",
    }


def test_the_box_beam_breaks_no_rule() -> None:
    read(BOX)
