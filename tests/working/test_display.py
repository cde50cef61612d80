"""In inch-pound units a line is converted whole: its numbers still give its value, in consistent units."""

import pytest

from server.working import Working, mathml, plain, typst_math
from tests.working.test_record import plain_as_python

POUND, INCH = 4.4482216152605, 25.4  # exact by definition (NIST SP 811, appendix B)


@pytest.fixture
def steps():
    w = Working()
    w.step("Shear flow", "q", "V*S/I", {"V": (14600.0, "N"), "S": (1.0395e6, "mm3"), "I": (4.2697e8, "mm4")}, "N/mm")
    w.step("Stress", "tau", "q/b", {"q": (35.546, "N/mm"), "b": (140.0, "mm")}, "MPa")
    pieces = {"E": ([11000.0, 6500.0], "MPa"), "A": ([6300.0, 5000.0], "mm2"), "u": ([35.0, -80.5], "mm")}
    w.step("Stiffness", "EI", "sum(E*A*u**2)", pieces, "N*mm2")
    return w.steps


@pytest.mark.parametrize("index", [0, 1, 2])
def test_the_printed_line_balances_in_pounds_and_inches(steps, index):
    lines = plain(steps[index], "US")
    numbers, value = lines[-2].removeprefix("= "), lines[-1].removeprefix("= ").split(" ")
    reached = eval(plain_as_python(numbers))
    assert f"{reached:.5g}" == f"{float(plain_as_python(value[0])):.5g}"


def test_value_and_unit_are_converted(steps):
    flow = plain(steps[0], "US")[-1]
    assert flow.endswith("lbf/in")
    expected = steps[0]["value"] * INCH / POUND
    assert float(flow.split(" ")[1]) == pytest.approx(expected, rel=5e-5)
    assert plain(steps[1], "US")[-1].endswith("psi")
    assert plain(steps[2], "US")[-1].endswith("lbf·in²")
    assert "psi" in mathml(steps[1], "US")
    assert typst_math(steps[1], "US")["unit"] == "psi"


def test_si_stays_as_reckoned(steps):
    assert plain(steps[0])[-1].endswith("N/mm")
    assert plain(steps[0], "SI") == plain(steps[0])


def test_a_formula_with_a_dimensional_constant_keeps_its_own_units():
    w = Working()
    w.step("Slip modulus", "K", "rho**1.5*d/23", {"rho": (420.0, "kg/m3"), "d": (5.0, "mm")}, "N/mm", "EN 1995-1-1 7.1")
    assert plain(w.steps[0], "US") == plain(w.steps[0], "SI")


def test_a_note_is_converted_too():
    w = Working()
    w.note("Field", "by finite elements", 2.0, "MPa", symbol="tau")
    assert plain(w.steps[0], "US") == ["τ = 290.08 psi"]


def test_a_wide_fraction_is_set_in_a_row_that_can_break():
    w = Working()
    values = {"E": ([11000.0] * 5, "MPa"), "A": ([6300.123] * 5, "mm2"), "u": ([35.0, 1, 2, 3, 4], "mm")}
    w.step("Axis", "u_0", "sum(E*A*u)/sum(E*A)", values, "mm")
    row = typst_math(w.steps[0])["numbers"]
    assert row[0] == "row"
    assert not any(part[0] == "fraction" for part in row)
    assert row[1] == ["sign", "("]
    assert row.count(["sign", "("]) == row.count(["sign", ")"]) == 2
    assert mathml(w.steps[0]).count('class="working-numbers"') > 3
    assert typst_math(w.steps[0])["formula"][0] == "fraction", "the symbols are short enough"


@pytest.mark.parametrize(("text", "last"), [("sqrt(sum(x*x))", "power"), ("max(sum(x*x), 1)", "sign")])
def test_a_root_or_a_function_over_a_long_sum_is_set_in_a_row_that_can_break(text, last):
    w = Working()
    w.step("Long", "s", text, {"x": ([1.2345 + i for i in range(11)], "")})
    row = typst_math(w.steps[0])["numbers"]
    assert row[0] == "row"
    assert row.count(["sign", "+"]) == 10, "every plus stands where a line may break"
    assert row[-1][0] == last
    signs = str(row)
    assert signs.count("'('") == signs.count("')'")


@pytest.mark.parametrize(
    ("text", "line"),
    [
        ("a/(b*c)", "y = a / (b ⋅ c)"),
        ("a/b*c", "y = a / b ⋅ c"),
        ("a*(b/c)", "y = a ⋅ (b / c)"),
        ("(a + b)/c", "y = (a + b) / c"),
        ("a/(b/c)", "y = a / (b / c)"),
        ("-a*b/c", "y = −a ⋅ b / c"),
        ("a - (b - c)", "y = a − (b − c)"),
        ("(a*b)**2/c", "y = (a ⋅ b)² / c"),
        ("a**b**c", "y = a^(b^c)"),
        ("sqrt(a + b)*c", "y = √(a + b) ⋅ c"),
    ],
)
def test_the_plain_line_keeps_what_a_bar_held_together(text, line):
    w = Working()
    w.step("t", "y", text, {name: (value, "") for name, value in (("a", 3.0), ("b", 2.0), ("c", 0.5)) if name in text})
    assert plain(w.steps[0])[0] == line
