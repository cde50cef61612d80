"""The sheet in the terminal: 80 characters, the verdict first, every number of the working."""

from server.sheets import STANDING_CAUTION, terminal
from server.sheets.steps import working_groups
from server.sheets.values import utilisation
from server.working import Working
from tests.sheets import fixture


def flat(text: str) -> str:
    return " ".join(text.replace("\u00a0", " ").split())


def test_the_verdict_comes_first_and_every_line_fits():
    text = terminal(fixture.result())
    lines = text.splitlines()
    assert lines[0] == "FAIL   utilisation 1.09"
    assert lines[1].startswith("Deflection of the span 0 to 6000\u00a0mm: 1.09 of what is allowed")
    assert max(len(line) for line in lines) <= 80
    assert all(line == line.rstrip() for line in lines)


def test_the_parts_stand_in_the_readers_order():
    text = terminal(fixture.result())
    titles = ["JOINTS", "PIECES", "DEFLECTION", "WHAT IS MISSING", "CAUTIONS", "WORKING", "NOT CHECKED"]
    places = [text.index(f"\n{title}\n") for title in titles]
    assert places == sorted(places)
    assert flat(STANDING_CAUTION) in flat(text)
    assert text.rstrip().endswith("bondwright 0.1.0")


def test_numbers_of_the_result_are_in_it():
    text = flat(terminal(fixture.result()))
    for number in ("17.77", "0.2538", "0.326 MPa", "1.09 !", "0.7614", "−10.3", "21.89", "4.6966×10¹² N·mm²"):
        assert number in text
    assert "q = c_s ⋅ V ⋅ S / EI = 0.5 ⋅ 14 600 ⋅ 1.14345×10¹⁰ / (4.69665×10¹²) = 17.773 N/mm" in text
    assert "[answer before issue]" in text


def test_inch_pound_display_has_no_metric_result():
    text = flat(terminal(fixture.result(), "US"))
    assert "101.5" in text, "17.77 N/mm is 101.5 lbf/in"
    assert (
        "Deflection of the span 0 to 236.2 in: 1.09 of what is allowed, 114.1 in from the left end, combination all"
        in text
    )
    table = text[text.index("JOINTS") : text.index("CAUTIONS")]
    assert "N/mm" not in table
    assert "MPa" not in table


def test_long_names_wrap_inside_their_columns():
    result = fixture.result()
    result["joints"][0]["id"] = "a very long name of a piece without end/" + "x" * 60
    result["joints"][0]["limits"][0]["combination"] = "combination " * 8
    text = terminal(result)
    assert max(len(line) for line in text.splitlines()) <= 80
    assert "x" * 20 not in text.replace("\n", "") or text.count("x") >= 60


def test_an_empty_result_is_said_and_not_a_failure():
    text = terminal(
        {"verdict": "not proven", "utilisation": None, "governing": "nothing could be judged", "missing": ["all"]}
    )
    assert text.startswith("NOT PROVEN\nNothing could be judged\n")


def test_a_rounding_never_hides_an_excess():
    assert utilisation(1.0004) == "1.0004"
    assert utilisation(0.9996) == "0.9996"
    assert utilisation(1.0) == "1.00"
    assert utilisation(1 + 1e-9) == "just above 1"
    assert utilisation(1 - 1e-9) == "just below 1"
    assert utilisation(1 + 1e-15) == utilisation(1 - 1e-15) == "1.00"  # last bits of a division
    assert utilisation(0.778) == "0.78"
    assert utilisation(None) == "–"


def twin_steps(width: float):
    w = Working()
    for name in ("L", "R"):
        w.begin(f"Joint {name}")
        for symbol in "abcd":
            w.step(f"of web {name}", symbol, "q/b", {"q": (3.0, ""), "b": (width if name == "R" else 2.0, "")})
    return w.steps


def test_a_group_with_the_same_numbers_is_named_instead_of_repeated():
    first, second = working_groups(twin_steps(2.0))
    assert (first.first, first.same) == (1, "")
    assert second.same == "Steps 5 to 8: formula for formula and number for number those of Joint L (1 to 4)."


def test_a_group_with_other_numbers_is_printed():
    assert [group.same for group in working_groups(twin_steps(2.0000001))] == ["", ""]
