"""Checks of members whose joints slip, against derivations of their own, and what the contract says about them.

The stage deck and the gangway are invented; what they must give is derived here from the equations of partial
composite action (Newmark, Siess and Viest 1951), not taken from anywhere.
"""

from __future__ import annotations

import math
import tomllib
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.integrate import solve_bvp

from server import checks, documents
from tests.checks.made import STACK, Raw, changed, run

PUBLISHED = tomllib.loads((Path(__file__).parents[1] / "published" / "slip.toml").read_text(encoding="utf-8"))["case"]
PUBLISHED_GAMMA = next(case for case in PUBLISHED if case["kind"] == "gamma2")
IN, LBF, FT = 25.4, 4.4482216152605, 304.8
PSI = LBF / IN**2


def deck(span_ft: float, **changes: object) -> Raw:
    """A stage deck of five ribs under a skin, glued and screwed, in inch-pound units."""
    span = f"{span_ft} ft"
    pieces: Raw = {
        "skin": {"shape": "rectangle", "width": "48 in", "depth": "0.703 in", "at": [0, "3.5 in"], "material": "ply"}
    }
    for i in range(5):
        at = [f"{11.625 * i} in", 0]
        pieces[f"rib {i + 1}"] = {
            "shape": "rectangle",
            "width": "1.5 in",
            "depth": "3.5 in",
            "at": at,
            "material": "pine",
        }
    screw = {"adhesive": "PU", "fastener": "screw", "spacing": "6 in", "role": "fall-back"}
    raw: Raw = {
        "format": "bondwright/1",
        "kind": "member",
        "display": "US",
        "basis": {"method": "allowable", "safety_factor": 3.0},
        "materials": {
            "ply": {
                "E": "1.2e6 psi",
                "layered": True,
                "strengths": {"rolling_shear": "180 psi", "bending": "6000 psi"},
            },
            "pine": {"E": "1.3e6 psi", "strengths": {"shear": "600 psi", "bending": "7500 psi"}},
        },
        "adhesives": {"PU": {"shear_strength": "600 psi"}},
        "fasteners": {"screw": {"shear_resistance": "350 lbf", "slip_modulus": "5500 lbf/in", "spacing_min": "2 in"}},
        "section": {"pieces": pieces, "joints": [{"between": ["skin", f"rib {i + 1}"], **screw} for i in range(5)]},
        "member": {"length": span, "supports": [{"at": 0, "kind": "pin"}, {"at": span, "kind": "pin"}]},
        "loads": {"floor": [{"kind": "area", "from": 0, "to": span, "value": "133 psf", "width": "4 ft"}]},
    }
    return changed(raw, **changes)


def two_layers(L: float, w: float, EA: tuple[float, float], EI: tuple[float, float], r: float, k: float) -> Raw:
    """Deflection at midspan, end flow and end slip of two layers under a uniform load, Newmark's closed form."""
    EA_star, EI_0 = EA[0] * EA[1] / sum(EA), sum(EI)
    EI_inf = EI_0 + EA_star * r**2
    alpha = math.sqrt(k * (1 / EA_star + r**2 / EI_0))
    a = alpha * L / 2
    sag = 5 * w * L**4 / (384 * EI_inf) + w / alpha**4 * (1 / EI_0 - 1 / EI_inf) * (
        alpha**2 * L**2 / 8 + 1 / math.cosh(a) - 1
    )
    flow = EA_star * r / EI_inf * (w * L / 2) * (1 - math.tanh(a) / a)
    return {"sag": sag, "flow": flow, "slip": flow / k, "EI": EI_inf}


def deck_by_hand(span_ft: float) -> Raw:
    """The deck with the glue gone: skin over five ribs, 5 screws every 6 in."""
    E_ply, E_pine = 1.2e6 * PSI, 1.3e6 * PSI
    b, h, bw, hw = 48 * IN, 0.703 * IN, 5 * 1.5 * IN, 3.5 * IN
    return two_layers(
        span_ft * FT,
        133 * LBF / FT**2 * 4 * FT,
        (E_ply * b * h, E_pine * bw * hw),
        (E_ply * b * h**3 / 12, E_pine * bw * hw**3 / 12),
        (h + hw) / 2,
        5 * 5500 * LBF / IN / (6 * IN),
    )


def _first_of_deck() -> float:
    """First moment of the skin about the neutral axis of the whole deck [psi, in]."""
    EA = (1.2e6 * 48 * 0.703, 1.3e6 * 5 * 1.5 * 3.5)
    return EA[0] * EA[1] / sum(EA) * (0.703 + 3.5) / 2


