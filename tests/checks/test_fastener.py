"""Kind "fastener": what follows from what, what is refused, and that nonsense never gets through."""

from __future__ import annotations

import copy
import json
import math
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server import checks, documents
from server.errors import DocumentError

NAIL: dict[str, Any] = {
    "format": "bondwright/1",
    "kind": "fastener",
    "method": "EN 1995-1-1",
    "fastener": {"type": "nail", "diameter": 3.1, "ultimate": 600},
    "side": {"thickness": 45, "density": 350},
    "main": {"thickness": 35, "density": 350},
}
BOLT = NAIL | {
    "fastener": {"type": "bolt", "diameter": 12, "ultimate": 400},
    "side": {"thickness": 60, "density": 350},
    "main": {"thickness": 90, "density": 350},
}
RIVET = NAIL | {
    "method": "thin metal",
    "fastener": {"type": "rivet", "diameter": 4.8, "tested": "1.6 kN"},
    "side": {"thickness": 1.5, "kind": "steel", "ultimate": 360},
    "main": {"thickness": 1.5, "kind": "steel", "ultimate": 360},
}


def changed(document: dict[str, Any], **values: Any) -> dict[str, Any]:
    """``changed(NAIL, side_density=420)``: the part, then its field; None takes it away."""
    made = copy.deepcopy(document)
    for path, value in values.items():
        part, _, name = path.partition("__")
        place = made[part] if name else made
        if value is None:
            place.pop(name or part)
        else:
            place[name or part] = value
    return made


def run(document: dict[str, Any]) -> dict[str, Any]:
    return checks.run(documents.read(document))


def faults(document: dict[str, Any]) -> dict[str, str]:
    with pytest.raises(DocumentError) as caught:
        run(document)
    return {fault.path: fault.message for fault in caught.value.faults}


def said(result: dict[str, Any]) -> str:
    return "\n".join([*result["missing"], *(f"{each['about']}: {each['text']}" for each in result["cautions"])])


def test_the_result_has_what_the_contract_names_and_is_plain_json():
    found = run(NAIL)
    assert {"modes", "governing_mode", "shear_resistance", "slip_modulus", "spacing_min", "steps"} <= set(found)
    assert json.loads(json.dumps(found, allow_nan=False)) == found
    assert found["verdict"] == "pass"
    assert found["modes"][found["governing_mode"]] == found["shear_resistance"]


def test_without_steps_the_numbers_are_the_same():
    quick = checks.run(documents.read(NAIL), working=False)
    assert quick["steps"] == []
    assert quick["modes"] == run(NAIL)["modes"]


@pytest.mark.parametrize(
    ("sort", "shape", "limit"),
    [
        ("nail", "round", 0.15),
        ("nail", "square", 0.25),
        ("nail", "grooved", 0.25),
        ("nail", "other", 0.5),
        ("screw", "round", 1.0),
    ],
)
def test_the_rope_effect_stops_at_its_share(sort, shape, limit):
    """EN 1995-1-1 8.2.2(2): a quarter of the withdrawal resistance, at most a share of the yielding part."""
    base = run(changed(NAIL, fastener__type=sort, fastener__shape=shape))
    some = run(changed(NAIL, fastener__type=sort, fastener__shape=shape, fastener__withdrawal=200))
    much = run(changed(NAIL, fastener__type=sort, fastener__shape=shape, fastener__withdrawal="900 kN"))
    for mode, load in base["modes"].items():
        bends = mode in "cdef"
        assert some["modes"][mode] == pytest.approx(load + (min(50, limit * load) if bends else 0))
        assert much["modes"][mode] == pytest.approx(load * (1 + limit if bends else 1))


def test_a_bolt_gains_a_quarter_and_a_dowel_nothing():
    bolt, dowel = (changed(BOLT, fastener__type=sort, fastener__withdrawal="900 kN") for sort in ("bolt", "dowel"))
    assert run(bolt)["modes"]["f"] == pytest.approx(1.25 * run(BOLT)["modes"]["f"])
    assert run(dowel)["modes"] == run(BOLT)["modes"]


