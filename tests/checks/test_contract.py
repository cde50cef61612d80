"""Sentences of the contract for every kind and for members, one small test each.

What test_verdict.py, test_oracle.py and tests/documents show already is not shown again here.
"""

from __future__ import annotations

import json
import math
import re

import pytest

from server import ENGINE
from server.errors import DocumentError
from tests.checks.made import BOX, STACK, Raw, changed, run

ENDS = [{"at": 0, "kind": "pin"}, {"at": 3000, "kind": "pin"}]
EI = 10000 * 100 * 100**3 / 12  # of the stack


def cautions(result: Raw, about: str) -> list[str]:
    return [caution["text"] for caution in result["cautions"] if caution["about"] == about]


def faults(raw: Raw, **changes: object) -> dict[str, str]:
    with pytest.raises(DocumentError) as caught:
        run(raw, **changes)
    return {fault.path: fault.message for fault in caught.value.faults}


class TestUnitsAndSigns:
    def test_display_changes_no_number(self) -> None:
        shown, other = run(STACK, display="SI"), run(STACK, display="US")
        assert {**other, "display": "SI"} == shown

    def test_any_origin_will_do(self) -> None:
        moved = changed(BOX)
        for piece in moved["section"]["pieces"].values():
            piece["at"] = [piece["at"][0] - 4321.5, piece["at"][1] + 987.25]
        here, there = run(BOX), run(moved)
        assert there["section"]["neutral_axis"] == pytest.approx([57.5 - 4321.5, 200 + 987.25])
        assert there["utilisation"] == pytest.approx(here["utilisation"])
        assert [j["shear_flow"] for j in there["joints"]] == pytest.approx([j["shear_flow"] for j in here["joints"]])
        assert [p["stress_top"] for p in there["pieces"]] == pytest.approx([p["stress_top"] for p in here["pieces"]])

    @pytest.mark.parametrize(("at", "sign"), [(0, 1), (3000, -1)])
    def test_a_fixed_end_holds_with_an_anticlockwise_couple_on_the_left_and_hogs(self, at: float, sign: int) -> None:
        load = {"kind": "point", "at": 3000 - at, "value": 100}
        result = run(STACK, member__supports=[{"at": at, "kind": "fixed"}], loads__live=[load])
        (reaction,) = result["member"]["reactions"]["all"]
        assert reaction == {"at": at, "force": pytest.approx(100), "couple": pytest.approx(sign * 300_000)}
        assert result["member"]["moment"]["min"] == pytest.approx(-300_000)
        assert result["member"]["moment"]["max"] == pytest.approx(0, abs=1e-6)
        assert result["member"]["shear"]["max" if sign > 0 else "min"] == pytest.approx(sign * 100)

    def test_an_anticlockwise_couple_lifts_the_left_support_and_steps_the_moment_down(self) -> None:
        couple = {"kind": "couple", "at": 1000, "value": 300_000}
        member = run(STACK, loads__live=[couple])["member"]
        assert [r["force"] for r in member["reactions"]["all"]] == pytest.approx([100, -100])
        assert member["moment"] == {
            "max": pytest.approx(100_000), "at_max": pytest.approx(1000), "combination_max": "all",
            "min": pytest.approx(-200_000), "at_min": pytest.approx(1000), "combination_min": "all",
        }  # fmt: skip

    @pytest.mark.parametrize(
        ("start", "end", "value"), [(0, 3000, [-1, 1]), (500, 2000, [2, -2]), (0, 2400, [-0.5, 1.5]), (0, 3000, [0, 0])]
    )
    def test_a_load_that_changes_sign_turns_the_member_in_the_working_too(
        self, start: float, end: float, value: list[float]
    ) -> None:
        """Its resultant may be nil, its moment is not: printed and found reactions are the same."""
        load = {"kind": "line", "from": start, "to": end, "value": value}
        result = run(STACK, loads__live=[load])
        a, b, length = *value, end - start
        right = ((a + b) / 2 * length * start + (a + 2 * b) / 6 * length**2) / 3000
        printed = {step["symbol"]: step["value"] for step in result["steps"]}
        found = [r["force"] for r in result["member"]["reactions"]["all"]]
        assert found == pytest.approx([(a + b) / 2 * length - right, right], abs=1e-9)
        assert [printed["R_1"], printed["R_2"]] == pytest.approx(found, abs=1e-9)

    def test_upward_loads_are_negative_and_lift(self) -> None:
        member = run(STACK, loads__live__0__value=-1.2)["member"]
        assert [r["force"] for r in member["reactions"]["all"]] == pytest.approx([-1800, -1800])
        assert member["deflection"]["min"] < 0
        assert member["deflection"]["max"] == pytest.approx(0, abs=1e-9)