class TestTheStageDeck:
    @pytest.mark.parametrize(
        ("span", "left", "force", "verdict"), [(8, 0.44, 299, "there is none"), (4, 0.35, 55, "there is a fall-back")]
    )
    def test_glue_gone(self, span: int, left: float, force: float, verdict: str) -> None:
        result, by_hand = run(deck(span)), deck_by_hand(span)
        rigid = 5 * 133 * LBF / FT**2 * 4 * FT * (span * FT) ** 4 / (384 * by_hand["EI"])
        gone = result["fall_back"]
        assert gone["stiffness_left"] == pytest.approx(rigid / by_hand["sag"], rel=1e-6)
        assert gone["stiffness_left"] == pytest.approx(left, abs=0.005)
        assert gone["verdict"] == verdict
        assert gone["holds"] is (span == 4)
        assert gone["deflection"][0]["deflection"] == pytest.approx(by_hand["sag"], rel=1e-6)
        for joint in gone["joints"]:
            assert joint["force"] == pytest.approx(by_hand["flow"] / 5 * 6 * IN, rel=1e-6)
            assert joint["force"] == pytest.approx(force * LBF, abs=0.5 * LBF)
            assert joint["slip"] == pytest.approx(by_hand["slip"], rel=1e-6)

    def test_the_flow_told_is_the_rigid_one_and_the_screws_are_judged_on_the_other(self) -> None:
        result, by_hand = run(deck(8)), deck_by_hand(8)
        for joint in result["joints"]:
            assert joint["shear_flow"] == pytest.approx(24.5219, rel=1e-5)  # 140 lbf/in: a rib's first moment over EI
            limit = next(own for own in joint["limits"] if own["what"] == "fastener screw")
            assert limit["demand"] == pytest.approx(by_hand["flow"] / 5 * 6 * IN, rel=1e-6)
            assert limit["resistance"] == pytest.approx(350 / 3 * LBF)
            held = max(own["utilisation"] for own in joint["limits"] if own["what"].startswith("fastener screw"))
            assert joint["spacing_needed"] == pytest.approx(6 * IN / held, rel=1e-6)  # an inner rib's own width too
            assert held >= by_hand["flow"] / 5 * 6 * IN / (350 / 3 * LBF) * (1 - 1e-9)
            worst = max(own["utilisation"] for own in joint["limits"] if own["demand_unit"] == "MPa")  # own width too
            assert joint["width_needed"] == pytest.approx(joint["bonded_width"] * worst)
        assert result["verdict"] == "fail"
        assert "glue gone" in result["governing"]

    def test_an_inner_rib_alone_has_more_of_everything_with_the_glue_gone_too(self) -> None:
        """A quarter of the load on one rib, not a fifth: screws and ribs as often over as the rigid strip says."""
        result = run(deck(4))
        E_ply, E_pine, b = 1.2e6, 1.3e6, 11.625
        EA, bend = (E_ply * b * 0.703, E_pine * 5.25), (E_ply * b * 0.703**3 / 12, E_pine * 1.5 * 3.5**3 / 12)
        reduced, r = EA[0] * EA[1] / sum(EA), (0.703 + 3.5) / 2
        EI, first = sum(bend) + reduced * r**2, reduced * r
        whole = deck_by_hand(4)["EI"] / (LBF * IN**2)
        own, together = b / 48 * first / EI, _first_of_deck() / 5 / whole
        inner, edge = result["fall_back"]["joints"][2], result["fall_back"]["joints"][0]
        assert inner["force_judged"] / inner["force"] == pytest.approx(own / together, rel=1e-4)
        assert inner["utilisation"] == pytest.approx(inner["force_judged"] / inner["resistance"])
        assert edge["force_judged"] == edge["force"]
        ribs = {piece["id"]: piece for piece in result["fall_back"]["pieces"]}
        ratio = ribs["rib 3"]["utilisation"] / ribs["rib 1"]["utilisation"]
        assert ratio == pytest.approx(b / 48 * whole / EI, rel=1e-4)
        limit = next(each for each in ribs["rib 3"]["limits"] if "own width" in each["what"])
        assert limit["safety_factor"] == 3

    def test_its_own_factor_stands_in_for_all_that_is_judged_with_the_glue_gone(self) -> None:
        result = run(deck(4), basis__fall_back_factor=1.5)
        limit = next(own for own in result["joints"][0]["limits"] if own["what"] == "fastener screw")
        assert (limit["safety_factor"], limit["resistance"]) == (1.5, pytest.approx(350 / 1.5 * LBF))
        assert result["joints"][0]["limits"][0]["safety_factor"] == 3.0
        assert {own["safety_factor"] for piece in result["fall_back"]["pieces"] for own in piece["limits"]} == {1.5}

    def test_pieces_are_judged_without_composite_action(self) -> None:
        """A rib alone carries its share of EI; its stress is found again from its own force and moment at midspan."""
        result = run(deck(4))
        rib = next(piece for piece in result["fall_back"]["pieces"] if piece["id"] == "rib 1")
        assert {limit["what"] for limit in rib["limits"]} == {"bending in rib 1", "shear in rib 1"}
        assert rib["stress_bottom"] > result["pieces"][1]["stress_bottom"]
        w, L, h, E = 133 * LBF / FT**2 * 4 * FT, 4 * FT, 3.5 * IN, 1.3e6 * PSI
        EI_0 = 1.2e6 * PSI * 48 * 0.703**3 / 12 * IN**4 + 5 * E * 1.5 * 3.5**3 / 12 * IN**4
        x = np.linspace(0, L / 2, 4001)
        flow = _flow_along(w, L, x)
        N = np.trapezoid(flow, x) / 5
        r = (3.5 + 0.703) / 2 * IN
        kappa = (w * L**2 / 8 - 5 * N * r) / EI_0
        assert rib["stress_bottom"] == pytest.approx(N / (1.5 * 3.5 * IN**2) + E * kappa * h / 2, rel=1e-4)

    def test_a_fall_back_that_does_not_hold_fails_a_member_that_else_passes(self) -> None:
        weak = run(deck(4), fasteners__screw__shear_resistance="60 lbf")
        assert weak["verdict"] == "fail"
        assert max(own["utilisation"] for own in weak["joints"][0]["limits"][:-1]) < 1
        assert "There is none" in weak["fall_back"]["text"]
        assert run(deck(4))["verdict"] == "pass"

    def test_what_a_fall_back_needs_is_asked_for_by_name(self) -> None:
        for path, words in (("slip_modulus", "slip modulus"), ("shear_resistance", "shear resistance")):
            result = run(deck(4), **{f"fasteners__screw__{path}": ...})
            assert result["verdict"] == "not proven"
            assert any(words in text and "'screw'" in text for text in result["missing"])
        result = run(deck(4), **{f"section__joints__{i}__spacing": ... for i in range(5)})
        assert result["verdict"] == "not proven"
        assert any("spacing of 'screw'" in text for text in result["missing"])


