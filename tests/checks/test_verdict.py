"""Pass, fail, not proven: each branch of the contract's verdict."""

from __future__ import annotations

import math

import pytest

from server.errors import DocumentError
from tests.checks.made import BOX, STACK, run

# q = V S / I b by hand: V = 1800 N, S = 100 x 50 x 25 = 125000 mm3, I = 100 x 100^3 / 12 mm4, b = 100 mm
STACK_STRESS = 1800 * 125000 / (100 * 100**3 / 12) / 100


def test_stack_stress_and_adhesive_utilisation_are_those_of_the_hand_calculation():
    result = run(STACK)
    (joint,) = result["joints"]
    assert joint["stress"] == pytest.approx(STACK_STRESS)
    assert joint["shear_flow"] == pytest.approx(STACK_STRESS * 100)
    assert joint["first_moment"] == pytest.approx(125000)
    assert joint["strength_needed"] == pytest.approx(STACK_STRESS * 2)
    assert joint["limits"][0]["utilisation"] == pytest.approx(STACK_STRESS / (4 / 2))
    assert result["verdict"] == "pass"
    assert result["section"]["GA"] == pytest.approx(5 / 6 * 625 * 100 * 100)


def test_width_needed_is_for_the_weakest_limit():
    (joint,) = run(STACK)["joints"]
    assert joint["width_needed"] == pytest.approx(100 * STACK_STRESS / (3 / 2))  # the wood, not the glue


def test_coverage_and_width_raise_the_stress():
    (joint,) = run(STACK, section__joints__0__coverage=0.8, section__joints__0__width=60)["joints"]
    assert joint["stress"] == pytest.approx(STACK_STRESS * 100 / 60 / 0.8)
    assert joint["bonded_width"] == 60
    assert joint["contact_length"] == pytest.approx(100)
    assert joint["width_needed"] == pytest.approx(100 * STACK_STRESS / (3 / 2) / 0.8)


def test_a_utilisation_over_one_fails_even_where_a_value_is_missing():
    result = run(STACK, loads__live__0__value=30, adhesives__glue__shear_strength=...)
    assert result["verdict"] == "fail"
    assert result["missing"]


def test_a_missing_adhesive_strength_is_not_proven_and_still_says_what_to_ask_for():
    result = run(STACK, adhesives__glue__shear_strength=...)
    assert result["verdict"] == "not proven"
    assert any("shear strength of adhesive 'glue'" in line for line in result["missing"])
    (joint,) = result["joints"]
    assert joint["strength_needed"] == pytest.approx(STACK_STRESS * 2)
    assert joint["width_needed"] is None


@pytest.mark.parametrize("status", ["indicative", "draft", "on hold", "withdrawn"])
@pytest.mark.parametrize("place", ["adhesives__glue", "materials__pine"])
def test_a_value_nobody_approved_never_passes(status, place):
    result = run(STACK, **{f"{place}__status": status})
    assert result["verdict"] == "not proven"
    assert any(status in line for line in result["missing"])


@pytest.mark.parametrize(("status", "caution"), [("approved", False), ("provisional", True), ("superseded", True)])
def test_provisional_and_superseded_values_pass_with_a_caution(status, caution):
    result = run(STACK, adhesives__glue__status=status)
    assert result["verdict"] == "pass"
    assert any(c["about"] == "value status" for c in result["cautions"]) is caution


def test_duration_factor_of_the_combination_is_used():
    combinations = {"lasting": {"factors": {"live": 1.0}, "duration": "long-term"}}
    (joint,) = run(STACK, combinations=combinations)["joints"]
    assert joint["limits"][0]["resistance"] == pytest.approx(4 * 0.6 / 2)
    assert joint["limits"][1]["resistance"] == pytest.approx(3 * 0.7 / 2)
    assert joint["strength_needed"] == pytest.approx(STACK_STRESS * 2 / 0.6)


def test_a_combination_without_duration_takes_one_whatever_tables_exist():
    (joint,) = run(STACK)["joints"]
    assert joint["limits"][0]["resistance"] == pytest.approx(2.0)


def test_a_table_that_lacks_the_duration_is_not_proven_by_name():
    combinations = {"gust": {"factors": {"live": 1.0}, "duration": "instantaneous"}}
    result = run(STACK, combinations=combinations)
    assert result["verdict"] == "not proven"
    assert any("'instantaneous'" in line and "'glue'" in line for line in result["missing"])


def test_no_table_at_all_takes_one_with_a_caution():
    combinations = {"gust": {"factors": {"live": 1.0}, "duration": "instantaneous"}}
    result = run(STACK, combinations=combinations, adhesives__glue__duration_factors=...,
                 materials__pine__duration_factors=...)  # fmt: skip
    assert result["verdict"] == "pass"
    assert sum(c["about"] == "load duration" for c in result["cautions"]) == 2


