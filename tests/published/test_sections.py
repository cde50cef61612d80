"""Built-up sections against printed worked examples, each with its source in sections.toml or beside it.

Every example is built from pieces, its contacts are found from the geometry, and its joints settled, as in a check.
"""

from __future__ import annotations

import csv
import tomllib
from decimal import Decimal
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest

from server.mechanics.contacts import contacts
from server.mechanics.flow import JointLine, joint_flows
from server.mechanics.section import Piece, largest_cuts, properties, rectangle, shear_stiffness

HERE = Path(__file__).parent
CASES = {case["id"]: case for case in tomllib.loads((HERE / "sections.toml").read_text())["case"]}
SHEAR = list(csv.DictReader((HERE / "shear_coefficients.csv").read_text().splitlines()))


def half_last_digit(printed: str) -> float:
    """Rounding error of a printed number: '1.98' -> 0.005."""
    return float(Decimal(5).scaleb(int(Decimal(printed).as_tuple().exponent) - 1))


def agrees(expected, found):
    tolerance = {key: expected[f"{key}_tol"] for key in ("rel", "abs") if f"{key}_tol" in expected}
    assert found == pytest.approx(expected["value"], **tolerance)


def glued(pieces):
    """Every contact a joint of one kind."""
    found = contacts([piece.rings for piece in pieces], np.full((len(pieces),) * 2, 0.05))
    return [JointLine(c.first, c.second, c.start, c.end, "glue") for c in found]


def rectangles(rects):
    """Pieces in mm and MPa from rows in m and Pa, centred across."""
    return [
        Piece(
            f"piece {number}",
            rectangle(1e3 * r["b"], 1e3 * r["h"], (-5e2 * r["b"], 1e3 * (r["yc"] - r["h"] / 2))),
            # rows with E = 1 mean one material: any modulus does
            r["E"] * 1e-6 if r["E"] > 1 else 1.0,
        )
        for number, r in enumerate(rects)
    ]


def test_gere_box_beam_with_screwed_webs():
    case = CASES["gere-box-46.6"]
    given, expected = case["inputs"], case["expected"]
    width, height = 1e3 * given["b"], 1e3 * given["h"]
    inner, hollow = 1e3 * given["b1"], 1e3 * given["h1"]
    web, flange = (width - inner) / 2, (height - hollow) / 2
    pieces = [
        Piece("bottom flange", rectangle(inner, flange, (web, 0)), 1.0),
        Piece("top flange", rectangle(inner, flange, (web, height - flange)), 1.0),
        Piece("left web", rectangle(web, height, (0, 0)), 1.0),
        Piece("right web", rectangle(web, height, (width - web, 0)), 1.0),
    ]
    section = properties(pieces)
    agrees(expected["I_m4"], section.EI * 1e-12)
    assert section.pieces.area[1] == pytest.approx(given["A_f_m2"] * 1e6)
    assert section.pieces.centroid[1, 1] - section.neutral_axis[1] == pytest.approx(given["d_f_m"] * 1e3)
    for flow in joint_flows(pieces, section, glued(pieces)):
        assert flow.split == "symmetry"
        assert len(flow.partners) == given["n_planes"]
        agrees(expected["Q_m3"], abs(flow.first_moment) * 1e-9)
        one = given["V_N"] * abs(flow.share) / section.EI  # N/mm in one of the two planes
        agrees(expected["f_N_per_m"], 1e3 * one * given["n_planes"])
        agrees(expected["s_m"], 1e-3 * given["F_N"] / one)


def test_beer_three_nailed_planks():
    case = CASES["beer-6.1"]
    given, expected = case["inputs"], case["expected"]
    pieces = rectangles(given["rects"])
    section = properties(pieces)
    agrees(expected["I_m4"], section.EI * 1e-12)
    flow = next(f for f in joint_flows(pieces, section, glued(pieces)) if f.cut_off == tuple(given["cut"]))
    assert flow.split == "cut"
    agrees(expected["Q_m3"], flow.first_moment * 1e-9)
    q = given["V_N"] * flow.share / section.EI
    agrees(expected["q_N_per_m"], 1e3 * abs(q))
    agrees(expected["F_fastener_N"], abs(q) * 1e3 * given["s_m"])