class TestExtremes:
    def test_the_leftmost_place_wins_a_tie(self) -> None:
        thirds = [{"kind": "point", "at": at, "value": 900} for at in (1000, 2000)]
        result = run(STACK, loads__live=thirds)
        assert result["member"]["shear"]["at_max"] == 0
        assert result["member"]["shear"]["at_min"] == 2000
        assert result["member"]["moment"]["at_max"] == 1000  # level from 1000 to 2000
        assert result["joints"][0]["at"] == 0  # +900 at the left, -900 at the right

    def test_equal_spans_name_the_left_one(self) -> None:
        result = run(STACK, member__supports=[*ENDS, {"at": 1500, "kind": "pin"}], member__deflection_limit=300)
        assert result["member"]["deflection"]["at_max"] < 1500
        assert result["member"]["moment"]["at_max"] < 1500

    def test_of_equal_combinations_the_first_is_named(self) -> None:
        same = {"factors": {"live": 1.0}}
        result = run(STACK, combinations={"zeta": same, "alpha": same}, member__deflection_limit=300)
        assert result["joints"][0]["combination"] == "zeta"
        assert result["member"]["moment"]["combination_max"] == "zeta"
        assert result["deflection_limits"][0]["combination"] == "zeta"

    def test_both_sides_of_a_jump_count(self) -> None:
        shear = run(STACK, loads__live=[{"kind": "point", "at": 1000, "value": 900}])["member"]["shear"]
        assert (shear["max"], shear["at_max"]) == (pytest.approx(600), 0)
        assert (shear["min"], shear["at_min"]) == (pytest.approx(-300), 1000)

    def test_a_load_on_a_support_at_the_end_shears_nothing_inside(self) -> None:
        result = run(STACK, loads__live=[{"kind": "point", "at": 3000, "value": 900}])
        assert result["member"]["shear"]["max"] == pytest.approx(0, abs=1e-9)
        assert result["member"]["shear"]["min"] == pytest.approx(0, abs=1e-9)
        assert result["member"]["reactions"]["all"][1]["force"] == pytest.approx(900)

    def test_without_combinations_there_is_one_named_all(self) -> None:
        result = run(STACK, loads__wind=[{"kind": "point", "at": 1500, "value": 300}])
        assert list(result["member"]["reactions"]) == ["all"]
        assert result["member"]["shear"]["max"] == pytest.approx(1950)
        assert result["joints"][0]["limits"][0]["duration_factor"] == 1.0

    def test_a_case_that_a_combination_leaves_out_counts_nothing(self) -> None:
        result = run(
            STACK,
            loads__wind=[{"kind": "point", "at": 1500, "value": 300}],
            combinations={"w": {"factors": {"wind": 2}}},
        )
        assert result["member"]["shear"]["max"] == pytest.approx(300)
        assert any("live" in text for text in cautions(result, "loads"))

    def test_moment_and_shear_come_from_strength_and_deflection_from_its_own_combinations(self) -> None:
        combinations = {
            "ULS": {"factors": {"live": 1.5}, "for": "strength"},
            "SLS": {"factors": {"live": 1.0}, "for": "deflection"},
        }
        member = run(STACK, combinations=combinations)["member"]
        assert member["shear"]["max"] == pytest.approx(1.5 * 1800)
        assert member["moment"]["combination_max"] == "ULS"
        assert member["deflection"]["combination_max"] == "SLS"
        assert member["deflection"]["max"] == pytest.approx(run(STACK)["member"]["deflection"]["max"])
        assert set(member["reactions"]) == {"ULS", "SLS"}


