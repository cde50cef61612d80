"""The drawing of stress bands: of a checked member, with a key that names every band."""

from __future__ import annotations

import re

import numpy as np
import pytest

from server import checks, documents
from server.sheets import stress_svg
from server.sheets.composition import SheetData, compose
from server.sheets.pdf import DRAWINGS
from tests.checks.test_field import unlike


@pytest.fixture(scope="module")
def result():
    return checks.run(documents.read(unlike()), look=checks.Look(1500.0, "all"))


def test_bands_and_their_key(result):
    picture = result["contours"]["bending"]
    assert picture["at"] == 1500.0
    svg = stress_svg(result, "bending")
    keys = re.findall(r">([^<]*(?:tension|compression))<", svg)
    assert len(keys) == len(picture["levels"]) or len(keys) == len(picture["levels"]) + 1
    assert 'fill="url(#' in svg  # compression is hatched, for print
    # the greatest stress stands at the far edges: M (h / 2) E / EI
    wanted = 11000 * abs(picture["moment"]) * 200 / result["section"]["EI"]
    assert picture["greatest"] == pytest.approx(wanted, rel=1e-6)
    assert picture["least"] == pytest.approx(-wanted, rel=1e-6)


def test_shear_with_the_run_of_stress_along_each_bond(result):
    svg = stress_svg(result, "shear")
    assert "over" in svg
    assert svg.count('fill-opacity=".6"') == 4  # one run beside each bond
    assert "style=" not in svg
    plain = checks.run(documents.read(unlike(field="never")))
    assert plain["contours"] is None
    assert stress_svg(plain, "shear") == ""


def lettered(svg):
    """Values on the lines, with their places."""
    return {m[3]: (float(m[1]), float(m[2])) for m in re.finditer(LETTERED, svg)}


LETTERED = r'<text x="([^"]+)" y="([^"]+)" text-anchor="middle" font-size="9">([^<]+)</text>'


@pytest.mark.parametrize(("which", "least"), [("shear", 3), ("bending", 1)])
def test_levels_are_written_on_their_lines(result, which, least):
    """Where one lies inside a piece: at 5 MPa the stress jumps from web to flange, at 0 a line crosses the webs."""
    picture = result["contours"][which]
    found = lettered(stress_svg(result, which))
    wanted = [f"{level:g}".replace("-", "\u2212") for level in picture["levels"][1:]]
    assert set(found) <= set(wanted)
    assert len(found) >= least
    places = list(found.values())
    assert all(abs(x - a) > 8 or abs(y - b) > 8 for i, (x, y) in enumerate(places) for a, b in places[:i])


def test_the_printed_sheet_has_both_pictures_and_the_run_along_each_bond(result):
    parts = compose(SheetData(unlike(), result), DRAWINGS)["parts"]
    titles = [part.get("title") for part in parts]
    first = titles.index("Stress in the section")
    shear, bending, _, table = parts[first + 1 : first + 5]
    assert "Shear stress" in shear["caption"]
    assert "combination all" in bending["caption"]
    assert len(table["rows"]) == 4
    for row, joint in zip(table["rows"], result["joints"], strict=True):
        runs = [float(cell.replace("\u2212", "-")) for cell in row[3:]]
        assert sum(runs) / len(runs) == pytest.approx(joint["stress"], rel=2e-3, abs=2e-3)
    by_hand = checks.run(documents.read(unlike(field="never")))
    assert "Stress in the section" not in [p.get("title") for p in compose(SheetData({}, by_hand), DRAWINGS)["parts"]]


def test_levels_are_round_in_the_units_that_are_shown():
    psi = checks.run(documents.read({**unlike(), "display": "US"}))["contours"]["bending"]["levels"]
    steps = np.diff(psi) / 0.006894757  # MPa a psi, NIST SP 811
    assert steps == pytest.approx([round(steps[0], -1)] * len(steps), rel=1e-6)