def test_the_worse_of_load_and_duration_governs():
    """A smaller load that lasts can govern over a larger one that does not."""
    combinations = {
        "short": {"factors": {"live": 1.0}, "duration": "short-term"},
        "long": {"factors": {"live": 0.8}, "duration": "long-term"},
    }
    (joint,) = run(STACK, combinations=combinations)["joints"]
    assert joint["combination"] == "short"  # of the largest flow
    adhesive = joint["limits"][0]
    assert adhesive["combination"] == "long"
    assert adhesive["utilisation"] == pytest.approx(0.8 * STACK_STRESS / (4 * 0.6 / 2))


def test_named_factors_multiply():
    (joint,) = run(STACK, adhesives__glue__factors={"heat": 0.8, "wet": 0.5})["joints"]
    assert joint["limits"][0]["resistance"] == pytest.approx(4 * 0.4 / 2)
    assert joint["strength_needed"] == pytest.approx(STACK_STRESS * 2 / 0.4)


def test_a_material_without_strengths_leaves_its_pieces_unjudged_but_not_the_bond():
    result = run(STACK, materials__pine__strengths=...)
    assert result["verdict"] == "not proven"
    assert [p["limits"] for p in result["pieces"]] == [[], []]
    assert any("shear strength of 'pine'" in line for line in result["missing"])
    assert any(c["about"] == "strength of pieces" for c in result["cautions"])


def test_layered_material_and_grain_across_are_judged_in_rolling_shear():
    layered = run(BOX)
    assert [limit["what"] for limit in layered["joints"][0]["limits"]] == [
        "adhesive resin", "shear in top", "rolling shear in left",
    ]  # fmt: skip
    across = run(STACK, section__pieces__upper__grain="across", materials__pine__strengths__rolling_shear=1.0)
    assert across["joints"][0]["limits"][2]["what"] == "rolling shear in upper"
    assert across["joints"][0]["limits"][2]["resistance"] == pytest.approx(0.5)


def test_limit_state_divides_by_the_partial_factor():
    basis = {"method": "limit-state", "partial_factor": {"adhesive": 1.5, "material": {"pine": 1.3}}}
    (joint,) = run(STACK, basis=basis)["joints"]
    assert joint["limits"][0]["resistance"] == pytest.approx(4 / 1.5)
    assert joint["limits"][1]["resistance"] == pytest.approx(3 / 1.3)


def test_limit_state_with_a_deflection_limit_and_no_combination_for_it_is_not_proven():
    basis = {"method": "limit-state", "partial_factor": 1.3}
    combinations = {"ULS": {"factors": {"live": 1.5}, "for": "strength"}}
    result = run(STACK, basis=basis, combinations=combinations, member__deflection_limit=200)
    assert result["verdict"] == "not proven"
    assert any("deflection" in line for line in result["missing"])
    assert result["member"]["deflection"] is None


def test_no_combination_for_strength_is_not_proven():
    result = run(STACK, combinations={"SLS": {"factors": {"live": 1.0}, "for": "deflection"}})
    assert result["verdict"] == "not proven"
    assert result["member"]["shear"] is None


@pytest.mark.parametrize(
    "changes",
    [
        {},
        {"analysis": {"slip": True}, "adhesives__glue__shear_modulus": 1.0, "adhesives__glue__thickness": 1.0},
        {"member__held_sideways": False, "loads__live__0__lateral": 0.1},
    ],
)
def test_a_deflection_within_its_limit_does_not_pass_joints_that_nothing_judged(changes):
    only = {"SLS": {"factors": {"live": 1.0}, "for": "deflection"}}
    result = run(STACK, combinations=only, member__deflection_limit=20, **changes)
    assert result["utilisation"] < 1
    assert result["verdict"] == "not proven"
    assert any(line.startswith("strength: no combination") for line in result["missing"])


def test_a_hinge_over_a_support_parts_two_simple_spans():
    length = STACK["member"]["length"]
    supports = [{"at": at, "kind": "pin"} for at in (0, length / 2, length)]
    result = run(STACK, member__supports=supports, member__hinges=[length / 2])
    weight = STACK["loads"]["live"][0]["value"]
    assert result["member"]["moment"]["max"] == pytest.approx(weight * (length / 2) ** 2 / 8)
    assert result["member"]["moment"]["min"] == pytest.approx(0, abs=1e-3)


