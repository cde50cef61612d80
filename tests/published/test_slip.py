"""Members with slip against closed forms: Newmark's uniform load, and Annex B, which is exact for a sine load.

Sources are in slip.toml beside each case. The three-layer case is the contract of Annex B for a simple span; its
closed form holds for a load q sin(pi x / L), here laid on as 240 straight pieces.
"""

from __future__ import annotations

import math
import tomllib
from pathlib import Path

import numpy as np
import pytest

from server.mechanics.beam import LineLoad, Support, evaluate
from server.mechanics.slip import FlexibleJoint, Layer, LayeredMember, SlipResponse, Zone, solve_slip

CASES = tomllib.loads((Path(__file__).parent / "slip.toml").read_text(encoding="utf-8"))["case"]
NEWMARK = [case for case in CASES if case["kind"] == "newmark"]
GAMMA = [case for case in CASES if case["kind"].startswith("gamma")]
PIECES = 240


@pytest.mark.parametrize("case", NEWMARK, ids=lambda case: case["id"])
def test_uniform_load_matches_newmark(case: dict) -> None:
    given, expected = case["inputs"], case["expected"]
    L = 1000 * given["L_m"]
    layers = [
        Layer(0, L, given["E1A1_N"], 1e6 * given["E1I1_Nm2"], 1000 * given["r_m"]),
        Layer(0, L, given["E2A2_N"], 1e6 * given["E2I2_Nm2"], 0.0),
    ]
    joint = FlexibleJoint(1, 0, (Zone(0, L, 1e-6 * given["k_N_per_m2"]),))
    member = LayeredMember(L, [Support(0, "pin"), Support(L, "pin")], [], layers, [joint])
    found = solve_slip(member, [[LineLoad(0, L, given["q_N_per_m"] / 1000, given["q_N_per_m"] / 1000)]])
    read = {
        "w_mid_m": evaluate(found.response.breaks, found.response.deflection[0], L / 2) / 1000,
        "N_mid_N": abs(evaluate(found.response.breaks, found.curves.axial[0, 0], L / 2)),
        "shear_flow_support_N_per_m": 1000 * abs(evaluate(found.response.breaks, found.curves.flow[0, 0], 0.0)),
    }
    for name, value in read.items():
        assert float(value) == pytest.approx(expected[name]["value"], rel=expected[name]["rel_tol"]), name


def sine_loaded(given: dict) -> tuple[SlipResponse, list[Layer], float, float]:
    """Layers from the lowest number up, under a sine load whose moment at midspan is w L^2 / 8."""
    L = 1000 * given["L_m"]
    depth = sum(1000 * layer["h_m"] for layer in given["layers"])
    layers = []
    for layer in given["layers"]:  # numbered from the top down
        b, h, E = 1000 * layer["b_m"], 1000 * layer["h_m"], layer["E_Pa"] / 1e6
        depth -= h
        layers.append(Layer(0, L, E * b * h, E * b * h**3 / 12, depth + h / 2))
    joints = [
        FlexibleJoint(i, i + 1, (Zone(0, L, K / s * 1e-6),))
        for i, (K, s) in enumerate(zip(given["K_N_per_m"], given["s_m"], strict=True))
    ]
    member = LayeredMember(L, [Support(0, "pin"), Support(L, "pin")], [], layers, joints)
    moment = given["w_N_per_m"] / 1000 * L**2 / 8
    top = moment * math.pi**2 / L**2
    x = np.linspace(0, L, PIECES + 1)
    w = top * np.sin(np.pi * x / L) * (1 + (np.pi / PIECES) ** 2 / 12)  # chords carry a little less than the arc
    return (
        solve_slip(member, [[LineLoad(a, b, p, q) for a, b, p, q in zip(x, x[1:], w, w[1:], strict=False)]]),
        layers,
        moment,
        L,
    )


@pytest.mark.parametrize("case", GAMMA, ids=lambda case: case["id"])
def test_sine_load_matches_annex_b(case: dict) -> None:
    found, layers, moment, L = sine_loaded(case["inputs"])
    expected = {name: part["value"] for name, part in case["expected"].items()}
    breaks = found.response.breaks
    sag = float(evaluate(breaks, found.response.deflection[0], L / 2))
    assert moment * L**2 / math.pi**2 / sag == pytest.approx(1e6 * expected["EI_ef_Nm2"], rel=1e-5)
    top = case["inputs"]["layers"][0]
    E, h = top["E_Pa"] / 1e6, 1000 * top["h_m"]
    axial = float(evaluate(breaks, found.curves.axial[0, 0], L / 2)) / layers[0].EA * E
    bend = float(evaluate(breaks, found.curves.curvature[0], L / 2)) * E * h / 2
    assert abs(axial) == pytest.approx(expected["sigma_1_Pa"] / 1e6, rel=1e-5)
    assert abs(bend) == pytest.approx(expected["sigma_m1_Pa"] / 1e6, rel=1e-5)


def test_force_per_fastener_of_a_sine_load_follows_its_shear() -> None:
    """Expression (B.10) takes the greatest shear force; under a sine load that is pi M / L."""
    case = next(case for case in GAMMA if case["kind"] == "gamma2")
    found, _, moment, L = sine_loaded(case["inputs"])
    flow = abs(float(evaluate(found.response.breaks, found.curves.flow[0, 0], 0.0)))
    uniform_shear = case["inputs"]["w_N_per_m"] / 1000 * L / 2
    force = flow * 1000 * case["inputs"]["s_m"][0] * uniform_shear / (math.pi * moment / L)
    assert force == pytest.approx(case["expected"]["F_1_N"]["value"], rel=1e-4)
