"""Joints at the edge of what can be made, asked of the API with a bond that yields: finite numbers, soon."""

from __future__ import annotations

import pytest
from fastapi.testclient import TestClient

from tests.checks.test_extreme_joints import EDGES, JOINTS, infinite, made


@pytest.mark.parametrize("joint", JOINTS)
def test_every_edge_is_answered_where_the_bond_yields(client: TestClient, joint: str) -> None:
    for edge in EDGES:
        answer = client.post("/api/checks/run", json={**made(joint, edge), "response": "elastic-plastic"})
        assert answer.status_code == 200, (edge, answer.text)
        result = answer.json()
        assert infinite(result) == [], edge
        assert result["verdict"] in ("pass", "fail", "not proven")
        assert result["utilisation"] is None or result["utilisation"] > 0


@pytest.mark.parametrize("joint", JOINTS)
def test_yielding_never_costs_strength_however_stiff_the_bond(client: TestClient, joint: str) -> None:
    document = made(joint, "very stiff adhesive")
    elastic = client.post("/api/checks/run", json=document).json()["utilisation"]
    yielding = client.post("/api/checks/run", json={**document, "response": "elastic-plastic"}).json()["utilisation"]
    assert yielding <= elastic * (1 + 1e-6)


def test_a_bond_that_yields_far_too_early_is_said_to(client: TestClient) -> None:
    document = {**made("double-lap", "very stiff adhesive"), "response": "elastic-plastic"}
    result = client.post("/api/checks/run", json=document).json()
    assert any(each["about"] == "overlap curve" for each in result["cautions"])
    assert result["changes"] == []