def test_deflection_over_its_limit_fails_and_governs():
    result = run(STACK, member__deflection_limit=1000)
    (limit,) = result["deflection_limits"]
    EI, GA = 10000 * 100 * 100**3 / 12, 5 / 6 * 625 * 10000
    deflection = 5 * 1.2 * 3000**4 / (384 * EI) + 1.2 * 3000**2 / 8 / GA
    assert limit["deflection"] == pytest.approx(deflection)
    assert limit["utilisation"] == pytest.approx(deflection / 3)
    assert result["verdict"] == "fail"
    assert result["utilisation"] == limit["utilisation"]
    assert result["governing"].startswith("deflection")


def test_an_overhang_is_judged_on_twice_its_length():
    supports = [{"at": 0, "kind": "pin"}, {"at": 2000, "kind": "pin"}]
    result = run(STACK, member__supports=supports, member__deflection_limit=300)
    assert [(x["kind"], x["limit"]) for x in result["deflection_limits"]] == [
        ("span", pytest.approx(2000 / 300)),
        ("overhang", pytest.approx(2 * 1000 / 300)),
    ]


def test_a_support_one_rounding_short_of_the_end_leaves_no_overhang():
    at = math.nextafter(STACK["member"]["length"], 0)
    supports = [{"at": 1e-13, "kind": "pin"}, {"at": at, "kind": "spring", "stiffness": 500}]
    result = run(STACK, member__supports=supports, member__deflection_limit=100)
    assert [each["kind"] for each in result["deflection_limits"]] == ["span"]


def test_a_cantilever_is_judged_on_twice_its_length():
    result = run(STACK, member__supports=[{"at": 0, "kind": "fixed"}], member__deflection_limit=300)
    (limit,) = result["deflection_limits"]
    assert limit["limit"] == pytest.approx(2 * 3000 / 300)


def test_lasting_load_deflects_on_softened_stiffness():
    """EN 1995-1-1:2004 2.2.3(5): u_fin = u (psi_0 + psi_2 k_def) for a load with factor psi_0 and share psi_2."""
    combinations = {"SLS": {"factors": {"live": 0.7}, "sustained": {"live": 0.3}}}
    result = run(STACK, combinations=combinations, materials__pine__creep=0.8, member__deflection_limit=100)
    short, long = result["member"]["deflection"]["max"], result["member"]["deflection_long_term"]["max"]
    assert long / short == pytest.approx((0.7 + 0.3 * 0.8) / 0.7)
    assert [x["long_term"] for x in result["deflection_limits"]] == [False, True]


def test_box_webs_and_flanges_share_by_symmetry():
    joints = run(BOX)["joints"]
    assert {j["split"] for j in joints} == {"symmetry"}
    # 14.6 kN x 1.14345e10 N mm / 4.69665e12 N mm2, halved (two webs); demo of the box beam worked by hand
    assert [j["shear_flow"] for j in joints] == pytest.approx([17.7726] * 4, rel=1e-5)


def test_one_soft_web_without_the_field_is_not_proven_with_the_reason():
    result = run(BOX, materials__soft={"E": 3000, "G": 300, "strengths": {"bending": 30, "shear": 9}},
                 section__pieces__right__material="soft", analysis={"field": "never"})  # fmt: skip
    assert result["verdict"] == "not proven"
    assert all(j["shear_flow"] is None for j in result["joints"])
    assert any("ring" in line for line in result["missing"])


def test_bending_governs_by_fibre_and_mean():
    result = run(STACK)
    lower, upper = result["pieces"]
    M, Z = 1.2 * 3000**2 / 8, 100 * 100**2 / 6
    assert lower["stress_bottom"] == pytest.approx(M / Z)
    assert lower["stress_top"] == pytest.approx(0, abs=1e-9)
    assert upper["stress_top"] == pytest.approx(-M / Z)
    limits = {limit["what"]: limit for limit in lower["limits"]}
    assert limits["bending in lower"]["utilisation"] == pytest.approx(M / Z / 10)
    assert limits["tension in lower"]["utilisation"] == pytest.approx(M / Z / 2 / 6)
    assert limits["shear in lower"]["demand"] == pytest.approx(1.5 * 1800 / 10000)
    assert "compression in lower" not in limits


def test_extreme_fibre_is_judged_by_tension_and_compression_where_bending_is_not_given():
    result = run(STACK, materials__pine__strengths__bending=...)
    M, Z = 1.2 * 3000**2 / 8, 100 * 100**2 / 6
    lower, upper = ({limit["what"]: limit["utilisation"] for limit in p["limits"]} for p in result["pieces"])
    assert lower["tension in lower"] == pytest.approx(M / Z / 6)
    assert upper["compression in upper"] == pytest.approx(M / Z / 9)