class TestValues:
    def test_a_result_stands_on_its_own_values(self) -> None:
        """Whoever types the values used gets the same result: nothing else went into it."""
        first = run(BOX)
        again = run(BOX, materials=first["values_used"]["materials"], adhesives=first["values_used"]["adhesives"])
        assert again == first

    def test_only_what_the_check_uses_is_repeated(self) -> None:
        result = run(STACK, adhesives__other={"shear_strength": 1}, materials__oak={"E": 12000})
        assert {group: list(names) for group, names in result["values_used"].items()} == {
            "materials": ["pine"], "adhesives": ["glue"], "fasteners": [],
        }  # fmt: skip

    @pytest.mark.parametrize("status", ["indicative", "draft", "on hold", "withdrawn", "superseded", "provisional"])
    def test_the_status_of_a_value_that_nothing_rests_on_does_not_count(self, status: str) -> None:
        pressed = {"between": ["lower", "upper"], "adhesive": "glue", "fastener": "screw", "spacing": 100}
        result = run(
            STACK, adhesives__other={"shear_strength": 1, "status": status}, section__joints=[pressed],
            fasteners={"screw": {"shear_resistance": 900, "status": status}},
        )  # fmt: skip
        assert (result["verdict"], result["missing"]) == ("pass", [])
        assert cautions(result, "value status") == []

    @pytest.mark.parametrize("status", ["indicative", "draft", "on hold", "withdrawn"])
    def test_stiffness_is_a_value_that_the_verdict_rests_on(self, status: str) -> None:
        """A strip without strengths is not judged itself, but its E takes load off the rest."""
        strip = {"shape": "rectangle", "width": 80, "depth": 8, "at": [10, -8], "material": "steel"}
        joints = [*STACK["section"]["joints"], {"between": ["strip", "lower"], "fastener": "screw", "spacing": 80}]
        screw = {"shear_resistance": 9000}
        result = run(
            STACK, section__pieces__strip=strip, section__joints=joints, fasteners={"screw": screw},
            materials__steel={"E": 2e5, "status": status},
        )  # fmt: skip
        assert any("'steel'" in line and status in line for line in result["missing"])

    def test_a_basis_that_is_one_number_serves_every_kind(self) -> None:
        result = run(STACK, basis={"method": "limit-state", "partial_factor": 1.25})
        limits = [*result["joints"][0]["limits"], *result["pieces"][0]["limits"]]
        assert {limit["safety_factor"] for limit in limits} == {1.25}

    @pytest.mark.parametrize(
        ("given", "lacks"),
        [
            ({"bending": 20, "shear": 3}, None),
            ({"tension": 12, "compression": 18, "shear": 3}, None),
            ({"tension": 12, "shear": 3}, "compression"),
            ({"compression": 12, "shear": 3}, "tension"),
            ({"bending": 20}, "shear"),
            ({"bearing": 5, "shear": 3}, "bending"),
        ],
    )
    def test_a_piece_needs_bending_or_both_others_and_shear(self, given: Raw, lacks: str | None) -> None:
        result = run(STACK, materials__pine__strengths=given, loads__live__0__value=0.6)
        assert result["verdict"] == ("pass" if lacks is None else "not proven")
        assert (lacks is None) is (not result["missing"])
        assert all(f"{lacks} strength" in line for line in result["missing"])

    @pytest.mark.parametrize("load", [0.1, 0.3, 0.7, 1.1, 1.3])
    def test_used_just_to_its_limit_passes_and_a_hair_more_fails(self, load: float) -> None:
        """The last bits of a division are no failure."""
        needed = run(STACK, loads__live__0__value=load)["joints"][0]["strength_needed"]
        for factor, verdict in ((1.0, "pass"), (1 + 1e-12, "pass"), (1 - 1e-12, "pass"), (1 - 1e-6, "fail")):
            result = run(STACK, loads__live__0__value=load, adhesives__glue__shear_strength=needed * factor)
            assert result["utilisation"] == pytest.approx(1 / factor)
            assert result["verdict"] == verdict


