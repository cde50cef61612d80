"""What must hold for any member: equilibrium, superposition, mirrors, units, similarity, split pieces, order."""

from __future__ import annotations

import copy
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from server import checks, documents
from tests.checks.made import STACK, changed
from tests.checks.oracle_compare import differences
from tests.checks.oracle_verdict import Verdict
from tests.checks.random_members import Raw, boxes, members, stacks

few = settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])
CLOSE = 1e-7


def run(raw: Raw) -> Raw:
    return checks.run(documents.read(raw))


def copied(raw: Raw) -> Raw:
    return copy.deepcopy(raw)


def loads_of(raw: Raw, combination: str) -> list[tuple[float, Raw]]:
    factors = raw["combinations"][combination]["factors"]
    return [(factor, load) for case, factor in factors.items() for load in raw["loads"][case]]


def alike(one: Any, other: Any, scale: float = 0.0) -> bool:
    return bool(one == pytest.approx(other, rel=CLOSE, abs=CLOSE * scale + 1e-12))


def extremes(result: Raw, quantity: str) -> tuple[float, float]:
    return result["member"][quantity]["max"], result["member"][quantity]["min"]


def numbers(result: Raw) -> Raw:
    """What must not move when only the way of saying things does: by joint and piece, however they are ordered."""
    joints, pieces = result["joints"], result["pieces"]
    return {
        **{f"flow {'/'.join(sorted(j['between']))}": j["shear_flow"] for j in joints},
        **{f"joint {'/'.join(sorted(j['between']))}": j["utilisation"] for j in joints},
        **{f"piece {p['id']}": p["utilisation"] for p in pieces},
        **{f"shear {p['id']}": p["shear_stress"] for p in pieces},
        **{f"{q} {i}": v for q in ("shear", "moment", "deflection") for i, v in enumerate(extremes(result, q))},
        "utilisation": result["utilisation"],
    }


def same(one: Raw, other: Raw) -> None:
    """Assert that two results agree, to the rounding of the largest number of each sort (the first word of its key)."""
    was, now = numbers(one), numbers(other)
    assert was.keys() == now.keys()
    largest: dict[str, float] = {}
    for key, value in was.items():
        sort = key.partition(" ")[0]
        largest[sort] = max(largest.get(sort, 0.0), abs(value))
    for key, value in was.items():
        size = largest[key.partition(" ")[0]]
        assert now[key] == pytest.approx(value, rel=CLOSE, abs=CLOSE * size + 1e-12), key


@few
@given(members())
def test_any_member_is_the_oracles(raw: Raw) -> None:
    assert differences(run(raw), Verdict(raw)) == []


@few
@given(members())
def test_reactions_hold_the_loads(raw: Raw) -> None:
    reactions = run(raw)["member"]["reactions"]
    for combination, held in reactions.items():
        force = moment = size = 0.0
        for factor, load in loads_of(raw, combination):
            if load["kind"] == "couple":
                moment -= factor * load["value"]
                size += abs(factor * load["value"])
            elif load["kind"] == "point":
                force += factor * load["value"]
                moment += factor * load["value"] * load["at"]
                size += abs(factor * load["value"]) * raw["member"]["length"]
            else:
                (first, last), a, b = load["value"], load["from"], load["to"]
                force += factor * (first + last) / 2 * (b - a)
                moment += factor * ((first + last) / 2 * (b - a) * a + (first + 2 * last) / 6 * (b - a) ** 2)
                size += abs(factor) * max(abs(first), abs(last)) * (b - a) * raw["member"]["length"]
        assert sum(r["force"] for r in held) == pytest.approx(force, rel=1e-9, abs=1e-9 * size / 1000 + 1e-9)
        turned = sum(r["force"] * r["at"] + r["couple"] for r in held)
        assert turned == pytest.approx(moment, rel=1e-9, abs=1e-9 * size + 1e-6)


@few
@given(members())
def test_combinations_superpose_their_cases(raw: Raw) -> None:
    raw = copied(raw)
    raw["combinations"] = {
        "one": {"factors": {"one": 1.0}}, "two": {"factors": {"two": 1.0}},
        "sum": {"factors": {"one": -0.5, "two": 1.7}},
    }  # fmt: skip
    held = run(raw)["member"]["reactions"]
    for one, two, both in zip(held["one"], held["two"], held["sum"], strict=True):
        for key, unit in (("force", 1e3), ("couple", 1e6)):
            assert both[key] == pytest.approx(-0.5 * one[key] + 1.7 * two[key], rel=1e-9, abs=1e-9 * unit)


