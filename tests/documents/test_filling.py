"""References to the library, and the values that replace them."""

from __future__ import annotations

from typing import Any

import pytest

from server import documents
from server.documents import MemberDocument, Reference
from server.errors import DocumentError, JointError
from tests.documents.examples import BOX, changed, faults, read


def referring(**entries: dict[str, Any]) -> MemberDocument:
    def change(data: dict[str, Any]) -> None:
        data["adhesives"]["PU"] = {"record": "PU-7", "revision": 3}
        data["materials"]["ply"] = {"record": "PLY-12"}

    return read(changed(change))


VALUES = {
    "adhesives": {"PU": {"record": "PU-7", "revision": 3, "status": "approved", "shear_strength": "6.2 MPa"}},
    "materials": {"ply": {"record": "PLY-12", "revision": 5, "E": 9000, "density": 600, "source": "maker's sheet"}},
}


def test_references_are_named_until_they_are_filled() -> None:
    document = referring()
    assert document.unresolved() == ["materials.ply", "adhesives.PU"]
    assert document.adhesives["PU"] == Reference(record="PU-7", revision=3)
    with pytest.raises(JointError, match=r"adhesives\.PU refers to record PU-7, and its values were not fetched"):
        document.adhesive("PU")


def test_filled_references_carry_their_values_and_where_they_came_from() -> None:
    document = referring()
    filled = documents.fill(document, VALUES)
    assert filled.unresolved() == []
    assert (filled.adhesive("PU").shear_strength, filled.adhesive("PU").status) == (6.2, "approved")
    assert (filled.material("ply").record, filled.material("ply").revision) == ("PLY-12", 5)
    assert filled.raw == document.raw
    assert filled.raw["adhesives"]["PU"] == {"record": "PU-7", "revision": 3}
    assert document.unresolved() == ["materials.ply", "adhesives.PU"]


def test_a_record_that_leaves_out_its_key_takes_the_references() -> None:
    filled = documents.fill(referring(), {"adhesives": {"PU": {"shear_strength": 5}}})
    assert (filled.adhesive("PU").record, filled.adhesive("PU").revision) == ("PU-7", 3)
    assert filled.unresolved() == ["materials.ply"]


def test_typed_values_are_not_replaced() -> None:
    filled = documents.fill(referring(), {"materials": {"deal": {"E": 1}}})
    assert filled.material("deal").E == 11000.0


def test_bad_record_values_are_faults_that_name_the_record() -> None:
    bad = {"adhesives": {"PU": {"shear_strength": "4 N/mm", "revision": 3}}, "materials": {"ply": {"G": 600}}}
    with pytest.raises(DocumentError) as caught:
        documents.fill(referring(), bad)
    found = {fault.path: fault.message for fault in caught.value.faults}
    assert found["adhesives.PU.shear_strength"].startswith("Record PU-7 revision 3: '4 N/mm' is a line load")
    assert found["materials.ply.E"].startswith("Record PLY-12: Missing; enter a stress")


def test_rules_that_need_the_values_speak_once_they_are_there() -> None:
    with pytest.raises(DocumentError) as caught:
        documents.fill(referring(), {"materials": {"ply": {"E": 9000}}})
    assert [fault.path for fault in caught.value.faults] == ["materials.ply.density"]


def test_typed_values_cannot_pose_as_a_records() -> None:
    data = changed(lambda d: d["adhesives"].update(PU={"record": "PU-7", "shear_strength": 9}))
    found = faults(data)
    assert "give either the record or the values" in found["adhesives.PU.shear_strength"]


def test_a_document_without_references_has_nothing_to_fill() -> None:
    document = read(BOX)
    assert document.unresolved() == []
    assert documents.fill(document, {}) == document