class TestSection:
    @pytest.mark.parametrize("turn", [90, -90, 270, 450, "90 deg"])
    def test_a_quarter_turn_swaps_width_and_depth_in_the_bounding_box(self, turn: object) -> None:
        piece = {"shape": "rectangle", "width": 50, "depth": 100, "at": [0, 50], "material": "pine", "turn": turn}
        turned = run(STACK, section__pieces__upper=piece)
        for key in ("area", "EI", "EI_lateral", "GA"):
            assert turned["section"][key] == pytest.approx(run(STACK)["section"][key])

    def test_turning_is_anticlockwise(self) -> None:
        """A wide piece turned a little anticlockwise rises to the right: its product of inertia is positive."""
        piece = {"shape": "rectangle", "width": 100, "depth": 20, "at": [5, 7], "material": "pine", "turn": 30}
        section = run(STACK, section={"pieces": {"only": piece}, "joints": []})["section"]
        half = math.radians(30)
        strong, weak = 20 * 100**3 / 12, 100 * 20**3 / 12
        assert section["EI_product"] == pytest.approx(10000 * (strong - weak) * math.sin(half) * math.cos(half))
        box = 100 * math.cos(half) + 20 * math.sin(half), 100 * math.sin(half) + 20 * math.cos(half)
        assert section["neutral_axis"] == pytest.approx([5 + box[0] / 2, 7 + box[1] / 2])

    @pytest.mark.parametrize(("gap", "meets"), [(0.05, True), (0.25, True), (0.249, True), (0.26, False), (1, False)])
    def test_faces_meet_across_the_bond_line_and_a_twentieth_of_a_millimetre(self, gap: float, meets: bool) -> None:
        change = {"section__pieces__upper__at": [0, 50 + gap], "adhesives__glue__thickness": 0.2}
        if meets:
            assert run(STACK, **change)["joints"][0]["contact_length"] == pytest.approx(100)
        else:
            assert "section.joints[0].between" in faults(STACK, **change)

    def test_fasteners_bridge_no_bond_line(self) -> None:
        joint = {"between": ["lower", "upper"], "fastener": "screw", "spacing": 100}
        change = {"section__joints": [joint], "fasteners": {"screw": {"shear_resistance": 900}}}
        assert run(STACK, **change, section__pieces__upper__at=[0, 50.05])["joints"][0]["shear_flow"] > 0
        assert "section.joints[0].between" in faults(STACK, **change, section__pieces__upper__at=[0, 50.06])

    def test_a_contact_without_a_joint_carries_nothing_and_is_named(self) -> None:
        joints = BOX["section"]["joints"][:3]
        result = run(BOX, section__joints=joints)
        assert any("bottom" in text and "right" in text for text in cautions(result, "contact without a joint"))
        assert {j["split"] for j in result["joints"]} == {"cut"}
        whole = run(BOX)["joints"][0]["shear_flow"]
        assert {j["id"]: j["shear_flow"] for j in result["joints"]} == {
            "top/left": pytest.approx(2 * whole), "top/right": pytest.approx(0, abs=1e-6 * whole),
            "bottom/left": pytest.approx(2 * whole),
        }  # fmt: skip

    def test_a_contact_with_all_joints_named_is_no_caution(self) -> None:
        assert cautions(run(BOX), "contact without a joint") == []

    def test_the_reference_modulus_is_that_of_the_first_piece_in_the_file(self) -> None:
        pieces = BOX["section"]["pieces"]
        first = run(BOX, section__pieces={name: pieces[name] for name in ("left", "right", "bottom", "top")})
        assert first["joints"][0]["first_moment"] == pytest.approx(run(BOX)["joints"][0]["first_moment"] * 11000 / 6500)

    def test_the_section_shown_is_the_governing_one(self) -> None:
        result = run(STACK, section__pieces__upper__to=2000)
        areas = [section["area"] for section in result["sections"]]
        assert areas == pytest.approx([10000, 5000])
        own = {k: v for k, v in result["sections"][1].items() if k not in ("from", "to")}
        assert result["section"] == {**own, "bent_axis": None}

    def test_joints_rigid_the_effective_stiffness_is_the_stiffness(self) -> None:
        section = run(STACK)["section"]
        assert section["effective_EI"] == pytest.approx(section["EI"]) == pytest.approx(EI)


