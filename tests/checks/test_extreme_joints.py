"""Joints at the edge of what can be made: every number finite or refused by name."""

from __future__ import annotations

import copy
import math
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server import checks, documents
from server.errors import DocumentError
from tests.checks.splices import SHAPES, lap
from tests.checks.strips import PLATE, changed

TURNED = {"layout": "tube-lap", "diameter": 25, "width": None, "load": {"torque": 20000}}
JOINTS = {**SHAPES, "tube-lap in torque": TURNED}
EDGES: dict[str, dict[str, Any]] = {
    "very long": {"overlap": 5000},
    "very stiff adhesive": {"epoxy": {"shear_modulus": 1e6, "E": 2.7e6, "thickness": 0.01}},
    "very soft adhesive": {"epoxy": {"shear_modulus": 1e-3, "E": 2.7e-3, "thickness": 5, "shear_strain_limit": None}},
    "paper-thin": {"sheets": 0.01},
    "thick blocks": {"sheets": 12},
}


def made(joint: str, edge: str, **more: Any) -> dict[str, Any]:
    """A joint at one edge; a scarf is as long as its slope and thickness make it."""
    change = copy.deepcopy({**EDGES[edge], **more})
    sheets = change.pop("sheets", None)
    document = lap(**{**change, **JOINTS[joint]})
    if joint == "scarf":
        document.pop("overlap", None)
        document["slope"] = 500 if edge == "very long" else 8
    for side in document["adherends"].values():
        side["thickness"] = sheets or side["thickness"]
    return document


def infinite(value: object, path: str = "") -> list[str]:
    """Where a result holds a number that is none."""
    if isinstance(value, dict):
        return [each for key, inner in value.items() for each in infinite(inner, f"{path}.{key}")]
    if isinstance(value, list):
        return [each for i, inner in enumerate(value) for each in infinite(inner, f"{path}[{i}]")]
    return [path] if isinstance(value, float) and not math.isfinite(value) else []


@pytest.mark.parametrize("joint", JOINTS)
def test_every_edge_is_finite_and_its_peak_is_no_less_than_its_mean(joint: str) -> None:
    for edge in EDGES:
        result = checks.run(documents.read(made(joint, edge)), working=False)
        assert infinite(result) == [], edge
        assert result["peak_shear"] >= result["mean_shear"] * (1 - 1e-3), edge
        assert result["utilisation"] > 0


def answered(document: dict[str, Any]) -> bool:
    """Whether a document gives finite numbers, or faults that all say where and what."""
    try:
        return infinite(checks.run(documents.read(document), working=False)) == []
    except DocumentError as error:
        return all(fault.path and fault.message for fault in error.faults)


sizes = st.floats(-3, 4).map(lambda power: 10.0**power)
moduli = st.floats(-3, 6).map(lambda power: 10.0**power)


@settings(max_examples=25, deadline=None)
@given(st.sampled_from(list(JOINTS)), sizes, sizes, sizes, sizes, moduli, moduli, st.booleans())
def test_any_sizes_are_answered_in_finite_numbers_or_refused_by_name(
    joint: str, overlap: float, one: float, two: float, line: float, shear: float, stiff: float, plastic: bool
) -> None:
    document = lap(**{"overlap": overlap, **JOINTS[joint]})
    document["adherends"]["inner"]["thickness"], document["adherends"]["outer"]["thickness"] = one, two
    document["materials"]["aluminium"]["E"] = stiff
    document["adhesives"]["epoxy"] |= {"shear_modulus": shear, "E": 2.7 * shear, "thickness": line}
    document["adhesives"]["epoxy"]["shear_strain_limit"] = 0.5 + 30 / shear
    document["response"] = "elastic-plastic" if plastic else "elastic"
    assert answered(document)


@settings(max_examples=25, deadline=None)
@given(sizes, sizes, sizes, moduli, moduli, st.floats(0, 1490))
def test_any_strip_is_answered_in_finite_numbers_or_refused_by_name(
    thickness: float, depth: float, line: float, shear: float, stiff: float, place: float
) -> None:
    document = changed(PLATE, strip__thickness=thickness, host__pieces__beam__depth=depth, strip__from=place)
    document["adhesives"]["paste"] |= {"shear_modulus": shear, "E": 2.7 * shear, "thickness": line}
    document["materials"]["plate"]["E"] = stiff
    assert answered(document)
