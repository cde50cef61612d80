"""Kind "splice": what is judged against what, what is missing by name, and what a refusal says."""

from __future__ import annotations

import copy
import json
import math
import random

import numpy as np
import pytest

from server import checks, documents
from server.errors import DocumentError
from tests.checks.splices import LAP, SHAPES, lap, run, sides

EPOXY, BASIS, PLASTIC = "adhesives.epoxy", LAP["basis"], {"response": "elastic-plastic"}
CONTRACT = {
    *("verdict", "utilisation", "governing", "mean_shear", "peak_shear", "peak_ratio", "peak_peel"),
    *("edge_moment_factor", "joint_strength", "overlap_useful", "distribution", "adherends"),
    *("cautions", "steps", "values_used", "engine"),
}


def thinned(side="outer", of=1.62, **sizes):
    """Adherends of one material, one of them with a taper or tip."""
    made = sides("aluminium", "aluminium") if of == 1.62 else sides("spruce", "spruce", of, of)
    made[side] |= sizes
    return made


@pytest.mark.parametrize("layout", SHAPES)
@pytest.mark.parametrize("response", ["elastic", "elastic-plastic"])
def test_every_layout_answers_with_every_key_of_the_contract(layout, response):
    result = run(response=response, **SHAPES[layout])
    assert set(result) >= CONTRACT
    assert set(result["distribution"]) == {"at", "shear", "peel"}
    assert len({len(each) for each in result["distribution"].values()}) == 1
    assert result["verdict"] in ("pass", "fail")
    assert json.loads(json.dumps(result, allow_nan=False)) == result
    assert not result["missing"]


def test_single_lap_by_hand():
    result = run()
    D = 70000 / (1 - 0.33**2) * 1.62**3 / 12 * 25
    xi_c = math.sqrt(1200 / D) * 12.7 / 2
    k = 1 / (1 + xi_c + xi_c**2 / 6)
    beta = math.sqrt(8 * 1000 / (70000 / (1 - 0.33**2) * 1.62 * 0.2)) * 12.7 / 2
    mean = 1200 / 25 / 12.7
    assert result["mean_shear"] == pytest.approx(mean)
    assert result["edge_moment_factor"] == pytest.approx(k)
    peak = mean / 4 * ((1 + 3 * k) * beta / math.tanh(beta) + 3 * (1 - k))
    assert result["peak_shear"] == pytest.approx(peak, rel=1e-6)
    assert result["peak_ratio"] == pytest.approx(peak / mean, rel=1e-6)
    stress = 1200 / (25 * 1.62) + 6 * k * 1200 * 1.62 / 2 / (25 * 1.62**2)
    assert [each["stress"] for each in result["adherends"]] == pytest.approx([stress, stress], rel=1e-6)
    assert result["utilisation"] == pytest.approx(max(peak / 15, result["peak_peel"] / 20, stress / 120), rel=1e-6)
    assert "lap" in " ".join(c["about"] for c in result["cautions"])


def test_joint_strength_is_the_load_at_utilisation_1():
    for shape in SHAPES.values():
        for load in ({}, {"temperature_change": -40}):
            change = {**shape, "adherends": sides("aluminium", "steel"), "load": {"axial": 900, **load}}
            strength = run(**change)["joint_strength"]
            again = run(**{**change, "load": {"axial": strength, **load}})
            assert again["utilisation"] == pytest.approx(1.0, rel=1e-5)


def test_a_lap_coupons_strength_is_never_set_against_a_peak():
    result = run(epoxy={"shear_yield": None, "shear_strength": 1.0})
    assert result["verdict"] == "not proven"
    assert any("shear_yield" in each and "ISO 11003" in each for each in result["missing"])
    assert result["lap_shear_strength"] == 1.0
    assert not any("shear yield" in limit["what"] for limit in result["limits"])