@pytest.mark.parametrize("planes", [1, 2])
@pytest.mark.parametrize("metal", ["side", "main"])
def test_a_plate_between_thin_and_thick_lies_between_their_resistances(planes, metal):
    """EN 1995-1-1 8.2.3(1): linear from half a diameter to a full one."""
    wood = "main" if metal == "side" else "side"

    def of(thickness: float) -> dict[str, Any]:
        plate = {"thickness": thickness, "kind": "steel"}
        return run(changed(BOLT, **{metal: plate, wood: {"thickness": 70, "density": 350}, "shear_planes": planes}))

    if metal == "main" and planes == 2:
        assert [*of(3)["modes"]] == ["f", "g", "h"]
        assert of(3)["modes"] == of(20)["modes"]
        return
    thin, middle, thick = of(6), of(9), of(12)
    names = ("jk", "lm") if planes == 2 else ("ab", "cde")
    assert ["".join(each["modes"]) for each in (thin, thick)] == [*names]
    assert "".join(middle["modes"]) == names[0] + names[1]
    mean = (thin["shear_resistance"] + thick["shear_resistance"]) / 2
    assert middle["shear_resistance"] == pytest.approx(mean)
    assert middle["interpolated"]["share"] == 0.5
    assert of(2)["shear_resistance"] == thin["shear_resistance"]
    assert of(40)["shear_resistance"] == thick["shear_resistance"]


def test_a_plate_doubles_the_slip_modulus():
    """EN 1995-1-1 7.1(3)."""
    plate = changed(BOLT, side={"thickness": 10, "kind": "steel"})
    assert run(plate)["slip_modulus"] == pytest.approx(2 * run(BOLT)["slip_modulus"])


def test_the_mean_density_serves_the_slip_alone():
    given_mean, without = run(changed(NAIL, side__density_mean=420, main__density_mean=420)), run(NAIL)
    assert given_mean["slip_modulus"] == pytest.approx(without["slip_modulus"])
    assert given_mean["modes"] == without["modes"]
    assert "1.2 times the characteristic" in said(without)
    assert "1.2 times the characteristic" not in said(given_mean)


def test_a_screw_yields_at_eleven_tenths_of_its_core():
    screw = changed(NAIL, fastener__type="screw", fastener__diameter=8, fastener__root_diameter=5)
    assert run(screw)["diameter_effective"] == pytest.approx(5.5)
    assert "root_diameter" in said(run(changed(NAIL, fastener__type="screw")))


def test_bending_yield_and_yield_moment_overrule_the_tensile_strength():
    by_stress = run(changed(NAIL, fastener__bending_yield=690))
    assert by_stress["yield_moment"] == pytest.approx(690 * 3.1**3 / 6)
    assert run(changed(NAIL, fastener__yield_moment="4 N*m"))["yield_moment"] == pytest.approx(4000)
    assert "yield_moment" in faults(changed(NAIL, fastener__bending_yield="4 N*m"))["fastener.bending_yield"]


@pytest.mark.parametrize(
    ("values", "words"),
    [
        ({"side__density": 520}, "pre-drilling of the side member: its density is 520"),
        ({"fastener__diameter": 6.5}, "nails above 6 mm"),
        ({"side__thickness": 20}, "thinner than 21.7 mm"),
        ({"side__thickness": 40, "side__splits": True}, "thinner than 43.4 mm"),
        ({"main__thickness": 23}, "less than 8 d = 24.8 mm"),
    ],
)
def test_what_the_code_asks_of_nails_is_not_passed_over(values, words):
    """EN 1995-1-1 8.3.1.1(2), eq. (8.18), (8.19); 8.3.1.2(1)."""
    found = run(changed(NAIL, **values))
    assert found["verdict"] == "not proven"
    assert words in said(found)
    assert found["shear_resistance"] > 0
    bored = run(changed(NAIL, **values, predrilled=True))
    assert ("pre-drilling" in said(bored)) is False


def test_sizes_beyond_the_methods_are_not_proven():
    assert "above 30 mm" in said(run(changed(BOLT, fastener__diameter=36)))
    assert "dowels up to 6 mm" in said(run(changed(BOLT, fastener__type="dowel", fastener__diameter=6)))
    wood = {"thickness": 60, "specific_gravity": 0.5}
    assert "above 1 in" in said(run(changed(BOLT, method="yield-limit", side=wood, main=wood, fastener__diameter=30)))


def test_the_length_says_how_far_a_nail_reaches():
    assert run(changed(NAIL, fastener__length=80))["penetration"] == pytest.approx(35)
    assert run(changed(NAIL, fastener__length=75))["penetration"] == pytest.approx(30)
    assert "does not reach into the main member" in faults(changed(NAIL, fastener__length=45))["fastener.length"]
    two = changed(NAIL, shear_planes=2, fastener__length=75)
    assert "second outer member" in faults(two)["fastener.length"]