def _flow_along(w: float, L: float, x: np.ndarray) -> np.ndarray:
    """Flow of the deck's joint by a boundary-value library: q'' / k = q (1/EA* + r^2/EI0) - r V / EI0."""
    E_ply, E_pine = 1.2e6 * PSI, 1.3e6 * PSI
    A1, A2 = 48 * 0.703 * IN**2, 5 * 1.5 * 3.5 * IN**2
    EI_0 = (E_ply * 48 * 0.703**3 + E_pine * 5 * 1.5 * 3.5**3) / 12 * IN**4
    r, k = (3.5 + 0.703) / 2 * IN, 5 * 5500 * LBF / IN / (6 * IN)
    soft = 1 / (E_ply * A1) + 1 / (E_pine * A2) + r**2 / EI_0

    def slope(at: np.ndarray, y: np.ndarray) -> np.ndarray:
        return np.vstack([y[1], k * (soft * y[0] - r / EI_0 * w * (L / 2 - at))])

    found = solve_bvp(slope, lambda a, b: np.array([a[1], b[1]]), np.linspace(0, L, 201), np.zeros((2, 201)), tol=1e-8)
    return found.sol(x)[0]


def planks(**changes: object) -> Raw:
    """Two planks held together by screws alone, slip reckoned."""
    raw = changed(
        STACK,
        adhesives={},
        fasteners={"screw": {"shear_resistance": 6000, "slip_modulus": 2000, "duration_factors": {"long-term": 0.6}}},
        section__joints=[{"between": ["lower", "upper"], "fastener": "screw", "spacing": 100}],
        analysis={"slip": True},
        materials__pine__strengths__bending=40,
    )
    return changed(raw, **changes)


def planks_by_hand(k: float, E: float = 10000, w: float = 1.2) -> Raw:
    return two_layers(3000, w, (E * 5000, E * 5000), (E * 100 * 50**3 / 12,) * 2, 50, k)


