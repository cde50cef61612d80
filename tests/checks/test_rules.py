"""Rules of EN 1995-1-1 9.1 by name, ribs alone, sandwich faces: against published numbers and plain second sums."""

from __future__ import annotations

import copy
import math
import tomllib
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server import checks, documents
from server.checks.actions import act
from server.checks.crosssection import build
from server.checks.effective_width import narrowed
from server.checks.slide import layers

Raw = dict[str, Any]
CASES = tomllib.loads((Path(__file__).parents[1] / "published" / "ec5_thin.toml").read_text(encoding="utf-8"))["case"]
WEBS, SKINS = "EN 1995-1-1 9.1.1", "EN 1995-1-1 9.1.2"


def cases(kind: str) -> list[Any]:
    return [pytest.param(c["inputs"], c["expected"], id=c["id"]) for c in CASES if c["kind"] == kind]


def member(pieces: Raw, joints: list[tuple[str, str]], rules: tuple[str, ...] = (), **more: Any) -> Raw:
    timber = {"E": 11000, "G": 690, "strengths": {"bending": 24, "tension": 14, "compression": 21, "shear": 4}}
    strengths = {"bending": 25, "tension": 12, "compression": 14, "shear": 5, "rolling_shear": 1.1}
    panel = {"E": 6000, "G": 600, "G_rolling": 60, "layered": True, "kind": "plywood", "strengths": strengths}
    raw: Raw = {
        "format": "bondwright/1",
        "kind": "member",
        "basis": {"method": "allowable", "safety_factor": 2},
        "materials": {"timber": timber, "panel": panel},
        "adhesives": {"glue": {"shear_strength": 3}},
        "section": {"pieces": pieces, "joints": [{"between": list(pair), "adhesive": "glue"} for pair in joints]},
        "member": {"length": 3600, "supports": [{"at": 0, "kind": "pin"}, {"at": 3600, "kind": "pin"}]},
        "loads": {"live": [{"kind": "line", "from": 0, "to": 3600, "value": 3}]},
        "analysis": {"rules": list(rules)},
    }
    return raw | more


def rect(width: float, depth: float, across: float, up: float, material: str = "timber", **more: Any) -> Raw:
    return {"shape": "rectangle", "width": width, "depth": depth, "at": [across, up], "material": material, **more}


def run(raw: Raw) -> Raw:
    return checks.run(documents.read(copy.deepcopy(raw)))


def limit(found: Raw, what: str) -> Raw:
    return next(each for each in found["limits"] if each["what"] == what)


def box(flange: float, web: float, clear: float = 200.0, *rules: str) -> Raw:
    deep = clear + 2 * flange
    pieces = {
        "bottom": rect(90, flange, web, 0),
        "top": rect(90, flange, web, clear + flange),
        "left": rect(web, deep, 0, 0, "panel"),
        "right": rect(web, deep, 90 + web, 0, "panel"),
    }
    return member(pieces, [(f, w) for f in ("bottom", "top") for w in ("left", "right")], rules)


def i_beam(flange: float, web: float, *rules: str) -> Raw:
    """A web between two halves of either flange."""
    deep = 200 + 2 * flange
    pieces = {"web": rect(web, deep, 45, 0, "panel")}
    for name, up in (("bottom", 0.0), ("top", 200 + flange)):
        pieces |= {f"{name} L": rect(45, flange, 0, up), f"{name} R": rect(45, flange, 45 + web, up)}
    return member(pieces, [("web", name) for name in pieces if name != "web"], rules)


@pytest.mark.parametrize(("given", "expected"), cases("glue_web"))
def test_a_deep_glue_line_is_reduced_as_published(given: Raw, expected: Raw) -> None:
    make = box if given["section"] == "box" else i_beam
    extra = (200.0, WEBS) if given["section"] == "box" else (WEBS,)
    result = run(make(given["h_f_mm"], given["b_w_mm"], *extra))
    for joint in result["joints"]:
        web = next(name for name in joint["between"] if name in ("left", "right", "web"))
        for what in (f"rolling shear in {web}", "adhesive glue"):
            found = limit(joint, what)
            if expected["factor"]["value"] == 1:
                assert found["reductions"] == []
                continue
            assert found["reductions"] == [{"rule": WEBS, "value": pytest.approx(expected["factor"]["value"])}]
            strength = found["strength"] / found["safety_factor"]
            assert found["resistance"] == pytest.approx(strength * expected["factor"]["value"])
            assert found["utilisation"] == pytest.approx(joint["stress"] / found["resistance"])
        assert not limit(joint, f"shear in {next(n for n in joint['between'] if n != web)}")["reductions"]
        assert joint["utilisation"] == pytest.approx(
            joint["stress"] / min(each["resistance"] for each in joint["limits"])
        )
        assert joint["strength_needed"] == pytest.approx(joint["stress"] * 2 / expected["factor"]["value"])
        assert joint["width_needed"] == pytest.approx(joint["bonded_width"] * joint["utilisation"])


