"""Published beam formulas and coefficients: 28 members, each with its source in beams.toml."""

from __future__ import annotations

import math
import tomllib
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from server.mechanics.beam import Beam, Extremes, LineLoad, Load, PointLoad, Response, Stretch, Support, extremes, solve

CASES = tomllib.loads((Path(__file__).parent / "beams.toml").read_text(encoding="utf-8"))["case"]
KINDS = {"pin": "pin", "fix": "fixed"}


def member(inputs: dict, *, shear_deformation: bool = True) -> Beam:
    length = 1000 * inputs["length_m"]
    supports = [Support(1000 * s["x"], KINDS[s["type"]]) for s in inputs["supports"]]
    GA = inputs.get("GAs_N", math.inf) if shear_deformation else math.inf
    return Beam(length, supports, [], [Stretch(0.0, length, 1e6 * inputs["EI_Nm2"], GA)])


def loads(inputs: dict) -> list[Load]:
    return [
        PointLoad(1000 * load["x"], load["P"])
        if load["type"] == "point"
        else LineLoad(1000 * load["x0"], 1000 * load["x1"], load["w0"] / 1000, load["w1"] / 1000)
        for load in inputs["loads"]
    ]


def deflection(response: Response) -> Extremes:
    return extremes(response.breaks, response.deflection)


def moment(response: Response) -> Extremes:
    return extremes(response.breaks, response.moment)


def bending_part(inputs: dict) -> float:
    return float(deflection(solve(member(inputs, shear_deformation=False), [loads(inputs)])).max[0])


MEASURES: dict[str, Callable[[Response, dict], object]] = {
    "R_N": lambda response, _: response.reaction_force[0],
    "V_abs_max_N": lambda response, _: extremes(response.breaks, response.shear).absolute()[0][0],
    "M_max_Nm": lambda response, _: moment(response).max[0] / 1000,
    "M_min_Nm": lambda response, _: moment(response).min[0] / 1000,
    "defl_max_m": lambda response, _: deflection(response).max[0] / 1000,
    "defl_min_m": lambda response, _: deflection(response).min[0] / 1000,
    "x_defl_max_m": lambda response, _: deflection(response).at_max[0] / 1000,
    "bending_part_m": lambda _, inputs: bending_part(inputs) / 1000,
    "shear_part_m": lambda response, inputs: (deflection(response).max[0] - bending_part(inputs)) / 1000,
}

ROWS = [(case, key) for case in CASES for key in case["expected"]]


def test_all_published_members_are_there():
    assert len(CASES) == 28
    assert len(ROWS) >= 100


@pytest.mark.parametrize(("case", "key"), ROWS, ids=lambda value: value["id"] if isinstance(value, dict) else value)
def test_beam_matches_the_published_value(case, key):
    inputs, expected = case["inputs"], case["expected"][key]
    found = MEASURES[key](solve(member(inputs), [loads(inputs)]), inputs)
    np.testing.assert_allclose(found, expected["value"], rtol=expected["rel_tol"])


# Roark's Formulas for Stress and Strain, 8th ed., section 8.10: shear deflection of beams, with F/(G A) = 1/GA here
# (from memory; each follows from the shear diagram over GA).
@pytest.mark.parametrize(
    ("supports", "load", "shear_part"),
    [
        ([Support(0, "fixed")], PointLoad(2000, 900), lambda P, L, GA: P * L / GA),
        ([Support(0, "fixed")], LineLoad(0, 2000, 3, 3), lambda w, L, GA: w * L**2 / (2 * GA)),
        ([Support(0, "pin"), Support(2000, "pin")], PointLoad(1000, 900), lambda P, L, GA: P * L / (4 * GA)),
        ([Support(0, "pin"), Support(2000, "pin")], LineLoad(0, 2000, 3, 3), lambda w, L, GA: w * L**2 / (8 * GA)),
    ],
    ids=["cantilever, end load", "cantilever, uniform", "simple span, centre load", "simple span, uniform"],
)
def test_shear_deflection_matches_roark(supports, load, shear_part):
    GA = 5.67e6
    size = load.value if isinstance(load, PointLoad) else load.value_start
    with_shear, without = (
        deflection(solve(Beam(2000, supports, [], [Stretch(0, 2000, 4.4e11, stiffness)]), [[load]])).max[0]
        for stiffness in (GA, math.inf)
    )
    assert with_shear - without == pytest.approx(shear_part(size, 2000, GA), rel=1e-9)