class TestSoleCarriers:
    def test_flow_slip_and_effective_stiffness(self) -> None:
        result, by_hand = run(planks(materials__pine__G=...)), planks_by_hand(20)
        joint = result["joints"][0]
        assert joint["shear_flow"] == pytest.approx(by_hand["flow"], rel=1e-8)
        assert joint["slip"] == pytest.approx(by_hand["slip"], rel=1e-8)
        assert joint["limits"][0]["demand"] == pytest.approx(100 * by_hand["flow"], rel=1e-8)
        assert joint["spacing_needed"] == pytest.approx(3000 / by_hand["flow"], rel=1e-8)
        rigid = 5 * 1.2 * 3000**4 / (384 * by_hand["EI"])
        assert result["section"]["EI"] == pytest.approx(by_hand["EI"])
        assert result["section"]["effective_EI"] == pytest.approx(by_hand["EI"] * rigid / by_hand["sag"], rel=1e-7)
        assert result["member"]["deflection"]["max"] == pytest.approx(by_hand["sag"], rel=1e-7)
        assert result["verdict"] == "pass"
        assert result["pieces"][0]["limits"]

    def test_effective_stiffness_leaves_shear_deformation_out(self) -> None:
        by_hand = planks_by_hand(20)
        rigid = 5 * 1.2 * 3000**4 / (384 * by_hand["EI"])
        result = run(planks())
        assert result["section"]["effective_EI"] == pytest.approx(by_hand["EI"] * rigid / by_hand["sag"], rel=1e-7)
        GA = 5 / 6 * 625 * 100 * 100
        sag = by_hand["sag"] + 1.2 * 3000**2 / 8 / GA
        assert result["member"]["deflection"]["max"] == pytest.approx(sag, rel=1e-7)

    def test_rows_and_spacing_make_the_stiffness(self) -> None:
        one = run(planks(section__joints__0__rows=3, section__joints__0__spacing=150))
        assert one["joints"][0]["shear_flow"] == pytest.approx(planks_by_hand(40)["flow"], rel=1e-8)

    def test_creep_softens_pieces_and_fasteners_each_by_its_own(self) -> None:
        result = run(
            planks(
                materials__pine__creep=0.6,
                materials__pine__G=...,
                fasteners__screw__creep=1.0,
                combinations={"all": {"factors": {"live": 1.5}, "sustained": {"live": 0.5}}},
            )
        )
        fresh, aged = planks_by_hand(20), planks_by_hand(20 / 2.0, E=10000 / 1.6)
        expected = 1.0 * fresh["sag"] + 0.5 * aged["sag"]
        assert result["member"]["deflection_long_term"]["max"] == pytest.approx(expected, rel=1e-7)

    def test_creep_of_the_screws_alone_is_reckoned_too(self) -> None:
        combinations = {"all": {"factors": {"live": 1.0}, "sustained": {"live": 1.0}}}
        result = run(planks(materials__pine__G=..., fasteners__screw__creep=1.0, combinations=combinations))
        assert result["member"]["deflection_long_term"]["max"] == pytest.approx(planks_by_hand(10)["sag"], rel=1e-7)

    def test_without_a_slip_modulus_nothing_stands_on_slip(self) -> None:
        result = run(planks(fasteners__screw__slip_modulus=...))
        assert result["verdict"] == "not proven"
        assert any("slip modulus" in text for text in result["missing"])
        assert result["section"]["effective_EI"] == result["section"]["EI"]
        assert not result["pieces"][0]["limits"]
        assert result["joints"][0]["limits"]  # flow and spacing stand, as upper estimates

    def test_a_bond_slides_by_its_layer(self) -> None:
        soft = changed(STACK, analysis={"slip": True}, materials__pine__G=...)
        soft["adhesives"]["glue"].update(shear_modulus=1.2, thickness=3.0)
        soft["section"]["pieces"]["upper"]["at"] = [0, 53]
        soft["section"]["joints"][0].update(width=80, coverage=0.75)
        by_hand = two_layers(3000, 1.2, (5e7, 5e7), (1e4 * 100 * 50**3 / 12,) * 2, 53, 1.2 * 80 * 0.75 / 3)
        result = run(soft)
        assert result["joints"][0]["shear_flow"] == pytest.approx(by_hand["flow"], rel=1e-8)
        assert result["joints"][0]["stress"] == pytest.approx(by_hand["flow"] / 60, rel=1e-8)
        assert result["verdict"] == "pass"

    def test_a_bond_of_unknown_stiffness_is_not_proven(self) -> None:
        result = run(STACK, analysis={"slip": True})
        assert result["verdict"] == "not proven"
        assert any("shear modulus and bond-line thickness of adhesive 'glue'" in text for text in result["missing"])
        assert result["joints"][0]["shear_flow"] == pytest.approx(27, rel=0.01)  # a stiff bond stands in

    def test_zones_of_spacing_change_the_stiffness_along_the_member(self) -> None:
        zones = [
            {"from": 0, "to": 800, "spacing": 50},
            {"from": 800, "to": 2200, "spacing": 200},
            {"from": 2200, "to": 3000, "spacing": 50},
        ]
        result = run(planks(materials__pine__G=..., section__joints__0__spacing=zones))
        stiff, soft = planks_by_hand(40), planks_by_hand(10)
        assert stiff["sag"] < result["member"]["deflection"]["max"] < soft["sag"]
        force = result["joints"][0]["limits"][0]
        assert force["at"] in (pytest.approx(800), pytest.approx(0))
        assert force["place"] in ("change of spacing in lower/upper", "support")

    def test_strength_stands_on_two_thirds_of_the_slip_modulus_where_the_rule_is_named(self) -> None:
        basis = {"method": "limit-state", "partial_factor": 1.3}
        rule = {"slip": True, "rules": ["EN 1995-1-1 2.2.2"]}
        combinations = {"all": {"factors": {"live": 1.0}}}
        result = run(planks(materials__pine__G=..., basis=basis, analysis=rule, combinations=combinations))
        assert result["joints"][0]["shear_flow"] == pytest.approx(planks_by_hand(20 * 2 / 3)["flow"], rel=1e-8)
        assert result["member"]["deflection"]["max"] == pytest.approx(planks_by_hand(20)["sag"], rel=1e-7)
        assert not any("2.2.2" in text for text in result["missing"])