@few
@given(members(), st.sampled_from([0.25, 3.0, -2.0]))
def test_everything_but_places_follows_the_size_of_the_loads(raw: Raw, k: float) -> None:
    scaled = copied(raw)
    for combination in scaled["combinations"].values():
        combination["factors"] = {case: factor * k for case, factor in combination["factors"].items()}
        combination.pop("sustained", None)
    plain = copied(raw)
    plain["combinations"]["long"].pop("sustained")
    one, other = run(plain), run(scaled)
    assert [j["shear_flow"] for j in other["joints"]] == pytest.approx(
        [abs(k) * j["shear_flow"] for j in one["joints"]]
    )
    for quantity in ("shear", "moment", "deflection"):
        high, low = extremes(one, quantity)
        found = (k * high, k * low) if k > 0 else (k * low, k * high)
        assert extremes(other, quantity) == pytest.approx(
            found, rel=CLOSE, abs=CLOSE * max(abs(high), abs(low)) + 1e-12
        )


@few
@given(members())
def test_seen_from_behind_left_is_right(raw: Raw) -> None:
    L = raw["member"]["length"]
    mirrored = copied(raw)
    for support in mirrored["member"]["supports"]:
        support["at"] = round(L - support["at"], 6)
    for load in (load for case in mirrored["loads"].values() for load in case):
        if load["kind"] == "line":
            load["from"], load["to"] = round(L - load["to"], 6), round(L - load["from"], 6)
            load["value"] = load["value"][::-1]
        else:
            load["at"] = round(L - load["at"], 6)
            load["value"] *= -1 if load["kind"] == "couple" else 1
    for piece in mirrored["section"]["pieces"].values():
        piece["at"][0] = 500 - piece["at"][0] - piece["width"]
    one, other = run(raw), run(mirrored)
    high, low = extremes(one, "shear")
    assert alike(extremes(other, "shear"), (-low, -high), max(abs(high), abs(low)))
    for block in (one["member"]["shear"], other["member"]["shear"]):
        block["max"] = block["min"] = 0.0
    same(one, other)


@few
@given(members())
def test_upside_down_under_opposite_loads_nothing_moves_but_signs(raw: Raw) -> None:
    flipped = copied(raw)
    for piece in flipped["section"]["pieces"].values():
        piece["at"][1] = 500 - piece["at"][1] - piece["depth"]
    for combination in flipped["combinations"].values():
        combination["factors"] = {case: -factor for case, factor in combination["factors"].items()}
        combination.pop("sustained", None)
    upright = copied(raw)
    upright["combinations"]["long"].pop("sustained")
    one, other = run(upright), run(flipped)
    for quantity in ("shear", "moment", "deflection"):
        high, low = extremes(one, quantity)
        assert alike(extremes(other, quantity), (-low, -high), max(abs(high), abs(low)))
        for result in (one, other):
            result["member"][quantity].update(max=0.0, min=0.0)
    same(one, other)


POUND = 0.45359237 * 9.80665  # N
US = {
    "length": ("in", 25.4), "force": ("lbf", POUND), "line": ("lbf/ft", POUND / 304.8),
    "couple": ("lbf*ft", POUND * 304.8), "stress": ("psi", POUND / 25.4**2),
    "density": ("lb/ft3", 0.45359237 / 0.3048**3), "stiffness": ("lbf/in", POUND / 25.4),
}  # fmt: skip


def typed_in_us(raw: Raw) -> Raw:
    """The same member as somebody would type it in inch-pound units."""

    def told(value: float, kind: str) -> str:
        unit, size = US[kind]
        return f"{value / size!r} {unit}"

    found = copied(raw)
    for material in found["materials"].values():
        material |= {"E": told(material["E"], "stress"), "G": told(material["G"], "stress")}
        material["density"] = told(material["density"], "density")
        material["strengths"] = {name: told(value, "stress") for name, value in material["strengths"].items()}
    found["adhesives"]["glue"]["shear_strength"] = told(5.0, "stress")
    for piece in found["section"]["pieces"].values():
        piece |= {"width": told(piece["width"], "length"), "depth": told(piece["depth"], "length")}
        piece["at"] = [told(each, "length") for each in piece["at"]]
    found["member"]["length"] = told(found["member"]["length"], "length")
    for support in found["member"]["supports"]:
        support["at"] = told(support["at"], "length")
        if "stiffness" in support:
            support["stiffness"] = told(support["stiffness"], "stiffness")
    for load in (load for case in found["loads"].values() for load in case):
        for key in {"at", "from", "to"} & load.keys():
            load[key] = told(load[key], "length")
        if load["kind"] == "line":
            load["value"] = [told(each, "line") for each in load["value"]]
        else:
            load["value"] = told(load["value"], {"point": "force", "couple": "couple"}[load["kind"]])
    found["display"] = "US"
    return found


@few
@given(members())
def test_typed_in_us_units_it_is_the_same_member(raw: Raw) -> None:
    same(run(raw), run(typed_in_us(raw)))


