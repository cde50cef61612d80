"""One full member check in process, beside reading its document and writing its result as JSON."""

from __future__ import annotations

import json

from pytest_benchmark.fixture import BenchmarkFixture

from server import checks, documents
from server.checks import crosssection
from server.remembered import Remembered
from tests.benchmarks.member import MEMBER


def test_a_full_check_with_its_working(benchmark: BenchmarkFixture) -> None:
    """5 pieces, 4 joints, 10 loads, 3 combinations, creep; the aim is a median of 5 ms.

    The section is remembered by its content, as it is where loads are typed or a check is saved after its preview.
    """
    document = documents.read(MEMBER)
    result = benchmark(checks.run, document)
    assert len(result["joints"]) == 4
    assert all(joint["split"] == "cut" for joint in result["joints"])
    benchmark.extra_info["steps"] = len(result["steps"])


def test_a_full_check_of_a_section_not_seen_before(benchmark: BenchmarkFixture, monkeypatch) -> None:
    """The same with the section built anew each time, as the first check after any change of it does."""
    document = documents.read(MEMBER)
    monkeypatch.setattr(crosssection, "_bodies", Remembered(0))
    assert benchmark(checks.run, document)["verdict"]


def test_reading_its_document(benchmark: BenchmarkFixture) -> None:
    text = json.dumps(MEMBER)
    assert len(benchmark(documents.read, text).section.pieces) == 5


def test_writing_its_result(benchmark: BenchmarkFixture) -> None:
    result = checks.run(documents.read(MEMBER))
    assert benchmark(json.dumps, result)