class TestStressesOfPieces:
    def test_axial_force_and_own_bending(self) -> None:
        result = run(planks(materials__pine__G=...))
        w, L, EI_0, r = 1.2, 3000.0, 2 * 1e4 * 100 * 50**3 / 12, 50.0
        EI_inf = planks_by_hand(20)["EI"]
        alpha = math.sqrt(20 * (2 / 5e7 + r**2 / EI_0))
        N = 2.5e7 * r / EI_inf * (w * L**2 / 8 - w / alpha**2 * (1 - 1 / math.cosh(alpha * L / 2)))
        kappa = (w * L**2 / 8 - N * r) / EI_0
        lower = result["pieces"][0]
        assert lower["stress_bottom"] == pytest.approx(N / 5000 + 1e4 * kappa * 25, rel=1e-6)
        assert lower["stress_top"] == pytest.approx(N / 5000 - 1e4 * kappa * 25, rel=1e-6)
        assert lower["stress_mean"] == pytest.approx(N / 5000, rel=1e-6)

    def test_shear_stress_tends_to_that_of_the_rigid_member(self) -> None:
        rigid = run(STACK)
        sliding = run(planks(fasteners__screw__slip_modulus=1e9, fasteners__screw__shear_resistance=1e6))
        for one, other in zip(rigid["pieces"], sliding["pieces"], strict=True):
            assert other["shear_stress"] == pytest.approx(one["shear_stress"], rel=2e-3)
            for name in ("stress_top", "stress_bottom", "stress_mean"):
                assert other[name] == pytest.approx(one[name], rel=1e-4, abs=1e-4)

    def test_loose_planks_shear_each_by_itself(self) -> None:
        loose = run(planks(fasteners__screw__slip_modulus=1e-6))
        for piece in loose["pieces"]:
            assert piece["shear_stress"] == pytest.approx(1.5 * 900 / 5000, rel=1e-6)


class TestRings:
    def test_a_box_with_unlike_webs_is_not_proven(self) -> None:
        from tests.checks.made import BOX

        box = changed(BOX, analysis={"slip": True}, section__pieces__right__width=10)
        box["adhesives"]["resin"].update(shear_modulus=300, thickness=0.04)
        result = run(box)
        assert result["verdict"] != "pass"
        assert any("share of the shear flow" in text for text in result["missing"])

    def test_a_box_with_like_webs_is_shared_by_symmetry(self) -> None:
        from tests.checks.made import BOX

        box = changed(BOX, analysis={"slip": True})
        box["adhesives"]["resin"].update(shear_modulus=300, thickness=0.04)
        rigid, result = run(BOX), run(box)
        assert result["missing"] == rigid["missing"]
        for one, other in zip(rigid["joints"], result["joints"], strict=True):
            assert other["split"] == "symmetry"
            assert other["shear_flow"] == pytest.approx(one["shear_flow"], rel=0.02)


