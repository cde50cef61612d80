"""The API for programs: a document in, its result out; every wrong input answered with its faults."""

from __future__ import annotations

import copy
import json
from typing import Any

import pytest
from fastapi.testclient import TestClient

from server import documents
from server.web import api
from tests.web.approving import approve

# Two planks glued flat on each other. By hand: V = 2 x 4000 / 2 = 4000 N, I = 100 x 200^3 / 12, S = 100 x 100 x 50,
# flow = V S / I = 30 N/mm, stress = 30 / 100 = 0.3 MPa, resistance = 1.2 / 2 = 0.6 MPa (common practice: VQ/I).
PLANKS: dict[str, Any] = {
    "format": "bondwright/1",
    "kind": "member",
    "title": "two planks",
    "basis": {"method": "allowable", "safety_factor": 2.0},
    "materials": {"wood": {"E": 10000, "strengths": {"bending": 24, "shear": 4}, "status": "approved"}},
    "adhesives": {"glue": {"shear_strength": 1.2, "status": "approved"}},
    "section": {
        "pieces": {
            "lower": {"shape": "rectangle", "width": 100, "depth": 100, "at": [0, 0], "material": "wood"},
            "upper": {"shape": "rectangle", "width": 100, "depth": 100, "at": [0, 100], "material": "wood"},
        },
        "joints": [{"between": ["lower", "upper"], "adhesive": "glue"}],
    },
    "member": {"length": "4 m", "supports": [{"at": 0, "kind": "pin"}, {"at": "4 m", "kind": "pin"}]},
    "loads": {"imposed": [{"kind": "line", "from": 0, "to": 4000, "value": "2 kN/m"}]},
}
BOND = {
    "name": "glue",
    "status": "draft",
    "units": "SI",
    "shear_strength": "1.2",
    "source": "Report 1 (invented)",
}


def changed(path: str, value: object) -> dict[str, Any]:
    """Return the planks with one entry set; DELETE takes it out."""
    document = copy.deepcopy(PLANKS)
    *parents, last = path.split("/")
    at: Any = document
    for name in parents:
        at = at[int(name)] if isinstance(at, list) else at[name]
    at[int(last) if isinstance(at, list) else last] = value
    return document


def run(client: TestClient, document: object) -> tuple[int, dict[str, Any]]:
    answer = client.post("/api/checks/run", content=json.dumps(document))
    assert answer.headers["content-type"] == "application/json"
    return answer.status_code, answer.json()


def test_a_document_is_answered_with_its_result(client: TestClient) -> None:
    status, result = run(client, PLANKS)
    assert status == 200
    assert result["format"] == "bondwright/1"
    joint = result["joints"][0]
    assert joint["id"] == "lower/upper"
    assert joint["shear_flow"] == pytest.approx(30.0, rel=1e-9)
    assert joint["stress"] == pytest.approx(0.3, rel=1e-9)
    adhesive = next(limit for limit in joint["limits"] if limit["what"] == "adhesive glue")
    assert adhesive["utilisation"] == pytest.approx(0.5, rel=1e-9)


@pytest.mark.parametrize(("strength", "verdict"), [(1.2, "pass"), (0.5, "fail"), (None, "not proven")])
def test_every_verdict_is_an_answer(client: TestClient, strength: float | None, verdict: str) -> None:
    glue = {"status": "approved"} | ({} if strength is None else {"shear_strength": strength})
    status, result = run(client, changed("adhesives/glue", glue))
    assert status == 200
    assert result["verdict"] == verdict


def test_references_are_filled_from_the_library(client: TestClient) -> None:
    client.post("/library/new/bonds", data=BOND)
    approve(client, "B-001")
    status, result = run(client, changed("adhesives/glue", {"record": "B-001"}))
    assert status == 200
    assert result["values_used"]["adhesives"]["glue"]["record"] == "B-001"
    assert result["values_used"]["adhesives"]["glue"]["revision"] == 1
    assert result["joints"][0]["stress"] == pytest.approx(0.3)


def test_an_unknown_reference_is_named(client: TestClient) -> None:
    status, answer = run(client, changed("adhesives/glue", {"record": "B-007"}))
    assert status == 422
    assert answer["faults"][0]["path"] == "adhesives.glue.record"
    assert "B-007" in answer["faults"][0]["message"]


def test_nothing_is_saved(client: TestClient) -> None:
    run(client, PLANKS)
    assert "two planks" not in client.get("/jobs").text


@pytest.mark.parametrize(
    ("path", "value", "field"),
    [
        ("format", "bondwright/9", "format"),
        ("kind", "raft", "kind"),
        ("basis", {}, "basis.method"),
        ("colour", "red", "colour"),
        ("member/length", "4 kg", "member.length"),
        ("member/length", "-4 m", "member.length"),
        ("member/length", 1e308, "member.length"),
        ("member/length", None, "member.length"),
        ("member/length", True, "member.length"),
        ("member/length", [4000], "member.length"),
        ("member/length", "9" * 5000, "member.length"),
        ("member/supports", [], "member.supports"),
        ("member/supports", "two", "member.supports"),
        ("section/pieces/upper/width", "NaN", "section.pieces.upper.width"),
        ("section/pieces/upper/width", "1e400", "section.pieces.upper.width"),
        ("section/pieces/upper/material", "steel", "section.pieces.upper.material"),
        ("section/pieces/upper/at", [0], "section.pieces.upper.at[1]"),
        ("section/pieces", {}, "section.pieces"),
        ("section/joints/0/between", ["lower", "lid"], "section.joints[0].between"),
        ("section/joints/0/adhesive", "jam", "section.joints[0].adhesive"),
        ("section/joints/0/width", "500 mm", "section.joints[0].width"),
        ("section/joints/0/coverage", 1.5, "section.joints[0].coverage"),
        ("loads/imposed/0/value", "2 kN", "loads.imposed[0].value"),
        ("loads/imposed/0/kind", "wish", "loads.imposed[0].kind"),
        ("loads/imposed/0/to", "9 m", "loads.imposed[0].to"),
        ("adhesives/glue/shear_strength", "6 N/mm", "adhesives.glue.shear_strength"),
        ("adhesives/glue/peel_strength", "6 N/mm", "adhesives.glue.peel_strength"),
        ("materials/wood/E", 0, "materials.wood.E"),
        ("materials/wood", {}, "materials.wood.E"),
        ("materials/wood", {"record": "x" * 999}, "materials.wood.record"),
        ("title", "half a character \ud800", "title"),
    ],
)
def test_wrong_input_names_its_field(client: TestClient, path: str, value: object, field: str) -> None:
    status, answer = run(client, changed(path, value))
    assert status == 422
    assert field in [fault["path"] for fault in answer["faults"]]
    assert all(fault["message"] for fault in answer["faults"])
    assert "Traceback" not in json.dumps(answer)