class TestJoints:
    @pytest.mark.parametrize("role", [None, "press", "peel-stop"])
    def test_fasteners_beside_glue_add_and_take_nothing(self, role: str | None) -> None:
        both = {"between": ["lower", "upper"], "adhesive": "glue", "fastener": "screw", "spacing": 40, "rows": 3}
        both |= {} if role is None else {"role": role}
        result = run(STACK, section__joints=[both], fasteners={"screw": {"shear_resistance": 1}})
        joint, alone = result["joints"][0], run(STACK)["joints"][0]
        assert joint["role"] == (role or "press")
        for key in ("shear_flow", "stress", "limits", "strength_needed", "utilisation", "width_needed"):
            assert joint[key] == alone[key]
        assert (result["verdict"], result["utilisation"]) == ("pass", run(STACK)["utilisation"])

    def test_the_flow_has_no_sign(self) -> None:
        up = run(STACK, loads__live__0__value=-1.2)["joints"][0]
        assert up["shear_flow"] == pytest.approx(run(STACK)["joints"][0]["shear_flow"])
        assert up["first_moment"] == pytest.approx(125000)

    def test_the_spacing_needed_is_neither_rounded_nor_capped(self) -> None:
        joint = {"between": ["lower", "upper"], "fastener": "screw", "spacing": 60}
        screw = {"shear_resistance": 90000, "spacing_min": 20, "spacing_max": 150}
        result = run(STACK, section__joints=[joint], fasteners={"screw": screw})
        assert result["joints"][0]["spacing_needed"] == pytest.approx(45000 / (1800 * 1.5 / 100))

    def test_a_spacing_beyond_its_most_is_not_proven(self) -> None:
        joint = {"between": ["lower", "upper"], "fastener": "screw", "spacing": 160}
        screw = {"shear_resistance": 90000, "spacing_max": 150}
        result = run(STACK, section__joints=[joint], fasteners={"screw": screw})
        assert any("160 mm" in line and "150 mm" in line for line in result["missing"])

    def test_the_strength_asked_for_minds_duration_coverage_and_factors(self) -> None:
        (joint,) = run(
            STACK, section__joints__0__coverage=0.8, adhesives__glue__factors={"wet": 0.5},
            combinations={"all": {"factors": {"live": 1}, "duration": "long-term"}},
        )["joints"]  # fmt: skip
        assert joint["strength_needed"] == pytest.approx(0.27 / 0.8 * 2 / 0.6 / 0.5)
        again = run(
            STACK, section__joints__0__coverage=0.8, adhesives__glue__factors={"wet": 0.5},
            combinations={"all": {"factors": {"live": 1}, "duration": "long-term"}},
            adhesives__glue__shear_strength=joint["strength_needed"],
        )["joints"][0]["limits"][0]  # fmt: skip
        assert again["utilisation"] == pytest.approx(1)

    def test_a_bond_as_wide_as_needed_is_used_fully(self) -> None:
        needed = run(STACK, section__joints__0__coverage=0.7)["joints"][0]["width_needed"]
        (joint,) = run(STACK, section__joints__0__coverage=0.7, section__joints__0__width=needed)["joints"]
        assert joint["utilisation"] == pytest.approx(1)