@pytest.mark.parametrize(
    ("epoxy", "word"),
    [
        ({"peel_strength": None}, "peel_strength"),
        ({"shear_modulus": None}, "shear modulus"),
        ({"thickness": None}, "bond-line thickness"),
        ({"shear_strain_limit": None}, "shear_strain_limit"),
    ],
)
def test_what_is_missing_is_named_with_the_test_that_supplies_it(epoxy, word):
    response = "elastic-plastic" if "shear_strain_limit" in epoxy else "elastic"
    result = run(epoxy=epoxy, response=response)
    assert result["verdict"] == "not proven"
    assert any(word in each for each in result["missing"])
    assert result["mean_shear"] == pytest.approx(1200 / 25 / 12.7)


def test_both_surfaces_are_judged_by_what_they_are():
    result = run(adherends=sides("spruce", "aluminium", 20, 3), load={"axial": 500})
    whats = {limit["what"]: limit for limit in result["limits"]}
    assert whats["shear in the surface of the inner adherend"]["strength"] == 6
    assert whats["tension across in the surface of the inner adherend"]["strength"] == 1.8
    assert whats["shear in the surface of the outer adherend"]["strength"] == pytest.approx(240 / math.sqrt(3))
    assert whats["tension across in the surface of the outer adherend"]["strength"] == 240
    rolled = sides("spruce", "aluminium", 20, 3)
    rolled["inner"]["grain"] = "across"
    whats = {limit["what"]: limit for limit in run(adherends=rolled, load={"axial": 500})["limits"]}
    assert whats["rolling shear in the surface of the inner adherend"]["strength"] == 1.5


def test_a_material_without_strengths_leaves_the_joint_unproven():
    materials = copy.deepcopy(LAP["materials"])
    del materials["aluminium"]["yield"]
    result = run(materials=materials)
    assert result["verdict"] == "not proven"
    assert len([each for each in result["missing"] if "'aluminium'" in each]) == 6 - 0


def test_duration_factors_and_statuses_count():
    epoxy = {"duration_factors": {"short-term": 0.8}, "factors": {"hot": 0.5}}
    base, reduced = run(duration="short-term"), run(duration="short-term", epoxy=epoxy)
    pick = lambda r: next(each for each in r["limits"] if each["what"] == "adhesive epoxy, shear yield")  # noqa: E731
    assert pick(reduced)["resistance"] == pytest.approx(0.4 * pick(base)["resistance"])
    missing = run(duration="permanent", epoxy=epoxy)
    assert missing["verdict"] == "not proven"
    assert any("duration factor" in each for each in missing["missing"])
    assert run(epoxy={"status": "indicative"})["verdict"] == "not proven"


def test_free_strain_loads_a_joint_of_unlike_pieces_and_no_joint_of_like_ones():
    alike = run(load={"axial": 1000, "temperature_change": -40})
    assert alike["peak_shear"] == run(load={"axial": 1000})["peak_shear"]
    unlike = run(adherends=sides("aluminium", "steel"), load={"temperature_change": -40})
    assert unlike["peak_shear"] > 1
    assert unlike["mean_shear"] == 0
    assert unlike["peak_ratio"] is None
    damp = run(adherends=sides("spruce", "aluminium", 20, 3), load={"moisture_change": {"spruce": -6}})
    assert damp["peak_shear"] > 1
    materials = copy.deepcopy(LAP["materials"])
    del materials["steel"]["expansion"]
    lacking = run(materials=materials, adherends=sides("aluminium", "steel"), load={"temperature_change": -40})
    assert any("expansion of 'steel'" in each for each in lacking["missing"])


