"""Breaking any one formula of the working makes a check disagree with the oracle.

A formula of the working is text that is both printed and evaluated. Here each text that the oracle's documents use is
broken where it is read: once made one percent too large, and once for every sign and operator turned into its opposite.
"""

from __future__ import annotations

import importlib
import re
from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache

import pytest

from server.errors import JointError
from server.working.grammar import parse
from tests.checks.oracle_compare import differences, expected, result_of
from tests.checks.oracle_documents import DOCUMENTS

reading = importlib.import_module("server.working.formula")  # the room gives the function of that name
OPPOSITE = {"+": "-", "-": "+", "*": "/", "/": "*"}


@contextmanager
def broken(text: str, instead: str) -> Iterator[None]:
    """Read ``instead`` wherever the program asks for the formula ``text``."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(reading, "parse", lambda asked: parse(instead if asked.strip() == text else asked))
        _forget()
        yield
    _forget()


def _forget() -> None:
    reading.formula.cache_clear()
    reading.ordered.cache_clear()


@cache
def used() -> dict[str, tuple[str, ...]]:
    """Every formula of the working of the oracle's documents, with the documents that print it."""
    found: dict[str, list[str]] = {}
    for name in DOCUMENTS:
        for text in {step["formula"] for step in result_of(name)["steps"]} - {""}:
            found.setdefault(text, []).append(name)
    return {text: tuple(names) for text, names in sorted(found.items())}


def noticed(text: str, instead: str) -> bool:
    """Whether any document that prints the formula now disagrees with the oracle, or cannot be checked at all."""
    with broken(text, instead):
        for name in used()[text]:
            try:
                if differences(result_of(name), expected(name)):
                    return True
            except (JointError, KeyError):
                return True
    return False


def turned(text: str) -> Iterator[str]:
    """The formula with one operator turned into its opposite, or its leading minus taken away."""
    for found in re.finditer(r"(?<!\*)[-+*/](?!\*)", text):
        opposite = OPPOSITE[found[0]] if found.start() else ""
        yield text[: found.start()] + opposite + text[found.end() :]


def test_the_formulas_that_carry_a_verdict_are_among_them() -> None:
    known = set(used())
    for text in (
        "abs(sum(E*A*(u - u_0)))", "V*S/EI", "c_s*V*S/EI", "q/(b*c)", "f_k*k_dur/gamma", "tau/f_d", "sigma/f_d",
        "-E*M*(u - u_0)/EI", "V*S/(EI*b)", "L/n", "2*L/n", "u/u_lim", "q*s/n", "F/R_d", "n*R_d/q", "q/(c*f_d)",
    ):  # fmt: skip
        assert text in known


def test_a_formula_that_says_the_same_is_no_difference() -> None:
    assert not noticed("q/(b*c)", "q/c/b")


def test_any_formula_one_percent_too_large_is_noticed() -> None:
    assert [text for text in used() if not noticed(text, f"1.01*({text})")] == []


def test_any_turned_operator_is_noticed() -> None:
    assert [(text, other) for text in used() for other in turned(text) if not noticed(text, other)] == []