class TestPieces:
    def test_stresses_are_those_where_the_piece_is_used_most_on_the_right_side_of_a_jump(self) -> None:
        """Sagging 100 kN mm and hogging 200 kN mm stand at one place; weak in tension, the lower one sags."""
        couple = {"kind": "couple", "at": 1000, "value": 300_000}
        strengths = {"bending": 20, "tension": 1, "compression": 18, "shear": 3}
        lower, upper = run(STACK, loads__live=[couple], materials__pine__strengths=strengths)["pieces"]
        Z = 100 * 100**2 / 6
        assert (lower["stress_top"], lower["stress_bottom"]) == (pytest.approx(0, abs=1e-9), pytest.approx(1e5 / Z))
        assert upper["stress_top"] == pytest.approx(2e5 / Z)


class TestDeflection:
    def test_without_a_shear_modulus_bending_alone_deflects_and_it_is_said(self) -> None:
        result = run(STACK, materials__pine__G=..., member__deflection_limit=150)
        assert result["member"]["deflection"]["max"] == pytest.approx(5 * 1.2 * 3000**4 / (384 * EI))
        assert result["section"]["GA"] is None
        assert any("pine" in text for text in cautions(result, "shear deformation"))
        assert result["verdict"] == "pass"

    def test_a_limit_not_asked_for_is_a_caution_and_never_a_pass_by_silence(self) -> None:
        assert cautions(run(STACK), "deflection")
        assert cautions(run(STACK, member__deflection_limit=300), "deflection") == []

    def test_a_couple_is_in_no_beam_table(self) -> None:
        """Where the tables do not hold, the working names the method and gives the number it found."""
        couple = {"kind": "couple", "at": 1000, "value": 300_000}
        result = run(STACK, loads__turn=[couple])
        (step,) = [s for s in result["steps"] if s["title"].startswith("Greatest deflection")]
        assert step["formula"] == ""
        assert step["value"] == pytest.approx(result["member"]["deflection"]["max"])

    def test_what_is_not_named_as_sustained_does_not_stay(self) -> None:
        result = run(
            STACK,
            materials__pine__creep=0.8,
            combinations={"all": {"factors": {"live": 1}}},
            member__deflection_limit=300,
        )
        member = result["member"]
        assert member["deflection_long_term"]["max"] == pytest.approx(member["deflection"]["max"])

    def test_the_sustained_share_is_taken_before_the_combinations_factor(self) -> None:
        combinations = {"SLS": {"factors": {"live": 0.5}, "sustained": {"live": 0.5}}}
        member = run(STACK, combinations=combinations, materials__pine__creep=1.0)["member"]
        assert member["deflection_long_term"]["max"] == pytest.approx(2 * member["deflection"]["max"])

    def test_each_piece_creeps_by_its_own(self) -> None:
        strip = {"shape": "rectangle", "width": 100, "depth": 50, "at": [0, 50], "material": "stone"}
        combinations = {"SLS": {"factors": {"live": 1}, "sustained": {"live": 1}}}
        result = run(
            STACK, combinations=combinations, section__pieces__upper=strip, materials__pine__creep=1.0,
            materials__stone={"E": 10000, "G": 625, "strengths": {"bending": 20, "shear": 3}},
            analysis={"shear_deformation": False},
        )  # fmt: skip
        halved = run(
            STACK, section__pieces__upper=strip, materials__pine__E=5000, analysis={"shear_deformation": False},
            materials__stone={"E": 10000, "strengths": {"bending": 20, "shear": 3}},
        )  # fmt: skip
        got = result["member"]["deflection_long_term"]["max"]
        assert got == pytest.approx(halved["member"]["deflection"]["max"])

    def test_shear_stiffness_creeps_too(self) -> None:
        combinations = {"SLS": {"factors": {"live": 1}, "sustained": {"live": 1}}}
        member = run(STACK, combinations=combinations, materials__pine__creep=1.0)["member"]
        assert member["deflection_long_term"]["max"] == pytest.approx(2 * member["deflection"]["max"])


