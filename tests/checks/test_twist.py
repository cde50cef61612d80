"""Eccentric loads in a check: flows against scikit-fem with torque by hand, and what is said about warping."""

from __future__ import annotations

import copy

import numpy as np
import pytest

from server import checks, documents
from server.mechanics.section import Piece, properties, rectangle
from tests.checks.made import BOX
from tests.mechanics.field_reference import Reference, bonds_of, lines

PLATES = {
    "low": (100, 12, (0, 0)), "high": (100, 12, (0, 148)),
    "left": (8, 136, (0, 12)), "right": (14, 136, (86, 12)),
}  # fmt: skip


def steel_box(loads, **change):
    """A bonded box of plates with unlike webs, 8 m long: closed and slender, so that warping is small."""
    raw = copy.deepcopy(BOX)
    raw["materials"] = {"plate": {"E": 70000, "G": 26000, "strengths": {"bending": 400, "shear": 200}}}
    raw["section"] = {
        "pieces": {
            name: {"shape": "rectangle", "width": w, "depth": d, "at": list(at), "material": "plate"}
            for name, (w, d, at) in PLATES.items()
        },
        "joints": [
            {"between": [a, b], "adhesive": "resin"} for a in ("low", "high") for b in ("left", "right")
        ],
    }  # fmt: skip
    raw["adhesives"] = {"resin": {"shear_strength": 20}}
    raw["basis"] = {"method": "allowable", "safety_factor": 2.0}
    raw["member"] = {"length": 8000, "supports": [{"at": 0, "kind": "pin"}, {"at": 8000, "kind": "pin"}]}
    raw["loads"] = {"live": loads}
    raw.update(change)
    return raw


def run(raw):
    return checks.run(documents.read(raw))


@pytest.fixture(scope="module")
def reference():
    pieces = [Piece(name, rectangle(*size), 70000.0, 26000.0) for name, size in PLATES.items()]
    corners = np.concatenate([p.outline for p in pieces])
    bonds = bonds_of(pieces)
    other = Reference(pieces, lines(corners[:, 0], 5.0), lines(corners[:, 1], 5.0))
    flows = other.flows(bonds)
    names = ["/".join(pieces[k].name for k in (b.first, b.second)) for b in bonds]
    EI = properties(pieces).EI
    rates = {name: (row[0] / EI, -row[2] / other.GJ) for name, row in zip(names, flows, strict=True)}
    return other, rates


def test_flows_under_an_eccentric_line_load(reference):
    """V and T both run from one end to the other, so the largest flow stands at an end."""
    other, rates = reference
    result = run(steel_box([{"kind": "line", "from": 0, "to": 8000, "value": 2.0, "offset": 30}]))
    assert result["verdict"] == "pass", result["missing"]
    V, T = 2.0 * 4000, -2.0 * 30 * 4000  # at the left end; both change sign at mid-span
    for joint in result["joints"]:
        a, b = rates[joint["id"]]
        assert joint["shear_flow"] == pytest.approx(abs(a * V + b * T), rel=0.01)
        assert np.mean(joint["distribution"]) == pytest.approx(joint["stress"], rel=1e-6)
    flow = {joint["id"]: joint["shear_flow"] for joint in result["joints"]}
    assert flow["high/right"] > flow["high/left"]  # the load lies to the right
    assert result["section"]["shear_centre"] == pytest.approx(other.shear_centre.tolist(), abs=0.2)


def test_two_loads_whose_torques_differ_are_added_place_by_place(reference):
    """A point load through the shear centre and one beside it: signs meet along the member, not as sizes."""
    _, rates = reference
    loads = [
        {"kind": "point", "at": 2000, "value": 9000},
        {"kind": "point", "at": 6000, "value": 4000, "offset": -45},
    ]
    result = run(steel_box(loads))
    assert not any("warping" in text for text in result["missing"]), result["missing"]
    x = np.array([0.0, 2000 - 1e-6, 2000 + 1e-6, 6000 - 1e-6, 6000 + 1e-6, 8000])
    V = 9000 * 0.75 + 4000 * 0.25 - 9000 * (x > 2000) - 4000 * (x > 6000)
    m = 4000 * -45
    T = -m * 0.25 + m * (x > 6000)
    for joint in result["joints"]:
        a, b = rates[joint["id"]]
        q = np.abs(a * V + b * T)
        assert joint["shear_flow"] == pytest.approx(q.max(), rel=0.01)
        assert joint["at"] == pytest.approx(x[np.flatnonzero(q > q.max() * (1 - 1e-9))[0]], abs=0.01)


