"""One fastener against print: NDS tables value by value; cases of EN 1995-1-1 from its printed formulas.

``fasteners_nds_lateral.csv`` (nail values to 1 lbf, bolt values to 10 lbf; each row says whether it was read or
remembered), ``fasteners_nds.toml`` and ``fasteners_en.toml`` name their clauses. The modes are computed a second time
here from equilibrium of a rigid-plastic dowel, without the printed equations.
"""

from __future__ import annotations

import csv
import math
import tomllib
from decimal import Decimal
from pathlib import Path
from typing import Any

import pytest

from server import checks, documents
from server.mechanics import dowel_distances as distances

HERE = Path(__file__).parent
LBF, INCH, PSI = 4.4482216152605, 25.4, 6894.757293168361


def cases(name: str, *kinds: str) -> list[dict[str, Any]]:
    read = tomllib.loads((HERE / name).read_text(encoding="utf-8"))["case"]
    return [case for case in read if case["kind"] in kinds]


def by_id(case: dict[str, Any]) -> str:
    return str(case["id"])


def run(**document: Any) -> dict[str, Any]:
    whole = {"format": "bondwright/1", "kind": "fastener", **document}
    return checks.run(documents.read(whole))


# --- NDS --------------------------------------------------------------------------------------------------------------

ROWS = list(csv.DictReader((HERE / "fasteners_nds_lateral.csv").open(encoding="utf-8")))


def nds(row: dict[str, str], **more: Any) -> dict[str, Any]:
    bolt = row["fastener"] == "bolt"
    return run(
        method="yield-limit",
        fastener={
            "type": "bolt" if bolt else "nail",
            "diameter": 1000 * float(row["D_m"]),
            "bending_yield": float(row["F_yb_Pa"]) / 1e6,
        },
        side={
            "thickness": 1000 * float(row["side_thickness_m"]),
            "specific_gravity": float(row["specific_gravity"]),
            "angle": float(row["theta_side_deg"]),
        },
        main={
            "thickness": 1000 * float(row["main_bearing_m"]),
            "specific_gravity": float(row["specific_gravity"]),
            "angle": float(row["theta_main_deg"]),
        },
        **more,
    )


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row["id"])
def test_the_tables_of_the_nds_come_out_to_their_printed_digits(row):
    """Tables 12N (nails, printed to 1 lbf) and 12A (bolts, printed to 10 lbf) of ANSI/AWC NDS-2018."""
    found = nds(row)
    lbf = Decimal(found["shear_resistance"]) / Decimal(str(LBF))
    step = Decimal(10) if row["fastener"] == "bolt" else Decimal(1)
    assert (lbf / step).quantize(Decimal(1)) * step == Decimal(row["Z_published_lbf"])
    assert found["governing_mode"] == row["mode"]
    assert found["shear_resistance"] == pytest.approx(float(row["Z_recomputed_N"]), rel=1e-4)
    bearing = found["embedment"]
    assert bearing["main"] == pytest.approx(float(row["F_em_Pa"]) / 1e6, rel=1e-9)
    assert bearing["side"] == pytest.approx(float(row["F_es_Pa"]) / 1e6, rel=1e-9)


@pytest.mark.parametrize("case", cases("fasteners_nds.toml", "nds_yield"), ids=by_id)
def test_all_modes_of_one_nail(case):
    given, expected = case["inputs"], case["expected"]
    found = run(
        method="yield-limit",
        fastener={"type": "nail", "diameter": f"{given['D_in']} in", "bending_yield": f"{given['F_yb_psi']} psi"},
        side={"thickness": f"{given['l_s_in']} in", "embedment": f"{given['F_es_psi']} psi"},
        main={"thickness": f"{given['l_m_in']} in", "embedment": f"{given['F_em_psi']} psi"},
    )
    for mode, load in found["modes"].items():
        assert load / LBF == pytest.approx(expected[f"Z_{mode}_lbf"]["value"], rel=1e-6)
    assert found["governing_mode"] == expected["governing"]["value"]
    assert found["shear_resistance"] == pytest.approx(expected["Z_N"]["value"], rel=1e-6)


@pytest.mark.parametrize("case", cases("fasteners_nds.toml", "nds_penetration"), ids=by_id)
def test_the_adjusted_value_with_penetration_and_duration(case):
    given, expected = case["inputs"], case["expected"]
    factor = given["p_in"] / (10 * given["D_in"])
    row = next(row for row in ROWS if row["id"] == "nds-16d-common-ts1.5-G0.5")
    found = nds(row, adjustments={"penetration": factor, "duration": given["C_D"]})
    assert factor == pytest.approx(expected["factor"]["value"], rel=1e-9)
    assert found["adjusted"] / LBF == pytest.approx(expected["Z_adj_lbf"]["value"], rel=0.003)
    assert found["shear_resistance"] / LBF == pytest.approx(given["Z_lbf"], rel=0.002)


