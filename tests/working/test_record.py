"""A step's printed line gives its printed value; a layout means what the formula means."""

import json
import math
import re

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.working import FormulaError, Working, formula, mathml, plain, typst_math
from server.working.layout import symbolic, with_numbers
from server.working.numbers import canonical, parts, readable, readable_unit
from tests.working.expressions import NAMES, expressions, values_for

FUNCTIONS = {"sqrt": math.sqrt, "abs": abs, "max": max, "min": min, "pi": math.pi, "tanh": math.tanh}
NONE = frozenset()


def test_a_step_returns_and_records_its_value():
    w = Working()
    w.begin("Joint top/web")
    value = w.step("Bond stress", "tau", "q / b", {"q": (35.482, "N/mm"), "b": (140, "mm")}, "MPa", "Jourawski")
    assert value == 35.482 / 140
    assert w.steps == [
        {
            "title": "Bond stress",
            "symbol": "tau",
            "formula": "q / b",
            "substituted": "35.482 / 140",
            "value": value,
            "unit": "MPa",
            "source": "Jourawski",
            "group": "Joint top/web",
            "values": {"q": {"value": 35.482, "unit": "N/mm"}, "b": {"value": 140.0, "unit": "mm"}},
            "note": "",
        }
    ]
    json.dumps(w.steps)


@given(expressions())
@settings(max_examples=400, deadline=None)
def test_a_calculator_reaches_the_printed_value_from_the_printed_line(text):
    w = Working()
    names = formula(text).names
    try:
        value = w.step("t", "y", text, {name: (NAMES[name], "") for name in names})
    except InputError:
        assume(False)
    reached = eval(w.steps[0]["substituted"], FUNCTIONS)
    assert canonical(float(reached)) == canonical(value)


@given(st.lists(st.floats(-1e9, 1e9).filter(lambda x: x == 0 or abs(x) > 1e-9), min_size=1, max_size=12))
@settings(max_examples=100, deadline=None)
def test_a_sum_is_printed_term_by_term_and_reaches_its_value(numbers):
    w = Working()
    value = w.step("t", "y", "k * sum(a*(a - m)**2)", {"a": (np.array(numbers), ""), "k": (2.5, ""), "m": (1.5, "")})
    reached = float(eval(w.steps[0]["substituted"]))
    tie = reached == pytest.approx(value, rel=1e-12)  # the last digit may round either way
    assert tie or canonical(reached) == canonical(value)
    assert w.steps[0]["substituted"].count("**2") == len(numbers)


def test_a_long_sum_shows_its_first_two_terms_and_its_last():
    w = Working()
    w.step("t", "y", "sum(a)", {"a": (list(range(1, 21)), "")})
    assert w.steps[0]["substituted"] == "1 + 2 + ... (20 terms) + 20"
    assert w.steps[0]["value"] == 210


def as_python(node) -> str:
    """A layout read the way a person reads it: rows flat, a bar and a raised exponent holding together."""
    match node:
        case ["name", base, below]:
            back = {"σ": "sigma", "π": "pi"}.get(base, base)
            return back + (f"_{below}" if below else "")
        case ["number", digits, power]:
            digits = digits.replace("−", "-").replace("\u2009", "")
            return f"{digits}e{power.replace('−', '-')}" if power else digits
        case ["sign", sign]:
            return {"−": "-", "⋅": "*", "+": "+"}[sign]
        case ["row", *inner]:
            return "".join(as_python(each) for each in inner)
        case ["brackets", inner]:
            return f"({as_python(inner)})"
        case ["fraction", over, under]:
            return f"(({as_python(over)})/({as_python(under)}))"
        case ["power", base, exponent]:
            return f"{as_python(base)}**({as_python(exponent)})"
        case ["root", inner]:
            return f"sqrt({as_python(inner)})"
        case ["size", inner]:
            return f"abs({as_python(inner)})"
        case ["function", name, *inner]:
            return f"{name}({','.join(as_python(each) for each in inner)})"
    raise AssertionError(node)


@given(expressions())
@settings(max_examples=400, deadline=None)
def test_the_laid_out_formula_means_the_same(text):
    known = formula(text)
    values = values_for(known.names)
    try:
        expected = known.value(values)
    except (ArithmeticError, ValueError):
        assume(False)
    assume(math.isfinite(expected))
    drawn = as_python(symbolic(known.tree, NONE))
    assert eval(drawn, FUNCTIONS, dict(values)) == pytest.approx(expected, rel=1e-9)
    filled = as_python(with_numbers(known.tree, values, NONE, 0, 17))
    assert "--" not in filled.replace("(-", ""), "a minus never follows a sign bare"
    assert eval(filled, FUNCTIONS) == pytest.approx(expected, rel=1e-9)


def plain_as_python(text: str) -> str:
    text = text.replace("\u00a0", "").replace("π", "pi").replace("√", "sqrt")
    raised = "⁰¹²³⁴⁵⁶⁷⁸⁹⁻"
    text = re.sub(f"×10([{raised}]+)", lambda m: "e" + m[1].translate(str.maketrans(raised, "0123456789-")), text)
    text = re.sub(f"[{raised}]+", lambda m: "**" + m[0].translate(str.maketrans(raised, "0123456789-")), text)
    return text.replace("⋅", "*").replace("−", "-").replace("^", "**").replace("σ_mean", "sigma_mean")