def deck(bond: float, skin: float, *rules: str, **more: Any) -> Raw:
    """Three ribs under a skin that reaches beyond them."""
    pieces = {f"rib {k}": rect(bond, 200, 200 + k * (bond + 600), 0) for k in range(3)}
    pieces["skin"] = rect(3 * bond + 1600, skin, 0, 200, "panel", **more)
    return member(pieces, [("skin", f"rib {k}") for k in range(3)], rules)


@pytest.mark.parametrize(("given", "expected"), cases("glue_panel"))
def test_a_wide_rib_is_reduced_as_published(given: Raw, expected: Raw) -> None:
    result = run(deck(given["b_w_mm"], given["h_f_mm"], SKINS))
    for joint in result["joints"]:
        found = limit(joint, "rolling shear in skin")["reductions"]
        wanted = expected["factor"]["value"]
        assert found == ([] if wanted == 1 else [{"rule": SKINS, "value": pytest.approx(wanted)}])


def test_a_rib_at_the_skins_edge_counts_half_the_bound() -> None:
    pieces = {
        "rib 0": rect(90, 200, 0, 0),
        "rib 1": rect(90, 200, 600, 0),
        "skin": rect(690, 12, 0, 200, "panel"),
    }
    joints = run(member(pieces, [("skin", "rib 0"), ("skin", "rib 1")], (SKINS,)))["joints"]
    for joint in joints:
        assert limit(joint, "rolling shear in skin")["reductions"] == [
            {"rule": SKINS, "value": pytest.approx((4 * 12 / 90) ** 0.8)}
        ]


@pytest.mark.parametrize(("given", "expected"), cases("web_shear"))
def test_panel_shear_of_a_web_is_as_published(given: Raw, expected: Raw) -> None:
    result = run(box(given["h_fc_mm"], given["b_w_mm"], given["h_w_mm"], WEBS))
    for name in ("left", "right"):
        piece = next(each for each in result["pieces"] if each["id"] == name)
        found = limit(piece, f"panel shear in {name}")
        assert found["resistance"] == pytest.approx(expected["F_v_w_N"]["value"] / 2)  # safety factor 2
        assert found["demand"] == pytest.approx(5400 / 2)  # two like webs
    cautions = [each["about"] for each in run(box(45, 9, given["h_w_mm"]))["cautions"]]
    assert ("slender web" in cautions) is expected["slender"]["value"]


def test_shear_is_shared_between_webs_by_stiffness() -> None:
    raw = box(45, 12, 200.0, WEBS)
    raw["materials"]["soft"] = {**raw["materials"]["panel"], "G": 200}
    raw["section"]["pieces"]["right"] |= {"material": "soft"}
    result = run(raw)
    shares = [
        limit(p, f"panel shear in {p['id']}")["demand"] / 5400 for p in result["pieces"] if p["id"] in ("left", "right")
    ]
    assert shares == [pytest.approx(0.75), pytest.approx(0.25)]


def test_a_web_too_slender_for_the_rule_is_not_proven() -> None:
    slender = run(box(45, 6, 421.0, WEBS))
    assert slender["verdict"] == "not proven"
    assert any("panel shear of left" in text and "stops at 70" in text for text in slender["missing"])
    assert not any("panel shear" in text for text in run(box(45, 6, 419.0, WEBS))["missing"])
    caution = next(c for c in run(box(45, 6, 421.0))["cautions"] if c["about"] == "slender web")
    assert "beyond the 70" in caution["text"]
    assert caution["answer"]


MATERIALS = {
    "plywood parallel": ("panel", "along"),
    "plywood perpendicular": ("panel", "across"),
    "OSB": ("osb", "along"),
}