def test_turning_the_load_to_the_other_side_swaps_nothing_but_the_sign_of_the_torque(reference):
    flows = []
    for offset in (30, -30, 0):
        result = run(steel_box([{"kind": "line", "from": 0, "to": 8000, "value": 2.0, "offset": offset}]))
        flows.append(np.array([joint["shear_flow"] for joint in result["joints"]]))
    np.testing.assert_allclose((flows[0] + flows[1]) / 2, flows[2], rtol=1e-6)


def test_shear_of_pieces_has_the_part_of_torsion():
    plain = run(steel_box([{"kind": "line", "from": 0, "to": 8000, "value": 2.0}], analysis={"field": "always"}))
    turned = run(steel_box([{"kind": "line", "from": 0, "to": 8000, "value": 2.0, "offset": 30}]))
    T, Am = 2.0 * 30 * 4000, (100 - 11) * 148
    for before, after in zip(plain["pieces"], turned["pieces"], strict=True):
        wall = PLATES[after["id"]][1] if after["id"] in ("low", "high") else PLATES[after["id"]][0]
        by_torsion = after["shear_stress"] - before["shear_stress"]
        bredt = T / (2 * Am * wall)  # and the linear part through the wall on top of it
        assert bredt < by_torsion < 1.6 * bredt


def channel(**change):
    raw = steel_box([{"kind": "line", "from": 0, "to": 8000, "value": 2.0, "offset": 20}], **change)
    del raw["section"]["pieces"]["right"]
    raw["section"]["joints"] = [joint for joint in raw["section"]["joints"] if "right" not in joint["between"]]
    return raw


def test_warping_of_an_open_section_is_named():
    result = run(channel())
    assert result["verdict"] == "not proven"
    assert any(text.startswith("warping torsion") for text in result["missing"])
    assert all(joint["shear_flow"] for joint in result["joints"])  # Saint-Venant's flows are shown all the same


def test_an_open_section_loaded_through_its_shear_centre_is_proven():
    raw = channel()
    del raw["loads"]["live"][0]["offset"]
    assert run(raw)["verdict"] == "pass"


def test_what_torsion_lacks_is_named():
    raw = steel_box([{"kind": "point", "at": 2000, "value": 900, "offset": 10}], analysis={"field": "never"})
    assert any("torsion of eccentric loads" in text for text in run(raw)["missing"])
    raw = steel_box([{"kind": "point", "at": 2000, "value": 900, "offset": 10}])
    del raw["materials"]["plate"]["G"]
    assert any("torsion of eccentric loads" in text for text in run(raw)["missing"])


def test_axles_that_move_beside_a_load_that_twists(reference):
    """The worst of all places and positions, by trying them all: flows from scikit-fem, shear and torque by hand.

    The left web's joints are worst where the torque begins to fade, which no position for shear alone brings out.
    """
    _, rates = reference
    twisting = {"kind": "line", "from": 2000, "to": 6000, "value": 1.0, "offset": 200}
    axles = [[0, 3000], [1500, 2000]]
    raw = steel_box([twisting])
    raw["loads"]["crane"] = [{"kind": "moving", "axles": axles}]
    raw["combinations"] = {"all": {"factors": {"live": 1.0, "crane": 1.2}}}
    result = run(raw)
    assert result["verdict"] == "pass", result["missing"]
    L, (x, datum) = 8000.0, np.meshgrid(np.linspace(0, 8000, 641), np.linspace(-1500, 8000, 761))
    under = np.clip(x - 2000, 0, 4000)
    T = 200 * (under - 2000)
    best = dict.fromkeys(rates, 0.0)
    for faced in (axles, [[-at, force] for at, force in axles]):  # both directions
        V = 2000 - under
        for at, force in faced:
            place = datum + at + (1500 if faced is not axles else 0)
            on = (place >= 0) & (place <= L)
            V = V + np.where(on, 1.2 * force * ((1 - place / L) - (place < x)), 0.0)
        for name, (a, b) in rates.items():
            best[name] = max(best[name], float(np.abs(a * V + b * T).max()))
    for joint in result["joints"]:
        assert joint["shear_flow"] == pytest.approx(best[joint["id"]], rel=0.012), joint["id"]
    assert {joint["at"] for joint in result["joints"] if "left" in joint["id"]} == {2000.0}
    still = run(steel_box([twisting]))
    for one, other in zip(still["pieces"], result["pieces"], strict=True):
        assert other["shear_stress"] > one["shear_stress"]