def test_gere_timber_with_a_steel_plate():
    case = CASES["gere-6-1-composite"]
    given, expected = case["inputs"], case["expected"]
    pieces = rectangles(given["rects"])
    section = properties(pieces)
    agrees(expected["ybar_E_m"], section.neutral_axis[1] * 1e-3)
    agrees(expected["EI_Nm2"], section.EI * 1e-6)

    def stress(piece, up):
        """Bending stress [Pa] for sagging, tension positive; ``up`` in m."""
        return -given["M_Nm"] * 1e3 * pieces[piece].E * (1e3 * up - section.neutral_axis[1]) / section.EI * 1e6

    plate, wood = given["rects"]
    agrees(expected["sigma_wood_top_Pa"], stress(1, wood["yc"] + wood["h"] / 2))
    agrees(expected["sigma_wood_bottom_Pa"], stress(1, wood["yc"] - wood["h"] / 2))
    agrees(expected["sigma_steel_bottom_Pa"], stress(0, 0.0))
    agrees(expected["sigma_steel_top_Pa"], stress(0, plate["h"]))
    flow = joint_flows(pieces, section, glued(pieces))[0]
    weight = plate["E"] * 1e-6 * plate["b"] * plate["h"] * 1e6
    assert given["cut"] == [0]  # the plate; the timber is the softer part, and so the one farther from the neutral axis
    assert flow.cut_off == (1,)
    plate_moment = weight * (1e3 * plate["yc"] - section.neutral_axis[1])
    assert flow.first_moment_other_side == pytest.approx(plate_moment, rel=1e-12)
    assert flow.first_moment == pytest.approx(-plate_moment, rel=1e-12)


def test_gere_sandwich_with_aluminium_faces():
    # J. M. Gere and B. J. Goodno, Mechanics of Materials, 7th ed., Example 6-2 (from memory): faces 200 x 5 mm, E 72
    # GPa, on a core 200 x 150 mm, E 800 MPa; printed I1 12.017e6 mm4, I2 56.25e6 mm4, rigidity 910 200 N m2; M = 3.0
    # kN m gives 19.0 MPa in the faces and 0.198 MPa in the core.
    pieces = [
        Piece("bottom face", rectangle(200, 5, (0, 0)), 72_000.0),
        Piece("core", rectangle(200, 150, (0, 5)), 800.0),
        Piece("top face", rectangle(200, 5, (0, 155)), 72_000.0),
    ]
    faces, core = properties([pieces[0], pieces[2]]), properties([pieces[1]])
    section = properties(pieces)
    printed = {
        "12.017": faces.EI / 72_000 / 1e6,
        "56.25": core.EI / 800 / 1e6,
        "910.2": section.EI * 1e-9,
        "19.0": 3e6 * 72_000 * 80 / section.EI,
        "0.198": 3e6 * 800 * 75 / section.EI,
    }
    for text, found in printed.items():
        assert found == pytest.approx(float(text), abs=half_last_digit(text)), text
    flows = joint_flows(pieces, section, glued(pieces))
    assert [flow.split for flow in flows] == ["cut", "cut"]
    assert [flow.share for flow in flows] == pytest.approx([-72_000 * 1000 * 77.5, -72_000 * 1000 * 77.5])


def round_(diameter, sides, wall=None):
    """A regular polygon of many sides, with a hole where it has a wall."""
    angle = 2 * np.pi * (np.arange(sides) + 0.5) / sides
    ring = np.stack((np.cos(angle), np.sin(angle)), axis=1)
    holes = () if wall is None else ((diameter / 2 - wall) * ring,)
    return [Piece("round", diameter / 2 * ring, 1.0, 1.0, holes=holes)]


def shear_values(pieces):
    """Form factor A G / GA, and peak over mean shear stress."""
    section = properties(pieces)
    return np.array(
        [section.area / shear_stiffness(pieces, section), largest_cuts(pieces, section)[0].intensity * section.area]
    )


def circle_values(wall=None):
    """Of the circle itself: the error of a polygon falls with the square of its sides, so two give the limit."""
    coarse, fine = shear_values(round_(100.0, 400, wall)), shear_values(round_(100.0, 800, wall))
    return (4 * fine - coarse) / 3


def thin_tube_values():
    """Limit of a vanishing wall: the error falls with the square of wall over radius."""
    thick, thin = circle_values(2.0), circle_values(1.0)
    return (4 * thin - thick) / 3


# Left out: Cowper's coefficients and the form factor 2 of a thin tube count the sideways shear stress too, which
# horizontal cuts do not see (they give 3/2 for the tube); they belong to the stress field of the section.
CASES_BY_CUTS = {
    "rectangle, energy form factor A/A_s": lambda: rectangle_values()[0],
    "rectangle, peak over mean shear stress": lambda: rectangle_values()[1],
    "circle, energy form factor A/A_s": lambda: circle_values()[0],
    "circle, peak over mean shear stress": lambda: circle_values()[1],
    "thin circular tube, peak over mean shear stress": lambda: thin_tube_values()[1],
}


def rectangle_values():
    return shear_values([Piece("r", rectangle(37.0, 91.0, (0, 0)), 1.0, 1.0)])


@pytest.mark.parametrize("name", CASES_BY_CUTS)
def test_shear_form_factors(name):
    shape, definition = name.split(", ")
    row = next(row for row in SHEAR if (row["shape"], row["definition"]) == (shape, definition))
    # the printed value is a rounded fraction; a vanishing wall is reached by extrapolation, to five digits
    tolerance = 1e-5 if "tube" in shape else float(row["abs_tol"])
    assert CASES_BY_CUTS[name]() == pytest.approx(float(Fraction(row["expression"])), abs=tolerance)