@pytest.mark.parametrize(("given", "expected"), cases("bef"))
def test_effective_width_of_a_skin_is_as_published(given: Raw, expected: Raw) -> None:
    rib, clear, skin = given["b_w_mm"], given["clear_rib_distance_mm"], given["h_f_mm"]
    name, grain = MATERIALS[given["material"]]
    pieces = {f"rib {k}": rect(rib, 180, clear + k * (rib + clear), 0) for k in range(3)}
    pieces["skin"] = rect(3 * rib + 4 * clear, skin, 0, 180, name, grain=grain)
    length = given["span_m"] * 1000
    raw = member(
        pieces,
        [("skin", f"rib {k}") for k in range(3)],
        (SKINS,),
        member={"length": length, "supports": [{"at": 0, "kind": "pin"}, {"at": length, "kind": "pin"}]},
        loads={"live": [{"kind": "line", "from": 0, "to": length, "value": 3}]},
    )
    raw["materials"]["osb"] = {**raw["materials"]["panel"], "kind": "OSB/3"}
    steps = {s["symbol"]: s["value"] for s in run(raw)["steps"] if s["group"] == "Effective width"}
    assert steps["b_lag"] == pytest.approx(expected["shear_lag_mm"]["value"])
    assert steps["b_buc"] == pytest.approx(expected["plate_buckling_mm"]["value"])
    total = min(expected["b_ef_total_mm"]["value"], clear + rib)
    assert steps["b_ef"] == pytest.approx(3 * total)


def test_the_narrowed_section_is_that_of_narrower_skins() -> None:
    """The same panel with each skin cut down to strips beside the ribs, as pieces of their own."""
    whole = run(deck(45, 12, SKINS))
    pieces = deck(45, 12)["section"]["pieces"]
    del pieces["skin"]
    joints = []
    for k in range(3):
        left = 200 + k * 645
        pieces[f"strip {k}"] = rect(45 + 2 * 120, 12, left - 120, 200, "panel")  # 20 h_f = 240, half at either side
        joints.append((f"strip {k}", f"rib {k}"))
    pieces["tie"] = rect(2000, 0.1, 0, 212, "nothing")
    strips = member(pieces, joints + [(f"strip {k}", "tie") for k in range(3)])
    strips["materials"]["nothing"] = {"E": 1e-3}
    assert whole["section"]["EI"] == pytest.approx(run(strips)["section"]["EI"], rel=1e-6)
    assert whole["section"]["area"] == pytest.approx(3 * 45 * 200 + 1735 * 12)  # the plain area stays
    full = run(deck(45, 12))
    caution = next(c for c in full["cautions"] if c["about"] == "effective skin width")
    assert f"{whole['section']['EI'] / full['section']['EI']:.3f} of the bending stiffness" in caution["text"]
    assert not any(c["about"] == "effective skin width" for c in whole["cautions"])


def test_a_skin_in_tension_has_shear_lag_only_and_one_with_far_ribs_is_not_proven() -> None:
    raw = deck(45, 12, SKINS)
    raw["section"]["pieces"]["floor"] = rect(1735, 12, 0, -12, "panel")
    raw["section"]["joints"] += [{"between": ["floor", f"rib {k}"], "adhesive": "glue"} for k in range(3)]
    result = run(raw)
    widths = {s["title"]: s["value"] for s in result["steps"] if s["symbol"] == "b_ef"}
    assert widths["Effective width of skin"] == pytest.approx(3 * (45 + 240))
    assert widths["Effective width of floor"] == pytest.approx(3 * (45 + 360))
    assert any("buckling of skin between its ribs" in text for text in result["missing"])  # 600 > 2 x 240
    assert not any("buckling of floor" in text for text in result["missing"])
    thick = run(deck(45, 18, SKINS))
    assert not any("buckling of skin" in text for text in thick["missing"])


def test_a_rule_is_read_in_any_edition_and_an_unknown_one_is_not_proven() -> None:
    named = run(box(70, 9, 200.0, "EN 1995-1-1:2004+A2:2014 9.1.1"))
    assert named["joints"] == run(box(70, 9, 200.0, WEBS))["joints"]
    odd = run(box(70, 9, 200.0, "EN 1993-1-5 4.4"))
    assert odd["verdict"] == "not proven"
    assert any("EN 1993-1-5 4.4" in text and WEBS in text for text in odd["missing"])


def test_without_its_rule_a_reduction_is_a_caution_with_its_value() -> None:
    caution = next(c for c in run(box(70, 9))["cautions"] if c["about"] == "wide bond")
    assert "0.587" in caution["text"]
    assert WEBS in caution["text"]
    assert caution["answer"]
    assert not any(c["about"] == "wide bond" for c in run(box(70, 9, 200.0, WEBS))["cautions"])


# --- ribs -------------------------------------------------------------------------------------------------------------


