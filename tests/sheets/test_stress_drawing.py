"""The drawing of stress bands: of a checked member, with a key that names every band."""

from __future__ import annotations

import re

import pytest

from server import checks, documents
from server.sheets import stress_svg
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