def test_a_yielding_bond_is_judged_by_its_load():
    result = run(response="elastic-plastic", layout="double-lap")
    assert result["joint_strength"] == pytest.approx(2 * 30 * 25 * 12.7 / 2, rel=1e-5)
    load = next(each for each in result["limits"] if "yielding bond" in each["what"])
    assert load["utilisation"] == pytest.approx(1200 / result["joint_strength"])
    heavy = run(response="elastic-plastic", layout="double-lap", load={"axial": 30000})
    assert heavy["verdict"] == "fail"
    assert heavy["peak_shear"] == pytest.approx(30, rel=1e-6)
    assert not any(each["what"] == "adhesive epoxy, shear yield" for each in heavy["limits"])
    bent = run(response="elastic-plastic", layout="double-lap", load={"axial": 500, "moment": 2000})
    assert bent["verdict"] in ("not proven", "fail")
    assert any("yielding bond" in each for each in bent["missing"])


def test_torque_alone_has_its_own_strength():
    for response in ("elastic", "elastic-plastic"):
        result = run(response=response, load={"torque": 20000}, **SHAPES["tube-lap"])
        assert result["torque_strength"] == pytest.approx(20000 / result["utilisation"])
        assert any("wall of the inner" in each["what"] for each in result["limits"])


def test_overlap_useful_of_a_double_lap_is_where_length_no_longer_helps():
    result = run(layout="double-lap", materials={**LAP["materials"], "aluminium": {"E": 70000, "yield": 1e5}})
    useful = result["overlap_useful"]
    here, there = (
        run(layout="double-lap", overlap=each, materials={**LAP["materials"], "aluminium": {"E": 70000, "yield": 1e5}})
        for each in (useful, 1.1 * useful)
    )
    assert there["joint_strength"] / here["joint_strength"] == pytest.approx(1.01, abs=3e-4)
    curve = result["overlap_curve"]
    assert len(curve["overlap"]) == len(curve["strength"]) > 5
    at = np.interp(12.7, curve["overlap"], curve["strength"])
    assert at == pytest.approx(result["joint_strength"], rel=0.02)
    assert any(
        each["what"] == "bond wider by half" and each["gain"] == pytest.approx(0.5) for each in result["changes"]
    )


def test_lasting_and_repeated_load():
    wanted = {"sustained": 0.3, "fatigue": {"cycles": 2e6, "impact": 2.0}}
    lacking = run(**wanted)
    assert lacking["verdict"] == "not proven"
    assert {True} == {any(word in each for each in lacking["missing"]) for word in ("creep_limit", "fatigue strength")}
    line = {"intercept": 1.71, "slope": 0.12, "cycles": 1e7}
    known = run(epoxy={"creep_limit": 0.25, "fatigue": line}, **wanted)
    blocks = {each["what"]: each for each in known["limits"]}
    bond = max(each["utilisation"] for each in known["limits"] if each["what"].startswith("adhesive"))
    assert blocks["lasting load on adhesive epoxy"]["utilisation"] == pytest.approx(0.3 * bond / 0.25, rel=0.15)
    share = 1.71 * 2e6**-0.12
    assert blocks["repeated load on adhesive epoxy"]["utilisation"] == pytest.approx(0.5 * bond / share, rel=0.15)
    beyond = run(epoxy={"fatigue": line | {"cycles": 1e5}}, fatigue={"cycles": 2e6})
    assert any("tested to 1e+05" in each for each in beyond["missing"])
    several = {"blocks": [{"cycles": 1e4, "range": 0.5}, {"cycles": 1e6, "range": 0.1}]}
    summed = run(epoxy={"fatigue": line}, fatigue=several)
    block = next(each for each in summed["limits"] if each["what"].startswith("repeated"))
    lives = [(1.71 / r) ** (1 / 0.12) for r in block["ranges"]]
    assert block["utilisation"] == pytest.approx(sum(n / min(N, 1e7) for n, N in zip((1e4, 1e6), lives, strict=True)))


def test_a_lightly_stressed_middle_is_asked_for_under_a_load_that_stays():
    words = lambda r: [c["text"] for c in r["cautions"] if c["about"] == "lightly stressed middle"]  # noqa: E731
    assert not words(run())
    short, long = (run(duration="permanent", overlap=each, load={"axial": 3500}) for each in (8, 60))
    assert "may creep" in words(short)[0]
    assert "keeps the joint from creeping" in words(long)[0]


