"""Unsymmetrical bending in a check: closed forms of Z and L, scikit-fem for the flows, turning, symmetric sections.

Closed forms: S. P. Timoshenko and J. M. Gere, Mechanics of Materials, "Unsymmetric beams" (from memory); sums over
rectangles by hand.
"""

from __future__ import annotations

import copy

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server import checks, documents
from server.errors import DocumentError
from server.mechanics.section import Piece, properties
from server.sheets import loads_svg
from tests.checks.made import BOX
from tests.mechanics.field_reference import Reference, bonds_of, lines

E, G = 70000.0, 26000.0
Z = {"low": (60, 6, (-54, 0)), "web": (6, 100, (0, 6)), "high": (60, 6, (0, 106))}
ANGLE = {"leg": (8, 90, (0, 10)), "foot": (60, 10, (0, 0))}
PINS = [{"at": 0, "kind": "pin"}, {"at": 4000, "kind": "pin"}]


def corners(width, depth, at):
    a, u = at
    return np.array([[a, u], [a + width, u], [a + width, u + depth], [a, u + depth]], dtype=float)


def member(plates, joints, loads, supports=PINS, turn=0.0, moduli=None, **change):
    """Plates of a bonded section, each a polygon so that the whole can be turned by any angle."""
    c, s = np.cos(turn), np.sin(turn)
    raw = copy.deepcopy(BOX)
    kinds = {name: (moduli or {}).get(name, (E, G)) for name in plates}
    raw["materials"] = {
        f"plate of {name}": {"E": own[0], "G": own[1], "strengths": {"bending": 300, "shear": 150}}
        for name, own in kinds.items()
    }
    raw["section"] = {
        "pieces": {
            name: {
                "shape": "polygon",
                "points": (corners(*size) @ np.array([[c, s], [-s, c]])).tolist(),
                "material": f"plate of {name}",
            }
            for name, size in plates.items()
        },
        "joints": [{"between": list(pair), "adhesive": "resin"} for pair in joints],
    }
    raw["adhesives"] = {"resin": {"shear_strength": 20}}
    raw["basis"] = {"method": "allowable", "safety_factor": 2.0}
    raw["member"] = {"length": 4000, "supports": supports, "held_sideways": False, "deflection_limit": 50}
    raw["loads"] = {"live": loads}
    raw.update(change)
    return raw


def run(raw):
    return checks.run(documents.read(raw))


def second_moments(plates):
    """EI, EI_lateral, EI_product and the axis of rectangles of one modulus, by hand."""
    A = {name: w * d for name, (w, d, _) in plates.items()}
    middle = {name: (at[0] + w / 2, at[1] + d / 2) for name, (w, d, at) in plates.items()}
    a0, u0 = (sum(A[n] * middle[n][k] for n in plates) / sum(A.values()) for k in (0, 1))
    upright = sum(w * d**3 / 12 + w * d * (middle[n][1] - u0) ** 2 for n, (w, d, _) in plates.items())
    lateral = sum(d * w**3 / 12 + w * d * (middle[n][0] - a0) ** 2 for n, (w, d, _) in plates.items())
    product = sum(A[n] * (middle[n][0] - a0) * (middle[n][1] - u0) for n in plates)
    return E * upright, E * lateral, E * product, (a0, u0)