def test_steel_side_plates_bear_as_the_tables_say():
    """Tables 12B and 12N, footnotes, from memory: 87 000 psi (A36, 2.4 F_u / 1.6), 61 850 psi (A653 grade 33)."""
    bolt = {"type": "bolt", "diameter": "1/2 in", "bending_yield": "45000 psi"}
    wood = {"thickness": "3-1/2 in", "specific_gravity": 0.5}
    thick = run(method="yield-limit", fastener=bolt, side={"thickness": "1/4 in", "kind": "steel"}, main=wood)
    named = run(
        method="yield-limit",
        fastener=bolt,
        side={"thickness": "1/4 in", "kind": "steel", "ultimate": "58 ksi"},
        main=wood,
    )
    thin = run(method="yield-limit", fastener=bolt, side={"thickness": "0.06 in", "kind": "steel"}, main=wood)
    assert thick["embedment"]["side"] == pytest.approx(named["embedment"]["side"])
    assert thick["embedment"]["side"] * 1e6 / PSI == pytest.approx(87000)
    assert thin["embedment"]["side"] * 1e6 / PSI == pytest.approx(61850)


# --- EN 1995-1-1 ------------------------------------------------------------------------------------------------------


def value(case: dict[str, Any], key: str) -> float:
    return float(case["expected"][key]["value"])


@pytest.mark.parametrize("case", cases("fasteners_en.toml", "johansen1", "johansen2"), ids=by_id)
def test_every_yield_mode_of_wood(case):
    given = case["inputs"]
    found = run(
        method="EN 1995-1-1",
        fastener={"type": "bolt", "diameter": given["d_mm"], "yield_moment": given["M_y_Nmm"]},
        side={"thickness": given["t1_mm"], "embedment": given["f_h1_MPa"]},
        main={"thickness": given["t2_mm"], "embedment": given["f_h2_MPa"]},
        shear_planes=2 if case["kind"] == "johansen2" else 1,
    )
    assert [*found["modes"]] == (["g", "h", "j", "k"] if case["kind"] == "johansen2" else [*"abcdef"])
    for mode, load in found["modes"].items():
        assert load == pytest.approx(value(case, f"mode_{mode}_N"), rel=2e-6)
    assert found["governing_mode"] == case["expected"]["governing"]["value"]
    assert found["shear_resistance"] == min(found["modes"].values())


@pytest.mark.parametrize("case", cases("fasteners_en.toml", "fh"), ids=by_id)
def test_embedment_under_nails(case):
    given = case["inputs"]
    part = {
        "thickness": given["t_mm"] or 40,
        "density": given["rho_k_kg_per_m3"],
        "kind": given["panel"] or "timber",
    }
    found = run(
        method="EN 1995-1-1",
        fastener={"type": "nail", "diameter": given["d_mm"], "ultimate": 600},
        side=part,
        main={"thickness": 60, "density": 350},
        predrilled=given["predrilled"],
    )
    assert found["embedment"]["side"] == pytest.approx(value(case, "f_h_k_MPa"), rel=1e-6)


@pytest.mark.parametrize("case", cases("fasteners_en.toml", "fh_bolt"), ids=by_id)
def test_embedment_under_bolts_at_an_angle(case):
    given = case["inputs"]
    part = {"thickness": 80, "density": given["rho_k_kg_per_m3"], "angle": given["alpha_deg"]}
    part |= {"kind": "lvl"} if given["wood"] == "lvl" else {"wood": given["wood"]}
    bolt = {"type": "bolt", "diameter": given["d_mm"], "ultimate": 400}
    found = run(method="EN 1995-1-1", fastener=bolt, side=part, main={"thickness": 80, "density": 350})
    assert found["embedment"]["side"] == pytest.approx(value(case, "f_h_alpha_k_MPa"), rel=1e-6)


@pytest.mark.parametrize("case", cases("fasteners_en.toml", "My"), ids=by_id)
def test_yield_moment(case):
    given = case["inputs"]
    wood = {"thickness": 80, "density": 350}
    bolt = {"type": "bolt", "diameter": given["d_mm"], "ultimate": given["f_u_MPa"]}
    found = run(method="EN 1995-1-1", fastener=bolt, side=wood, main=wood)
    assert found["yield_moment"] == pytest.approx(value(case, "M_y_Rk_Nmm"), rel=1e-6)


@pytest.mark.parametrize("case", cases("fasteners_en.toml", "kser"), ids=by_id)
def test_slip_modulus(case):
    given = case["inputs"]
    part = {"thickness": 60, "density": 350, "density_mean": given["rho_m_kg_per_m3"]}
    nail = {"type": "nail", "diameter": given["d_mm"], "ultimate": 600}
    sort = {"type": "dowel", "diameter": given["d_mm"], "ultimate": 600}
    bored = given["predrilled_or_bolt"]
    fastener = sort if bored and given["d_mm"] > 8 else nail
    found = run(method="EN 1995-1-1", fastener=fastener, side=part, main=part, predrilled=bored)
    assert found["slip_modulus"] == pytest.approx(value(case, "K_ser_N_per_mm"), rel=1e-6)
    assert found["slip_modulus_ultimate"] == pytest.approx(value(case, "K_u_N_per_mm"), rel=1e-6)


