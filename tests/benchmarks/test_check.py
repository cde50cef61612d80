"""One full member check in process, beside reading its document and writing its result as JSON."""

from __future__ import annotations

import json

from pytest_benchmark.fixture import BenchmarkFixture

from server import checks, documents
from tests.benchmarks.member import MEMBER


def test_a_full_check_with_its_working(benchmark: BenchmarkFixture) -> None:
    """5 pieces, 4 joints, 10 loads, 3 combinations, creep; the aim is a median of 5 ms."""
    document = documents.read(MEMBER)
    result = benchmark(checks.run, document)
    assert len(result["joints"]) == 4
    assert all(joint["split"] == "cut" for joint in result["joints"])
    benchmark.extra_info["steps"] = len(result["steps"])


def test_reading_its_document(benchmark: BenchmarkFixture) -> None:
    text = json.dumps(MEMBER)
    assert len(benchmark(documents.read, text).section.pieces) == 5


def test_writing_its_result(benchmark: BenchmarkFixture) -> None:
    result = checks.run(documents.read(MEMBER))
    assert benchmark(json.dumps, result)