def test_a_z_on_two_pins_under_load_straight_down():
    """Stress at the corner (6, 0), flows of both joints, deflection down and to the right."""
    EI, lateral, product, (a0, u0) = second_moments(Z)
    result = run(member(Z, [("low", "web"), ("web", "high")], [{"kind": "line", "from": 0, "to": 4000, "value": 0.8}]))
    assert result["verdict"] == "pass", (result["missing"], result["governing"])
    D = EI * lateral - product**2
    M, V, w, L = 0.8 * 4000**2 / 8, 1600.0, 0.8, 4000.0
    sigma = E * M * (product * (6 - a0) - lateral * (0 - u0)) / D
    low = next(p for p in result["pieces"] if p["id"] == "low")
    assert low["stress_bottom"] == pytest.approx(sigma, rel=1e-9)
    S_v, S_l = 360 * E * (3 - u0), 360 * E * (-24 - a0)
    for joint in result["joints"]:
        assert joint["shear_flow"] == pytest.approx(abs(V * (lateral * S_v - product * S_l)) / D, rel=1e-6)
        assert np.mean(joint["distribution"]) == pytest.approx(joint["stress"], rel=1e-6)
        assert joint["shear_flow_by_field"] == pytest.approx(joint["shear_flow"], rel=0.005)  # beside the hand's
        assert joint["field_differs"] <= 0.005
    bent = 5 * w * L**4 / 384
    down, right = (result["member"][name]["max"] for name in ("deflection", "deflection_lateral"))
    assert down == pytest.approx(bent * lateral / D, rel=0.01)  # and a little from shear on top of it
    assert right == pytest.approx(bent * product / D, rel=0.01)
    assert down > bent * lateral / D
    assert result["member"]["moment_lateral"]["max"] == pytest.approx(0, abs=1e-3)
    assert "held sideways" in [caution["about"] for caution in result["cautions"]]


def test_an_angle_fixed_at_one_end_under_a_force_to_the_right():
    EI, lateral, product, (a0, u0) = second_moments(ANGLE)
    force = {"kind": "point", "at": 4000, "value": 0, "lateral": 120}
    result = run(member(ANGLE, [("leg", "foot")], [force], [{"at": 0, "kind": "fixed"}]))
    D = EI * lateral - product**2
    (drawn,) = result["drawing"]["loads"]
    assert drawn["value"] == 120
    assert "to the right" in drawn["case"]
    assert "120 N at 4 m" in loads_svg(result)
    reaction = result["member"]["reactions"]["all"][0]
    assert reaction["lateral"] == pytest.approx(-120)
    assert reaction["force"] == pytest.approx(0, abs=1e-6)
    right, down = (result["member"][name] for name in ("deflection_lateral", "deflection"))
    assert right["max"] == pytest.approx(120 * 4000**3 / 3 * EI / D, rel=0.005)
    assert down["max"] == pytest.approx(120 * 4000**3 / 3 * product / D if product > 0 else 0.0, rel=0.005, abs=1e-6)
    assert down["min"] == pytest.approx(120 * 4000**3 / 3 * product / D if product < 0 else 0.0, rel=0.005, abs=1e-6)
    M_l = -120.0 * 4000  # the left-hand side in tension at the wall
    at = corners(*ANGLE["leg"])
    sigma = E * M_l * (EI * (at[:, 0] - a0) - product * (at[:, 1] - u0)) / D
    leg = next(p for p in result["pieces"] if p["id"] == "leg")
    assert max(abs(leg["stress_top"]), abs(leg["stress_bottom"])) == pytest.approx(np.abs(sigma).max(), rel=1e-9)
    S_v, S_l = 600 * E * (5 - u0), 600 * E * (30 - a0)
    flow = abs(120 * (product * S_v - EI * S_l)) / D
    assert result["joints"][0]["shear_flow"] == pytest.approx(flow, rel=1e-6)


LOPSIDED = {
    "low": (100, 12, (0, 0)),
    "high": (70, 12, (0, 112)),
    "left": (8, 100, (0, 12)),
    "right": (14, 100, (50, 12)),
}
MODULI = {"low": (E, G), "high": (60000.0, 20000.0), "left": (E, G), "right": (30000.0, 9000.0)}
RING = [("low", "left"), ("low", "right"), ("high", "left"), ("high", "right")]


