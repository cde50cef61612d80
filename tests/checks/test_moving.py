"""Moving axles in member checks: against the same check with the axles standing still at many places."""

from __future__ import annotations

import copy
import json
from typing import Any

import numpy as np
import pytest

from server import checks, documents, sheets
from server.errors import DocumentError

LENGTH = 6000.0
CART: dict[str, Any] = {"kind": "moving", "axles": [[0, 3000], [1100, 5000]], "from": 0, "to": LENGTH}
RAIL: dict[str, Any] = {
    "format": "bondwright/1",
    "kind": "member",
    "basis": {"method": "allowable", "safety_factor": {"adhesive": 3, "fastener": 2.5, "material": 2.5}},
    "materials": {
        "deal": {"E": 11000, "G": 690, "density": 420, "creep": 0.6, "strengths": {"bending": 24, "shear": 4}},
        "oak": {"E": 14000, "G": 800, "density": 700, "creep": 0.6, "strengths": {"bending": 30, "shear": 5}},
    },
    "adhesives": {"glue": {"shear_strength": 6}},
    "fasteners": {"screw": {"shear_resistance": 4000, "slip_modulus": 1500}},
    "section": {
        "pieces": {
            "lower": {"shape": "rectangle", "width": 120, "depth": 90, "at": [0, 0], "material": "oak"},
            "upper": {"shape": "rectangle", "width": 120, "depth": 110, "at": [0, 90], "material": "deal"},
        },
        "joints": [{"between": ["lower", "upper"], "adhesive": "glue"}],
    },
    "member": {
        "length": LENGTH,
        "supports": [
            {"at": 0, "kind": "pin"},
            {"at": 3600, "kind": "pin"},
            {"at": 5400, "kind": "spring", "stiffness": 900},
        ],
        "deflection_limit": 300,
    },
    "loads": {"dead": [{"kind": "self-weight"}, {"kind": "point", "at": 1000, "value": 800}], "cart": [CART]},
    "combinations": {
        "use": {"factors": {"dead": 1.0, "cart": 1.2}, "sustained": {"dead": 1.0, "cart": 0.3}},
        "bare": {"factors": {"dead": 1.3}},
    },
}


def run(document: dict[str, Any]) -> dict[str, Any]:
    found = checks.run(documents.read(document))
    json.dumps(found, allow_nan=False)
    return found


def changed(**parts: Any) -> dict[str, Any]:
    made = copy.deepcopy(RAIL)
    for name, part in parts.items():
        made[name] = made[name] | part if isinstance(part, dict) and name != "loads" else part
    return made


def places(train: dict[str, Any], steps: int) -> list[list[dict[str, Any]]]:
    """The axles as point loads, at many positions in both directions."""
    low, high = train.get("from", 0.0), train.get("to", LENGTH)
    found = []
    for side in (1, -1):
        axles = [(side * offset, force) for offset, force in train["axles"]]
        first, last = low - max(o for o, _ in axles), high - min(o for o, _ in axles)
        ends = [end - o + d for end in (low, high) for o, _ in axles for d in (-1e-3, 0.0, 1e-3)]
        for u in np.sort([*np.linspace(first, last, steps), *(e for e in ends if first <= e <= last)]):
            on = [{"kind": "point", "at": float(u + o), "value": f} for o, f in axles if low <= u + o <= high]
            if on:
                found.append(on)
    return found


BATCH = 90


def standing(document: dict[str, Any], steps: int) -> list[dict[str, Any]]:
    """Results with every position of the one moving load as a case and a combination of its own, in batches."""
    cases = places(document["loads"]["cart"][0], steps)
    return [_batch(document, cases[first : first + BATCH]) for first in range(0, len(cases), BATCH)]


