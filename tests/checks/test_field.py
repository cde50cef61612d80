"""Checks whose joints only the field of shear settles: against scikit-fem, and what the check says around it."""

from __future__ import annotations

import copy
from dataclasses import replace

import numpy as np
import pytest

from server import checks, documents
from server.checks import crosssection, section_field
from server.mechanics.section import Piece, properties, rectangle
from server.remembered import Remembered
from tests.checks.made import BOX
from tests.mechanics.field_reference import Reference, bonds_of, lines


def unlike(**analysis):
    """A box with one web of half the stiffness in shear: no cut, no symmetry."""
    raw = copy.deepcopy(BOX)
    raw["materials"]["soft"] = {**raw["materials"]["ply"], "G": 300, "layered": False}
    raw["materials"]["ply"]["layered"] = False
    raw["section"]["pieces"]["right"]["material"] = "soft"
    raw["analysis"] = analysis
    return raw


def run(raw):
    return checks.run(documents.read(raw))


def joints(result):
    return {joint["id"]: joint for joint in result["joints"]}


@pytest.fixture(scope="module")
def reference():
    box = {"bottom": (90, 70, (12.5, 0)), "top": (90, 70, (12.5, 330)), "left": (12.5, 400, (0, 0))}
    box["right"] = (12.5, 400, (102.5, 0))
    moduli = {"bottom": (11000.0, 690.0), "top": (11000.0, 690.0), "left": (6500.0, 600.0), "right": (6500.0, 300.0)}
    pieces = [Piece(name, rectangle(*size), *moduli[name]) for name, size in box.items()]
    corners = np.concatenate([p.outline for p in pieces])
    bonds = bonds_of(pieces)
    found = Reference(pieces, lines(corners[:, 0], 12.0), lines(corners[:, 1], 12.0))
    names = ["/".join(pieces[k].name for k in (b.first, b.second)) for b in bonds]
    return properties(pieces), found, dict(zip(names, np.abs(found.flows(bonds)[:, 0]), strict=True))


def test_flows_of_a_box_with_unlike_webs(reference):
    section, other, shares = reference
    result = run(unlike())
    V = result["member"]["shear"]["max"]
    assert result["verdict"] == "pass"
    assert {j["split"] for j in result["joints"]} == {"field"}
    for name, joint in joints(result).items():
        assert joint["shear_flow"] == pytest.approx(V * shares[name] / section.EI, rel=0.01)
        assert joint["stress"] == pytest.approx(joint["shear_flow"] / 70, rel=1e-12)
        # the whole flange is cut off, and its two joints share its moment
        flange = name.split("/")[0]
        assert joint["cut_off"] == [flange]
        assert joint["first_moment"] == pytest.approx(90 * 70 * 165.0)
        assert sorted(joint["partners"]) == [f"{flange}/left", f"{flange}/right"]
        assert np.mean(joint["distribution"]) == pytest.approx(joint["stress"], rel=1e-9)
    across, up = result["section"]["shear_centre"]
    assert (across, up) == pytest.approx(tuple(other.shear_centre), abs=0.3)
    assert result["section"]["GJ"] == pytest.approx(other.GJ, rel=0.005)
    assert result["section"]["GA"] == pytest.approx(section.EI**2 / other.energy[0, 0], rel=0.005)


def test_the_step_says_mesh_error_and_equilibrium():
    steps = {step["title"]: step for step in run(unlike())["steps"]}
    error = steps["Field of shear: estimated error"]
    assert 0 < error["value"] <= 0.005
    assert "triangles" in error["formula"] or "triangles" in str(error)
    balance = next(step for title, step in steps.items() if title.startswith("Equilibrium of"))
    assert balance["value"] == pytest.approx(1.0, abs=1e-9)


def test_always_sets_the_field_beside_the_hand():
    raw = copy.deepcopy(BOX)
    plain = joints(run(raw))
    raw["analysis"] = {"field": "always"}
    result = run(raw)
    assert result["verdict"] == "pass"
    for name, joint in joints(result).items():
        assert joint["split"] == "symmetry"
        assert joint["shear_flow"] == pytest.approx(plain[name]["shear_flow"], rel=1e-12)
        assert joint["shear_flow_by_field"] == pytest.approx(joint["shear_flow"], rel=0.005)
        assert len(joint["distribution"]) == 9
        assert plain[name]["distribution"] == []
    assert result["section"]["shear_centre"] == pytest.approx([57.5, 200.0], abs=0.01)


@pytest.fixture
def nothing_remembered(monkeypatch):
    monkeypatch.setattr(crosssection, "_bodies", Remembered(1))