@pytest.mark.parametrize(
    "body",
    [
        b"",
        b"{",
        b"[]",
        b"null",
        b"3",
        b'"text"',
        b"\xff\xfe",
        b"[" * 100_000,
        b'{"a":' * 50_000,
        b"9" * 10_000,
        b'{"format": NaN}',
        b'{"format": "bondwright/1", "kind": ' + b"9" * 5000 + b"}",
        b"number=1&title=2",
    ],
)
def test_a_body_that_is_no_document_is_refused_in_words(client: TestClient, body: bytes) -> None:
    answer = client.post("/api/checks/run", content=body)
    assert answer.status_code == 422
    assert answer.json()["faults"][0]["message"]


def test_a_key_given_twice_is_refused_by_name(client: TestClient) -> None:
    text = json.dumps(PLANKS).replace('"length": "4 m"', '"length": "4 m", "length": "5 m"')
    answer = client.post("/api/checks/run", content=text)
    assert answer.status_code == 422
    assert [fault["path"] for fault in answer.json()["faults"]] == ["member.length"]


def test_every_fault_is_said_at_once(client: TestClient) -> None:
    document = changed("member/length", "4 kg")
    document["materials"]["wood"]["E"] = -1
    status, answer = run(client, document)
    assert status == 422
    assert {"member.length", "materials.wood.E"} <= {fault["path"] for fault in answer["faults"]}


class TestRecords:
    def test_they_are_found_and_read(self, client: TestClient) -> None:
        client.post("/library/new/bonds", data=BOND)
        found = client.get("/api/records?q=glue").json()
        assert found["total"] == 1
        assert found["records"][0]["key"] == "B-001"
        assert client.get("/api/records/b-001?revision=1").json()["entry"]["source"] == "Report 1 (invented)"

    @pytest.mark.parametrize("path", ["/api/records/B-9", "/api/records/B-001?revision=4"])
    def test_what_is_missing_says_so(self, client: TestClient, path: str) -> None:
        client.post("/library/new/bonds", data=BOND)
        answer = client.get(path)
        assert answer.status_code == 404
        assert "B-" in answer.json()["faults"][0]["message"]


class TestSchema:
    def test_it_describes_the_document_by_its_fields(self, client: TestClient) -> None:
        schema = client.get("/openapi.json").json()
        operation = schema["paths"]["/api/checks/run"]["post"]
        assert operation["requestBody"]["content"]["application/json"]["schema"]["$ref"].endswith("/Document")
        text = json.dumps(schema["components"]["schemas"])
        for name in ("deflection_limit", "rolling_shear", "partial_factor"):
            assert name in text

    def test_every_kind_of_check_has_its_document(self, client: TestClient) -> None:
        schemas = client.get("/openapi.json").json()["components"]["schemas"]
        mapping = schemas["Document"]["discriminator"]["mapping"]
        assert set(mapping) == set(documents.KINDS)
        assert [each["$ref"] for each in schemas["Document"]["oneOf"]] == list(mapping.values())
        for kind, at in mapping.items():
            document = schemas[at.rpartition("/")[2]]
            assert document["properties"]["kind"]["const"] == kind
            assert set(document["properties"]) == set(documents.schema(kind)["properties"])
        assert {"coupons", "statistic"} <= set(schemas["CouponsDocument"]["properties"])

    def test_parts_of_one_name_that_differ_are_kept_apart(self) -> None:
        known = {"Load": {"type": "string"}, "Same": {"type": "object"}}
        document = {
            "title": "Raft", "$defs": {"Load": {"type": "number"}, "Same": {"type": "object"}},
            "properties": {"load": {"$ref": "#/$defs/Load"}, "same": [{"$ref": "#/$defs/Same"}]},
        }  # fmt: skip
        name, parts = api._hoisted(document, known)
        assert (name, set(parts)) == ("Raft", {"Raft", "Raft.Load", "Same"})
        assert parts["Raft"]["properties"] == {
            "load": {"$ref": "#/components/schemas/Raft.Load"}, "same": [{"$ref": "#/components/schemas/Same"}],
        }  # fmt: skip

    def test_every_reference_in_it_leads_somewhere(self, client: TestClient) -> None:
        schema = client.get("/openapi.json").json()
        text = json.dumps(schema)
        for part in text.split('"$ref": "')[1:]:
            at: Any = schema
            for name in part.split('"')[0].removeprefix("#/").split("/"):
                at = at[name.replace("~1", "/")]
            assert isinstance(at, dict)