@given(expressions().filter(lambda text: "abs" not in text))
@settings(max_examples=400, deadline=None)
def test_the_plain_line_means_the_same(text):
    w = Working()
    try:
        value = w.step("t", "y", text, {name: (NAMES[name], "") for name in formula(text).names})
    except InputError:
        assume(False)
    lines = plain(w.steps[0])
    assert lines[0].startswith("y = ")
    for each in lines[:-1]:
        got = eval(plain_as_python(each.removeprefix("y ").removeprefix("= ")), FUNCTIONS, dict(NAMES))
        assert got == pytest.approx(value, rel=2e-4, abs=1e-300)


@pytest.mark.parametrize("values", [{"q": (1.0, "N/mm")}, {"q": (1.0, ""), "b": (1.0, ""), "c": (1.0, "")}])
def test_names_without_values_and_values_without_names_are_refused_at_once(values):
    w = Working()
    with pytest.raises(FormulaError, match=r"'b'|'c'"):
        w.step("t", "tau", "q / b", values)
    assert w.steps == []


@pytest.mark.parametrize(
    ("values", "field", "match"),
    [
        ({"q": (math.nan, "N/mm"), "b": (1.0, "mm")}, "q", "q is nan"),
        ({"q": (1.0, "N/mm"), "b": (np.float64("inf"), "mm")}, "b", "b is inf"),
        ({"q": (1.0, "N/mm"), "b": (0.0, "mm")}, "tau", "τ in .* divides by zero: q / b"),
        ({"q": (1e308, "N/mm"), "b": (1e-9, "mm")}, "tau", "no finite real answer"),
    ],
)
def test_numbers_without_an_answer_name_their_symbol(values, field, match):
    with pytest.raises(InputError, match=match) as caught:
        Working().step("Bond stress", "tau", "q / b", values)
    assert caught.value.field == field


def test_a_root_of_a_negative_number_and_a_power_without_a_real_answer_are_refused():
    for text in ("sqrt(a)", "a ** 0.5", "log(a)"):
        with pytest.raises(InputError):
            Working().step("t", "y", text, {"a": (-1.0, "")})


def test_lists_must_match_and_be_finite():
    with pytest.raises(FormulaError, match="different lengths"):
        Working().step("t", "y", "sum(a*b)", {"a": ([1.0, 2.0], ""), "b": ([1.0], "")})
    with pytest.raises(InputError, match="a_2 is nan"):
        Working().step("t", "y", "sum(a)", {"a": ([1.0, math.nan], "")})


def test_a_note_keeps_words_and_value():
    w = Working()
    w.note("Field", "Finite elements, 1200 triangles; flow in balance to 1e-9.", 0.25, "MPa", "method", "Field", "tau")
    assert w.steps[0]["note"].startswith("Finite elements")
    assert plain(w.steps[0]) == ["τ = 0.25 MPa"]
    assert "0.25" in mathml(w.steps[0])
    with pytest.raises(InputError):
        w.note("Field", "x", math.inf)


def test_mathml_is_well_formed_and_has_no_style_or_script():
    from xml.etree import ElementTree

    w = Working()
    w.step(
        "t",
        "EI",
        "sum(E*(I + A*(u - u_0)**2))",
        {**{n: ([1.0, 2.0, -3.5], "mm") for n in "EIAu"}, "u_0": (1.5, "mm")},
        "N*mm2",
    )
    w.step("t", "k", "max(sqrt(a), abs(-a), -a) / tanh(a)**2", {"a": (0.00001234567, "mm2")}, "mm<2>")
    for step in w.steps:
        text = mathml(step)
        ElementTree.fromstring(f"<p>{text}</p>")
        assert "style" not in text
    assert "<munder><mo>∑</mo><mi>i</mi></munder>" in mathml(w.steps[0])
    assert "N·mm²" in mathml(w.steps[0])
    assert "mm&lt;" in mathml(w.steps[1])
    assert "<msup><mn>10</mn><mn>−5</mn></msup>" in mathml(w.steps[1])


def test_a_chain_of_one_name_is_not_printed_twice():
    w = Working()
    w.step("Governing shear", "V", "V", {"V": (14600.0, "N")}, "N")
    assert plain(w.steps[0]) == ["V = 14\u00a0600 N"]
    assert typst_math(w.steps[0])["formula"] is None


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (0.0, "0"),
        (14600.0, "14600"),
        (0.25357142, "0.25357"),
        (99999.7, "100000"),
        (123456.4, "123456"),
        (999999.6, "1e6"),
        (999994.0, "999994"),
        (1039500.0, "1.0395e6"),
        (4.697e12, "4.697e12"),
        (0.001, "0.001"),
        (0.00099999999, "0.001"),
        (0.00025, "2.5e-4"),
        (-0.00025, "-2.5e-4"),
        (-1.5, "-1.5"),
        (1e-300, "1e-300"),
        (1 / 3, "0.33333"),
    ],
)
def test_numbers_are_short_and_read_back(value, text):
    assert canonical(value) == text
    assert float(text) == pytest.approx(value, rel=5.1e-5)


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_seventeen_digits_give_the_number_back(value):
    assert float(canonical(value, 17)) == value


@given(st.floats(-1e30, 1e30))
def test_any_number_reads_back_to_half_its_last_digit(value):
    assert float(canonical(value)) == pytest.approx(value, rel=5.0001e-5, abs=0)


def test_numbers_and_units_for_people():
    assert readable(14600) == "14\u2009600"
    assert readable(-1.0395e7) == "−1.0395×10⁷"
    assert parts("1234.567891") == ("1234.567\u2009891", "")
    assert readable_unit("N*mm2") == "N·mm²"
    assert readable_unit("kg/m3") == "kg/m³"
    assert readable_unit("lbf/in") == "lbf/in"