@pytest.mark.parametrize(
    ("change", "path", "words"),
    [
        ({"width": None}, "width", "missing"),
        ({"overlap": None}, "overlap", "missing"),
        ({"layout": "scarf", "overlap": None}, "slope", "missing"),
        ({"slope": 8}, "slope", "belongs to a scarf"),
        ({"layout": "tube-lap"}, "diameter", "missing"),
        ({"layout": "tube-lap", "diameter": 25}, "width", "no width"),
        ({"diameter": 25}, "diameter", "belongs to a tube"),
        ({"load": {}}, "load", "nothing acts"),
        ({"load": {"torque": 5}}, "load.torque", "tube laps"),
        ({"load": {"axial": "4 kg"}}, "load.axial", "force"),
        ({"adhesive": "epoxi"}, "adhesive", "epoxy"),
        ({"adherends": sides("aluminum", "steel")}, "adherends.inner.material", "aluminium"),
        ({"basis": None}, "basis", "missing"),
        ({"basis": {**BASIS, "safety_factor": {"material": 2}}}, "basis.safety_factor.adhesive", "missing"),
        ({"basis": {**BASIS, "safety_factor": {"adhesive": 2}}}, "basis.safety_factor.material", "missing"),
        ({"layout": "butt"}, "layout", "single-lap"),
        ({"epoxy": {"peel_strength": "7 N/mm"}}, "adhesives.epoxy.peel_strength", "workmanship"),
        ({"epoxy": {"thickness": 1e-9}}, "adhesives.epoxy.thickness", "beyond any joint"),
        ({**PLASTIC, "epoxy": {"shear_strain_limit": 0.01}}, f"{EPOXY}.shear_strain_limit", "yields"),
        ({**SHAPES["scarf"], "adherends": sides("steel", "steel", 2, 3)}, "adherends.outer.thickness", "one thickness"),
        ({"fatigue": {"impact": 2}}, "fatigue", "cycles"),
        ({"adherends": thinned(taper=5)}, "adherends.outer.tip", "missing"),
        ({"adherends": thinned(tip=0.5)}, "adherends.outer.taper", "missing"),
        ({"adherends": thinned(taper=5, tip=9)}, "adherends.outer.tip", "thicker than"),
        ({"adherends": thinned("inner", taper=5, tip=1), "layout": "strap"}, "adherends.inner.taper", "cannot taper"),
        ({"adherends": thinned(taper=5, tip=1), **SHAPES["tube-lap"]}, "adherends.outer.taper", "even walls"),
        ({"adherends": thinned(taper=5), **SHAPES["scarf"]}, "adherends.outer.taper", "tapers all along"),
        ({"adherends": thinned(tip=1), **SHAPES["scarf"]}, "adherends.outer.tip", "no scarf"),
        ({"adherends": thinned(tip=0.2), **SHAPES["scarf"], "load": {"moment": 5}}, "load.moment", "axial load alone"),
        ({"colour": 3}, "colour", "not a name"),
    ],
)  # fmt: skip
def test_a_refusal_names_the_field_and_what_is_wanted(change, path, words):
    with pytest.raises(DocumentError) as caught:
        checks.run(documents.read(lap(**change)))
    told = {fault.path: fault.message for fault in caught.value.faults}
    assert path in told
    assert words in told[path].lower()


def test_every_fault_is_said_at_once():
    with pytest.raises(DocumentError) as caught:
        documents.read(lap(width="4 kg", overlap=None, load={"torque": 5}, adhesive="none"))
    assert {fault.path for fault in caught.value.faults} >= {"width", "overlap", "load.torque", "adhesive"}


NONSENSE = [None, True, [], {}, "", "x", -1, 0, 1e-300, 1e300, float("nan"), "1e9 kN", "12 mm", [[1]], 1e-4, 1e5, 3.7]