class TestResult:
    def test_it_is_json_of_finite_numbers_with_the_keys_of_the_contract(self) -> None:
        result = json.loads(json.dumps(run(BOX), allow_nan=False))
        assert {
            "format", "kind", "verdict", "utilisation", "governing", "section", "sections", "member", "joints",
            "pieces", "cautions", "missing", "not_checked", "steps", "values_used", "engine",
        } <= result.keys()  # fmt: skip
        assert (result["format"], result["kind"], result["engine"]) == ("bondwright/1", "member", ENGINE)
        assert {
            "area", "mass_per_length", "EA", "EI", "EI_lateral", "EI_product", "neutral_axis", "shear_centre", "GA",
            "GJ", "effective_EI",
        } <= result["section"].keys()  # fmt: skip
        assert {
            "id", "contact_length", "bonded_width", "first_moment", "shear_flow", "stress", "at", "combination",
            "split", "distribution", "limits", "strength_needed", "utilisation", "spacing_needed", "slip",
            "width_needed",
        } <= result["joints"][0].keys()  # fmt: skip
        assert {"id", "stress_top", "stress_bottom", "shear_stress", "limits", "utilisation"} <= result["pieces"][
            0
        ].keys()
        assert {"what", "resistance", "utilisation", "reductions"} <= result["joints"][0]["limits"][0].keys()
        for step in result["steps"]:
            assert {"title", "symbol", "formula", "substituted", "value", "unit", "source"} <= step.keys()
        for caution in result["cautions"]:
            assert caution.keys() == {"about", "text", "answer"}

    @pytest.mark.parametrize("limit", [..., 300])
    def test_the_governing_line_names_what_governs_where_and_in_which_combination(self, limit: object) -> None:
        result = run(BOX, member__deflection_limit=limit)
        used = {"deflection": max((each["utilisation"] for each in result["deflection_limits"]), default=0)}
        for part in (*result["joints"], *result["pieces"]):
            used |= {limit["what"]: limit["utilisation"] for limit in part["limits"]}
        worst = max(used, key=lambda what: used[what])
        assert result["utilisation"] == used[worst]
        assert worst in result["governing"]
        assert "\n" not in result["governing"]
        assert re.search(r"[\d.]+ mm from the left end, combination all", result["governing"])

    def test_what_a_member_check_leaves_to_others_is_always_listed(self) -> None:
        lists = [run(raw)["not_checked"] for raw in (STACK, BOX)]
        assert lists[0] == lists[1]
        for words in (
            "lateral buckling",
            "local buckling",
            "bearing",
            "introduction",
            "stiffeners",
            "vibration",
            "fire",
        ):
            assert any(words in line for line in lists[0])

    def test_service_conditions_left_out_are_a_caution_and_no_other_verdict(self) -> None:
        without, stated = run(STACK), run(STACK, service={"temperature": [-10, 40], "cure_temperature": 20})
        assert cautions(without, "movement")
        for key in ("verdict", "utilisation", "missing"):
            assert without[key] == stated[key]

    def test_the_working_can_be_left_out_without_moving_a_number(self) -> None:
        from server import checks, documents

        document = documents.read(BOX)
        with_steps, without = checks.run(document), checks.run(document, working=False)
        assert without.pop("steps") == []
        assert with_steps.pop("steps")
        assert without == with_steps