@pytest.mark.parametrize("case", cases("fasteners_en.toml", "nail_spacing"), ids=by_id)
def test_distances_of_nails(case):
    """EN 1995-1-1 Table 8.2, from memory in the reference; a1..a4 of every case."""
    given = case["inputs"]
    part = {"thickness": 90, "density": given["rho_k_kg_per_m3"], "angle": given["alpha_deg"]}
    nail = {"type": "nail", "diameter": given["d_mm"], "ultimate": 600}
    found = run(method="EN 1995-1-1", fastener=nail, side=part, main=part, predrilled=given["predrilled"])
    for listed in found["distances"]:
        for name in distances.NAMES:
            assert listed[name] == pytest.approx(value(case, f"{name}_mm"), rel=1e-9), name
    assert found["spacing_min"] == pytest.approx(value(case, "a1_mm"), rel=1e-9)


@pytest.mark.parametrize("case", cases("fasteners_en.toml", "nef_nail"), ids=by_id)
def test_how_many_nails_of_a_row_count(case):
    given = case["inputs"]
    counting, exponent = distances.counting_nails(given["n"], given["a1_over_d"], False)
    assert counting == pytest.approx(value(case, "n_ef"), rel=1e-9)
    assert exponent == pytest.approx(value(case, "k_ef"), rel=1e-9)


@pytest.mark.parametrize("case", cases("fasteners_en.toml", "nef_bolt"), ids=by_id)
def test_how_many_bolts_of_a_row_count(case):
    given, wood = case["inputs"], {"thickness": 80, "density": 350}
    found = run(
        method="EN 1995-1-1",
        fastener={"type": "bolt", "diameter": 12, "ultimate": 400},
        side=wood,
        main=wood,
        row={"count": given["n"], "spacing": 12 * given["a1_over_d"]},
    )
    assert found["row"]["counting"] == pytest.approx(value(case, "n_ef"), rel=1e-9)
    assert found["row"]["resistance"] == pytest.approx(value(case, "n_ef") * found["shear_resistance"], rel=1e-9)


# --- a second way to the modes: equilibrium of a rigid-plastic dowel --------------------------------------------------


def turning_and_bending(t: float, f_turn: float, f_bend: float, d: float, moment: float) -> float:
    """Load where the dowel turns in the member of thickness ``t`` and bends in the other.

    In the turning member bearing changes side at the depth a from the joint: F = f d (2a - t). In the other a hinge
    stands at b from the joint, where shear is nil: F = f' d b. Moments about the hinge vanish.
    """

    def rest(a: float) -> float:
        force = f_turn * d * (2 * a - t)
        b = force / (f_bend * d)
        in_turning = f_turn * d * (a**2 / 2 - (t - a) * (t + a) / 2)
        return moment - (force * b - f_bend * d * b**2 / 2) - in_turning

    low, high = t / 2, t
    for _ in range(200):
        middle = (low + high) / 2
        low, high = (middle, high) if rest(middle) > 0 else (low, middle)
    return f_turn * d * (2 * low - t)


@pytest.mark.parametrize("case", cases("fasteners_en.toml", "johansen1"), ids=by_id)
def test_modes_with_one_and_two_hinges_from_equilibrium(case):
    """Without the code's 1.05 and 1.15, which are no mechanics."""
    given = case["inputs"]
    t_1, t_2, d = given["t1_mm"], given["t2_mm"], given["d_mm"]
    f_1, f_2, moment = given["f_h1_MPa"], given["f_h2_MPa"], given["M_y_Nmm"]
    assert 1.05 * turning_and_bending(t_1, f_1, f_2, d, moment) == pytest.approx(value(case, "mode_d_N"), rel=1e-6)
    assert 1.05 * turning_and_bending(t_2, f_2, f_1, d, moment) == pytest.approx(value(case, "mode_e_N"), rel=1e-6)
    # Two hinges, b_1 and b_2 from the joint: F = f_1 d b_1 = f_2 d b_2, and both hinges carry M.
    force = math.sqrt(4 * moment * d / (1 / f_1 + 1 / f_2))
    assert 1.15 * force == pytest.approx(value(case, "mode_f_N"), rel=1e-6)


def test_a_thick_plate_is_wood_without_end_on_one_side():
    """Clamped in the plate: the hinge stands at the joint itself, so a dowel in endlessly hard wood is the same."""
    bolt = {"type": "bolt", "diameter": 12, "ultimate": 400}
    wood = {"thickness": 60, "embedment": 25.0}
    plate = run(method="EN 1995-1-1", fastener=bolt, side={"thickness": 12, "kind": "steel"}, main=wood)
    hard = run(method="EN 1995-1-1", fastener=bolt, side={"thickness": 500, "embedment": 1e6}, main=wood)
    assert plate["modes"]["c"] == pytest.approx(hard["modes"]["b"])
    assert plate["modes"]["d"] == pytest.approx(hard["modes"]["e"] / 1.05, rel=1e-3)
    assert plate["modes"]["e"] == pytest.approx(hard["modes"]["f"] / 1.15 * 2.3 / 2, rel=1e-3)