def spots(value, path=()):
    if isinstance(value, dict):
        for key, each in value.items():
            yield (*path, key)
            yield from spots(each, (*path, key))


def test_three_hundred_documents_of_nonsense_are_answered_or_refused_by_name():
    draw = random.Random(7)
    answered, refused = 0, []
    for _ in range(300):
        made = lap(**SHAPES[draw.choice(list(SHAPES))])
        if draw.random() < 0.1:
            made["response"] = "elastic-plastic"
        for _ in range(draw.choice((1, 1, 2))):
            *way, last = draw.choice(list(spots(made)))
            at = made
            for key in way:
                at = at[key]
            if not isinstance(at, dict):
                continue
            if draw.random() < 0.2:
                at.pop(last, None)
            elif isinstance(at.get(last), float | int) and draw.random() < 0.6:
                at[last] = at[last] * 10 ** draw.uniform(-7, 7)
            else:
                at[last] = draw.choice(NONSENSE)
        try:
            result = checks.run(documents.read(made))
        except DocumentError as error:
            refused.append(error.faults)
            continue
        answered += 1
        json.dumps(result, allow_nan=False)
    assert answered > 60
    assert all(faults and all(fault.message for fault in faults) for faults in refused)


def test_leaving_the_working_out_changes_no_number():
    document = documents.read(lap())
    with_steps, without = checks.run(document), checks.run(document, working=False)
    assert with_steps.pop("steps")
    assert without.pop("steps") == []
    assert with_steps == without


def test_a_taper_is_offered_and_brings_what_was_told():
    made = {
        "layout": "double-lap",
        "adherends": sides("steel", "steel", 3, 3),
        "overlap": 30,
        "epoxy": {"peel_strength": 8},
    }
    told = next(change for change in run(**made)["changes"] if change["what"].startswith("free ends tapered"))
    assert told["what"] == "free ends tapered to 0.75 mm over 15 mm"
    thin = copy.deepcopy(made)
    thin["adherends"]["outer"] |= {"taper": 15, "tip": 0.75}
    result = run(**thin)
    assert result["joint_strength"] == pytest.approx(told["joint_strength"], rel=1e-9)
    assert result["peak_peel"] < run(**made)["peak_peel"]
    assert result["peak_shear_closed_form"] is None  # it is for adherends of one thickness
    assert any(c["about"] == "tapered ends" and c["answer"] for c in result["cautions"])
    assert not any(change["what"].startswith("free ends tapered") for change in result["changes"])


def test_blunt_tips_of_a_scarf_join_nothing_and_gather_stress():
    sharp, blunt = (
        run(**SHAPES["scarf"], adherends=sides("spruce", "spruce", 12, 12) if tip is None else thinned(tip=tip, of=12))
        for tip in (None, 1.0)
    )
    assert sharp["overlap"] == 96
    assert blunt["overlap"] == 8 * (12 - 2)
    assert blunt["mean_shear"] == pytest.approx(sharp["mean_shear"] * 12 / 10)
    assert blunt["peak_shear"] > 2 * sharp["peak_shear"]
    assert blunt["joint_strength"] < sharp["joint_strength"]


def test_swapping_the_plates_mirrors_the_joint():
    one = run(adherends=sides("aluminium", "steel", 2, 1.5))
    other = run(adherends=sides("steel", "aluminium", 1.5, 2))
    assert one["peak_shear"] == pytest.approx(other["peak_shear"], rel=1e-6)
    assert one["peak_peel"] == pytest.approx(other["peak_peel"], rel=1e-6)
    assert one["joint_strength"] == pytest.approx(other["joint_strength"], rel=1e-6)


def test_a_balanced_scarf_that_only_its_bond_limits_has_no_useful_length():
    # by statics: the shear is even along it, so the strength grows with its length for ever
    result = run(**SHAPES["scarf"], adherends=sides("steel", "steel", 2, 2), response="elastic-plastic")
    assert result["joint_strength"] > 0
    assert result["overlap_useful"] is None