@pytest.mark.usefixtures("nothing_remembered")
def test_hand_and_field_that_differ_prove_nothing(monkeypatch):
    solve = section_field.remembered_field

    def wrong(*given):
        found = solve(*given)
        return replace(found, share=found.share * (1.006, 1, 1, 1))

    monkeypatch.setattr(section_field, "remembered_field", wrong)
    result = run({**copy.deepcopy(BOX), "analysis": {"field": "always"}})
    assert result["verdict"] == "not proven"
    assert [text for text in result["missing"] if "differ by 0.60%" in text]


def test_never_leaves_the_joints_open():
    result = run(unlike(field="never"))
    assert result["verdict"] == "not proven"
    assert {j["split"] for j in result["joints"]} == {None}
    assert len([text for text in result["missing"] if "its share of the shear flow" in text]) == 4
    assert result["section"]["shear_centre"] is None


@pytest.mark.usefixtures("nothing_remembered")
def test_the_field_is_not_solved_where_cuts_and_symmetry_settle_all(monkeypatch):
    monkeypatch.setattr(section_field, "remembered_field", None)
    assert run(copy.deepcopy(BOX))["verdict"] == "pass"


def test_a_piece_without_shear_modulus_is_named():
    raw = unlike()
    del raw["materials"]["soft"]["G"]
    result = run(raw)
    assert result["verdict"] == "not proven"
    assert any("needs the shear modulus G of right" in text for text in result["missing"])
    raw = {**copy.deepcopy(BOX), "analysis": {"field": "always"}}
    del raw["materials"]["softwood"]["G"]
    result = run(raw)
    assert any("needs the shear modulus G of bottom, top" in text for text in result["missing"])
    assert {j["split"] for j in result["joints"]} == {"symmetry"}


@pytest.mark.parametrize("change", [{"layered": True}, {"grain": "across"}])
def test_layered_and_cross_grained_pieces_take_the_rolling_modulus(change):
    raw, wanted = unlike(), unlike()
    raw["materials"]["soft"].update(G=600, G_rolling=60, **{k: v for k, v in change.items() if k == "layered"})
    raw["section"]["pieces"]["right"].update({k: v for k, v in change.items() if k == "grain"})
    wanted["materials"]["soft"]["G"] = 60
    found, wanted = joints(run(raw)), joints(run(wanted))
    for name, joint in found.items():
        assert joint["shear_flow"] == pytest.approx(wanted[name]["shear_flow"], rel=1e-9)
    assert found["top/right"]["shear_flow"] < 0.5 * found["top/left"]["shear_flow"]


def test_a_cut_part_of_the_ring_stays_by_hand():
    """A ledge on one web is a clean cut beside joints that only the field settles; both stand together."""
    raw = unlike()
    raw["section"]["pieces"]["ledge"] = {
        "shape": "rectangle", "width": 40, "depth": 45, "at": [115, 20], "material": "softwood",
    }  # fmt: skip
    raw["section"]["joints"].append({"between": ["right", "ledge"], "adhesive": "resin"})
    result = run(raw)
    ledge = joints(result)["right/ledge"]
    assert ledge["split"] == "cut"
    assert ledge["shear_flow_by_field"] == pytest.approx(ledge["shear_flow"], rel=0.005)
    assert joints(result)["bottom/right"]["split"] == "field"
    assert result["verdict"] == "pass"


def test_shear_in_each_piece_is_its_own_share():
    """Half the stiffness, about half the stress: cuts through one web alone, not both webs at one stress."""
    result = run(unlike())
    stress = {piece["id"]: piece["shear_stress"] for piece in result["pieces"]}
    V, EI = result["member"]["shear"]["max"], result["section"]["EI"]
    share = {name: joint["shear_flow"] * EI / V for name, joint in joints(result).items()}
    web = 6500 * 12.5 * 200 * 100.0  # E-weighted first moment of half a web
    for side in ("left", "right"):
        middle = V * (share[f"top/{side}"] + web) / (EI * 12.5)
        assert stress[side] == pytest.approx(middle, rel=1e-3)
    assert stress["left"] > 1.4 * stress["right"]


def test_a_section_that_was_seen_before_is_not_built_again_and_any_change_of_it_is():
    raw = copy.deepcopy(BOX)
    body = crosssection.build(documents.read(raw))
    raw["title"], raw["member"]["deflection_limit"] = "another job", 123
    assert crosssection.build(documents.read(raw)) is body
    for change in (
        lambda d: d["materials"]["softwood"].update(E=9999),
        lambda d: d["section"]["pieces"]["top"].update(material="ply"),
        lambda d: d["section"]["joints"][0].update(coverage=0.5),
        lambda d: d["member"].update(length="6.1 m"),
        lambda d: d["analysis"].update(field="always"),
    ):
        other = copy.deepcopy(raw)
        other.setdefault("analysis", {})
        change(other)
        assert crosssection.build(documents.read(other)) is not body