def test_rounding_at_a_free_end_asks_for_no_strength():
    # by statics: a cantilever's top is never pressed and its bottom never pulled
    result = run(
        STACK,
        materials={
            "pine": {"E": 11000, "strengths": {"compression": 90, "shear": 9}},
            "strap": {"E": 11000, "strengths": {"tension": 90, "shear": 9}},
        },
        section__pieces__upper__material="strap",
        member={"length": 100, "supports": [{"at": 0, "kind": "fixed"}]},
        loads__live=[{"kind": "line", "from": 0, "to": 100, "value": 2.2417}],
    )
    assert result["verdict"] == "pass", result["missing"]


def test_a_bond_whose_piece_stops_short_is_judged_along_it_and_not_proven_at_its_end():
    strip = {"shape": "rectangle", "width": 80, "depth": 8, "at": [10, -8], "material": "pine", "from": 250, "to": 2750}
    joints = [*STACK["section"]["joints"], {"between": ["strip", "lower"], "adhesive": "glue"}]
    result = run(STACK, section__pieces__strip=strip, loads__live__0__value=0.5, section__joints=joints)
    assert result["verdict"] == "not proven"
    assert any("shear_modulus of adhesive 'glue' (start of strip, 250 mm" in line for line in result["missing"])
    strip_joint = result["joints"][1]
    assert strip_joint["at"] == pytest.approx(250)
    assert len(result["sections"]) == 3
    V = 0.5 * (1500 - 250)
    outside = result["sections"][1]
    assert strip_joint["shear_flow"] == pytest.approx(
        V * 10000 * 640 * (outside["neutral_axis"][1] + 4) / outside["EI"]
    )


FASTENED = {
    "section__joints": [{"between": ["lower", "upper"], "fastener": "screw", "spacing": 100, "rows": 2}],
    "fasteners": {"screw": {"shear_resistance": 2400}},
}


def test_fasteners_alone_have_flow_and_spacing_but_leave_the_rest_unproven():
    result = run(STACK, **FASTENED, member__deflection_limit=300)
    (joint,) = result["joints"]
    flow = STACK_STRESS * 100
    assert joint["shear_flow"] == pytest.approx(flow)
    assert joint["spacing_needed"] == pytest.approx(2 * 1200 / flow)
    assert joint["limits"][0]["demand"] == pytest.approx(flow * 100 / 2)
    assert joint["utilisation"] == pytest.approx(flow * 100 / 2 / 1200)
    assert result["verdict"] == "fail"
    relaxed = run(STACK, **FASTENED, member__deflection_limit=300, loads__live__0__value=0.1)
    assert relaxed["verdict"] == "not proven"
    assert relaxed["deflection_limits"] == []
    assert all(p["limits"] == [] for p in relaxed["pieces"])


def test_spacing_zones_are_judged_each_with_its_own_flow():
    zones = [{"from": 0, "to": 600, "spacing": 50}, {"from": 600, "to": 2400, "spacing": 120},
             {"from": 2400, "to": 3000, "spacing": 50}]  # fmt: skip
    fastened = {**FASTENED, "section__joints": [{"between": ["lower", "upper"], "fastener": "screw", "spacing": zones}]}
    (joint,) = run(STACK, **fastened)["joints"]
    rate = STACK_STRESS * 100 / 1800  # flow per newton of shear
    ends, middle = 1800 * rate * 50, (1800 - 1.2 * 600) * rate * 120
    assert joint["limits"][0]["demand"] == pytest.approx(max(ends, middle))
    assert joint["limits"][0]["at"] == pytest.approx(600)


def test_spacing_below_the_least_is_not_proven():
    result = run(STACK, **FASTENED, fasteners__screw__spacing_min=150, loads__live__0__value=0.1)
    assert any("100 mm" in line and "150 mm" in line for line in result["missing"])


@pytest.mark.parametrize(
    ("changes", "path", "words"),
    [
        ({"section__pieces__upper__at": [0, 49]}, "section.pieces.lower", "overlap"),
        ({"section__pieces__upper__at": [0, 51]}, "section.joints[0].between", "do not touch"),
        ({"section__joints": []}, "section.pieces.upper", "tied to nothing"),
        ({"section__joints__0__width": 120}, "section.joints[0].width", "100 mm"),
        ({"section__joints__0__segment": 2}, "section.joints[0].segment", "segment 2"),
        ({"member__supports": [{"at": 0, "kind": "pin"}]}, "member.supports", "turn"),
        ({"member__hinges": [1500]}, "member.hinges", "hinge"),
        ({"section__pieces__upper__to": 2000, "section__pieces__lower__to": 2500}, "section.pieces", "No piece"),
    ],
)  # fmt: skip
def test_impossible_geometry_is_refused_by_name(changes, path, words):
    with pytest.raises(DocumentError) as caught:
        run(STACK, **changes)
    assert any(fault.path.startswith(path) and words in fault.message for fault in caught.value.faults)