def _batch(document: dict[str, Any], cases: list[list[dict[str, Any]]]) -> dict[str, Any]:
    made = copy.deepcopy(document)
    del made["loads"]["cart"]
    combinations = {name: c for name, c in made["combinations"].items() if "cart" not in c["factors"]}
    moving = {name: c for name, c in made["combinations"].items() if "cart" in c["factors"]}
    for number, loads in enumerate(cases):
        made["loads"][f"p{number}"] = loads
        for name, c in moving.items():
            held = copy.deepcopy(c)
            held["factors"][f"p{number}"] = held["factors"].pop("cart")
            if "cart" in held.get("sustained", {}):
                held["sustained"][f"p{number}"] = held["sustained"].pop("cart")
            combinations[f"{name} {number}"] = held
    made["combinations"] = combinations
    return checks.run(documents.read(made), working=False)


def within(mine: float, worst: float, size: float, miss: float) -> bool:
    """At least as bad as the worst position stepped on, and worse by no more than a step may miss."""
    return worst - 1e-5 * size <= mine <= worst + miss * size


def compare(
    document: dict[str, Any], miss: float = 0.02, steps: int = 75
) -> tuple[dict[str, Any], list[dict[str, Any]]]:
    """Run both and hold every number of the one against the worst of the other."""
    found, still = run(document), standing(document, steps)
    for name in ("shear", "moment", "deflection", "deflection_long_term"):
        mine = found["member"][name]
        most, least = (pick(s["member"][name][end] for s in still) for pick, end in ((max, "max"), (min, "min")))
        size = max(abs(most), abs(least))
        assert within(mine["max"], most, size, miss), name
        assert within(-mine["min"], -least, size, miss), name
    for group, key in (("joints", "shear_flow"), ("joints", "utilisation"), ("pieces", "utilisation")):
        for number, part in enumerate(found[group]):
            worst = max(s[group][number][key] for s in still)
            assert within(part[key], worst, worst, miss), (group, key)
    assert within(found["utilisation"], max(s["utilisation"] for s in still), 1.0, miss)
    return found, still


SPANS = {
    "two spans and an overhang": {},
    "one span": {"supports": [{"at": 0, "kind": "pin"}, {"at": LENGTH, "kind": "pin"}]},
    "fixed, with a hinge": {
        "supports": [{"at": 0, "kind": "fixed"}, {"at": 4000, "kind": "pin"}, {"at": LENGTH, "kind": "pin"}],
        "hinges": [2500],
    },
    "a cantilever": {"supports": [{"at": 0, "kind": "fixed"}]},
}


@pytest.mark.parametrize("spans", SPANS)
def test_every_extreme_is_that_of_the_worst_of_many_positions(spans):
    document = changed(member=SPANS[spans])
    found, still = compare(document)
    reactions = found["member"]["reactions"]
    for index, support in enumerate(reactions["use"]):
        rows = [r[index] for s in still for name, r in s["member"]["reactions"].items() if name.startswith("use")]
        for key, most, least in (("force", "max", "min"), ("couple", "couple_max", "couple_min")):
            values = [row[key] for row in rows]
            size = max(1e-6, *(abs(each) for each in values))
            assert within(support[most], max(values), size, 0.02)
            assert within(-support[least], -min(values), size, 0.02)
    assert set(reactions["bare"][0]) == {"at", "force", "couple"}


def test_an_axle_over_a_support_is_carried_by_it_whole():
    # by statics: both axles of 10 and 5 kN, 1 m apart, the heavy one over the support of a 3 m span
    supports = [{"at": 0, "kind": "pin"}, {"at": 3000, "kind": "pin"}]
    train = [{"kind": "moving", "axles": [[0, 10000], [1000, 5000]]}]
    document = changed(member={"length": 3000, "supports": supports, "hinges": []}, loads={"cart": train})
    del document["combinations"]
    member = run(document)["member"]
    for support in member["reactions"]["all"]:
        assert support["max"] == pytest.approx(10000 + 5000 * 2 / 3, rel=1e-9)
        assert support["min"] == pytest.approx(0, abs=1e-6)
    assert member["shear"]["max"] == pytest.approx(10000 + 5000 * 2 / 3, rel=1e-7)


