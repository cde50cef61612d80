"""Whole members against the oracle, key by key of the contract."""

from __future__ import annotations

import pytest

from tests.checks.oracle_compare import differences, expected, result_of
from tests.checks.oracle_documents import DOCUMENTS


@pytest.mark.parametrize("name", DOCUMENTS)
def test_every_number_of_the_contract_is_the_oracles(name: str) -> None:
    assert differences(result_of(name), expected(name)) == []


def test_the_documents_reach_every_verdict() -> None:
    assert {expected(name).verdict for name in DOCUMENTS} == {"pass", "fail", "not proven"}