def test_an_american_nail_that_stands_in_wood_by_less_than_ten_diameters_loses_half_its_tip():
    wood = {"thickness": "3.5 in", "specific_gravity": 0.5}
    nail = {"type": "nail", "diameter": "0.162 in", "bending_yield": "90 ksi", "length": "3 in"}
    shallow = run(
        NAIL | {"method": "yield-limit", "fastener": nail, "side": wood | {"thickness": "1.5 in"}, "main": wood}
    )
    assert shallow["penetration"] == pytest.approx(25.4 * (1.5 - 0.162))
    nail = nail | {"length": "2.4 in"}
    little = run(
        NAIL | {"method": "yield-limit", "fastener": nail, "side": wood | {"thickness": "1.5 in"}, "main": wood}
    )
    assert "less than 6 D" in said(little)


def test_adjustments_multiply_the_reference_value():
    wood = {"thickness": 40, "specific_gravity": 0.5}
    document = changed(NAIL, method="yield-limit", side=wood, main=wood, adjustments={"duration": 1.6, "wet": 0.7})
    found = run(document)
    assert found["adjusted"] == pytest.approx(1.12 * found["shear_resistance"])
    assert found["reference"] == found["shear_resistance"]
    assert "known: 'duration'" in faults(changed(document, adjustments={"wind": 1.6}))["adjustments.wind"]
    assert "yield-limit" in faults(changed(NAIL, adjustments={"wet": 0.7}))["adjustments"]


def test_one_density_serves_the_other_method_with_a_caution():
    grown = {"thickness": 45, "specific_gravity": 0.5}
    assert "specific gravity" in said(run(changed(NAIL, side=grown)))
    found = run(changed(NAIL, method="yield-limit", fastener__bending_yield=620))
    assert "specific gravity" in said(found)


def test_thin_metal_takes_the_least_of_shear_and_bearing():
    """EN 1993-1-3:2006 Table 8.1 (from memory): F_b = alpha f_u d t, alpha = 3.6 sqrt(t/d) <= 2.1 for equal sheets."""
    found = run(RIVET)
    assert found["shear_resistance"] == pytest.approx(1600)
    bearing = 3.6 * math.sqrt(1.5 / 4.8) * 360 * 4.8 * 1.5
    assert found["modes"]["side"] == pytest.approx(min(2.1, bearing / (360 * 4.8 * 1.5)) * 360 * 4.8 * 1.5)
    thin = run(changed(RIVET, side__thickness=0.4))
    assert thin["governing_mode"] == "side"
    backed = run(changed(RIVET, side__thickness=0.5, main__thickness=1.25))
    assert backed["modes"]["side"] == pytest.approx(2.1 * 360 * 4.8 * 0.5)
    assert "tested" in faults(changed(RIVET, fastener__tested=None))["fastener.tested"]
    assert "no metal" in faults(changed(RIVET, side__kind="plywood"))["side.kind"]


@pytest.mark.parametrize(
    ("values", "path", "words"),
    [
        ({"fastener__diameter": "4 kg"}, "fastener.diameter", "a length"),
        ({"fastener__diameter": -1}, "fastener.diameter", "greater than 0"),
        ({"fastener__type": "staple"}, "fastener.type", "'nail'"),
        ({"fastener__ultimate": None}, "fastener.ultimate", "tensile strength"),
        ({"fastener__root_diameter": 5}, "fastener.root_diameter", "larger than the diameter"),
        ({"side__density": None}, "side.density", "characteristic density"),
        ({"side__angle": 120}, "side.angle", "at most 90"),
        ({"main__glue": 3}, "main.glue", "not a name of the contract"),
        ({"shear_planes": 3}, "shear_planes", "from 1 to 2"),
        ({"method": "guess"}, "method", "'yield-limit'"),
        ({"fastener__type": "rivet"}, "fastener.type", "thin metal"),
        ({"side": None}, "side", "Missing"),
    ],
)
def test_what_is_wrong_is_named(values, path, words):
    assert words in faults(changed(NAIL, **values))[path]


def test_two_plates_are_no_joint_in_wood():
    plate = {"thickness": 5, "kind": "steel"}
    assert "thin metal" in faults(changed(NAIL, side=plate, main=plate))["main.kind"]


# --- what must hold for any numbers -----------------------------------------------------------------------------------

sizes = st.floats(5, 200)
EN, US = "EN 1995-1-1", "yield-limit"
fewer = settings(max_examples=40, deadline=None)