def test_flows_of_a_lopsided_ring_pushed_down_and_sideways_against_scikit_fem():
    """Which no cut opens: flows of either shear from the reference, added with sign."""
    loads = [{"kind": "line", "from": 0, "to": 4000, "value": 1.5, "lateral": -0.9}]
    result = run(member(LOPSIDED, RING, loads, moduli=MODULI))
    pieces = [Piece(name, corners(*size), *MODULI[name]) for name, size in LOPSIDED.items()]
    every, bonds = np.concatenate([p.outline for p in pieces]), bonds_of(pieces)
    whole = properties(pieces)
    other = Reference(pieces, lines(every[:, 0], 6.0), lines(every[:, 1], 6.0))
    shares = other.flows(bonds)[:, :2]
    D = np.array([[whole.EI, -whole.EI_product], [-whole.EI_product, whole.EI_lateral]])
    down, right = np.linalg.solve(D, (1.5 * 2000, -0.9 * 2000))
    names = ["/".join(pieces[k].name for k in (b.first, b.second)) for b in bonds]
    wanted = dict(zip(names, np.abs(shares @ (down, -right)), strict=True))
    for joint in result["joints"]:
        pair = joint["id"] if joint["id"] in wanted else "/".join(reversed(joint["id"].split("/")))
        assert joint["shear_flow"] == pytest.approx(wanted[pair], rel=0.01), joint["id"]
    strains = np.linalg.inv(D) @ (other.energy * [[1, -1], [-1, 1]]) @ np.linalg.inv(D)
    steps = {step["symbol"]: step["value"] for step in result["steps"] if step["group"] == "Section"}
    found = np.array([[steps["g_v"], steps["g_p"]], [steps["g_p"], steps["g_l"]]])
    np.testing.assert_allclose(found, strains, rtol=0.01, atol=0.01 * strains.max())
    bands = result["contours"]["bending"]  # both planes together, at mid-span
    most = max(max(abs(p["stress_top"]), abs(p["stress_bottom"])) for p in result["pieces"])
    assert max(bands["greatest"], -bands["least"]) == pytest.approx(most, rel=1e-6)


@given(turn=st.floats(-3.1, 3.1), aside=st.floats(-2, 2))
@settings(max_examples=8, deadline=None)
def test_turning_section_and_load_together_changes_no_flow_and_no_use(turn, aside):
    def turned(angle):
        down, right = np.cos(angle) * 1.2 - np.sin(angle) * aside, np.sin(angle) * 1.2 + np.cos(angle) * aside
        load = {"kind": "line", "from": 0, "to": 4000, "value": down, "lateral": right}
        return run(member(ANGLE, [("leg", "foot")], [load], turn=angle))

    plain, other = turned(0.0), turned(turn)
    for one, two in zip(plain["joints"], other["joints"], strict=True):
        assert two["shear_flow"] == pytest.approx(one["shear_flow"], rel=1e-5)
    for one, two in zip(plain["pieces"], other["pieces"], strict=True):
        bending = [next(lim["utilisation"] for lim in p["limits"] if "bending" in lim["what"]) for p in (one, two)]
        assert bending[1] == pytest.approx(bending[0], rel=1e-6)

    def sag(result):
        return np.array([result["member"][n]["max"] + result["member"][n]["min"] for n in SAGS])

    c, s = np.cos(turn), np.sin(turn)
    np.testing.assert_allclose(
        sag(other), np.array([[c, -s], [s, c]]) @ sag(plain), atol=2e-4 * np.abs(sag(plain)).max()
    )


SAGS = ("deflection", "deflection_lateral")


def test_a_symmetric_section_under_load_straight_down_bends_as_if_it_were_held():
    found = []
    for held in (True, False):
        raw = copy.deepcopy(BOX)
        raw["member"]["held_sideways"] = held
        found.append(run(raw))
    for name in ("verdict", "utilisation", "governing", "section", "member", "joints", "pieces"):
        assert found[1][name] == found[0][name], name


def test_mirroring_turns_the_way_it_leans_and_nothing_else():
    def lean(way):
        plates = {n: (w, d, (at[0] if way > 0 else -at[0] - w, at[1])) for n, (w, d, at) in Z.items()}
        loads = [{"kind": "line", "from": 0, "to": 4000, "value": 0.8}]
        return run(member(plates, [("low", "web"), ("web", "high")], loads))

    one, two = lean(1), lean(-1)
    assert two["utilisation"] == pytest.approx(one["utilisation"], rel=1e-9)
    peaks = one["member"]["deflection_lateral"]["max"], two["member"]["deflection_lateral"]["min"]
    assert peaks[1] == pytest.approx(-peaks[0], rel=1e-9)


