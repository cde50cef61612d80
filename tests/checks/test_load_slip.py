"""Kind "load-slip": readings to strength and slip modulus, against values worked out by hand and by scipy."""

from __future__ import annotations

import json
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from server import checks, documents, sheets
from server.errors import DocumentError
from server.mechanics import load_slip


def run(**document: Any) -> dict[str, Any]:
    found = checks.run(documents.read({"format": "bondwright/1", "kind": "load-slip", **document}))
    json.dumps(found, allow_nan=False)
    return found


LOADS = [412.0, 388.0, 455.0, 367.0, 430.0, 402.0, 441.0, 379.0, 418.0, 395.0]
SPECIMENS = [{"maximum": load, "v01": 0.1, "v04": 0.1 + load / 5000} for load in LOADS]


def test_the_slip_modulus_is_that_of_the_standard():
    """EN 26891:1991 8.5: k_s = 0.4 F / (4/3 (v_04 - v_01)); here worked by hand."""
    found = run(specimens=[{"maximum": 4000, "v01": 0.2, "v04": 1.4}] * 2 + [{"maximum": 4400, "v01": 0.2, "v04": 1.4}])
    hand = [0.4 * load / (4 / 3 * 1.2) for load in (4000, 4000, 4400)]
    assert [each["slip_modulus"] for each in found["specimens"]] == pytest.approx(hand)
    assert found["slip_modulus"] == pytest.approx(sum(hand) / 3)


def test_the_strength_is_the_lower_tolerance_limit_of_the_loads():
    """EN 14358 on the logarithms, tolerance factor from the noncentral t distribution of scipy."""
    found = run(specimens=SPECIMENS)
    logs, n = np.log(LOADS), len(LOADS)
    k = stats.nct.ppf(0.75, n - 1, stats.norm.ppf(0.95) * np.sqrt(n)) / np.sqrt(n)
    wanted = np.exp(logs.mean() - k * max(logs.std(ddof=1), 0.05))
    assert found["shear_resistance"] == pytest.approx(wanted, rel=1e-6)
    assert found["factor"] == pytest.approx(k, rel=1e-6)
    assert not any("MPa" in json.dumps(step) for step in found["steps"])


def test_several_fasteners_and_planes_share_the_load():
    one, four = run(specimens=SPECIMENS), run(specimens=SPECIMENS, fastener_count=2, shear_planes=2)
    assert four["shear_resistance"] == pytest.approx(one["shear_resistance"] / 4)
    assert four["slip_modulus"] == pytest.approx(one["slip_modulus"] / 4)


def test_readings_give_load_and_slips():
    rising = [[load, load / 1000] for load in range(0, 4001, 250)]
    found = run(specimens=[{"readings": rising}, {"readings": [[1.1 * f, v] for f, v in rising]}])
    assert found["specimens"][0]["load"] == pytest.approx(4000)
    assert (found["specimens"][0]["v01"], found["specimens"][0]["v04"]) == pytest.approx((0.4, 1.6))
    # A straight line of 1000 N/mm: 0.4 F / (4/3 x 0.3 F / 1000) is the line's own stiffness.
    assert found["specimens"][0]["slip_modulus"] == pytest.approx(1000)


def test_a_reload_does_not_move_the_slips_and_15_mm_ends_the_test():
    loads, slips = [0, 400, 1600, 400, 1600, 4000, 5000], [0, 0.4, 1.6, 1.2, 1.7, 10, 20]
    assert load_slip.slip_at(loads, slips, 1600) == pytest.approx(1.6)
    assert load_slip.greatest_load(loads, slips) == pytest.approx(4500)


def test_an_estimate_far_off_is_said_and_not_used():
    near, far = run(specimens=SPECIMENS, estimated=400), run(specimens=SPECIMENS, estimated=900)
    assert not any(each["about"] == "estimated load" for each in near["cautions"])
    assert any(each["about"] == "estimated load" for each in far["cautions"])


def test_what_is_lacking_is_not_passed_over():
    assert run(specimens=[{"maximum": 400}])["verdict"] == "not proven"
    found = run(specimens=[{"maximum": load} for load in LOADS])
    assert found["verdict"] == "not proven"
    assert "slip modulus" in "\n".join(found["missing"])


@pytest.mark.parametrize(
    ("specimen", "path", "words"),
    [
        ({}, "specimens[0].maximum", "readings"),
        ({"maximum": "3 mm"}, "specimens[0].maximum", "a force"),
        ({"maximum": 400, "v01": 0.2}, "specimens[0].v04", "a slip modulus needs"),
        ({"maximum": 400, "v01": 0.4, "v04": 0.2}, "specimens[0].v04", "not larger"),
        ({"readings": [[0, 0], [0, 1]]}, "specimens[0].readings", "above 0"),
        ({"maximum": 400, "readings": [[0, 0], [9, 1]]}, "specimens[0].maximum", "keep one"),
        ({"maximum": 400, "excluded": " "}, "specimens[0].excluded", "cause"),
    ],
)
def test_what_is_wrong_is_named(specimen, path, words):
    with pytest.raises(DocumentError) as caught:
        run(specimens=[specimen, {"maximum": 400}])
    assert words in {fault.path: fault.message for fault in caught.value.faults}[path]


def test_the_sheet_speaks_of_loads():
    text = sheets.terminal(run(specimens=SPECIMENS, display="US"))
    assert "Characteristic load" in text
    assert "lbf/in" in text


@settings(max_examples=40, deadline=None)
@given(st.lists(st.tuples(st.floats(0, 1e5), st.floats(0, 30)), min_size=2, max_size=12))
def test_readings_of_any_shape_give_finite_numbers_or_a_named_fault(readings):
    try:
        found = run(specimens=[{"readings": [list(each) for each in readings]}, {"maximum": 5000}])
    except DocumentError:
        return  # refused, by the specimen's name
    assert found["verdict"] in ("pass", "not proven")
