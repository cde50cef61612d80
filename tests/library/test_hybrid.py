"""Glue and fasteners tested together: from coupons to a check's joint, and only where the joint is built as tested."""

from __future__ import annotations

import math
from typing import Any

import pytest
from scipy import stats

from server import checks, documents, library
from server.errors import DocumentError
from server.library import Record
from server.storage import Session
from tests.library import evidence
from tests.library.samples import document

STRESSES = (3.1, 2.9, 3.4, 3.0, 3.2, 2.8, 3.3, 3.1, 3.0, 2.9, 3.2, 3.1)
WITH = {"hybrid_fastener": "Screw 5 x 80", "hybrid_spacing": "150 mm", "hybrid_rows": 2}


def hybrid_bond(session: Session) -> Record:
    """An approved bond that pins an approved value of glue and screws together, and no other strength."""
    value = evidence.approved_value(
        session, STRESSES, values={"property": "hybrid joint shear", "statistic": {"distribution": "normal"}, **WITH}
    )
    return evidence.add_bond_on(session, value, links={"value:hybrid_shear_strength": value.itself})


def check(session: Session, bond: Record, **joint: Any) -> dict[str, Any]:
    raw = document(record=bond.key)
    raw["basis"] = {"method": "allowable", "safety_factor": 2.0}
    raw["fasteners"] = {"screw": {"kind": "screw 5 x 80"}}
    own = {"fastener": "screw", "spacing": 150, "rows": 2, "role": "hybrid"} | joint
    raw["section"]["joints"][0] |= {name: value for name, value in own.items() if value is not ...}
    return checks.run(library.resolve(session, documents.read(raw)))


def limit(result: dict[str, Any]) -> dict[str, Any]:
    return next(own for own in result["joints"][0]["limits"] if own["what"].startswith("adhesive glue"))


def test_the_value_of_the_joint_comes_from_its_coupons_and_is_judged(session: Session) -> None:
    bond = hybrid_bond(session)
    value = library.get(session, bond.pins["hybrid_shear_strength"].key)
    assert {name: value.values[name] for name in WITH} == WITH  # from the set: nobody typed it again
    result = check(session, bond)
    n, mean = len(STRESSES), sum(STRESSES) / len(STRESSES)
    s = math.sqrt(sum((x - mean) ** 2 for x in STRESSES) / (n - 1))
    k = stats.nct.ppf(0.75, n - 1, -stats.norm.ppf(0.05) * math.sqrt(n)) / math.sqrt(n)
    found = limit(result)
    assert found["what"] == "adhesive glue with screw, as tested together"
    assert found["strength"] == pytest.approx(mean - k * s)
    assert found["resistance"] == pytest.approx((mean - k * s) * 0.6 / 2)
    assert found["utilisation"] == pytest.approx(result["joints"][0]["stress"] / found["resistance"])
    assert not [text for text in result["missing"] if "glue and fasteners" in text]
    assert result["values_used"]["adhesives"]["glue"]["lineage"]["hybrid_shear_strength"]["coupons"] == n
    text = next(each["text"] for each in result["cautions"] if each["about"] == "fasteners with adhesive")
    assert "together" in text


@pytest.mark.parametrize(
    ("joint", "words"),
    [
        ({"spacing": 200}, "tested at a spacing of 150 mm, used at 200 mm"),
        ({"spacing": 100}, "used at 100 mm"),
        ({"spacing": "6 in"}, ""),
        ({"spacing": [{"from": 0, "to": 1500, "spacing": 150}, {"from": 1500, "to": 3000, "spacing": 300}]}, "300 mm"),
        ({"spacing": ...}, "enter the spacing of the joint"),
        ({"rows": 1}, "tested with 2 rows, used with 1 row"),
    ],
)
def test_a_joint_built_otherwise_than_tested_is_not_proven(session: Session, joint: dict[str, Any], words: str) -> None:
    missing = [text for text in check(session, hybrid_bond(session), **joint)["missing"] if "glue and fast" in text]
    assert [words in text for text in missing] == ([True] if words else [])


def test_another_fastener_is_not_the_one_tested(session: Session) -> None:
    bond = hybrid_bond(session)
    raw = document(record=bond.key)
    raw["basis"] = {"method": "allowable", "safety_factor": 2.0}
    raw["fasteners"] = {"nail": {"kind": "nail 3.1 x 80"}}
    raw["section"]["joints"][0] |= {"fastener": "nail", "spacing": 150, "rows": 2, "role": "hybrid"}
    result = checks.run(library.resolve(session, documents.read(raw)))
    assert result["verdict"] == "not proven"
    assert any("tested with 'Screw 5 x 80', used with 'nail'" in text for text in result["missing"])


def test_glue_alone_has_no_strength_in_it_and_fasteners_are_not_added(session: Session) -> None:
    """The same bond without its screws has no value; a typed sum is none either; nor has glue one for both."""
    bond = hybrid_bond(session)
    pressed = check(session, bond, role="press")
    assert any("shear strength of adhesive 'glue'" in text for text in pressed["missing"])
    raw = document(hybrid_shear_strength=5.0, hybrid_fastener="screw", hybrid_spacing=150, shear_strength=4.0)
    raw["fasteners"] = {"screw": {"shear_resistance": 2000}}
    raw["section"]["joints"][0] |= {"fastener": "screw", "spacing": 150, "role": "hybrid"}
    typed = checks.run(documents.read(raw))
    assert typed["verdict"] == "not proven"
    assert any("was typed" in text for text in typed["missing"])
    del raw["adhesives"]["glue"]["hybrid_shear_strength"]
    without = checks.run(documents.read(raw))
    assert any("has no strength tested with fasteners" in text for text in without["missing"])
    assert not [own for own in without["joints"][0]["limits"] if own["what"].startswith("adhesive")]


@pytest.mark.parametrize("lacking", ["hybrid_fastener", "hybrid_spacing"])
def test_a_set_says_with_which_fasteners(session: Session, lacking: str) -> None:
    said = {name: text for name, text in WITH.items() if name != lacking}
    with pytest.raises(DocumentError) as caught:
        evidence.add_set(session, STRESSES, values={"property": "hybrid joint shear", **said})
    assert [fault.path for fault in caught.value.faults] == [f"values.{lacking}"]


def test_no_data_sheet_knows_the_shops_joint(session: Session) -> None:
    with pytest.raises(DocumentError) as caught:
        library.add(
            session, group="values", name="sum", made_by="Ann", source="data sheet 2025",
            values={"property": "hybrid joint shear", "origin": "data sheet", "value": "5 MPa"},
        )  # fmt: skip
    assert "never added" in str(caught.value)