def test_axles_off_their_stretch_carry_nothing():
    part = CART | {"from": 1500, "to": 3000, "axles": [[0, 3000], [4000, 5000]]}
    document = changed(loads=RAIL["loads"] | {"cart": [part]})
    found, _ = compare(document)
    wide = run(RAIL | {"loads": RAIL["loads"] | {"cart": [CART | {"axles": part["axles"]}]}})
    assert found["member"]["moment"]["max"] < wide["member"]["moment"]["max"]


def test_pieces_that_stop_short_have_their_own_extremes():
    document = copy.deepcopy(RAIL)
    document["section"]["pieces"]["plate"] = {
        "shape": "rectangle", "width": 120, "depth": 20, "at": [0, 200], "material": "oak", "from": 1000, "to": 3000,
    }  # fmt: skip
    document["section"]["joints"].append({"between": ["upper", "plate"], "adhesive": "glue"})
    found, _ = compare(document)
    assert [s["from"] for s in found["sections"]] == [0, 1000, 3000]


def test_spacing_zones_are_judged_at_their_own_worst_positions():
    document = copy.deepcopy(RAIL)
    zones = [(0, 700, 60), (700, 2900, 110), (2900, LENGTH, 60)]
    document["section"]["joints"] = [
        {
            "between": ["lower", "upper"],
            "fastener": "screw",
            "rows": 2,
            "spacing": [{"from": a, "to": b, "spacing": s} for a, b, s in zones],
        }
    ]
    found, still = run(document), standing(document, 75)
    worst = max(s["joints"][0]["utilisation"] for s in still)
    assert within(found["joints"][0]["utilisation"], worst, worst, 0.03)


def test_joints_that_slip_find_their_own_worst_position():
    document = copy.deepcopy(RAIL)
    document["section"]["joints"] = [{"between": ["lower", "upper"], "fastener": "screw", "rows": 2, "spacing": 100}]
    document["analysis"] = {"slip": True}
    found, still = run(document), standing(document, 75)
    worst = max(s["joints"][0]["shear_flow"] for s in still)
    assert worst * (1 - 1e-3) <= found["joints"][0]["shear_flow"] <= worst * 1.01
    for name in ("deflection", "moment"):
        worst = max(s["member"][name]["max"] for s in still)
        assert worst * (1 - 1e-3) <= found["member"][name]["max"] <= worst * 1.01


def test_an_impact_factor_of_the_case_scales_what_moves():
    one = run(changed(combinations={"use": {"factors": {"cart": 1.0}}, "bare": {"factors": {"dead": 0.0}}}))
    two = run(changed(combinations={"use": {"factors": {"cart": 1.5}}, "bare": {"factors": {"dead": 0.0}}}))
    for name in ("shear", "moment", "deflection"):
        assert two["member"][name]["max"] == pytest.approx(1.5 * one["member"][name]["max"], rel=1e-5)


def test_two_carts_that_travel_apart_are_worse_than_either():
    both = changed(loads=RAIL["loads"] | {"other": [CART | {"axles": [[0, 4000]]}]})
    both["combinations"] = {"use": {"factors": {"cart": 1.0, "other": 1.0}}}
    alone = [copy.deepcopy(both) for _ in range(2)]
    for document, case in zip(alone, ("cart", "other"), strict=True):
        document["combinations"] = {"use": {"factors": {case: 1.0}}}
    high = [run(document)["member"]["moment"]["max"] for document in alone]
    assert max(high) < run(both)["member"]["moment"]["max"] <= sum(high) * (1 + 1e-6)


def test_the_working_names_the_places_of_the_axles_and_reaches_the_number():
    found = run(RAIL)
    steps = [step for step in found["steps"] if "axles at" in step["title"]]
    assert {step["symbol"] for step in steps} >= {"V", "M"}
    sagging = next(step for step in steps if step["title"].startswith("Greatest sagging"))
    assert sagging["value"] == pytest.approx(found["member"]["moment"]["max"], rel=1e-6)
    assert any(each["about"] == "moving loads" for each in found["cautions"])