def test_the_governing_place_is_named() -> None:
    raw = changed(STACK, loads__live=[{"kind": "point", "at": 1200, "value": 3000}])
    result = run(raw)
    assert "1200 mm from the left end: load 1 of live" in result["governing"] or "support" in result["governing"]
    assert {limit["place"] for piece in result["pieces"] for limit in piece["limits"]} >= {"load 1 of live"}


def gangway(G: float, t: float) -> Raw:
    """Aluminium straps on a spruce core."""
    pieces = {
        "bottom": {"shape": "rectangle", "width": 45, "depth": 4, "at": [0, 0], "material": "alu"},
        "core": {"shape": "rectangle", "width": 45, "depth": 180, "at": [0, 4 + t], "material": "spruce"},
        "top": {"shape": "rectangle", "width": 45, "depth": 4, "at": [0, 184 + 2 * t], "material": "alu"},
    }
    return {
        "format": "bondwright/1",
        "kind": "member",
        "basis": {"method": "allowable", "safety_factor": 3.0},
        "materials": {"alu": {"E": 69000}, "spruce": {"E": 10500}},
        "adhesives": {"glue": {"shear_modulus": G, "thickness": t, "shear_strength": 5}},
        "section": {
            "pieces": pieces,
            "joints": [{"between": pair, "adhesive": "glue"} for pair in (["bottom", "core"], ["core", "top"])],
        },
        "member": {"length": 4200, "supports": [{"at": 0, "kind": "pin"}, {"at": 4200, "kind": "pin"}]},
        "loads": {"walk": [{"kind": "line", "from": 0, "to": 4200, "value": 1.35}]},
        "analysis": {"slip": True},
    }


@pytest.mark.parametrize(
    ("G", "t", "least", "most"), [(1200, 0.3, 0.999, 1.0), (250, 1.0, 0.995, 1.0), (1.2, 3.0, 0.8, 0.9)]
)
def test_the_gangway_with_three_adhesives(G: float, t: float, least: float, most: float) -> None:
    """Straps alike above and below pull alike: the two-layer closed form, with both straps on one equation."""
    result: dict[str, Any] = checks.run(documents.read(gangway(G, t)))
    EA, r, k = 69000 * 180, 92 + t, G * 45 / t
    EI_0 = 10500 * 45 * 180**3 / 12 + 2 * 69000 * 45 * 4**3 / 12
    EI_inf = EI_0 + 2 * EA * r**2
    alpha = math.sqrt(k * (1 / EA + 2 * r**2 / EI_0))
    a, L, w = alpha * 2100, 4200.0, 1.35
    shape = alpha**2 * L**2 / 8 + (1 / math.cosh(a) if a < 700 else 0.0) - 1
    sag = 5 * w * L**4 / (384 * EI_inf) + w / alpha**4 * (1 / EI_0 - 1 / EI_inf) * shape
    flow = EA * r / EI_inf * w * L / 2 * (1 - math.tanh(a) / a)
    assert result["member"]["deflection"]["max"] == pytest.approx(sag, rel=1e-7)
    for joint in result["joints"]:
        assert joint["shear_flow"] == pytest.approx(flow, rel=1e-7)
    share = result["section"]["effective_EI"] / result["section"]["EI"]
    assert share == pytest.approx(5 * w * L**4 / (384 * EI_inf) / sag, rel=1e-7)
    assert least < share <= most