def joint(method: str, planes: int, t_1: float, t_2: float, f_1: float, f_2: float, d: float, moment: float):
    return run(
        {
            "format": "bondwright/1",
            "kind": "fastener",
            "method": method,
            "fastener": {"type": "bolt", "diameter": d, "yield_moment": moment},
            "side": {"thickness": t_1, "embedment": f_1},
            "main": {"thickness": t_2, "embedment": f_2},
            "shear_planes": planes,
        }
    )


numbers = st.tuples(
    st.sampled_from([EN, US]),
    st.sampled_from([1, 2]),
    sizes,
    sizes,
    st.floats(5, 60),
    st.floats(5, 60),
    st.floats(4, 24),
    st.floats(2e3, 5e5),
)


@fewer
@given(numbers, st.sampled_from([2, 3, 4, 5, 7]), st.floats(1, 3))
def test_more_of_anything_never_weakens_the_joint(base, which, times):
    more = [*base]
    more[which] *= times
    assert joint(*more)["shear_resistance"] >= joint(*base)["shear_resistance"] * (1 - 1e-9)


@fewer
@given(numbers, st.floats(0.2, 5))
def test_loads_scale_with_size_squared_and_with_strength(base, times):
    """All lengths times s, moments times s^3 (the steel's stress is the same): every load times s^2."""
    planes, t_1, t_2, f_1, f_2, d, moment = base[1:]
    one = joint(EN, planes, t_1, t_2, f_1, f_2, d, moment)["modes"]
    big = joint(EN, planes, times * t_1, times * t_2, f_1, f_2, min(times * d, 100), moment * times**3)["modes"]
    if times * d <= 100:
        for mode, load in one.items():
            assert big[mode] == pytest.approx(times**2 * load, rel=1e-9)


@fewer
@given(numbers)
def test_in_single_shear_the_members_may_change_places(base):
    method, t_1, t_2, f_1, f_2, d, moment = base[0], *base[2:]
    one = joint(method, 1, t_1, t_2, f_1, f_2, d, moment)
    other = joint(method, 1, t_2, t_1, f_2, f_1, d, moment)
    assert one["shear_resistance"] == pytest.approx(other["shear_resistance"], rel=1e-9)


@fewer
@given(st.floats(0, 90), st.floats(0, 90))
def test_a_force_across_the_grain_is_never_carried_better(one, two):
    low, high = sorted((one, two))
    for method in (EN, US):
        wood = {"thickness": 60, "density": 350, "specific_gravity": 0.5}
        along, across = (
            run(changed(BOLT, method=method, side=wood | {"angle": a}, main=wood))["shear_resistance"]
            for a in (low, high)
        )
        assert across <= along * (1 + 1e-9)


WORDS = st.sampled_from([None, "", "x", "4 kg", "-3 mm", "1e400", True, [], {}, float("1e12"), -1, 0, "12 mm", "9 MPa"])


@settings(max_examples=600, deadline=None)
@given(
    st.sampled_from([NAIL, BOLT, RIVET, changed(BOLT, side={"thickness": 8, "kind": "steel"})]),
    st.lists(
        st.tuples(
            st.sampled_from(
                [
                    "method",
                    "shear_planes",
                    "predrilled",
                    "row",
                    "adjustments",
                    *(
                        f"fastener__{n}"
                        for n in ("type", "diameter", "length", "ultimate", "withdrawal", "yield_moment")
                    ),
                    *(f"side__{n}" for n in ("thickness", "density", "angle", "kind", "embedment", "specific_gravity")),
                    *(f"main__{n}" for n in ("thickness", "density", "angle", "kind", "wood", "density_mean")),
                ]
            ),
            st.one_of(
                WORDS,
                st.floats(-1e3, 1e6),
                st.sampled_from(
                    ["steel", "plywood", "hardboard", "screw", "nail", US, EN, "thin metal", {"count": 4}, 2]
                ),
            ),
        ),
        min_size=1,
        max_size=4,
    ),
)
def test_nonsense_is_refused_by_name_or_gives_finite_numbers(document, nonsense):
    made = copy.deepcopy(document)
    for path, value in nonsense:
        part, _, name = path.partition("__")
        place = made[part] if name and isinstance(made.get(part), dict) else made
        place[name or part] = value
    try:
        found = run(made)
    except DocumentError:
        return  # refused, by the fields' names
    json.dumps(found, allow_nan=False)
    assert found["verdict"] in ("pass", "not proven")
    assert found["shear_resistance"] > 0 or found["missing"]