def test_the_middle_rib_is_checked_with_its_own_width_and_governs() -> None:
    """Five ribs over 48 in: an inner one has a quarter of the load, not a fifth (hand calculation of a stage deck)."""
    inch = 25.4
    pieces = {f"rib {k}": rect(1.5 * inch, 3.5 * inch, k * 11.625 * inch, 0) for k in range(5)}
    pieces["skin"] = rect(48 * inch, 0.703 * inch, 0, 3.5 * inch, "panel", grain="along")
    raw = member(pieces, [("skin", f"rib {k}") for k in range(5)])
    result = run(raw)
    inner, edge = result["joints"][2], result["joints"][0]
    own = limit(inner, "adhesive glue, the rib with its own width")
    assert limit(inner, "adhesive glue")["demand"] == pytest.approx(inner["stress"])
    assert inner["utilisation"] >= own["utilisation"] > limit(inner, "adhesive glue")["utilisation"]
    E, G = 11000.0, 6000.0  # rib and skin
    width, deep, thick = 1.5 * inch, 3.5 * inch, 0.703 * inch
    strip = 11.625 * inch
    rib_area, skin_area, arm = width * deep, strip * thick, (deep + thick) / 2
    both = E * rib_area * G * skin_area / (E * rib_area + G * skin_area)
    EI = E * width * deep**3 / 12 + G * strip * thick**3 / 12 + both * arm**2
    V = 3 * 3600 / 2 * strip / (48 * inch)
    assert own["demand"] == pytest.approx(V * both * arm / EI / width)
    assert inner["strength_needed"] == pytest.approx(own["demand"] * 2)
    assert inner["width_needed"] == pytest.approx(width * inner["utilisation"])
    assert not [each for each in edge["limits"] if "own width" in each["what"]]
    rib = next(piece for piece in result["pieces"] if piece["id"] == "rib 2")
    axis = deep / 2 + G * skin_area * arm / (E * rib_area + G * skin_area)
    M = 3 * 3600**2 / 8 * strip / (48 * inch)
    assert limit(rib, "bending in rib 2, the rib with its own width")["demand"] == pytest.approx(E * M * axis / EI)


def test_ribs_close_together_share_as_one_section() -> None:
    pieces = {f"rib {k}": rect(45, 200, 100 + 150 * k, 0) for k in range(3)} | {"skin": rect(545, 12, 0, 200, "panel")}
    joints = run(member(pieces, [("skin", f"rib {k}") for k in range(3)]))["joints"]
    assert not [each for joint in joints for each in joint["limits"] if "own width" in each["what"]]


@settings(max_examples=25, deadline=None)
@given(st.floats(-1e4, 1e4), st.floats(-1e4, 1e4), st.floats(0.5, 3.0))
def test_moving_mirroring_or_scaling_the_panel_changes_no_utilisation_it_should_not(
    across: float, up: float, scale: float
) -> None:
    raw = deck(45, 12, SKINS)
    base = run(raw)
    moved = copy.deepcopy(raw)
    for piece in moved["section"]["pieces"].values():
        piece["at"] = [across - piece["at"][0] - piece["width"], up + piece["at"][1]]
    again = run(moved)
    assert [j["utilisation"] for j in again["joints"]] == pytest.approx(
        [j["utilisation"] for j in base["joints"]][::-1][::-1], rel=1e-6
    )
    larger = copy.deepcopy(raw)
    for piece in larger["section"]["pieces"].values():
        piece |= {
            "width": piece["width"] * scale,
            "depth": piece["depth"] * scale,
            "at": [x * scale for x in piece["at"]],
        }
    length = 3600 * scale
    larger["member"] = {"length": length, "supports": [{"at": 0, "kind": "pin"}, {"at": length, "kind": "pin"}]}
    larger["loads"] = {"live": [{"kind": "line", "from": 0, "to": length, "value": 3 * scale}]}
    assert run(larger)["utilisation"] == pytest.approx(base["utilisation"], rel=1e-6)


# --- sandwich ---------------------------------------------------------------------------------------------------------

FOAM = {"E": 40, "G": 12, "strengths": {"bending": 1, "shear": 0.5, "tension_across": 0.6}}
SHEET = {"E": 70000, "G": 26000, "strengths": {"bending": 160, "tension": 160, "compression": 160, "shear": 90}}


def panel(core: Raw = FOAM, value: float = 0.5, peel: float | None = 0.8) -> Raw:
    pieces = {
        "lower": rect(600, 1, 0, 0, "sheet"),
        "core": rect(600, 60, 0, 1, "foam"),
        "upper": rect(600, 1, 0, 61, "sheet"),
    }
    raw = member(pieces, [("core", "lower"), ("core", "upper")])
    raw["materials"] = {"sheet": SHEET, "foam": core}
    raw["adhesives"] = {"glue": {"shear_strength": 3, **({"peel_strength": peel} if peel else {})}}
    raw["loads"] = {"live": [{"kind": "line", "from": 0, "to": 3600, "value": value}]}
    return raw