class TestAnnexB:
    """EN 1995-1-1 Annex B beside the exact solution; the expected values are in tests/published/slip.toml."""

    def floor(self, case: Raw, **changes: object) -> Raw:
        given = case["inputs"]
        L = 1000 * given["L_m"]
        pieces: Raw = {}
        materials: Raw = {}
        up = sum(1000 * layer["h_m"] for layer in given["layers"])
        for i, layer in enumerate(given["layers"], 1):
            b, h = 1000 * layer["b_m"], 1000 * layer["h_m"]
            up -= h
            materials[f"m{i}"] = {"E": layer["E_Pa"] / 1e6}
            pieces[f"layer {i}"] = {
                "shape": "rectangle",
                "width": b,
                "depth": h,
                "at": [-b / 2, up],
                "material": f"m{i}",
            }
        joints = [
            {"between": [f"layer {i}", f"layer {i + 1}"], "fastener": "nail", "spacing": 1000 * s}
            for i, s in enumerate(given["s_m"], 1)
        ]
        raw = {
            "format": "bondwright/1",
            "kind": "member",
            "basis": {"method": "allowable", "safety_factor": 2.0},
            "materials": materials,
            "fasteners": {"nail": {"shear_resistance": 1500, "slip_modulus": given["K_N_per_m"][0] / 1000}},
            "section": {"pieces": pieces, "joints": joints},
            "member": {"length": L, "supports": [{"at": 0, "kind": "pin"}, {"at": L, "kind": "pin"}]},
            "loads": {"all": [{"kind": "line", "from": 0, "to": L, "value": given["w_N_per_m"] / 1000}]},
            "analysis": {"slip": True},
        }
        return changed(raw, **changes)

    @pytest.mark.parametrize("case", [c for c in PUBLISHED if c["kind"].startswith("gamma")], ids=lambda c: c["id"])
    def test_gamma_stiffness_and_force(self, case: Raw) -> None:
        found = run(self.floor(case))["annex_b"]
        expected = {name: part["value"] for name, part in case["expected"].items()}
        assert found["EI_ef"] == pytest.approx(1e6 * expected["EI_ef_Nm2"], rel=1e-6)
        assert found["gamma"][0] == pytest.approx(expected["gamma_1"], rel=1e-6)
        assert found["flow"][0] * 1000 * case["inputs"]["s_m"][0] == pytest.approx(expected["F_1_N"], rel=1e-6)

    def test_it_stands_near_the_exact_solution_under_a_uniform_load(self) -> None:
        result = run(self.floor(PUBLISHED_GAMMA))
        assert result["annex_b"]["EI_ef"] == pytest.approx(result["section"]["effective_EI"], rel=0.01)

    def test_limit_states_take_two_thirds_of_the_slip_modulus_for_strength(self) -> None:
        basis = {"method": "limit-state", "partial_factor": 1.3}
        result = run(self.floor(PUBLISHED_GAMMA, basis=basis, combinations={"u": {"factors": {"all": 1.0}}}))
        EA = [layer["E_Pa"] / 1e6 * layer["b_m"] * layer["h_m"] * 1e6 for layer in PUBLISHED_GAMMA["inputs"]["layers"]]
        k = 2 / 3 * PUBLISHED_GAMMA["inputs"]["K_N_per_m"][0] / 1000 / 100
        gamma = 1 / (1 + math.pi**2 * EA[0] / (k * 4200**2))
        assert result["annex_b"]["gamma"][0] == pytest.approx(gamma, rel=1e-9)
        assert any(caution["about"] == "slip modulus" for caution in result["cautions"])

    def test_what_is_no_stack_of_two_or_three_layers_has_no_annex_b(self) -> None:
        assert run(planks(section__pieces__upper__to=2000))["annex_b"] is None


def flitch(stacked: bool = False) -> Raw:
    """A steel plate between two planks, bolted; or on top of one."""
    steel = {"shape": "rectangle", "width": 6, "depth": 200, "at": [50, 0], "material": "steel"}
    pieces: Raw = {
        "left": {"shape": "rectangle", "width": 50, "depth": 200, "at": [0, 0], "material": "pine"},
        "plate": steel,
        "right": {"shape": "rectangle", "width": 50, "depth": 200, "at": [56, 0], "material": "pine"},
    }
    if stacked:
        pieces["plate"] = {**steel, "width": 106, "depth": 6, "at": [0, 200]}
        pieces["left"]["width"] = 106
        del pieces["right"]
    pairs = [["left", "plate"]] if stacked else [["left", "plate"], ["plate", "right"]]
    return {
        "format": "bondwright/1",
        "kind": "member",
        "basis": {"method": "allowable", "safety_factor": 2.0},
        "materials": {"pine": {"E": 10000, "strengths": {"bending": 30, "shear": 3}}, "steel": {"E": 210000}},
        "fasteners": {"bolt": {"shear_resistance": 8000, "slip_modulus": 6000}},
        "section": {"pieces": pieces, "joints": [{"between": p, "fastener": "bolt", "spacing": 400} for p in pairs]},
        "member": {"length": 4000, "supports": [{"at": 0, "kind": "pin"}, {"at": 4000, "kind": "pin"}]},
        "loads": {"all": [{"kind": "line", "from": 0, "to": 4000, "value": 5}]},
        "analysis": {"slip": True},
    }