@few
@given(members(), st.sampled_from([0.5, 2.0, 2.54]))
def test_a_model_k_times_as_large_has_the_same_stresses(raw: Raw, k: float) -> None:
    """All lengths k, line loads k, forces k^2, couples k^3: stresses stay, deflections grow by k."""
    model = copied(raw)
    for piece in model["section"]["pieces"].values():
        piece |= {"width": piece["width"] * k, "depth": piece["depth"] * k, "at": [each * k for each in piece["at"]]}
    model["member"]["length"] *= k
    for support in model["member"]["supports"]:
        support["at"] *= k
        if "stiffness" in support:
            support["stiffness"] *= k
    for load in (load for case in model["loads"].values() for load in case):
        for key in {"at", "from", "to"} & load.keys():
            load[key] *= k
        if load["kind"] == "line":
            load["value"] = [each * k for each in load["value"]]
        else:
            load["value"] *= k**2 if load["kind"] == "point" else k**3
    one, other = run(raw), run(model)
    for quantity, power in (("shear", 2), ("moment", 3), ("deflection", 1)):
        for end in ("max", "min"):
            other["member"][quantity][end] /= k**power
    for joint in other["joints"]:
        joint["shear_flow"] /= k
    same(one, other)


@few
@given(members(stacks()), st.integers(0, 1), st.sampled_from([0.25, 0.5, 0.7]))
def test_splitting_a_piece_into_two_glued_ones_changes_nothing_else(raw: Raw, which: int, part: float) -> None:
    name = f"layer {which}"
    split = copied(raw)
    whole = split["section"]["pieces"].pop(name)
    lower, upper = copied(whole), copied(whole)
    lower["depth"] = whole["depth"] * part
    upper["depth"] = whole["depth"] - lower["depth"]
    upper["at"][1] = whole["at"][1] + lower["depth"]
    split["section"]["pieces"] |= {"lower half": lower, "upper half": upper}
    for joint in split["section"]["joints"]:
        last = joint["between"].index(name) if name in joint["between"] else -1
        if last >= 0:
            joint["between"][last] = "lower half" if last == 1 else "upper half"
    split["section"]["joints"].append({"between": ["lower half", "upper half"], "adhesive": "glue"})
    one, other = run(raw), run(split)
    for key in ("EA", "EI", "EI_lateral", "GA"):
        assert alike(other["section"][key], one["section"][key])
    flows = [j["shear_flow"] for j in other["joints"]]
    assert alike(flows[:-1], [j["shear_flow"] for j in one["joints"]], max(flows))
    assert flows[-1] >= 0
    for quantity in ("shear", "moment", "deflection", "deflection_long_term"):
        high, low = extremes(one, quantity)
        assert alike(extremes(other, quantity), (high, low), max(abs(high), abs(low)))
    before, after = ({p["id"]: p for p in result["pieces"]} for result in (one, other))
    halves = [after["lower half"], after["upper half"]]
    assert alike(max(p["shear_stress"] for p in halves), before[name]["shear_stress"])
    for other_name in before.keys() & after.keys():
        assert alike(after[other_name]["utilisation"], before[other_name]["utilisation"])


@few
@given(members(), st.randoms(use_true_random=False))
def test_the_order_of_pieces_joints_and_loads_does_not_matter(raw: Raw, chance: Any) -> None:
    def shuffled(items: Any) -> list[Any]:
        taken = list(items)
        chance.shuffle(taken)
        return taken

    other = copied(raw)
    other["section"]["pieces"] = dict(shuffled(raw["section"]["pieces"].items()))
    other["section"]["joints"] = shuffled(other["section"]["joints"])
    for joint in other["section"]["joints"]:
        joint["between"] = shuffled(joint["between"])
    other["member"]["supports"] = shuffled(other["member"]["supports"])
    other["loads"] = {case: shuffled(loads) for case, loads in shuffled(other["loads"].items())}
    other["combinations"] = dict(shuffled(other["combinations"].items()))
    same(run(raw), run(other))


@few
@given(members(boxes()), st.sampled_from([0.0, 90.0, 180.0, 270.0]))
def test_a_piece_turned_and_drawn_turned_back_is_the_same_piece(raw: Raw, turn: float) -> None:
    other = copied(raw)
    for piece in other["section"]["pieces"].values():
        piece["turn"] = turn
        if turn % 180:
            piece["width"], piece["depth"] = piece["depth"], piece["width"]
    same(run(raw), run(other))


def test_pieces_that_end_at_places_too_close_to_tell_apart_end_at_one():
    raw = changed(STACK, section__pieces__upper__from=1e-200, section__pieces__lower__to=3000 - 1e-9)
    assert checks.run(documents.read(raw))["utilisation"] == checks.run(documents.read(STACK))["utilisation"]
