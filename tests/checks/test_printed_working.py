"""Every step of every demo document is reached again from what is printed, by Python's own arithmetic.

Nothing of ``server.working`` takes part in the arithmetic here: the printed line is a plain expression.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import numpy as np
import pytest

from server import checks, documents, jobs, storage
from server.jobs import demo
from tests.checks.oracle_documents import DOCUMENTS

ROOT = Path(__file__).parents[2]
CALCULATOR = {
    "__builtins__": {}, "sqrt": math.sqrt, "exp": math.exp, "log": math.log, "tanh": math.tanh, "cosh": math.cosh,
    "sinh": math.sinh, "pi": math.pi, "abs": abs, "max": max, "min": min,
}  # fmt: skip
ON_ARRAYS = {
    "__builtins__": {}, "sqrt": np.sqrt, "exp": np.exp, "log": np.log, "tanh": np.tanh, "cosh": np.cosh,
    "sinh": np.sinh, "pi": np.pi, "abs": np.abs, "max": max, "min": min, "sum": np.sum,
}  # fmt: skip
LEFT_OUT = "... ("  # a sum of more than twelve terms prints its first two and its last


def _demo_files() -> Iterator[tuple[str, Any]]:
    for file in sorted((ROOT / "seed_data/checks").glob("*.json")):
        if file.name != "wrong.json":
            yield file.name, checks.run(documents.read(file.read_bytes()))


def _demo_shop() -> Iterator[tuple[str, Any]]:
    """What the demo shop has saved: every revision of every check."""
    with TemporaryDirectory() as folder:
        engine = storage.engine(Path(folder) / "book.db")
        storage.migrate(engine)
        demo.fill(engine)
        with storage.reading(engine) as session:
            for job in jobs.search(session).jobs:
                for check in jobs.checks_of(session, job.id):
                    for line in jobs.revisions_of(session, check.id):
                        saved = jobs.revision_of(session, check.id, line.revision)
                        yield f"{saved.mark} revision {saved.revision}", saved.result
        engine.dispose()


@cache
def results() -> dict[str, Any]:
    """The results of all demo documents, as the demo shop has saved them, and of the oracle's documents."""
    return {
        **dict(_demo_files()),
        **dict(_demo_shop()),
        **{name: checks.run(documents.read(raw)) for name, raw in DOCUMENTS.items()},
    }


def steps() -> Iterator[tuple[str, dict[str, Any]]]:
    """Every step with a formula, with where it stands."""
    for name, result in results().items():
        for step in result["steps"]:
            if step["formula"]:
                yield f"{name}, {step['group']}: {step['title']}", step


def five(value: float) -> float:
    """To the five significant digits that a printed value has; whole digits below a million are all printed."""
    return float(f"{value:.4e}") if abs(value) < 1e5 or abs(value) >= 1e6 else float(f"{value:.0f}")


def test_there_are_demo_documents_and_steps() -> None:
    assert len(results()) - len(DOCUMENTS) >= 7
    assert len(list(steps())) > 1000


def test_the_printed_line_gives_the_printed_value() -> None:
    wrong = []
    for where, step in steps():
        if LEFT_OUT in step["substituted"]:
            continue
        got = eval(step["substituted"], CALCULATOR)  # our own printed lines
        if five(got) != five(step["value"]):
            wrong.append(f"{where}: {step['substituted']} is {got!r}, printed {step['value']!r}")
    assert wrong == []


def test_the_printed_formula_with_its_values_gives_the_value() -> None:
    wrong = []
    for where, step in steps():
        values = {name: np.asarray(each["value"], dtype=float) for name, each in step["values"].items()}
        got = float(eval(step["formula"], ON_ARRAYS | values))  # our own formulas
        if got != pytest.approx(step["value"], rel=1e-12, abs=1e-9):
            wrong.append(f"{where}: {step['formula']} is {got!r}, printed {step['value']!r}")
    assert wrong == []


def test_few_sums_are_too_long_to_print_whole() -> None:
    long = [where for where, step in steps() if LEFT_OUT in step["substituted"]]
    assert long == []


def test_every_step_says_its_unit_and_where_its_formula_is_from() -> None:
    wrong = [where for where, step in steps() if not step["title"] or not step["symbol"] or not step["source"]]
    assert wrong == []


FOUND = {
    "V", "M", "S", "EI", "GA", "q", "tau", "sigma", "F", "f_d", "R_d", "R_2", "u", "u_lim", "u_P", "u_w", "u_V", "u_i",
    "u_s", "M_P", "M_w", "w",
}  # fmt: skip
"""Symbols of what the check finds; all others stand for what was given, for plain geometry, or for a chosen place."""


BY_HAND = ("Loads", "Section", "Member", "Joint ", "Piece ", "Deflection", "Long-term deflection")
"""The groups of a member that a pocket calculator manages; ends of strips and movement of parts are not such."""


def test_what_a_line_uses_was_found_in_a_line_above() -> None:
    """From the loads to the verdict without a gap, in every document that the demo shop brings."""
    gaps = []
    for name, result in results().items():
        above: list[float] = []
        for step in result["steps"] if name not in DOCUMENTS and result["kind"] == "member" else []:
            for symbol, given in step["values"].items():
                used = given["value"]
                height = symbol == "u" and step["formula"] != "u/u_lim"  # the one letter that stands for two things
                other = symbol not in FOUND or height or not step["group"].startswith(BY_HAND)
                if other or isinstance(used, list) or used == 0:
                    continue
                if not any(math.isclose(abs(used), each, rel_tol=1e-9) for each in above):
                    gaps.append(f"{name}, {step['group']}: {step['title']} uses {symbol} = {used}")
            above += [abs(step["value"])] if step["value"] is not None else []
    assert gaps == []