class TestFlitch:
    def test_side_by_side_the_parts_share_by_stiffness(self) -> None:
        result = run(flitch())
        timber, steel = 10000 * 50 * 200**3 / 12, 210000 * 6 * 200**3 / 12
        EI = 2 * timber + steel
        for joint in result["joints"]:
            assert joint["sharing"] == "side by side"
            assert joint["share"] == pytest.approx(timber / EI)
            assert joint["shear_flow"] == pytest.approx(0, abs=1e-9)
            assert joint["handed_over"] == pytest.approx(timber / EI * 10000)
        plate = next(piece for piece in result["pieces"] if piece["id"] == "plate")
        assert plate["stress_bottom"] == pytest.approx(210000 * 1e7 / EI * 100, rel=1e-9)
        assert result["section"]["effective_EI"] == pytest.approx(EI)
        assert any(caution["about"] == "load sharing" and caution["answer"] for caution in result["cautions"])
        assert any("share by stiffness" in step["note"] for step in result["steps"])

    def test_stacked_they_share_by_the_flow_along_the_joint(self) -> None:
        result = run(flitch(stacked=True))
        (joint,) = result["joints"]
        assert joint["sharing"] == "stacked"
        assert joint["shear_flow"] > 1
        assert any("stacked, so the flow" in step["note"] for step in result["steps"])


def trough(G: float, **changes: object) -> Raw:
    """A plank on a trough with a thin and a thick wall: two joints between the same pieces."""
    wall = [[0, 0], [200, 0], [200, 100], [160, 100], [160, 20], [20, 20], [20, 100], [0, 100]]
    raw = {
        "format": "bondwright/1",
        "kind": "member",
        "basis": {"method": "allowable", "safety_factor": 2.0},
        "materials": {"wood": {"E": 10000, "G": 600, "strengths": {"bending": 40, "shear": 6}}},
        "adhesives": {"glue": {"shear_strength": 6, "shear_modulus": G, "thickness": 0.04}},
        "section": {
            "pieces": {
                "trough": {"shape": "polygon", "points": wall, "material": "wood"},
                "plank": {"shape": "rectangle", "width": 200, "depth": 30, "at": [0, 100], "material": "wood"},
            },
            "joints": [{"between": ["trough", "plank"], "adhesive": "glue", "segment": n} for n in (1, 2)],
        },
        "member": {"length": 3000, "supports": [{"at": 0, "kind": "pin"}, {"at": 3000, "kind": "pin"}]},
        "loads": {"live": [{"kind": "line", "from": 0, "to": 3000, "value": 3}]},
        "analysis": {"slip": True},
    }
    return changed(raw, **changes)


class TestParallelJoints:
    def test_soft_joints_share_the_layers_flow_by_their_stiffness(self) -> None:
        one, two = run(trough(0.002))["joints"]
        assert two["shear_flow"] == pytest.approx(2 * one["shear_flow"], rel=0.01)  # walls of 20 and 40 mm
        assert {joint["split"] for joint in (one, two)} == {"field"}

    def test_stiff_joints_share_it_as_the_rigid_field_does(self) -> None:
        stiff, rigid = run(trough(1e5)), run(trough(1e5, analysis={"slip": False}))
        for one, other in zip(stiff["joints"], rigid["joints"], strict=True):
            assert one["shear_flow"] == pytest.approx(other["shear_flow"], rel=0.02)
        assert not any("share" in text for text in stiff["missing"])

    def test_both_together_carry_the_flow_of_the_layer(self) -> None:
        result = run(trough(3.0))
        areas, up = (2 * 10**4 - 140 * 80, 200 * 30), (0.0, 115.0)
        centre = (2e4 * 50 - 140 * 80 * 60) / areas[0]
        own = 200 * 100**3 / 12 + 2e4 * (50 - centre) ** 2 - 140 * 80**3 / 12 - 140 * 80 * (60 - centre) ** 2
        layer = two_layers(
            3000,
            3.0,
            (1e4 * areas[0], 1e4 * areas[1]),
            (1e4 * own, 1e4 * 200 * 30**3 / 12),
            up[1] - centre,
            3.0 * 60 / 0.04,
        )
        assert sum(joint["shear_flow"] for joint in result["joints"]) == pytest.approx(layer["flow"], rel=1e-4)

    def test_without_G_the_share_is_not_proven(self) -> None:
        result = run(trough(3.0, materials__wood__G=...))
        assert result["verdict"] == "not proven"
        assert any("shear modulus G of trough, plank" in text for text in result["missing"])