def test_without_shear_moduli_cuts_give_the_flows_and_the_rest_is_named():
    raw = member(Z, [("low", "web"), ("web", "high")], [{"kind": "line", "from": 0, "to": 4000, "value": 0.8}])
    whole = run(raw)
    for material in raw["materials"].values():
        del material["G"]
    result = run(raw)
    for one, two in zip(whole["joints"], result["joints"], strict=True):
        assert two["shear_flow"] == pytest.approx(one["shear_flow"], rel=1e-6)
    assert any("shear field" in text for text in result["missing"])
    assert any(c["about"] == "shear deformation" for c in result["cautions"])


@pytest.mark.parametrize(
    ("change", "word"),
    [
        ({"analysis": {"slip": True}}, "slip of the joints"),
        ({"analysis": {"rules": ["EN 1995-1-1 9.1.2"]}}, "the rules"),
        ({"service": {"temperature": [0, 40], "cure_temperature": 20}}, "movement"),
    ],
)
def test_what_is_reckoned_for_one_plane_only_is_named(change, word):
    loads = [{"kind": "line", "from": 0, "to": 4000, "value": 0.8}]
    result = run(member(Z, [("low", "web"), ("web", "high")], loads, **change))
    assert result["verdict"] != "pass"
    assert any("both axes" in text and word in text for text in result["missing"])


def test_moving_axles_are_refused_where_the_section_bends_both_ways():
    loads = [{"kind": "moving", "axles": [[0, 500]]}]
    with pytest.raises(DocumentError, match="axles"):
        run(member(Z, [("low", "web"), ("web", "high")], loads))


def test_an_eccentric_load_adds_its_torque_with_sign():
    """The flow of both shears and of the torque: of two loads at like distances the mean is that without torque."""
    flows = []
    for offset in (6, -6, 0):
        loads = [{"kind": "line", "from": 0, "to": 4000, "value": 1.5, "lateral": -0.9, "offset": offset}]
        flows.append([joint["shear_flow"] for joint in run(member(LOPSIDED, RING, loads, moduli=MODULI))["joints"]])
    np.testing.assert_allclose(np.mean(flows[:2], axis=0), flows[2], rtol=1e-6)
    assert abs(flows[0][0] / flows[1][0] - 1) > 0.01


def test_the_neutral_axis_lies_where_no_stress_is():
    """By the formula of the Z above; and by principal axes: tan beta = I_max/I_min tan theta (Gere and Timoshenko,
    Mechanics of Materials, 4th ed., 6.5, from memory), for a plate turned by 20 degrees."""
    _, lateral, product, _ = second_moments(Z)
    load = [{"kind": "line", "from": 0, "to": 4000, "value": 0.8}]
    drawn = run(member(Z, [("low", "web"), ("web", "high")], load))["section"]["bent_axis"]
    across, up = drawn["direction"]
    assert up / across == pytest.approx(product / lateral, rel=1e-9)
    assert (drawn["at"], np.hypot(across, up)) == (pytest.approx(2000), pytest.approx(1))
    turn, two = np.radians(20), {"low": (40, 60, (0, 0)), "high": (40, 60, (0, 60))}
    across, up = run(member(two, [("low", "high")], load, turn=turn))["section"]["bent_axis"]["direction"]
    from_own = np.arctan((120**3 * 40) / (40**3 * 120) * np.tan(turn))  # from the plate's own level axis, load turned
    assert abs(np.degrees(np.arctan2(up, across))) == pytest.approx(np.degrees(from_own - turn), rel=1e-9)
    assert (
        run(member(two, [("low", "high")], load, member={"length": 4000, "supports": PINS, "deflection_limit": 50}))[
            "section"
        ]["bent_axis"]
        is None
    )