def test_the_pressed_face_is_held_against_its_wrinkling_stress() -> None:
    result = run(panel())
    found = limit(next(p for p in result["pieces"] if p["id"] == "upper"), "wrinkling of upper")
    wrinkles = 0.5 * (70000 * 40 * 12) ** (1 / 3)
    assert found["strength"] == pytest.approx(wrinkles)
    assert found["resistance"] == pytest.approx(wrinkles / 2)
    assert found["demand"] == pytest.approx(0.5 * 3600**2 / 8 / (600 * 61), rel=1e-2)  # M / (b t d), thin faces
    lower = next(p for p in result["pieces"] if p["id"] == "lower")
    assert not [each for each in lower["limits"] if "wrinkling" in each["what"]]  # in tension
    assert result["missing"] == []


def test_a_pulled_face_is_held_against_the_tension_strength_of_bond_and_core() -> None:
    result = run(panel(value=-0.5))
    for joint in result["joints"]:
        assert limit(joint, "tension across core")["demand"] == pytest.approx(0.5 / 600)
        assert limit(joint, "tension across adhesive glue")["resistance"] == pytest.approx(0.4)
    assert limit(next(p for p in result["pieces"] if p["id"] == "lower"), "wrinkling of lower")
    pressed = run(panel())["joints"][0]["limits"]
    assert not [each for each in pressed if each["what"].startswith("tension")]


@pytest.mark.parametrize(
    ("core", "peel", "named"),
    [
        ({**FOAM, "G": None}, 0.8, "shear modulus of 'foam'"),
        ({**FOAM, "strengths": {"tension_across": 0.6}}, 0.8, "shear strength of 'foam'"),
        ({**FOAM, "strengths": {"shear": 0.5}}, 0.8, "tension strength across of 'foam'"),
        (FOAM, None, "peel_strength of adhesive 'glue'"),
    ],
)
def test_a_sandwich_without_one_of_its_values_is_not_proven(core: Raw, peel: float | None, named: str) -> None:
    core = {key: value for key, value in core.items() if value is not None}
    result = run(panel(core, peel=peel))
    assert result["verdict"] != "pass"
    assert any(named in text for text in result["missing"]), result["missing"]


def test_a_core_within_a_hundred_times_is_no_sandwich() -> None:
    stiff = {**FOAM, "E": 700.0, "G": 250.0, "strengths": {"shear": 5}}
    result = run(panel(stiff, peel=None))
    assert not any("times stiffer" in text for text in result["missing"])
    assert not [e for p in result["pieces"] for e in p["limits"] if "wrinkling" in e["what"]]
    assert math.isclose(70000 / 100, stiff["E"])


def test_stiff_joints_that_slip_give_the_stresses_of_rigid_ones_with_every_stretch_at_its_own_width() -> None:
    """Over the middle support the skin is pulled and more of it counts than in the spans, where it may buckle."""
    raw = deck(45, 6, SKINS)
    L = raw["member"]["length"]
    raw["member"]["supports"] = [{"at": x, "kind": "pin"} for x in (0, L / 2, L)]
    rib = raw["section"]["pieces"]["rib 0"]
    low = {**rib, "depth": 20, "at": [rib["at"][0], rib["at"][1] - 20], "from": 0.42 * L, "to": 0.58 * L}
    raw["section"]["pieces"]["strip"] = low
    raw["section"]["joints"].append({"between": ["rib 0", "strip"], "adhesive": "glue"})
    raw["adhesives"]["glue"] |= {"shear_modulus": 1e5, "thickness": 0.1}
    raw["analysis"] |= {"shear_deformation": False}
    document = documents.read(raw)
    body = narrowed(document, build(document), act(document, build(document)))
    skin = next(part for part in body.parts if part.name == "skin")
    shares = layers(body)[skin.index].shares
    assert len({round(each.share, 9) for each in shares}) == 2
    assert [each.share for each in shares] == [s.section.share(s.section.parts.index(skin)) for s in body.stretches]
    rigid, slipping = run(raw), run({**raw, "analysis": {**raw["analysis"], "slip": True}})
    for one, other in zip(rigid["pieces"], slipping["pieces"], strict=True):
        if one["id"] != "strip":  # at its ends the stress of a rigid joint jumps
            assert other["stress_top"] == pytest.approx(one["stress_top"], rel=0.01), one["id"]
            assert other["stress_bottom"] == pytest.approx(one["stress_bottom"], rel=0.01), one["id"]
    sags = [result["member"]["deflection"]["max"] for result in (rigid, slipping)]
    assert sags[0] == pytest.approx(sags[1], rel=0.01)
