"""The grammar lets in arithmetic and nothing else; a formula's value is Python's own value of the same text."""

import math

import numpy as np
import pytest
from hypothesis import given, settings

from server.working import Working
from server.working.compiled import MOST_TERMS
from server.working.formula import formula
from server.working.grammar import FormulaError, parse
from tests.working.expressions import expressions, values_for


@given(expressions())
@settings(max_examples=200, deadline=None)
def test_a_formula_has_the_value_of_the_same_text_in_python(text):
    known = formula(text)
    values = values_for(known.names)
    try:
        expected = eval(text, {"sqrt": math.sqrt, "abs": abs, "max": max, "min": min, "pi": math.pi}, dict(values))
    except (ArithmeticError, ValueError):
        with pytest.raises((ArithmeticError, ValueError)):
            known.value(values)
        return
    assert known.value(values) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(
    "text",
    [
        "__import__('os').system('true')",
        "a.b",
        "a[0]",
        "a if b else c",
        "lambda: 1",
        "a < b",
        "a // b",
        "a % b",
        "'text'",
        "True",
        "f(a)",
        "sqrt(a, b)",
        "max(a)",
        "sum(sum(a))",
        "sqrt",
        "[a for a in b]",
        "a; b",
        "a +",
        "",
        "(a := 3)",
        "sqrt(x=a)",
        "1j * a",
    ],
)
def test_anything_but_arithmetic_is_refused(text):
    with pytest.raises(FormulaError):
        formula(text)


def test_a_sum_runs_over_its_lists_and_keeps_single_numbers():
    known = formula("sum(E * (I + A*(u - u_0)**2)) / k")
    values = {"E": [2.0, 3.0], "I": [5.0, 7.0], "A": [11.0, 13.0], "u": [1.0, 4.0], "u_0": 2.0, "k": 10.0}
    assert known.value(values) == pytest.approx((2 * (5 + 11) + 3 * (7 + 13 * 4)) / 10)


@pytest.mark.parametrize("terms", [0, 1, 2, MOST_TERMS, MOST_TERMS + 1, 200])
def test_a_sum_of_any_length_and_its_line_say_the_same(terms):
    numbers = [round(0.3 + 1.7 * place, 1) for place in range(terms)]
    steps = Working()
    values = {"A": (numbers, "mm2"), "u_0": (-2.0, "mm")}
    value = steps.step("Sum", "S", "3 * sum(A * (A - u_0))", values, "mm4")
    assert value == pytest.approx(3 * sum(each * (each + 2) for each in numbers))
    line = steps.steps[0]["substituted"]
    assert (f"({terms} terms)" in line) == (terms > MOST_TERMS)
    if terms <= MOST_TERMS:
        assert eval(line) == pytest.approx(value)


@pytest.mark.parametrize(
    ("text", "values", "match"),
    [
        ("a * sum(b)", {"a": [1.0], "b": [1.0]}, "a is a list but stands outside a sum"),
        ("sum(b)", {"b": 1.0}, "nothing under the sum is a list"),
        ("sum(a * b)", {"a": [1.0, 2.0], "b": [1.0]}, "different lengths"),
        ("a * b", {"a": 1.0, "c": 1.0}, r"lacks values for \['b'\] and has no use for \['c'\]"),
    ],
)
def test_values_that_do_not_fit_a_formula_are_refused(text, values, match):
    with pytest.raises(FormulaError, match=match):
        formula(text).value(values)


def test_the_printed_text_draws_a_curve_over_arrays():
    x = np.linspace(0.1, 2, 5)
    got = formula("max(x, 1) * sqrt(x) / k").array({"x": x, "k": 4.0})
    assert got == pytest.approx(np.maximum(x, 1) * np.sqrt(x) / 4)


def test_a_formula_is_read_once():
    assert formula("a + b") is formula("a + b")
    assert parse("a+b") == parse("a + b")