def test_the_diagram_shows_the_envelope_and_not_one_position():
    found = run(RAIL)
    drawn, member = found["diagrams"], found["member"]
    for name in ("shear", "moment", "deflection"):
        assert max(drawn[name]["max"]) == pytest.approx(member[name]["max"], rel=2e-3)
        assert min(drawn[name]["min"]) == pytest.approx(member[name]["min"], rel=2e-3)
    # Under a cart that may stand anywhere, the greatest moment away from the supports is positive everywhere.
    inside = [m for x, m in zip(drawn["at"], drawn["moment"]["max"], strict=True) if 200 < x < 3000]
    assert min(inside) > 0


def test_the_sheet_says_what_moves_where():
    text = sheets.terminal(run(RAIL))
    assert "moving loads" in text
    assert " to " in text.split("REACTIONS")[1].split("Shear, greatest")[0]
    svg = sheets.loads_svg(run(RAIL))
    assert "1.1 m apart, moving over 0 to 6 m" in svg
    (group,) = [g for g in sheets.given(RAIL, {}, "SI") if g.title == "Loads"]
    assert any("moving axles" in row.typed for row in group.rows)


@pytest.mark.parametrize(
    ("load", "path", "words"),
    [
        ({"axles": []}, "loads.cart[0].axles", "at least 1"),
        ({"axles": [[0, 0]]}, "loads.cart[0].axles", "weighs nothing"),
        ({"axles": [[0, "3 m"]]}, "loads.cart[0].axles[0][1]", "a force"),
        ({"from": 4000, "to": 3000}, "loads.cart[0].to", "not to the right"),
        ({"to": 9000}, "loads.cart[0].to", "beyond the end"),
        ({"speed": 3}, "loads.cart[0].speed", "not a name of the contract"),
    ],
)
def test_what_is_wrong_with_axles_is_named(load, path, words):
    with pytest.raises(DocumentError) as caught:
        run(changed(loads=RAIL["loads"] | {"cart": [CART | load]}))
    said = {fault.path: fault.message for fault in caught.value.faults}
    assert words in said[path]


def test_without_ends_the_axles_run_over_the_whole_member():
    bare = {"kind": "moving", "axles": CART["axles"]}
    assert run(changed(loads=RAIL["loads"] | {"cart": [bare]}))["member"] == run(RAIL)["member"]


@pytest.mark.parametrize("before", [[], ["dead"]], ids=["all shared", "dead load before bonding"])
def test_the_ends_of_bonds_inside_the_member_find_their_worst_position(before):
    document = copy.deepcopy(RAIL)
    if before:
        document["analysis"] = {"before_bonding": before}
    document["adhesives"]["glue"] |= {
        "shear_modulus": 300,
        "E": 800,
        "thickness": 0.5,
        "shear_yield": 8,
        "peel_strength": 4,
    }
    document["section"]["pieces"]["plate"] = {
        "shape": "rectangle", "width": 120, "depth": 20, "at": [0, 200], "material": "oak", "from": 1000, "to": 3000,
    }  # fmt: skip
    document["section"]["joints"].append({"between": ["upper", "plate"], "adhesive": "glue"})
    found, still = run(document), standing(document, 75)
    assert found["ends"]
    for number, end in enumerate(found["ends"]):
        for key in ("end_shear", "end_peel"):
            if isinstance(end.get(key), int | float):
                worst = max(abs(s["ends"][number][key]) for s in still)
                assert worst * (1 - 2e-3) <= abs(end[key]) <= worst * (1 + 2e-2), (number, key)
    if before:  # axles that pass before the glue has set leave nothing to the bonds
        passed = run(document | {"analysis": {"before_bonding": ["cart", "dead"]}})
        assert all(abs(end["end_shear"]) < 1e-9 for end in passed["ends"])
        assert any("pieces and deflection with load before bonding" in text for text in found["missing"])
